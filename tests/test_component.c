/* Components as dictionaries describe them. The molecules are invented. */
#include <criterion/criterion.h>

#include <math.h>

#include "base/vector.h"
#include "given_text.h"
#include "molecule/elements.h"

/* An amino acid with a selenium ether, as an archive writes it: neutral, with leaving atoms, without target values or coordinates. */
#define SELENO                                                                                                                 \
    "data_QSE\n_chem_comp.id QSE\n_chem_comp.type 'L-PEPTIDE LINKING'\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n" \
    "_chem_comp_atom.type_symbol\n_chem_comp_atom.charge\n_chem_comp_atom.pdbx_leaving_atom_flag\n"                            \
    "QSE N N 0 N\nQSE CA C 0 N\nQSE C C 0 N\nQSE O O 0 N\nQSE OXT O 0 Y\nQSE CB C 0 N\nQSE SED SE 0 N\nQSE CE C 0 N\n"          \
    "QSE H H 0 N\nQSE H2 H 0 Y\nQSE HA H 0 N\nQSE HB2 H 0 N\nQSE HB3 H 0 N\nQSE HE1 H 0 N\nQSE HE2 H 0 N\nQSE HE3 H 0 N\n"      \
    "QSE HXT H 0 Y\nloop_\n_chem_comp_bond.comp_id\n_chem_comp_bond.atom_id_1\n_chem_comp_bond.atom_id_2\n"                    \
    "_chem_comp_bond.value_order\n_chem_comp_bond.pdbx_aromatic_flag\n"                                                        \
    "QSE N CA SING N\nQSE N H SING N\nQSE N H2 SING N\nQSE CA C SING N\nQSE CA CB SING N\nQSE CA HA SING N\nQSE C O DOUB N\n"   \
    "QSE C OXT SING N\nQSE OXT HXT SING N\nQSE CB SED SING N\nQSE CB HB2 SING N\nQSE CB HB3 SING N\nQSE SED CE SING N\n"        \
    "QSE CE HE1 SING N\nQSE CE HE2 SING N\nQSE CE HE3 SING N\n"

static tml_problem *read_both(const char *sheet, const char *dictionary) {
    tml_problem *problem = NULL;
    tml_error error;
    tml_status status = problem_read_texts((const char *[TEXTS_MOST]){sheet, dictionary}, &problem, &error);
    cr_assert_eq(status, TML_OK, "line %ld: %s", error.line, error.message);
    return problem;
}

static double bond_length(const tml_problem *problem, int32_t a, int32_t b) {
    for (int32_t i = 0; i < problem->molecule.bond_count; i++) {
        const tml_bond *bond = &problem->molecule.bonds[i];
        if ((bond->a == a && bond->b == b) || (bond->a == b && bond->b == a)) return bond->length;
    }
    return NAN;
}

static double angle_between(const tml_problem *problem, int32_t a, int32_t b, int32_t c) {
    for (int32_t i = 0; i < problem->molecule.angle_count; i++) {
        const tml_angle *angle = &problem->molecule.angles[i];
        if (angle->b == b && ((angle->a == a && angle->c == c) || (angle->a == c && angle->c == a))) return angle->angle * 180 / TML_PI;
    }
    return NAN;
}

static bool has_atom(const tml_problem *problem, const char *chain, const char *number, const char *name) {
    int32_t residue = tml_molecule_find_residue(&problem->molecule, chain, number);
    return residue >= 0 && tml_molecule_find_atom(&problem->molecule, residue, name) >= 0;
}

