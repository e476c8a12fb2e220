/* anneal.h: simulated annealing in Cartesian coordinates, all masses 1.
 *
 * Source of the method: Nilges, Clore & Gronenborn, FEBS Lett. 229 (1988) 317; the schedule's constants are our own.
 */
#ifndef TML_ANNEAL_H
#define TML_ANNEAL_H

#include "base/pcg.h"
#include "refine/scene.h"

/* Weights with which a model is finished and its error judged. */
extern const tml_weights TML_FINAL_WEIGHTS;

/* Hot and cooling phases; `effort` scales their steps. The scene is left cold but not at its minimum.
 * TML_OK, TML_NO_MEMORY or TML_INTERRUPTED. */
tml_status tml_anneal(tml_scene *scene, double effort, tml_pcg *pcg, const volatile int *stop);

#endif
