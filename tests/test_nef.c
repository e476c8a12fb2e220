/* NEF 1.1 by its published dictionary (Gutmanas et al., Nature Struct. Mol. Biol. 22 (2015) 433), typed from memory. */
#include <math.h>
#include <zlib.h>

#include "given_text.h"

#define SEQUENCE                                                                                                                     \
    "data_x\nsave_s\n_nef_molecular_system.sf_category nef_molecular_system\nloop_\n_nef_sequence.residue_name\n_nef_sequence.chain_code\n" \
    "_nef_sequence.sequence_code\n_nef_sequence.linking\n_nef_sequence.residue_variant\n_nef_sequence.cis_peptide\n"                  \
    "MET A 1 start . .\nVAL A 2 middle . .\nPHE A 3 middle . .\nSER A 4 middle . true\nPRO A 5 middle . .\nHIS A 6 middle -HE2 .\nLEU A 7 end . .\n"      \
    "GLY B 1 single . .\nstop_\nsave_\n"
#define DISTANCES(columns, rows)                                                                                                    \
    "save_list_one\n_nef_distance_restraint_list.sf_category nef_distance_restraint_list\nloop_\n_nef_distance_restraint.restraint_id\n" \
    "_nef_distance_restraint.chain_code_1\n_nef_distance_restraint.sequence_code_1\n_nef_distance_restraint.residue_name_1\n"        \
    "_nef_distance_restraint.atom_name_1\n_nef_distance_restraint.chain_code_2\n_nef_distance_restraint.sequence_code_2\n"           \
    "_nef_distance_restraint.residue_name_2\n_nef_distance_restraint.atom_name_2\n" columns rows "\nstop_\nsave_\n"
#define LIMITS "_nef_distance_restraint.lower_limit\n_nef_distance_restraint.upper_limit\n"

Test(nef, sequence_gives_ends_variants_chains_and_cis_peptides) {
    tml_problem *problem = read_good(SEQUENCE);
    const tml_molecule *molecule = &problem->molecule;
    cr_assert_eq(molecule->residue_count, 8);
    cr_assert_eq(molecule->chain_count, 2);
    atom_at(problem, "A", "1", "H3");
    atom_at(problem, "A", "7", "OXT");
    atom_at(problem, "B", "1", "OXT");
    cr_assert_lt(tml_molecule_find_atom(molecule, tml_molecule_find_residue(molecule, "A", "6"), "HE2"), 0);
    int32_t cis = 0;
    for (int32_t i = 0; i < molecule->peptide_count; i++)
        if (molecule->peptides[i].cis) cis = molecule->residues[molecule->peptides[i].residue2].sequence;
    cr_assert_eq(cis, 5);
    tml_problem_free(problem);
}

Test(nef, rows_of_one_id_are_alternatives_and_limits_may_be_missing) {
    tml_problem *problem = read_good(SEQUENCE DISTANCES(LIMITS, "7 A 1 MET HA A 2 VAL H 1.8 .\n8 A 1 MET HA A 3 PHE H . 5\n7 A 1 MET HA A 4 SER H 1.8 .\n"));
    cr_assert_eq(problem->restraints.distance_count, 2);
    const tml_distance_restraint *first = &problem->restraints.distances[0];
    cr_assert_str_eq(first->id, "7");
    cr_assert_str_eq(first->list, "list_one");
    cr_assert_eq(first->alternative_count, 2);
    cr_assert(isinf(first->upper));
    cr_assert_eq(first->range, TML_RANGE_SEQUENTIAL, "the nearest alternative counts");
    cr_assert_eq(problem->restraints.distances[1].lower, 0);
    tml_problem_free(problem);
}

Test(nef, rows_of_one_combination_hold_together) {
    tml_problem *problem = read_good(SEQUENCE DISTANCES("_nef_distance_restraint.restraint_combination_id\n" LIMITS,
                                                        "1 A 1 MET HA A 2 VAL H a 1 3\n1 A 1 MET HA A 3 PHE H a 1 3\n1 A 1 MET HA A 4 SER H b 1 3\n"));
    const tml_distance_restraint *restraint = &problem->restraints.distances[0];
    const tml_alternative *alternatives = problem->restraints.alternatives;
    cr_assert(restraint->combined);
    cr_assert_eq(alternatives[0].combination, alternatives[1].combination);
    cr_assert_neq(alternatives[0].combination, alternatives[2].combination);
    tml_problem_free(problem);
}