Test(component, an_amino_acid_of_a_dictionary_stands_in_a_chain_as_the_built_in_ones_do) {
    tml_problem *problem = read_both("sheet 1\nsequence A 1 ALA QSE GLY\n", SELENO);
    const tml_molecule *molecule = &problem->molecule;
    int32_t residue = tml_molecule_find_residue(molecule, "A", "2");
    cr_assert_eq(molecule->residues[residue].polymer, TML_POLYMER_PROTEIN);
    cr_assert_not(molecule->residues[residue].standard);
    cr_assert_eq(molecule->peptide_count, 2);
    cr_assert(has_atom(problem, "A", "2", "H") && !has_atom(problem, "A", "2", "H2") && !has_atom(problem, "A", "2", "OXT"));
    cr_assert_eq(molecule->residues[residue].atom_count, 14);
    int32_t ca = atom_at(problem, "A", "2", "CA"), se = atom_at(problem, "A", "2", "SED"), c = atom_at(problem, "A", "2", "C");
    cr_assert_eq(molecule->atoms[se].element, 34);
    /* Engh & Huber 1991: the carbonyl of a peptide; Allen et al. 1987: selenium to carbon; neutron diffraction: C-H */
    cr_assert_float_eq(bond_length(problem, c, atom_at(problem, "A", "2", "O")), 1.231, 1e-9);
    cr_assert_float_eq(bond_length(problem, se, atom_at(problem, "A", "2", "CE")), 1.95, 0.02);
    cr_assert_float_eq(bond_length(problem, ca, atom_at(problem, "A", "2", "HA")), 1.09, 1e-9);
    cr_assert_float_eq(angle_between(problem, ca, c, atom_at(problem, "A", "3", "N")), 116.4, 1.0);
    bool handed = false;
    for (int32_t i = 0; i < molecule->centre_count; i++)
        if (molecule->centres[i].centre == ca) handed = molecule->centres[i].fixed && molecule->centres[i].sign == 1;
    cr_assert(handed, "an L amino acid without coordinates has the hand of its type");
    tml_problem_free(problem);
}

Test(component, its_ends_are_those_of_an_amino_acid) {
    tml_problem *problem = read_both("sheet 1\nsequence A 1 QSE QSE\nsequence B 1 QSE QSE\nends B neutral\n", SELENO);
    cr_assert(has_atom(problem, "A", "1", "H1") && has_atom(problem, "A", "1", "H3") && !has_atom(problem, "A", "1", "H"));
    cr_assert(has_atom(problem, "A", "2", "OXT") && !has_atom(problem, "A", "2", "HXT"));
    cr_assert_eq(problem->molecule.atoms[atom_at(problem, "A", "1", "N")].charge, 1);
    cr_assert(!has_atom(problem, "B", "1", "H3") && has_atom(problem, "B", "2", "HXT"));
    tml_problem_free(problem);
}

/* A ligand ion and a ring without coordinates. Lengths: Allen et al., J. Chem. Soc. Perkin Trans. 2 (1987) S1, from memory: aromatic C-C
 * 1.38 to 1.40, C-Cl on a ring 1.739. */
#define RING                                                                                                                   \
    "data_QRG\n_chem_comp.id QRG\n_chem_comp.type NON-POLYMER\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n"       \
    "_chem_comp_atom.type_symbol\nQRG C1 C\nQRG C2 C\nQRG C3 C\nQRG C4 C\nQRG C5 C\nQRG C6 C\nQRG CL1 CL\nQRG H2 H\nQRG H3 H\n"  \
    "QRG H4 H\nQRG H5 H\nQRG H6 H\nloop_\n_chem_comp_bond.comp_id\n_chem_comp_bond.atom_id_1\n_chem_comp_bond.atom_id_2\n"      \
    "_chem_comp_bond.value_order\nQRG C1 C2 DOUB\nQRG C2 C3 SING\nQRG C3 C4 DOUB\nQRG C4 C5 SING\nQRG C5 C6 DOUB\n"              \
    "QRG C6 C1 SING\nQRG C1 CL1 SING\nQRG C2 H2 SING\nQRG C3 H3 SING\nQRG C4 H4 SING\nQRG C5 H5 SING\nQRG C6 H6 SING\n"          \
    "data_QZN\n_chem_comp_atom.comp_id QZN\n_chem_comp_atom.atom_id ZN\n_chem_comp_atom.type_symbol ZN\n_chem_comp_atom.charge 2\n"

