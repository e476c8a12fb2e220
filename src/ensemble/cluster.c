#include "ensemble/cluster.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"

/* Contents: linking - where to cut - labels */

/* ---- linking ---- */

/* size: members of each cluster that is still there, under one of its members; 0 for those that went into another. */
typedef struct linker {
    float *distances;
    int32_t count;
    int32_t *size, *chain;
    int32_t chain_length;
} linker;

static int32_t nearest_of(const linker *l, int32_t of, int32_t before, float *distance);
static void join(linker *l, int32_t into, int32_t from);
static void put_in_order(tml_merge *merges, int32_t count, int32_t *root);

tml_status tml_cluster_link(float *distances, int32_t count, const volatile int *stop, tml_merge *merges, tml_error *error) {
    linker l = {.distances = distances, .count = count};
    l.size = tml_alloc((size_t)count, sizeof *l.size);
    l.chain = tml_alloc((size_t)count, sizeof *l.chain);
    bool room = l.size != NULL && l.chain != NULL;
    for (int32_t i = 0; room && i < count; i++) l.size[i] = 1;
    int32_t first = 0;
    bool stopped = false;
    for (int32_t made = 0; room && made < count - 1;) {
        stopped = stop != NULL && *stop != 0;
        if (stopped) break;
        if (l.chain_length == 0) {
            while (l.size[first] == 0) first++;
            l.chain[l.chain_length++] = first;
        }
        int32_t tip = l.chain[l.chain_length - 1], before = l.chain_length > 1 ? l.chain[l.chain_length - 2] : -1;
        float distance;
        int32_t nearest = nearest_of(&l, tip, before, &distance);
        if (nearest != before) {
            l.chain[l.chain_length++] = nearest;
            continue;
        }
        merges[made++] = (tml_merge){tip, nearest, distance}; /* each is the other's nearest */
        join(&l, nearest, tip);
        l.chain_length -= 2;
    }
    if (room && !stopped) put_in_order(merges, count, l.chain);
    free(l.size);
    free(l.chain);
    if (stopped) return tml_fail(error, TML_INTERRUPTED, "interrupted");
    return room ? TML_OK : tml_no_memory(error);
}

/* Among equals the one before in the chain, so that chains end; then the lowest. */
static int32_t nearest_of(const linker *l, int32_t of, int32_t before, float *distance) {
    int32_t nearest = before;
    *distance = before < 0 ? INFINITY : l->distances[tml_pair_index(l->count, of, before)];
    for (int32_t i = 0; i < l->count; i++) {
        if (i == of || l->size[i] == 0) continue;
        float at = l->distances[tml_pair_index(l->count, of, i)];
        if (nearest >= 0 && !(at < *distance)) continue;
        *distance = at;
        nearest = i;
    }
    return nearest;
}

static void join(linker *l, int32_t into, int32_t from) {
    double one = l->size[into], other = l->size[from];
    l->size[into] += l->size[from];
    l->size[from] = 0;
    for (int32_t i = 0; i < l->count; i++) {
        if (i == into || l->size[i] == 0) continue;
        float *kept = &l->distances[tml_pair_index(l->count, into, i)];
        *kept = (float)((one * *kept + other * l->distances[tml_pair_index(l->count, from, i)]) / (one + other));
    }
}

static int compare_merges(const void *left, const void *right) {
    const tml_merge *a = left, *b = right;
    if (a->height != b->height) return a->height < b->height ? -1 : 1;
    int32_t low_a = a->one < a->other ? a->one : a->other, low_b = b->one < b->other ? b->one : b->other;
    return (low_a > low_b) - (low_a < low_b);
}

static int32_t root_of(int32_t *root, int32_t i) {
    while (root[i] != i) {
        root[i] = root[root[i]];
        i = root[i];
    }
    return i;
}

static void unite(int32_t *root, const tml_merge *merge) {
    int32_t low = merge->one < merge->other ? merge->one : merge->other,
            high = merge->one < merge->other ? merge->other : merge->one;
    root[high] = low;
}

/* By height; clusters are then called by their lowest member. */
static void put_in_order(tml_merge *merges, int32_t count, int32_t *root) {
    if (count < 2) return;
    qsort(merges, (size_t)count - 1, sizeof *merges, compare_merges);
    for (int32_t i = 0; i < count; i++) root[i] = i;
    for (int32_t k = 0; k < count - 1; k++) {
        merges[k].one = root_of(root, merges[k].one);
        merges[k].other = root_of(root, merges[k].other);
        unite(root, &merges[k]);
    }
}

