/* Every statement of the sheet's grammar, and what it says of mistakes. */
#include <math.h>

#include "base/clock.h"
#include "base/memory.h"
#include "given_text.h"

Test(sheet, atoms_and_limits_without_chemistry) {
    tml_problem *problem = read_good("# a comment first\nsheet 1\ntitle \"Two # beads\"\natom P bead\natom Q C # trailing\nlimit P Q 3 5.5 as far weight 2\n");
    cr_assert_str_eq(problem->title, "Two # beads");
    cr_assert_eq(problem->molecule.atom_count, 2);
    cr_assert_eq(problem->molecule.atoms[0].element, 0);
    cr_assert_eq(problem->molecule.atoms[1].element, 6);
    const tml_distance_restraint *limit = &problem->restraints.distances[0];
    cr_assert_str_eq(limit->id, "far");
    cr_assert_eq(limit->lower, 3);
    cr_assert_eq(limit->upper, 5.5);
    cr_assert_eq(limit->weight, 2);
    cr_assert_eq(limit->place.line, 6);
    tml_problem_free(problem);
}

Test(sheet, a_dash_leaves_a_limit_open) {
    tml_problem *problem = read_good("sheet 1\natom P bead\natom Q bead\nlimit P Q - 5\nlimit Q P 2 -\n");
    cr_assert_eq(problem->restraints.distances[0].lower, 0);
    cr_assert(isinf(problem->restraints.distances[1].upper));
    tml_problem_free(problem);
}

Test(sheet, a_sequence_goes_on_over_lines) {
    tml_problem *problem = read_good("sheet 1\nsequence A -1 GLY ALA\nsequence A SER\nsequence B 10 GLY\nsequence A THR\n");
    cr_assert_eq(problem->molecule.residue_count, 5);
    cr_assert_eq(problem->molecule.chain_count, 2);
    cr_assert_geq(tml_molecule_find_residue(&problem->molecule, "A", "1"), 0);
    cr_assert_geq(tml_molecule_find_residue(&problem->molecule, "A", "2"), 0);
    tml_problem_free(problem);
}

Test(sheet, variants_ends_links_and_cis_peptides_reach_the_molecule) {
    tml_problem *problem = read_good("sheet 1\nsequence A 1 CYS HIS PRO CYS\nvariant A 2 -HD1\nends A neutral\npeptide A 2 cis\nlink A:1:SG A:4:SG\n");
    const tml_molecule *molecule = &problem->molecule;
    int32_t histidine = tml_molecule_find_residue(molecule, "A", "2");
    cr_assert_lt(tml_molecule_find_atom(molecule, histidine, "HD1"), 0);
    cr_assert_geq(tml_molecule_find_atom(molecule, histidine, "HE2"), 0);
    cr_assert_lt(tml_molecule_find_atom(molecule, tml_molecule_find_residue(molecule, "A", "1"), "HG"), 0);
    cr_assert_lt(tml_molecule_find_atom(molecule, tml_molecule_find_residue(molecule, "A", "1"), "H3"), 0);
    int32_t cis = 0;
    for (int32_t i = 0; i < molecule->peptide_count; i++) cis += molecule->peptides[i].cis && molecule->peptides[i].declared;
    cr_assert_eq(cis, 1);
    tml_problem_free(problem);
}

Test(sheet, commas_multiply_out_and_equal_ids_are_alternatives) {
    tml_problem *problem = read_good("sheet 1\natom P bead\natom Q bead\natom R bead\natom S bead\n"
                                     "limit P,Q R,S 1 9 as either\nlimit P Q 1 9 as either average\nlimit P R 1 4 average as mean\n");
    cr_assert_eq(problem->restraints.distance_count, 2);
    cr_assert_eq(problem->restraints.distances[0].alternative_count, 5);
    cr_assert_eq(problem->restraints.distances[0].pair_count, 5);
    cr_assert(problem->restraints.distances[1].average);
    tml_problem_free(problem);
}

