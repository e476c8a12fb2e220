/* Chains that are alike: which atoms match, what is refused, and models that obey.
 *
 * Source of the method: Nilges, Proteins 17 (1993) 297. The superposition in the last test is written anew from Kabsch, Acta
 * Cryst. A32 (1976) 922, over distances: two shapes are the same when all their distances are, and no hand is wrong.
 *
 * Contents: sets - refusals - models
 */
#include "given_text.h"

#include <math.h>
#include <string.h>

#include "ensemble/ensemble.h"

/* ---- sets ---- */

Test(sets, heavy_atoms_match_by_residue_and_name) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 GLY SER\nsequence B 101 GLY SER\nalike A B\n");
    const tml_molecule *m = &p->molecule;
    cr_assert_eq(m->alike_count, 1);
    cr_assert(m->alike[0].copies == 2 && m->alike[0].count == 9, "%d", m->alike[0].count); /* 4 of GLY, 5 of SER: O and OXT are equivalent */
    for (int32_t i = 0; i < m->alike[0].count; i++) {
        const tml_atom *a = &m->atoms[m->alike_atoms[i]], *b = &m->atoms[m->alike_atoms[m->alike[0].count + i]];
        cr_assert_str_eq(a->name, b->name);
        cr_assert_str_eq(m->residues[a->residue].chain, "A");
        cr_assert_str_eq(m->residues[b->residue].chain, "B");
        cr_assert_gt(a->element, 1);
    }
    tml_problem_free(p);
}

static bool holds(const tml_molecule *m, const char *name) {
    for (int32_t i = 0; i < m->alike[0].count; i++)
        if (strcmp(m->atoms[m->alike_atoms[i]].name, name) == 0) return true;
    return false;
}

/* A half turn of a phenyl ring or a carboxylate changes names, not the molecule. */
Test(sets, atoms_that_a_half_turn_exchanges_are_left_out) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 GLY PHE ASP VAL GLY\nsequence B 1 GLY PHE ASP VAL GLY\nalike A B\n");
    const char *out[] = {"CD1", "CE2", "OD1", "OD2"}, *in[] = {"CA", "CG", "CG1", "CG2", "O"};
    for (size_t k = 0; k < sizeof out / sizeof *out; k++) cr_assert_not(holds(&p->molecule, out[k]), "%s", out[k]);
    for (size_t k = 0; k < sizeof in / sizeof *in; k++) cr_assert(holds(&p->molecule, in[k]), "%s", in[k]);
    tml_problem_free(p);
}

Test(sets, chains_of_the_same_residues_are_found_on_request) {
    static const char SHEET[] = "sheet 1\nsequence A 1 GLY SER\nsequence B 1 GLY SER\nsequence C 1 GLY ALA\nsequence D 5 GLY SER\n";
    static const tml_read_options ALIKE = {.alike_chains = true};
    tml_problem *p = NULL;
    tml_error error;
    cr_assert_eq(read_bytes_as(SHEET, sizeof SHEET - 1, &ALIKE, &p, &error), TML_OK);
    cr_assert(p->molecule.alike_count == 1 && p->molecule.alike[0].copies == 3);
    tml_problem_free(p);
    p = read_good(SHEET);
    cr_assert_eq(p->molecule.alike_count, 0);
    tml_problem_free(p);
}

/* ---- refusals ---- */

Test(refusals, chains_that_differ_or_are_missing) {
    read_bad("sheet 1\nsequence A 1 GLY SER\nsequence B 1 GLY ALA\nalike A B\n", 4, "A:2 is SER, B:2 is ALA");
    read_bad("sheet 1\nsequence A 1 GLY SER\nsequence B 1 GLY\nalike A B\n", 4, "2 and 1 residues");
    read_bad("sheet 1\nsequence A 1 GLY SER\nalike A B\n", 3, "no chain \"B\"");
    read_bad("sheet 1\nsequence A 1 GLY SER\nalike A A\n", 3, "named twice");
    read_bad("sheet 1\nsequence A 1 GLY SER\nalike A\n", 3, "another chain");
}

/* ---- models ---- */

static const char DIMER[] = "sheet 1\nsequence A 1 ARG THR VAL GLU ILE ASN\nsequence B 1 ARG THR VAL GLU ILE ASN\nalike A B\n"
                            "limit A:2:CA B:5:CA 4 7 as one\nlimit A:4:CA B:3:CA 4 6 as two\n"
                            "limit A:3:HA A:5:HA,B:5:HA - 6 as either\n";

static double apart(const tml_molecule *m, const double *xyz, int32_t copy, int32_t i, int32_t other, int32_t j) {
    const int32_t *atoms = m->alike_atoms;
    const double *a = &xyz[3 * atoms[copy * m->alike[0].count + i]], *b = &xyz[3 * atoms[other * m->alike[0].count + j]];
    return sqrt(pow(a[0] - b[0], 2) + pow(a[1] - b[1], 2) + pow(a[2] - b[2], 2));
}

static bool is_alpha(const tml_molecule *m, int32_t i) {
    return strcmp(m->atoms[m->alike_atoms[i]].name, "CA") == 0;
}

Test(models, copies_have_one_shape_and_a_symmetric_place) {
    tml_problem *p = read_good(DIMER);
    tml_build_options options;
    tml_build_defaults(&options);
    options.models = 2;
    tml_ensemble *e = NULL;
    tml_contradictions *found = tml_contradictions_new();
    cr_assert_eq(tml_build(p, &options, NULL, &e, found, NULL), TML_OK);
    for (int32_t m = 0; m < e->model_count; m++) {
        const double *xyz = e->models[m].xyz;
        double shape = 0, place = 0, count = p->molecule.alike[0].count, pairs = count * (count - 1) / 2;
        for (int32_t i = 0; i < p->molecule.alike[0].count; i++)
            for (int32_t j = 0; j < i; j++) {
                shape += pow(apart(&p->molecule, xyz, 0, i, 0, j) - apart(&p->molecule, xyz, 1, i, 1, j), 2) / pairs;
                if (is_alpha(&p->molecule, i) && is_alpha(&p->molecule, j))
                    place = fmax(place, fabs(apart(&p->molecule, xyz, 0, i, 1, j) - apart(&p->molecule, xyz, 1, i, 0, j)));
            }
        cr_assert_lt(sqrt(shape), 0.3, "distances within the copies differ by %g Å r.m.s.", sqrt(shape));
        cr_assert_lt(place, 0.7, "distances between alpha carbons of the copies differ by %g", place);
        cr_assert_lt(e->models[m].measures.alike_rms, 0.3);
        double share = tml_between_chains(&p->restraints, &p->molecule, distance_by_id(p, "either"), e->models[m].swapped, xyz);
        cr_assert(share >= 0 && share <= 1);
        cr_assert(isnan(tml_between_chains(&p->restraints, &p->molecule, distance_by_id(p, "one"), e->models[m].swapped, xyz)));
    }
    tml_ensemble_free(e);
    tml_contradictions_free(found);
    tml_problem_free(p);
}
