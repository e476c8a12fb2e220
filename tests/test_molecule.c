/* Molecules from outlines: atoms and names, chain ends, variants, links, planes, hands, torsions, messages.
 *
 * Contents: outlines for the tests - atoms - ends and variants - links - consistency of the terms - cis and trans - what the
 * input adds - messages - finding
 */
#include <criterion/criterion.h>
#include <stdio.h>
#include <string.h>

#include "base/vector.h"
#include "molecule/molecule.h"

/* ---- outlines for the tests ---- */

static const char *const RESIDUES[] = {"ALA", "ARG", "ASN", "ASP", "CYS", "GLN", "GLU", "GLY", "HIS", "ILE",
                                       "LEU", "LYS", "MET", "PHE", "PRO", "SER", "THR", "TRP", "TYR", "VAL"};
enum { RESIDUE_KINDS = sizeof RESIDUES / sizeof *RESIDUES };

typedef struct bench {
    tml_strings *pool;
    tml_outline outline;
    tml_molecule molecule;
    tml_error error;
} bench;

static bench *new_bench(void) {
    bench *b = tml_alloc(1, sizeof *b);
    b->pool = tml_strings_new();
    return b;
}

static void free_bench(bench *b) {
    tml_molecule_clear(&b->molecule);
    tml_outline_clear(&b->outline);
    tml_strings_free(b->pool);
    free(b);
}

/* "MET", "CYS-HG", "GLY@cis": appended to a chain, numbered on from its last residue. */
static tml_outline_residue *add_residue(bench *b, const char *chain, const char *text) {
    tml_outline *o = &b->outline;
    cr_assert(tml_grow(&o->residues, &o->residue_capacity, o->residue_count + 1, sizeof *o->residues));
    int number = 1;
    for (size_t i = 0; i < o->residue_count; i++) number += strcmp(o->residues[i].chain, chain) == 0;
    char digits[16];
    snprintf(digits, sizeof digits, "%d", number);
    size_t name = strcspn(text, "+-@"), all = strcspn(text, "@");
    tml_outline_residue *residue = &o->residues[o->residue_count++];
    *residue = (tml_outline_residue){.chain = chain,
                                     .number = tml_strings_add(b->pool, digits),
                                     .name = tml_strings_add_part(b->pool, text, name),
                                     .variant = tml_strings_add_part(b->pool, text + name, all - name),
                                     .cis = text[all] == '@',
                                     .place = {0, (int32_t)o->residue_count, 5}};
    return residue;
}

static void add_sequence(bench *b, const char *chain, const char *text) {
    char copy[512];
    snprintf(copy, sizeof copy, "%s", text);
    char *rest;
    for (char *word = strtok_r(copy, " ", &rest); word != NULL; word = strtok_r(NULL, " ", &rest)) add_residue(b, chain, word);
}

static tml_address address_of(const char *chain, const char *number, const char *atom) {
    return (tml_address){.chain = chain, .number = number, .residue = "", .atom = atom, .place = {0, 90, 3}};
}

static void add_link(bench *b, tml_address first, tml_address second) {
    tml_outline *o = &b->outline;
    cr_assert(tml_grow(&o->links, &o->link_capacity, o->link_count + 1, sizeof *o->links));
    o->links[o->link_count++] = (tml_outline_link){first, second, {0, 91, 1}};
}

static void add_atom(bench *b, const char *chain, const char *number, const char *name, int element) {
    tml_outline *o = &b->outline;
    cr_assert(tml_grow(&o->atoms, &o->atom_capacity, o->atom_count + 1, sizeof *o->atoms));
    o->atoms[o->atom_count++] = (tml_outline_atom){
        .chain = chain, .number = number, .residue = "", .name = name, .element = element, .place = {0, 80, 6}};
}

static void add_ends(bench *b, const char *chain, tml_ends ends) {
    tml_outline *o = &b->outline;
    cr_assert(tml_grow(&o->ends, &o->ends_capacity, o->ends_count + 1, sizeof *o->ends));
    o->ends[o->ends_count++] = (tml_outline_ends){chain, ends, {0, 70, 1}};
}

static tml_status build(bench *b) {
    static const char *const files[] = {"test.sheet"};
    tml_molecule_clear(&b->molecule);
    return tml_molecule_build(&b->outline, files, b->pool, &b->molecule, &b->error);
}

static void must_build(bench *b) {
    cr_assert_eq(build(b), TML_OK, "%s", b->error.message);
}

static int32_t atom(const bench *b, const char *chain, const char *number, const char *name) {
    int32_t residue = tml_molecule_find_residue(&b->molecule, chain, number);
    return residue < 0 ? -1 : tml_molecule_find_atom(&b->molecule, residue, name);
}

static int32_t bond_between(const tml_molecule *m, int32_t a, int32_t b) {
    for (int32_t k = m->neighbour_first[a]; k < m->neighbour_first[a + 1]; k++)
        if (m->neighbours[k] == b) return m->neighbour_bonds[k];
    return -1;
}

static double angle_between(const tml_molecule *m, int32_t a, int32_t b, int32_t c) {
    for (int32_t i = m->angle_first[b]; i < m->angle_first[b + 1]; i++)
        if ((m->angles[i].a == a && m->angles[i].c == c) || (m->angles[i].a == c && m->angles[i].c == a))
            return m->angles[i].angle;
    return NAN;
}

static int total_charge(const tml_molecule *m) {
    int sum = 0;
    for (int32_t i = 0; i < m->atom_count; i++) sum += m->atoms[i].charge;
    return sum;
}

/* Every residue in the middle of a chain, and each form of it that differs. */
static const char *const ALL_FORMS = "MET ALA ARG ARG-HH12 ASN ASP ASP+HD2 CYS CYS-HG GLN GLU GLU+HE2 GLY HIS HIS-HD1 HIS-HE2 "
                                     "ILE LEU LYS LYS-HZ3 MET PHE PRO SER "
                                     "THR TRP TYR VAL GLY@cis PRO GLY";