/* ---- where to cut ---- */

int32_t tml_cluster_merges_below(const tml_merge *merges, int32_t count, double height) {
    int32_t made = 0;
    while (made < count - 1 && merges[made].height <= height) made++;
    return made;
}

/* A cluster's pairs: their summed distance. The heights are means between clusters, so sums follow from them. */
typedef struct inner {
    int32_t size;
    double sum;
} inner;

static double spread_of(const inner *cluster) {
    double pairs = 0.5 * cluster->size * (cluster->size - 1.0);
    return cluster->size < 2 ? 0 : cluster->sum / pairs;
}

/* The mean over clusters of two members or more of the mean distance in them, after each merge. */
static void spreads_by_merge(const tml_merge *merges, int32_t count, inner *clusters, double *spreads) {
    double total = 0;
    int32_t several = 0;
    for (int32_t i = 0; i < count; i++) clusters[i] = (inner){1, 0};
    for (int32_t k = 0; k < count - 1; k++) {
        inner *one = &clusters[merges[k].one], *other = &clusters[merges[k].other];
        inner joined = {one->size + other->size, one->sum + other->sum + (double)one->size * other->size * merges[k].height};
        total += spread_of(&joined) - spread_of(one) - spread_of(other);
        several += 1 - (one->size > 1) - (other->size > 1);
        *(merges[k].one < merges[k].other ? one : other) = joined;
        spreads[k] = total / several;
    }
}

tml_status tml_cluster_least_penalty(const tml_merge *merges, int32_t count, int32_t *out, tml_error *error) {
    static const double NOISE = 1e-6;
    inner *clusters = tml_alloc((size_t)count, sizeof *clusters);
    double *spreads = tml_alloc((size_t)count, sizeof *spreads), least = INFINITY, greatest = -INFINITY, best = INFINITY;
    bool room = clusters != NULL && spreads != NULL;
    *out = 0;
    if (room) spreads_by_merge(merges, count, clusters, spreads);
    for (int32_t k = 0; room && k < count - 1; k++) {
        least = fmin(least, spreads[k]);
        greatest = fmax(greatest, spreads[k]);
    }
    for (int32_t k = 0; room && k < count - 1; k++) {
        double scaled = greatest > least ? (count - 2) / (greatest - least) * (spreads[k] - least) + 1 : 1;
        double penalty = scaled + (count - k - 1);
        if (penalty > best + NOISE) continue; /* among equals, which the first and the last often are, the fewer clusters */
        best = fmin(best, penalty);
        *out = k + 1;
    }
    free(clusters);
    free(spreads);
    return room ? TML_OK : tml_no_memory(error);
}

/* ---- labels ---- */

typedef struct cluster_size {
    int32_t root, size;
} cluster_size;

static int compare_sizes(const void *left, const void *right) {
    const cluster_size *a = left, *b = right;
    if (a->size != b->size) return a->size > b->size ? -1 : 1;
    return (a->root > b->root) - (a->root < b->root);
}

tml_status tml_cluster_labels(const tml_merge *merges, int32_t count, int32_t made, int32_t *labels, int32_t *clusters,
                              tml_error *error) {
    int32_t *root = tml_alloc((size_t)count, sizeof *root), *number = tml_alloc((size_t)count, sizeof *number);
    cluster_size *sizes = tml_alloc((size_t)count, sizeof *sizes);
    bool room = root != NULL && number != NULL && sizes != NULL;
    *clusters = 0;
    if (room) {
        for (int32_t i = 0; i < count; i++) {
            root[i] = i;
            sizes[i] = (cluster_size){i, 0};
        }
        for (int32_t k = 0; k < made; k++) unite(root, &merges[k]);
        for (int32_t i = 0; i < count; i++) sizes[root_of(root, i)].size++;
        qsort(sizes, (size_t)count, sizeof *sizes, compare_sizes);
        for (int32_t i = 0; i < count && sizes[i].size > 0; i++) number[sizes[i].root] = (*clusters)++;
        for (int32_t i = 0; i < count; i++) labels[i] = number[root_of(root, i)];
    }
    free(root);
    free(number);
    free(sizes);
    return room ? TML_OK : tml_no_memory(error);
}
