/* Names of restraints to atoms, ranges, limits of size, and the functions that measure restraints.
 *
 * Names: NEF 1.1 wildcards (Gutmanas et al. 2015); pseudo-atoms of Markley et al., Pure Appl. Chem. 70 (1998) 117, table 1 (from
 * memory). Sums: (Σ r⁻⁶)^(-1/6), Nilges, Proteins 17 (1993) 297.
 *
 * Contents: names - ranges - measures - sizes
 */
#include "given_text.h"

#include <math.h>

#include "base/clock.h"
#include "base/memory.h"

/* ---- names ---- */

/* What a name means in a residue of its own, between two glycines; "" for nothing. */
static void expect_name(const char *residue, const char *name, const char *atoms) {
    char sheet[256], found[256] = "";
    snprintf(sheet, sizeof sheet, "sheet 1\nsequence A 1 GLY %s GLY\natom P bead\nlimit A:2:%s P 1 9 as x\n", residue, name);
    tml_problem *p = read_good(sheet);
    if (p->restraints.distance_count == 1) {
        const tml_alternative *alternative = &p->restraints.alternatives[p->restraints.distances[0].first_alternative];
        cr_assert(alternative->count_b == 1 && alternative->pair_count == alternative->count_a);
        group_names(p, alternative->first_a, alternative->count_a, found, sizeof found);
    } else {
        cr_assert_eq(p->restraints.unmapped_count, 1);
    }
    cr_assert_str_eq(found, atoms, "%s of %s gave '%s'", name, residue, found);
    tml_problem_free(p);
}

Test(names, wildcards_are_those_of_nef) {
    expect_name("ALA", "HB%", "HB1 HB2 HB3");
    expect_name("ALA", "HB*", "HB1 HB2 HB3");
    expect_name("ALA", "H%", ""); /* one digit at least */
    expect_name("ALA", "H*", "H HA HB1 HB2 HB3");
    expect_name("VAL", "HG%", "HG11 HG12 HG13 HG21 HG22 HG23");
    expect_name("VAL", "HG%%", "HG11 HG12 HG13 HG21 HG22 HG23");
    expect_name("VAL", "HG1%", "HG11 HG12 HG13");
    expect_name("PHE", "HD%", "HD1 HD2");
    expect_name("PHE", "CD%", "CD1 CD2");
    expect_name("PHE", "*D*", "CD1 CD2 HD1 HD2");
    expect_name("LYS", "*Z*", "NZ HZ1 HZ2 HZ3");
}

Test(names, x_and_y_mean_both_of_a_pair_not_yet_told_apart) {
    expect_name("SER", "HBx", "HB2 HB3");
    expect_name("SER", "HBy", "HB2 HB3");
    expect_name("GLY", "HAx", "HA2 HA3");
    expect_name("VAL", "HGx%", "HG11 HG12 HG13 HG21 HG22 HG23");
    expect_name("VAL", "CGy", "CG1 CG2");
    expect_name("LEU", "HDx%", "HD11 HD12 HD13 HD21 HD22 HD23");
    expect_name("ILE", "HG1x", "HG12 HG13");
    expect_name("ASN", "HD2y", "HD21 HD22");
    expect_name("ARG", "HHx%", "HH11 HH12 HH21 HH22");
    expect_name("ARG", "HH1x", "HH11 HH12");
    expect_name("ALA", "HAx", "");
}

Test(names, x_and_y_stand_for_primes_too_and_only_in_atoms_names) {
    tml_problem *p = read_good("sheet 1\natom A:1:H5' H\natom A:1:H5'' H\natom A:1:H51 H\natom pro15 bead\natom P bead\n"
                                  "limit A:1:H5x P 1 9 as prime\nlimit proxx P 1 9 as word\n");
    char text[64];
    const tml_distance_restraint *prime = distance_by_id(p, "prime");
    const tml_alternative *alternative = &p->restraints.alternatives[prime->first_alternative];
    cr_assert_str_eq(group_names(p, alternative->first_a, alternative->count_a, text, sizeof text), "H5' H5'' H51");
    cr_assert_eq(p->restraints.unmapped_count, 1);
    cr_assert_str_eq(p->restraints.unmapped[0].id, "word");
    tml_problem_free(p);
}

Test(names, exact_names_come_first) {
    tml_problem *p = read_good("sheet 1\natom Bx bead\natom B1 bead\natom P bead\nlimit Bx P 1 9 as a\n");
    cr_assert_eq(distance_by_id(p, "a")->pair_count, 1);
    tml_problem_free(p);
}

