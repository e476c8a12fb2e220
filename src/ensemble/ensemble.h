/* ensemble.h: models and what was measured on them.
 *
 * A tml_ensemble owns its coordinates and measures; the problem is borrowed and must outlive it.
 */
#ifndef TML_ENSEMBLE_H
#define TML_ENSEMBLE_H

#include "input/problem.h"

/* What one model is like. Distances in Å, angles in degrees. */
typedef struct tml_measures {
    int32_t distance_over_01, distance_over_02, distance_over_05; /* restraints violated by more than 0.1, 0.2, 0.5 Å */
    double distance_max, distance_rms;
    int32_t dihedral_over_5, dihedral_over_10;
    double dihedral_max;
    int32_t wrong_handed;   /* centres with `fixed` handedness that came out the wrong way */
    int32_t cis_undeclared; /* cis peptides (|omega| < 30°) that are neither declared nor before proline */
    int32_t omega_off;      /* peptides beyond 30° of planar */
    double bond_rms, bond_max, angle_rms;
    double plane_max;       /* largest r.m.s. distance of a planar group from its best plane, Å */
    int32_t overlaps;       /* pairs more than three bonds apart, closer than their radii by 0.6 Å (1.0 for polar pairs) */
    double backbone_usual;  /* share of residues in the usual regions of phi and psi; NAN where there are none */
} tml_measures;

typedef struct tml_model {
    double *xyz;          /* atom_count * 3, Å; owned */
    int32_t trial;        /* from 1 */
    double error;         /* the refinement's error function */
    bool passed, mirrored; /* mirrored: from the reflected image of the embedding */
    double eigenvalues[5]; /* of the embedding, Å² */
    double other_error;   /* the error of the embedding's other image, NAN where it was not refined */
    tml_measures measures;
} tml_model;

typedef struct tml_timing { double read, smooth, metrize, embed, refine, write, total; } tml_timing;

struct tml_ensemble {
    const tml_problem *problem;
    tml_model *models;  /* best first */
    int32_t model_count;
    int32_t trials, passed; /* tried, and passed among those judged */
    int32_t wanted;
    uint64_t seed;
    int threads;
    bool select_lowest;
    tml_timing timing;
    double *spread;       /* per atom: r.m.s. distance from the mean position after superposition on the well-defined part, Å */
    bool *well_defined;   /* per residue */
};

/* Measure one model against a problem; xyz holds atom_count*3 Å. Returns TML_OK or TML_NO_MEMORY. */
tml_status tml_measure(const tml_problem *problem, const double *xyz, tml_measures *out, tml_error *error);

/* Whether a trial passes: no distance over by 0.5 Å, no dihedral by 10°, no wrong hand, no undeclared cis peptide, no bond off
 * by more than 0.1 Å. */
bool tml_measures_pass(const tml_measures *measures);

/* Superpose all models on their well-defined part and fill spread and well_defined. */
tml_status tml_ensemble_superpose(tml_ensemble *ensemble, tml_error *error);

void tml_ensemble_free(tml_ensemble *ensemble);

#endif
