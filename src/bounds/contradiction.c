/* contradiction.c: which given limits cannot hold together, and limits that close in spite of them.
 *
 *   finding      pairs whose lower limit is above their closed upper; a shortest path proves each
 *   preparing    fill, smooth, and loosen what proofs blame until it closes
 */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "bounds/bounds.h"
#include "bounds/graph.h"
#include "bounds/radii.h"

/* The excess from which a contradiction counts, Å. */
static const double TOLERANCE = 0.001;
/* Blamed limits are loosened by this much more than the proof needs, so that rounding does not bring it back, Å. */
static const double MARGIN = 0.002;
/* Pairs looked at in one finding, those with the greatest excess; and rounds of loosening before all blamed limits go. */
enum { MOST_PAIRS = 4000, MOST_ROUNDS = 200 };
/* The upper limit for drawing where there is none: this many times the largest that there is, and at least so many Å. */
static const float CAP_FACTOR = 1.5f, CAP_LEAST = 30.0f;

/* ---- finding ---- */

typedef struct suspect { int32_t a, b; float excess; } suspect;

static int compare_suspects(const void *left, const void *right) {
    const suspect *l = left, *r = right;
    if (l->excess != r->excess) return l->excess > r->excess ? -1 : 1;
    if (l->a != r->a) return l->a < r->a ? -1 : 1;
    return l->b < r->b ? -1 : l->b > r->b;
}

static int compare_sources(const void *left, const void *right) {
    const suspect *l = left, *r = right;
    if (l->a != r->a) return l->a < r->a ? -1 : 1;
    return l->b < r->b ? -1 : l->b > r->b;
}

/* Pairs whose lower limit is above the closed upper, the worst first. */
static bool gather_suspects(const tml_bounds *closed, double tolerance, suspect **out, size_t *count) {
    size_t capacity = 0;
    *out = NULL;
    *count = 0;
    for (int32_t i = 0; i < closed->n; i++)
        for (int32_t j = 0; j < i; j++) {
            float excess = tml_bounds_lower(closed, i, j) - tml_bounds_upper(closed, i, j);
            if (!(excess > tolerance / 2)) continue; /* rounding of the floats; decided in double below */
            if (!tml_grow(out, &capacity, *count + 1, sizeof **out)) return false;
            (*out)[(*count)++] = (suspect){j, i, excess};
        }
    if (*count > 0) qsort(*out, *count, sizeof **out, compare_suspects);
    if (*count > MOST_PAIRS) *count = MOST_PAIRS;
    if (*count > 0) qsort(*out, *count, sizeof **out, compare_sources);
    return true;
}

/* The largest given lower limit of each pair, sorted by pair, for look-up. */
typedef struct lower_list { tml_given *items; size_t count; } lower_list;

static int compare_lowers(const void *left, const void *right) {
    const tml_given *l = left, *r = right;
    if (l->a != r->a) return l->a < r->a ? -1 : 1;
    if (l->b != r->b) return l->b < r->b ? -1 : 1;
    return l->value > r->value ? -1 : l->value < r->value;
}

static bool lower_list_open(lower_list *list, const tml_givens *givens) {
    list->count = 0;
    list->items = tml_alloc(givens->count, sizeof *list->items);
    if (list->items == NULL) return false;
    for (size_t i = 0; i < givens->count; i++)
        if (!givens->items[i].is_upper) list->items[list->count++] = givens->items[i];
    if (list->count > 0) qsort(list->items, list->count, sizeof *list->items, compare_lowers);
    return true;
}

/* The lower limit of a pair with its reason: a given one, or the floor of the radii. */
static tml_given lower_of(const lower_list *list, const tml_bounds *closed, int32_t a, int32_t b) {
    size_t low = 0, high = list->count;
    tml_given best = {.a = a, .b = b, .value = tml_bounds_lower(closed, a, b), .reason = TML_REASON_RADIUS, .conditional = true, .source = -1};
    while (low < high) {
        size_t middle = (low + high) / 2;
        const tml_given *given = &list->items[middle];
        if (given->a < a || (given->a == a && given->b < b))
            low = middle + 1;
        else
            high = middle;
    }
    /* The matrix holds floats rounded down; a floor above the largest given limit is the radii's. */
    if (low < list->count && list->items[low].a == a && list->items[low].b == b && list->items[low].value >= best.value) best = list->items[low];
    return best;
}

