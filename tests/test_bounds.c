/* Limits: their closure, what contradicts, and how restraints enter. */
#include <math.h>
#include <string.h>

#include "base/pcg.h"
#include "bounds/bounds.h"
#include "bounds/graph.h"
#include "bounds/radii.h"
#include "molecule/geometry.h"
#include "sheets.h"

enum { FEW = 7, SOME = 24 };
static const double ROUNDING = 1e-4; /* Å: sums of a few single-precision numbers */

static double between(tml_pcg *pcg, double from, double to) {
    return from + (to - from) * tml_pcg_uniform(pcg);
}

/* ---- closure ---- */

/* The length of the shortest of all paths without a repeated atom, tried one by one. */
static double shortest_by_trial(const tml_bounds *given, int at, int to, unsigned visited) {
    double best = at == to ? 0 : INFINITY;
    for (int next = 0; at != to && next < given->n; next++)
        if (!(visited >> next & 1))
            best = fmin(best, (double)tml_bounds_upper(given, at, next) + shortest_by_trial(given, next, to, visited | 1u << next));
    return best;
}

/* The largest lower limit that follows from one given lower limit and two paths of uppers. */
static double largest_lower_by_trial(const tml_bounds *given, int i, int j) {
    double most = 0;
    for (int k = 0; k < given->n; k++)
        for (int l = 0; l < given->n; l++)
            if (k != l)
                most = fmax(most, (double)tml_bounds_lower(given, k, l) - shortest_by_trial(given, i, k, 1u << i) -
                                      shortest_by_trial(given, l, j, 1u << l));
    return most;
}

static tml_bounds *copy_of(const tml_bounds *bounds) {
    tml_bounds *copy = NULL;
    cr_assert_eq(tml_bounds_new(bounds->n, &copy, NULL), TML_OK);
    memcpy(copy->limit, bounds->limit, (size_t)bounds->n * bounds->stride * sizeof *bounds->limit);
    return copy;
}

/* Random limits about random points of one part or two: consistent, and with a share of the pairs left open. */
static tml_bounds *random_limits(tml_pcg *pcg, int n, double share, double slack) {
    double *xyz = calloc(3 * (size_t)n, sizeof *xyz), size = 3 * cbrt(n);
    tml_bounds *bounds = NULL;
    cr_assert_eq(tml_bounds_new(n, &bounds, NULL), TML_OK);
    for (int i = 0; i < 3 * n; i++) xyz[i] = between(pcg, 0, size);
    for (int i = 0; i < n; i++)
        for (int j = 0; j < i; j++) {
            double d = sqrt(pow(xyz[3 * i] - xyz[3 * j], 2) + pow(xyz[3 * i + 1] - xyz[3 * j + 1], 2) + pow(xyz[3 * i + 2] - xyz[3 * j + 2], 2));
            if (tml_pcg_uniform(pcg) < share) tml_bounds_limit_upper(bounds, i, j, d + between(pcg, 0, slack));
            if (tml_pcg_uniform(pcg) < share) tml_bounds_limit_lower(bounds, i, j, fmax(d - between(pcg, 0, slack), 0));
        }
    free(xyz);
    return bounds;
}

/* Dress & Havel, Discrete Appl. Math. 19 (1988) 129. */
Test(bounds, closure_equals_the_best_of_all_paths) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 1, 1);
    for (int set = 0; set < 60; set++) {
        int n = 1 + (int)tml_pcg_below(&pcg, FEW);
        tml_bounds *given = random_limits(&pcg, n, between(&pcg, 0.2, 1), 2), *closed = copy_of(given);
        cr_assert_eq(tml_bounds_smooth(closed, 1, NULL, NULL), TML_OK);
        for (int i = 0; i < n; i++)
            for (int j = 0; j < n; j++) {
                if (i == j) continue;
                double upper = shortest_by_trial(given, i, j, 1u << i), lower = largest_lower_by_trial(given, i, j);
                if (isinf(upper))
                    cr_assert(isinf(tml_bounds_upper(closed, i, j)));
                else
                    cr_assert_float_eq(tml_bounds_upper(closed, i, j), upper, ROUNDING);
                cr_assert_float_eq(tml_bounds_lower(closed, i, j), lower, ROUNDING);
            }
        tml_bounds_free(given);
        tml_bounds_free(closed);
    }
}

