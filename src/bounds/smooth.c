/* smooth.c: the triangle-inequality closure of all limits (Dress & Havel 1988).
 *
 *   uppers   U <- shortest paths: a Floyd-Warshall in blocks, in the upper triangle, in place
 *   check    some given lower above its closed upper: a contradiction
 *   lowers   L[i,j] <- max over k, l of L[k,l] - U[i,k] - U[l,j]: two products through a full matrix T
 *
 * Every block of a product is written by one thread, in an order that does not depend on their number. Uppers are rounded up,
 * lowers down.
 */
#include <math.h>
#include <omp.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "bounds/bounds.h"
#include "bounds/panel.h"

/* A lower limit this far above its upper is a contradiction, Å; less is rounding. */
static const float TOLERANCE = 0.001f;

typedef struct smoother {
    float *limit;
    size_t stride, width; /* width: floats of a panel's row */
    int n, blocks, threads, strip_b;
    tml_tiles tiles;
    const tml_watch *watch;
    float *panel, *spare;  /* TML_BLOCK rows each */
    float *packed_a, *packed_b;
} smoother;

static tml_status smoother_open(smoother *s, tml_bounds *bounds, int threads, const tml_watch *watch, tml_error *error);
static void smoother_close(smoother *s);
static tml_status close_uppers(smoother *s, tml_error *error);
static bool contradicted(const smoother *s);
static tml_status raise_lowers(smoother *s, tml_error *error);

tml_status tml_bounds_smooth(tml_bounds *bounds, int threads, const tml_watch *watch, tml_error *error) {
    return tml_bounds_smooth_with(bounds, threads, TML_WIDTH_BEST, watch, error);
}

tml_status tml_bounds_smooth_with(tml_bounds *bounds, int threads, tml_width width, const tml_watch *watch, tml_error *error) {
    smoother s = {.tiles = tml_tiles_for(width)};
    tml_status status = smoother_open(&s, bounds, threads, watch, error);
    if (status == TML_OK) status = close_uppers(&s, error);
    if (status == TML_OK && contradicted(&s)) status = TML_CONTRADICTED;
    if (status == TML_OK) status = raise_lowers(&s, error);
    smoother_close(&s);
    return status;
}

static tml_status smoother_open(smoother *s, tml_bounds *bounds, int threads, const tml_watch *watch, tml_error *error) {
    s->limit = bounds->limit;
    s->stride = bounds->stride;
    s->n = bounds->n;
    s->blocks = (bounds->n + TML_BLOCK - 1) / TML_BLOCK;
    s->threads = threads > 0 ? threads : omp_get_num_procs();
    s->watch = watch;
    s->strip_b = s->tiles.columns;
    s->width = ((size_t)bounds->n + 15) / 16 * 16;
    s->panel = tml_alloc_aligned(TML_BLOCK * s->width, sizeof(float));
    s->spare = tml_alloc_aligned(TML_BLOCK * s->width, sizeof(float));
    s->packed_a = tml_alloc_aligned((size_t)s->blocks * tml_packed_size(TML_BLOCK, TML_TILE_ROWS, TML_BLOCK), sizeof(float));
    s->packed_b = tml_alloc_aligned((size_t)s->blocks * TML_BLOCK * TML_BLOCK, sizeof(float));
    return s->panel != NULL && s->spare != NULL && s->packed_a != NULL && s->packed_b != NULL ? TML_OK : tml_no_memory(error);
}

static void smoother_close(smoother *s) {
    free(s->panel);
    free(s->spare);
    free(s->packed_a);
    free(s->packed_b);
}

static bool stopped(const smoother *s) {
    return s->watch != NULL && s->watch->stop != NULL && *s->watch->stop;
}

static int block_size(const smoother *s, int block) {
    int rest = s->n - block * TML_BLOCK;
    return rest < TML_BLOCK ? rest : TML_BLOCK;
}

/* Rows of A begin at multiples of a block, which is no multiple of a strip: A's panels are packed block by block, each block
 * filled up to whole strips. */
static float *block_a(const smoother *s, int block, int depth) {
    return s->packed_a + (size_t)block * tml_packed_size(TML_BLOCK, TML_TILE_ROWS, 1) * (size_t)depth;
}

