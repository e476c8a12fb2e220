/* minplus.h: tile products in which (+, ×) is replaced by (min, +) and its relatives: the inner work of smoothing and
 * metrization, at the width of the processor's vectors.
 *
 * Operands are packed: A in strips of TML_TILE_ROWS rows, B in strips of tml_tile_columns() columns, both depth first; strips
 * are filled up with values that change nothing. Rounding follows the thread's mode: tml_round_up and tml_round_down set it.
 */
#ifndef TML_MINPLUS_H
#define TML_MINPLUS_H

#include <stddef.h>

enum { TML_TILE_ROWS = 6, TML_TILE_COLUMNS_MOST = 32 };

typedef enum tml_tile_kind {
    TML_MIN_PLUS,    /* c = min(c, a + b) */
    TML_MAX_MINUS,   /* c = max(c, a - b) */
    TML_MAX_REVERSE, /* c = max(c, b - a) */
    TML_MAX_APART    /* c = max(c, |a - b|) */
} tml_tile_kind;

/* Widths of vectors that this program can use; TML_WIDTH_BEST is the widest of this processor. */
typedef enum tml_width { TML_WIDTH_BEST, TML_WIDTH_PLAIN, TML_WIDTH_256, TML_WIDTH_512 } tml_width;

typedef struct tml_tiles {
    int columns; /* of one strip of B */
    void (*tile)(tml_tile_kind kind, float *c, size_t stride, const float *a, const float *b, int depth);
} tml_tiles;

/* Kernels of one width; of the next narrower one where the processor lacks it. */
tml_tiles tml_tiles_for(tml_width width);

/* C (rows × columns, `stride` floats from row to row) with packed A and B of `depth`. */
void tml_tile_product(const tml_tiles *tiles, tml_tile_kind kind, float *c, size_t stride, int rows, int columns, const float *a,
                      const float *b, int depth);

/* Floats that a packed operand of `count` rows or columns takes. */
size_t tml_packed_size(int count, int strip, int depth);

/* The thread's rounding mode of float and double arithmetic; returns the old one, for tml_round_back. */
int tml_round_up(void);
int tml_round_down(void);
void tml_round_back(int mode);

#endif