Test(nef, a_combination_goes_as_a_whole_wherever_its_missing_atom_stands) {
    static const char *const ROWS[] = {
        "1 A 1 MET HA A 2 VAL NO a 1 3\n1 A 1 MET HA A 3 PHE H a 1 3\n1 A 1 MET HA A 4 SER H b 1 3\n",
        "1 A 1 MET HA A 3 PHE H a 1 3\n1 A 1 MET HA A 2 VAL NO a 1 3\n1 A 1 MET HA A 4 SER H b 1 3\n",
        "1 A 1 MET HA A 4 SER H b 1 3\n1 A 1 MET HA A 3 PHE H a 1 3\n1 A 1 MET HA A 2 VAL NO a 1 3\n",
    };
    for (size_t i = 0; i < sizeof ROWS / sizeof *ROWS; i++) {
        char text[4096];
        snprintf(text, sizeof text, SEQUENCE DISTANCES("_nef_distance_restraint.restraint_combination_id\n" LIMITS, "%s"), ROWS[i]);
        tml_problem *problem = read_good(text);
        cr_assert_eq(problem->restraints.distance_count, 1);
        const tml_distance_restraint *restraint = &problem->restraints.distances[0];
        cr_assert_eq(restraint->alternative_count, 1);
        const tml_alternative *kept = &problem->restraints.alternatives[restraint->first_alternative];
        cr_assert_eq(problem->restraints.group_atoms[kept->first_b], atom_at(problem, "A", "4", "H"));
        cr_assert_eq(problem->note_count, 1);
        cr_assert_not_null(strstr(problem->notes[0].text, "2 of its 3 alternatives"), "%s", problem->notes[0].text);
        tml_problem_free(problem);
    }
}

Test(nef, linear_limits_and_targets_stand_in_for_missing_limits) {
    tml_problem *problem = read_good(SEQUENCE DISTANCES(
        LIMITS "_nef_distance_restraint.lower_linear_limit\n_nef_distance_restraint.upper_linear_limit\n_nef_distance_restraint.target_value\n"
               "_nef_distance_restraint.target_value_uncertainty\n_nef_distance_restraint.weight\n",
        "1 A 1 MET HA A 2 VAL H . . 2 4 . . .\n2 A 1 MET HA A 2 VAL H . . . . 3 0.5 2\n3 A 1 MET HA A 2 VAL H . . . . . . .\n"));
    cr_assert_eq(problem->restraints.distance_count, 2, "a row without any limit is left out");
    cr_assert_eq(problem->restraints.distances[0].upper, 4);
    cr_assert_float_eq(problem->restraints.distances[1].lower, 2.5, 1e-9);
    cr_assert_eq(problem->restraints.distances[1].weight, 2);
    cr_assert_geq(problem->note_count, 2);
    tml_problem_free(problem);
}

static int32_t pairs_of(const char *rows) {
    char text[8192];
    snprintf(text, sizeof text, "%s%s%s%s", SEQUENCE DISTANCES(LIMITS, "0 A 1 MET HA A 2 VAL H 1 5\n"), "", "", "");
    char *at = strstr(text, "0 A 1 MET HA");
    snprintf(at, sizeof text - (size_t)(at - text), "%s\nstop_\nsave_\n", rows);
    tml_problem *problem = read_good(text);
    int32_t pairs = problem->restraints.distance_count == 1 ? problem->restraints.distances[0].pair_count : -problem->restraints.unmapped_count;
    tml_problem_free(problem);
    return pairs;
}

/* Numbers of atoms from the residues' formulas; NEF's rules for % and *, x and y; pseudo-atoms of Markley et al. 1998. */
Test(names, wildcards_pairs_and_pseudo_atoms_mean_their_groups) {
    static const struct { const char *row; int32_t pairs; } CASES[] = {
        {"1 A 2 VAL HG% A 3 PHE HA 1 5", 6},   {"1 A 2 VAL HG1% A 3 PHE HA 1 5", 3}, {"1 A 3 PHE HD% A 3 PHE HA 1 5", 2},
        {"1 A 2 VAL HGx% A 3 PHE HA 1 5", 6},  {"1 A 1 MET HBx A 3 PHE HA 1 5", 2},  {"1 A 7 LEU HDy% A 3 PHE HA 1 5", 6},
        {"1 A 7 LEU HD% A 2 VAL HG% 1 5", 36}, {"1 A 2 VAL CGx A 3 PHE HA 1 5", 2},  {"1 A 2 VAL QG A 3 PHE HA 1 5", 6},
        {"1 A 1 MET ME A 3 PHE HA 1 5", 3},    {"1 A 3 PHE QR A 2 VAL HA 1 5", 5},   {"1 A 3 PHE HN A 2 VAL HA 1 5", 1},
        {"1 A 1 MET H A 2 VAL HA 1 5", 1},     {"1 A 1 MET HB% A 1 MET HB% 1 5", 2}, {"1 A 1 MET H% A 3 PHE HA 1 5", 3},
        {"1 A 2 VAL C* A 3 PHE HA 1 5", 5},
    };
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++)
        cr_assert_eq(pairs_of(CASES[i].row), CASES[i].pairs, "%s: %d pairs", CASES[i].row, pairs_of(CASES[i].row));
}