static float *block_b(const smoother *s, int block, int depth) {
    return s->packed_b + (size_t)block * TML_BLOCK * (size_t)depth;
}

/* Pack the columns of one block of two panels as the A and the B of a product. */
static void pack_block(smoother *s, const float *rows_a, const float *rows_b, int block, int depth, float filler_a, float filler_b) {
    int size = block_size(s, block), first = block * TML_BLOCK;
    tml_panel_pack(rows_a + first, s->width, depth, size, 0, size, TML_TILE_ROWS, filler_a, block_a(s, block, depth));
    tml_panel_pack(rows_b + first, s->width, depth, size, 0, size, s->strip_b, filler_b, block_b(s, block, depth));
}

/* Number `pair` of the pairs of blocks (i <= j), row by row. */
static void pair_of(const smoother *s, int pair, int *i, int *j) {
    for (*i = 0; pair >= s->blocks - *i; (*i)++) pair -= s->blocks - *i;
    *j = *i + pair;
}

/* Update block (i, j) of the upper triangle, or of the lower one (rows of j, columns of i), from the packed panels; a block on
 * the diagonal goes through a buffer, since only half of it is its own. */
static void update_pair(smoother *s, tml_tile_kind kind, int i, int j, int depth, bool lower) {
    int row_block = lower ? j : i, column_block = lower ? i : j;
    int rows = block_size(s, row_block), columns = block_size(s, column_block);
    float *corner = s->limit + (size_t)row_block * TML_BLOCK * s->stride + (size_t)column_block * TML_BLOCK;
    const float *a = block_a(s, row_block, depth), *b = block_b(s, column_block, depth);
    if (i != j) {
        tml_tile_product(&s->tiles, kind, corner, s->stride, rows, columns, a, b, depth);
        return;
    }
    float buffer[TML_BLOCK * TML_BLOCK];
    for (int r = 0; r < rows; r++) memcpy(&buffer[r * TML_BLOCK], &corner[(size_t)r * s->stride], (size_t)columns * sizeof *buffer);
    tml_tile_product(&s->tiles, kind, buffer, TML_BLOCK, rows, columns, a, b, depth);
    for (int r = 0; r < rows; r++)
        for (int c = lower ? 0 : r + 1; c < (lower ? r : columns); c++) corner[(size_t)r * s->stride + (size_t)c] = buffer[r * TML_BLOCK + c];
}

/* ---- uppers ---- */

/* Shortest paths within the pivot block, whose square starts at column `first` of the panel. */
static void close_square(float *rows, size_t width, int first, int size) {
    for (int k = 0; k < size; k++)
        for (int i = 0; i < size; i++) {
            float to_k = rows[(size_t)i * width + (size_t)(first + k)];
            float *restrict row = &rows[(size_t)i * width + (size_t)first];
            const float *restrict by = &rows[(size_t)k * width + (size_t)first];
            if (i == k) continue;
            for (int j = 0; j < size; j++) {
                float path = to_k + by[j];
                row[j] = path < row[j] ? path : row[j];
            }
        }
}

/* The pivot's rows: out through the closed square. packed_a takes the square, packed_b the rows as they were. */
static void close_rows(smoother *s, int pivot) {
    int size = block_size(s, pivot), first = pivot * TML_BLOCK;
    tml_panel_pack(s->panel + first, s->width, size, size, 0, size, TML_TILE_ROWS, 0, s->packed_a);
#pragma omp parallel num_threads(s->threads)
    {
        int mode = tml_round_up();
#pragma omp for schedule(static)
        for (int j = 0; j < s->blocks; j++) {
            int columns = block_size(s, j);
            float *corner = s->panel + (size_t)j * TML_BLOCK, *packed = block_b(s, j, size);
            tml_panel_pack(corner, s->width, size, columns, 0, columns, s->strip_b, INFINITY, packed);
            tml_tile_product(&s->tiles, TML_MIN_PLUS, corner, s->width, size, columns, s->packed_a, packed, size);
        }
        tml_round_back(mode);
    }
}

