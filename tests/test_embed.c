/* From distances to coordinates. */
#include <criterion/criterion.h>
#include <lapacke.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "base/pcg.h"
#include "embed/embed.h"

enum { PAIRS = 5, SIZE_COUNT = 10 };
/* The method changes at 128 atoms. */
static const int SIZES[SIZE_COUNT] = {1, 2, 3, 4, 9, 126, 127, 128, 129, 200};
static const double PROMISED = 1e-6; /* residual over the largest eigenvalue: embed.h */

typedef struct table { float *d; int n; size_t stride; } table;

static table table_new(int n) {
    table t = {.n = n, .stride = ((size_t)n + 15) / 16 * 16};
    t.d = tml_alloc_aligned((size_t)n * t.stride, sizeof *t.d);
    cr_assert_not_null(t.d);
    memset(t.d, 0, (size_t)n * t.stride * sizeof *t.d);
    return t;
}

static void set(table *t, int i, int j, double d) {
    t->d[(size_t)i * t->stride + (size_t)j] = t->d[(size_t)j * t->stride + (size_t)i] = (float)d;
}

static double get(const table *t, int i, int j) {
    return t->d[(size_t)i * t->stride + (size_t)j];
}

static double apart(const double *xyz, int dimensions, int i, int j) {
    double square = 0;
    for (int k = 0; k < dimensions; k++) square += pow(xyz[dimensions * i + k] - xyz[dimensions * j + k], 2);
    return sqrt(square);
}

static void random_points(tml_pcg *pcg, int count, double size, double *out) {
    for (int i = 0; i < count; i++) out[i] = size * tml_pcg_normal(pcg);
}

static table distances_of(const double *xyz, int n, int dimensions) {
    table t = table_new(n);
    for (int i = 0; i < n; i++)
        for (int j = 0; j < i; j++) set(&t, i, j, apart(xyz, dimensions, i, j));
    return t;
}

/* Distances that fit no space: drawn at random; their metric matrix has negative eigenvalues as large as the positive ones. */
static table random_distances(tml_pcg *pcg, int n, double least, double most) {
    table t = table_new(n);
    for (int i = 0; i < n; i++)
        for (int j = 0; j < i; j++) set(&t, i, j, least + (most - least) * tml_pcg_uniform(pcg));
    return t;
}

/* The metric matrix, written out from its definition: squared distances to the centroid d0, then ½(d0_i² + d0_j² - d_ij²)
 * (Crippen & Havel, Acta Cryst. A34 (1978) 282). */
static double *metric_of(const table *t) {
    size_t n = (size_t)t->n;
    double *g = calloc(n * n, sizeof *g), *zero = calloc(n, sizeof *zero), all = 0;
    for (int j = 0; j < t->n; j++)
        for (int k = 0; k < j; k++) all += pow(get(t, j, k), 2) / ((double)n * (double)n);
    for (int i = 0; i < t->n; i++) {
        for (int j = 0; j < t->n; j++) zero[i] += pow(get(t, i, j), 2) / (double)n;
        zero[i] -= all;
    }
    for (int i = 0; i < t->n; i++)
        for (int j = 0; j < t->n; j++) g[(size_t)i * n + (size_t)j] = 0.5 * (zero[i] + zero[j] - pow(get(t, i, j), 2));
    free(zero);
    return g;
}