Test(bounds, widths_and_threads_give_the_same_bits) {
    static const int SIZES[] = {1, 2, 5, 31, 127, 128, 129, 300};
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 2, 1);
    for (size_t s = 0; s < sizeof SIZES / sizeof *SIZES; s++) {
        tml_bounds *given = random_limits(&pcg, SIZES[s], 0.1, 1), *first = copy_of(given);
        cr_assert_eq(tml_bounds_smooth_with(first, 1, TML_WIDTH_PLAIN, NULL, NULL), TML_OK);
        for (int threads = 1; threads <= 3; threads++)
            for (tml_width width = TML_WIDTH_BEST; width <= TML_WIDTH_512; width++) {
                tml_bounds *other = copy_of(given);
                cr_assert_eq(tml_bounds_smooth_with(other, threads, width, NULL, NULL), TML_OK);
                for (int32_t i = 0; i < given->n; i++)
                    cr_assert_arr_eq(tml_bounds_cell(other, i, 0), tml_bounds_cell(first, i, 0), (size_t)given->n * sizeof(float),
                                     "n = %d, %d threads, width %d, row %d", SIZES[s], threads, (int)width, i);
                tml_bounds_free(other);
            }
        tml_bounds_free(given);
        tml_bounds_free(first);
    }
}

/* Every path of the closed limits is already in them. */
static void assert_closed(const tml_bounds *bounds) {
    for (int32_t i = 0; i < bounds->n; i++)
        for (int32_t j = 0; j < bounds->n; j++)
            for (int32_t k = 0; k < bounds->n; k++) {
                if (i == j || j == k || i == k) continue;
                cr_assert_leq(tml_bounds_upper(bounds, i, j), tml_bounds_upper(bounds, i, k) + tml_bounds_upper(bounds, k, j) + ROUNDING);
                cr_assert_geq(tml_bounds_lower(bounds, i, j), tml_bounds_lower(bounds, i, k) - tml_bounds_upper(bounds, k, j) - ROUNDING);
                cr_assert_leq(tml_bounds_lower(bounds, i, j), tml_bounds_upper(bounds, i, j) + 1e-3);
            }
}

/* Points on a line make every triangle inequality an equality; both limits of every pair are its exact distance. */
Test(bounds, rounding_never_makes_a_contradiction) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 3, 1);
    for (int set = 0; set < 3000; set++) {
        double points[SOME][3] = {{0}}, size = pow(10, between(&pcg, -1, 3));
        bool line = set % 2 == 0;
        tml_bounds *bounds = NULL;
        cr_assert_eq(tml_bounds_new(SOME, &bounds, NULL), TML_OK);
        for (int i = 0; i < SOME; i++)
            for (int k = 0; k < (line ? 1 : 3); k++) points[i][k] = between(&pcg, -size, size);
        for (int i = 0; i < SOME; i++)
            for (int j = 0; j < i; j++) {
                if (tml_pcg_uniform(&pcg) < 0.2) continue;
                double d = sqrt(pow(points[i][0] - points[j][0], 2) + pow(points[i][1] - points[j][1], 2) + pow(points[i][2] - points[j][2], 2));
                tml_bounds_limit_upper(bounds, i, j, d);
                tml_bounds_limit_lower(bounds, i, j, d);
            }
        cr_assert_eq(tml_bounds_smooth(bounds, 1, NULL, NULL), TML_OK, "set %d", set);
        for (int i = 0; i < SOME; i++)
            for (int j = 0; j < i; j++) {
                double d = sqrt(pow(points[i][0] - points[j][0], 2) + pow(points[i][1] - points[j][1], 2) + pow(points[i][2] - points[j][2], 2));
                cr_assert_geq((double)tml_bounds_upper(bounds, i, j), d * (1 - 1e-13), "set %d", set);
                cr_assert_leq((double)tml_bounds_lower(bounds, i, j), d * (1 + 1e-13) + 1e-12, "set %d", set);
            }
        tml_bounds_free(bounds);
    }
}

