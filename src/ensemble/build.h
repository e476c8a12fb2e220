/* build.h: the whole way from a problem to an ensemble: bounds, trials on all threads, judging in order, selection. */
#ifndef TML_BUILD_H
#define TML_BUILD_H

#include "bounds/bounds.h"
#include "ensemble/ensemble.h"

typedef struct tml_build_options {
    int models;         /* models wanted, default 20 */
    int trials;         /* at most this many tried; 0 for 5 * models */
    int threads;        /* 0 for all */
    uint64_t seed;      /* default 1 */
    bool select_lowest; /* the best by error among at least 1.5 * models trials; otherwise the first that pass */
    bool strict;        /* stop at the first finding: a contradiction or an unmapped restraint */
    int dimensions;     /* of the embedding: 3 (default) or 4 */
    int metrize_roots;  /* atoms metrized; 0 for all */
    double effort;      /* scales the annealing; 1 is usual */
} tml_build_options;

void tml_build_defaults(tml_build_options *options);

/* Build an ensemble.
 *
 * problem  peptide bonds to proline that the restraints need cis are found and set in it, with a note each
 * found    the contradictions of the limits; cleared by the caller with tml_contradictions_clear
 * out      filled unless the call failed; also with TML_SHORT and TML_CONTRADICTED
 *
 * Returns TML_OK, TML_SHORT (fewer trials passed than wanted), TML_CONTRADICTED (built all the same, but for `strict`),
 * TML_BAD_INPUT (an empty problem), TML_TOO_LARGE, TML_NO_MEMORY or TML_INTERRUPTED.
 */
tml_status tml_build(tml_problem *problem, const tml_build_options *options, const tml_watch *watch, tml_ensemble **out,
                     tml_contradictions *found, tml_error *error);

#endif
