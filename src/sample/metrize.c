/* metrize.c: metrization in blocks.
 *
 * Atoms are put into random order first; then roots are rows 0, 1, 2 … of the matrix, and what is still to be drawn is always its
 * trailing part, uppers above the diagonal and lowers below.
 *
 * A block of rows goes through the columns group by group, the block's own square first. Within a group the rows are drawn one
 * after another: a row is narrowed by the block's earlier rows, and each distance drawn narrows the rest of its row in the group.
 * The group's distances then narrow the rows' later columns as one product. This is complete: a path that leaves the row through
 * an earlier root comes back no shorter than through the distance between the two roots, which is drawn first.
 * When the block is done, its rows narrow everything behind it, as one product for the uppers and one for the lowers.
 */
#include "sample/metrize.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "base/target.h"
#include "bounds/panel.h"

typedef struct metrizer {
    float *work;
    size_t stride, width;
    int n;
    tml_pcg *pcg;
    tml_tiles tiles;
    float *upper, *lower;      /* TML_BLOCK rows of n: the block's current limits; drawn distances end in `upper` */
    float *turned;             /* drawn distances of one group, or lowers of one group, the other way round */
    float *packed_a, *packed_b;
} metrizer;

static bool metrizer_open(metrizer *m);
static void metrizer_close(metrizer *m);
static void shuffle(metrizer *m, const tml_bounds *bounds, int32_t *order);
static void draw_block(metrizer *m, int first, int count);
static void narrow_rest(metrizer *m, int first, int count);
static void draw_plainly(metrizer *m, int first);

tml_status tml_metrize(const tml_bounds *bounds, int32_t roots, tml_pcg *pcg, float *work, int32_t *order, tml_error *error) {
    metrizer m = {.work = work, .stride = bounds->stride, .width = bounds->stride, .n = bounds->n, .pcg = pcg,
                  .tiles = tml_tiles_for(TML_WIDTH_BEST)};
    bool room = metrizer_open(&m);
    if (room) {
        if (roots > m.n) roots = m.n;
        shuffle(&m, bounds, order);
        for (int first = 0; first < roots; first += TML_BLOCK) {
            int count = roots - first < TML_BLOCK ? roots - first : TML_BLOCK;
            draw_block(&m, first, count);
            narrow_rest(&m, first, count);
        }
        draw_plainly(&m, roots);
    }
    metrizer_close(&m);
    return room ? TML_OK : tml_no_memory(error);
}

static bool metrizer_open(metrizer *m) {
    size_t packed = ((size_t)m->n / TML_BLOCK + 1) * tml_packed_size(TML_BLOCK, TML_TILE_ROWS, TML_BLOCK);
    m->upper = tml_alloc_aligned(TML_BLOCK * m->width, sizeof(float));
    m->lower = tml_alloc_aligned(TML_BLOCK * m->width, sizeof(float));
    m->turned = tml_alloc_aligned(TML_BLOCK * m->width, sizeof(float));
    m->packed_a = tml_alloc_aligned(packed, sizeof(float));
    m->packed_b = tml_alloc_aligned(packed, sizeof(float));
    return m->upper != NULL && m->lower != NULL && m->turned != NULL && m->packed_a != NULL && m->packed_b != NULL;
}

static void metrizer_close(metrizer *m) {
    free(m->upper);
    free(m->lower);
    free(m->turned);
    free(m->packed_a);
    free(m->packed_b);
}

/* Random order (Fisher & Yates), and the limits copied into it. */
static void shuffle(metrizer *m, const tml_bounds *bounds, int32_t *order) {
    for (int i = 0; i < m->n; i++) order[i] = i;
    for (int i = m->n - 1; i > 0; i--) {
        int j = (int)tml_pcg_below(m->pcg, (uint32_t)i + 1);
        int32_t swap = order[i];
        order[i] = order[j];
        order[j] = swap;
    }
    for (int i = 0; i < m->n; i++) {
        float *row = &m->work[(size_t)i * m->stride];
        for (int j = 0; j < i; j++) row[j] = tml_bounds_lower(bounds, order[i], order[j]);
        row[i] = 0;
        for (int j = i + 1; j < m->n; j++) row[j] = tml_bounds_upper(bounds, order[i], order[j]);
    }
}

/* A distance between two limits, which rounding may have crossed. */
static float draw(tml_pcg *pcg, float lower, float upper) {
    if (lower >= upper) return 0.5f * (lower + upper);
    return lower + (upper - lower) * (float)tml_pcg_uniform(pcg);
}

