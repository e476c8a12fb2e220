#include <criterion/criterion.h>
#include <math.h>

#include "bounds/bounds.h"
#include "ensemble/ensemble.h"

/* Two bare atoms, one restraint, one note, one unmapped restraint; all of it static, so nothing is freed. */
static tml_atom atoms[] = {{.name = "A"}, {.name = "B"}};
static tml_residue residues[] = {{.chain = "", .number = "", .name = "", .atom_count = 2}};
static tml_distance_restraint distances[] = {{.list = "list", .id = "7", .place = {0, 12, 3}}};
static tml_dihedral_restraint dihedrals[] = {{.list = "turns", .id = "phi", .place = {0, 20, 1}}};
static tml_unmapped unmapped[] = {{.list = "list", .id = "8", .reason = "C: no such atom", .place = {0, 13, 9}}};
static tml_note notes[] = {{"a remark", {-1, 0, 0}}};
static const char *files[] = {"set.sheet"};
static const tml_problem problem = {
    .files = files,
    .file_count = 1,
    .molecule = {.atoms = atoms, .atom_count = 2, .residues = residues, .residue_count = 1},
    .restraints = {.distances = distances, .distance_count = 1, .dihedrals = dihedrals, .dihedral_count = 1, .unmapped = unmapped,
                   .unmapped_count = 1},
    .notes = notes,
    .note_count = 1};

Test(api, problems_tell_their_counts_names_and_remarks) {
    tml_counts counts;
    tml_problem_count(&problem, &counts);
    cr_assert(counts.atoms == 2 && counts.residues == 1 && counts.distance_restraints == 1 && counts.dihedral_restraints == 1);
    cr_assert(counts.unmapped == 1 && counts.notes == 1);
    cr_assert_str_eq(tml_problem_title(&problem), "");
    tml_origin origin;
    cr_assert_str_eq(tml_problem_note(&problem, 0, &origin), "a remark");
    cr_assert(origin.file[0] == '\0' && origin.line == 0);
    cr_assert_str_eq(tml_problem_unmapped(&problem, 0, &origin), "C: no such atom");
    cr_assert(strcmp(origin.file, "set.sheet") == 0 && origin.line == 13 && origin.column == 9);
    char text[8];
    tml_problem_atom(&problem, 1, text, sizeof text);
    cr_assert_str_eq(text, "B");
}

Test(api, indexes_past_the_end_are_refused_everywhere) {
    char text[8] = "x";
    tml_conflict conflict;
    tml_conflict_step step;
    tml_model_facts facts;
    double lower, upper;
    tml_contradictions *found = tml_contradictions_new();
    tml_ensemble ensemble = {.problem = &problem};
    tml_bounds *bounds = NULL;
    cr_assert_eq(tml_bounds_new(2, &bounds, NULL), TML_OK);
    for (int32_t index = -1; index < 3; index += 3) {
        tml_problem_atom(&problem, index, text, sizeof text);
        cr_assert_str_eq(text, "");
        cr_assert_null(tml_problem_note(&problem, index, NULL));
        cr_assert_null(tml_problem_unmapped(&problem, index, NULL));
        cr_assert_not(tml_bounds_pair(bounds, index, 0, &lower, &upper));
        cr_assert_not(tml_bounds_pair(bounds, 0, index, &lower, &upper));
        cr_assert_not(tml_contradictions_get(found, index, &conflict));
        cr_assert_not(tml_contradictions_step(found, &problem, index, 0, &step));
        cr_assert_not(tml_ensemble_model(&ensemble, index, &facts));
        cr_assert_null(tml_ensemble_coordinates(&ensemble, index));
        cr_assert_null(tml_ensemble_measures(&ensemble, index));
    }
    tml_bounds_free(bounds);
    tml_contradictions_free(found);
    tml_contradictions_free(NULL);
}

Test(api, limits_are_given_lower_and_upper_in_either_order) {
    tml_bounds *bounds = NULL;
    cr_assert_eq(tml_bounds_new(2, &bounds, NULL), TML_OK);
    *tml_bounds_cell(bounds, 0, 1) = 5.0f;
    *tml_bounds_cell(bounds, 1, 0) = 3.0f;
    for (int32_t i = 0; i < 2; i++) {
        double lower = 0.0, upper = 0.0;
        cr_assert(tml_bounds_pair(bounds, i, 1 - i, &lower, &upper));
        cr_assert(lower == 3.0 && upper == 5.0);
    }
    tml_bounds_free(bounds);
}

Test(api, steps_of_a_proof_name_their_restraint_or_their_chemistry) {
    tml_step steps[] = {{0, 1, {0, 1, 6.0, TML_REASON_RESTRAINT, false, false, 0}},
                        {1, 0, {0, 1, 4.0, TML_REASON_BOND, true, false, -1}},
                        {0, 1, {0, 1, 4.0, TML_REASON_DIHEDRAL, true, false, 0}}};
    tml_contradiction item = {steps, 3, 2.0, true};
    const tml_contradictions found = {&item, 1, 1};
    tml_conflict conflict;
    tml_conflict_step step;
    cr_assert(tml_contradictions_count(&found) == 1 && tml_contradictions_get(&found, 0, &conflict));
    cr_assert(conflict.excess == 2.0 && conflict.conditional && conflict.step_count == 3);
    cr_assert(tml_contradictions_step(&found, &problem, 0, 0, &step));
    cr_assert(strcmp(step.kind, "restraint") == 0 && strcmp(step.id, "7") == 0 && step.origin.line == 12 && !step.is_upper);
    cr_assert(tml_contradictions_step(&found, &problem, 0, 1, &step));
    cr_assert(strcmp(step.kind, "bond") == 0 && step.id[0] == '\0' && step.origin.line == 0 && step.is_upper);
    cr_assert(tml_contradictions_step(&found, &problem, 0, 2, &step));
    cr_assert(strcmp(step.kind, "dihedral") == 0 && strcmp(step.list, "turns") == 0 && step.origin.line == 20);
    cr_assert_not(tml_contradictions_step(&found, &problem, 0, 3, &step));
}
