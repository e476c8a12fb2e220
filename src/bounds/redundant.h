/* redundant.h: distance restraints that say nothing the molecule does not, or what it cannot do.
 *
 * Each restraint is compared with the smoothed limits of the molecule alone, its bonds, angles, torsions and radii: no
 * other restraint takes part.
 */
#ifndef TML_REDUNDANT_H
#define TML_REDUNDANT_H

#include "bounds/bounds.h"

typedef enum tml_use {
    TML_USE_BINDS,     /* the ordinary case */
    TML_USE_REDUNDANT, /* every shape the molecule can take meets it */
    TML_USE_OUT_OF_RANGE /* no shape the molecule can take meets it */
} tml_use;

/* One tml_use for each distance restraint; the caller frees *uses. Both findings are sure; a restraint of neither kind may still
 * be redundant in ways that distances between pairs do not show.
 * Returns TML_OK, TML_TOO_LARGE, TML_NO_MEMORY or TML_INTERRUPTED. */
tml_status tml_restraints_judge(const tml_problem *problem, int threads, const tml_watch *watch, tml_use **uses,
                                tml_error *error);

#endif
