/* Drawn distances obey their limits and the triangle inequality. */
#include <criterion/criterion.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "sample/metrize.h"

static const float LOOSE = 1e-3f; /* Å: rounding of sums in single precision */
enum { SIZE_COUNT = 8 };
static const int SIZES[SIZE_COUNT] = {1, 2, 3, 127, 128, 129, 257, 300};

typedef struct draw { tml_bounds *bounds; float *work; int32_t *order; } draw;

/* Closed limits about random points: a chain, and limits between some others. */
static tml_bounds *closed_limits(int n, uint64_t seed) {
    tml_pcg pcg;
    tml_bounds *bounds = NULL;
    double *xyz = calloc(3 * (size_t)n, sizeof *xyz);
    tml_pcg_seed(&pcg, seed, 7);
    cr_assert_eq(tml_bounds_new(n, &bounds, NULL), TML_OK);
    for (int i = 0; i < 3 * n; i++) xyz[i] = 4 * tml_pcg_normal(&pcg);
    for (int i = 0; i < n; i++)
        for (int j = 0; j < i; j++) {
            if (j + 1 < i && tml_pcg_uniform(&pcg) > 0.1) continue;
            double d = sqrt(pow(xyz[3 * i] - xyz[3 * j], 2) + pow(xyz[3 * i + 1] - xyz[3 * j + 1], 2) + pow(xyz[3 * i + 2] - xyz[3 * j + 2], 2));
            tml_bounds_limit_upper(bounds, i, j, d + tml_pcg_uniform(&pcg));
            tml_bounds_limit_lower(bounds, i, j, fmax(d - tml_pcg_uniform(&pcg), 0));
        }
    free(xyz);
    cr_assert_eq(tml_bounds_smooth(bounds, 1, NULL, NULL), TML_OK);
    return bounds;
}

static draw draw_new(int n, uint64_t seed) {
    draw d = {.bounds = closed_limits(n, seed)};
    d.work = tml_alloc_aligned((size_t)n * d.bounds->stride, sizeof *d.work);
    d.order = tml_alloc((size_t)n, sizeof *d.order);
    cr_assert(d.work != NULL && d.order != NULL);
    return d;
}

static void draw_free(draw *d) {
    tml_bounds_free(d->bounds);
    free(d->work);
    free(d->order);
}

static void draw_again(draw *d, int roots, uint64_t trial) {
    tml_pcg pcg;
    tml_pcg_seed_trial(&pcg, 1, trial);
    cr_assert_eq(tml_metrize(d->bounds, roots, &pcg, d->work, d->order, NULL), TML_OK);
}

static float at(const draw *d, int i, int j) {
    return d->work[(size_t)i * d->bounds->stride + (size_t)j];
}

static void assert_order_and_limits(const draw *d) {
    int n = d->bounds->n;
    char *seen = calloc((size_t)n, 1);
    for (int i = 0; i < n; i++) {
        cr_assert(d->order[i] >= 0 && d->order[i] < n && !seen[d->order[i]]);
        seen[d->order[i]] = 1;
        cr_assert_eq(at(d, i, i), 0);
        for (int j = 0; j < i; j++) {
            cr_assert_eq(at(d, i, j), at(d, j, i));
            cr_assert_leq(at(d, i, j), tml_bounds_upper(d->bounds, d->order[i], d->order[j]) + LOOSE);
            cr_assert_geq(at(d, i, j), tml_bounds_lower(d->bounds, d->order[i], d->order[j]) - LOOSE);
        }
    }
    free(seen);
}

/* Triangles with at least one corner among the first `roots` rows. */
static void assert_triangles(const draw *d, int roots) {
    int n = d->bounds->n;
    for (int i = 0; i < roots && i < n; i++)
        for (int j = 0; j < n; j++)
            for (int k = 0; k < j; k++) {
                float a = at(d, i, j), b = at(d, i, k), c = at(d, j, k);
                if (i != j && i != k && (c > a + b + LOOSE || c < fabsf(a - b) - LOOSE))
                    cr_assert_fail("n = %d, rows %d %d %d: %.5f %.5f %.5f", n, i, j, k, (double)a, (double)b, (double)c);
            }
}

/* Havel, Biopolymers 29 (1990) 1565. */
Test(metrize, full_metrization_obeys_every_limit_and_every_triangle) {
    for (int s = 0; s < SIZE_COUNT; s++) {
        draw d = draw_new(SIZES[s], 10 + (uint64_t)s);
        for (uint64_t trial = 1; trial <= 3; trial++) {
            draw_again(&d, SIZES[s], trial);
            assert_order_and_limits(&d);
            assert_triangles(&d, SIZES[s]);
        }
        draw_free(&d);
    }
}

