#include "embed/embed.h"

#include <math.h>
#include <stdlib.h>

#include "base/memory.h"

tml_status tml_embed(const float *distance, int32_t n, size_t stride, int dimensions, double *coordinates, double *values, tml_error *error) {
    enum { MOST = 8 };
    double eigenvalues[MOST];
    size_t size = (size_t)n;
    int count = dimensions + 1;
    double *vectors = tml_alloc(size * (size_t)count, sizeof *vectors);
    if (vectors == NULL) return tml_no_memory(error);
    tml_status status = tml_metric_eigenpairs(distance, n, stride, count, eigenvalues, vectors, error);
    for (int k = 0; status == TML_OK && k < dimensions; k++) {
        double scale = eigenvalues[k] > 0 ? sqrt(eigenvalues[k]) : 0;
        for (size_t i = 0; i < size; i++) coordinates[i * (size_t)dimensions + (size_t)k] = scale * vectors[(size_t)k * size + i];
    }
    for (int k = 0; status == TML_OK && values != NULL && k < count; k++) values[k] = eigenvalues[k];
    free(vectors);
    return status;
}
