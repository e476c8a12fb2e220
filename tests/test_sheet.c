/* Every statement of the sheet's grammar, and what it says of mistakes. */
#include <math.h>

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
    read_bad("sheet 1\natom P bead\natom Q bead\nlimit P Q 1 2 wieght 1\n", 4, "as, weight, average");
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
    read_bad("sheet 1\ncomponent LIG ligand.cif\n", 2, "not yet understood");
    read_bad("sheet 1\nalike A B\n", 2, "not yet understood");
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
