/* Names with x and y: which atoms they leave open, how pairs hang together through a branch, what an assignment makes of a
 * restraint, and what bounds may still say.
 *
 * Names and the meaning of x and y: NEF 1.1 (Gutmanas et al., Nat. Struct. Mol. Biol. 22 (2015) 433). The prochiral pairs of the
 * amino acids: Markley et al., Pure Appl. Chem. 70 (1998) 117, figure 1 (from memory).
 *
 * Contents: pairs - assignments - bounds - models
 */
#include "given_text.h"

#include <math.h>
#include <string.h>

#include "bounds/bounds.h"
#include "ensemble/ensemble.h"

/* ---- pairs ---- */

/* Open pairs and members of a residue between two glycines whose restraints name `first` and `second`. */
static void expect_pairs(const char *residue, const char *first, const char *second, int32_t pairs, int32_t members) {
    char sheet[256];
    snprintf(sheet, sizeof sheet, "sheet 1\nsequence A 1 GLY %s GLY\natom P bead\nlimit A:2:%s P 1 9 as x\nlimit A:2:%s P 1 9 as y\n",
             residue, first, second);
    tml_problem *p = read_good(sheet);
    cr_assert_eq(p->restraints.unmapped_count, 0, "%s %s %s", residue, first, second);
    cr_assert_eq(p->restraints.stereo_count, pairs, "%s %s %s: %d pairs", residue, first, second, p->restraints.stereo_count);
    cr_assert_eq(p->restraints.stereo_member_count, members, "%s %s %s: %d members", residue, first, second,
                 p->restraints.stereo_member_count);
    tml_problem_free(p);
}

Test(pairs, the_two_names_of_a_pair_are_one) {
    expect_pairs("SER", "HBx", "HBy", 1, 1);
    expect_pairs("GLY", "HAx", "HAy", 1, 1);
    expect_pairs("ILE", "HG1x", "HG1y", 1, 1);
    expect_pairs("ASN", "HD2x", "HD2y", 1, 1);
    expect_pairs("LYS", "HBx", "HGx", 2, 2);
}

Test(pairs, names_of_one_branch_swap_together) {
    expect_pairs("VAL", "CGx", "HGx%", 1, 4);
    expect_pairs("LEU", "HDy%", "CDx", 1, 4);
    expect_pairs("PHE", "HDx", "HEx", 1, 2);
    expect_pairs("TYR", "CEx", "HDy", 1, 2);
    expect_pairs("ARG", "HHx%", "NHx", 1, 3);
    expect_pairs("ARG", "HH1x", "HH2x", 2, 2);
    expect_pairs("LEU", "HBx", "HDx%", 2, 4);
}

Test(pairs, what_is_no_pair_stays_a_sum) {
    expect_pairs("TRP", "HEx", "CDx", 0, 0); /* CD1 and CD2 of an indole are different atoms */
    expect_pairs("HIS", "HDx", "HEx", 0, 0);
    expect_pairs("ALA", "HBx", "HBy", 0, 0); /* three of them */
    expect_pairs("VAL", "HG%", "HG1%", 0, 0);
}

Test(pairs, a_name_that_meets_its_own_partner_by_name_stays_a_sum) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 GLY SER GLY\nlimit A:2:HBx A:2:HB2 1 9\nlimit A:2:HBx A:2:HBy 1 9\n");
    cr_assert_eq(p->restraints.alternatives[0].stereo_a, -1);
    cr_assert(p->restraints.alternatives[1].stereo_a == 0 && p->restraints.alternatives[1].stereo_b == 0);
    cr_assert_neq(p->restraints.alternatives[1].second_a, p->restraints.alternatives[1].second_b);
    tml_problem_free(p);
}

Test(pairs, both_count_where_that_is_asked_for) {
    static const tml_read_options SUM = {.sum_stereo_pairs = true};
    static const char SHEET[] = "sheet 1\nsequence A 1 GLY VAL GLY\natom P bead\nlimit A:2:HGx% P 1 9\n";
    tml_problem *p = NULL;
    tml_error error;
    cr_assert_eq(read_bytes_as(SHEET, sizeof SHEET - 1, &SUM, &p, &error), TML_OK);
    cr_assert_eq(p->restraints.stereo_count, 0);
    cr_assert_eq(p->restraints.distances[0].pair_count, 6);
    tml_problem_free(p);
}

/* ---- assignments ---- */

