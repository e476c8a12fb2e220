/* spread.c: which part of an ensemble is well defined (core.h finds it), and how far each atom strays. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "ensemble/core.h"
#include "ensemble/ensemble.h"

enum { PASSES = 2 };

typedef struct spreader {
    tml_ensemble *ensemble;
    const tml_molecule *molecule;
    tml_stack stack;
    double **xyz;
    int32_t *points, *residues, point_count; /* the atoms that stand for their residues */
    double *mean;                            /* atom_count * 3 */
} spreader;

static bool spreader_open(spreader *s, tml_ensemble *ensemble);
static void spreader_close(spreader *s);
static void choose_points(spreader *s);
static void measure_spread(spreader *s);

tml_status tml_ensemble_superpose(tml_ensemble *ensemble, tml_error *error) {
    spreader s = {0};
    tml_status status = spreader_open(&s, ensemble) ? TML_OK : tml_no_memory(error);
    if (status == TML_OK && ensemble->model_count > 0) {
        double met;
        choose_points(&s);
        tml_points points = {s.points, s.residues, s.point_count, s.molecule->residue_count};
        status = tml_core_find(&s.stack, &points, ensemble->well_defined, &met, error);
        if (status == TML_OK) measure_spread(&s);
    }
    spreader_close(&s);
    return status;
}

static bool spreader_open(spreader *s, tml_ensemble *ensemble) {
    size_t atoms = (size_t)ensemble->problem->molecule.atom_count, residues = (size_t)ensemble->problem->molecule.residue_count;
    s->ensemble = ensemble;
    s->molecule = &ensemble->problem->molecule;
    s->points = tml_alloc(atoms, sizeof *s->points);
    s->residues = tml_alloc(atoms, sizeof *s->residues);
    s->mean = tml_alloc(3 * atoms, sizeof *s->mean);
    s->xyz = tml_alloc((size_t)ensemble->model_count, sizeof *s->xyz);
    if (ensemble->spread == NULL) ensemble->spread = tml_alloc(atoms, sizeof *ensemble->spread);
    if (ensemble->well_defined == NULL) ensemble->well_defined = tml_alloc(residues, sizeof *ensemble->well_defined);
    if (s->points == NULL || s->residues == NULL || s->mean == NULL || s->xyz == NULL || ensemble->spread == NULL ||
        ensemble->well_defined == NULL)
        return false;
    for (int32_t m = 0; m < ensemble->model_count; m++) s->xyz[m] = ensemble->models[m].xyz;
    s->stack = (tml_stack){s->xyz, ensemble->model_count, s->molecule->atom_count};
    return true;
}

static void spreader_close(spreader *s) {
    free(s->points);
    free(s->residues);
    free(s->mean);
    free(s->xyz);
}

/* Atoms that some model lacks cannot be superposed. */
static void leave_out_missing(spreader *s) {
    int32_t kept = 0;
    for (int32_t k = 0; k < s->point_count; k++) {
        bool there = true;
        for (int32_t m = 0; m < s->ensemble->model_count; m++) there = there && isfinite(s->ensemble->models[m].xyz[3 * s->points[k]]);
        if (there) s->points[kept++] = s->points[k];
    }
    s->point_count = kept;
}

/* N, CA and C of amino acids; elsewhere all heavy atoms and beads; hydrogens alone if there is nothing else. */
static void choose_points(spreader *s) {
    const tml_molecule *molecule = s->molecule;
    for (int32_t i = 0; i < molecule->atom_count; i++) {
        const tml_atom *atom = &molecule->atoms[i];
        bool backbone = strcmp(atom->name, "N") == 0 || strcmp(atom->name, "CA") == 0 || strcmp(atom->name, "C") == 0;
        if (molecule->residues[atom->residue].polymer == TML_POLYMER_PROTEIN ? backbone : atom->element != 1)
            s->points[s->point_count++] = i;
    }
    for (int32_t i = 0; s->point_count == 0 && i < molecule->atom_count; i++) s->points[i] = i;
    if (s->point_count == 0) s->point_count = molecule->atom_count;
    leave_out_missing(s);
    for (int32_t k = 0; k < s->point_count; k++) s->residues[k] = molecule->atoms[s->points[k]].residue;
}

/* Superposed on the well-defined part. */
static void measure_spread(spreader *s) {
    int32_t chosen_count = 0;
    for (int32_t k = 0; k < s->point_count; k++)
        if (s->ensemble->well_defined[s->residues[k]]) s->points[chosen_count++] = s->points[k];
    tml_stack_fit(&s->stack, s->points, chosen_count, PASSES, 0.0, s->mean);
    for (int32_t i = 0; i < s->molecule->atom_count; i++) s->ensemble->spread[i] = tml_stack_spread(&s->stack, s->mean, i);
}

void tml_ensemble_free(tml_ensemble *ensemble) {
    if (ensemble == NULL) return;
    for (int32_t m = 0; m < ensemble->model_count; m++) {
        free(ensemble->models[m].xyz);
        free(ensemble->models[m].swapped);
    }
    free(ensemble->models);
    free(ensemble->spread);
    free(ensemble->well_defined);
    free(ensemble);
}