Test(bounds, parts_without_a_limit_between_them_stay_apart_until_capped) {
    tml_bounds *bounds = NULL;
    cr_assert_eq(tml_bounds_new(6, &bounds, NULL), TML_OK);
    for (int part = 0; part < 2; part++)
        for (int i = 1; i < 3; i++) tml_bounds_limit_upper(bounds, 3 * part + i - 1, 3 * part + i, 25);
    tml_bounds_limit_lower(bounds, 0, 5, 40);
    cr_assert_eq(tml_bounds_smooth(bounds, 1, NULL, NULL), TML_OK);
    for (int i = 0; i < 3; i++)
        for (int j = 3; j < 6; j++) cr_assert(isinf(tml_bounds_upper(bounds, i, j)));
    cr_assert_eq(tml_bounds_upper(bounds, 0, 2), 50);
    cr_assert_eq(tml_bounds_lower(bounds, 1, 5), 15); /* 40 less one step of 25 */
    tml_bounds_cap(bounds);
    for (int i = 0; i < 3; i++)
        for (int j = 3; j < 6; j++) cr_assert_eq(tml_bounds_upper(bounds, i, j), 75); /* 1.5 times the largest limit */
    assert_closed(bounds);
    tml_bounds_free(bounds);
}

Test(bounds, a_stop_ends_smoothing) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 4, 1);
    const volatile int stop = 1;
    tml_bounds *bounds = random_limits(&pcg, 20, 0.5, 1);
    cr_assert_eq(tml_bounds_smooth(bounds, 1, &(tml_watch){.stop = &stop}, NULL), TML_INTERRUPTED);
    tml_bounds_free(bounds);
}

/* ---- contradictions ---- */

/* What a proof must be by itself: one lower limit and uppers that walk back from its second atom to its first. */
static void assert_proof(const tml_contradiction *proof) {
    double excess = proof->steps[0].given.value;
    cr_assert_not(proof->steps[0].given.is_upper);
    for (size_t k = 0; k < proof->step_count; k++) {
        const tml_step *step = &proof->steps[k], *next = &proof->steps[(k + 1) % proof->step_count];
        cr_assert_eq(step->atom_2, next->atom_1);
        cr_assert((step->given.a == step->atom_1 && step->given.b == step->atom_2) ||
                  (step->given.b == step->atom_1 && step->given.a == step->atom_2));
        cr_assert_eq(step->given.is_upper, k > 0);
        if (k > 0) excess -= step->given.value;
    }
    cr_assert_float_eq(proof->excess, excess, 1e-9);
    cr_assert_geq(excess, 0.001 - 1e-9);
}

static void assert_sharing_no_restraint(const tml_contradictions *found, const tml_problem *problem) {
    int *blamed = calloc((size_t)problem->restraints.distance_count + 1, sizeof *blamed);
    for (size_t i = 0; i < found->count; i++)
        for (size_t k = 0; k < found->items[i].step_count; k++) {
            const tml_given *given = &found->items[i].steps[k].given;
            if (given->reason != TML_REASON_RESTRAINT) continue;
            cr_assert(blamed[given->source] == 0 || blamed[given->source] == (int)i + 1, "restraint %d", given->source);
            blamed[given->source] = (int)i + 1;
        }
    free(blamed);
}