Test(assignments, each_means_its_own_half_of_the_pair) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 GLY SER GLY\natom P bead\nlimit A:2:HBx P - 3 as x\nlimit A:2:HBy P 8 - as y\n");
    double *xyz = calloc((size_t)p->molecule.atom_count * 3, sizeof *xyz);
    int32_t hb2 = tml_molecule_find_atom(&p->molecule, 1, "HB2"), hb3 = tml_molecule_find_atom(&p->molecule, 1, "HB3");
    int32_t bead = p->molecule.atom_count - 1;
    xyz[3 * bead] = 2;
    xyz[3 * hb2] = 0;  /* 2 Å from the bead */
    xyz[3 * hb3] = 12; /* 10 Å */
    const tml_restraints *r = &p->restraints;
    const bool plain[] = {false}, swapped[] = {true};
    cr_assert_float_eq(tml_distance_violation(r, &r->distances[0], plain, xyz), 0, 1e-12);
    cr_assert_float_eq(tml_distance_violation(r, &r->distances[1], plain, xyz), 0, 1e-12);
    cr_assert_float_eq(tml_distance_violation(r, &r->distances[0], swapped, xyz), 7, 1e-9);
    cr_assert_float_eq(tml_distance_violation(r, &r->distances[1], swapped, xyz), -6, 1e-9);
    double both = pow(pow(2, -6) + pow(10, -6), -1.0 / 6.0);
    cr_assert_float_eq(tml_restraint_distance(r, &r->distances[0], NULL, xyz), both, 1e-9);
    free(xyz);
    tml_problem_free(p);
}

Test(assignments, an_average_is_over_the_half_that_counts) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 GLY VAL GLY\natom P bead\nlimit A:2:HGx% P 1 9 average\n");
    double *xyz = calloc((size_t)p->molecule.atom_count * 3, sizeof *xyz);
    for (int32_t i = 0; i + 1 < p->molecule.atom_count; i++) xyz[3 * i] = 4; /* all 4 Å from the bead */
    const bool plain[] = {false};
    cr_assert_float_eq(tml_restraint_distance(&p->restraints, &p->restraints.distances[0], plain, xyz), 4, 1e-9);
    cr_assert_float_eq(tml_restraint_distance(&p->restraints, &p->restraints.distances[0], NULL, xyz), 4, 1e-9);
    free(xyz);
    tml_problem_free(p);
}

/* ---- bounds ---- */

static tml_status bounds_of(const char *sheet, tml_problem **p, tml_bounds **bounds) {
    tml_contradictions *found = tml_contradictions_new();
    *p = read_good(sheet);
    tml_status status = tml_bounds_prepare(*p, 1, NULL, bounds, found, NULL);
    tml_contradictions_free(found);
    return status;
}

/* One beta hydrogen near a bead and the other far from it: 1.8 Å between the two of them leaves room for both. A lower limit that
 * held for both members would contradict the upper one. */
Test(bounds, a_lower_limit_of_an_open_name_binds_no_single_atom) {
    tml_problem *p;
    tml_bounds *bounds;
    cr_assert_eq(bounds_of("sheet 1\nsequence A 1 GLY SER GLY\natom P bead\nlimit A:2:HBx P - 3\nlimit A:2:HBy P 3.5 -\n", &p, &bounds),
                 TML_OK);
    tml_bounds_free(bounds);
    tml_problem_free(p);
    cr_assert_eq(bounds_of("sheet 1\nsequence A 1 GLY SER GLY\natom P bead\nlimit A:2:HB2 P - 3\nlimit A:2:HB2 P 3.5 -\n", &p, &bounds),
                 TML_CONTRADICTED);
    tml_bounds_free(bounds);
    tml_problem_free(p);
}

/* Whichever is x, both members lie within the limit and the distance between them, which is less than 2 Å. */
Test(bounds, an_upper_limit_reaches_both_members) {
    tml_problem *p;
    tml_bounds *bounds;
    double lower, upper;
    cr_assert_eq(bounds_of("sheet 1\nsequence A 1 GLY SER GLY\natom P bead\nlimit A:2:HBx P - 3\n", &p, &bounds), TML_OK);
    for (int k = 2; k <= 3; k++) {
        int32_t atom = tml_molecule_find_atom(&p->molecule, 1, k == 2 ? "HB2" : "HB3");
        cr_assert(tml_bounds_pair(bounds, atom, p->molecule.atom_count - 1, &lower, &upper));
        cr_assert(upper > 3 && upper < 5, "%g", upper);
    }
    tml_bounds_free(bounds);
    tml_problem_free(p);
}

/* ---- models ---- */

/* Two beads, each bound to one methyl carbon of a valine by its own name; restraints with x and y then hold one way round only. */
Test(models, each_takes_the_assignment_that_holds) {
    tml_problem *p = read_good("sheet 1\nsequence A 1 GLY VAL GLY\natom P bead\natom Q bead\n"
                               "limit P A:2:CG2 - 2.0\nlimit Q A:2:CG1 - 2.0\n"
                               "limit A:2:HGx% P - 3.0 as px\nlimit A:2:CGy Q - 2.2 as qy\nlimit A:2:CGx Q 2.6 - as far\n");
    tml_build_options options;
    tml_build_defaults(&options);
    options.models = 2;
    tml_ensemble *e = NULL;
    tml_contradictions *found = tml_contradictions_new();
    cr_assert_eq(p->restraints.stereo_count, 1);
    cr_assert_eq(tml_build(p, &options, NULL, &e, found, NULL), TML_OK);
    for (int32_t m = 0; m < e->model_count; m++) {
        cr_assert(e->models[m].swapped[0], "x is CG2 here: the bead P sits on it");
        cr_assert_eq(e->models[m].measures.distance_over_01, 0);
    }
    tml_ensemble_free(e);
    tml_contradictions_free(found);
    tml_problem_free(p);
}
