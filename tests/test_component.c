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