/* out[k*width + j] = rows[j*stride + k], j < count_j, k < count_k. */
static void turn(const float *rows, size_t stride, int count_j, int count_k, float *out, size_t width) {
    enum { TILE = 16 };
    for (int j0 = 0; j0 < count_j; j0 += TILE)
        for (int k0 = 0; k0 < count_k; k0 += TILE)
            for (int k = k0; k < k0 + TILE && k < count_k; k++)
                for (int j = j0; j < j0 + TILE && j < count_j; j++) out[(size_t)k * width + (size_t)j] = rows[(size_t)j * stride + (size_t)k];
}

/* ---- one block of rows ---- */

/* Narrow u and l by an earlier row: `apart` from it, and its distances `by`. */
TML_WIDE static void narrow_by_row(float *restrict u, float *restrict l, const float *restrict by, float apart, int count) {
    for (int j = 0; j < count; j++) {
        float far = apart + by[j], near = fabsf(apart - by[j]);
        u[j] = far < u[j] ? far : u[j];
        l[j] = near > l[j] ? near : l[j];
    }
}

/* Narrow the rest of a row by one distance d just drawn; upper and lower are the limits between its atom and the rest. */
TML_WIDE static void narrow_by_atom(float *restrict u, float *restrict l, const float *restrict upper, const float *restrict lower,
                                    float d, int count) {
    for (int j = 0; j < count; j++) {
        float far = d + upper[j], near = d - upper[j], other = lower[j] - d;
        near = other > near ? other : near;
        u[j] = far < u[j] ? far : u[j];
        l[j] = near > l[j] ? near : l[j];
    }
}

/* Draw the distances of the block's rows to the atoms of one group [from, to); the rows' limits stand in m->upper and m->lower,
 * the group's mutual limits are turned into `square`. */
static void draw_group(metrizer *m, int first, int count, int from, int to) {
    float square[TML_BLOCK * TML_BLOCK];
    turn(&m->work[(size_t)from * m->stride + (size_t)from], m->stride, to - from, to - from, square, TML_BLOCK);
    for (int t = 0; t < count; t++) {
        int begin = from > first + t ? from : first + t + 1; /* in the block's own square only what lies behind the diagonal */
        float *u = &m->upper[(size_t)t * m->width], *l = &m->lower[(size_t)t * m->width];
        for (int s = 0; s < t && begin < to; s++) {
            const float *by = &m->upper[(size_t)s * m->width];
            narrow_by_row(u + begin, l + begin, by + begin, by[first + t], to - begin);
        }
        for (int j = begin; j < to; j++) {
            float d = draw(m->pcg, l[j], u[j]);
            u[j] = l[j] = d;
            /* Uppers of the group stand in the matrix's own rows, its lowers, turned, in the square's. */
            narrow_by_atom(u + j + 1, l + j + 1, &m->work[(size_t)j * m->stride + (size_t)j + 1],
                           &square[(size_t)(j - from) * TML_BLOCK + (size_t)(j - from) + 1], d, to - j - 1);
        }
    }
}

/* The group's drawn distances narrow the rows' columns from `to` on. */
static void narrow_later(metrizer *m, int count, int from, int to) {
    int depth = to - from, later = m->n - to;
    if (later <= 0) return;
    turn(&m->upper[from], m->width, count, depth, m->turned, TML_BLOCK);
    tml_panel_pack(m->turned, TML_BLOCK, depth, count, 0, count, TML_TILE_ROWS, 0, m->packed_a);
    tml_panel_pack(&m->work[(size_t)from * m->stride + (size_t)to], m->stride, depth, later, 0, later, m->tiles.columns, 0, m->packed_b);
    tml_tile_product(&m->tiles, TML_MIN_PLUS, m->upper + to, m->width, count, later, m->packed_a, m->packed_b, depth);
    tml_tile_product(&m->tiles, TML_MAX_MINUS, m->lower + to, m->width, count, later, m->packed_a, m->packed_b, depth);
    turn(&m->work[(size_t)to * m->stride + (size_t)from], m->stride, later, depth, m->turned, m->width);
    tml_panel_pack(m->turned, m->width, depth, later, 0, later, m->tiles.columns, 0, m->packed_b);
    tml_tile_product(&m->tiles, TML_MAX_REVERSE, m->lower + to, m->width, count, later, m->packed_a, m->packed_b, depth);
}

