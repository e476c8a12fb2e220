/* best_plane.h: how far points lie from a plane. */
#ifndef TML_BEST_PLANE_H
#define TML_BEST_PLANE_H

#include <stdint.h>

/* R.m.s. distance of some atoms (x, y, z of atom i at xyz[3 * i]) from their best plane; INFINITY where it cannot be found. */
double tml_off_plane(const int32_t *atoms, int32_t count, const double *xyz);

#endif
