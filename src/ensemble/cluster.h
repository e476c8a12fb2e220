/* cluster.h: models in groups by the distances between them.
 *
 * Average linkage (Sokal & Michener, Univ. Kansas Sci. Bull. 38 (1958) 1409) by chains of nearest neighbours (Murtagh, Computer
 * J. 26 (1983) 354); the default cut by the penalty of Kelley, Gardner & Sutcliffe, Protein Eng. 9 (1996) 1063.
 */
#ifndef TML_CLUSTER_H
#define TML_CLUSTER_H

#include "base/status.h"

/* Two clusters, each called by its lowest member, become one; height is the mean distance between their members. */
typedef struct tml_merge {
    int32_t one, other;
    float height;
} tml_merge;

/* Where the distance of two things stands in a packed triangle of n(n-1)/2: row by row, a < b. */
static inline size_t tml_pair_index(int32_t count, int32_t a, int32_t b) {
    size_t low = (size_t)(a < b ? a : b), high = (size_t)(a < b ? b : a);
    return low * (size_t)count - low * (low + 1) / 2 + high - low - 1;
}

/* All merges, by height.
 *
 * distances  packed triangle of count(count-1)/2; destroyed
 * stop       once nonzero, ends the work; may be NULL
 * merges     count - 1, filled
 * Returns TML_OK, TML_NO_MEMORY or TML_INTERRUPTED.
 */
tml_status tml_cluster_link(float *distances, int32_t count, const volatile int *stop, tml_merge *merges, tml_error *error);

/* How many of the merges to make: those up to a height; or so many that the penalty is least, which is the clusters' mean
 * spread, scaled to the range 1 … count - 1, plus the number of clusters. *out from 0 to count - 1. The second may return
 * TML_NO_MEMORY. */
int32_t tml_cluster_merges_below(const tml_merge *merges, int32_t count, double height);
tml_status tml_cluster_least_penalty(const tml_merge *merges, int32_t count, int32_t *out, tml_error *error);

/* The cluster of each after the first merges, numbered from 0, the largest first and among equals the one with the lowest
 * member. labels: count, filled. Returns TML_OK or TML_NO_MEMORY; *clusters is how many there are. */
tml_status tml_cluster_labels(const tml_merge *merges, int32_t count, int32_t made, int32_t *labels, int32_t *clusters,
                              tml_error *error);

#endif