Test(names, what_is_not_there_is_unmapped_with_the_nearest_names) {
    tml_problem *problem = read_good(SEQUENCE DISTANCES(LIMITS, "1 A 4 SER HB1 A 2 VAL H 1 5\n2 A 4 THR HA A 2 VAL H 1 5\n3 A 40 SER HA A 2 VAL H 1 5\n"
                                                                "4 A 1 MET HA A 2 VAL H 1 5\n4 A 1 MET HQ A 2 VAL H 1 5\n"));
    cr_assert_eq(problem->restraints.unmapped_count, 3);
    cr_assert_not_null(strstr(problem->restraints.unmapped[0].reason, "HB2, HB3"), "%s", problem->restraints.unmapped[0].reason);
    cr_assert_not_null(strstr(problem->restraints.unmapped[1].reason, "SER"), "%s", problem->restraints.unmapped[1].reason);
    cr_assert_not_null(strstr(problem->restraints.unmapped[2].reason, "40"), "%s", problem->restraints.unmapped[2].reason);
    cr_assert_eq(problem->restraints.distance_count, 1, "the other alternative of 4 stands");
    tml_problem_free(problem);
}

Test(nef, ranges_are_told_by_sequence_and_chain) {
    tml_problem *problem = read_good(SEQUENCE DISTANCES(LIMITS, "1 A 1 MET HA A 1 MET H2 1 5\n2 A 1 MET HA A 2 VAL H 1 5\n3 A 1 MET HA A 5 PRO HA 1 5\n"
                                                                "4 A 1 MET HA A 6 HIS H 1 5\n5 A 1 MET HA B 1 GLY HA2 1 5\n"));
    for (int k = 0; k < 5; k++) cr_assert_eq((int)problem->restraints.distances[k].range, k);
    tml_problem_free(problem);
}

Test(nef, lists_of_other_kinds_are_counted_and_named) {
    tml_problem *problem = read_good(SEQUENCE "save_c\nloop_\n_nef_chemical_shift.value\n1 2 3\nstop_\nloop_\n_other_program.x\n1\nstop_\nsave_\n");
    cr_assert_eq(problem->note_count, 2);
    cr_assert_str_eq(problem->notes[0].text, "3 chemical shifts are not used");
    cr_assert_not_null(strstr(problem->notes[1].text, "_other_program"));
    tml_problem_free(problem);
}

Test(nef, mistakes_are_told_with_their_line) {
    read_bad("data_x\nloop_\n_nef_sequence.chain_code\nA\nstop_\n", 3, "sequence_code");
    read_bad(SEQUENCE DISTANCES(LIMITS, "1 A 1 MET HA A 2 VAL H 5 3\n"), 0, "below");
    read_bad(SEQUENCE DISTANCES(LIMITS, "1 A 1 MET HA A 2 VAL H abc 3\n"), 0, "number");
    read_bad(SEQUENCE DISTANCES(LIMITS, "1 A 1 MET HA A 2 VAL H 1e999 3\n"), 0, "number");
    read_bad(SEQUENCE DISTANCES(LIMITS, "1 A 1 MET HA A 2 VAL H -1 3\n"), 0, "-1");
    read_bad("data_x\n_cell.length_a 1\n", 1, "without NEF");
    read_bad("", 0, "empty");
    read_bad("hello world\n", 1, "hello world");
}