Test(sheet, dihedral_intervals_run_upwards_modulo_360) {
    tml_problem *problem = read_good("sheet 1\nsequence A 1 ALA ALA\ndihedral A:1:N A:1:CA A:1:C A:2:N 170 -170 as psi\n");
    const tml_dihedral_interval *interval = &problem->restraints.intervals[0];
    cr_assert_float_eq(interval->upper - interval->lower, 20 * 3.14159265358979 / 180, 1e-9);
    cr_assert_str_eq(problem->restraints.dihedrals[0].id, "psi");
    tml_problem_free(problem);
}

Test(sheet, chiral_and_plane_become_terms) {
    tml_problem *problem = read_good("sheet 1\natom C1 C\natom N1 N\natom C2 C\natom C3 C\nchiral C1 N1 C2 C3 -\nplane C1 N1 C2 C3 within 0.05\n");
    cr_assert_eq(problem->molecule.centre_count, 1);
    cr_assert_eq(problem->molecule.centres[0].sign, -1);
    cr_assert(problem->molecule.centres[0].fixed);
    cr_assert_eq(problem->molecule.plane_count, 1);
    cr_assert_float_eq(problem->molecule.planes[0].within, 0.05, 1e-12);
    tml_problem_free(problem);
}

Test(sheet, ids_are_made_where_none_is_given) {
    tml_problem *problem = read_good("sheet 1\natom P bead\natom Q bead\nlimit P Q 1 9\nlimit P Q 2 8\n");
    cr_assert_eq(problem->restraints.distance_count, 2);
    cr_assert_str_neq(problem->restraints.distances[0].id, problem->restraints.distances[1].id);
    tml_problem_free(problem);
}

Test(sheet, mistakes_are_told_with_their_line) {
    read_bad("sheet 2\n", 1, "version");
    read_bad("sheet 1\natom P bead\natom Q bead\nlimit P Q 5 3\n", 4, "not below");
    read_bad("sheet 1\natom P bead\natom Q bead\nlimit P Q -1 3\n", 4, "negative");
    read_bad("sheet 1\natom P bead\natom Q bead\nlimit P Q nan 3\n", 4, "lower limit");
    read_bad("sheet 1\natom P bead\natom Q bead\nlimit P Q 1 1e999\n", 4, "upper limit");
    read_bad("sheet 1\natom P bead\natom Q bead\nlimit P Q 1 2 weight -1\n", 4, "weight");
    read_bad("sheet 1\natom P bead\natom Q bead\nlimit P Q 1 2 wieght 1\n", 4, "as, weight, together, average");
    read_bad("sheet 1\natom P bead\natom P bead\n", 3, "P");
    read_bad("sheet 1\natom P Zz\n", 2, "element");
    read_bad("sheet 1\nsequence A ALA\n", 2, "first residue");
    read_bad("sheet 1\nsequence A 1 ALX\n", 2, "ALX");
    read_bad("sheet 1\nsequence A 1 ALA\npeptide A 9 cis\n", 3, "sequence");
    read_bad("sheet 1\nsequence A 1 ALA\nends A open open\n", 3, "end of the line");
    read_bad("sheet 1\ntitle \"never closed\n", 2, "quote");
    read_bad("sheet 1\natom P bead\nplane P P P\n", 3, "four");
    read_bad("sheet 1\nlimmit P Q 1 2\n", 2, "limit");
    read_bad("sheet 1\natom A:1 C\n", 2, "chain:residue:atom");
}

Test(sheet, statements_of_later_versions_are_named_as_such) {
    read_bad("sheet 1\nmolecule L 1 LIG smiles \"C\"\n", 2, "not yet understood");
}

Test(sheet, no_prefix_of_a_sheet_is_ever_more_than_refused) {
    static const char TEXT[] = "sheet 1\ntitle \"x\"\nsequence A 1 GLY PRO\nends A open\npeptide A 1 cis\nlimit A:1:HA% A:2:HD2,A:2:HD3 1.8 5 as a weight 2\n"
                               "dihedral A:1:N A:1:CA A:1:C A:2:N -60 -30\natom Z:1:C1 C\nlink Z:1:C1 A:2:C\n";
    for (size_t length = 0; length < sizeof TEXT; length++) {
        tml_problem *problem = NULL;
        tml_error error;
        tml_status status = read_bytes(TEXT, length, &problem, &error);
        cr_assert(status == TML_OK || status == TML_BAD_INPUT, "%zu bytes: status %d", length, status);
        cr_assert_eq(problem != NULL, status == TML_OK);
        tml_problem_free(problem);
    }
}