/* ---- atoms ---- */

/* Source: the residues' formulas (any textbook); atoms of -NH-CHR-CO- with R as at pH 7, histidine doubly protonated. */
Test(molecule, residues_have_as_many_atoms_as_their_formulas) {
    static const int heavy[RESIDUE_KINDS] = {5, 11, 8, 8, 6, 9, 9, 4, 10, 8, 8, 9, 8, 11, 7, 6, 7, 14, 12, 7};
    static const int hydrogens[RESIDUE_KINDS] = {5, 13, 6, 4, 5, 8, 6, 3, 8, 11, 11, 13, 9, 9, 7, 5, 7, 10, 9, 9};
    static const int charge[RESIDUE_KINDS] = {[1] = 1, [3] = -1, [6] = -1, [8] = 1, [11] = 1};
    for (int i = 0; i < RESIDUE_KINDS; i++) {
        bench *b = new_bench();
        add_sequence(b, "A", "GLY");
        add_residue(b, "A", RESIDUES[i]);
        add_sequence(b, "A", "GLY");
        must_build(b);
        const tml_residue *residue = &b->molecule.residues[1];
        int h = 0, q = 0;
        for (int32_t k = residue->first_atom; k < residue->first_atom + residue->atom_count; k++) {
            h += b->molecule.atoms[k].element == 1;
            q += b->molecule.atoms[k].charge;
        }
        cr_assert_eq(h, hydrogens[i], "%s has %d hydrogens", RESIDUES[i], h);
        cr_assert_eq(residue->atom_count - h, heavy[i], "%s has %d heavy atoms", RESIDUES[i], residue->atom_count - h);
        cr_assert_eq(q, charge[i], "%s has charge %d", RESIDUES[i], q);
        cr_assert(residue->standard && residue->polymer == TML_POLYMER_PROTEIN && residue->position == 1 && residue->sequence == 2 && residue->insertion == ' ');
        free_bench(b);
    }
}

Test(molecule, names_are_unique_within_a_residue_and_atoms_of_a_residue_follow_each_other) {
    bench *b = new_bench();
    add_sequence(b, "A", ALL_FORMS);
    add_sequence(b, "B", "ALA GLY");
    must_build(b);
    const tml_molecule *m = &b->molecule;
    int32_t at = 0;
    for (int32_t r = 0; r < m->residue_count; r++) {
        cr_assert_eq(m->residues[r].first_atom, at);
        for (int32_t i = at; i < at + m->residues[r].atom_count; i++) {
            cr_assert_eq(m->atoms[i].residue, r);
            cr_assert_eq(tml_molecule_find_atom(m, r, m->atoms[i].name), i, "%s", m->atoms[i].name);
        }
        at += m->residues[r].atom_count;
    }
    cr_assert_eq(at, m->atom_count);
    cr_assert_eq(m->chain_count, 2);
    cr_assert_eq(m->chains[1].residue_count, 2);
    free_bench(b);
}

Test(molecule, residues_of_a_chain_that_stand_apart_in_the_input_are_brought_together) {
    bench *b = new_bench();
    add_sequence(b, "A", "ALA");
    add_sequence(b, "B", "GLY GLY");
    add_sequence(b, "A", "SER");
    must_build(b);
    const tml_molecule *m = &b->molecule;
    cr_assert_str_eq(m->residues[0].name, "ALA");
    cr_assert_str_eq(m->residues[1].name, "SER");
    cr_assert_eq(m->peptide_count, 2);
    cr_assert(bond_between(m, atom(b, "A", "1", "C"), atom(b, "A", "2", "N")) >= 0);
    cr_assert_eq(m->chains[1].first_residue, 2);
    free_bench(b);
}

Test(molecule, an_insertion_code_is_told_from_the_number) {
    bench *b = new_bench();
    add_residue(b, "A", "ALA")->number = "-3";
    add_residue(b, "A", "ALA")->number = "52A";
    must_build(b);
    cr_assert_eq(b->molecule.residues[0].sequence, -3);
    cr_assert_eq(b->molecule.residues[1].sequence, 52);
    cr_assert_eq(b->molecule.residues[1].insertion, 'A');
    free_bench(b);
}

Test(molecule, nothing_is_a_molecule_of_no_atoms) {
    bench *b = new_bench();
    must_build(b);
    cr_assert_eq(b->molecule.atom_count, 0);
    free_bench(b);
}

/* ---- ends and variants ---- */

Test(molecule, chain_ends_are_charged_neutral_or_open) {
    static const struct {
        tml_ends ends;
        const char *first, *last; /* atoms, '!' before those that must not be there */
        int charge;
    } cases[] = {{TML_ENDS_CHARGED, "H1 H2 H3 !H", "O OXT !HXT", 0},
                 {TML_ENDS_NEUTRAL, "H1 H2 !H3 !H", "O OXT HXT", 0},
                 {TML_ENDS_OPEN, "H !H1 !H2 !H3", "O !OXT !HXT", 0}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        bench *b = new_bench();
        add_sequence(b, "A", "ALA GLY VAL");
        add_ends(b, "A", cases[i].ends);
        must_build(b);
        for (int end = 0; end < 2; end++) {
            char copy[64];
            snprintf(copy, sizeof copy, "%s", end == 0 ? cases[i].first : cases[i].last);
            char *rest;
            for (char *name = strtok_r(copy, " ", &rest); name != NULL; name = strtok_r(NULL, " ", &rest))
                cr_assert_eq(atom(b, "A", end == 0 ? "1" : "3", name + (*name == '!')) >= 0, *name != '!', "case %zu: %s", i,
                             name);
        }
        cr_assert_eq(total_charge(&b->molecule), cases[i].charge);
        free_bench(b);
    }
}