/* The proof for one pair, from the search that began at `lower.a`. */
static bool add_proof(const tml_graph *graph, const tml_given *lower, double excess, tml_contradictions *found) {
    size_t steps = 1;
    for (int32_t at = lower->b; graph->via[at] >= 0; steps++)
        at = graph->givens[graph->via[at]].a == at ? graph->givens[graph->via[at]].b : graph->givens[graph->via[at]].a;
    tml_contradiction proof = {.steps = tml_alloc(steps, sizeof *proof.steps), .step_count = steps, .excess = excess, .conditional = lower->conditional};
    if (proof.steps == NULL) return false;
    if (!tml_grow(&found->items, &found->capacity, found->count + 1, sizeof *found->items)) {
        free(proof.steps);
        return false;
    }
    proof.steps[0] = (tml_step){lower->a, lower->b, *lower};
    int32_t at = lower->b;
    for (size_t k = 1; k < steps; k++) {
        const tml_given *edge = &graph->givens[graph->via[at]];
        int32_t next = edge->a == at ? edge->b : edge->a;
        proof.steps[k] = (tml_step){at, next, *edge};
        proof.conditional = proof.conditional || edge->conditional;
        at = next;
    }
    found->items[found->count++] = proof;
    return true;
}

static int compare_proofs(const void *left, const void *right) {
    const tml_contradiction *l = left, *r = right;
    if (l->conditional != r->conditional) return l->conditional ? 1 : -1;
    if (l->step_count != r->step_count) return l->step_count < r->step_count ? -1 : 1;
    return l->excess > r->excess ? -1 : l->excess < r->excess;
}

static bool is_users(const tml_given *given) {
    return given->reason == TML_REASON_RESTRAINT || given->reason == TML_REASON_DIHEDRAL;
}

static bool blames_users(const tml_contradiction *proof) {
    for (size_t k = 0; k < proof->step_count; k++)
        if (is_users(&proof->steps[k].given)) return true;
    return false;
}

/* The user's restraints that are already blamed by a kept proof. */
typedef struct blame { bool *distance, *dihedral; } blame;

static bool *blamed(const blame *b, const tml_given *given) {
    return given->reason == TML_REASON_RESTRAINT ? &b->distance[given->source] : &b->dihedral[given->source];
}

static bool shares_blame(const blame *b, const tml_contradiction *proof) {
    for (size_t k = 0; k < proof->step_count; k++)
        if (is_users(&proof->steps[k].given) && *blamed(b, &proof->steps[k].given)) return true;
    return false;
}

static void mark(const blame *b, const tml_contradiction *proof) {
    for (size_t k = 0; k < proof->step_count; k++)
        if (is_users(&proof->steps[k].given)) *blamed(b, &proof->steps[k].given) = true;
}

/* Keep, of the proofs from `first` on, those that share no restraint with an earlier one. */
static tml_status keep_independent(const tml_problem *problem, tml_contradictions *found, size_t first, tml_error *error) {
    blame b = {tml_alloc((size_t)problem->restraints.distance_count, sizeof(bool)), tml_alloc((size_t)problem->restraints.dihedral_count, sizeof(bool))};
    if (b.distance == NULL || b.dihedral == NULL) {
        free(b.distance);
        free(b.dihedral);
        return tml_no_memory(error);
    }
    if (found->count > first) qsort(&found->items[first], found->count - first, sizeof *found->items, compare_proofs);
    bool without = false; /* a proof without any restraint of the user's: once is enough */
    size_t kept = first;
    for (size_t i = 0; i < found->count; i++) {
        tml_contradiction *proof = &found->items[i];
        bool users = blames_users(proof);
        if (i >= first && (shares_blame(&b, proof) || (!users && without))) {
            free(proof->steps);
            continue;
        }
        mark(&b, proof);
        without = without || !users;
        if (i >= first) found->items[kept++] = *proof;
    }
    found->count = kept;
    free(b.distance);
    free(b.dihedral);
    return TML_OK;
}

