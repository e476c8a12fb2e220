/* embed.h: coordinates from a full set of distances.
 *
 * Sources: Crippen & Havel, Acta Cryst. A34 (1978) 282; Havel, Kuntz & Crippen, Bull. Math. Biol. 45 (1983) 665;
 * majorization: de Leeuw (1977), Guttman, Psychometrika 33 (1968) 469.
 */
#ifndef TML_EMBED_H
#define TML_EMBED_H

#include "base/status.h"

/* The algebraically largest eigenpairs of the metric matrix of `distance` (symmetric, n rows of `stride` floats, Å; kept).
 *
 * count    1 … 8 pairs
 * values   count eigenvalues, largest first, Å²
 * vectors  count columns of n doubles, unit length, column-major
 * residual ≤ 1e-6 of the largest eigenvalue. Returns TML_OK or TML_NO_MEMORY.
 */
tml_status tml_metric_eigenpairs(const float *distance, int32_t n, size_t stride, int count, double *values, double *vectors,
                                 tml_error *error);

/* Coordinates √λ·v in `dimensions` (3 or 4) dimensions, n*dimensions doubles; directions with λ ≤ 0 come out as 0.
 * values holds dimensions+1 eigenvalues or is NULL. */
tml_status tml_embed(const float *distance, int32_t n, size_t stride, int dimensions, double *coordinates, double *values,
                     tml_error *error);

/* `steps` Guttman transforms with unit weights, bringing the coordinates' distances near the drawn ones. */
tml_status tml_majorize(const float *distance, int32_t n, size_t stride, int dimensions, int steps, double *coordinates,
                        tml_error *error);

#endif
