/* ensemble.h: models and what was measured on them.
 *
 * A tml_ensemble owns its coordinates and measures; the problem is borrowed and must outlive it. tml_measures and
 * tml_ensemble_free are in trammel.h.
 */
#ifndef TML_ENSEMBLE_H
#define TML_ENSEMBLE_H

#include "input/problem.h"

typedef struct tml_model {
    double *xyz;          /* atom_count * 3, Å; owned */
    int32_t trial;        /* from 1 */
    double error;         /* the refinement's error function */
    bool passed, mirrored; /* mirrored: from the reflected image of the embedding */
    double eigenvalues[5]; /* of the embedding, Å² */
    double other_error;    /* the error of the embedding's other image, NAN where it was not refined */
    bool both_passed;      /* that image passed, too */
    double images_apart;   /* how far the two ended from each other in the two thirds that superpose best, Å; NAN where it was not
                              looked at */
    bool *swapped;         /* per open stereo pair of the restraints: x is its second member; owned */
    tml_measures measures;
} tml_model;

/* Two models whose best two thirds superpose no better are different folds, Å. */
#define TML_DIFFERENT_FOLD 3.0

/* Whether both images of the model's embedding passed and ended as different folds: the limits do not tell the hand. */
static inline bool tml_model_hand_in_doubt(const tml_model *model) {
    return model->both_passed && model->images_apart > TML_DIFFERENT_FOLD;
}

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

/* Measure one model against a problem; xyz holds atom_count*3 Å, NAN for atoms that are missing: what they take part in is left out; swapped as in restraint.h. Returns TML_OK or TML_NO_MEMORY. */
tml_status tml_measure(const tml_problem *problem, const bool *swapped, const double *xyz, tml_measures *out, tml_error *error);

/* Whether a trial passes: no distance over by 0.5 Å, no dihedral by 10°, no wrong hand, no undeclared cis peptide, no bond off
 * by more than 0.1 Å. */
bool tml_measures_pass(const tml_measures *measures);

/* Superpose all models on their well-defined part and fill spread and well_defined. */
tml_status tml_ensemble_superpose(tml_ensemble *ensemble, tml_error *error);

#endif
