/* eigen.c: the algebraically largest eigenpairs of the metric matrix, by a restarted block Krylov method.
 *
 * The metric matrix is G = -½·J·D²·J with J = 1 - 11ᵀ/n, which is ½(d²(i,0) + d²(j,0) - d²(i,j)) with the squared distances to the
 * centroid. It is never stored: a product with G is one pass over the distances, squared on the way, between two removals of the
 * mean. Squared distances to the centroid come out negative where the distances fit no space; they enter as they are.
 *
 * Rayleigh-Ritz over a growing basis picks the largest eigenvalues by sign, so large negative ones do no harm.
 */
#include <cblas.h>
#include <lapacke.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "base/pcg.h"
#include "base/target.h"
#include "embed/embed.h"

enum { BLOCK = 8, BASIS = 64, KEPT = 16, PASSES = 400, DENSE_BELOW = 2 * BASIS };
/* Residual, relative to the largest eigenvalue, at which a pair counts as found; embed.h promises 1e-6. */
static const double ENOUGH = 2e-7;

typedef struct krylov {
    const float *distance;
    int n;
    size_t stride;
    double *basis, *image;         /* n × BASIS, column-major: V and G·V */
    double *rows, *products;       /* n × BLOCK, row-major, for the pass over the distances */
    double *spare;                 /* n × BASIS */
    double projected[BASIS * BASIS], vectors[BASIS * BASIS], values[BASIS];
    int size;                      /* columns of the basis */
    tml_pcg pcg;
} krylov;

static tml_status dense_pairs(const float *distance, int n, size_t stride, int count, double *values, double *vectors, tml_error *error);
static bool krylov_open(krylov *k, const float *distance, int n, size_t stride);
static void krylov_close(krylov *k);
static bool krylov_run(krylov *k, int count);
static void fix_signs(double *vectors, int n, int count);

tml_status tml_metric_eigenpairs(const float *distance, int32_t n, size_t stride, int count, double *values, double *vectors,
                                 tml_error *error) {
    tml_status status = TML_OK;
    if (n < DENSE_BELOW) {
        status = dense_pairs(distance, n, stride, count, values, vectors, error);
    } else {
        krylov *k = tml_alloc(1, sizeof *k);
        bool room = k != NULL && krylov_open(k, distance, n, stride) && krylov_run(k, count);
        if (room) {
            cblas_dgemm(CblasColMajor, CblasNoTrans, CblasNoTrans, n, count, k->size, 1, k->basis, n, k->vectors, k->size, 0, vectors, n);
            memcpy(values, k->values, (size_t)count * sizeof *values);
        }
        if (k != NULL) krylov_close(k);
        free(k);
        if (!room) status = tml_no_memory(error);
    }
    if (status == TML_OK) fix_signs(vectors, n, count);
    return status;
}

/* An eigenvector's sign is free: the component of largest size is made positive. */
static void fix_signs(double *vectors, int n, int count) {
    for (int c = 0; c < count; c++) {
        double *v = vectors + (size_t)c * (size_t)n, largest = 0;
        for (int i = 0; i < n; i++)
            if (fabs(v[i]) > fabs(largest) * (1 + 1e-9)) largest = v[i];
        for (int i = 0; i < n && largest < 0; i++) v[i] = -v[i];
    }
}

/* ---- small matrices: LAPACK on the whole ---- */

static tml_status dense_pairs(const float *distance, int n, size_t stride, int count, double *values, double *vectors, tml_error *error) {
    size_t size = (size_t)n;
    double *metric = tml_alloc(size * size, sizeof *metric), *mean = tml_alloc(size, sizeof *mean), *all = tml_alloc(size, sizeof *all);
    tml_status status = metric != NULL && mean != NULL && all != NULL ? TML_OK : tml_no_memory(error);
    double whole = 0;
    for (size_t i = 0; status == TML_OK && i < size; i++) {
        for (size_t j = 0; j < size; j++) mean[i] += (double)distance[i * stride + j] * (double)distance[i * stride + j] / n;
        whole += mean[i] / n;
    }
    for (size_t i = 0; status == TML_OK && i < size; i++)
        for (size_t j = 0; j < size; j++)
            metric[i * size + j] = -0.5 * ((double)distance[i * stride + j] * (double)distance[i * stride + j] - mean[i] - mean[j] + whole);
    if (status == TML_OK && LAPACKE_dsyev(LAPACK_COL_MAJOR, 'V', 'U', n, metric, n, all) != 0) status = tml_no_memory(error);
    for (int c = 0; status == TML_OK && c < count; c++) {
        bool exists = c < n;
        values[c] = exists ? all[n - 1 - c] : 0;
        for (int i = 0; i < n; i++) vectors[(size_t)c * size + (size_t)i] = exists ? metric[(size_t)(n - 1 - c) * size + (size_t)i] : 0;
    }
    free(metric);
    free(mean);
    free(all);
    return status;
}