Test(component, a_ring_without_coordinates_is_flat_and_regular) {
    tml_problem *problem = read_both("sheet 1\nsequence L 1 QRG\n", RING);
    const tml_molecule *molecule = &problem->molecule;
    cr_assert_eq(molecule->plane_count, 1);
    cr_assert(molecule->planes[0].has_xy && molecule->planes[0].count == 12);
    int32_t c1 = atom_at(problem, "L", "1", "C1"), c2 = atom_at(problem, "L", "1", "C2"), c6 = atom_at(problem, "L", "1", "C6");
    cr_assert_float_eq(bond_length(problem, c1, c2), 1.39, 0.01);
    cr_assert_float_eq(bond_length(problem, c1, c6), bond_length(problem, c1, c2), 1e-9, "written with single and double bonds, yet aromatic");
    cr_assert_float_eq(bond_length(problem, c1, atom_at(problem, "L", "1", "CL1")), 1.739, 0.01);
    cr_assert_float_eq(bond_length(problem, c2, atom_at(problem, "L", "1", "H2")), 1.08, 1e-9);
    cr_assert_float_eq(angle_between(problem, c2, c1, c6), 120, 1e-6);
    cr_assert_eq(molecule->centre_count, 0);
    tml_problem_free(problem);
}

/* Source of the lengths: Harding, Acta Cryst. D62 (2006) 678, from memory: Zn-S 2.31 Å, Zn-N 2.03 Å. */
Test(component, an_ion_is_linked_at_the_length_of_its_donors_and_bends_no_angle) {
    tml_problem *problem = read_both("sheet 1\nsequence A 1 CYS GLY HIS GLY CYS CYS HIS CYS\nsequence Z 1 QZN\nlink A:1:SG Z:1:ZN\n"
                                     "link A:3:NE2 Z:1:ZN\nlink A:5:SG Z:1:ZN\nlink A:6:SG Z:1:ZN\nlink A:7:ND1 Z:1:ZN\nlink A:8:SG Z:1:ZN\n",
                                     RING);
    int32_t zinc = atom_at(problem, "Z", "1", "ZN");
    cr_assert_eq(problem->molecule.atoms[zinc].charge, 2);
    cr_assert_float_eq(bond_length(problem, zinc, atom_at(problem, "A", "1", "SG")), 2.31, 1e-9);
    cr_assert_float_eq(bond_length(problem, zinc, atom_at(problem, "A", "3", "NE2")), 2.03, 1e-9);
    cr_assert(!has_atom(problem, "A", "1", "HG") && !has_atom(problem, "A", "3", "HE2") && !has_atom(problem, "A", "7", "HD1"));
    cr_assert_eq(problem->molecule.angle_first[zinc], problem->molecule.angle_first[zinc + 1]);
    tml_problem_free(problem);
}

/* A tetrahedral centre with coordinates, and one whose dictionary gives a sign that differs from them: the sign counts. */
#define HANDED(sign)                                                                                                           \
    "data_QHN\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\n"                          \
    "_chem_comp_atom.pdbx_model_Cartn_x_ideal\n_chem_comp_atom.pdbx_model_Cartn_y_ideal\n_chem_comp_atom.pdbx_model_Cartn_z_ideal\n" \
    "QHN C1 C 0 0 0\nQHN F F 0.79 0.79 0.79\nQHN CL CL 1.02 -1.02 -1.02\nQHN BR BR -1.12 1.12 -1.12\nQHN H H -0.63 -0.63 0.63\n" \
    "loop_\n_chem_comp_bond.comp_id\n_chem_comp_bond.atom_id_1\n_chem_comp_bond.atom_id_2\n_chem_comp_bond.value_order\n"      \
    "QHN C1 F SING\nQHN C1 CL SING\nQHN C1 BR SING\nQHN C1 H SING\n" sign