/* Ours against all of LAPACK's; values, residuals and mutual right angles. Returns the ratio of the least to the largest. */
static double assert_pairs(const table *t, int count) {
    int n = t->n;
    double *g = metric_of(t), *copy = malloc((size_t)n * (size_t)n * sizeof *copy), *all = calloc((size_t)n, sizeof *all);
    double values[8], *vectors = calloc((size_t)n * 8, sizeof *vectors);
    memcpy(copy, g, (size_t)n * (size_t)n * sizeof *copy);
    cr_assert_eq(LAPACKE_dsyev(LAPACK_COL_MAJOR, 'N', 'U', n, copy, n, all), 0);
    cr_assert_eq(tml_metric_eigenpairs(t->d, n, t->stride, count, values, vectors, NULL), TML_OK);
    double scale = fmax(all[n - 1], 1e-3), ratio = all[0] / scale;
    for (int c = 0; c < count && c < n; c++) {
        double square = 0;
        cr_assert_float_eq(values[c], all[n - 1 - c], PROMISED * scale, "n = %d, pair %d: %.9g, LAPACK %.9g", n, c, values[c], all[n - 1 - c]);
        for (int i = 0; i < n; i++) {
            double sum = -values[c] * vectors[c * n + i];
            for (int j = 0; j < n; j++) sum += g[(size_t)i * (size_t)n + (size_t)j] * vectors[c * n + j];
            square += sum * sum;
        }
        cr_assert_leq(sqrt(square), PROMISED * scale, "n = %d, pair %d", n, c);
        for (int other = 0; other <= c; other++) {
            double dot = 0;
            for (int i = 0; i < n; i++) dot += vectors[c * n + i] * vectors[other * n + i];
            cr_assert_float_eq(dot, other == c, 1e-9, "n = %d, pairs %d %d", n, c, other);
        }
    }
    for (int c = n; c < count; c++) cr_assert_eq(values[c], 0);
    free(g);
    free(copy);
    free(all);
    free(vectors);
    return ratio;
}

Test(eigenpairs, equal_lapacks_for_points_and_for_distances_of_no_space) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 1, 2);
    for (int s = 0; s < SIZE_COUNT; s++) {
        double xyz[3 * 200];
        random_points(&pcg, 3 * SIZES[s], 10, xyz);
        table points = distances_of(xyz, SIZES[s], 3), none = random_distances(&pcg, SIZES[s], 3, 30);
        assert_pairs(&points, PAIRS);
        double ratio = assert_pairs(&none, PAIRS);
        if (SIZES[s] > 100) cr_assert_lt(ratio, -0.5); /* as negative as large, or the case is not hard */
        free(points.d);
        free(none.d);
    }
}

/* Two far clusters whose members are farther from each other than from the other cluster: the eigenvalue of largest size is
 * negative, by far. */
Test(eigenpairs, a_dominant_negative_eigenvalue_is_not_taken) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 2, 2);
    for (int n = 120; n <= 180; n += 20) {
        table t = table_new(n);
        for (int i = 0; i < n; i++)
            for (int j = 0; j < i; j++) set(&t, i, j, ((i < n / 2) == (j < n / 2) ? 20 : 2) + 0.1 * tml_pcg_uniform(&pcg));
        cr_assert_lt(assert_pairs(&t, PAIRS), -10);
        free(t.d);
    }
}

Test(eigenpairs, rank_deficient_and_repeated_eigenvalues_are_found) {
    for (int n = 100; n <= 160; n += 30) {
        double line[3 * 160] = {0}, square[3 * 160] = {0};
        for (int i = 0; i < n; i++) {
            line[3 * i] = i;
            square[3 * i] = cos(2 * acos(-1) * i / n) * 20; /* points on a circle: two equal eigenvalues */
            square[3 * i + 1] = sin(2 * acos(-1) * i / n) * 20;
        }
        table one = distances_of(line, n, 3), two = distances_of(square, n, 3), all = table_new(n);
        for (int i = 0; i < n; i++)
            for (int j = 0; j < i; j++) set(&all, i, j, 5); /* a regular simplex: n - 1 equal eigenvalues */
        assert_pairs(&one, PAIRS);
        assert_pairs(&two, PAIRS);
        assert_pairs(&all, PAIRS);
        free(one.d);
        free(two.d);
        free(all.d);
    }
}

Test(eigenpairs, atoms_in_one_place_have_no_extent) {
    for (int n = 1; n <= 150; n += 149) {
        table t = table_new(n);
        double xyz[3 * 150], values[4];
        cr_assert_eq(tml_embed(t.d, n, t.stride, 3, xyz, values, NULL), TML_OK);
        for (int k = 0; k < 4; k++) cr_assert_float_eq(values[k], 0, 1e-9);
        for (int i = 0; i < 3 * n; i++) cr_assert_float_eq(xyz[i], 0, 1e-9);
        free(t.d);
    }
}

Test(eigenpairs, the_same_distances_give_the_same_bytes) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 3, 2);
    table t = random_distances(&pcg, 190, 3, 30);
    double one[3 * 190], two[3 * 190];
    cr_assert_eq(tml_embed(t.d, 190, t.stride, 3, one, NULL, NULL), TML_OK);
    cr_assert_eq(tml_embed(t.d, 190, t.stride, 3, two, NULL, NULL), TML_OK);
    cr_assert_arr_eq(one, two, sizeof one);
    free(t.d);
}

