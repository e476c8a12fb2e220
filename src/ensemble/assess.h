/* assess.h: models that others made, measured against a problem.
 *
 * A tml_assessment owns its arrays and the coordinates; the problem is borrowed and must outlive it. The public functions are in
 * trammel.h.
 */
#ifndef TML_ASSESS_H
#define TML_ASSESS_H

#include "ensemble/ensemble.h"
#include "ensemble/sites.h"

struct tml_assessment {
    const tml_problem *problem;
    tml_coordinates models;
    tml_sites sites;
    int32_t model_count;
    double *distance, *dihedral; /* restraint by restraint, model_count each: violation >= 0, Å and degrees; NAN where atoms are missing */
    tml_ensemble *ensemble;      /* the models in the problem's order of atoms, with their measures and spread */
};

#endif
