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
    read_bad("data_x\n_cell.length_a 1\n", 1, "without sequence");
    read_bad("", 0, "empty");
    read_bad("hello world\n", 1, "hello world");
}

/* r⁻⁶ sums by hand: distances 2 and 4 Å give (2⁻⁶ + 4⁻⁶)^(-1/6) = 1.99482…; their average is 2⁻⁶+4⁻⁶ over 2. */
Test(restraints, sums_averages_and_violations_are_as_computed_by_hand) {
    tml_problem *problem = read_good("sheet 1\natom P bead\natom Q bead\natom R bead\nlimit P Q,R - 1.5 as sum\nlimit P R 5 - as low\nlimit P Q,R - 9 as mean average\n");
    const double xyz[9] = {0, 0, 0, 2, 0, 0, 0, 4, 0};
    const tml_restraints *restraints = &problem->restraints;
    double sum = pow(pow(2, -6) + pow(4, -6), -1.0 / 6), mean = pow((pow(2, -6) + pow(4, -6)) / 2, -1.0 / 6);
    cr_assert_float_eq(tml_restraint_distance(restraints, &restraints->distances[0], NULL, xyz), sum, 1e-12);
    cr_assert_float_eq(tml_restraint_distance(restraints, &restraints->distances[2], NULL, xyz), mean, 1e-12);
    cr_assert_float_eq(tml_distance_violation(restraints, &restraints->distances[0], NULL, xyz), sum - 1.5, 1e-12);
    cr_assert_float_eq(tml_distance_violation(restraints, &restraints->distances[1], NULL, xyz), -1.0, 1e-12);
    cr_assert_eq(tml_distance_violation(restraints, &restraints->distances[2], NULL, xyz), 0);
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

/* ---- texts ---- */

#define MOLECULE(rows) \
    "data_t\nsave_nef_molecular_system\n_nef_molecular_system.sf_category nef_molecular_system\nloop_\n_nef_sequence.index\n" \
    "_nef_sequence.chain_code\n_nef_sequence.sequence_code\n_nef_sequence.residue_name\n_nef_sequence.linking\n" \
    "_nef_sequence.residue_variant\n_nef_sequence.cis_peptide\n" rows "stop_\nsave_\n"
#define PEPTIDE MOLECULE("1 A 1 ALA start . .\n2 A 2 SER middle . .\n3 A 3 ILE middle . .\n4 A 4 GLY end . .\n")
#define LIST(columns, rows) "save_list_d\nloop_\n" columns rows "stop_\nsave_\n"
#define ADDRESS(category, k) "_" category ".chain_code_" k " _" category ".sequence_code_" k " _" category ".residue_name_" k " _" category ".atom_name_" k "\n"
#define D "_nef_distance_restraint."
#define PAIR D "restraint_id\n" ADDRESS("nef_distance_restraint", "1") ADDRESS("nef_distance_restraint", "2")
#define PAIR_LIMITS PAIR D "lower_limit " D "upper_limit\n"
#define A "_nef_dihedral_restraint."
#define FOUR A "restraint_id\n" ADDRESS("nef_dihedral_restraint", "1") ADDRESS("nef_dihedral_restraint", "2") \
    ADDRESS("nef_dihedral_restraint", "3") ADDRESS("nef_dihedral_restraint", "4")
#define PHI "A 1 ALA C A 2 SER N A 2 SER CA A 2 SER C "

static const double RADIAN = 57.29577951308232;

/* ---- molecule ---- */

Test(nef, sequence_variants_and_linking_make_the_molecule) {
    tml_problem *p = read_good(MOLECULE("1 A 5 CYS start -HG .\n2 A 6 PRO middle . .\n3 A 7A GLY end . .\n4 B 1 ALA break . .\n5 B 2 ALA break . .\n"
                                           "6 C 1 GLY single . .\n7 D 9 XYZ dummy . .\n"));
    const tml_molecule *m = &p->molecule;
    cr_assert_eq(m->residue_count, 6);
    cr_assert_eq(tml_molecule_find_atom(m, 0, "HG"), -1);
    cr_assert_geq(tml_molecule_find_atom(m, 0, "H3"), 0);
    int32_t inserted = tml_molecule_find_residue(m, "A", "7A");
    cr_assert_geq(inserted, 0);
    cr_assert(m->residues[inserted].sequence == 7 && m->residues[inserted].insertion == 'A');
    cr_assert_geq(tml_molecule_find_atom(m, inserted, "OXT"), 0);
    int32_t broken = tml_molecule_find_residue(m, "B", "1");
    cr_assert_eq(tml_molecule_find_atom(m, broken, "H2"), -1);
    int32_t single = tml_molecule_find_residue(m, "C", "1");
    cr_assert(tml_molecule_find_atom(m, single, "H2") >= 0 && tml_molecule_find_atom(m, single, "OXT") >= 0);
    tml_problem_free(p);
}

Test(nef, a_cis_peptide_follows_the_residue_that_declares_it) {
    tml_problem *p = read_good(MOLECULE("1 A 1 ALA start . .\n2 A 2 ALA middle . true\n3 A 3 PRO end . false\n"));
    cr_assert_eq(p->molecule.peptide_count, 2);
    for (int i = 0; i < 2; i++) cr_assert_eq(p->molecule.peptides[i].cis, p->molecule.peptides[i].residue1 == 1);
    tml_problem_free(p);
}

Test(nef, covalent_links_bind) {
    tml_problem *p = read_good(MOLECULE("1 A 1 CYS start -HG .\n2 A 2 GLY middle . .\n3 A 3 GLY middle . .\n4 A 4 CYS end -HG .\n")
                                  "save_links\nloop_\n" ADDRESS("nef_covalent_links", "1") ADDRESS("nef_covalent_links", "2")
                                  "A 1 CYS SG A 4 CYS SG\nstop_\nsave_\n");
    int32_t a = tml_molecule_find_atom(&p->molecule, 0, "SG"), b = tml_molecule_find_atom(&p->molecule, 3, "SG");
    bool linked = false;
    for (int32_t k = p->molecule.neighbour_first[a]; k < p->molecule.neighbour_first[a + 1]; k++) linked = linked || p->molecule.neighbours[k] == b;
    cr_assert(linked);
    tml_problem_free(p);
}

Test(nef, a_chain_without_a_code_is_a_chain) {
    tml_problem *p = read_good(MOLECULE("1 . 1 ALA start . .\n2 . 2 GLY end . .\n") LIST(PAIR_LIMITS, "1 . 1 ALA HA . 2 GLY H 1.8 5\n"));
    cr_assert_eq(p->restraints.distance_count, 1);
    cr_assert_eq(p->restraints.unmapped_count, 0);
    tml_problem_free(p);
}

/* ---- distances ---- */

Test(nef, rows_of_one_id_are_alternatives) {
    tml_problem *p = read_good(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H 1.8 3\n2 A 1 ALA HA A 3 ILE H 1.8 5\n1 A 1 ALA HB% A 2 SER H 1.8 3\n"));
    cr_assert_eq(p->restraints.distance_count, 2);
    const tml_distance_restraint *one = distance_by_id(p, "1");
    cr_assert(one->alternative_count == 2 && one->pair_count == 4 && !one->combined && one->lower == 1.8 && one->upper == 3);
    cr_assert_str_eq(one->list, "list_d");
    cr_assert(one->place.line == 24 && one->place.column == 1, "%d:%d", one->place.line, one->place.column);
    tml_problem_free(p);
}

Test(nef, columns_come_in_any_order_and_case_and_unknown_ones_are_passed_over) {
    tml_problem *p = read_good(PEPTIDE LIST("_NEF_Distance_Restraint.Upper_Limit _nef_distance_restraint.colour\n" PAIR D "weight\n",
                                                    "4.5 red 7 A 1 ALA HA A 2 SER H 0.25\n"));
    const tml_distance_restraint *d = distance_by_id(p, "7");
    cr_assert(d->lower == 0 && d->upper == 4.5 && d->weight == 0.25);
    tml_problem_free(p);
}

#define ALL_LIMITS PAIR D "target_value " D "target_value_uncertainty " D "lower_linear_limit " D "lower_limit " D "upper_limit " D "upper_linear_limit\n"

Test(nef, missing_limits_are_open_or_come_from_linear_limits_or_the_target) {
    static const struct { const char *id; double lower, upper; } WANT[] = {{"both", 2, 4}, {"upper", 0, 4}, {"lower", 2, INFINITY},
                                                                           {"linear", 1, 5}, {"target", 2.5, 3.5}, {"wide", 0, 5.5}};
    tml_problem *p = read_good(PEPTIDE LIST(ALL_LIMITS, "both A 1 ALA HA A 2 SER H 3 1 1 2 4 5\n"
                                                                "upper A 1 ALA HA A 2 SER H 3 . . . 4 .\n"
                                                                "lower A 1 ALA HA A 2 SER H . . . 2 . .\n"
                                                                "linear A 1 ALA HA A 2 SER H . . 1 . . 5\n"
                                                                "target A 1 ALA HA A 2 SER H 3 0.5 . . . .\n"
                                                                "wide A 1 ALA HA A 2 SER H 2.5 3 . . . .\n"
                                                                "none A 1 ALA HA A 2 SER H 3 . . . . .\n"));
    cr_assert_eq(p->restraints.distance_count, 6);
    for (size_t i = 0; i < sizeof WANT / sizeof *WANT; i++) {
        const tml_distance_restraint *d = distance_by_id(p, WANT[i].id);
        cr_assert(d->lower == WANT[i].lower && d->upper == WANT[i].upper, "%s: %g to %g", WANT[i].id, d->lower, d->upper);
    }
    cr_assert(has_note(p, "2 rows of list_d have no limits; target value and uncertainty"));
    cr_assert(has_note(p, "restraint none has no limits"));
    tml_problem_free(p);
}

Test(nef, combinations_hold_together) {
    tml_problem *p = read_good(PEPTIDE LIST(D "restraint_combination_id\n" PAIR_LIMITS, "2 1 A 1 ALA HA A 2 SER H 1.8 5\n1 1 A 1 ALA HA A 3 ILE H 1.8 5\n"
                                                    ". 1 A 1 ALA HA A 4 GLY H 1.8 5\n2 1 A 1 ALA HB% A 2 SER H 1.8 5\n"));
    const tml_distance_restraint *d = distance_by_id(p, "1");
    const tml_alternative *alternatives = &p->restraints.alternatives[d->first_alternative];
    cr_assert(d->combined && d->alternative_count == 4);
    static const int32_t COMBINATIONS[] = {-1, 0, 0, 1}; /* those of one stand together */
    for (int i = 0; i < 4; i++) cr_assert_eq(alternatives[i].combination, COMBINATIONS[i], "%d", i);
    tml_problem_free(p);
}

Test(nef, a_combination_with_an_unknown_atom_falls_as_a_whole) {
    for (int order = 0; order < 2; order++) { /* the unknown atom in its first row, and in its last */
        tml_problem *p = read_good(order == 0 ? PEPTIDE LIST(D "restraint_combination_id\n" PAIR_LIMITS,
                                                                     "1 1 A 1 ALA HZ A 2 SER H 1.8 5\n1 1 A 1 ALA HA A 3 ILE H 1.8 5\n2 1 A 1 ALA HA A 4 GLY H 1.8 5\n")
                                                 : PEPTIDE LIST(D "restraint_combination_id\n" PAIR_LIMITS,
                                                                     "1 1 A 1 ALA HA A 3 ILE H 1.8 5\n1 1 A 1 ALA HZ A 2 SER H 1.8 5\n2 1 A 1 ALA HA A 4 GLY H 1.8 5\n"));
        const tml_distance_restraint *d = distance_by_id(p, "1");
        cr_assert_eq(d->alternative_count, 1, "order %d", order);
        cr_assert_eq(p->restraints.group_atoms[p->restraints.alternatives[d->first_alternative].first_b],
                     tml_molecule_find_atom(&p->molecule, 3, "H"));
        cr_assert(has_note(p, "A:1:HZ: no such atom in ALA"));
        tml_problem_free(p);
    }
}

Test(nef, an_unknown_alternative_is_told_and_the_others_count) {
    tml_problem *p = read_good(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HZ A 2 SER H 1.8 3\n1 A 1 ALA HA A 2 SER H 1.8 3\n"
                                                            "2 A 1 ALA HZ A 2 SER H 1.8 3\n2 A 2 GLY H A 3 ILE H 1.8 3\n"));
    cr_assert_eq(distance_by_id(p, "1")->alternative_count, 1);
    cr_assert(has_note(p, "restraint 1: 1 of its 2 rows name what is not there and are left out: A:1:HZ: no such atom in ALA"));
    cr_assert_eq(p->restraints.unmapped_count, 1);
    cr_assert(strstr(p->restraints.unmapped[0].reason, "A:1:HZ: no such atom") != NULL);
    tml_problem_free(p);
}

Test(nef, the_first_row_s_limits_count_and_the_difference_is_told) {
    tml_problem *p = read_good(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H 1.8 3\n1 A 1 ALA HA A 3 ILE H 1.8 4\n"));
    cr_assert_eq(distance_by_id(p, "1")->upper, 3);
    cr_assert(has_note(p, "restraint 1: its rows differ in limits or weight; the first row's count"));
    tml_problem_free(p);
}

Test(nef, equal_list_names_in_two_files_stay_apart) {
    tml_problem *p = NULL;
    tml_error error;
    const char *texts[TEXTS_MOST] = {PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H 1.8 3\n"),
                                     "data_u\n" LIST(PAIR_LIMITS, "1 A 1 ALA HA A 3 ILE H 1.8 5\n")};
    cr_assert_eq(problem_read_texts(texts, &p, &error), TML_OK, "%s", error.message);
    cr_assert_eq(p->restraints.distance_count, 2);
    cr_assert_eq(p->restraints.distances[1].place.file, 1);
    tml_problem_free(p);
}

/* ---- dihedrals ---- */

Test(nef, dihedral_intervals_run_upwards_modulo_a_circle) {
    static const struct { const char *id; double lower, width; } WANT[] = {{"plain", -80, 40}, {"over", 170, 20}, {"down", 60, 240},
                                                                           {"point", 60, 0}, {"far", 340, 40}};
    tml_problem *p = read_good(PEPTIDE "save_list_a\nloop_\n" FOUR A "lower_limit " A "upper_limit\n"
                                  "plain " PHI "-80 -40\nover " PHI "170 -170\ndown " PHI "60 -60\npoint " PHI "60 60\nfar " PHI "340 380\n"
                                  "circle " PHI "-180 180\nopen " PHI "10 .\nstop_\nsave_\n");
    cr_assert_eq(p->restraints.dihedral_count, 5);
    for (size_t i = 0; i < sizeof WANT / sizeof *WANT; i++) {
        const tml_dihedral_restraint *d = dihedral_by_id(p, WANT[i].id);
        const tml_dihedral_interval *interval = &p->restraints.intervals[d->first_interval];
        cr_assert_float_eq(interval->lower * RADIAN, WANT[i].lower, 1e-9, "%s", WANT[i].id);
        cr_assert_float_eq((interval->upper - interval->lower) * RADIAN, WANT[i].width, 1e-9, "%s", WANT[i].id);
        cr_assert_str_eq(d->list, "list_a");
    }
    cr_assert(has_note(p, "dihedral circle") && has_note(p, "dihedral open"));
    tml_problem_free(p);
}

Test(nef, dihedral_rows_of_one_id_are_alternatives_and_targets_stand_in_for_limits) {
    tml_problem *p = read_good(PEPTIDE "save_list_a\nloop_\n" FOUR A "target_value " A "target_value_uncertainty " A "lower_limit " A "upper_limit\n"
                                  "1 " PHI ". . -80 -40\n1 " PHI "60 15 . .\n2 A 1 ALA C A 2 SER N A 2 SER CA A 2 SER CX . . 0 1\n"
                                  "1 A 1 ALA C A 2 SER N A 2 SER HB% A 2 SER C . . 0 1\nstop_\nsave_\n");
    const tml_dihedral_restraint *one = dihedral_by_id(p, "1");
    cr_assert_eq(one->interval_count, 2);
    cr_assert_float_eq(p->restraints.intervals[one->first_interval + 1].lower * RADIAN, 45, 1e-9);
    cr_assert_float_eq(p->restraints.intervals[one->first_interval + 1].upper * RADIAN, 75, 1e-9);
    cr_assert(has_note(p, "dihedral 1: 1 of its 3 rows"));
    cr_assert(has_note(p, "HB% means 2 atoms; a dihedral needs one"));
    cr_assert(p->restraints.unmapped_count == 1 && p->restraints.unmapped[0].dihedral);
    tml_problem_free(p);
}

/* ---- other lists ---- */

Test(nef, lists_of_other_kinds_are_counted_and_named_one_by_one) {
    tml_problem *p = read_good(PEPTIDE "save_s\nloop_ _nef_chemical_shift.chain_code _nef_chemical_shift.value A 1 A 2 A 3 stop_\nsave_\n"
                                          "save_r\nloop_ _nef_rdc_restraint.index 1 2 stop_\nsave_\nsave_p\nloop_ _nef_peak.index 1 stop_\nsave_\n"
                                          "save_o\nloop_ _other_program.thing 1 2 3 4 stop_\nsave_\n");
    cr_assert(has_note(p, "3 chemical shifts are not used"));
    cr_assert(has_note(p, "2 residual dipolar couplings are not used"));
    cr_assert(has_note(p, "1 peaks are not used"));
    cr_assert(has_note(p, "4 rows of _other_program are not used"));
    tml_problem_free(p);
}

/* ---- refusals ---- */

Test(nef, refusals_name_the_place) {
    const long head = 19, list = head + 5; /* lines before a list's first row: molecule, frame, loop, id, two addresses, limits */
    expect_refused(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H 5 3\n"), list, 1, "the upper limit 3 is below the lower limit 5");
    expect_refused(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H -1 3\n"), list, 1, "-1 Å");
    expect_refused(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H nan 3\n"), list, 24, "found 'nan' where a number");
    expect_refused(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H 1 inf\n"), list, 26, "found 'inf' where a number");
    expect_refused(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H 1 1e999\n"), list, 26, "found '1e999'");
    expect_refused(PEPTIDE LIST(PAIR_LIMITS, ". A 1 ALA HA A 2 SER H 1 3\n"), list, 1, "restraint_id");
    expect_refused(PEPTIDE LIST(D "restraint_id\n" ADDRESS("nef_distance_restraint", "1"), "1 A 1 ALA HA\n"), head + 1, 1, "chain_code_2");
    expect_refused(PEPTIDE LIST(ADDRESS("nef_distance_restraint", "1"), "A 1 ALA HA\n"), head + 1, 1, "restraint_id");
    expect_refused(PEPTIDE LIST(PAIR_LIMITS D "weight\n", "1 A 1 ALA HA A 2 SER H 1 3 -2\n"), list + 1, 1, "a weight of -2");
    expect_refused(MOLECULE("1 A 1 ALA first . .\n"), 12, 11, "linking 'first' is not known");
    expect_refused(MOLECULE("1 A 1 QQQ start . .\n"), 12, 7, "QQQ");
    expect_refused(MOLECULE("1 A 1 ALA start . .\n2 A 1 GLY end . .\n"), 13, 7, "1");
    expect_refused("data_t\nloop_ _nef_sequence.index 1 stop_\n", 2, 7, "no column chain_code");
    expect_refused(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 ALA HA A 2 SER H 1\n"), head, 1, "not full");
    expect_refused(PEPTIDE "save_a\nloop_\n" FOUR A "lower_limit " A "upper_limit\n1 A 1 ALA C A 2 SER N A 2 SER N A 2 SER C 0 1\nstop_\nsave_\n", 26, 31,
                   "the same atom twice");
    expect_refused("data_t\nloop_ _entity.id 1\n", 1, 1, "without sequence, restraints or components");
    expect_refused("ATOM      1  N   ALA A   1\n", 1, 1, "begins with 'ATOM ");
}

/* A residue's name in a restraint must be the sequence's: a list for another numbering would otherwise be taken silently. */
Test(nef, another_residue_name_makes_a_restraint_unmapped) {
    tml_problem *p = read_good(PEPTIDE LIST(PAIR_LIMITS, "1 A 1 GLY HA A 2 SER H 1 3\n2 A 1 . HA A 2 SER H 1 3\n"));
    cr_assert_eq(p->restraints.unmapped_count, 1);
    cr_assert_str_eq(p->restraints.unmapped[0].reason, "A:1 is ALA in the sequence, GLY in the restraint");
    cr_assert_eq(p->restraints.distance_count, 1);
    tml_problem_free(p);
}