/* With some roots, each triangle with a root in it holds (Kuszewski, Nilges & Brünger, J. Biomol. NMR 2 (1992) 33). */
Test(metrize, partial_metrization_obeys_every_limit_and_the_roots_triangles) {
    static const int ROOTS[] = {0, 1, 4, 127, 128, 130};
    for (int s = 0; s < SIZE_COUNT; s++) {
        draw d = draw_new(SIZES[s], 30 + (uint64_t)s);
        for (size_t r = 0; r < sizeof ROOTS / sizeof *ROOTS; r++) {
            draw_again(&d, ROOTS[r], 1 + r);
            assert_order_and_limits(&d);
            assert_triangles(&d, ROOTS[r]);
        }
        draw_free(&d);
    }
}

Test(metrize, the_same_seed_gives_the_same_bytes_and_another_seed_others) {
    draw d = draw_new(150, 50), again = draw_new(150, 50);
    for (int roots = 4; roots <= 150; roots += 146) {
        draw_again(&d, roots, 1);
        draw_again(&again, roots, 1);
        cr_assert_arr_eq(d.order, again.order, 150 * sizeof *d.order);
        for (int i = 0; i < 150; i++) cr_assert_arr_eq(&d.work[(size_t)i * d.bounds->stride], &again.work[(size_t)i * d.bounds->stride], 150 * sizeof(float));
        draw_again(&again, roots, 2);
        cr_assert(memcmp(d.order, again.order, 150 * sizeof *d.order) != 0);
    }
    draw_free(&d);
    draw_free(&again);
}

Test(metrize, limits_are_kept_as_they_were) {
    draw d = draw_new(140, 60);
    size_t bytes = 140 * d.bounds->stride * sizeof(float);
    float *before = malloc(bytes);
    memcpy(before, d.bounds->limit, bytes);
    draw_again(&d, 140, 1);
    cr_assert_arr_eq(before, d.bounds->limit, bytes);
    free(before);
    draw_free(&d);
}

/* Two atoms: the distance is uniform between its limits; mean and variance of the uniform distribution, to five standard errors. */
Test(metrize, a_single_distance_is_uniform_between_its_limits) {
    enum { DRAWS = 4000 };
    draw d = draw_new(2, 70);
    double sum = 0, squares = 0;
    *tml_bounds_cell(d.bounds, 0, 1) = 7;
    *tml_bounds_cell(d.bounds, 1, 0) = 3;
    for (uint64_t trial = 1; trial <= DRAWS; trial++) {
        draw_again(&d, 2, trial);
        double share = (at(&d, 0, 1) - 3.0) / 4;
        cr_assert(share >= 0 && share <= 1);
        sum += share / DRAWS;
        squares += share * share / DRAWS;
    }
    cr_assert_float_eq(sum, 0.5, 5 * sqrt(1.0 / 12 / DRAWS));
    cr_assert_float_eq(squares, 1.0 / 3, 5 * sqrt(4.0 / 45 / DRAWS));
    draw_free(&d);
}

/* Each pair spans most of its range over many trials: no pair is frozen, no end is out of reach. */
Test(metrize, every_pair_varies_with_the_trial) {
    enum { ATOMS = 12, TRIALS = 400 };
    draw d = draw_new(ATOMS, 80);
    float least[ATOMS][ATOMS], most[ATOMS][ATOMS];
    for (int i = 0; i < ATOMS; i++)
        for (int j = 0; j < ATOMS; j++) least[i][j] = INFINITY, most[i][j] = 0;
    for (uint64_t trial = 1; trial <= TRIALS; trial++) {
        draw_again(&d, ATOMS, trial);
        for (int i = 0; i < ATOMS; i++)
            for (int j = 0; j < ATOMS; j++) {
                int32_t a = d.order[i], b = d.order[j];
                least[a][b] = fminf(least[a][b], at(&d, i, j));
                most[a][b] = fmaxf(most[a][b], at(&d, i, j));
            }
    }
    for (int i = 0; i < ATOMS; i++)
        for (int j = 0; j < i; j++)
            cr_assert_gt(most[i][j] - least[i][j], 0.4f * (tml_bounds_upper(d.bounds, i, j) - tml_bounds_lower(d.bounds, i, j)));
    draw_free(&d);
}
