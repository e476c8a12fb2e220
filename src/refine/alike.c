/* alike.c: what keeps chains that are the same molecule alike: equal shapes, and for two or three of them a symmetric arrangement.
 *
 * Shapes: each copy is superposed on the next one round the ring of copies, and atoms are drawn to where their partners lie. At the
 * best superposition its own change adds nothing to the forces. Arrangement: with two or three copies in a ring, the distance from
 * point i of a copy to point j of the next is the same for all. Source of both: Nilges, Proteins 17 (1993) 297.
 */
#include "base/superpose.h"
#include "base/vector.h"
#include "refine/scene.h"

static void gather(const tml_scene *scene, const int32_t *atoms, int32_t count, double *xyz) {
    for (int32_t i = 0; i < count; i++)
        for (int k = 0; k < 3; k++) xyz[3 * i + k] = scene->x[atoms[i]][k];
}

static double shapes(tml_scene *scene, const int32_t *from, const int32_t *onto, int32_t count, double k) {
    double *moving = scene->copies, *fixed = scene->copies + 3 * (size_t)count, energy = 0;
    tml_motion motion;
    gather(scene, from, count, moving);
    gather(scene, onto, count, fixed);
    tml_superpose(moving, fixed, NULL, count, &motion);
    for (int32_t i = 0; i < count; i++) {
        double moved[3], off[3];
        for (int l = 0; l < 3; l++) moved[l] = moving[3 * i + l];
        tml_motion_apply(&motion, moved, 1);
        tml_sub(off, &fixed[3 * i], moved);
        energy += tml_dot(off, off);
        for (int l = 0; l < 3; l++) {
            scene->f[onto[i]][l] -= 2 * k * off[l];
            for (int m = 0; m < 3; m++) scene->f[from[i]][l] += 2 * k * motion.rotation[m][l] * off[m];
        }
    }
    return k * energy;
}

/* Quadratic, linear beyond `bend`; *slope is dE/d(off). */
static double bent(double off, double k, double bend, double *slope) {
    double size = fabs(off);
    if (size <= bend) {
        *slope = 2 * k * off;
        return k * off * off;
    }
    *slope = off > 0 ? 2 * k * bend : -2 * k * bend;
    return k * bend * (2 * size - bend);
}

/* Distances from point i of copy c to point j of the copy after it against their mean over c. */
static double arrangement(tml_scene *scene, const tml_alike *set, const int32_t *atoms, int32_t i, int32_t j, double k, double bend) {
    enum { MOST_COPIES = 3 };
    double distance[MOST_COPIES], slope[MOST_COPIES], mean = 0, mean_slope = 0, energy = 0;
    double direction[MOST_COPIES][3];
    int32_t ends[MOST_COPIES][2];
    for (int c = 0; c < set->copies; c++) {
        ends[c][0] = atoms[c * set->count + i];
        ends[c][1] = atoms[(c + 1) % set->copies * set->count + j];
        double square = 1e-12;
        for (int l = 0; l < 3; l++) {
            direction[c][l] = scene->x[ends[c][0]][l] - scene->x[ends[c][1]][l];
            square += direction[c][l] * direction[c][l];
        }
        distance[c] = sqrt(square);
        mean += distance[c] / set->copies;
    }
    for (int c = 0; c < set->copies; c++) {
        energy += bent(distance[c] - mean, k, bend, &slope[c]);
        mean_slope += slope[c] / set->copies;
    }
    for (int c = 0; c < set->copies; c++)
        for (int l = 0; l < 3; l++) {
            double push = -(slope[c] - mean_slope) * direction[c][l] / distance[c];
            scene->f[ends[c][0]][l] += push;
            scene->f[ends[c][1]][l] -= push;
        }
    return energy;
}

double tml_alike_energy(tml_scene *scene, const tml_weights *weights) {
    const tml_refiner *refiner = scene->refiner;
    const tml_molecule *molecule = &refiner->problem->molecule;
    double energy = 0;
    for (int32_t s = 0; s < molecule->alike_count; s++) {
        const tml_alike *set = &molecule->alike[s];
        const int32_t *atoms = &molecule->alike_atoms[set->first];
        for (int32_t c = 0; weights->alike > 0 && c < set->copies - (set->copies == 2); c++)
            energy += shapes(scene, &atoms[c * set->count], &atoms[(c + 1) % set->copies * set->count], set->count, weights->alike);
        double k = weights->symmetric / fmax(1, refiner->point_first[s + 1] - refiner->point_first[s]);
        for (int32_t p = refiner->point_first[s]; weights->symmetric > 0 && p < refiner->point_first[s + 1]; p++)
            for (int32_t q = refiner->point_first[s]; q < refiner->point_first[s + 1]; q++) {
                if (set->copies == 2 && q <= p) continue; /* (i, j) and (j, i) are one pair of distances */
                energy += arrangement(scene, set, atoms, refiner->points[p], refiner->points[q], k, weights->symmetric_bend);
            }
    }
    return energy;
}
