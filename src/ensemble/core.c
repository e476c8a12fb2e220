#include "ensemble/core.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "base/superpose.h"

/* A group is well defined where the r.m.s. spread of its points about the mean is at most the last cutoff, Å. The first one is
 * wide, so that a core surrounded by loose ends is not lost at the first look. What is left is where the models agree; with two
 * domains that do not hold together, it is the one that more groups agree on. */
static const double LAST_CUTOFF = TML_CORE_CUTOFF, FIRST_CUTOFF = 6.0, CUTOFF_STEP = 0.75;
enum { MOST_TURNS = 40, LEAST_POINTS = 4, PASSES = 2 };

typedef struct finder {
    const tml_stack *stack;
    const tml_points *points;
    bool *core, *before;
    int32_t *chosen, chosen_count;
    double *mean, *spread; /* atom_count * 3; group_count */
    double met;
} finder;

static void settle(finder *f);

tml_status tml_core_find(const tml_stack *stack, const tml_points *points, bool *core, double *met, tml_error *error) {
    size_t groups = (size_t)points->group_count;
    finder f = {.stack = stack, .points = points, .core = core, .met = INFINITY};
    f.before = tml_alloc(groups, sizeof *f.before);
    f.spread = tml_alloc(groups, sizeof *f.spread);
    f.chosen = tml_alloc((size_t)points->count, sizeof *f.chosen);
    f.mean = tml_alloc(3 * (size_t)stack->atom_count, sizeof *f.mean);
    bool room = f.before != NULL && f.spread != NULL && f.chosen != NULL && f.mean != NULL;
    if (room) settle(&f);
    *met = f.met;
    free(f.before);
    free(f.spread);
    free(f.chosen);
    free(f.mean);
    return room ? TML_OK : tml_no_memory(error);
}

static void choose_points(finder *f) {
    f->chosen_count = 0;
    for (int32_t k = 0; k < f->points->count; k++)
        if (f->core[f->points->groups[k]]) f->chosen[f->chosen_count++] = f->points->atoms[k];
}

/* R.m.s. spread of each group's points; groups without points are never chosen. */
static void spread_groups(finder *f) {
    const tml_points *points = f->points;
    for (int32_t g = 0; g < points->group_count; g++) f->spread[g] = INFINITY;
    for (int32_t k = 0; k < points->count;) {
        int32_t group = points->groups[k], count = 0;
        double square = 0;
        for (; k < points->count && points->groups[k] == group; k++, count++) {
            double spread = tml_stack_spread(f->stack, f->mean, points->atoms[k]);
            square += spread * spread;
        }
        f->spread[group] = sqrt(square / count);
    }
}

/* Choose the groups below the cutoff. False when the choice is the last one again. */
static bool choose_again(finder *f, double cutoff) {
    const int32_t count = f->points->group_count;
    const int32_t least = f->points->count < LEAST_POINTS ? f->points->count : LEAST_POINTS;
    bool changed = false;
    memcpy(f->before, f->core, (size_t)count * sizeof *f->before);
    for (int32_t g = 0; g < count; g++) f->core[g] = f->spread[g] <= cutoff;
    choose_points(f);
    if (f->chosen_count < least) { /* nothing agrees this well: stay with what there was */
        memcpy(f->core, f->before, (size_t)count * sizeof *f->before);
        return false;
    }
    f->met = cutoff;
    for (int32_t g = 0; g < count; g++) changed = changed || f->before[g] != f->core[g];
    return changed;
}

static void settle(finder *f) {
    for (int32_t g = 0; g < f->points->group_count; g++) f->core[g] = true;
    double cutoff = FIRST_CUTOFF;
    for (int turn = 0; turn < MOST_TURNS; turn++) {
        choose_points(f);
        tml_stack_fit(f->stack, f->chosen, f->chosen_count, PASSES, 0.0, f->mean);
        spread_groups(f);
        bool changed = choose_again(f, cutoff);
        if (!changed && cutoff <= LAST_CUTOFF) break;
        cutoff = fmax(cutoff - CUTOFF_STEP, LAST_CUTOFF);
    }
}

/* ---- the stack ---- */

/* The new mean; how far the atom that moved most is from where it was. */
static double take_mean(const tml_stack *stack, double *mean) {
    double farthest = 0;
    for (size_t i = 0; i < (size_t)stack->atom_count; i++) {
        double square = 0;
        for (size_t k = 3 * i; k < 3 * i + 3; k++) {
            double sum = 0;
            for (int32_t m = 0; m < stack->model_count; m++) sum += stack->xyz[m][k] / stack->model_count;
            square += (sum - mean[k]) * (sum - mean[k]);
            mean[k] = sum;
        }
        farthest = fmax(farthest, square);
    }
    return sqrt(farthest);
}

void tml_stack_fit(const tml_stack *stack, const int32_t *chosen, int32_t chosen_count, int passes, double still,
                   double *mean) {
    memcpy(mean, stack->xyz[0], 3 * (size_t)stack->atom_count * sizeof *mean);
    for (int pass = 0; pass < passes; pass++) {
        for (int32_t m = 0; m < stack->model_count; m++) {
            tml_motion motion;
            tml_superpose(stack->xyz[m], mean, chosen, chosen_count, &motion);
            tml_motion_apply(&motion, stack->xyz[m], stack->atom_count);
        }
        if (take_mean(stack, mean) < still && pass > 0) break;
    }
}

double tml_stack_spread(const tml_stack *stack, const double *mean, int32_t atom) {
    double square = 0;
    for (int32_t m = 0; m < stack->model_count; m++)
        for (int k = 0; k < 3; k++) {
            double off = stack->xyz[m][3 * (size_t)atom + (size_t)k] - mean[3 * (size_t)atom + (size_t)k];
            square += off * off / stack->model_count;
        }
    return sqrt(square);
}