/* ---- facts of distance geometry ---- */

static double least_eigenvalue(const table *t) {
    double *g = metric_of(t), all[16];
    cr_assert_eq(LAPACKE_dsyev(LAPACK_COL_MAJOR, 'N', 'U', t->n, g, t->n, all), 0);
    free(g);
    return all[0];
}

/* Euclid, Elements I.22: three lines of which any two are together greater than the third make a triangle. */
Test(facts, three_distances_that_obey_the_triangle_inequality_can_be_drawn_in_the_plane) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 4, 2);
    for (int drawn = 0, tried = 0; drawn < 500; tried++) {
        double a = 1 + 9 * tml_pcg_uniform(&pcg), b = 1 + 9 * tml_pcg_uniform(&pcg), c = 1 + 9 * tml_pcg_uniform(&pcg), xyz[9], values[4];
        table t = table_new(3);
        set(&t, 0, 1, a);
        set(&t, 0, 2, b);
        set(&t, 1, 2, c);
        bool holds = a <= b + c && b <= a + c && c <= a + b;
        cr_assert_eq(tml_embed(t.d, 3, t.stride, 3, xyz, values, NULL), TML_OK);
        cr_assert(holds == (least_eigenvalue(&t) >= -1e-6));
        cr_assert_leq(fabs(values[2]), 1e-6 + (holds ? 0 : 50)); /* no third dimension */
        for (int i = 0; holds && i < 3; i++) {
            cr_assert_float_eq(xyz[3 * i + 2], 0, 1e-3);
            for (int j = 0; j < i; j++) cr_assert_float_eq(apart(xyz, 3, i, j), get(&t, i, j), 1e-4);
        }
        drawn += holds;
        free(t.d);
        cr_assert_lt(tried, 5000);
    }
}

/* An equilateral triangle of side 2 has its corners 2/√3 = 1.1547 from its centre: a fourth point 1.1 from each obeys all four
 * triangle inequalities and fits in no space, one at 1.16 in three dimensions. */
Test(facts, four_points_no_dimension_can_hold) {
    for (int k = 0; k < 2; k++) {
        table t = table_new(4);
        double reach = k == 0 ? 1.1 : 1.16, xyz[12];
        for (int i = 0; i < 3; i++) {
            set(&t, i, 3, reach);
            for (int j = 0; j < i; j++) set(&t, i, j, 2);
        }
        cr_assert_geq(2 * reach, 2);
        cr_assert_eq(tml_embed(t.d, 4, t.stride, 3, xyz, NULL, NULL), TML_OK);
        double worst = 0;
        for (int i = 0; i < 4; i++)
            for (int j = 0; j < i; j++) worst = fmax(worst, fabs(apart(xyz, 3, i, j) - get(&t, i, j)));
        if (k == 0) {
            cr_assert_lt(least_eigenvalue(&t), -0.01);
            cr_assert_gt(worst, 0.01);
        } else {
            cr_assert_geq(least_eigenvalue(&t), -1e-6);
            cr_assert_leq(worst, 1e-5);
        }
        free(t.d);
    }
}

/* Five points 1 Å apart need four dimensions. */
Test(facts, five_points_all_one_apart_need_the_fourth_dimension) {
    table t = table_new(5);
    double values[5], four[20], three[15], worst = 0;
    for (int i = 0; i < 5; i++)
        for (int j = 0; j < i; j++) set(&t, i, j, 1);
    cr_assert_eq(tml_embed(t.d, 5, t.stride, 4, four, values, NULL), TML_OK);
    cr_assert_eq(tml_embed(t.d, 5, t.stride, 3, three, NULL, NULL), TML_OK);
    for (int k = 0; k < 4; k++) cr_assert_float_eq(values[k], 0.5, 1e-6); /* of a regular simplex: ½ d² */
    for (int i = 0; i < 5; i++)
        for (int j = 0; j < i; j++) {
            cr_assert_float_eq(apart(four, 4, i, j), 1, 1e-6);
            worst = fmax(worst, fabs(apart(three, 3, i, j) - 1));
        }
    cr_assert_gt(worst, 0.1);
    free(t.d);
}