Test(molecule, charged_ends_carry_plus_and_minus_one) {
    bench *b = new_bench();
    add_sequence(b, "A", "PRO ALA");
    must_build(b);
    const tml_molecule *m = &b->molecule;
    cr_assert_eq(m->atoms[atom(b, "A", "1", "N")].charge, 1);
    cr_assert_eq(m->atoms[atom(b, "A", "2", "OXT")].charge, -1);
    cr_assert(atom(b, "A", "1", "H2") >= 0 && atom(b, "A", "1", "H3") >= 0 && atom(b, "A", "1", "H1") < 0);
    double o = m->bonds[bond_between(m, atom(b, "A", "2", "C"), atom(b, "A", "2", "O"))].length;
    double oxt = m->bonds[bond_between(m, atom(b, "A", "2", "C"), atom(b, "A", "2", "OXT"))].length;
    cr_assert_eq(o, oxt);
    cr_assert_float_eq(o, 1.249, 1e-9);
    free_bench(b);
}

Test(molecule, middle_and_break_at_a_chains_edge_have_no_end_groups) {
    for (int k = 0; k < 2; k++) {
        bench *b = new_bench();
        add_residue(b, "A", "ALA")->linking = k == 0 ? TML_LINKING_MIDDLE : TML_LINKING_BREAK;
        add_residue(b, "A", "ALA")->linking = k == 0 ? TML_LINKING_MIDDLE : TML_LINKING_BREAK;
        add_residue(b, "A", "ALA")->linking = k == 0 ? TML_LINKING_MIDDLE : TML_LINKING_DEFAULT;
        must_build(b);
        cr_assert(atom(b, "A", "1", "H") >= 0 && atom(b, "A", "1", "H1") < 0);
        cr_assert_eq(atom(b, "A", "3", "OXT") >= 0, k == 1);
        cr_assert_eq(bond_between(&b->molecule, atom(b, "A", "1", "C"), atom(b, "A", "2", "N")) >= 0, k == 0);
        free_bench(b);
    }
}

Test(molecule, an_end_and_a_start_within_a_chain_part_it) {
    bench *b = new_bench();
    add_residue(b, "A", "ALA")->linking = TML_LINKING_START;
    add_residue(b, "A", "ALA")->linking = TML_LINKING_END;
    add_residue(b, "A", "ALA")->linking = TML_LINKING_START;
    add_residue(b, "A", "ALA")->linking = TML_LINKING_END;
    must_build(b);
    cr_assert_eq(b->molecule.peptide_count, 2);
    cr_assert(atom(b, "A", "2", "OXT") >= 0 && atom(b, "A", "3", "H3") >= 0);
    free_bench(b);
}

Test(molecule, a_cyclic_chain_closes_with_a_peptide_bond) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY ALA PRO");
    b->outline.residues[0].linking = b->outline.residues[2].linking = TML_LINKING_CYCLIC;
    must_build(b);
    const tml_molecule *m = &b->molecule;
    cr_assert_eq(m->peptide_count, 3);
    cr_assert(bond_between(m, atom(b, "A", "3", "C"), atom(b, "A", "1", "N")) >= 0);
    cr_assert(atom(b, "A", "1", "H") >= 0 && atom(b, "A", "1", "H1") < 0 && atom(b, "A", "3", "OXT") < 0);
    cr_assert_eq(total_charge(m), 0);
    for (int32_t p = 0; p < 3; p++) {
        cr_assert(m->peptides[p].plane >= 0);
        cr_assert(m->planes[m->peptides[p].plane].has_xy);
    }
    free_bench(b);
}

Test(molecule, variants_change_atoms_and_charges) {
    static const struct {
        const char *residue, *lacks, *has;
        int charge;
    } cases[] = {{"HIS-HD1", "HD1", "HE2", 0},   {"HIS-HE2", "HE2", "HD1", 0}, {"ASP+HD2", "HXT", "HD2", 0},
                 {"GLU+HE2", "HXT", "HE2", 0},   {"LYS-HZ3", "HZ3", "HZ2", 0}, {"CYS-HG", "HG", "SG", -1},
                 {"ARG-HH12", "HH12", "HH11", 0}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        bench *b = new_bench();
        add_sequence(b, "A", "GLY");
        add_residue(b, "A", cases[i].residue);
        add_sequence(b, "A", "GLY");
        must_build(b);
        cr_assert(atom(b, "A", "2", cases[i].lacks) < 0, "%s", cases[i].residue);
        cr_assert(atom(b, "A", "2", cases[i].has) >= 0, "%s", cases[i].residue);
        cr_assert_eq(total_charge(&b->molecule), cases[i].charge, "%s: %d", cases[i].residue, total_charge(&b->molecule));
        free_bench(b);
    }
}

Test(molecule, a_variant_works_on_the_chains_end_too) {
    bench *b = new_bench();
    add_sequence(b, "A", "ALA-H3 GLY+HXT");
    must_build(b);
    cr_assert(atom(b, "A", "1", "H3") < 0 && atom(b, "A", "1", "H2") >= 0 && atom(b, "A", "2", "HXT") >= 0);
    cr_assert_eq(b->molecule.atoms[atom(b, "A", "1", "N")].charge, 0);
    cr_assert_eq(b->molecule.atoms[atom(b, "A", "2", "OXT")].charge, 0);
    free_bench(b);
}

/* ---- links ---- */