/* ---- large ones ---- */

static bool krylov_open(krylov *k, const float *distance, int n, size_t stride) {
    size_t size = (size_t)n;
    k->distance = distance;
    k->n = n;
    k->stride = stride;
    k->basis = tml_alloc(size * BASIS, sizeof(double));
    k->image = tml_alloc(size * BASIS, sizeof(double));
    k->spare = tml_alloc(size * BASIS, sizeof(double));
    k->rows = tml_alloc_aligned(size * BLOCK, sizeof(double));
    k->products = tml_alloc_aligned(size * BLOCK, sizeof(double));
    tml_pcg_seed(&k->pcg, 1979, 4); /* any fixed start: the result is the same to the residual */
    return k->basis != NULL && k->image != NULL && k->spare != NULL && k->rows != NULL && k->products != NULL;
}

static void krylov_close(krylov *k) {
    free(k->basis);
    free(k->image);
    free(k->spare);
    free(k->rows);
    free(k->products);
}

/* out = D²·in, both n × BLOCK, row-major. */
TML_WIDE static void multiply_squares(const float *distance, int n, size_t stride, const double *in, double *out) {
    for (int i = 0; i < n; i++) {
        const float *row = distance + (size_t)i * stride;
        const tml_v4 *x = (const tml_v4 *)in;
        tml_v4 a = TML_V4(0), b = TML_V4(0), c = TML_V4(0), d = TML_V4(0);
        int j = 0;
        for (; j + 1 < n; j += 2, x += 4) { /* two chains of sums each, to hide their latency */
            double first = (double)row[j] * (double)row[j], second = (double)row[j + 1] * (double)row[j + 1];
            a += first * x[0];
            b += first * x[1];
            c += second * x[2];
            d += second * x[3];
        }
        if (j < n) {
            double last = (double)row[j] * (double)row[j];
            a += last * x[0];
            b += last * x[1];
        }
        tml_v4 *y = (tml_v4 *)(out + (size_t)i * BLOCK);
        y[0] = a + c;
        y[1] = b + d;
    }
}

static void remove_mean(double *block, int n) {
    double mean[BLOCK] = {0};
    for (int i = 0; i < n; i++)
        for (int c = 0; c < BLOCK; c++) mean[c] += block[(size_t)i * BLOCK + (size_t)c];
    for (int i = 0; i < n; i++)
        for (int c = 0; c < BLOCK; c++) block[(size_t)i * BLOCK + (size_t)c] -= mean[c] / n;
}

/* Images of the last BLOCK columns of the basis. */
static void apply_metric(krylov *k) {
    size_t n = (size_t)k->n, first = (size_t)k->size - BLOCK;
    for (size_t c = 0; c < BLOCK; c++)
        for (size_t i = 0; i < n; i++) k->rows[i * BLOCK + c] = k->basis[(first + c) * n + i];
    remove_mean(k->rows, k->n);
    multiply_squares(k->distance, k->n, k->stride, k->rows, k->products);
    remove_mean(k->products, k->n);
    for (size_t c = 0; c < BLOCK; c++)
        for (size_t i = 0; i < n; i++) k->image[(first + c) * n + i] = -0.5 * k->products[i * BLOCK + c];
}

/* Make column `column` square on all before it and of unit length, twice over (Kahan: twice is enough); one that vanishes is
 * replaced by a random one. */