/* r⁻⁶ sums by hand: distances 2 and 4 Å give (2⁻⁶ + 4⁻⁶)^(-1/6) = 1.99482…; their average is 2⁻⁶+4⁻⁶ over 2. */
Test(restraints, sums_averages_and_violations_are_as_computed_by_hand) {
    tml_problem *problem = read_good("sheet 1\natom P bead\natom Q bead\natom R bead\nlimit P Q,R - 1.5 as sum\nlimit P R 5 - as low\nlimit P Q,R - 9 as mean average\n");
    const double xyz[9] = {0, 0, 0, 2, 0, 0, 0, 4, 0};
    const tml_restraints *restraints = &problem->restraints;
    double sum = pow(pow(2, -6) + pow(4, -6), -1.0 / 6), mean = pow((pow(2, -6) + pow(4, -6)) / 2, -1.0 / 6);
    cr_assert_float_eq(tml_restraint_distance(restraints, &restraints->distances[0], xyz), sum, 1e-12);
    cr_assert_float_eq(tml_restraint_distance(restraints, &restraints->distances[2], xyz), mean, 1e-12);
    cr_assert_float_eq(tml_distance_violation(restraints, &restraints->distances[0], xyz), sum - 1.5, 1e-12);
    cr_assert_float_eq(tml_distance_violation(restraints, &restraints->distances[1], xyz), -1.0, 1e-12);
    cr_assert_eq(tml_distance_violation(restraints, &restraints->distances[2], xyz), 0);
    tml_problem_free(problem);
}

Test(restraints, dihedral_violation_is_to_the_nearer_end_of_the_interval) {
    tml_problem *problem = read_good("sheet 1\natom P bead\natom Q bead\natom R bead\natom S bead\ndihedral P Q R S 170 -170\ndihedral P Q R S 30 40\n");
    const double degree = 3.14159265358979323846 / 180, angles[3] = {180, 150, -100}, first[3] = {0, 20, 70}, second[3] = {140, 110, 130};
    for (int k = 0; k < 3; k++) {
        /* The IUPAC sign: looking from Q to R, S turns clockwise from P by a positive angle. */
        const double xyz[12] = {1, 0, 0, 0, 0, 0, 0, 0, 1.5, cos(angles[k] * degree), sin(angles[k] * degree), 1.5};
        cr_assert_float_eq(tml_dihedral_violation(&problem->restraints, &problem->restraints.dihedrals[0], xyz), first[k] * degree, 1e-9, "%g", angles[k]);
        cr_assert_float_eq(tml_dihedral_violation(&problem->restraints, &problem->restraints.dihedrals[1], xyz), second[k] * degree, 1e-9, "%g", angles[k]);
    }
    tml_problem_free(problem);
}

Test(source, gzip_is_unpacked_and_broken_gzip_refused) {
    unsigned char packed[4096];
    z_stream stream = {.next_in = (unsigned char *)SEQUENCE, .avail_in = sizeof SEQUENCE - 1, .next_out = packed, .avail_out = sizeof packed};
    cr_assert_eq(deflateInit2(&stream, 6, Z_DEFLATED, 31, 8, Z_DEFAULT_STRATEGY), Z_OK);
    cr_assert_eq(deflate(&stream, Z_FINISH), Z_STREAM_END);
    size_t length = stream.total_out;
    deflateEnd(&stream);
    tml_problem *problem = NULL;
    tml_error error;
    cr_assert_eq(read_bytes((char *)packed, length, &problem, &error), TML_OK, "%s", error.message);
    cr_assert_eq(problem->molecule.residue_count, 8);
    tml_problem_free(problem);
    for (size_t cut = 3; cut < length; cut += 7) {
        cr_assert_eq(read_bytes((char *)packed, cut, &problem, &error), TML_BAD_INPUT, "%zu of %zu bytes", cut, length);
        cr_assert_null(problem);
    }
}

Test(source, binary_data_are_refused) {
    tml_problem *problem = NULL;
    tml_error error;
    cr_assert_eq(read_bytes("sheet 1\n\0atom", 13, &problem, &error), TML_BAD_INPUT);
    cr_assert_not_null(strstr(error.message, "binary"));
}

Test(nef, no_prefix_is_ever_more_than_refused) {
    static const char TEXT[] = SEQUENCE DISTANCES(LIMITS, "1 A 1 MET HA A 2 VAL HG% 1.8 5\n2 A 1 MET 'HB*' A 3 PHE QD . 5\n");
    for (size_t length = 0; length < sizeof TEXT; length++) {
        tml_problem *problem = NULL;
        tml_error error;
        tml_status status = read_bytes(TEXT, length, &problem, &error);
        cr_assert(status == TML_OK || status == TML_BAD_INPUT, "status %d after %zu bytes", status, length);
        cr_assert_eq(status == TML_OK, problem != NULL);
        cr_assert(status == TML_OK || error.message[0] != '\0');
        tml_problem_free(problem);
    }
}