/* Source: Engh & Huber 1991: S-S 2.030 Å, C-S-S 103.8°. */
Test(molecule, a_disulfide_takes_the_hydrogens_and_the_charge) {
    for (int k = 0; k < 2; k++) {
        bench *b = new_bench();
        add_sequence(b, "A", k == 0 ? "GLY CYS CYS GLY" : "GLY CYS-HG CYS-HG GLY");
        add_link(b, address_of("A", "2", "SG"), address_of("A", "3", "SG"));
        must_build(b);
        const tml_molecule *m = &b->molecule;
        int32_t s1 = atom(b, "A", "2", "SG"), s2 = atom(b, "A", "3", "SG");
        int32_t bond = bond_between(m, s1, s2);
        cr_assert(bond >= 0 && atom(b, "A", "2", "HG") < 0 && atom(b, "A", "3", "HG") < 0);
        cr_assert_float_eq(m->bonds[bond].length, 2.030, 1e-9);
        cr_assert_float_eq(angle_between(m, atom(b, "A", "2", "CB"), s1, s2), 103.8 * TML_PI / 180, 1e-6);
        cr_assert_eq(total_charge(m), 0);
        for (int32_t t = m->torsion_first[bond]; t < m->torsion_first[bond + 1]; t++)
            cr_assert_eq(m->torsions[t].kind, TML_TORSION_FREE);
        free_bench(b);
    }
}

Test(molecule, a_metal_takes_the_place_of_hydrogens) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY CYS HIS GLY");
    add_atom(b, "A", "101", "ZN", 30);
    add_link(b, address_of("A", "2", "SG"), address_of("A", "101", "ZN"));
    add_link(b, address_of("A", "3", "NE2"), address_of("A", "101", "ZN"));
    must_build(b);
    const tml_molecule *m = &b->molecule;
    cr_assert(atom(b, "A", "2", "HG") < 0 && atom(b, "A", "3", "HE2") < 0 && atom(b, "A", "3", "HD1") >= 0);
    int32_t zinc = atom(b, "A", "101", "ZN");
    cr_assert_eq(zinc, m->atom_count - 1);
    cr_assert_float_eq(m->bonds[bond_between(m, zinc, atom(b, "A", "2", "SG"))].length, 2.31, 1e-9); /* Harding, Acta Cryst. D62 (2006) 678, from memory */
    cr_assert_eq(m->angle_first[zinc], m->angle_first[zinc + 1], "nothing is assumed of a metal's angles");
    double sum = 0;
    int32_t ne2 = atom(b, "A", "3", "NE2");
    for (int32_t i = m->angle_first[ne2]; i < m->angle_first[ne2 + 1]; i++) sum += m->angles[i].angle;
    cr_assert_float_eq(sum, 2 * TML_PI, 1e-6);
    free_bench(b);
}

Test(molecule, an_isopeptide_bond_is_an_amide) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY LYS GLY ASP-OD2 GLY");
    add_link(b, address_of("A", "2", "NZ"), address_of("A", "4", "CG"));
    must_build(b);
    const tml_molecule *m = &b->molecule;
    int32_t nz = atom(b, "A", "2", "NZ"), cg = atom(b, "A", "4", "CG");
    cr_assert_float_eq(m->bonds[bond_between(m, nz, cg)].length, 1.329, 1e-9);
    cr_assert_eq(m->neighbour_first[nz + 1] - m->neighbour_first[nz], 3);
    for (int k = 0; k < 2; k++) {
        double sum = 0;
        for (int32_t i = m->angle_first[k == 0 ? nz : cg]; i < m->angle_first[(k == 0 ? nz : cg) + 1]; i++)
            sum += m->angles[i].angle;
        cr_assert_float_eq(sum, 2 * TML_PI, 1e-6, "planar");
    }
    cr_assert_eq(total_charge(m), 0);
    free_bench(b);
}

/* ---- consistency of the terms ---- */

/* Unit vectors along the arms of a centre exist exactly when the matrix of their cosines has no negative eigenvalue and at most
 * three positive ones; for four arms its determinant vanishes, for planar ones too. */
static double determinant(double m[4][4], int n) {
    double d = 1;
    for (int i = 0; i < n; i++) {
        int pivot = i;
        for (int r = i + 1; r < n; r++)
            if (fabs(m[r][i]) > fabs(m[pivot][i])) pivot = r;
        for (int c = 0; c < n && pivot != i; c++) {
            double swap = m[i][c];
            m[i][c] = m[pivot][c];
            m[pivot][c] = swap;
        }
        if (pivot != i) d = -d;
        if (m[i][i] == 0) return 0;
        d *= m[i][i];
        for (int r = i + 1; r < n; r++)
            for (int c = n - 1; c >= i; c--) m[r][c] -= m[i][c] * m[r][i] / m[i][i];
    }
    return d;
}

Test(molecule, the_angles_around_every_atom_can_be_realised_in_three_dimensions) {
    bench *b = new_bench();
    add_sequence(b, "A", ALL_FORMS);
    add_sequence(b, "B", "PRO CYS LYS HIS");
    must_build(b);
    const tml_molecule *m = &b->molecule;
    int fours = 0, threes = 0;
    for (int32_t i = 0; i < m->atom_count; i++) {
        int32_t first = m->neighbour_first[i], n = m->neighbour_first[i + 1] - first;
        cr_assert_eq(m->angle_first[i + 1] - m->angle_first[i], n * (n - 1) / 2, "all angles around %s", m->atoms[i].name);
        if (n < 3) continue;
        double gram[4][4], minor[4][4];
        for (int p = 0; p < n; p++)
            for (int q = 0; q < n; q++)
                gram[p][q] = p == q ? 1 : cos(angle_between(m, m->neighbours[first + p], i, m->neighbours[first + q]));
        memcpy(minor, gram, sizeof minor);
        double three = determinant(minor, 3);
        const char *residue = m->residues[m->atoms[i].residue].name;
        cr_assert_gt(three, -1e-6, "%s %s", residue, m->atoms[i].name);
        if (n == 4) cr_assert_float_eq(determinant(gram, 4), 0, 1e-6, "%s %s", residue, m->atoms[i].name);
        fours += n == 4;
        threes += n == 3;
    }
    cr_assert(fours > 100 && threes > 80);
    free_bench(b);
}

