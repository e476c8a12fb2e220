#include "bounds/minplus.h"

#include <fenv.h>
#include <math.h>

#if defined(__x86_64__)
#include <immintrin.h>
#endif

/* One kernel: a tile of TML_TILE_ROWS rows and two vectors, kept in registers over the whole depth. The step macro STEP(c, a, b)
 * is one of the four semirings. */
#define UNROLL _Pragma("GCC unroll 6")
#define TILE_LOOP(V, W, LOAD, STORE, SPREAD, STEP)                                                     \
    do {                                                                                               \
        V c0[TML_TILE_ROWS], c1[TML_TILE_ROWS];                                                        \
        UNROLL for (int r = 0; r < TML_TILE_ROWS; r++) {                                               \
            c0[r] = LOAD(c + (size_t)r * stride);                                                      \
            c1[r] = LOAD(c + (size_t)r * stride + W);                                                  \
        }                                                                                              \
        for (int k = 0; k < depth; k++, a += TML_TILE_ROWS, b += 2 * W) {                              \
            V b0 = LOAD(b), b1 = LOAD(b + W);                                                          \
            UNROLL for (int r = 0; r < TML_TILE_ROWS; r++) {                                           \
                V s = SPREAD(a[r]);                                                                    \
                c0[r] = STEP(c0[r], s, b0);                                                            \
                c1[r] = STEP(c1[r], s, b1);                                                            \
            }                                                                                          \
        }                                                                                              \
        UNROLL for (int r = 0; r < TML_TILE_ROWS; r++) {                                               \
            STORE(c + (size_t)r * stride, c0[r]);                                                      \
            STORE(c + (size_t)r * stride + W, c1[r]);                                                  \
        }                                                                                              \
    } while (0)

