/* panel.h: stretches of a symmetric matrix that is stored as one triangle of tml_bounds, copied out as full rows and packed for
 * the tile products of minplus.h.
 */
#ifndef TML_PANEL_H
#define TML_PANEL_H

#include "bounds/bounds.h"
#include "bounds/minplus.h"

/* Rows and columns of one block of the blocked algorithms. */
enum { TML_BLOCK = 128 };

/* rows[k*width + j] = upper (or lower) limit of (first + k, j), k < count, j < n; the diagonal is 0. width >= n. */
void tml_panel_uppers(const float *limit, size_t stride, int n, int first, int count, float *rows, size_t width);
void tml_panel_lowers(const float *limit, size_t stride, int n, int first, int count, float *rows, size_t width);

/* Pack columns [from, to) of `depth` rows as strips of `strip`; `from` is a multiple of strip and of a pack begun at column 0.
 * What is left of the last strip becomes `filler`. */
void tml_panel_pack(const float *rows, size_t width, int depth, int n, int from, int to, int strip, float filler, float *packed);

#endif
