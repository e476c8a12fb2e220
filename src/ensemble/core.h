/* core.h: models on top of each other, and the part of them that holds together.
 *
 * A tml_stack borrows its coordinates; what is done here moves models as rigid bodies and changes nothing else.
 */
#ifndef TML_CORE_H
#define TML_CORE_H

#include "base/status.h"

typedef struct tml_stack {
    double *const *xyz; /* of each model: atom_count * 3, Å */
    int32_t model_count, atom_count;
} tml_stack;

/* Atoms that stand for groups (residues): atoms[k] for groups[k], in ascending order of groups. */
typedef struct tml_points {
    const int32_t *atoms, *groups;
    int32_t count, group_count;
} tml_points;

/* Superpose all models on the chosen atoms: first on model 1, then again and again on the mean, until no atom of the mean moves
 * by `still` Å or `passes` are made. mean: atom_count * 3, filled with the mean of the models as they lie at the end. */
void tml_stack_fit(const tml_stack *stack, const int32_t *chosen, int32_t chosen_count, int passes, double still, double *mean);

/* R.m.s. distance of an atom from its mean place over the models as they lie, Å. */
double tml_stack_spread(const tml_stack *stack, const double *mean, int32_t atom);

/* Find the groups that hold together, by turns: superpose on the groups chosen so far (at first all), and choose again those
 * whose points have a r.m.s. spread below a cutoff, which comes down from 6.0 to TML_CORE_CUTOFF, until the choice repeats. The
 * models are left superposed on the points of the choice before the last. Where fewer than four points (or than all) agree so
 * well, the choice stays with the last cutoff that they met.
 *
 * core     filled, group_count
 * met      the last cutoff that the choice met, Å; INFINITY where all groups were taken because not even the first was met
 * Returns TML_OK or TML_NO_MEMORY. Source: the turns of superposition and exclusion of Gerstein & Altman, J. Mol. Biol. 251
 * (1995) 161, with a cutoff of spread in place of their volume, and groups that may come back.
 */
#define TML_CORE_CUTOFF 1.5
tml_status tml_core_find(const tml_stack *stack, const tml_points *points, bool *core, double *met, tml_error *error);

#endif