static tml_status close_uppers(smoother *s, tml_error *error) {
    int pairs = s->blocks * (s->blocks + 1) / 2;
    for (int pivot = 0; pivot < s->blocks; pivot++) {
        if (stopped(s)) return tml_fail(error, TML_INTERRUPTED, "interrupted");
        int size = block_size(s, pivot), first = pivot * TML_BLOCK;
        tml_panel_uppers(s->limit, s->stride, s->n, first, size, s->panel, s->width);
        int mode = tml_round_up();
        close_square(s->panel, s->width, first, size);
        tml_round_back(mode);
        close_rows(s, pivot);
#pragma omp parallel num_threads(s->threads)
        {
            int thread_mode = tml_round_up();
#pragma omp for schedule(static)
            for (int j = 0; j < s->blocks; j++) pack_block(s, s->panel, s->panel, j, size, INFINITY, INFINITY);
#pragma omp for schedule(dynamic, 1)
            for (int pair = 0; pair < pairs; pair++) {
                int i, j;
                pair_of(s, pair, &i, &j);
                update_pair(s, TML_MIN_PLUS, i, j, size, false);
            }
            tml_round_back(thread_mode);
        }
    }
    return TML_OK;
}

/* ---- check, lowers ---- */

static bool contradicted(const smoother *s) {
    for (int i = 0; i < s->n; i++)
        for (int j = i + 1; j < s->n; j++)
            if (s->limit[(size_t)j * s->stride + (size_t)i] > s->limit[(size_t)i * s->stride + (size_t)j] + TOLERANCE) return true;
    return false;
}

/* T[k,j] = max over l of L[k,l] - U[l,j]. */
static tml_status first_product(smoother *s, float *t, tml_error *error) {
    for (size_t i = 0; i < (size_t)s->n * s->width; i++) t[i] = -INFINITY;
    for (int block = 0; block < s->blocks; block++) {
        if (stopped(s)) return tml_fail(error, TML_INTERRUPTED, "interrupted");
        int depth = block_size(s, block), first = block * TML_BLOCK;
        tml_panel_lowers(s->limit, s->stride, s->n, first, depth, s->panel, s->width);
        tml_panel_uppers(s->limit, s->stride, s->n, first, depth, s->spare, s->width);
#pragma omp parallel num_threads(s->threads)
        {
            int mode = tml_round_down();
#pragma omp for schedule(static)
            for (int j = 0; j < s->blocks; j++) pack_block(s, s->panel, s->spare, j, depth, -INFINITY, INFINITY);
#pragma omp for schedule(static)
            for (int task = 0; task < s->blocks * s->blocks; task++) {
                int i = task / s->blocks, j = task % s->blocks;
                tml_tile_product(&s->tiles, TML_MAX_MINUS, t + (size_t)i * TML_BLOCK * s->width + (size_t)j * TML_BLOCK, s->width,
                                 block_size(s, i), block_size(s, j), block_a(s, i, depth), block_b(s, j, depth), depth);
            }
            tml_round_back(mode);
        }
    }
    return TML_OK;
}

/* L[i,j] = max over k of T[k,j] - U[i,k], in the lower triangle. */
static tml_status second_product(smoother *s, const float *t, tml_error *error) {
    int pairs = s->blocks * (s->blocks + 1) / 2;
    for (int block = 0; block < s->blocks; block++) {
        if (stopped(s)) return tml_fail(error, TML_INTERRUPTED, "interrupted");
        int depth = block_size(s, block), first = block * TML_BLOCK;
        tml_panel_uppers(s->limit, s->stride, s->n, first, depth, s->panel, s->width);
#pragma omp parallel num_threads(s->threads)
        {
            int mode = tml_round_down();
#pragma omp for schedule(static)
            for (int j = 0; j < s->blocks; j++)
                pack_block(s, s->panel, t + (size_t)first * s->width, j, depth, INFINITY, -INFINITY);
#pragma omp for schedule(dynamic, 1)
            for (int pair = 0; pair < pairs; pair++) {
                int i, j;
                pair_of(s, pair, &i, &j);
                update_pair(s, TML_MAX_REVERSE, i, j, depth, true);
            }
            tml_round_back(mode);
        }
    }
    return TML_OK;
}

static tml_status raise_lowers(smoother *s, tml_error *error) {
    float *t = tml_alloc_aligned((size_t)s->n * s->width, sizeof *t);
    if (t == NULL) return tml_no_memory(error);
    tml_status status = first_product(s, t, error);
    if (status == TML_OK) status = second_product(s, t, error);
    free(t);
    return status;
}