Test(molecule, a_planes_coordinates_reproduce_its_bonds_and_angles) {
    bench *b = new_bench();
    add_sequence(b, "A", ALL_FORMS);
    add_sequence(b, "B", "ALA GLY+HXT");
    must_build(b);
    const tml_molecule *m = &b->molecule;
    int bonds = 0, angles = 0;
    for (int32_t p = 0; p < m->plane_count; p++) {
        const tml_plane *plane = &m->planes[p];
        cr_assert(plane->has_xy, "%s", m->residues[m->atoms[m->plane_atoms[plane->first]].residue].name);
        for (int32_t i = plane->first; i < plane->first + plane->count; i++)
            for (int32_t j = plane->first; j < i; j++) {
                int32_t a = m->plane_atoms[i], d = m->plane_atoms[j];
                double r = hypot(m->plane_xy[2 * i] - m->plane_xy[2 * j], m->plane_xy[2 * i + 1] - m->plane_xy[2 * j + 1]);
                int32_t bond = bond_between(m, a, d);
                if (bond >= 0) {
                    cr_assert_float_eq(r, m->bonds[bond].length, 0.01, "%s-%s", m->atoms[a].name, m->atoms[d].name);
                    bonds++;
                    continue;
                }
                for (int32_t k = m->neighbour_first[a]; k < m->neighbour_first[a + 1]; k++) {
                    int32_t middle = m->neighbours[k], other = bond_between(m, middle, d);
                    if (other < 0 || isnan(angle_between(m, a, middle, d))) continue;
                    double u = m->bonds[m->neighbour_bonds[k]].length, v = m->bonds[other].length;
                    double wanted = sqrt(u * u + v * v - 2 * u * v * cos(angle_between(m, a, middle, d)));
                    bool inside = false; /* the angle's own middle must lie in the plane */
                    for (int32_t l = plane->first; l < plane->first + plane->count; l++)
                        inside = inside || m->plane_atoms[l] == middle;
                    if (!inside) continue;
                    cr_assert_float_eq(r, wanted, 0.015, "%s %s-%s-%s: %.3f, %.3f", m->residues[m->atoms[a].residue].name,
                                       m->atoms[a].name, m->atoms[middle].name, m->atoms[d].name, r, wanted);
                    angles++;
                }
            }
    }
    cr_assert(bonds > 250 && angles > 300, "%d %d", bonds, angles);
    free_bench(b);
}

Test(molecule, the_atoms_of_a_torsion_are_bonded_in_sequence_and_belong_to_its_bond) {
    bench *b = new_bench();
    add_sequence(b, "A", ALL_FORMS);
    must_build(b);
    const tml_molecule *m = &b->molecule;
    cr_assert_eq(m->torsion_first[m->bond_count], m->torsion_count);
    for (int32_t i = 0; i < m->bond_count; i++)
        for (int32_t t = m->torsion_first[i]; t < m->torsion_first[i + 1]; t++) {
            const tml_torsion *torsion = &m->torsions[t];
            cr_assert(torsion->b == m->bonds[i].a && torsion->c == m->bonds[i].b);
            cr_assert(bond_between(m, torsion->a, torsion->b) >= 0 && bond_between(m, torsion->c, torsion->d) >= 0);
            cr_assert(torsion->a != torsion->c && torsion->d != torsion->b && torsion->a != torsion->d);
            cr_assert(torsion->kind != TML_TORSION_FIXED || torsion->tolerance > 0);
        }
    free_bench(b);
}

/* Distances across planar torsions, computed from the torsions' angles, are those of the plane's coordinates. */
Test(molecule, planar_torsions_and_planes_say_the_same) {
    bench *b = new_bench();
    add_sequence(b, "A", ALL_FORMS);
    must_build(b);
    const tml_molecule *m = &b->molecule;
    int seen = 0;
    for (int32_t t = 0; t < m->torsion_count; t++) {
        const tml_torsion *torsion = &m->torsions[t];
        if (torsion->kind != TML_TORSION_FIXED && torsion->kind != TML_TORSION_PEPTIDE) continue;
        const int32_t atoms[4] = {torsion->a, torsion->b, torsion->c, torsion->d};
        for (int32_t p = 0; p < m->plane_count; p++) {
            double point[4][3] = {{0}};
            int held = 0;
            for (int32_t i = m->planes[p].first; i < m->planes[p].first + m->planes[p].count; i++)
                for (int k = 0; k < 4; k++)
                    if (m->plane_atoms[i] == atoms[k]) {
                        point[k][0] = m->plane_xy[2 * i];
                        point[k][1] = m->plane_xy[2 * i + 1];
                        held++;
                    }
            if (held < 4) continue;
            double found = fabs(tml_dihedral_of(point[0], point[1], point[2], point[3]));
            cr_assert_float_eq(found, fabs(torsion->angle), 1e-6, "%s-%s-%s-%s", m->atoms[atoms[0]].name,
                               m->atoms[atoms[1]].name, m->atoms[atoms[2]].name, m->atoms[atoms[3]].name);
            seen++;
        }
    }
    cr_assert_gt(seen, 250);
    free_bench(b);
}

/* Source: the L-amino acids by the CORN rule, L-threonine and L-isoleucine as (2S,3R) and (2S,3S); prochiral names by the rule
 * that deposited structures follow (common practice): the volume of first-named, second-named and the neighbour nearer the
 * backbone is negative. */
