/* superpose.h: the rotation and shift that bring one set of points onto another with the least r.m.s. distance.
 *
 * Never a reflection. Source: Kabsch, Acta Cryst. A32 (1976) 922; the quaternion form of Horn, J. Opt. Soc. Am. A 4 (1987) 629.
 */
#ifndef TML_SUPERPOSE_H
#define TML_SUPERPOSE_H

#include <stdint.h>

typedef struct tml_motion { double rotation[3][3], from[3], to[3]; } tml_motion; /* x -> rotation·(x - from) + to */

/* Fit `moving` onto `fixed` over the `count` points whose indices are in `chosen` (NULL: the first count); Å, points of 3
 * doubles. Returns the r.m.s. distance after the fit. */
double tml_superpose(const double *moving, const double *fixed, const int32_t *chosen, int32_t count, tml_motion *motion);

void tml_motion_apply(const tml_motion *motion, double *xyz, int32_t count);

#endif