Test(bounds, a_planted_contradiction_is_found_with_its_excess_and_chain) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 5, 1);
    for (int set = 0; set < 40; set++) {
        int steps = 1 + (int)tml_pcg_below(&pcg, 6), beads = steps + 10;
        double sum = 0, excess = between(&pcg, 0.01, 3);
        sheet_text sheet = {.length = 0};
        say_beads(&sheet, beads);
        for (int i = 0; i < steps; i++) {
            double upper = round(between(&pcg, 2, 6) * 1000) / 1000;
            sum += upper;
            say(&sheet, "limit B%d B%d - %.3f as step%d\n", i, i + 1, upper, i);
        }
        for (int i = steps + 1; i < beads; i++) say(&sheet, "limit B%d B%d 1 50\n", i - 1 - (int)tml_pcg_below(&pcg, 3) % i, i);
        say(&sheet, "limit B0 B%d %.9f - as planted\n", steps, sum + excess);
        tml_problem *problem = problem_from(sheet.text);
        tml_bounds *bounds = NULL;
        tml_contradictions found = {0};
        cr_assert_eq(tml_bounds_prepare(problem, 1, NULL, &bounds, &found, NULL), TML_CONTRADICTED);
        cr_assert_eq(found.count, 1);
        assert_proof(&found.items[0]);
        cr_assert_eq(found.items[0].step_count, (size_t)steps + 1);
        cr_assert_float_eq(found.items[0].excess, excess, 1e-6);
        cr_assert_not(found.items[0].conditional);
        assert_closed(bounds);
        tml_bounds_free(bounds);
        tml_contradictions_clear(&found);
        tml_problem_free(problem);
    }
}

Test(bounds, contradictions_without_a_common_restraint_are_all_told) {
    sheet_text sheet = {.length = 0};
    say_beads(&sheet, 12);
    for (int k = 0; k < 4; k++)
        say(&sheet, "limit B%d B%d - 3\nlimit B%d B%d - 3\nlimit B%d B%d %d -\n", 3 * k, 3 * k + 1, 3 * k + 1, 3 * k + 2, 3 * k, 3 * k + 2, 7 + k);
    tml_problem *problem = problem_from(sheet.text);
    tml_bounds *bounds = NULL;
    tml_contradictions found = {0};
    cr_assert_eq(tml_bounds_prepare(problem, 1, NULL, &bounds, &found, NULL), TML_CONTRADICTED);
    cr_assert_eq(found.count, 4);
    double sum = 0;
    for (size_t i = 0; i < found.count; i++) {
        assert_proof(&found.items[i]);
        sum += found.items[i].excess;
    }
    cr_assert_float_eq(sum, 1 + 2 + 3 + 4, 1e-9);
    tml_bounds_free(bounds);
    tml_contradictions_clear(&found);
    tml_problem_free(problem);
}

Test(bounds, loosening_ends_with_closed_limits_however_much_fights) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 6, 1);
    for (int set = 0; set < 25; set++) {
        int beads = 3 + (int)tml_pcg_below(&pcg, 12);
        sheet_text sheet = {.length = 0};
        say_beads(&sheet, beads);
        for (int i = 0; i < beads; i++)
            for (int j = 0; j < i; j++) {
                double lower = between(&pcg, 0, 60);
                say(&sheet, "limit B%d B%d %.2f %.2f\n", i, j, lower, lower + between(&pcg, 0.01, 5));
            }
        tml_problem *problem = problem_from(sheet.text);
        tml_bounds *bounds = NULL;
        tml_contradictions found = {0};
        tml_status status = tml_bounds_prepare(problem, 1, NULL, &bounds, &found, NULL);
        cr_assert(status == (found.count > 0 ? TML_CONTRADICTED : TML_OK));
        for (size_t i = 0; i < found.count; i++) assert_proof(&found.items[i]);
        assert_sharing_no_restraint(&found, problem);
        assert_closed(bounds);
        tml_bounds_free(bounds);
        tml_contradictions_clear(&found);
        tml_problem_free(problem);
    }
}