static void orthonormalise(krylov *k, int column) {
    double *v = k->basis + (size_t)column * (size_t)k->n, overlap[BASIS];
    for (int attempt = 0; attempt < 4; attempt++) {
        double before = cblas_dnrm2(k->n, v, 1);
        if (before > 0) cblas_dscal(k->n, 1 / before, v, 1);
        for (int pass = 0; pass < 2 && column > 0; pass++) {
            cblas_dgemv(CblasColMajor, CblasTrans, k->n, column, 1, k->basis, k->n, v, 1, 0, overlap, 1);
            cblas_dgemv(CblasColMajor, CblasNoTrans, k->n, column, -1, k->basis, k->n, overlap, 1, 1, v, 1);
        }
        double length = cblas_dnrm2(k->n, v, 1);
        if (before > 0 && length > 1e-8) {
            cblas_dscal(k->n, 1 / length, v, 1);
            return;
        }
        for (int i = 0; i < k->n; i++) v[i] = tml_pcg_normal(&k->pcg);
    }
}

/* Eigenpairs of G within the basis, largest first, in values and (column by column) vectors. */
static bool rayleigh_ritz(krylov *k) {
    int m = k->size;
    double ascending[BASIS];
    cblas_dgemm(CblasColMajor, CblasTrans, CblasNoTrans, m, m, k->n, 1, k->basis, k->n, k->image, k->n, 0, k->projected, m);
    for (int i = 0; i < m; i++)
        for (int j = 0; j < i; j++)
            k->projected[i * m + j] = k->projected[j * m + i] = 0.5 * (k->projected[i * m + j] + k->projected[j * m + i]);
    if (LAPACKE_dsyev(LAPACK_COL_MAJOR, 'V', 'U', m, k->projected, m, ascending) != 0) return false;
    for (int c = 0; c < m; c++) {
        k->values[c] = ascending[m - 1 - c];
        memcpy(&k->vectors[c * m], &k->projected[(m - 1 - c) * m], (size_t)m * sizeof *k->vectors);
    }
    return true;
}

/* Residuals of the first BLOCK pairs to spare; true when the first `count` are small enough. */
static bool residuals(krylov *k, int count) {
    size_t n = (size_t)k->n;
    bool found = true;
    double scaled[BASIS * BLOCK];
    for (int c = 0; c < BLOCK; c++)
        for (int i = 0; i < k->size; i++) scaled[c * k->size + i] = k->vectors[c * k->size + i] * k->values[c];
    cblas_dgemm(CblasColMajor, CblasNoTrans, CblasNoTrans, k->n, BLOCK, k->size, 1, k->image, k->n, k->vectors, k->size, 0, k->spare, k->n);
    cblas_dgemm(CblasColMajor, CblasNoTrans, CblasNoTrans, k->n, BLOCK, k->size, -1, k->basis, k->n, scaled, k->size, 1, k->spare, k->n);
    for (int c = 0; c < count; c++)
        if (cblas_dnrm2(k->n, k->spare + (size_t)c * n, 1) > ENOUGH * fabs(k->values[0])) found = false;
    return found;
}

/* Shrink the basis to its KEPT best vectors; the residuals in spare stay. */
static bool restart(krylov *k) {
    size_t n = (size_t)k->n;
    double *into = tml_alloc(n * KEPT, sizeof *into);
    if (into == NULL) return false;
    double *both[2] = {k->basis, k->image};
    for (int side = 0; side < 2; side++) {
        cblas_dgemm(CblasColMajor, CblasNoTrans, CblasNoTrans, k->n, KEPT, k->size, 1, both[side], k->n, k->vectors, k->size, 0, into, k->n);
        memcpy(both[side], into, n * KEPT * sizeof *into);
    }
    free(into);
    k->size = KEPT;
    return true;
}

static bool krylov_run(krylov *k, int count) {
    size_t n = (size_t)k->n;
    for (size_t i = 0; i < n * BLOCK; i++) k->basis[i] = tml_pcg_normal(&k->pcg);
    for (int c = 0; c < BLOCK; c++) orthonormalise(k, c);
    k->size = BLOCK;
    apply_metric(k);
    for (int pass = 0; pass < PASSES; pass++) {
        if (!rayleigh_ritz(k)) return false;
        if (residuals(k, count)) break;
        if (k->size + BLOCK > BASIS) {
            if (!restart(k)) return false;
        }
        memcpy(k->basis + (size_t)k->size * n, k->spare, n * BLOCK * sizeof *k->basis);
        for (int c = 0; c < BLOCK; c++) orthonormalise(k, k->size + c);
        k->size += BLOCK;
        apply_metric(k);
    }
    return true;
}
