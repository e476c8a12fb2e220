#include "bounds/bounds.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"

tml_status tml_bounds_new(int32_t n, tml_bounds **out, tml_error *error) {
    *out = NULL;
    size_t stride = ((size_t)n + 15) / 16 * 16, bytes;
    if (__builtin_mul_overflow(stride * sizeof(float), (size_t)n, &bytes) || bytes > tml_memory_available())
        return tml_fail(error, TML_TOO_LARGE, "%d atoms need %.0f MB for their limits, more than is free", n, 4e-6 * (double)n * (double)n);
    tml_bounds *bounds = tml_alloc(1, sizeof *bounds);
    if (bounds == NULL) return tml_no_memory(error);
    *bounds = (tml_bounds){.n = n, .stride = stride, .limit = tml_alloc_aligned((size_t)n * stride, sizeof(float))};
    if (bounds->limit == NULL) {
        free(bounds);
        return tml_no_memory(error);
    }
    for (int32_t i = 0; i < n; i++) {
        float *row = tml_bounds_cell(bounds, i, 0);
        memset(row, 0, stride * sizeof *row);
        for (int32_t j = i + 1; j < n; j++) row[j] = INFINITY;
    }
    *out = bounds;
    return TML_OK;
}

void tml_bounds_free(tml_bounds *bounds) {
    if (bounds == NULL) return;
    free(bounds->limit);
    free(bounds);
}

/* The nearest float that is not below (above) a double. */
static float float_up(double value) {
    float near = (float)value;
    return (double)near < value ? nextafterf(near, INFINITY) : near;
}

static float float_down(double value) {
    float near = (float)value;
    return (double)near > value ? nextafterf(near, -INFINITY) : near;
}

void tml_bounds_limit_upper(tml_bounds *bounds, int32_t i, int32_t j, double upper) {
    float *cell = i < j ? tml_bounds_cell(bounds, i, j) : tml_bounds_cell(bounds, j, i), value = float_up(upper);
    if (i != j && value < *cell) *cell = value;
}

void tml_bounds_limit_lower(tml_bounds *bounds, int32_t i, int32_t j, double lower) {
    float *cell = i > j ? tml_bounds_cell(bounds, i, j) : tml_bounds_cell(bounds, j, i), value = float_down(lower);
    if (i != j && value > *cell) *cell = value;
}