Test(bounds, limits_that_chemistry_forbids_are_blamed_on_the_user_and_loosened) {
    tml_problem *problem = problem_from("sequence A 1 ALA GLY SER\nlimit A:1:CA A:2:CA 9 10 as far\nlimit A:1:CB A:3:CB - 0.5 as near\n");
    tml_bounds *bounds = NULL;
    tml_contradictions found = {0};
    cr_assert_eq(tml_bounds_prepare(problem, 1, NULL, &bounds, &found, NULL), TML_CONTRADICTED);
    cr_assert_eq(found.count, 2);
    for (size_t i = 0; i < 2; i++) assert_proof(&found.items[i]);
    int32_t a = atom_of(problem, "1", "CA"), b = atom_of(problem, "2", "CA");
    cr_assert_lt(tml_bounds_upper(bounds, a, b), 4.2); /* chemistry stays: CA to CA across a trans peptide is 3.8 (Pauling 1951) */
    assert_closed(bounds);
    tml_bounds_free(bounds);
    tml_contradictions_clear(&found);
    tml_problem_free(problem);
}

Test(bounds, a_floor_stays_where_a_restraint_gives_way_to_it) {
    tml_problem *problem = problem_from("atom C1 C\natom C2 C\nlimit C1 C2 - 1 as near\n");
    tml_bounds *bounds = NULL;
    tml_contradictions found = {0};
    double floor = tml_hard_floor(&problem->molecule, 0, 1);
    cr_assert_eq(tml_bounds_prepare(problem, 1, NULL, &bounds, &found, NULL), TML_CONTRADICTED);
    cr_assert_eq(found.count, 1);
    cr_assert_float_eq(tml_bounds_lower(bounds, 0, 1), floor, 1e-6);
    cr_assert_geq(tml_bounds_upper(bounds, 0, 1), floor);
    cr_assert_lt(tml_bounds_upper(bounds, 0, 1), floor + 0.01); /* as far as the proof needs, and no farther */
    tml_bounds_free(bounds);
    tml_contradictions_clear(&found);
    tml_problem_free(problem);
}

Test(bounds, given_distances_of_one_chain_stay_free_of_contradiction) {
    tml_problem *problem = problem_from("sequence A 1 ALA CYS ASP GLU PHE GLY HIS ILE LYS LEU MET ASN PRO GLN ARG SER THR VAL TRP TYR\n");
    tml_bounds *bounds = NULL;
    tml_contradictions found = {0};
    cr_assert_eq(tml_bounds_prepare(problem, 2, NULL, &bounds, &found, NULL), TML_OK);
    cr_assert_eq(found.count, 0);
    tml_bounds_free(bounds);
    tml_contradictions_clear(&found);
    tml_problem_free(problem);
}

/* ---- how restraints enter ---- */

/* The given limit of a pair that comes from restraint 0; NAN where there is none. */
static double from_restraint(const tml_givens *givens, int32_t a, int32_t b, bool upper) {
    double value = NAN;
    for (size_t i = 0; i < givens->count; i++) {
        const tml_given *given = &givens->items[i];
        bool same = (given->a == a && given->b == b) || (given->a == b && given->b == a);
        if (same && given->is_upper == upper && given->reason == TML_REASON_RESTRAINT) {
            cr_assert_eq(given->source, 0);
            cr_assert(isnan(value), "told twice");
            value = given->value;
        }
    }
    return value;
}

/* The largest upper limit that the covalent terms set within a group. */
static double width_of(const tml_givens *givens, const int32_t *atoms, int count) {
    double most = 0;
    for (size_t g = 0; g < givens->count; g++)
        for (int i = 0; i < count; i++)
            for (int j = 0; j < i; j++) {
                const tml_given *given = &givens->items[g];
                bool same = (given->a == atoms[i] && given->b == atoms[j]) || (given->a == atoms[j] && given->b == atoms[i]);
                if (same && given->is_upper && given->reason == TML_REASON_ANGLE) most = fmax(most, given->value);
            }
    return most;
}

