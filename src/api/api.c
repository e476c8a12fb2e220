/* api.c: the part of the public interface that only looks things up: what stands in problems, limits, contradictions and
 * ensembles, for callers to whom they are opaque. What does work is public in its own room.
 *
 *   problems         counts, names, notes
 *   limits           one pair
 *   contradictions   proofs, step by step
 *   ensembles        models, coordinates, measures, files
 *   comparing        files to coordinates to figures
 */
#include <stdlib.h>

#include "bounds/bounds.h"
#include "ensemble/compare.h"
#include "ensemble/ensemble.h"
#include "output/output.h"

/* ---- problems ---- */

void tml_problem_count(const tml_problem *problem, tml_counts *counts) {
    *counts = (tml_counts){.atoms = problem->molecule.atom_count,
                           .residues = problem->molecule.residue_count,
                           .chains = problem->molecule.chain_count,
                           .distance_restraints = problem->restraints.distance_count,
                           .dihedral_restraints = problem->restraints.dihedral_count,
                           .unmapped = problem->restraints.unmapped_count,
                           .notes = (int32_t)problem->note_count};
}

const char *tml_problem_title(const tml_problem *problem) {
    return problem->title == NULL ? "" : problem->title;
}

void tml_problem_atom(const tml_problem *problem, int32_t atom, char *text, size_t size) {
    if (size == 0) return;
    text[0] = '\0';
    if (atom >= 0 && atom < problem->molecule.atom_count) tml_molecule_address(&problem->molecule, atom, text, size);
}

static tml_origin origin_of(const tml_problem *problem, tml_place place) {
    bool known = place.file >= 0 && (size_t)place.file < problem->file_count;
    return (tml_origin){known ? problem->files[place.file] : "", place.line, place.column};
}

const char *tml_problem_note(const tml_problem *problem, int32_t index, tml_origin *origin) {
    if (index < 0 || (size_t)index >= problem->note_count) return NULL;
    if (origin != NULL) *origin = origin_of(problem, problem->notes[index].place);
    return problem->notes[index].text;
}

const char *tml_problem_unmapped(const tml_problem *problem, int32_t index, tml_origin *origin) {
    if (index < 0 || index >= problem->restraints.unmapped_count) return NULL;
    if (origin != NULL) *origin = origin_of(problem, problem->restraints.unmapped[index].place);
    return problem->restraints.unmapped[index].reason;
}

/* ---- limits ---- */

bool tml_bounds_pair(const tml_bounds *bounds, int32_t atom_1, int32_t atom_2, double *lower, double *upper) {
    if (atom_1 < 0 || atom_2 < 0 || atom_1 >= bounds->n || atom_2 >= bounds->n) return false;
    *lower = tml_bounds_lower(bounds, atom_1, atom_2);
    *upper = tml_bounds_upper(bounds, atom_1, atom_2);
    return true;
}

/* ---- contradictions ---- */

tml_contradictions *tml_contradictions_new(void) {
    return tml_alloc(1, sizeof(tml_contradictions));
}

void tml_contradictions_free(tml_contradictions *found) {
    if (found == NULL) return;
    tml_contradictions_clear(found);
    free(found);
}

int32_t tml_contradictions_count(const tml_contradictions *found) {
    return (int32_t)found->count;
}

bool tml_contradictions_get(const tml_contradictions *found, int32_t index, tml_conflict *conflict) {
    if (index < 0 || (size_t)index >= found->count) return false;
    const tml_contradiction *item = &found->items[index];
    *conflict = (tml_conflict){item->excess, item->conditional, (int32_t)item->step_count};
    return true;
}

bool tml_contradictions_step(const tml_contradictions *found, const tml_problem *problem, int32_t index, int32_t step,
                             tml_conflict_step *out) {
    if (index < 0 || (size_t)index >= found->count) return false;
    if (step < 0 || (size_t)step >= found->items[index].step_count) return false;
    const tml_step *at = &found->items[index].steps[step];
    *out = (tml_conflict_step){.atom_1 = at->atom_1,
                               .atom_2 = at->atom_2,
                               .is_upper = at->given.is_upper,
                               .value = at->given.value,
                               .kind = tml_reason_name(at->given.reason),
                               .list = "",
                               .id = "",
                               .origin = {.file = ""}};
    if (at->given.source < 0) return true;
    if (at->given.reason == TML_REASON_RESTRAINT) {
        const tml_distance_restraint *restraint = &problem->restraints.distances[at->given.source];
        out->list = restraint->list;
        out->id = restraint->id;
        out->origin = origin_of(problem, restraint->place);
    } else if (at->given.reason == TML_REASON_DIHEDRAL) {
        const tml_dihedral_restraint *restraint = &problem->restraints.dihedrals[at->given.source];
        out->list = restraint->list;
        out->id = restraint->id;
        out->origin = origin_of(problem, restraint->place);
    }
    return true;
}

/* ---- ensembles ---- */

int32_t tml_ensemble_count(const tml_ensemble *ensemble) {
    return ensemble->model_count;
}

int32_t tml_ensemble_trials(const tml_ensemble *ensemble) {
    return ensemble->trials;
}

int32_t tml_ensemble_passed(const tml_ensemble *ensemble) {
    return ensemble->passed;
}

static const tml_model *model_at(const tml_ensemble *ensemble, int32_t index) {
    return index < 0 || index >= ensemble->model_count ? NULL : &ensemble->models[index];
}

bool tml_ensemble_model(const tml_ensemble *ensemble, int32_t index, tml_model_facts *facts) {
    const tml_model *model = model_at(ensemble, index);
    if (model == NULL) return false;
    *facts = (tml_model_facts){model->trial, model->error, model->passed, model->mirrored};
    return true;
}

const double *tml_ensemble_coordinates(const tml_ensemble *ensemble, int32_t index) {
    const tml_model *model = model_at(ensemble, index);
    return model == NULL ? NULL : model->xyz;
}

const tml_measures *tml_ensemble_measures(const tml_ensemble *ensemble, int32_t index) {
    const tml_model *model = model_at(ensemble, index);
    return model == NULL ? NULL : &model->measures;
}

tml_status tml_ensemble_write(const tml_ensemble *ensemble, const tml_contradictions *found, const char *path,
                              tml_error *error) {
    bool compressed;
    const tml_contradictions none = {0};
    tml_format format = tml_format_of(path, &compressed);
    if (format == TML_FORMAT_UNKNOWN)
        return tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, "the name does not end in .pdb, .cif, .pdb.gz or .cif.gz");
    return tml_write_models(ensemble, found == NULL ? &none : found, path, format, compressed, error);
}

/* ---- comparing ---- */

tml_status tml_compare(const char *models, const char *reference, const tml_compare_options *options, const tml_watch *watch,
                       tml_comparison **out, tml_error *error) {
    tml_coordinates read = {0}, other = {0};
    *out = NULL;
    tml_status status = tml_coordinates_read(models, &read, error);
    if (status == TML_OK && reference != NULL) status = tml_coordinates_read(reference, &other, error);
    if (status == TML_OK) status = tml_compare_coordinates(&read, reference == NULL ? NULL : &other, options, watch, out, error);
    tml_coordinates_clear(&read);
    tml_coordinates_clear(&other);
    return status;
}