Test(names, pseudo_atoms_are_their_groups) {
    static const struct { const char *residue, *name, *atoms; } CASES[] = {
        {"GLY", "QA", "HA2 HA3"}, {"ALA", "MB", "HB1 HB2 HB3"}, {"ALA", "QB", "HB1 HB2 HB3"}, {"SER", "QB", "HB2 HB3"},
        {"VAL", "MG1", "HG11 HG12 HG13"}, {"VAL", "MG2", "HG21 HG22 HG23"}, {"VAL", "QQG", "HG11 HG12 HG13 HG21 HG22 HG23"},
        {"VAL", "QG", "HG11 HG12 HG13 HG21 HG22 HG23"}, {"LEU", "MD2", "HD21 HD22 HD23"}, {"LEU", "QQD", "HD11 HD12 HD13 HD21 HD22 HD23"},
        {"ILE", "QG", "HG12 HG13"}, {"ILE", "QG1", "HG12 HG13"}, {"ILE", "MG", "HG21 HG22 HG23"}, {"ILE", "QG2", "HG21 HG22 HG23"},
        {"ILE", "MD", "HD11 HD12 HD13"}, {"THR", "MG", "HG21 HG22 HG23"}, {"MET", "ME", "HE1 HE2 HE3"}, {"LYS", "QZ", "HZ1 HZ2 HZ3"},
        {"LYS", "QE", "HE2 HE3"}, {"PHE", "QD", "HD1 HD2"}, {"TYR", "QE", "HE1 HE2"}, {"TYR", "QR", "HD1 HD2 HE1 HE2"},
        {"PHE", "QR", "HD1 HD2 HE1 HE2 HZ"}, {"ASN", "QD", "HD21 HD22"}, {"GLN", "QE", "HE21 HE22"}, {"ARG", "QQH", "HH11 HH12 HH21 HH22"},
        {"ARG", "QH1", "HH11 HH12"}, {"SER", "QG", ""}, {"ALA", "QA", ""}, {"GLY", "MA", ""}, {"SER", "Q", ""}, {"SER", "QBBBB", ""}};
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++) expect_name(CASES[i].residue, CASES[i].name, CASES[i].atoms);
}

Test(names, pseudo_atoms_are_noted_once) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 SER SER\nlimit A:1:QB A:2:QB 1 5 as a\nlimit A:2:QB A:1:HA 1 5 as b\n");
    cr_assert_eq(p->note_count, 1);
    cr_assert(has_note(p, "pseudo-atoms (QB"));
    tml_problem_free(p);
}

Test(names, old_names_are_not_guessed_at) {
    static const struct { const char *residue, *name; } OLD[] = {{"SER", "HB1"}, {"GLY", "HA1"}, {"ILE", "CD"}, {"ILE", "HD1"}, {"ALA", "1HB"},
                                                                 {"ALA", "hb1"}, {"GLY", "OT1"}, {"ARG", "HH1"}};
    for (size_t i = 0; i < sizeof OLD / sizeof *OLD; i++) expect_name(OLD[i].residue, OLD[i].name, "");
}

Test(names, the_amide_hydrogen_has_two_names_and_a_third_at_the_chain_s_start) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 ALA GLY PRO\nlimit A:1:H A:2:HN 1 5 as a\nlimit A:3:H A:2:HA2 1 5 as pro\n");
    const tml_alternative *alternative = &p->restraints.alternatives[distance_by_id(p, "a")->first_alternative];
    cr_assert_eq(p->restraints.group_atoms[alternative->first_a], tml_molecule_find_atom(&p->molecule, 0, "H1"));
    cr_assert_eq(p->restraints.group_atoms[alternative->first_b], tml_molecule_find_atom(&p->molecule, 1, "H"));
    cr_assert(has_note(p, "H of A:1 is taken as H1"));
    cr_assert_eq(p->restraints.unmapped_count, 1); /* proline has none */
    tml_problem_free(p);
}

Test(names, an_atom_s_distance_to_itself_is_no_pair) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 ALA PHE\nlimit A:1:HB% A:1:HB% 1 5 as self\nlimit A:2:HD% A:2:HD1 1 5 as part\n");
    cr_assert_eq(distance_by_id(p, "self")->pair_count, 6);
    cr_assert_eq(distance_by_id(p, "part")->pair_count, 1);
    tml_problem_free(p);
}

/* ---- ranges ---- */