Test(component, a_hand_comes_from_coordinates_unless_a_sign_is_given) {
    static const char SIGN[] = "loop_\n_chem_comp_chir.comp_id\n_chem_comp_chir.id\n_chem_comp_chir.atom_id_centre\n_chem_comp_chir.atom_id_1\n"
                               "_chem_comp_chir.atom_id_2\n_chem_comp_chir.atom_id_3\n_chem_comp_chir.volume_sign\nQHN c C1 F CL BR ";
    for (int k = 0; k < 3; k++) {
        char text[4096];
        snprintf(text, sizeof text, HANDED("%s%s"), k == 0 ? "" : SIGN, k == 0 ? "" : k == 1 ? "negative\n" : "both\n");
        tml_problem *problem = read_both("sheet 1\nsequence L 1 QHN\n", text);
        cr_assert_eq(problem->molecule.centre_count, 1);
        const tml_centre *centre = &problem->molecule.centres[0];
        cr_assert_eq(centre->fixed, k < 2);
        cr_assert_eq(has_note(problem, "no handedness for C1"), k == 2);
        const double f[3] = {1, 1, 1}, cl[3] = {1, -1, -1}, br[3] = {-1, 1, -1}, origin[3] = {0, 0, 0};
        cr_assert_gt(tml_volume_of(origin, f, cl, br), 0);
        if (k < 2) cr_assert_eq(centre->sign, k == 0 ? 1 : -1);
        tml_problem_free(problem);
    }
}

/* A sugar-like carbon whose hydroxyl group leaves when something is bonded to it. */
#define LEAVING                                                                                                                \
    "data_QSG\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\n_chem_comp_atom.pdbx_leaving_atom_flag\n" \
    "QSG C1 C N\nQSG O1 O Y\nQSG HO1 H Y\nQSG C2 C N\nQSG H1 H N\nQSG H1A H N\nQSG H21 H N\nQSG H22 H N\nQSG H23 H N\n"          \
    "loop_\n_chem_comp_bond.comp_id\n_chem_comp_bond.atom_id_1\n_chem_comp_bond.atom_id_2\n_chem_comp_bond.value_order\n"      \
    "QSG O1 C1 SING\nQSG O1 HO1 SING\nQSG C1 C2 SING\nQSG C1 H1 SING\nQSG C1 H1A SING\nQSG C2 H21 SING\nQSG C2 H22 SING\nQSG C2 H23 SING\n"

Test(component, leaving_atoms_give_way_to_a_link) {
    tml_problem *problem = read_both("sheet 1\nsequence A 1 GLY ASN GLY\nsequence L 1 QSG QSG\nlink A:2:ND2 L:1:C1\n", LEAVING);
    cr_assert(!has_atom(problem, "L", "1", "O1") && !has_atom(problem, "L", "1", "HO1") && has_atom(problem, "L", "1", "H1A"));
    cr_assert(has_atom(problem, "L", "2", "O1") && has_atom(problem, "L", "2", "HO1"));
    cr_assert(has_atom(problem, "A", "2", "HD21") && !has_atom(problem, "A", "2", "HD22"));
    tml_problem_free(problem);
}

/* An acyl group and an amine of the size of an acetyl group and methylamine, as archives write them: whole molecules. */
#define CAPS                                                                                                                   \
    "data_QAC\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\n"                          \
    "QAC C C\nQAC O O\nQAC CH3 C\nQAC H H\nQAC H1 H\nQAC H2 H\nQAC H3 H\nQAM N N\nQAM C C\nQAM HN1 H\nQAM HN2 H\nQAM H1 H\nQAM H2 H\nQAM H3 H\n" \
    "loop_\n_chem_comp_bond.comp_id\n_chem_comp_bond.atom_id_1\n_chem_comp_bond.atom_id_2\n_chem_comp_bond.value_order\n"      \
    "QAC C O DOUB\nQAC C CH3 SING\nQAC C H SING\nQAC CH3 H1 SING\nQAC CH3 H2 SING\nQAC CH3 H3 SING\n"                           \
    "QAM N C SING\nQAM N HN1 SING\nQAM N HN2 SING\nQAM C H1 SING\nQAM C H2 SING\nQAM C H3 SING\n"

