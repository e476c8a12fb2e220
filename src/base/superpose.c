#include "base/superpose.h"

#include <lapacke.h>
#include <math.h>

#include "base/vector.h"

static const double *point(const double *xyz, const int32_t *chosen, int32_t k) {
    return &xyz[3 * (chosen == NULL ? k : chosen[k])];
}

static void centre_of(const double *xyz, const int32_t *chosen, int32_t count, double out[3]) {
    out[0] = out[1] = out[2] = 0;
    for (int32_t k = 0; k < count; k++)
        for (int l = 0; l < 3; l++) out[l] += point(xyz, chosen, k)[l] / count;
}

/* The rotation is the unit quaternion of the largest eigenvalue of Horn's 4×4 matrix, made from the covariances S. */
static double best_quaternion(double s[3][3], double quaternion[4]) {
    double m[16] = {s[0][0] + s[1][1] + s[2][2], s[1][2] - s[2][1], s[2][0] - s[0][2], s[0][1] - s[1][0],
                    s[1][2] - s[2][1], s[0][0] - s[1][1] - s[2][2], s[0][1] + s[1][0], s[2][0] + s[0][2],
                    s[2][0] - s[0][2], s[0][1] + s[1][0], -s[0][0] + s[1][1] - s[2][2], s[1][2] + s[2][1],
                    s[0][1] - s[1][0], s[2][0] + s[0][2], s[1][2] + s[2][1], -s[0][0] - s[1][1] + s[2][2]};
    double values[4];
    quaternion[0] = 1;
    quaternion[1] = quaternion[2] = quaternion[3] = 0;
    if (LAPACKE_dsyev(LAPACK_COL_MAJOR, 'V', 'U', 4, m, 4, values) != 0) return s[0][0] + s[1][1] + s[2][2];
    for (int k = 0; k < 4; k++) quaternion[k] = m[12 + k];
    return values[3];
}

static void rotation_of(const double q[4], double r[3][3]) {
    double w = q[0], x = q[1], y = q[2], z = q[3];
    const double rows[3][3] = {{w * w + x * x - y * y - z * z, 2 * (x * y - w * z), 2 * (x * z + w * y)},
                               {2 * (x * y + w * z), w * w - x * x + y * y - z * z, 2 * (y * z - w * x)},
                               {2 * (x * z - w * y), 2 * (y * z + w * x), w * w - x * x - y * y + z * z}};
    for (int i = 0; i < 3; i++)
        for (int j = 0; j < 3; j++) r[i][j] = rows[i][j];
}

double tml_superpose(const double *moving, const double *fixed, const int32_t *chosen, int32_t count, tml_motion *motion) {
    double s[3][3] = {{0}}, square = 0, quaternion[4];
    *motion = (tml_motion){.rotation = {{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}};
    if (count < 1) return 0;
    centre_of(moving, chosen, count, motion->from);
    centre_of(fixed, chosen, count, motion->to);
    for (int32_t k = 0; k < count; k++) {
        double a[3], b[3];
        tml_sub(a, point(moving, chosen, k), motion->from);
        tml_sub(b, point(fixed, chosen, k), motion->to);
        square += tml_dot(a, a) + tml_dot(b, b);
        for (int i = 0; i < 3; i++)
            for (int j = 0; j < 3; j++) s[i][j] += a[i] * b[j];
    }
    double overlap = best_quaternion(s, quaternion);
    rotation_of(quaternion, motion->rotation);
    return sqrt(fmax(square - 2 * overlap, 0) / count);
}

void tml_motion_apply(const tml_motion *motion, double *xyz, int32_t count) {
    for (int32_t k = 0; k < count; k++) {
        double off[3];
        tml_sub(off, &xyz[3 * k], motion->from);
        for (int i = 0; i < 3; i++) xyz[3 * k + i] = tml_dot(motion->rotation[i], off) + motion->to[i];
    }
}
