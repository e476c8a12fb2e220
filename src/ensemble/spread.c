/* spread.c: which part of an ensemble is well defined, and how far each atom strays.
 *
 * The part is found by turns: superpose all models on the residues chosen so far (at first all), measure each residue's spread about
 * the mean, and choose again those below a cutoff, until the choice repeats. The cutoff starts wide and comes down to LAST_CUTOFF,
 * so that a core surrounded by loose ends is not lost at the first look. What is left is where the models agree; with two domains
 * that do not hold together, it is the one that more residues agree on.
 */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "ensemble/ensemble.h"
#include "base/superpose.h"

/* A residue is well defined where the r.m.s. spread of its backbone about the mean is at most this, Å. */
static const double LAST_CUTOFF = 1.5, FIRST_CUTOFF = 6.0, CUTOFF_STEP = 0.75;
enum { MOST_TURNS = 40, LEAST_POINTS = 4 };

typedef struct spreader {
    tml_ensemble *ensemble;
    const tml_molecule *molecule;
    int32_t *points, point_count; /* the atoms that stand for their residues */
    int32_t *chosen, chosen_count;
    double *mean;                 /* atom_count * 3 */
    double *residue_spread;
    bool *before;
} spreader;

static bool spreader_open(spreader *s, tml_ensemble *ensemble);
static void spreader_close(spreader *s);
static void choose_points(spreader *s);
static void settle(spreader *s);
static void fit_all(spreader *s);

tml_status tml_ensemble_superpose(tml_ensemble *ensemble, tml_error *error) {
    spreader s = {0};
    bool room = spreader_open(&s, ensemble);
    if (room && ensemble->model_count > 0) {
        choose_points(&s);
        settle(&s);
        fit_all(&s);
        for (int32_t i = 0; i < s.molecule->atom_count; i++) {
            double square = 0;
            for (int32_t m = 0; m < ensemble->model_count; m++)
                for (int k = 0; k < 3; k++) {
                    double off = ensemble->models[m].xyz[3 * i + k] - s.mean[3 * i + k];
                    square += off * off / ensemble->model_count;
                }
            ensemble->spread[i] = sqrt(square);
        }
    }
    spreader_close(&s);
    return room ? TML_OK : tml_no_memory(error);
}

static bool spreader_open(spreader *s, tml_ensemble *ensemble) {
    size_t atoms = (size_t)ensemble->problem->molecule.atom_count, residues = (size_t)ensemble->problem->molecule.residue_count;
    s->ensemble = ensemble;
    s->molecule = &ensemble->problem->molecule;
    s->points = tml_alloc(atoms, sizeof *s->points);
    s->chosen = tml_alloc(atoms, sizeof *s->chosen);
    s->mean = tml_alloc(3 * atoms, sizeof *s->mean);
    s->residue_spread = tml_alloc(residues, sizeof *s->residue_spread);
    s->before = tml_alloc(residues, sizeof *s->before);
    if (ensemble->spread == NULL) ensemble->spread = tml_alloc(atoms, sizeof *ensemble->spread);
    if (ensemble->well_defined == NULL) ensemble->well_defined = tml_alloc(residues, sizeof *ensemble->well_defined);
    return s->points != NULL && s->chosen != NULL && s->mean != NULL && s->residue_spread != NULL && s->before != NULL &&
           ensemble->spread != NULL && ensemble->well_defined != NULL;
}

static void spreader_close(spreader *s) {
    free(s->points);
    free(s->chosen);
    free(s->mean);
    free(s->residue_spread);
    free(s->before);
}

/* N, CA and C of amino acids; elsewhere all heavy atoms and beads; hydrogens alone if there is nothing else. */
static void choose_points(spreader *s) {
    const tml_molecule *molecule = s->molecule;
    for (int32_t i = 0; i < molecule->atom_count; i++) {
        const tml_atom *atom = &molecule->atoms[i];
        bool backbone = strcmp(atom->name, "N") == 0 || strcmp(atom->name, "CA") == 0 || strcmp(atom->name, "C") == 0;
        if (molecule->residues[atom->residue].polymer == TML_POLYMER_PROTEIN ? backbone : atom->element != 1) s->points[s->point_count++] = i;
    }
    for (int32_t i = 0; s->point_count == 0 && i < molecule->atom_count; i++) s->points[i] = i;
    if (s->point_count == 0) s->point_count = molecule->atom_count;
}

