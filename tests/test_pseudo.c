/* Pseudo-atoms as sums, as centres of their groups, and with corrected limits; what bounds may say of centres.
 *
 * Names: Markley et al., Pure Appl. Chem. 70 (1998) 117. Corrections: K. Wüthrich, M. Billeter & W. Braun, J. Mol. Biol. 169 (1983)
 * 949 (from memory).
 *
 * Contents: distances - limits - bounds - models
 */
#include "given_text.h"

#include <math.h>

#include "base/pcg.h"
#include "bounds/bounds.h"
#include "ensemble/ensemble.h"

static tml_problem *read_as(const char *text, tml_pseudo pseudo) {
    tml_read_options options = {.pseudo = pseudo};
    tml_problem *p = NULL;
    tml_error error;
    cr_assert_eq(read_bytes_as(text, strlen(text), &options, &p, &error), TML_OK, "%s", error.message);
    return p;
}

/* ---- distances ---- */

Test(distances, run_from_the_centre_of_the_group) {
    static const char SHEET[] = "sheet 1\nsequence A 1 GLY ALA GLY\natom P bead\nlimit A:2:QB P 1 9\nlimit A:2:HB% P 1 9\n";
    tml_problem *p = read_as(SHEET, TML_PSEUDO_CENTRE);
    int32_t n = p->molecule.atom_count, bead = n - 1, first = tml_molecule_find_atom(&p->molecule, 1, "HB1");
    double *xyz = calloc((size_t)n * 3, sizeof *xyz);
    xyz[3 * bead] = 10;
    xyz[3 * first + 1] = 3; /* the hydrogens about (0, 1, 0) and (0, -0.5, ±1) */
    xyz[3 * (first + 1) + 2] = 1;
    xyz[3 * (first + 2) + 2] = -1;
    double centre = sqrt(100 + 1), sum = pow(109.0, -3) + 2 * pow(101.0, -3);
    cr_assert_float_eq(tml_restraint_distance(&p->restraints, &p->restraints.distances[0], NULL, xyz), centre, 1e-9);
    cr_assert_float_eq(tml_restraint_distance(&p->restraints, &p->restraints.distances[1], NULL, xyz), pow(sum, -1.0 / 6), 1e-9); /* a wildcard is none */
    xyz[3 * first] = NAN;
    cr_assert(isnan(tml_restraint_distance(&p->restraints, &p->restraints.distances[0], NULL, xyz)));
    free(xyz);
    tml_problem_free(p);
    p = read_as(SHEET, TML_PSEUDO_SUM);
    cr_assert_not(p->restraints.alternatives[0].centre_a);
    tml_problem_free(p);
}

/* ---- limits ---- */

static void expect_upper(const char *residue, const char *name, double upper) {
    char sheet[200];
    snprintf(sheet, sizeof sheet, "sheet 1\nsequence A 1 GLY %s GLY\natom P bead\nlimit A:2:%s P 1 5\n", residue, name);
    tml_problem *p = read_as(sheet, TML_PSEUDO_CORRECTED);
    cr_assert_float_eq(p->restraints.distances[0].upper, upper, 1e-12, "%s %s: %g", residue, name, p->restraints.distances[0].upper);
    cr_assert(has_note(p, "widened by the published corrections"));
    tml_problem_free(p);
    p = read_as(sheet, TML_PSEUDO_CENTRE);
    cr_assert_eq(p->restraints.distances[0].upper, 5);
    cr_assert(has_note(p, "limits are not corrected"));
    tml_problem_free(p);
}

Test(limits, are_widened_only_where_that_is_asked_and_it_is_told) {
    expect_upper("SER", "QB", 6.0);
    expect_upper("ALA", "MB", 6.0);
    expect_upper("LEU", "QQD", 7.4);
    expect_upper("PHE", "QD", 7.0);
    expect_upper("PHE", "QR", 7.4);
}

/* ---- bounds ---- */

/* Limits taken from random coordinates of a real molecule hold: no contradiction may be found. */
Test(bounds, never_contradict_what_a_model_shows) {
    static const char MOLECULE[] = "sheet 1\nsequence A 1 GLY LEU PHE ALA SER GLY\n";
    static const char *const NAMES[] = {"A:2:QQD", "A:3:QR", "A:4:QB", "A:5:QB", "A:3:QD", "A:2:MD1"};
    tml_problem *bare = read_good(MOLECULE);
    tml_build_options options;
    tml_build_defaults(&options);
    options.models = 3;
    tml_ensemble *e = NULL;
    tml_contradictions *found = tml_contradictions_new();
    cr_assert_eq(tml_build(bare, &options, NULL, &e, found, NULL), TML_OK);
    for (int32_t m = 0; m < e->model_count; m++)
        for (int i = 0; i < 6; i++)
            for (int j = 0; j < i; j++) {
                char sheet[400];
                snprintf(sheet, sizeof sheet, "%slimit %s %s 0 1\n", MOLECULE, NAMES[i], NAMES[j]);
                tml_problem *probe = read_as(sheet, TML_PSEUDO_CENTRE);
                double r = tml_restraint_distance(&probe->restraints, &probe->restraints.distances[0], NULL, e->models[m].xyz);
                tml_problem_free(probe);
                snprintf(sheet, sizeof sheet, "%slimit %s %s %.4f %.4f\n", MOLECULE, NAMES[i], NAMES[j], r - 0.001, r + 0.001);
                tml_problem *p = read_as(sheet, TML_PSEUDO_CENTRE);
                tml_bounds *bounds = NULL;
                tml_contradictions *none = tml_contradictions_new();
                cr_assert_eq(tml_bounds_prepare(p, 1, NULL, &bounds, none, NULL), TML_OK, "%s %s %g", NAMES[i], NAMES[j], r);
                tml_bounds_free(bounds);
                tml_contradictions_free(none);
                tml_problem_free(p);
            }
    tml_ensemble_free(e);
    tml_contradictions_free(found);
    tml_problem_free(bare);
}

/* ---- models ---- */

Test(models, meet_limits_from_centres) {
    tml_problem *p = read_as("sheet 1\nsequence A 1 GLY LEU GLY PHE GLY\nlimit A:2:QQD A:4:QR 4.0 4.5\n", TML_PSEUDO_CENTRE);
    tml_build_options options;
    tml_build_defaults(&options);
    options.models = 2;
    tml_ensemble *e = NULL;
    tml_contradictions *found = tml_contradictions_new();
    cr_assert_eq(tml_build(p, &options, NULL, &e, found, NULL), TML_OK);
    for (int32_t m = 0; m < e->model_count; m++) {
        double r = tml_restraint_distance(&p->restraints, &p->restraints.distances[0], NULL, e->models[m].xyz);
        cr_assert(r > 3.95 && r < 4.55, "%g", r);
    }
    tml_ensemble_free(e);
    tml_contradictions_free(found);
    tml_problem_free(p);
}