/* Young & Householder, Psychometrika 3 (1938) 19: exactly when no eigenvalue is negative the distances are those of points; their
 * number above 0 is the dimension, and √λ·v are such points. */
Test(facts, exact_distances_give_their_points_back_in_their_own_dimension) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 5, 2);
    for (int s = 3; s < SIZE_COUNT; s++)
        for (int dimensions = 1; dimensions <= 4; dimensions++) {
            int n = SIZES[s], into = dimensions < 3 ? 3 : dimensions;
            double points[4 * 200], back[4 * 200], values[5];
            if (n <= dimensions) continue;
            random_points(&pcg, dimensions * n, 8, points);
            table t = distances_of(points, n, dimensions);
            cr_assert_eq(tml_embed(t.d, n, t.stride, into, back, values, NULL), TML_OK);
            for (int k = 0; k <= into; k++) {
                if (k < dimensions)
                    cr_assert_gt(values[k], 1e-3 * values[0]);
                else
                    cr_assert_float_eq(values[k], 0, 1e-5 * values[0]);
            }
            for (int i = 0; i < n; i++)
                for (int j = 0; j < i; j++) cr_assert_float_eq(apart(back, into, i, j), get(&t, i, j), 2e-2, "n = %d, %d dimensions", n, dimensions);
            free(t.d);
        }
}

/* ---- majorization ---- */

static double stress(const table *t, const double *xyz, int dimensions) {
    double sum = 0;
    for (int i = 0; i < t->n; i++)
        for (int j = 0; j < i; j++) sum += pow(apart(xyz, dimensions, i, j) - get(t, i, j), 2);
    return sum;
}

/* de Leeuw (1977): a Guttman transform never raises the stress. */
Test(majorize, no_step_raises_the_stress) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 6, 2);
    for (int dimensions = 3; dimensions <= 4; dimensions++)
        for (int s = 1; s < SIZE_COUNT; s++) {
            int n = SIZES[s];
            double xyz[4 * 200];
            table t = random_distances(&pcg, n, 2, 25);
            cr_assert_eq(tml_embed(t.d, n, t.stride, dimensions, xyz, NULL, NULL), TML_OK);
            double before = stress(&t, xyz, dimensions), first = before;
            for (int step = 0; step < 30; step++) {
                cr_assert_eq(tml_majorize(t.d, n, t.stride, dimensions, 1, xyz, NULL), TML_OK);
                double after = stress(&t, xyz, dimensions);
                cr_assert_leq(after, before * (1 + 1e-9) + 1e-9, "n = %d, step %d: %.9g after %.9g", n, step, after, before);
                before = after;
            }
            if (n > 100) cr_assert_lt(before, 0.9 * first);
            free(t.d);
        }
}

Test(majorize, points_at_their_distances_stay) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 7, 2);
    double points[3 * 61], moved[3 * 61];
    random_points(&pcg, 3 * 61, 8, points);
    table t = distances_of(points, 61, 3);
    memcpy(moved, points, sizeof moved);
    cr_assert_eq(tml_majorize(t.d, 61, t.stride, 3, 5, moved, NULL), TML_OK);
    for (int i = 0; i < 61; i++)
        for (int j = 0; j < i; j++) cr_assert_float_eq(apart(moved, 3, i, j), apart(points, 3, i, j), 1e-4);
    free(t.d);
}

Test(majorize, several_steps_at_once_are_the_steps_one_by_one) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 8, 2);
    table t = random_distances(&pcg, 50, 2, 20);
    double one[150], many[150];
    random_points(&pcg, 150, 5, one);
    memcpy(many, one, sizeof many);
    for (int step = 0; step < 7; step++) cr_assert_eq(tml_majorize(t.d, 50, t.stride, 3, 1, one, NULL), TML_OK);
    cr_assert_eq(tml_majorize(t.d, 50, t.stride, 3, 7, many, NULL), TML_OK);
    cr_assert_arr_eq(one, many, sizeof one);
    free(t.d);
}

Test(majorize, atoms_in_one_place_stay_finite) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 9, 2);
    table t = random_distances(&pcg, 10, 2, 20);
    double xyz[30] = {0};
    cr_assert_eq(tml_majorize(t.d, 10, t.stride, 3, 3, xyz, NULL), TML_OK);
    for (int i = 0; i < 30; i++) cr_assert(isfinite(xyz[i]));
    free(t.d);
}
