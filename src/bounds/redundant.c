#include "bounds/redundant.h"

#include <math.h>
#include <stdlib.h>

static const double MARGIN = 0.001; /* Å: the width of a contradiction that counts, and well above float rounding */

/* What the molecule allows one sum (Σ r⁻⁶)^(-1/6) to be. */
typedef struct reach { double least, most; } reach;

static tml_status bare_bounds(const tml_problem *problem, int threads, const tml_watch *watch, tml_bounds **bounds,
                              tml_error *error) {
    tml_problem bare = *problem;
    tml_givens givens = {0};
    bare.restraints = (tml_restraints){0};
    tml_status status = tml_givens_collect(&bare, &givens, error);
    if (status == TML_OK) status = tml_bounds_from_givens(&bare, &givens, bounds, error);
    free(givens.items);
    if (status == TML_OK) status = tml_bounds_smooth(*bounds, threads, watch, error);
    return status;
}

/* The sum is least with every pair at its lower limit, and never above the nearest pair's upper one; an average, or a side of which
 * it is open which half counts, never above the farthest pair's. */
static reach reach_of(const tml_restraints *restraints, const tml_distance_restraint *restraint, const tml_bounds *bounds) {
    double sum = 0, nearest = INFINITY, farthest = 0;
    bool any_open = false;
    for (int32_t k = 0; k < restraint->alternative_count; k++) {
        const tml_alternative *alternative = &restraints->alternatives[restraint->first_alternative + k];
        double near = INFINITY, far = 0;
        any_open = any_open || tml_alternative_open(alternative);
        for (int32_t i = 0; i < alternative->count_a; i++)
            for (int32_t j = 0; j < alternative->count_b; j++) {
                int32_t a = restraints->group_atoms[alternative->first_a + i];
                int32_t b = restraints->group_atoms[alternative->first_b + j];
                if (a == b) continue;
                double lower = tml_bounds_lower(bounds, a, b), upper = tml_bounds_upper(bounds, a, b);
                sum += lower > 0 ? pow(lower, -6.0) : INFINITY;
                near = fmin(near, upper);
                far = fmax(far, upper);
            }
        if (tml_alternative_centred(alternative)) sum = INFINITY; /* a centre may be nearer than every atom about it */
        nearest = fmin(nearest, tml_alternative_open(alternative) || tml_alternative_centred(alternative) ? far : near);
        farthest = fmax(farthest, far);
    }
    if (restraint->average && !any_open && restraint->pair_count > 0) sum /= restraint->pair_count;
    return (reach){isinf(sum) ? 0.0 : pow(sum, -1.0 / 6.0), restraint->average ? farthest : nearest};
}

static tml_use use_of(const tml_distance_restraint *restraint, reach can) {
    if (restraint->combined || restraint->pair_count == 0) return TML_USE_BINDS;
    if (can.least > restraint->upper + MARGIN || can.most < restraint->lower - MARGIN) return TML_USE_OUT_OF_RANGE;
    if (can.least >= restraint->lower && can.most <= restraint->upper) return TML_USE_REDUNDANT;
    return TML_USE_BINDS;
}

tml_status tml_restraints_judge(const tml_problem *problem, int threads, const tml_watch *watch, tml_use **uses,
                                tml_error *error) {
    const tml_restraints *restraints = &problem->restraints;
    tml_bounds *bounds = NULL;
    *uses = tml_alloc((size_t)restraints->distance_count, sizeof **uses);
    if (*uses == NULL) return tml_no_memory(error);
    tml_status status = restraints->distance_count == 0 ? TML_OK : bare_bounds(problem, threads, watch, &bounds, error);
    if (status == TML_OK)
        for (int32_t i = 0; i < restraints->distance_count; i++)
            (*uses)[i] = use_of(&restraints->distances[i], reach_of(restraints, &restraints->distances[i], bounds));
    if (status == TML_CONTRADICTED) status = TML_OK; /* the molecule contradicts itself: nothing can be said of restraints */
    if (status != TML_OK) {
        free(*uses);
        *uses = NULL;
    }
    tml_bounds_free(bounds);
    return status;
}