/* ---- molecules ---- */

Test(sheet, atoms_and_beads_need_no_residue) {
    tml_problem *p = read_good("sheet 1\ntitle \"A # title\"\natom C1 C\natom A:7:CA c\natom B1 bead # comment\natom Zn1 ZN\n");
    cr_assert_str_eq(p->title, "A # title");
    cr_assert_eq(p->molecule.atom_count, 4);
    int elements[4] = {0};
    for (int i = 0; i < 4; i++) {
        const char *name = p->molecule.atoms[i].name;
        elements[strcmp(name, "C1") == 0 ? 0 : strcmp(name, "CA") == 0 ? 1 : strcmp(name, "B1") == 0 ? 2 : 3] = p->molecule.atoms[i].element;
    }
    cr_assert(elements[0] == 6 && elements[1] == 6 && elements[2] == 0 && elements[3] == 30);
    int32_t residue = tml_molecule_find_residue(&p->molecule, "A", "7");
    cr_assert_geq(residue, 0);
    tml_problem_free(p);
}

Test(sheet, a_sequence_goes_on_over_lines_and_chains) {
    tml_problem *p = read_good("sheet 1\nsequence A -1 MET LYS\nsequence B 1 GLY\nsequence A ILE\nsequence A 10 SER\nsequence A GLY\n");
    static const struct { const char *chain, *number, *name; } RESIDUES[] = {{"A", "-1", "MET"}, {"A", "0", "LYS"}, {"A", "1", "ILE"},
                                                                             {"A", "10", "SER"}, {"A", "11", "GLY"}, {"B", "1", "GLY"}};
    cr_assert_eq(p->molecule.residue_count, 6);
    for (size_t i = 0; i < 6; i++) {
        int32_t at = tml_molecule_find_residue(&p->molecule, RESIDUES[i].chain, RESIDUES[i].number);
        cr_assert_geq(at, 0, "%s:%s", RESIDUES[i].chain, RESIDUES[i].number);
        cr_assert_str_eq(p->molecule.residues[at].name, RESIDUES[i].name);
    }
    tml_problem_free(p);
}

Test(sheet, variants_ends_peptides_and_links_reach_the_molecule) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 CYS GLY CYS PRO\nvariant A 1 -HG\nvariant A 3 -HG\nends A neutral\npeptide A 3 cis\n"
                                  "link A:1:SG A:3:SG\n");
    cr_assert_eq(tml_molecule_find_atom(&p->molecule, 0, "HG"), -1);
    cr_assert_eq(tml_molecule_find_atom(&p->molecule, 0, "H3"), -1); /* neutral: NH2 */
    cr_assert_geq(tml_molecule_find_atom(&p->molecule, 0, "H1"), 0);
    int32_t a = tml_molecule_find_atom(&p->molecule, 0, "SG"), b = tml_molecule_find_atom(&p->molecule, 2, "SG");
    bool linked = false;
    for (int32_t i = 0; i < p->molecule.bond_count; i++)
        linked = linked || (p->molecule.bonds[i].a == a && p->molecule.bonds[i].b == b) || (p->molecule.bonds[i].a == b && p->molecule.bonds[i].b == a);
    cr_assert(linked);
    cr_assert_eq(p->molecule.peptide_count, 3);
    for (int i = 0; i < 3; i++) cr_assert_eq(p->molecule.peptides[i].cis, p->molecule.peptides[i].residue1 == 2);
    tml_problem_free(p);
}

