#include "refine/minimise.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"

enum { MEMORY = 8, LINE_STEPS = 12 };

/* Skin of the neighbour list while minimising, Å: atoms hardly move. */
static const double SKIN = 0.6;
/* No atom moves farther than this in one step, Å. */
static const double LONGEST = 0.25;
/* Sufficient decrease, Armijo's constant. */
static const double ENOUGH = 1e-4;

typedef struct history { tml_v4 *s[MEMORY], *y[MEMORY]; double rho[MEMORY]; int count, next; } history;

TML_WIDE static double dot(const tml_v4 *a, const tml_v4 *b, int32_t n) {
    tml_v4 total = TML_V4(0);
    for (int32_t i = 0; i < n; i++) total += a[i] * b[i];
    return total[0] + total[1] + total[2];
}

/* The two-loop recursion: direction = H·f, with f the forces (downhill). */
TML_WIDE static void direction_of(history *past, const tml_v4 *f, int32_t n, tml_v4 *direction) {
    double alpha[MEMORY];
    memcpy(direction, f, (size_t)n * sizeof *f);
    for (int k = 0; k < past->count; k++) {
        int at = (past->next - 1 - k + MEMORY) % MEMORY;
        alpha[at] = past->rho[at] * dot(past->s[at], direction, n);
        for (int32_t i = 0; i < n; i++) direction[i] -= alpha[at] * past->y[at][i];
    }
    if (past->count > 0) {
        int last = (past->next - 1 + MEMORY) % MEMORY;
        double scale = 1.0 / (past->rho[last] * dot(past->y[last], past->y[last], n));
        for (int32_t i = 0; i < n; i++) direction[i] *= scale;
    }
    for (int k = past->count - 1; k >= 0; k--) {
        int at = (past->next - 1 - k + MEMORY) % MEMORY;
        double beta = past->rho[at] * dot(past->y[at], direction, n);
        for (int32_t i = 0; i < n; i++) direction[i] += (alpha[at] - beta) * past->s[at][i];
    }
}

TML_WIDE static double longest_of(const tml_v4 *direction, int32_t n) {
    double most = 0;
    for (int32_t i = 0; i < n; i++) {
        tml_v4 square = direction[i] * direction[i];
        most = fmax(most, square[0] + square[1] + square[2]);
    }
    return sqrt(most);
}

/* Keep the last step's s and y, unless curvature is not positive. */
TML_WIDE static void remember(history *past, const tml_v4 *x, const tml_v4 *old_x, const tml_v4 *f, const tml_v4 *old_f, int32_t n) {
    tml_v4 *s = past->s[past->next], *y = past->y[past->next];
    for (int32_t i = 0; i < n; i++) {
        s[i] = x[i] - old_x[i];
        y[i] = old_f[i] - f[i];
    }
    double curvature = dot(s, y, n);
    if (curvature <= 1e-10 * dot(y, y, n)) return;
    past->rho[past->next] = 1.0 / curvature;
    past->next = (past->next + 1) % MEMORY;
    if (past->count < MEMORY) past->count++;
}

tml_status tml_minimise(tml_scene *scene, const tml_weights *weights, int steps, double force, const volatile int *stop,
                        double *energy) {
    int32_t n = scene->refiner->atom_count;
    size_t size = (size_t)n;
    tml_v4 *space = tml_alloc_aligned(size * (2 * MEMORY + 3), sizeof *space);
    if (space == NULL) return TML_NO_MEMORY;
    history past = {0};
    for (int k = 0; k < MEMORY; k++) {
        past.s[k] = space + size * (size_t)(2 * k);
        past.y[k] = space + size * (size_t)(2 * k + 1);
    }
    tml_v4 *direction = space + size * 2 * MEMORY, *old_x = direction + size, *old_f = old_x + size;

    tml_status status = tml_scene_list(scene, SKIN);
    double here = status == TML_OK ? tml_energy(scene, weights) : 0;
    for (int step = 0; status == TML_OK && step < steps; step++) {
        if (stop != NULL && *stop) status = TML_INTERRUPTED;
        if (dot(scene->f, scene->f, n) <= force * force * n) break;
        direction_of(&past, scene->f, n, direction);
        double slope = dot(direction, scene->f, n), longest = longest_of(direction, n);
        if (!(slope > 0) || !isfinite(longest)) { /* not downhill: start the memory anew along the force */
            past.count = 0;
            memcpy(direction, scene->f, size * sizeof *direction);
            slope = dot(direction, direction, n);
            longest = longest_of(direction, n);
        }
        double length = past.count == 0 ? fmin(1.0, 0.02 / longest) : 1.0;
        if (length * longest > LONGEST) length = LONGEST / longest;
        memcpy(old_x, scene->x, size * sizeof *old_x);
        memcpy(old_f, scene->f, size * sizeof *old_f);
        double there = INFINITY;
        int tries = 0;
        for (; tries < LINE_STEPS && status == TML_OK; tries++, length *= 0.4) {
            for (int32_t i = 0; i < n; i++) scene->x[i] = old_x[i] + length * direction[i];
            status = tml_scene_relist(scene, SKIN);
            if (status != TML_OK) break;
            there = tml_energy(scene, weights);
            if (there <= here - ENOUGH * length * slope) break;
        }
        if (status != TML_OK) break;
        if (tries == LINE_STEPS) { /* no descent along this direction: back, and try the plain force once */
            memcpy(scene->x, old_x, size * sizeof *old_x);
            status = tml_scene_relist(scene, SKIN);
            if (status == TML_OK) here = tml_energy(scene, weights);
            if (past.count == 0) break;
            past.count = 0;
            continue;
        }
        here = there;
        remember(&past, scene->x, old_x, scene->f, old_f, n);
    }
    free(space);
    *energy = here;
    return status;
}
