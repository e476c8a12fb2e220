#include "refine/refine.h"

#include <math.h>

#include "refine/anneal.h"
#include "refine/minimise.h"

enum { FINAL_STEPS = 1500 };
/* R.m.s. force at which the last minimum counts as reached, kcal/mol/Å. */
static const double FINAL_FORCE = 0.02;

tml_status tml_refine(const tml_refiner *refiner, double effort, tml_pcg *pcg, double *xyz, const volatile int *stop,
                      double *error_out, tml_error *error) {
    tml_scene *scene;
    tml_status status = tml_scene_new(refiner, &scene, error);
    if (status != TML_OK) return status;
    tml_scene_load(scene, xyz);
    status = tml_anneal(scene, effort, pcg, stop);
    if (status == TML_OK) status = tml_minimise(scene, &TML_FINAL_WEIGHTS, FINAL_STEPS, FINAL_FORCE, stop, error_out);
    tml_scene_store(scene, xyz);
    tml_scene_free(scene);
    if (status == TML_NO_MEMORY) tml_no_memory(error);
    if (status == TML_INTERRUPTED) tml_fail(error, status, "interrupted");
    return status;
}