Test(molecule, centres_have_the_hands_of_the_natural_residues) {
    static const struct {
        const char *residue, *centre, *arms[3];
        int sign;
    } known[] = {{"ALA", "CA", {"N", "C", "CB"}, 1},      {"THR", "CB", {"CA", "OG1", "CG2"}, 1},
                 {"ILE", "CB", {"CA", "CG1", "CG2"}, 1},  {"SER", "CB", {"HB2", "HB3", "CA"}, -1},
                 {"LYS", "CE", {"HE2", "HE3", "CD"}, -1}, {"ILE", "CG1", {"HG12", "HG13", "CB"}, -1},
                 {"GLY", "CA", {"HA2", "HA3", "N"}, -1},  {"VAL", "CB", {"CG1", "CG2", "CA"}, -1},
                 {"LEU", "CG", {"CD1", "CD2", "CB"}, -1}, {"PRO", "CD", {"HD2", "HD3", "CG"}, -1},
                 {"PRO", "CG", {"HG2", "HG3", "CB"}, -1}, {"ARG", "CD", {"HD2", "HD3", "CG"}, -1},
                 {"GLN", "CG", {"HG2", "HG3", "CB"}, -1}};
    for (size_t i = 0; i < sizeof known / sizeof *known; i++) {
        bench *b = new_bench();
        add_sequence(b, "A", "GLY");
        add_residue(b, "A", known[i].residue);
        add_sequence(b, "A", "GLY");
        must_build(b);
        int found = 0;
        for (int32_t c = 0; c < b->molecule.centre_count; c++) {
            const tml_centre *centre = &b->molecule.centres[c];
            if (centre->centre != atom(b, "A", "2", known[i].centre)) continue;
            cr_assert(centre->fixed, "%s %s", known[i].residue, known[i].centre);
            for (int k = 0; k < 3; k++) cr_assert_eq(centre->arms[k], atom(b, "A", "2", known[i].arms[k]));
            cr_assert(centre->arms[3] >= 0);
            cr_assert_eq(centre->sign, known[i].sign, "%s %s", known[i].residue, known[i].centre);
            found++;
        }
        cr_assert_eq(found, 1);
        free_bench(b);
    }
}

Test(molecule, methyl_groups_and_ammonium_have_no_hand_of_their_own) {
    bench *b = new_bench();
    add_sequence(b, "A", "ALA LYS VAL");
    must_build(b);
    const tml_molecule *m = &b->molecule;
    static const char *const names[][2] = {{"1", "N"}, {"1", "CB"}, {"2", "NZ"}, {"3", "CG1"}, {"3", "CG2"}};
    for (size_t i = 0; i < sizeof names / sizeof *names; i++) {
        int found = 0;
        for (int32_t c = 0; c < m->centre_count; c++)
            if (m->centres[c].centre == atom(b, "A", names[i][0], names[i][1])) {
                cr_assert(!m->centres[c].fixed && m->centres[c].arms[3] >= 0 && m->centres[c].sign != 0);
                found++;
            }
        cr_assert_eq(found, 1, "%s", names[i][1]);
    }
    free_bench(b);
}

/* The proline ring: torsions within it are near 0, and phi follows: -65 or so, whatever the pucker. */
Test(molecule, prolines_ring_holds_phi) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY PRO GLY");
    must_build(b);
    const tml_molecule *m = &b->molecule;
    int32_t phi[4] = {atom(b, "A", "1", "C"), atom(b, "A", "2", "N"), atom(b, "A", "2", "CA"), atom(b, "A", "2", "C")};
    int found = 0;
    for (int32_t t = 0; t < m->torsion_count; t++) {
        const tml_torsion *torsion = &m->torsions[t];
        if (torsion->a != phi[0] || torsion->b != phi[1] || torsion->c != phi[2] || torsion->d != phi[3]) continue;
        cr_assert_eq(torsion->kind, TML_TORSION_FIXED);
        cr_assert_float_eq(torsion->angle * 180 / TML_PI, -65, 8, "%.1f", torsion->angle * 180 / TML_PI);
        found++;
    }
    cr_assert_eq(found, 1);
    free_bench(b);
}

/* ---- cis and trans ---- */

/* Worked out by hand from Engh & Huber's lengths and angles before proline (116.9°, 122.6°): CA-CA 3.83 Å across a trans
 * and 2.83 Å across a cis peptide; textbooks have about 3.8 and 2.9. */
Test(molecule, a_peptide_set_to_cis_moves_its_torsions_and_its_plane) {
    for (int declared = 0; declared < 2; declared++) {
        bench *b = new_bench();
        add_sequence(b, "A", declared ? "ALA@cis PRO ALA GLY" : "ALA PRO ALA GLY");
        must_build(b);
        tml_molecule *m = &b->molecule;
        cr_assert_eq(m->peptide_count, 3);
        cr_assert(m->peptides[0].cis == declared && m->peptides[0].declared == declared);
        for (int turn = 0; turn < 3; turn++) {
            bool cis = declared ^ (turn % 2);
            tml_molecule_set_peptide(m, 0, cis);
            const tml_peptide *peptide = &m->peptides[0];
            const tml_plane *plane = &m->planes[peptide->plane];
            double ca[2][2] = {{0}};
            for (int32_t i = plane->first; i < plane->first + plane->count; i++)
                for (int k = 0; k < 2; k++)
                    if (m->plane_atoms[i] == (k == 0 ? peptide->ca1 : peptide->ca2))
                        memcpy(ca[k], &m->plane_xy[2 * i], sizeof ca[k]);
            double r = hypot(ca[0][0] - ca[1][0], ca[0][1] - ca[1][1]);
            cr_assert_float_eq(r, cis ? 2.83 : 3.83, 0.01, "%.3f", r);
            for (int32_t t = m->torsion_first[peptide->bond]; t < m->torsion_first[peptide->bond + 1]; t++) {
                const tml_torsion *torsion = &m->torsions[t];
                bool ends = torsion->a == peptide->ca1, starts = torsion->d == peptide->ca2;
                cr_assert_eq(torsion->kind, TML_TORSION_PEPTIDE);
                cr_assert_float_eq(torsion->angle, (ends == starts) != cis ? TML_PI : 0, 1e-12);
            }
        }
        free_bench(b);
    }
}

