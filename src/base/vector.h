/* vector.h: the few operations on points in three dimensions that several rooms share. Points are double[3]. */
#ifndef TML_VECTOR_H
#define TML_VECTOR_H

#include <math.h>

#define TML_PI 3.14159265358979323846

static inline void tml_sub(double out[3], const double a[3], const double b[3]) {
    for (int k = 0; k < 3; k++) out[k] = a[k] - b[k];
}

static inline double tml_dot(const double a[3], const double b[3]) {
    return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

static inline void tml_cross(double out[3], const double a[3], const double b[3]) {
    double x = a[1] * b[2] - a[2] * b[1], y = a[2] * b[0] - a[0] * b[2], z = a[0] * b[1] - a[1] * b[0];
    out[0] = x;
    out[1] = y;
    out[2] = z;
}

static inline double tml_distance(const double a[3], const double b[3]) {
    double d[3];
    tml_sub(d, a, b);
    return sqrt(tml_dot(d, d));
}

/* Angle a-b-c in radians, 0 … pi. */
static inline double tml_angle_of(const double a[3], const double b[3], const double c[3]) {
    double u[3], v[3], w[3];
    tml_sub(u, a, b);
    tml_sub(v, c, b);
    tml_cross(w, u, v);
    return atan2(sqrt(tml_dot(w, w)), tml_dot(u, v));
}

/* Dihedral a-b-c-d in radians, -pi … pi, by the IUPAC sign (positive: clockwise looking from b to c). */
static inline double tml_dihedral_of(const double a[3], const double b[3], const double c[3], const double d[3]) {
    double b0[3], b1[3], b2[3], n1[3], n2[3], t[3];
    tml_sub(b0, b, a);
    tml_sub(b1, c, b);
    tml_sub(b2, d, c);
    tml_cross(n1, b0, b1);
    tml_cross(n2, b1, b2);
    tml_cross(t, n1, n2);
    double length = sqrt(tml_dot(b1, b1));
    return atan2(length > 0 ? tml_dot(t, b1) / length : 0.0, tml_dot(n1, n2));
}

/* Signed volume (a1-c)·((a2-c)×(a3-c)), Å³. */
static inline double tml_volume_of(const double c[3], const double a1[3], const double a2[3], const double a3[3]) {
    double u[3], v[3], w[3], n[3];
    tml_sub(u, a1, c);
    tml_sub(v, a2, c);
    tml_sub(w, a3, c);
    tml_cross(n, v, w);
    return tml_dot(u, n);
}

#endif
