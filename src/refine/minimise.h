/* minimise.h: quasi-Newton minimum of the error function from the scene's positions. */
#ifndef TML_MINIMISE_H
#define TML_MINIMISE_H

#include "refine/scene.h"

/* Limited-memory BFGS (Nocedal, Math. Comp. 35 (1980) 773; Liu & Nocedal 1989) until the r.m.s. force per atom falls below
 * `force` or `steps` steps are done. Returns the error function by *energy; TML_OK, TML_NO_MEMORY or TML_INTERRUPTED. */
tml_status tml_minimise(tml_scene *scene, const tml_weights *weights, int steps, double force, const volatile int *stop,
                        double *energy);

#endif