/* ---- what the input adds ---- */

Test(molecule, single_atoms_have_no_bonds_but_those_of_links) {
    bench *b = new_bench();
    add_atom(b, "", "", "C1", 6);
    add_atom(b, "", "", "C2", 6);
    add_atom(b, "", "", "X", 0);
    add_atom(b, "B", "7", "CA", 6);
    add_link(b, address_of("", "", "C1"), address_of("", "", "C2"));
    must_build(b);
    const tml_molecule *m = &b->molecule;
    cr_assert_eq(m->atom_count, 4);
    cr_assert_eq(m->residue_count, 2);
    cr_assert_eq(m->bond_count, 1);
    cr_assert_float_eq(m->bonds[0].length, 1.52, 1e-9);
    cr_assert_eq(m->angle_count + m->torsion_count + m->centre_count + m->plane_count, 0);
    cr_assert(!m->residues[0].standard && m->residues[0].polymer == TML_POLYMER_NONE);
    char text[32];
    tml_molecule_address(m, 1, text, sizeof text);
    cr_assert_str_eq(text, "C2");
    tml_molecule_address(m, 3, text, sizeof text);
    cr_assert_str_eq(text, "B:7:CA");
    free_bench(b);
}

Test(molecule, a_stated_hand_takes_the_place_of_the_tables) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY ALA PRO");
    tml_outline_chiral chiral = {.centre = address_of("A", "2", "CA"), .sign = -1, .place = {0, 60, 1}};
    chiral.arm[0] = address_of("A", "2", "N");
    chiral.arm[1] = address_of("A", "2", "C");
    chiral.arm[2] = address_of("A", "2", "CB");
    b->outline.chirals = tml_alloc(1, sizeof chiral);
    b->outline.chirals[0] = chiral;
    b->outline.chiral_count = 1;
    must_build(b);
    int found = 0;
    for (int32_t c = 0; c < b->molecule.centre_count; c++)
        if (b->molecule.centres[c].centre == atom(b, "A", "2", "CA")) {
            cr_assert_eq(b->molecule.centres[c].sign, -1);
            cr_assert_eq(b->molecule.centres[c].arms[3], atom(b, "A", "2", "HA"));
            found++;
        }
    cr_assert_eq(found, 1);
    b->outline.chirals[0].arm[2] = b->outline.chirals[0].arm[0];
    cr_assert_eq(build(b), TML_BAD_INPUT);
    cr_assert_eq(b->error.line, 60);
    free_bench(b);
}

Test(molecule, a_stated_plane_has_no_ideal_coordinates) {
    bench *b = new_bench();
    static const char *const names[] = {"P1", "P2", "P3", "P4"};
    for (int i = 0; i < 4; i++) add_atom(b, "", "", names[i], 6);
    tml_outline_plane plane = {.atoms = tml_alloc(4, sizeof *plane.atoms), .atom_count = 4, .within = 0.05};
    for (int i = 0; i < 4; i++) plane.atoms[i] = address_of("", "", names[i]);
    b->outline.planes = tml_alloc(1, sizeof plane);
    b->outline.planes[0] = plane;
    b->outline.plane_count = 1;
    must_build(b);
    cr_assert_eq(b->molecule.plane_count, 1);
    cr_assert(!b->molecule.planes[0].has_xy && b->molecule.planes[0].count == 4 && b->molecule.planes[0].within == 0.05);
    cr_assert_eq(b->molecule.plane_atoms[3], 3);
    b->outline.planes[0].atoms[2].atom = "P1";
    cr_assert_eq(build(b), TML_BAD_INPUT);
    free_bench(b);
}

/* ---- messages ---- */

static void must_refuse(bench *b, const char *message, long line) {
    cr_assert_eq(build(b), TML_BAD_INPUT, "expected: %s", message);
    cr_assert_str_eq(b->error.message, message);
    cr_assert_str_eq(b->error.file, "test.sheet");
    cr_assert_eq(b->error.line, line);
    free_bench(b);
}

Test(molecule, an_unknown_residue_is_named_with_what_is_known) {
    bench *b = new_bench();
    add_sequence(b, "A", "ALA MSE");
    must_refuse(b,
                "A:2: unknown residue \"MSE\"; a component dictionary (CIF) that describes it can be one more input, or named by "
                "`component MSE FILE` in a sheet; built in are ALA ARG ASN ASP CYS GLN GLU GLY HIS ILE LEU LYS MET PHE PRO SER THR "
                "TRP TYR VAL DA DC DG DT A C G U",
                2);
}

Test(molecule, a_variant_of_unknown_atoms_names_the_nearest) {
    bench *b = new_bench();
    add_sequence(b, "A", "SER-HB1");
    must_refuse(b, "A:1: variant names HB1, which SER never has; nearest: HB2, HB3", 1);
}

Test(molecule, a_variant_must_say_plus_or_minus) {
    bench *b = new_bench();
    add_residue(b, "A", "SER")->variant = "HG";
    must_refuse(b, "A:1: variant \"HG\": expected + or - and an atom name, as in -HD1,+HE2", 1);
}

Test(molecule, a_variant_may_not_leave_atoms_without_their_carrier) {
    bench *b = new_bench();
    add_sequence(b, "A", "SER-OG");
    must_refuse(b, "A:1: the variant leaves HG without OG, which carries it", 1);
}

Test(molecule, a_residue_number_stands_once_in_a_chain) {
    bench *b = new_bench();
    add_sequence(b, "A", "SER ALA");
    b->outline.residues[1].number = "1";
    must_refuse(b, "A:1 is given twice, as SER and as ALA", 2);
}

