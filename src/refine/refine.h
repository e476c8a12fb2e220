/* refine.h: brings embedded coordinates to the least of the error function, by simulated annealing and a quasi-Newton
 * minimum. One tml_refiner is made per problem, holds all terms as flat arrays, and is read by many threads at once.
 */
#ifndef TML_REFINE_H
#define TML_REFINE_H

#include "base/pcg.h"
#include "input/problem.h"

typedef struct tml_refiner tml_refiner;

/* The terms of a problem. With `free_backbone` nothing draws phi and psi to the regions that are usual in folded proteins. */
tml_status tml_refiner_new(const tml_problem *problem, bool free_backbone, tml_refiner **out, tml_error *error);
void tml_refiner_free(tml_refiner *refiner);

/* Refine one model in place.
 *
 * xyz       atom_count*3 Å: a start in three dimensions
 * effort    scales the number of annealing steps; 1 is the usual schedule
 * swapped   for each open stereo pair of the restraints: whether x is its second member; NULL where they have none
 * error_out the error function at the end
 * Returns TML_OK, TML_NO_MEMORY or TML_INTERRUPTED. Same start and generator, same result.
 */
tml_status tml_refine(const tml_refiner *refiner, double effort, tml_pcg *pcg, double *xyz, bool *swapped, const volatile int *stop,
                      double *error_out, tml_error *error);

#endif