Test(component, small_acyl_groups_and_amines_cap_a_chain) {
    tml_problem *problem = read_both("sheet 1\nsequence A 1 QAC ALA QAM\nsequence B 1 QAC\n", CAPS);
    const tml_molecule *molecule = &problem->molecule;
    cr_assert_eq(molecule->peptide_count, 2);
    cr_assert(!has_atom(problem, "A", "1", "H") && has_atom(problem, "A", "2", "H") && !has_atom(problem, "A", "2", "H2"));
    cr_assert(!has_atom(problem, "A", "2", "OXT") && has_atom(problem, "A", "3", "HN1") && !has_atom(problem, "A", "3", "HN2"));
    cr_assert(has_atom(problem, "B", "1", "H"), "by itself it is whole");
    int32_t c = atom_at(problem, "A", "1", "C"), n = atom_at(problem, "A", "2", "N");
    cr_assert_float_eq(bond_length(problem, c, n), 1.329, 1e-9); /* Engh & Huber 1991 */
    double sum = angle_between(problem, atom_at(problem, "A", "1", "O"), c, n) + angle_between(problem, atom_at(problem, "A", "1", "CH3"), c, n) +
                 angle_between(problem, atom_at(problem, "A", "1", "O"), c, atom_at(problem, "A", "1", "CH3"));
    cr_assert_float_eq(sum, 360, 1e-6);
    for (int32_t i = 0; i < molecule->atom_count; i++) cr_assert_eq(molecule->atoms[i].charge, 0);
    tml_problem_free(problem);
}

Test(component, a_dictionary_comes_before_what_is_built_in_and_says_so) {
    char text[4096] = "";
    const char *from = SELENO;
    for (size_t i = 0; from[i] != '\0'; i++) text[i] = from[i];
    for (char *at = text; (at = strstr(at, "QSE")) != NULL;) memcpy(at, "ALA", 3);
    tml_problem *problem = read_both("sheet 1\nsequence A 1 GLY ALA GLY\n", text);
    cr_assert(has_atom(problem, "A", "2", "SED") && !has_atom(problem, "A", "2", "HB1"));
    cr_assert(has_note(problem, "ALA is used as described here"));
    tml_problem_free(problem);
}

Test(component, components_that_nothing_names_are_passed_over) {
    tml_problem *problem = read_both("sheet 1\nsequence A 1 GLY ALA\n", RING);
    cr_assert_eq(problem->note_count, 0);
    tml_problem_free(problem);
}

/* ---- what is refused ---- */

static void refused(const char *dictionary, long line, const char *says) {
    tml_problem *problem = NULL;
    tml_error error;
    tml_status status = problem_read_texts((const char *[TEXTS_MOST]){"sheet 1\nsequence L 1 QX\n", dictionary}, &problem, &error);
    cr_assert_eq(status, TML_BAD_INPUT, "not refused: %s", dictionary);
    cr_assert_not_null(strstr(error.message, says), "'%s' does not hold '%s'", error.message, says);
    cr_assert_eq(error.line, line, "line %ld: %s", error.line, error.message);
}

#define ATOMS "data_QX\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\nQX C1 C\nQX C2 C\n"
#define BONDS "loop_\n_chem_comp_bond.comp_id\n_chem_comp_bond.atom_id_1\n_chem_comp_bond.atom_id_2\n_chem_comp_bond.value_order\n"
#define ANGLES "loop_\n_chem_comp_angle.comp_id\n_chem_comp_angle.atom_id_1\n_chem_comp_angle.atom_id_2\n_chem_comp_angle.atom_id_3\n_chem_comp_angle.value_angle\n"

