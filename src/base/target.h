/* target.h: vectors of four doubles, and functions compiled for more than the baseline processor.
 *
 * A function marked TML_WIDE is compiled for AVX2 and the baseline; the loader takes the wider one where the processor has it. Sums
 * keep their written order (no contraction, no reassociation), so all of them give the same bits. gcc only: clang 14 names such
 * clones so that other files cannot call them.
 */
#ifndef TML_TARGET_H
#define TML_TARGET_H

#include <math.h>

#if defined(__x86_64__) && !defined(__clang__) && !defined(TML_ONE_TARGET)
#define TML_WIDE __attribute__((target_clones("avx2", "default")))
#else
#define TML_WIDE
#endif

/* x, y, z and an unused fourth that stays 0; or four pairs' worth of one quantity. */
typedef double tml_v4 __attribute__((vector_size(32)));

/* The functions below are macros or always inlined: vectors never pass a function boundary, whose convention depends on the
 * target. */
#define TML_V4(value) ((tml_v4){(value), (value), (value), (value)})

/* *out: the sums of x, y, z of a·a for four vectors, by transposition. */
#define TML_V4_NORMS(out, a, b, c, d)                                                                                          \
    do {                                                                                                                       \
        tml_v4 a2_ = (a) * (a), b2_ = (b) * (b), c2_ = (c) * (c), d2_ = (d) * (d);                                             \
        tml_v4 ab_lo_ = __builtin_shufflevector(a2_, b2_, 0, 4, 2, 6), ab_hi_ = __builtin_shufflevector(a2_, b2_, 1, 5, 3, 7); \
        tml_v4 cd_lo_ = __builtin_shufflevector(c2_, d2_, 0, 4, 2, 6), cd_hi_ = __builtin_shufflevector(c2_, d2_, 1, 5, 3, 7); \
        tml_v4 x_ = __builtin_shufflevector(ab_lo_, cd_lo_, 0, 1, 4, 5);                                                       \
        tml_v4 y_ = __builtin_shufflevector(ab_hi_, cd_hi_, 0, 1, 4, 5);                                                       \
        tml_v4 z_ = __builtin_shufflevector(ab_lo_, cd_lo_, 2, 3, 6, 7);                                                       \
        (out) = x_ + y_ + z_;                                                                                                  \
    } while (0)

#endif