Test(sheet, chiral_and_plane_add_to_the_molecule) {
    tml_problem *p = read_good("sheet 1\natom C1 C\natom N1 N\natom C2 C\natom C3 C\natom C4 C\nlink C1 N1\nlink C1 C2\nlink C1 C3\nlink C3 C4\n"
                                  "chiral C1 N1 C2 C3 -\nplane N1 C2 C3 C4 within 0.05\n");
    bool centre = false, plane = false;
    for (int32_t i = 0; i < p->molecule.centre_count; i++)
        centre = centre || (strcmp(p->molecule.atoms[p->molecule.centres[i].centre].name, "C1") == 0 && p->molecule.centres[i].sign == -1 &&
                            p->molecule.centres[i].fixed);
    for (int32_t i = 0; i < p->molecule.plane_count; i++)
        plane = plane || (p->molecule.planes[i].count == 4 && p->molecule.planes[i].within == 0.05);
    cr_assert(centre && plane);
    tml_problem_free(p);
}

/* ---- restraints ---- */

#define BEADS "sheet 1\natom A bead\natom B bead\natom C bead\natom D bead\n"

Test(sheet, limits_are_open_where_a_hyphen_stands) {
    tml_problem *p = read_good(BEADS "limit A B 1.5 2.5 as both\nlimit A C - 3 as up weight 2.5\nlimit A D 4 - as low\nlimit B C - - as none\n");
    const tml_distance_restraint *both = distance_by_id(p, "both"), *up = distance_by_id(p, "up"), *low = distance_by_id(p, "low");
    cr_assert(both->lower == 1.5 && both->upper == 2.5 && both->weight == 1.0 && !both->average);
    cr_assert(up->lower == 0 && up->upper == 3 && up->weight == 2.5);
    cr_assert(low->lower == 4 && isinf(low->upper));
    cr_assert_eq(p->restraints.distance_count, 3);
    cr_assert(has_note(p, "none has no limits"));
    cr_assert(both->place.line == 6 && both->place.column == 1 && both->place.file == 0);
    tml_problem_free(p);
}

Test(sheet, endings_come_in_any_order) {
    tml_problem *p = read_good(BEADS "limit A B - 3 average weight 0 as a\nlimit A B - 3 weight 0.5 as b average\n");
    cr_assert(distance_by_id(p, "a")->average && distance_by_id(p, "a")->weight == 0);
    cr_assert(distance_by_id(p, "b")->average && distance_by_id(p, "b")->weight == 0.5);
    tml_problem_free(p);
}

Test(sheet, limits_with_one_id_are_alternatives_and_commas_multiply_out) {
    tml_problem *p = read_good(BEADS "limit A B 1 5 as x\nlimit C D 1 5 as x\nlimit A,B C,D 1 5 as y\n");
    cr_assert_eq(distance_by_id(p, "x")->alternative_count, 2);
    const tml_distance_restraint *y = distance_by_id(p, "y");
    cr_assert_eq(y->alternative_count, 4);
    cr_assert_eq(y->pair_count, 4);
    cr_assert_eq(p->restraints.distance_count, 2);
    tml_problem_free(p);
}

Test(sheet, limits_without_an_id_are_never_alternatives) {
    tml_problem *p = read_good(BEADS "limit A B 1 5\nlimit C D 1 5\nlimit A C 1 5 as limit1\nlimit A D 1 5 as limit2\n"
                                        "dihedral A B C D 0 10\ndihedral A B C D 20 30 as dihedral1\n");
    cr_assert_eq(p->restraints.distance_count, 4);
    cr_assert_eq(p->restraints.dihedral_count, 2);
    for (int i = 0; i < 4; i++) cr_assert_eq(p->restraints.distances[i].alternative_count, 1);
    tml_problem_free(p);
}

Test(sheet, a_dihedral_runs_upwards) {
    static const double RADIAN = 57.29577951308232;
    tml_problem *p = read_good(BEADS "dihedral A B C D 170 -170 as over\ndihedral A B C D -155 -85 as phi weight 3\ndihedral A B C D -180 180 as all\n");
    const tml_dihedral_restraint *over = dihedral_by_id(p, "over"), *phi = dihedral_by_id(p, "phi");
    const tml_dihedral_interval *a = &p->restraints.intervals[over->first_interval], *b = &p->restraints.intervals[phi->first_interval];
    cr_assert_float_eq((a->upper - a->lower) * RADIAN, 20, 1e-9);
    cr_assert_float_eq((b->upper - b->lower) * RADIAN, 70, 1e-9);
    cr_assert_eq(phi->weight, 3);
    cr_assert_eq(p->restraints.dihedral_count, 2);
    cr_assert(has_note(p, "dihedral all"));
    tml_problem_free(p);
}

