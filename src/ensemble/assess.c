#include "ensemble/assess.h"

#include <math.h>
#include <stdlib.h>

#include "base/memory.h"
#include "base/vector.h"

/* Contents: reading and matching - measuring - looking up */

static tml_status take_models(tml_assessment *a, tml_error *error);
static tml_status measure_model(tml_assessment *a, int32_t model, bool open, tml_error *error);

tml_status tml_assess(const tml_problem *problem, const char *path, tml_assessment **out, tml_error *error) {
    *out = NULL;
    tml_assessment *a = tml_alloc(1, sizeof *a);
    if (a == NULL) return tml_no_memory(error);
    a->problem = problem;
    tml_status status = tml_coordinates_read(path, &a->models, error);
    if (status == TML_OK) status = tml_sites_match(&problem->molecule, &a->models, &a->sites, error);
    if (status == TML_OK && a->sites.missing == problem->molecule.atom_count)
        status = tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, "none of its atoms is one of the inputs' molecule: chains, residue numbers and residue names have to agree");
    if (status == TML_OK) status = take_models(a, error);
    for (int32_t m = 0; status == TML_OK && m < a->model_count; m++) status = measure_model(a, m, problem->restraints.stereo_count > 0, error);
    if (status == TML_OK) status = tml_ensemble_superpose(a->ensemble, error);
    if (status != TML_OK) {
        tml_assessment_free(a);
        return status;
    }
    *out = a;
    return TML_OK;
}

void tml_assessment_free(tml_assessment *a) {
    if (a == NULL) return;
    tml_coordinates_clear(&a->models);
    tml_sites_clear(&a->sites);
    tml_ensemble_free(a->ensemble);
    free(a->distance);
    free(a->dihedral);
    free(a);
}

/* ---- reading and matching ---- */

static tml_status take_models(tml_assessment *a, tml_error *error) {
    const tml_problem *problem = a->problem;
    size_t models = (size_t)a->models.model_count, atoms = (size_t)problem->molecule.atom_count, cells;
    a->model_count = a->models.model_count;
    if (__builtin_mul_overflow(models, (size_t)problem->restraints.distance_count + (size_t)problem->restraints.dihedral_count + 3 * atoms, &cells) ||
        cells > tml_memory_available() / (2 * sizeof(double)))
        return tml_fail(error, TML_TOO_LARGE, "%zu models of %zu atoms need more memory than is free", models, atoms);
    a->distance = tml_alloc(models * (size_t)problem->restraints.distance_count, sizeof *a->distance);
    a->dihedral = tml_alloc(models * (size_t)problem->restraints.dihedral_count, sizeof *a->dihedral);
    a->ensemble = tml_alloc(1, sizeof *a->ensemble);
    if (a->distance == NULL || a->dihedral == NULL || a->ensemble == NULL) return tml_no_memory(error);
    *a->ensemble = (tml_ensemble){.problem = problem, .models = tml_alloc(models, sizeof(tml_model))};
    if (a->ensemble->models == NULL) return tml_no_memory(error);
    a->ensemble->model_count = a->model_count;
    for (size_t m = 0; m < models; m++) {
        tml_model *model = &a->ensemble->models[m];
        *model = (tml_model){.xyz = tml_alloc(3 * atoms, sizeof *model->xyz), .other_error = NAN, .images_apart = NAN};
        if (model->xyz == NULL) return tml_no_memory(error);
        tml_sites_place(&a->sites, &problem->molecule, &a->models, (int32_t)m, model->xyz);
    }
    return TML_OK;
}

/* ---- measuring ---- */

/* With open stereo pairs the model takes the assignment that it violates least; otherwise names with x and y mean both members. */
static tml_status measure_model(tml_assessment *a, int32_t index, bool open, tml_error *error) {
    const tml_restraints *restraints = &a->problem->restraints;
    tml_model *model = &a->ensemble->models[index];
    if (open) {
        model->swapped = tml_alloc((size_t)restraints->stereo_count, sizeof *model->swapped);
        if (model->swapped == NULL) return tml_no_memory(error);
        tml_stereo_choose(restraints, model->xyz, model->swapped);
    }
    for (int32_t i = 0; i < restraints->distance_count; i++)
        a->distance[(size_t)i * (size_t)a->model_count + (size_t)index] =
            fabs(tml_distance_violation(restraints, &restraints->distances[i], model->swapped, model->xyz));
    for (int32_t i = 0; i < restraints->dihedral_count; i++)
        a->dihedral[(size_t)i * (size_t)a->model_count + (size_t)index] =
            tml_dihedral_violation(restraints, &restraints->dihedrals[i], model->xyz) * 180.0 / TML_PI;
    return tml_measure(a->problem, model->swapped, model->xyz, &model->measures, error);
}

/* ---- looking up ---- */

int32_t tml_assessment_models(const tml_assessment *assessment) {
    return assessment->model_count;
}

double tml_assessment_distance(const tml_assessment *assessment, int32_t restraint, int32_t model) {
    bool inside = restraint >= 0 && restraint < assessment->problem->restraints.distance_count && model >= 0 && model < assessment->model_count;
    return inside ? assessment->distance[(size_t)restraint * (size_t)assessment->model_count + (size_t)model] : NAN;
}

double tml_assessment_dihedral(const tml_assessment *assessment, int32_t restraint, int32_t model) {
    bool inside = restraint >= 0 && restraint < assessment->problem->restraints.dihedral_count && model >= 0 && model < assessment->model_count;
    return inside ? assessment->dihedral[(size_t)restraint * (size_t)assessment->model_count + (size_t)model] : NAN;
}

const tml_measures *tml_assessment_measures(const tml_assessment *assessment, int32_t model) {
    return model >= 0 && model < assessment->model_count ? &assessment->ensemble->models[model].measures : NULL;
}