#define TILE_KERNEL(name, attribute, V, W, LOAD, STORE, SPREAD)                                   \
    attribute static void name(tml_tile_kind kind, float *c, size_t stride, const float *a, const float *b, int depth) {     \
        if (kind == TML_MIN_PLUS) {                                                                                          \
            TILE_LOOP(V, W, LOAD, STORE, SPREAD, name##_min_plus);                                                           \
        } else if (kind == TML_MAX_MINUS) {                                                                                  \
            TILE_LOOP(V, W, LOAD, STORE, SPREAD, name##_max_minus);                                                          \
        } else if (kind == TML_MAX_REVERSE) {                                                                                \
            TILE_LOOP(V, W, LOAD, STORE, SPREAD, name##_max_reverse);                                                        \
        } else {                                                                                                             \
            TILE_LOOP(V, W, LOAD, STORE, SPREAD, name##_max_apart);                                                          \
        }                                                                                                                    \
    }

/* The plain kernel: the same loops over pairs of floats. */
enum { PLAIN_COLUMNS = 8 };
typedef float plain __attribute__((vector_size(16)));
static inline plain plain_load(const float *p) {
    return (plain){p[0], p[1], p[2], p[3]};
}
static inline void plain_store(float *p, plain v) {
    for (int l = 0; l < 4; l++) p[l] = v[l];
}
#define PLAIN_SPREAD(x) ((plain){(x), (x), (x), (x)})
#define PLAIN_PICK(test, x, y) ((plain)(((test) & (__typeof__(test))(x)) | (~(test) & (__typeof__(test))(y))))
static inline plain plain_min(plain x, plain y) {
    return PLAIN_PICK(x < y, x, y);
}
static inline plain plain_max(plain x, plain y) {
    return PLAIN_PICK(x > y, x, y);
}
#define plain_tile_min_plus(c, a, b) plain_min(a + b, c)
#define plain_tile_max_minus(c, a, b) plain_max(a - b, c)
#define plain_tile_max_reverse(c, a, b) plain_max(b - a, c)
#define plain_tile_max_apart(c, a, b) plain_max(plain_max(a - b, b - a), c)
TILE_KERNEL(plain_tile, , plain, 4, plain_load, plain_store, PLAIN_SPREAD)

#if defined(__x86_64__)
#define AVX2 __attribute__((target("avx2")))
#define wide_tile_min_plus(c, a, b) _mm256_min_ps(_mm256_add_ps(a, b), c)
#define wide_tile_max_minus(c, a, b) _mm256_max_ps(_mm256_sub_ps(a, b), c)
#define wide_tile_max_reverse(c, a, b) _mm256_max_ps(_mm256_sub_ps(b, a), c)
#define wide_tile_max_apart(c, a, b) _mm256_max_ps(_mm256_max_ps(_mm256_sub_ps(a, b), _mm256_sub_ps(b, a)), c)
TILE_KERNEL(wide_tile, AVX2, __m256, 8, _mm256_loadu_ps, _mm256_storeu_ps, _mm256_set1_ps)

#define AVX512 __attribute__((target("avx512f")))
#define widest_tile_min_plus(c, a, b) _mm512_min_ps(_mm512_add_ps(a, b), c)
#define widest_tile_max_minus(c, a, b) _mm512_max_ps(_mm512_sub_ps(a, b), c)
#define widest_tile_max_reverse(c, a, b) _mm512_max_ps(_mm512_sub_ps(b, a), c)
#define widest_tile_max_apart(c, a, b) _mm512_max_ps(_mm512_max_ps(_mm512_sub_ps(a, b), _mm512_sub_ps(b, a)), c)
TILE_KERNEL(widest_tile, AVX512, __m512, 16, _mm512_loadu_ps, _mm512_storeu_ps, _mm512_set1_ps)
#endif

tml_tiles tml_tiles_for(tml_width width) {
#if defined(__x86_64__)
    __builtin_cpu_init();
    if ((width == TML_WIDTH_BEST || width == TML_WIDTH_512) && __builtin_cpu_supports("avx512f")) return (tml_tiles){32, widest_tile};
    if (width != TML_WIDTH_PLAIN && __builtin_cpu_supports("avx2")) return (tml_tiles){16, wide_tile};
#endif
    (void)width;
    return (tml_tiles){PLAIN_COLUMNS, plain_tile};
}

size_t tml_packed_size(int count, int strip, int depth) {
    return (size_t)((count + strip - 1) / strip) * (size_t)strip * (size_t)depth;
}

/* Tiles at the edge go through a buffer of full size. */
static void edge_tile(const tml_tiles *tiles, tml_tile_kind kind, float *c, size_t stride, int rows, int columns, const float *a,
                      const float *b, int depth) {
    float buffer[TML_TILE_ROWS * TML_TILE_COLUMNS_MOST] = {0};
    for (int r = 0; r < rows; r++)
        for (int l = 0; l < columns; l++) buffer[r * tiles->columns + l] = c[(size_t)r * stride + (size_t)l];
    tiles->tile(kind, buffer, (size_t)tiles->columns, a, b, depth);
    for (int r = 0; r < rows; r++)
        for (int l = 0; l < columns; l++) c[(size_t)r * stride + (size_t)l] = buffer[r * tiles->columns + l];
}

void tml_tile_product(const tml_tiles *tiles, tml_tile_kind kind, float *c, size_t stride, int rows, int columns, const float *a,
                      const float *b, int depth) {
    for (int j = 0; j < columns; j += tiles->columns) {
        int wide = columns - j < tiles->columns ? columns - j : tiles->columns;
        for (int i = 0; i < rows; i += TML_TILE_ROWS) {
            int high = rows - i < TML_TILE_ROWS ? rows - i : TML_TILE_ROWS;
            float *corner = c + (size_t)i * stride + (size_t)j;
            const float *strip_a = a + (size_t)i * (size_t)depth, *strip_b = b + (size_t)j * (size_t)depth;
            if (high == TML_TILE_ROWS && wide == tiles->columns)
                tiles->tile(kind, corner, stride, strip_a, strip_b, depth);
            else
                edge_tile(tiles, kind, corner, stride, high, wide, strip_a, strip_b, depth);
        }
    }
}

static int set_mode(int mode) {
    int old = fegetround();
    fesetround(mode);
    return old;
}

int tml_round_up(void) {
    return set_mode(FE_UPWARD);
}

int tml_round_down(void) {
    return set_mode(FE_DOWNWARD);
}

void tml_round_back(int mode) {
    fesetround(mode);
}