Test(ranges, the_alternative_nearest_in_sequence_counts) {
    static const struct { const char *a, *b; tml_range range; } CASES[] = {
        {"A:1:HA", "A:1:HB%", TML_RANGE_INTRA},      {"A:1:HA", "A:2:H", TML_RANGE_SEQUENTIAL}, {"A:1:HA", "A:3:H", TML_RANGE_MEDIUM},
        {"A:1:HA", "A:5:H", TML_RANGE_MEDIUM},       {"A:1:HA", "A:6:H", TML_RANGE_LONG},       {"A:1:HA", "B:1:H1", TML_RANGE_INTER_CHAIN},
        {"A:1:HA", "A:6:H,A:3:H", TML_RANGE_MEDIUM}, {"A:1:HA", "B:1:H1,A:6:H", TML_RANGE_LONG}, {"A:6:H", "A:9:H", TML_RANGE_MEDIUM}};
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++) {
        char sheet[256];
        snprintf(sheet, sizeof sheet, "sheet 1\nsequence A 1 ALA ALA ALA ALA ALA ALA\nsequence A 9 ALA\nsequence B 1 ALA\nlimit %s %s 1 9 as x\n", CASES[i].a,
                 CASES[i].b);
        tml_problem *p = read_good(sheet);
        cr_assert_eq(distance_by_id(p, "x")->range, CASES[i].range, "%s %s: %d", CASES[i].a, CASES[i].b, distance_by_id(p, "x")->range);
        tml_problem_free(p);
    }
}

/* ---- measures ---- */

#define BEADS "sheet 1\natom A bead\natom B bead\natom C bead\natom D bead\n"
/* A at the origin, the others on the axes: A-B 3, A-C 4, A-D 5, B-C 5 Å. */
static const double XYZ[12] = {0, 0, 0, 3, 0, 0, 0, 4, 0, 0, 0, 5};

static double violation(const char *statements) {
    char sheet[512];
    snprintf(sheet, sizeof sheet, BEADS "%s", statements);
    tml_problem *p = read_good(sheet);
    for (int i = 0; i < 4; i++) cr_assert_eq(p->molecule.atoms[i].name[0], "ABCD"[i]);
    double off = tml_distance_violation(&p->restraints, &p->restraints.distances[0], NULL, XYZ);
    tml_problem_free(p);
    return off;
}

Test(measures, a_violation_is_positive_above_and_negative_below) {
    cr_assert_float_eq(violation("limit A B 1 2.5\n"), 0.5, 1e-12);
    cr_assert_float_eq(violation("limit A B 3.25 5\n"), -0.25, 1e-12);
    cr_assert_eq(violation("limit A B 3 3\n"), 0);
    cr_assert_eq(violation("limit A B - 3\n"), 0);
    cr_assert_eq(violation("limit A B 1 -\n"), 0);
}

Test(measures, alternatives_count_as_the_sum_of_inverse_sixth_powers) {
    double sum = pow(3, -6) + pow(4, -6) + pow(5, -6);
    cr_assert_float_eq(violation("limit A B,C,D - 1\n"), pow(sum, -1.0 / 6) - 1, 1e-12);
    cr_assert_float_eq(violation("limit A B - 1 as x\nlimit A C - 1 as x\nlimit A D - 1 as x\n"), pow(sum, -1.0 / 6) - 1, 1e-12);
    cr_assert_float_eq(violation("limit A B,C,D - 1 average\n"), pow(sum / 3, -1.0 / 6) - 1, 1e-12);
}

#define D "_nef_distance_restraint."
#define COMBINED(rows) \
    "data_t save_d loop_ " D "restraint_id " D "restraint_combination_id " D "chain_code_1 " D "sequence_code_1 " D "atom_name_1 " D "chain_code_2 " \
    D "sequence_code_2 " D "atom_name_2 " D "lower_limit " D "upper_limit\n" rows "stop_ save_\n"

/* Within a combination the largest violation, between combinations the least; a row of none stands alone. */
Test(measures, the_combination_violated_least_counts_by_its_worst_row) {
    static const struct { const char *nef; double off; } CASES[] = {
        {COMBINED("1 1 X 1 A X 1 B . 1\n1 1 X 1 A X 1 C . 1\n1 2 X 1 A X 1 D . 1\n"), 3},              /* max(2, 3) before 4 */
        {COMBINED("1 1 X 1 A X 1 B . 1\n1 1 X 1 A X 1 D . 1\n1 2 X 1 A X 1 C . 1\n"), 3},              /* max(2, 4) after 3 */
        {COMBINED("1 1 X 1 A X 1 D . 1\n1 2 X 1 A X 1 C . 1\n1 1 X 1 A X 1 B . 1\n1 . X 1 A X 1 B . 1\n"), 2},
        {COMBINED("1 1 X 1 A X 1 D 6 .\n1 1 X 1 A X 1 C 6 .\n1 2 X 1 A X 1 B 6 .\n"), -2},
    };
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++) {
        tml_problem *p = NULL;
        tml_error error;
        const char *texts[TEXTS_MOST] = {"sheet 1\natom X:1:A bead\natom X:1:B bead\natom X:1:C bead\natom X:1:D bead\n", CASES[i].nef};
        cr_assert_eq(problem_read_texts(texts, &p, &error), TML_OK, "%s", error.message);
        cr_assert_float_eq(tml_distance_violation(&p->restraints, &p->restraints.distances[0], NULL, XYZ), CASES[i].off, 1e-12, "case %zu", i);
        tml_problem_free(p);
    }
}