/* ---- words and lines ---- */

Test(sheet, blanks_comments_line_ends_and_marks_do_not_matter) {
    static const char *const TEXTS[] = {
        "\n\n# first\n  \tsheet\t1   # version\natom A bead#x\natom\tB   bead\nlimit A B 1 2",
        "sheet 1\r\natom A bead\r\natom B bead\r\nlimit A B 1 2\r\n",
        "sheet 1\ratom A bead\ratom B bead\rlimit A B 1 2\r",
        "\xef\xbb\xbfsheet 1\natom A bead\natom B bead\nlimit \"A\" B 1 2\n",
    };
    for (size_t i = 0; i < sizeof TEXTS / sizeof *TEXTS; i++) {
        tml_problem *p = read_good(TEXTS[i]);
        cr_assert_eq(p->molecule.atom_count, 2, "text %zu", i);
        cr_assert_eq(p->restraints.distance_count, 1, "text %zu", i);
        tml_problem_free(p);
    }
}

/* ---- several files ---- */

Test(sheet, files_share_the_molecule_but_not_their_ids) {
    tml_problem *p = NULL;
    tml_error error;
    const char *texts[TEXTS_MOST] = {"sheet 1\nsequence X 1 GLY ALA\natom A bead\natom B bead\nlimit A B 1 5\nlimit A B 1 5 as same\n",
                                     "sheet 1\nlimit A B 1 5\nlimit A B 2 6 as same\nsequence X SER\npeptide X 2 cis\n"};
    cr_assert_eq(problem_read_texts(texts, &p, &error), TML_OK, "%s", error.message);
    cr_assert_eq(p->restraints.distance_count, 4);
    for (int i = 0; i < 4; i++) {
        cr_assert_eq(p->restraints.distances[i].alternative_count, 1);
        cr_assert_eq(p->restraints.distances[i].place.file, i / 2);
    }
    cr_assert_geq(tml_molecule_find_residue(&p->molecule, "X", "3"), 0);
    tml_problem_free(p);
}

/* ---- errors ---- */