Test(component, slips_are_told_with_their_place) {
    refused(ATOMS "QX C2 C\n", 8, "an atom that is not listed yet");
    refused(ATOMS "QX C3 CC\n", 8, "an element's symbol");
    refused(ATOMS "QX +C C\n", 8, "an atom's name");
    refused(ATOMS BONDS "QX C1 C3 SING\n", 13, "nearest: C1, C2");
    refused(ATOMS BONDS "QX C1 C1 SING\n", 13, "another atom");
    refused(ATOMS BONDS "QX C1 C2 FEW\n", 13, "a bond order");
    refused(ATOMS BONDS "QY C1 C2 SING\n", 13, "a component whose atoms are listed");
    refused(ATOMS ANGLES "QX C1 C2 C1 110\n", 14, "another atom");
    refused("data_QX\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\nQX C1\n", 3, "no type_symbol");
    refused("data_QY\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\nQY C1 C\n", 2, "unknown residue \"QX\"");
}

Test(component, a_name_cannot_stand_for_two) {
    tml_problem *problem = NULL;
    tml_error error;
    tml_status status = problem_read_texts((const char *[TEXTS_MOST]){"sheet 1\nsequence L 1 QX QX\n", ATOMS BONDS "QX C1 C2 SING\n", ATOMS}, &problem, &error);
    cr_assert_eq(status, TML_BAD_INPUT);
    cr_assert_not_null(strstr(error.message, "component QX is described already, at "));
}

/* Listed angles of a four-ring, each as in an open chain: 438 degrees in all. They give way to a regular ring. */
#define FOUR                                                                                                                   \
    "data_QFR\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\nQFR C1 C\nQFR C2 C\nQFR C3 C\nQFR C4 C\n" \
    BONDS "QFR C1 C2 SING\nQFR C2 C3 SING\nQFR C3 C4 SING\nQFR C4 C1 SING\n" ANGLES                                              \
    "QFR C1 C2 C3 109.5\nQFR C2 C3 C4 109.5\nQFR C3 C4 C1 109.5\nQFR C4 C1 C2 109.5\n"

Test(component, angles_that_no_ring_can_have_are_not_asked_for) {
    tml_problem *problem = read_both("sheet 1\nsequence L 1 QFR\n", FOUR);
    double sum = 0;
    for (int32_t i = 0; i < problem->molecule.angle_count; i++) sum += problem->molecule.angles[i].angle * 180 / TML_PI;
    cr_assert_eq(problem->molecule.angle_count, 4);
    cr_assert_lt(sum, 360);
    tml_problem_free(problem);
}

Test(component, names_filled_up_with_blanks_and_numbers_that_are_none_are_read) {
    tml_problem *problem = read_both("sheet 1\nsequence L 1 QX\n",
                                     "data_QX\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\n_chem_comp_atom.x\n"
                                     "_chem_comp_atom.y\n_chem_comp_atom.z\nQX \"O' \" O NaN NaN NaN\nQX C1 C ******** 0 0\n" BONDS "QX \"O'\" C1 SING\n");
    cr_assert_float_eq(bond_length(problem, atom_at(problem, "L", "1", "O'"), atom_at(problem, "L", "1", "C1")), 1.426, 0.01);
    tml_problem_free(problem);
}

