#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "base/target.h"
#include "embed/embed.h"

enum { MOST_DIMENSIONS = 4 };
/* Atoms nearer than this do not tell a direction, Å. */
static const double NEAREST = 1e-6;

typedef double loose_v4 __attribute__((vector_size(32), aligned(8)));
typedef float loose_f4 __attribute__((vector_size(16), aligned(4)));

/* One transform: x'_i = 1/n Σ_j (d_ij / |x_i - x_j|)·(x_i - x_j), from and to arrays of `width` doubles a dimension. */
TML_WIDE static void guttman(const float *distance, int n, size_t stride, int dimensions, const double *from, size_t width, double *to) {
    for (int i = 0; i < n; i++) {
        const float *row = distance + (size_t)i * stride;
        tml_v4 sum[MOST_DIMENSIONS] = {TML_V4(0), TML_V4(0), TML_V4(0), TML_V4(0)};
        for (int j = 0; j < n; j += 4) {  /* the arrays are filled up to fours; a wanted distance of 0 silences the filling */
            tml_v4 off[MOST_DIMENSIONS], square = TML_V4(NEAREST * NEAREST), wanted = TML_V4(0);
            for (int k = 0; k < dimensions; k++) {
                off[k] = TML_V4(from[(size_t)k * width + (size_t)i]) - *(const loose_v4 *)&from[(size_t)k * width + (size_t)j];
                square += off[k] * off[k];
            }
            if (j + 4 <= n) {
                loose_f4 d = *(const loose_f4 *)&row[j];
                wanted = __builtin_convertvector(d, tml_v4);
            } else {
                for (int l = 0; j + l < n; l++) wanted[l] = row[j + l];
            }
            tml_v4 length;
            for (int l = 0; l < 4; l++) length[l] = sqrt(square[l]);
            tml_v4 ratio = wanted / length;
            for (int k = 0; k < dimensions; k++) sum[k] += ratio * off[k];
        }
        for (int k = 0; k < dimensions; k++) to[(size_t)k * width + (size_t)i] = (sum[k][0] + sum[k][1] + sum[k][2] + sum[k][3]) / n;
    }
}

tml_status tml_majorize(const float *distance, int32_t n, size_t stride, int dimensions, int steps, double *coordinates, tml_error *error) {
    size_t width = ((size_t)n + 3) / 4 * 4, whole = width * (size_t)dimensions;
    double *from = tml_alloc_aligned(whole, sizeof *from), *to = tml_alloc_aligned(whole, sizeof *to);
    if (from == NULL || to == NULL) {
        free(from);
        free(to);
        return tml_no_memory(error);
    }
    memset(from, 0, whole * sizeof *from);
    memset(to, 0, whole * sizeof *to);
    for (size_t i = 0; i < (size_t)n; i++)
        for (int k = 0; k < dimensions; k++) from[(size_t)k * width + i] = coordinates[i * (size_t)dimensions + (size_t)k];
    for (int step = 0; step < steps; step++) {
        guttman(distance, n, stride, dimensions, from, width, to);
        double *swap = from;
        from = to;
        to = swap;
    }
    for (size_t i = 0; i < (size_t)n; i++)
        for (int k = 0; k < dimensions; k++) coordinates[i * (size_t)dimensions + (size_t)k] = from[(size_t)k * width + i];
    free(from);
    free(to);
    return TML_OK;
}