Test(molecule, an_atom_is_given_once) {
    bench *b = new_bench();
    add_atom(b, "A", "7", "CA", 6);
    add_atom(b, "A", "7", "CA", 6);
    must_refuse(b, "atom A:7:CA is given twice", 80);
}

Test(molecule, a_link_names_atoms_that_are_there) {
    bench *b = new_bench();
    add_sequence(b, "A", "SER ALA");
    add_link(b, address_of("A", "1", "HB1"), address_of("A", "2", "CB"));
    must_refuse(b, "A:1:HB1: no such atom in SER; it has HB2, HB3", 90);
}

Test(molecule, a_link_names_residues_and_chains_that_are_there) {
    bench *b = new_bench();
    add_sequence(b, "A", "SER ALA");
    add_link(b, address_of("A", "1", "OG"), address_of("A", "12", "CB"));
    must_refuse(b, "A:12:CB: no such residue; nearest: 1", 90);
    b = new_bench();
    add_sequence(b, "A", "SER ALA");
    add_link(b, address_of("A", "1", "OG"), address_of("Z", "2", "CB"));
    must_refuse(b, "Z:2:CB: no such chain; nearest: A", 90);
    b = new_bench();
    add_sequence(b, "A", "SER ALA");
    tml_address wrong = address_of("A", "1", "OG");
    wrong.residue = "THR";
    add_link(b, wrong, address_of("A", "2", "CB"));
    must_refuse(b, "A:1 is SER, not THR", 90);
}

Test(molecule, a_link_needs_a_free_place) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY ASP GLY ASP GLY");
    add_link(b, address_of("A", "2", "CG"), address_of("A", "4", "OD2"));
    must_refuse(b, "A:2:CG has all its 3 bonds already; a variant can take an atom away first", 91);
}

Test(molecule, a_link_stands_once) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY CYS-HG CYS-HG GLY");
    add_atom(b, "", "", "ZN", 30);
    add_link(b, address_of("", "", "ZN"), address_of("A", "2", "SG"));
    add_link(b, address_of("A", "2", "SG"), address_of("", "", "ZN"));
    cr_assert_eq(build(b), TML_BAD_INPUT);
    free_bench(b);
    b = new_bench();
    add_atom(b, "", "", "ZN", 30);
    add_atom(b, "", "", "FE", 26);
    add_link(b, address_of("", "", "ZN"), address_of("", "", "FE"));
    add_link(b, address_of("", "", "FE"), address_of("", "", "ZN"));
    must_refuse(b, "ZN and FE are bonded already", 91);
}

Test(molecule, a_bead_has_no_bond_length) {
    bench *b = new_bench();
    add_atom(b, "", "", "B1", 0);
    add_atom(b, "", "", "B2", 0);
    add_link(b, address_of("", "", "B1"), address_of("", "", "B2"));
    must_refuse(b, "B1 is a bead and has no bond length; say how far apart with `limit`", 91);
}

Test(molecule, cis_needs_a_peptide_bond) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY PRO@cis");
    must_refuse(b, "A:2 has no peptide bond to a next residue that could be cis", 2);
}

Test(molecule, ends_name_a_chain_that_is_there) {
    bench *b = new_bench();
    add_sequence(b, "A", "GLY");
    add_ends(b, "B", TML_ENDS_OPEN);
    must_refuse(b, "no chain \"B\" in the sequence", 70);
}

/* ---- finding ---- */

Test(molecule, what_is_not_there_is_answered_with_the_nearest) {
    bench *b = new_bench();
    add_sequence(b, "A", "ALA SER GLY");
    add_atom(b, "", "", "C1", 6);
    must_build(b);
    char text[256];
    cr_assert_eq(tml_molecule_locate_residue(&b->molecule, "A", "2", text, sizeof text), 1);
    cr_assert_str_eq(text, "");
    tml_molecule_suggest(&b->molecule, 1, "HB1", text, sizeof text);
    cr_assert_str_eq(text, "A:2:HB1: no such atom in SER; it has HB2, HB3");
    cr_assert_eq(tml_molecule_locate_residue(&b->molecule, "A", "9", text, sizeof text), -1);
    cr_assert_str_eq(text, "A:9: no such residue; chain A has 1 to 3");
    cr_assert_eq(tml_molecule_locate_residue(&b->molecule, "Z", "9", text, sizeof text), -1);
    cr_assert_str_eq(text, "Z:9: no such chain; nearest: A");
    tml_molecule_suggest(&b->molecule, 3, "C9", text, sizeof text);
    cr_assert_str_eq(text, "C9: no such atom; nearest: C1");
    char little[8];
    tml_molecule_suggest(&b->molecule, 1, "HB1", little, sizeof little);
    cr_assert_str_eq(little, "A:2:HB1");
    free_bench(b);
}

/* Time grows with size, not with its square: 16 times the residues may take 40 times as long, not 256. */
Test(molecule, a_chain_of_thousands_of_residues_is_built_and_found_again) {
    enum { COUNT = 4800 };
    bench *b = new_bench();
    cr_assert(tml_grow(&b->outline.residues, &b->outline.residue_capacity, COUNT, sizeof *b->outline.residues));
    for (int i = 0; i < COUNT; i++) {
        char digits[16];
        snprintf(digits, sizeof digits, "%d", i + 1);
        b->outline.residues[i] = (tml_outline_residue){
            .chain = "A", .number = tml_strings_add(b->pool, digits), .name = RESIDUES[i % RESIDUE_KINDS], .variant = ""};
    }
    b->outline.residue_count = COUNT;
    must_build(b);
    cr_assert_eq(b->molecule.peptide_count, COUNT - 1);
    cr_assert_eq(tml_molecule_find_residue(&b->molecule, "A", "1"), 0);
    cr_assert_eq(tml_molecule_find_residue(&b->molecule, "A", "4800"), COUNT - 1);
    free_bench(b);
}