/* The distances between the block's own roots, both ways round. */
static void mirror_square(metrizer *m, int first, int count) {
    for (int t = 0; t < count; t++) {
        float *row = &m->upper[(size_t)t * m->width + (size_t)first];
        for (int s = 0; s < t; s++) row[s] = m->upper[(size_t)s * m->width + (size_t)(first + t)];
        row[t] = 0;
    }
}

static void draw_block(metrizer *m, int first, int count) {
    for (int t = 0; t < count; t++)
        memcpy(&m->upper[(size_t)t * m->width + (size_t)first], &m->work[(size_t)(first + t) * m->stride + (size_t)first],
               (size_t)(m->n - first) * sizeof(float));
    turn(&m->work[(size_t)first * m->stride + (size_t)first], m->stride, m->n - first, count, m->lower + first, m->width);
    for (int from = first; from < m->n; from += TML_BLOCK) {
        int to = m->n - from < TML_BLOCK ? m->n : from + TML_BLOCK;
        draw_group(m, first, count, from, to);
        if (from == first) mirror_square(m, first, count);
        narrow_later(m, count, from, to);
    }
    for (int t = 0; t < count; t++)
        for (int j = first + t + 1; j < m->n; j++) {
            float d = m->upper[(size_t)t * m->width + (size_t)j];
            m->work[(size_t)(first + t) * m->stride + (size_t)j] = d;
            m->work[(size_t)j * m->stride + (size_t)(first + t)] = d;
        }
}

/* ---- the rest of the matrix ---- */

/* U[a,b] <- min(U[a,b], d[i,a] + d[i,b]), L[a,b] <- max(L[a,b], |d[i,a] - d[i,b]|) over the block's rows i. */
static void narrow_rest(metrizer *m, int first, int count) {
    int begin = first + count, rest = m->n - begin;
    const size_t size_a = tml_packed_size(TML_BLOCK, TML_TILE_ROWS, count), size_b = (size_t)TML_BLOCK * (size_t)count;
    int blocks = (rest + TML_BLOCK - 1) / TML_BLOCK;
    float buffer[TML_BLOCK * TML_BLOCK];
    for (int i = 0; i < blocks; i++) {
        int from = i * TML_BLOCK, size = rest - from < TML_BLOCK ? rest - from : TML_BLOCK;
        const float *rows = m->upper + begin + from;
        tml_panel_pack(rows, m->width, count, size, 0, size, TML_TILE_ROWS, 0, m->packed_a + (size_t)i * size_a);
        tml_panel_pack(rows, m->width, count, size, 0, size, m->tiles.columns, 0, m->packed_b + (size_t)i * size_b);
    }
    for (int i = 0; i < blocks; i++)
        for (int j = 0; j < blocks; j++) {
            int rows = rest - i * TML_BLOCK < TML_BLOCK ? rest - i * TML_BLOCK : TML_BLOCK;
            int columns = rest - j * TML_BLOCK < TML_BLOCK ? rest - j * TML_BLOCK : TML_BLOCK;
            float *corner = &m->work[(size_t)(begin + i * TML_BLOCK) * m->stride + (size_t)(begin + j * TML_BLOCK)];
            const float *a = m->packed_a + (size_t)i * size_a, *b = m->packed_b + (size_t)j * size_b;
            if (i != j) {
                tml_tile_product(&m->tiles, i < j ? TML_MIN_PLUS : TML_MAX_APART, corner, m->stride, rows, columns, a, b, count);
                continue;
            }
            for (int pass = 0; pass < 2; pass++) { /* a diagonal block holds uppers and lowers */
                for (int r = 0; r < rows; r++) memcpy(&buffer[r * TML_BLOCK], &corner[(size_t)r * m->stride], (size_t)columns * sizeof *buffer);
                tml_tile_product(&m->tiles, pass == 0 ? TML_MIN_PLUS : TML_MAX_APART, buffer, TML_BLOCK, rows, columns, a, b, count);
                for (int r = 0; r < rows; r++)
                    for (int c = pass == 0 ? r + 1 : 0; c < (pass == 0 ? columns : r); c++)
                        corner[(size_t)r * m->stride + (size_t)c] = buffer[r * TML_BLOCK + c];
            }
        }
}

/* After the last root: every other distance by itself. */
static void draw_plainly(metrizer *m, int first) {
    for (int i = first; i < m->n; i++)
        for (int j = i + 1; j < m->n; j++) {
            float *upper = &m->work[(size_t)i * m->stride + (size_t)j], *lower = &m->work[(size_t)j * m->stride + (size_t)i];
            *upper = *lower = draw(m->pcg, *lower, *upper);
        }
}