/* Source of the angle and length: Engh & Huber 1991, cystine; the D residue's own dictionary has neither. */
#define DCYS                                                                                                                   \
    "data_QDC\n_chem_comp.id QDC\n_chem_comp.type 'D-PEPTIDE LINKING'\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\n" \
    "QDC N N\nQDC CA C\nQDC C C\nQDC O O\nQDC CB C\nQDC SG S\nQDC HN H\nQDC HA H\nQDC HB1 H\nQDC HB2 H\nQDC HG H\n"               \
    BONDS "QDC N CA SING\nQDC CA C SING\nQDC C O DOUB\nQDC CA CB SING\nQDC CB SG SING\nQDC N HN SING\nQDC CA HA SING\nQDC CB HB1 SING\n" \
    "QDC CB HB2 SING\nQDC SG HG SING\n"

Test(component, d_and_l_residues_share_a_ring_and_a_disulfide) {
    static const char NEF[] = "data_x\nsave_s\nloop_\n_nef_sequence.index\n_nef_sequence.chain_code\n_nef_sequence.sequence_code\n_nef_sequence.residue_name\n"
                              "_nef_sequence.linking\n1 A 1 QDC cyclic\n2 A 2 GLY middle\n3 A 3 CYS middle\n4 A 4 ALA cyclic\nstop_\nloop_\n"
                              "_nef_covalent_links.chain_code_1\n_nef_covalent_links.sequence_code_1\n_nef_covalent_links.residue_name_1\n"
                              "_nef_covalent_links.atom_name_1\n_nef_covalent_links.chain_code_2\n_nef_covalent_links.sequence_code_2\n"
                              "_nef_covalent_links.residue_name_2\n_nef_covalent_links.atom_name_2\nA 1 QDC SG A 3 CYS SG\nstop_\nsave_\n";
    tml_problem *problem = read_both(NEF, DCYS);
    const tml_molecule *molecule = &problem->molecule;
    cr_assert_eq(molecule->peptide_count, 4);
    int32_t s1 = atom_at(problem, "A", "1", "SG"), s2 = atom_at(problem, "A", "3", "SG");
    cr_assert_float_eq(bond_length(problem, s1, s2), 2.030, 1e-9);
    cr_assert_float_eq(angle_between(problem, atom_at(problem, "A", "1", "CB"), s1, s2), 103.8, 1e-6);
    cr_assert(!has_atom(problem, "A", "1", "HG") && !has_atom(problem, "A", "3", "HG"));
    cr_assert_eq(tml_molecule_hand(molecule, atom_at(problem, "A", "1", "N"), atom_at(problem, "A", "1", "CA"), atom_at(problem, "A", "1", "C")), -1);
    cr_assert_eq(tml_molecule_hand(molecule, atom_at(problem, "A", "3", "N"), atom_at(problem, "A", "3", "CA"), atom_at(problem, "A", "3", "C")), 1);
    cr_assert_eq(tml_molecule_hand(molecule, atom_at(problem, "A", "2", "N"), atom_at(problem, "A", "2", "CA"), atom_at(problem, "A", "2", "C")), 0);
    tml_problem_free(problem);
}

/* Two small flat rings leave an arm beside them more than a straight angle; what is built stays below it. */
Test(component, no_angle_is_wider_than_a_straight_one) {
    tml_problem *problem = read_both("sheet 1\nsequence L 1 QBR\n",
                                     "data_QBR\nloop_\n_chem_comp_atom.comp_id\n_chem_comp_atom.atom_id\n_chem_comp_atom.type_symbol\nQBR C1 C\nQBR C2 C\n"
                                     "QBR C3 C\nQBR C4 C\nQBR C5 C\nQBR C6 C\n" BONDS "QBR C1 C2 DOUB\nQBR C2 C3 SING\nQBR C3 C4 DOUB\nQBR C4 C5 SING\n"
                                     "QBR C5 C6 DOUB\nQBR C6 C1 SING\nQBR C1 C3 SING\n");
    cr_assert_gt(problem->molecule.angle_count, 8);
    for (int32_t i = 0; i < problem->molecule.angle_count; i++) cr_assert_lt(problem->molecule.angles[i].angle, TML_PI);
    tml_problem_free(problem);
}
