#include "refine/anneal.h"

#include <math.h>
#include <stddef.h>

#include "refine/minimise.h"

#define DEGREES *(3.14159265358979323846 / 180.0)

/* Energies in kcal/mol, lengths in Å. Soft weights let chains pass through each other while the fold is found; firm ones end the
 * cooling; with the final ones a model is brought to its minimum and judged. A restraint pulls hard near its limit and with a
 * bounded force far from it, so that one that cannot be met bends no bond. */
static const tml_weights SOFT = {
    .bond = 200, .angle = 60, .planar = 30, .volume = 8, .flat = 8,
    .restraint = 15, .restraint_bend = 1.0, .restraint_fade = 1000, .dihedral = 60, .dihedral_bend = 20 DEGREES,
    .repulsion = 0.5, .radius_scale = 0.8, .alike = 0.02, .symmetric = 0, .symmetric_bend = 1,
};
static const tml_weights SOFT_END = {
    .bond = 200, .angle = 60, .planar = 30, .volume = 8, .flat = 8,
    .restraint = 30, .restraint_bend = 1.0, .restraint_fade = 1000, .dihedral = 60, .dihedral_bend = 20 DEGREES,
    .repulsion = 0.5, .radius_scale = 0.8, .alike = 0.1, .symmetric = 0.5, .symmetric_bend = 1,
};
static const tml_weights FIRM = {
    .bond = 1000, .angle = 300, .planar = 100, .volume = 40, .flat = 40,
    .restraint = 60, .restraint_bend = 0.3, .restraint_fade = 1.0, .dihedral = 200, .dihedral_bend = 20 DEGREES,
    .repulsion = 20, .radius_scale = 1.0, .alike = 2, .symmetric = 5, .symmetric_bend = 1, .backbone = 1,
};
const tml_weights TML_FINAL_WEIGHTS = {
    .bond = 2000, .angle = 500, .planar = 100, .volume = 40, .flat = 40, .plane = 100,
    .restraint = 150, .restraint_bend = 0.2, .restraint_fade = 0.3, .dihedral = 200, .dihedral_bend = 20 DEGREES,
    .repulsion = 30, .radius_scale = 1.0, .alike = 2, .symmetric = 5, .symmetric_bend = 1, .backbone = 1,
};

/* A stretch of dynamics in which temperature changes linearly and every weight geometrically from its start to its end. */
typedef struct phase {
    int steps;
    double hot, cold;          /* kT at its start and end, kcal/mol; masses are 1 */
    const tml_weights *from, *to;
    double skin;               /* Å, of the neighbour list */
    int look_every;            /* steps between looks at whether an atom has moved by half the skin */
    bool heavy_only;           /* hydrogens do not repel: while hot they only cost time */
    bool both;                 /* open stereo pairs count with both members: an assignment would hold the fold up */
} phase;

static const phase SCHEDULE[] = {
    {.steps = 3000, .hot = 12, .cold = 12, .from = &SOFT, .to = &SOFT_END, .skin = 1.5, .look_every = 8, .heavy_only = true, .both = true},
    {.steps = 6000, .hot = 12, .cold = 0.02, .from = &SOFT_END, .to = &FIRM, .skin = 1.2, .look_every = 8},
};

/* Step with bonds of k = 1000; it grows as bonds soften. */
static const double STEP_AT_1000 = 0.012;
/* No atom moves farther than this in one step, Å. */
static const double LONGEST = 0.4;
/* Share of the way to the wanted kinetic energy that one step's rescaling goes. */
static const double COUPLING = 0.2;
enum { SETTLE_STEPS = 60, ASSIGN_EVERY = 10 };

/* Every weight in `from` and `to` is a double; a table of their places keeps the interpolation in one loop. */
static tml_weights between(const tml_weights *from, const tml_weights *to, double share) {
    tml_weights out;
    const double *a = (const double *)from, *b = (const double *)to;
    double *c = (double *)&out;
    for (size_t i = 0; i < sizeof out / sizeof *c; i++) c[i] = a[i] > 0 && b[i] > 0 ? a[i] * pow(b[i] / a[i], share) : b[i];
    return out;
}

/* Dense sets freeze a chain that is still to fold: their restraints share, while annealing, what a set of this many for each atom
 * would have together. */
static const double USUAL_CROWD = 0.8;

static double crowd_share(const tml_refiner *refiner) {
    double crowd = (double)refiner->problem->restraints.distance_count / refiner->atom_count;
    return crowd > USUAL_CROWD ? USUAL_CROWD / crowd : 1.0;
}

static void heat(tml_scene *scene, double kt, tml_pcg *pcg) {
    double spread = sqrt(kt);
    for (int32_t i = 0; i < scene->refiner->atom_count; i++)
        for (int k = 0; k < 3; k++) scene->v[i][k] = spread * tml_pcg_normal(pcg);
}

/* One leapfrog step with velocities drawn towards kT. */
TML_WIDE static void step_once(tml_scene *scene, double dt, double kt) {
    int32_t n = scene->refiner->atom_count;
    tml_v4 *x = scene->x, *v = scene->v;
    const tml_v4 *f = scene->f;
    tml_v4 total = TML_V4(0);
    for (int32_t i = 0; i < n; i++) {
        v[i] += dt * f[i];
        total += v[i] * v[i];
    }
    double now = (total[0] + total[1] + total[2]) / (3.0 * n);
    double scale = now > 0 ? sqrt(fmax(1 + COUPLING * (kt / now - 1), 0.25)) : 1;
    const double fastest = LONGEST / dt;
    for (int32_t i = 0; i < n; i++) {
        tml_v4 w = v[i] * scale, square = w * w;
        double speed = square[0] + square[1] + square[2];
        if (speed > fastest * fastest) w *= fastest / sqrt(speed);
        v[i] = w;
        x[i] += dt * w;
    }
}

static tml_status run_phase(tml_scene *scene, const phase *plan, double effort, const volatile int *stop) {
    int steps = (int)ceil(plan->steps * effort);
    const double crowd = crowd_share(scene->refiner);
    tml_weights weights = *plan->from;
    tml_scene_repel_hydrogens(scene, !plan->heavy_only);
    scene->both = plan->both;
    for (int step = 0; step < steps; step++) {
        if (stop != NULL && *stop) return TML_INTERRUPTED;
        double share = (double)step / steps;
        if (step % 20 == 0) {
            weights = between(plan->from, plan->to, share);
            weights.restraint *= crowd;
        }
        if (step % ASSIGN_EVERY == 0 && !plan->both) tml_scene_assign(scene, &weights);
        tml_status status = TML_OK;
        if (step % plan->look_every == 0) status = tml_scene_relist(scene, plan->skin);
        if (status != TML_OK) return status;
        tml_energy(scene, &weights);
        step_once(scene, STEP_AT_1000 / sqrt(weights.bond / 1000), plan->hot + share * (plan->cold - plan->hot));
    }
    return TML_OK;
}

tml_status tml_anneal(tml_scene *scene, double effort, tml_pcg *pcg, const volatile int *stop) {
    double energy;
    tml_status status = tml_minimise(scene, SCHEDULE[0].from, SETTLE_STEPS, 0.0, stop, &energy);
    heat(scene, SCHEDULE[0].hot, pcg);
    for (size_t i = 0; status == TML_OK && i < sizeof SCHEDULE / sizeof *SCHEDULE; i++)
        status = run_phase(scene, &SCHEDULE[i], effort, stop);
    return status;
}