static void choose_atoms(spreader *s) {
    s->chosen_count = 0;
    for (int32_t k = 0; k < s->point_count; k++)
        if (s->ensemble->well_defined[s->molecule->atoms[s->points[k]].residue]) s->chosen[s->chosen_count++] = s->points[k];
}

/* Superpose all models on the chosen atoms, first on model 1 and then on the mean. */
static void fit_all(spreader *s) {
    size_t size = 3 * (size_t)s->molecule->atom_count;
    choose_atoms(s);
    memcpy(s->mean, s->ensemble->models[0].xyz, size * sizeof *s->mean);
    for (int pass = 0; pass < 2; pass++) {
        for (int32_t m = 0; m < s->ensemble->model_count; m++) {
            tml_motion motion;
            tml_superpose(s->ensemble->models[m].xyz, s->mean, s->chosen, s->chosen_count, &motion);
            tml_motion_apply(&motion, s->ensemble->models[m].xyz, s->molecule->atom_count);
        }
        memset(s->mean, 0, size * sizeof *s->mean);
        for (int32_t m = 0; m < s->ensemble->model_count; m++)
            for (size_t i = 0; i < size; i++) s->mean[i] += s->ensemble->models[m].xyz[i] / s->ensemble->model_count;
    }
}

/* R.m.s. spread of each residue's points; residues without points are never chosen. */
static void spread_residues(spreader *s) {
    for (int32_t r = 0; r < s->molecule->residue_count; r++) s->residue_spread[r] = INFINITY;
    for (int32_t k = 0; k < s->point_count;) {
        int32_t residue = s->molecule->atoms[s->points[k]].residue, count = 0;
        double square = 0;
        for (; k < s->point_count && s->molecule->atoms[s->points[k]].residue == residue; k++, count++)
            for (int32_t m = 0; m < s->ensemble->model_count; m++)
                for (int l = 0; l < 3; l++) {
                    double off = s->ensemble->models[m].xyz[3 * s->points[k] + l] - s->mean[3 * s->points[k] + l];
                    square += off * off / s->ensemble->model_count;
                }
        s->residue_spread[residue] = sqrt(square / count);
    }
}

/* Choose the residues below the cutoff. False when the choice is the last one again. */
static bool choose_again(spreader *s, double cutoff) {
    const int32_t count = s->molecule->residue_count;
    bool changed = false;
    memcpy(s->before, s->ensemble->well_defined, (size_t)count * sizeof *s->before);
    for (int32_t r = 0; r < count; r++) s->ensemble->well_defined[r] = s->residue_spread[r] <= cutoff;
    choose_atoms(s);
    if (s->chosen_count < LEAST_POINTS) { /* nothing agrees this well: stay with what there was */
        memcpy(s->ensemble->well_defined, s->before, (size_t)count * sizeof *s->before);
        return false;
    }
    for (int32_t r = 0; r < count; r++) changed = changed || s->before[r] != s->ensemble->well_defined[r];
    return changed;
}

static void settle(spreader *s) {
    for (int32_t r = 0; r < s->molecule->residue_count; r++) s->ensemble->well_defined[r] = true;
    double cutoff = FIRST_CUTOFF;
    for (int turn = 0; turn < MOST_TURNS; turn++) {
        fit_all(s);
        spread_residues(s);
        bool changed = choose_again(s, cutoff);
        if (!changed && cutoff <= LAST_CUTOFF) break;
        cutoff = fmax(cutoff - CUTOFF_STEP, LAST_CUTOFF);
    }
}

void tml_ensemble_free(tml_ensemble *ensemble) {
    if (ensemble == NULL) return;
    for (int32_t m = 0; m < ensemble->model_count; m++) free(ensemble->models[m].xyz);
    free(ensemble->models);
    free(ensemble->spread);
    free(ensemble->well_defined);
    free(ensemble);
}