Test(measures, a_dihedral_s_violation_is_the_shorter_way_to_the_nearest_interval) {
    static const double RADIAN = 57.29577951308232;
    static const struct { const char *limits; double angle, off; } CASES[] = {
        {"dihedral A B C D 0 20\n", 10, 0},      {"dihedral A B C D 0 20\n", 30, 10},     {"dihedral A B C D 0 20\n", -30, 30},
        {"dihedral A B C D 170 -170\n", 180, 0}, {"dihedral A B C D 170 -170\n", 150, 20}, {"dihedral A B C D 170 -170\n", -150, 20},
        {"dihedral A B C D 170 -170\n", 0, 170}, {"dihedral A B C D 500 520\n", 150, 0},
        {"dihedral A B C D 0 20 as x\ndihedral A B C D 60 80 as x\n", 50, 10}};
    for (size_t i = 0; i < sizeof CASES / sizeof *CASES; i++) {
        char sheet[256];
        snprintf(sheet, sizeof sheet, BEADS "%s", CASES[i].limits);
        tml_problem *p = read_good(sheet);
        double turn = CASES[i].angle / RADIAN;
        /* IUPAC: looking from B to C, a positive angle turns the far bond clockwise. B-C lies along x, A in the xy plane. */
        double xyz[12] = {0, 1, 0, 0, 0, 0, 1, 0, 0, 1, cos(turn), sin(turn)};
        cr_assert_float_eq(tml_dihedral_violation(&p->restraints, &p->restraints.dihedrals[0], xyz) * RADIAN, CASES[i].off, 1e-9, "case %zu", i);
        tml_problem_free(p);
    }
}

/* ---- sizes ---- */

Test(sizes, ten_thousand_restraints_are_mapped_in_a_second) {
    enum { ROWS = 10000 };
    char *sheet = tml_alloc(ROWS * 80 + 4096, 1), *at = sheet;
    at += sprintf(at, "sheet 1\nsequence A 1");
    for (int i = 0; i < 200; i++) at += sprintf(at, " LEU");
    at += sprintf(at, "\n");
    for (int i = 0; i < ROWS; i++) at += sprintf(at, "limit A:%d:HD%% A:%d:HB%%,A:%d:HA 1.8 5.5 as r%d\n", 1 + i % 200, 1 + i * 7 % 200, 1 + i * 3 % 199, i);
    double start = tml_seconds();
    tml_problem *p = read_good(sheet);
    cr_assert_lt(tml_seconds() - start, seconds_allowed(1.0), "%.2f s", tml_seconds() - start);
    cr_assert_eq(p->restraints.distance_count, ROWS);
    tml_problem_free(p);
    free(sheet);
}

Test(sizes, a_group_of_any_size_is_taken_whole) {
    enum { BEAD_COUNT = 6000 };
    char *sheet = tml_alloc(BEAD_COUNT * 24 + 128, 1), *at = sheet;
    at += sprintf(at, "sheet 1\natom P bead\nlimit P B* 1 9 as all\n");
    for (int i = 0; i < BEAD_COUNT; i++) at += sprintf(at, "atom B%d bead\n", i);
    tml_problem *p = read_good(sheet);
    cr_assert_eq(distance_by_id(p, "all")->pair_count, BEAD_COUNT);
    tml_problem_free(p);
    free(sheet);
}

/* 256 by 256 alternatives of all pairs of 600 beads are 2·10¹⁰ pairs: refused, at once and with the place. */
Test(sizes, too_many_pairs_are_refused) {
    char *sheet = tml_alloc(32768, 1), *at = sheet;
    at += sprintf(at, "sheet 1\n");
    for (int i = 0; i < 600; i++) at += sprintf(at, "atom B%d bead\n", i);
    at += sprintf(at, "limit");
    for (int side = 0; side < 2; side++)
        for (int i = 0; i < 256; i++) at += sprintf(at, "%s", i == 0 ? " B*" : ",B*");
    sprintf(at, " 1 9\n");
    tml_problem *p = NULL;
    tml_error error;
    double start = tml_seconds();
    cr_assert_eq(problem_read_texts((const char *[TEXTS_MOST]){sheet}, &p, &error), TML_TOO_LARGE);
    cr_assert_lt(tml_seconds() - start, seconds_allowed(5.0));
    cr_assert_eq(error.line, 602);
    cr_assert(strstr(error.message, "33 million pairs") != NULL, "%s", error.message);
    free(sheet);
}
