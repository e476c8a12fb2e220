/* Times of the heavy steps for one invented problem: beads along a random walk, with limits between near ones.
 *
 *   kernels              rows "what, figure asked, measured" for metrization and eigenpairs
 *   kernels FILE         writes the upper limits before and after smoothing to FILE (2·n² floats) and prints the seconds that
 *                        smoothing took with each width of vectors, for figures.py
 */
#include <lapacke.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/clock.h"
#include "base/memory.h"
#include "base/pcg.h"
#include "embed/embed.h"
#include "sample/metrize.h"

enum { ATOMS = 2048, PAIRS = 4, THREADS = 2, REPEATS = 5 };
static const double STEP = 1.5, SIGHT = 9.0;

extern void openblas_set_num_threads(int count);

static void *need(void *pointer) {
    if (pointer == NULL) exit(3);
    return pointer;
}

/* A walk in a box, and limits ± 0.3 Å between what is within sight. */
static tml_bounds *make_limits(void) {
    tml_bounds *bounds = NULL;
    double *xyz = need(tml_alloc(3 * ATOMS, sizeof *xyz));
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 8, 15);
    if (tml_bounds_new(ATOMS, &bounds, NULL) != TML_OK) exit(3);
    for (int i = 1; i < ATOMS; i++) {
        double step[3], length = 0;
        for (int k = 0; k < 3; k++) step[k] = tml_pcg_normal(&pcg) - 0.02 * xyz[3 * (i - 1) + k];
        for (int k = 0; k < 3; k++) length += step[k] * step[k];
        for (int k = 0; k < 3; k++) xyz[3 * i + k] = xyz[3 * (i - 1) + k] + STEP * step[k] / sqrt(length);
    }
    for (int i = 0; i < ATOMS; i++)
        for (int j = 0; j < i; j++) {
            double square = 0;
            for (int k = 0; k < 3; k++) square += pow(xyz[3 * i + k] - xyz[3 * j + k], 2);
            if (sqrt(square) > SIGHT || (j + 1 < i && tml_pcg_uniform(&pcg) > 0.1)) continue;
            tml_bounds_limit_upper(bounds, i, j, sqrt(square) + 0.3);
            tml_bounds_limit_lower(bounds, i, j, sqrt(square) - 0.3);
        }
    free(xyz);
    return bounds;
}

/* The shortest of a few repeats, s; `out` holds the result. */
static double time_smoothing(const tml_bounds *given, tml_bounds *out, int threads, tml_width width) {
    double best = INFINITY;
    for (int repeat = 0; repeat < REPEATS; repeat++) {
        memcpy(out->limit, given->limit, (size_t)given->n * given->stride * sizeof *given->limit);
        double start = tml_seconds();
        if (tml_bounds_smooth_with(out, threads, width, NULL, NULL) != TML_OK) exit(3);
        best = fmin(best, tml_seconds() - start);
    }
    return best;
}

static void row(const char *what, const char *asked, const char *format, double measured) {
    printf("%-62s %-12s ", what, asked);
    printf(format, measured);
    printf("\n");
}

static void compare_metrization(const tml_bounds *closed, double smoothing, float *work, int32_t *order) {
    tml_pcg pcg;
    double best = INFINITY;
    for (int repeat = 0; repeat < REPEATS; repeat++) {
        tml_pcg_seed_trial(&pcg, 1, 1);
        double start = tml_seconds();
        if (tml_metrize(closed, ATOMS, &pcg, work, order, NULL) != TML_OK) exit(3);
        best = fmin(best, tml_seconds() - start);
    }
    row("smoothing, n = 2048, two threads, s", "-", "%.3f", smoothing);
    row("full metrization, one trial on one thread, s", "-", "%.3f", best);
    row("full metrization over smoothing", "<= 3", "%.2f", best / smoothing);
}

/* The metric matrix, for LAPACK, of the distances in work. */
static double *metric_of(const float *work, size_t stride) {
    double *metric = need(tml_alloc((size_t)ATOMS * ATOMS, sizeof *metric)), *mean = need(tml_alloc(ATOMS, sizeof *mean)), whole = 0;
    for (size_t i = 0; i < ATOMS; i++) {
        for (size_t j = 0; j < ATOMS; j++) mean[i] += pow((double)work[i * stride + j], 2) / ATOMS;
        whole += mean[i] / ATOMS;
    }
    for (size_t i = 0; i < ATOMS; i++)
        for (size_t j = 0; j < ATOMS; j++) metric[i * ATOMS + j] = -0.5 * (pow((double)work[i * stride + j], 2) - mean[i] - mean[j] + whole);
    free(mean);
    return metric;
}