Test(sheet, errors_name_place_what_was_found_and_what_was_expected) {
    expect_refused("sheet 2\n", 1, 7, "found '2' where 1, the grammar's version");
    expect_refused("sheet\n", 1, 6, "the line ends where 1");
    expect_refused("sheet 1 x\n", 1, 9, "the end of the line");
    expect_refused(BEADS "limmit A B 1 2\n", 6, 1, "no statement begins with 'limmit'; the nearest: limit");
    expect_refused(BEADS "limit A B 1\n", 6, 12, "the line ends where an upper limit");
    expect_refused(BEADS "limit A B 1 2x\n", 6, 13, "found '2x' where an upper limit in Å, or -");
    expect_refused(BEADS "limit A B 1 2 3\n", 6, 15, "as, weight, together, average or the end of the line");
    expect_refused(BEADS "limit A B 5 4\n", 6, 13, "not below the lower one");
    expect_refused(BEADS "limit A B -1 4\n", 6, 11, "never negative");
    expect_refused(BEADS "limit A B 1 2 as\n", 6, 17, "an id");
    expect_refused(BEADS "limit A B 1 2 weight -1\n", 6, 22, "a weight of 0 or more");
    expect_refused(BEADS "limit A:1 B 1 2\n", 6, 7, "chain:residue:atom");
    expect_refused(BEADS "limit A,,C B 1 2\n", 6, 7, "an atom");
    expect_refused(BEADS "dihedral A B C D 10\n", 6, 20, "where the interval ends");
    expect_refused(BEADS "dihedral A B C D - 10\n", 6, 18, "where the interval begins");
    expect_refused(BEADS "dihedral A B C A 0 10\n", 6, 16, "the same atom twice");
    expect_refused(BEADS "dihedral A B C D 0 10 average\n", 6, 23, "as, weight or the end");
    expect_refused(BEADS "atom A bead\n", 6, 6, "A");
    expect_refused("sheet 1\natom A Xx\n", 2, 8, "an element's symbol, or bead");
    expect_refused("sheet 1\natom A* C\n", 2, 6, "without wildcards");
    expect_refused("sheet 1\nsequence A MET\n", 2, 12, "the number of the first residue");
    expect_refused("sheet 1\nsequence A 999999999 MET\n", 2, 22, "at most eight digits");
    expect_refused("sheet 1\nsequence A 1\n", 2, 13, "a residue");
    expect_refused("sheet 1\nsequence A 1 QQQ\n", 2, 14, "QQQ");
    expect_refused("sheet 1\nsequence A 1 SER\nvariant A 2 -HG\n", 3, 11, "a residue of a sequence above");
    expect_refused("sheet 1\nsequence A 1 SER\nends A open up\n", 3, 13, "the end of the line");
    expect_refused("sheet 1\nsequence A 1 SER\nends A closed\n", 3, 8, "charged, neutral or open");
    expect_refused("sheet 1\nsequence A 1 SER GLY\npeptide A 1 flat\n", 3, 13, "cis or trans");
    expect_refused(BEADS "chiral A B C D 1\n", 6, 16, "+ or -");
    expect_refused(BEADS "plane A B C\n", 6, 12, "at least four");
    expect_refused(BEADS "plane A B C D within 0\n", 6, 22, "more than 0");
    expect_refused("sheet 1\ntitle \"open\n", 2, 7, "quote");
}

Test(sheet, numbers_are_finite_and_decimal) {
    static const char *const BAD[] = {"nan", "inf", "-inf", "1e999", "0x4", "1,5", "1.5(2)", "\"\"", "--", "+"};
    char text[256];
    for (size_t i = 0; i < sizeof BAD / sizeof *BAD; i++) {
        snprintf(text, sizeof text, BEADS "limit A B %s -\n", BAD[i]);
        expect_refused(text, 6, 11, "a lower limit in Å, or -");
    }
}

Test(sheet, unknown_atoms_are_counted_with_the_nearest_names) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 SER GLY\nlimit A:1:HB1 A:2:H 1 5 as old\nlimit A:9:H A:2:H 1 5 as far\nlimit B:1:H A:2:H 1 5 as chain\n"
                                  "limit A:1:H1 A:1:H1 1 2 as self\n");
    static const char *const SAYS[] = {"A:1:HB1: no such atom in SER; it has HB2, HB3", "A:9: no such residue; chain A has 1 to 2",
                                       "B:1: no such chain; nearest: A", "A:1:H1: both sides name the same atom"};
    cr_assert_eq(p->restraints.distance_count, 0);
    cr_assert_eq(p->restraints.unmapped_count, 4);
    for (int i = 0; i < 4; i++) {
        cr_assert_str_eq(p->restraints.unmapped[i].reason, SAYS[i]);
        cr_assert_eq(p->restraints.unmapped[i].place.line, 3 + i);
    }
    tml_problem_free(p);
}

/* ---- size ---- */

/* Neither many residues nor many statements about them take more than linear time. */
Test(sheet, long_sheets_are_read_in_linear_time) {
    enum { CHAINS = 30000 };
    char *text = tml_alloc(CHAINS * 80 + 64, 1), *at = text;
    at += sprintf(at, "sheet 1\n");
    for (int i = 0; i < CHAINS; i++) at += sprintf(at, "sequence c%d 1 GLY\n", i);
    for (int i = 0; i < CHAINS; i++) at += sprintf(at, "sequence c%d GLY\npeptide c%d 1 trans\n", i, i);
    sprintf(at, "wrong\n"); /* stops before the molecule is made */
    double start = tml_seconds();
    expect_refused(text, 3 * CHAINS + 2, 1, "wrong");
    cr_assert_lt(tml_seconds() - start, seconds_allowed(2.0));
    free(text);
}
