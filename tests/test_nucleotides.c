/* Nucleotides in chains: atoms at ends and between, hands, planes, the pucker's freedom, names in restraints.
 *
 * Names and prochirality: Markley et al., Pure Appl. Chem. 70 (1998) 117 (from memory). Geometry is compared with the open monomer
 * dictionary in tests/oracle/test_residues.py.
 *
 * Contents: strands - geometry - names
 */
#include "given_text.h"

#include <math.h>
#include <string.h>

#include "base/vector.h"

/* ---- strands ---- */

static bool has(const tml_problem *p, const char *number, const char *name) {
    return tml_molecule_find_atom(&p->molecule, tml_molecule_find_residue(&p->molecule, "A", number), name) >= 0;
}

static bool bonded(const tml_molecule *m, int32_t a, int32_t b) {
    for (int32_t k = m->neighbour_first[a]; k < m->neighbour_first[a + 1]; k++)
        if (m->neighbours[k] == b) return true;
    return false;
}

Test(strands, begin_with_a_hydroxyl_group_and_end_with_one) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 DG DC DA\n");
    cr_assert(!has(p, "1", "P") && has(p, "1", "HO5'") && !has(p, "1", "HO3'"));
    cr_assert(has(p, "2", "P") && has(p, "2", "OP1") && !has(p, "2", "HO5'") && !has(p, "2", "HO3'"));
    cr_assert(has(p, "3", "HO3'") && !has(p, "3", "OP3"));
    cr_assert(bonded(&p->molecule, atom_at(p, "A", "1", "O3'"), atom_at(p, "A", "2", "P")));
    cr_assert(bonded(&p->molecule, atom_at(p, "A", "2", "O4'"), atom_at(p, "A", "2", "C1'")));
    cr_assert_eq(p->molecule.peptide_count, 0);
    cr_assert_eq(p->molecule.residues[1].polymer, TML_POLYMER_NUCLEIC);
    tml_problem_free(p);
}

Test(strands, may_begin_with_a_phosphate) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 DG DC\nvariant A 1 +P,+OP1,+OP2,+OP3,-HO5'\n");
    cr_assert(has(p, "1", "P") && has(p, "1", "OP3") && !has(p, "1", "HO5'"));
    tml_problem_free(p);
}

Test(strands, of_rna_have_a_hydroxyl_group_more) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 G C A U\n");
    cr_assert(has(p, "2", "O2'") && has(p, "2", "HO2'") && has(p, "2", "H2'") && !has(p, "2", "H2''"));
    cr_assert(has(p, "4", "H5") && has(p, "4", "H3"));
    tml_problem_free(p);
}

/* 5'-GC-3' of DNA without phosphate at its start: guanosine C10 H12 N5 O4 with its 3' oxygen bonded on and a cytidine
 * monophosphate's C9 H12 N3 O6 P: counted by hand from the formulas of d(GpC), C19 H24 N8 O10 P with one charge. */
Test(strands, have_the_formula_of_the_dinucleotide) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 DG DC\n");
    int count[120] = {0}, charge = 0;
    for (int32_t i = 0; i < p->molecule.atom_count; i++) {
        count[p->molecule.atoms[i].element]++;
        charge += p->molecule.atoms[i].charge;
    }
    cr_assert(count[6] == 19 && count[1] == 24 && count[7] == 8 && count[8] == 10 && count[15] == 1 && charge == -1,
              "C%d H%d N%d O%d P%d, charge %d", count[6], count[1], count[7], count[8], count[15], charge);
    tml_problem_free(p);
}

/* ---- geometry ---- */

Test(geometry, a_base_is_one_plane_with_what_hangs_on_it) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 DA DT\n");
    const tml_molecule *m = &p->molecule;
    cr_assert_eq(m->plane_count, 2);
    cr_assert(m->planes[0].has_xy && m->planes[0].count == 15 && m->planes[1].count == 12, "%d, %d", m->planes[0].count,
              m->planes[1].count); /* A: C1', ten of the ring and N6, four H; T: C1', nine heavy, H3, H6 */
    tml_problem_free(p);
}

/* Both puckers: the torsion C4'-C3'-C2'-C1' is about +35 or -35 degrees. */
Test(geometry, leaves_the_pucker_free) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 DA\n");
    const tml_molecule *m = &p->molecule;
    int32_t c3 = atom_at(p, "A", "1", "C3'"), c2 = atom_at(p, "A", "1", "C2'"), c4 = atom_at(p, "A", "1", "C4'"),
            c1 = atom_at(p, "A", "1", "C1'");
    bool found = false;
    for (int32_t i = 0; i < m->torsion_count; i++) {
        const tml_torsion *t = &m->torsions[i];
        bool same = (t->a == c4 && t->b == c3 && t->c == c2 && t->d == c1) || (t->a == c1 && t->b == c2 && t->c == c3 && t->d == c4);
        if (!same) continue;
        found = true;
        cr_assert(t->kind == TML_TORSION_FIXED && t->angle == 0 && t->tolerance * 180 / TML_PI > 40 && t->tolerance * 180 / TML_PI < 60);
    }
    cr_assert(found);
    tml_problem_free(p);
}

Test(geometry, fixes_the_hands_of_the_sugar_and_the_names_of_prochiral_atoms) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 DA DC\n");
    static const char *const FIXED[] = {"C1'", "C3'", "C4'", "C5'", "C2'", "P"};
    for (size_t k = 0; k < sizeof FIXED / sizeof *FIXED; k++) {
        int32_t atom = atom_at(p, "A", "2", FIXED[k]);
        bool fixed = false;
        for (int32_t i = 0; i < p->molecule.centre_count; i++)
            fixed = fixed || (p->molecule.centres[i].centre == atom && p->molecule.centres[i].fixed);
        cr_assert(fixed, "%s", FIXED[k]);
    }
    tml_problem_free(p);
}

/* ---- names ---- */

static void expect_names(const char *residue, const char *name, const char *atoms) {
    char sheet[256], found[256] = "";
    snprintf(sheet, sizeof sheet, "sheet 1\nsequence A 1 DC %s DC\natom X bead\nlimit A:2:%s X 1 9 as x\n", residue, name);
    tml_problem *p = read_good(sheet);
    if (p->restraints.distance_count == 1) {
        const tml_alternative *alternative = &p->restraints.alternatives[p->restraints.distances[0].first_alternative];
        group_names(p, alternative->first_a, alternative->count_a, found, sizeof found);
    }
    cr_assert_str_eq(found, atoms, "%s of %s gave '%s'", name, residue, found);
    tml_problem_free(p);
}

Test(names, wildcards_pairs_and_pseudo_atoms_of_nucleotides) {
    expect_names("DT", "H7%", "H71 H72 H73");
    expect_names("DT", "M7", "H71 H72 H73");
    expect_names("DA", "H6x", "H61 H62");
    expect_names("DA", "Q6", "H61 H62");
    expect_names("DA", "H5*", "H5' H5''");
    expect_names("DA", "Q5'", "H5' H5''");
    expect_names("DA", "Q2'", "H2' H2''");
    expect_names("DA", "H2x", "H2' H2''");
}