/* The largest residual |G·v - λ·v| of the pairs over the largest eigenvalue. */
static double residual_of(const double *metric, const double *values, const double *vectors) {
    double worst = 0;
    for (size_t c = 0; c < PAIRS; c++) {
        double square = 0;
        for (size_t i = 0; i < ATOMS; i++) {
            double sum = -values[c] * vectors[c * ATOMS + i];
            for (size_t j = 0; j < ATOMS; j++) sum += metric[i * ATOMS + j] * vectors[c * ATOMS + j];
            square += sum * sum;
        }
        worst = fmax(worst, sqrt(square));
    }
    return worst / values[0];
}

static void compare_eigenpairs(const float *work, size_t stride) {
    double *metric = metric_of(work, stride), *copy = need(tml_alloc((size_t)ATOMS * ATOMS, sizeof *copy));
    double *vectors = need(tml_alloc((size_t)PAIRS * ATOMS, sizeof *vectors)), *theirs = need(tml_alloc((size_t)PAIRS * ATOMS, sizeof *theirs));
    double *all = need(tml_alloc(ATOMS, sizeof *all)), values[PAIRS], ours = INFINITY, apart = 0;
    int32_t found, support[2 * PAIRS];
    for (int repeat = 0; repeat < REPEATS; repeat++) {
        double start = tml_seconds();
        if (tml_metric_eigenpairs(work, ATOMS, stride, PAIRS, values, vectors, NULL) != TML_OK) exit(3);
        ours = fmin(ours, tml_seconds() - start);
    }
    memcpy(copy, metric, (size_t)ATOMS * ATOMS * sizeof *copy);
    double start = tml_seconds();
    if (LAPACKE_dsyevr(LAPACK_COL_MAJOR, 'V', 'I', 'U', ATOMS, copy, ATOMS, 0, 0, ATOMS - PAIRS + 1, ATOMS, 0, &found, all, theirs, ATOMS,
                       support) != 0)
        exit(3);
    double lapack = tml_seconds() - start;
    for (int c = 0; c < PAIRS; c++) apart = fmax(apart, fabs(values[c] - all[PAIRS - 1 - c]) / values[0]);
    row("four eigenpairs, n = 2048, one thread, s", "-", "%.3f", ours);
    row("LAPACKE dsyevr for the same pairs, one thread, s", "-", "%.3f", lapack);
    row("eigenpairs over dsyevr", "<= 0.2", "%.4f", ours / lapack);
    row("largest residual over the largest eigenvalue", "<= 1e-6", "%.1e", residual_of(metric, values, vectors));
    row("eigenvalues' difference from dsyevr over the largest", "<= 1e-6", "%.1e", apart);
    free(metric);
    free(copy);
    free(vectors);
    free(theirs);
    free(all);
}

static void write_uppers(FILE *file, const tml_bounds *bounds) {
    for (int32_t i = 0; i < bounds->n; i++)
        for (int32_t j = 0; j < bounds->n; j++) {
            float upper = tml_bounds_upper(bounds, i, j);
            if (fwrite(&upper, sizeof upper, 1, file) != 1) exit(3);
        }
}

static void serve_figures(const tml_bounds *given, tml_bounds *closed, const char *path) {
    static const struct { const char *name; tml_width width; int columns; } WIDTHS[] = {{"512", TML_WIDTH_512, 32}, {"256", TML_WIDTH_256, 16}};
    FILE *file = need(fopen(path, "wb"));
    for (int w = 0; w < 2; w++)
        if (tml_tiles_for(WIDTHS[w].width).columns == WIDTHS[w].columns)
            printf("%s %.6f\n", WIDTHS[w].name, time_smoothing(given, closed, THREADS, WIDTHS[w].width));
    if (tml_tiles_for(TML_WIDTH_BEST).columns < 16) time_smoothing(given, closed, THREADS, TML_WIDTH_BEST);
    write_uppers(file, given);
    write_uppers(file, closed);
    if (fclose(file) != 0) exit(3);
}

int main(int count, char **arguments) {
    openblas_set_num_threads(1);
    tml_bounds *given = make_limits(), *closed = NULL;
    if (tml_bounds_new(ATOMS, &closed, NULL) != TML_OK) exit(3);
    if (count > 1) {
        serve_figures(given, closed, arguments[1]);
    } else {
        float *work = need(tml_alloc_aligned((size_t)ATOMS * given->stride, sizeof *work));
        int32_t *order = need(tml_alloc(ATOMS, sizeof *order));
        double smoothing = time_smoothing(given, closed, THREADS, TML_WIDTH_BEST);
        compare_metrization(closed, smoothing, work, order);
        compare_eigenpairs(work, given->stride);
        free(work);
        free(order);
    }
    tml_bounds_free(given);
    tml_bounds_free(closed);
    return 0;
}
