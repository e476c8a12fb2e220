/* assessment_json.c: the report on given models, for programs. Keys and their meaning are fixed; others may be added. */
#include <math.h>

#include "base/vector.h"
#include "ensemble/assess.h"
#include "output/output.h"
#include "output/values.h"
#include "output/words.h"

static json_t *violations(const double *violation, int32_t models) {
    json_t *list = json_array();
    for (int32_t m = 0; m < models; m++) tml_json_append(&list, tml_json_rounded(violation[m]));
    return list;
}

static void put_place(json_t **item, const tml_problem *problem, tml_place place) {
    bool known = place.file >= 0 && (size_t)place.file < problem->file_count;
    tml_json_put(item, "file", known ? tml_json_text(problem->files[place.file]) : json_null());
    tml_json_put(item, "line", place.line > 0 ? json_integer(place.line) : json_null());
}

static json_t *distance_json(const tml_assessment *a, int32_t i) {
    const tml_distance_restraint *at = &a->problem->restraints.distances[i];
    json_t *item = json_pack("{s:o, s:o, s:s, s:s, s:o, s:o, s:o}", "list", tml_json_text(at->list), "id", tml_json_text(at->id), "kind",
                             "distance", "range", tml_range_words[at->range], "lower", at->lower > 0 ? tml_json_number(at->lower) : json_null(),
                             "upper", tml_json_number(at->upper), "violation",
                             violations(&a->distance[(size_t)i * (size_t)a->model_count], a->model_count));
    put_place(&item, a->problem, at->place);
    return item;
}

/* Limits of the first interval; all of them stand in `intervals`. */
static json_t *dihedral_json(const tml_assessment *a, int32_t i) {
    const double degrees = 180.0 / TML_PI;
    const tml_restraints *restraints = &a->problem->restraints;
    const tml_dihedral_restraint *at = &restraints->dihedrals[i];
    json_t *intervals = json_array();
    for (int32_t k = at->first_interval; k < at->first_interval + at->interval_count; k++)
        tml_json_append(&intervals, json_pack("[o, o]", tml_json_rounded(restraints->intervals[k].lower * degrees),
                                              tml_json_rounded(restraints->intervals[k].upper * degrees)));
    const tml_dihedral_interval *first = &restraints->intervals[at->first_interval];
    json_t *item = json_pack("{s:o, s:o, s:s, s:o, s:o, s:o, s:o}", "list", tml_json_text(at->list), "id", tml_json_text(at->id), "kind",
                             "dihedral", "lower", tml_json_rounded(first->lower * degrees), "upper",
                             tml_json_rounded(first->upper * degrees), "intervals", intervals, "violation",
                             violations(&a->dihedral[(size_t)i * (size_t)a->model_count], a->model_count));
    put_place(&item, a->problem, at->place);
    return item;
}

static json_t *model_json(const tml_assessment *a, int32_t index) {
    const tml_measures *of = &a->ensemble->models[index].measures;
    json_t *item = json_pack("{s:i, s:o, s:o, s:o, s:o, s:i, s:i, s:i, s:i}", "model", index + 1, "bond_rms", tml_json_rounded(of->bond_rms),
                             "bond_max", tml_json_rounded(of->bond_max), "angle_rms", tml_json_rounded(of->angle_rms), "plane_max",
                             tml_json_rounded(of->plane_max), "wrong_handed", of->wrong_handed, "swapped_names", of->swapped_names,
                             "cis_not_pro", of->cis_undeclared, "omega_off", of->omega_off);
    tml_json_put(&item, "overlaps", json_integer(of->overlaps));
    tml_json_put(&item, "backbone_usual", tml_json_rounded(of->backbone_usual));
    tml_json_put(&item, "alike_rms", tml_json_rounded(of->alike_rms));
    return item;
}

static json_t *totals_json(const tml_assessment *a, int32_t index) {
    const tml_measures *of = &a->ensemble->models[index].measures;
    return json_pack("{s:i, s:i, s:i, s:i, s:o, s:o, s:i, s:i, s:o}", "model", index + 1, "over_0.1", of->distance_over_01, "over_0.2",
                     of->distance_over_02, "over_0.5", of->distance_over_05, "distance_max", tml_json_rounded(of->distance_max),
                     "distance_rms", tml_json_rounded(of->distance_rms), "dihedral_over_5", of->dihedral_over_5, "dihedral_over_10",
                     of->dihedral_over_10, "dihedral_max", tml_json_rounded(of->dihedral_max));
}

tml_status tml_write_assessment_json(const tml_assessment *a, const char *path, tml_error *error) {
    const tml_problem *problem = a->problem;
    const tml_molecule *molecule = &problem->molecule;
    json_t *restraints = json_array(), *geometry = json_array(), *totals = json_array(), *defined = json_array();
    for (int32_t i = 0; i < problem->restraints.distance_count; i++) tml_json_append(&restraints, distance_json(a, i));
    for (int32_t i = 0; i < problem->restraints.dihedral_count; i++) tml_json_append(&restraints, dihedral_json(a, i));
    for (int32_t m = 0; m < a->model_count; m++) {
        tml_json_append(&geometry, model_json(a, m));
        tml_json_append(&totals, totals_json(a, m));
    }
    for (int32_t r = 0; a->model_count > 1 && r < molecule->residue_count; r++) {
        char text[256];
        if (!a->ensemble->well_defined[r]) continue;
        snprintf(text, sizeof text, "%s:%s", molecule->residues[r].chain, molecule->residues[r].number);
        tml_json_append(&defined, tml_json_text(text));
    }
    json_t *atoms = json_pack("{s:i, s:i, s:i, s:i}", "in_problem", molecule->atom_count, "missing", a->sites.missing, "not_in_problem",
                              a->sites.left, "residues_of_other_name", a->sites.other_residues);
    json_t *root = json_pack("{s:s, s:s, s:i, s:o, s:o, s:o, s:o, s:o, s:i}", "program", "trammel", "version", TML_VERSION, "models",
                             a->model_count, "atoms", atoms, "restraints", restraints, "violations", totals, "geometry", geometry,
                             "well_defined", defined, "unmapped", problem->restraints.unmapped_count);
    return tml_json_write(root, path, error);
}