typedef struct rule { tml_problem *problem; tml_givens givens; int32_t methyl[3], other[3], alpha; } rule;

static rule rule_of(const char *limits) {
    char text[512];
    static const char *const NAMES[] = {"HB1", "HB2", "HB3"};
    snprintf(text, sizeof text, "sequence A 1 ALA SER ALA GLY\n%s\n", limits);
    rule r = {.problem = problem_from(text)};
    cr_assert_eq(tml_givens_collect(r.problem, &r.givens, NULL), TML_OK);
    for (int k = 0; k < 3; k++) {
        r.methyl[k] = atom_of(r.problem, "1", NAMES[k]);
        r.other[k] = atom_of(r.problem, "3", NAMES[k]);
    }
    r.alpha = atom_of(r.problem, "3", "HA");
    return r;
}

static void rule_end(rule *r) {
    free(r->givens.items);
    tml_problem_free(r->problem);
}

Test(restraints_in_bounds, a_single_pair_is_bound_as_given) {
    rule r = rule_of("limit A:1:HB1 A:3:HA 1.8 5.5");
    cr_assert_float_eq(from_restraint(&r.givens, r.methyl[0], r.alpha, true), 5.5, 1e-12);
    cr_assert_float_eq(from_restraint(&r.givens, r.methyl[0], r.alpha, false), 1.8, 1e-12);
    cr_assert(isnan(from_restraint(&r.givens, r.methyl[1], r.alpha, true)));
    rule_end(&r);
}

Test(restraints_in_bounds, a_group_binds_every_pair_to_the_nearest_and_its_diameter) {
    rule r = rule_of("limit A:1:HB% A:3:HA 1.8 5.5");
    double width = width_of(&r.givens, r.methyl, 3);
    cr_assert(width > 1.6 && width < 2.0); /* H to H of a methyl group: 1.78 Å (common knowledge: 1.09·2·sin(109.5°/2)) */
    for (int k = 0; k < 3; k++) {
        cr_assert_float_eq(from_restraint(&r.givens, r.methyl[k], r.alpha, true), 5.5 * pow(3, 1.0 / 6) + width, 1e-9);
        cr_assert_float_eq(from_restraint(&r.givens, r.methyl[k], r.alpha, false), 1.8, 1e-12);
    }
    rule_end(&r);
}

Test(restraints_in_bounds, two_groups_add_both_diameters) {
    rule r = rule_of("limit A:1:HB% A:3:HB% 1.8 5.5");
    double both = width_of(&r.givens, r.methyl, 3) + width_of(&r.givens, r.other, 3);
    for (int k = 0; k < 9; k++) {
        cr_assert_float_eq(from_restraint(&r.givens, r.methyl[k / 3], r.other[k % 3], true), 5.5 * pow(9, 1.0 / 6) + both, 1e-9);
        cr_assert_float_eq(from_restraint(&r.givens, r.methyl[k / 3], r.other[k % 3], false), 1.8, 1e-12);
    }
    rule_end(&r);
}

/* The mean of r^-6 is no larger than its largest term, so the nearest pair is within u; and no term exceeds N times the mean. */
Test(restraints_in_bounds, an_average_binds_the_nearest_pair_to_its_limit) {
    rule r = rule_of("limit A:1:HB% A:3:HA 1.8 5.5 average");
    for (int k = 0; k < 3; k++) {
        cr_assert_float_eq(from_restraint(&r.givens, r.methyl[k], r.alpha, true), 5.5 + width_of(&r.givens, r.methyl, 3), 1e-9);
        cr_assert_float_eq(from_restraint(&r.givens, r.methyl[k], r.alpha, false), 1.8 * pow(3, -1.0 / 6), 1e-9);
    }
    rule_end(&r);
}

