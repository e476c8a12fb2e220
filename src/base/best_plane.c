#include "base/best_plane.h"

#include <lapacke.h>
#include <math.h>

#include "base/vector.h"

/* The least eigenvalue of the covariances. */
double tml_off_plane(const int32_t *atoms, int32_t count, const double *xyz) {
    double mean[3] = {0}, m[9] = {0}, values[3];
    for (int32_t k = 0; k < count; k++)
        for (int l = 0; l < 3; l++) mean[l] += xyz[3 * atoms[k] + l] / count;
    for (int32_t k = 0; k < count; k++) {
        double d[3];
        tml_sub(d, &xyz[3 * atoms[k]], mean);
        for (int i = 0; i < 3; i++)
            for (int j = 0; j < 3; j++) m[3 * i + j] += d[i] * d[j] / count;
    }
    return LAPACKE_dsyev(LAPACK_COL_MAJOR, 'N', 'U', 3, m, 3, values) == 0 ? sqrt(fmax(values[0], 0)) : INFINITY;
}
