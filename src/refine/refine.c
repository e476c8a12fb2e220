#include "refine/refine.h"

#include <math.h>

#include "refine/anneal.h"
#include "refine/minimise.h"

enum { FINAL_STEPS = 1500, MOST_MINIMA = 4 };
/* R.m.s. force at which the last minimum counts as reached, kcal/mol/Å. */
static const double FINAL_FORCE = 0.02;

tml_status tml_refine(const tml_refiner *refiner, double effort, tml_pcg *pcg, double *xyz, bool *swapped, const volatile int *stop,
                      double *error_out, tml_error *error) {
    tml_scene *scene;
    tml_status status = tml_scene_new(refiner, &scene, error);
    if (status != TML_OK) return status;
    tml_scene_load(scene, xyz);
    status = tml_anneal(scene, effort, pcg, stop);
    tml_scene_assign(scene, &TML_FINAL_WEIGHTS);
    bool changed = true; /* at the minimum another assignment may be better: then it is sought once more */
    for (int minimum = 0; status == TML_OK && changed && minimum < MOST_MINIMA; minimum++) {
        status = tml_minimise(scene, &TML_FINAL_WEIGHTS, FINAL_STEPS, FINAL_FORCE, stop, error_out);
        changed = status == TML_OK && minimum + 1 < MOST_MINIMA && tml_scene_assign(scene, &TML_FINAL_WEIGHTS);
    }
    tml_scene_store(scene, xyz);
    for (int32_t i = 0; swapped != NULL && i < refiner->problem->restraints.stereo_count; i++) swapped[i] = scene->swapped[i];
    tml_scene_free(scene);
    if (status == TML_NO_MEMORY) tml_no_memory(error);
    if (status == TML_INTERRUPTED) tml_fail(error, status, "interrupted");
    return status;
}