Test(restraints_in_bounds, alternatives_bind_no_pair_from_above_and_every_pair_from_below) {
    rule r = rule_of("limit A:1:HB% A:3:HA,A:2:HA 1.8 5.5");
    int32_t second = atom_of(r.problem, "2", "HA");
    for (int k = 0; k < 3; k++) {
        cr_assert(isnan(from_restraint(&r.givens, r.methyl[k], r.alpha, true)));
        cr_assert(isnan(from_restraint(&r.givens, r.methyl[k], second, true)));
        cr_assert_float_eq(from_restraint(&r.givens, r.methyl[k], r.alpha, false), 1.8, 1e-12);
        cr_assert_float_eq(from_restraint(&r.givens, r.methyl[k], second, false), 1.8, 1e-12);
    }
    rule_end(&r);
}

Test(restraints_in_bounds, one_combination_holds_together_and_two_bind_nothing) {
    tml_problem *problem = problem_from("sequence A 1 ALA SER ALA GLY\nlimit A:1:HA A:3:HA,A:2:HA 1.8 5.5\n");
    tml_restraints *restraints = &problem->restraints;
    int32_t first = atom_of(problem, "1", "HA"), second = atom_of(problem, "2", "HA"), third = atom_of(problem, "3", "HA");
    cr_assert_eq(restraints->distances[0].alternative_count, 2);
    restraints->distances[0].combined = true;
    for (int together = 0; together < 2; together++) {
        tml_givens givens = {0};
        restraints->alternatives[0].combination = 0;
        restraints->alternatives[1].combination = together ? 0 : 1;
        cr_assert_eq(tml_givens_collect(problem, &givens, NULL), TML_OK);
        for (int k = 0; k < 2; k++) {
            double upper = from_restraint(&givens, first, k ? second : third, true), lower = from_restraint(&givens, first, k ? second : third, false);
            if (together)
                cr_assert(fabs(upper - 5.5) < 1e-9 && fabs(lower - 1.8) < 1e-9); /* each by its own sum of one pair */
            else
                cr_assert(isnan(upper) && isnan(lower));
        }
        free(givens.items);
    }
    tml_problem_free(problem);
}

Test(restraints_in_bounds, a_dihedral_sets_the_distance_of_its_ends) {
    static const struct { int lower, upper; double least, most; } CASES[] = {{60, 60, 60, 60}, {-80, 50, 0, 80}, {150, 220, 140, 180}, {170, -170, 170, 180}};
    for (size_t c = 0; c < sizeof CASES / sizeof *CASES; c++) {
        char text[200];
        snprintf(text, sizeof text, "sequence A 1 ALA ALA\ndihedral A:1:C A:2:N A:2:CA A:2:C %d %d\n", CASES[c].lower, CASES[c].upper);
        tml_problem *problem = problem_from(text);
        tml_givens givens = {0};
        tml_geometry geometry = {0};
        cr_assert_eq(tml_givens_collect(problem, &givens, NULL), TML_OK);
        cr_assert(tml_geometry_fill(&geometry, &problem->molecule, NULL, NULL));
        int32_t atoms[] = {atom_of(problem, "1", "C"), atom_of(problem, "2", "N"), atom_of(problem, "2", "CA"), atom_of(problem, "2", "C")};
        double least = tml_geometry_across(&geometry, atoms[0], atoms[1], atoms[2], atoms[3], CASES[c].least * acos(-1) / 180);
        double most = tml_geometry_across(&geometry, atoms[0], atoms[1], atoms[2], atoms[3], CASES[c].most * acos(-1) / 180);
        int seen = 0;
        for (size_t i = 0; i < givens.count; i++) {
            if (givens.items[i].reason != TML_REASON_DIHEDRAL) continue;
            seen++;
            cr_assert_float_eq(givens.items[i].value, givens.items[i].is_upper ? most : least, 0.15 + 1e-9);
            cr_assert(givens.items[i].is_upper ? givens.items[i].value >= most : givens.items[i].value <= least);
        }
        cr_assert_eq(seen, 2);
        tml_geometry_clear(&geometry);
        free(givens.items);
        tml_problem_free(problem);
    }
}