tml_status tml_contradictions_find(const tml_problem *problem, const tml_givens *givens, const tml_bounds *closed, double tolerance,
                                   tml_contradictions *found, tml_error *error) {
    suspect *suspects = NULL;
    size_t suspect_count = 0, first = found->count;
    lower_list lowers = {0};
    tml_graph graph = {0};
    bool room = gather_suspects(closed, tolerance, &suspects, &suspect_count) && lower_list_open(&lowers, givens) &&
                tml_graph_open(&graph, givens->items, givens->count, closed->n);
    for (size_t i = 0; room && i < suspect_count; i++) {
        int32_t a = suspects[i].a, b = suspects[i].b;
        if (i == 0 || suspects[i - 1].a != a) tml_graph_search(&graph, a, INFINITY);
        tml_given lower = lower_of(&lowers, closed, a, b);
        double excess = lower.value - graph.distance[b];
        if (excess >= tolerance) room = add_proof(&graph, &lower, excess, found);
    }
    free(suspects);
    free(lowers.items);
    tml_graph_close(&graph);
    return room ? keep_independent(problem, found, first, error) : tml_no_memory(error);
}

void tml_contradictions_clear(tml_contradictions *found) {
    for (size_t i = 0; i < found->count; i++) free(found->items[i].steps);
    free(found->items);
    *found = (tml_contradictions){0};
}

/* ---- preparing ---- */

/* Loosen, in the list of givens only, the user's limits that stand in a proof, by equal shares of its excess; where none does, the
 * lower limit itself. All limits of one restraint move together. */
static void loosen(tml_givens *givens, const tml_contradiction *proof, bool drop) {
    size_t users = 0;
    for (size_t k = 0; k < proof->step_count; k++) users += is_users(&proof->steps[k].given);
    double share = proof->excess / (double)(users > 0 ? users : 1) + MARGIN;
    for (size_t k = 0; k < proof->step_count; k++) {
        const tml_given *step = &proof->steps[k].given;
        if (users > 0 ? !is_users(step) : k > 0) continue;
        for (size_t i = 0; i < givens->count; i++) {
            tml_given *given = &givens->items[i];
            bool same = users > 0 ? given->reason == step->reason && given->source == step->source
                                  : given->a == step->a && given->b == step->b && given->reason == step->reason;
            if (!same || given->is_upper != step->is_upper) continue;
            if (given->is_upper)
                given->value = drop ? 1e6 : given->value + share;
            else
                given->value = drop ? 0 : fmax(given->value - share, 0);
        }
    }
}

/* A floor of the radii that a proof without restraints blames is no given: it is lowered in the matrix each time. Where restraints
 * are blamed, these give way and the floor stays. */
static void lower_floors(tml_bounds *bounds, const tml_contradictions *found) {
    for (size_t i = 0; i < found->count; i++) {
        const tml_given *lower = &found->items[i].steps[0].given;
        if (lower->reason != TML_REASON_RADIUS || blames_users(&found->items[i])) continue;
        float *cell = tml_bounds_cell(bounds, lower->b, lower->a);
        *cell = fminf(*cell, fmaxf((float)(lower->value - found->items[i].excess - MARGIN), 0));
    }
}

/* Closure is kept, since the cap is more than half of any other upper limit. */
void tml_bounds_cap(tml_bounds *bounds) {
    float longest = CAP_LEAST / CAP_FACTOR;
    for (int32_t i = 0; i < bounds->n; i++)
        for (int32_t j = 0; j < i; j++) {
            float upper = tml_bounds_upper(bounds, i, j);
            longest = fmaxf(longest, fmaxf(isinf(upper) ? 0 : upper, tml_bounds_lower(bounds, i, j)));
        }
    float limit = CAP_FACTOR * longest;
    for (int32_t i = 0; i < bounds->n; i++)
        for (int32_t j = i + 1; j < bounds->n; j++)
            if (isinf(*tml_bounds_cell(bounds, i, j))) *tml_bounds_cell(bounds, i, j) = limit;
}

/* Smooth the givens as they are now; on TML_CONTRADICTED the round's proofs are appended to `round`. */
static tml_status smooth_round(const tml_problem *problem, const tml_givens *givens, const tml_contradictions *before, int threads,
                               const tml_watch *watch, tml_bounds **out, tml_contradictions *round, tml_error *error) {
    tml_status status = tml_bounds_from_givens(problem, givens, out, error);
    if (status != TML_OK) return status;
    lower_floors(*out, before);
    status = tml_bounds_smooth(*out, threads, watch, error);
    if (status != TML_CONTRADICTED) return status;
    tml_status finding = tml_contradictions_find(problem, givens, *out, TOLERANCE, round, error);
    return finding == TML_OK ? TML_CONTRADICTED : finding;
}

static tml_status copy_givens(const tml_givens *from, tml_givens *to, tml_error *error) {
    to->items = tml_alloc(from->count, sizeof *to->items);
    if (to->items == NULL) return tml_no_memory(error);
    memcpy(to->items, from->items, from->count * sizeof *to->items);
    to->count = to->capacity = from->count;
    return TML_OK;
}

/* Later rounds see loosened limits. Their proofs are told with the limits as given: these are no looser, so the chains fail by as
 * much or more. */
static void restate(const tml_problem *problem, const tml_givens *original, tml_contradictions *round) {
    for (size_t i = 0; i < round->count; i++) {
        tml_contradiction *proof = &round->items[i];
        for (size_t k = 0; k < proof->step_count; k++) {
            tml_given *step = &proof->steps[k].given;
            if (step->reason == TML_REASON_RADIUS) step->value = fmax(step->value, tml_hard_floor(&problem->molecule, step->a, step->b));
            for (size_t g = 0; g < original->count; g++) {
                const tml_given *given = &original->items[g];
                if (given->a != step->a || given->b != step->b || given->is_upper != step->is_upper ||
                    given->reason != step->reason || given->source != step->source)
                    continue;
                step->value = step->is_upper ? fmin(step->value, given->value) : fmax(step->value, given->value);
            }
        }
        proof->excess = proof->steps[0].given.value;
        for (size_t k = 1; k < proof->step_count; k++) proof->excess -= proof->steps[k].given.value;
    }
}

static tml_status append(tml_contradictions *all, tml_contradictions *round, tml_error *error) {
    if (!tml_grow(&all->items, &all->capacity, all->count + round->count, sizeof *all->items)) return tml_no_memory(error);
    if (round->count > 0) memcpy(&all->items[all->count], round->items, round->count * sizeof *round->items);
    all->count += round->count;
    free(round->items);
    *round = (tml_contradictions){0};
    return TML_OK;
}

tml_status tml_bounds_prepare(const tml_problem *problem, int threads, const tml_watch *watch, tml_bounds **out, tml_contradictions *found,
                              tml_error *error) {
    tml_givens givens = {0}, original = {0};
    tml_contradictions all = {0};
    tml_status status = tml_givens_collect(problem, &givens, error);
    *out = NULL;
    for (int turn = 0; status == TML_OK; turn++) {
        tml_contradictions round = {0};
        tml_bounds_free(*out);
        *out = NULL;
        status = smooth_round(problem, &givens, &all, threads, watch, out, &round, error);
        if (status != TML_CONTRADICTED) {
            tml_contradictions_clear(&round);
            break;
        }
        status = TML_OK;
        if (round.count == 0) break; /* within the tolerance */
        if (turn == 0) status = copy_givens(&givens, &original, error);
        for (size_t i = 0; i < round.count; i++) loosen(&givens, &round.items[i], turn >= MOST_ROUNDS);
        if (status == TML_OK) {
            restate(problem, &original, &round);
            status = append(&all, &round, error);
        }
        tml_contradictions_clear(&round);
    }
    free(givens.items);
    free(original.items);
    if (status == TML_OK && all.count > 0) status = keep_independent(problem, &all, 0, error);
    if (status == TML_OK) status = append(found, &all, error);
    tml_contradictions_clear(&all);
    if (status == TML_OK) return found->count > 0 ? TML_CONTRADICTED : TML_OK;
    tml_bounds_free(*out);
    *out = NULL;
    return status;
}
