/* compare.h: models of one file on top of each other, and on a reference.
 *
 * A tml_comparison owns what was read and all that was measured. Atoms that not all models have, and waters, take no part. The
 * public functions are in trammel.h.
 */
#ifndef TML_COMPARE_H
#define TML_COMPARE_H

#include "ensemble/cluster.h"
#include "ensemble/core.h"
#include "ensemble/match.h"
#include "ensemble/order.h"

typedef enum tml_core_kind { TML_CORE_SPREAD, TML_CORE_ORDER, TML_CORE_ALL, TML_CORE_GIVEN } tml_core_kind;

/* The reference: where its medoid lies, and how far from it all others do. */
typedef struct tml_reference {
    tml_coordinates coordinates;
    tml_match *match; /* from the models' sites to its own; NULL without a reference */
    int32_t medoid;
    int32_t common, common_all; /* fitted atoms that it has, too; all atoms */
    bool exchanged;
    double *rmsd;                 /* of each model, Å */
    double mean, least, greatest; /* over the models */
    double from_mean, from_medoid;
} tml_reference;

struct tml_comparison {
    tml_coordinates models;
    int32_t model_count;
    int32_t *sites, atom_count;     /* what takes part: the models' sites that all of them have */
    int32_t missing;                /* sites that some model lacks */
    int32_t *group_of, group_count; /* of each atom: its residue, or, where no residue is of a polymer, itself */
    bool *unit, polymer; /* of each residue: it is an amino acid or a nucleotide; whether any is, groups are residues then */
    int32_t *residue_of, *residues, residue_count; /* of each atom, into `residues`; and these into the models' own */
    bool *candidate;                               /* of each atom: it was chosen */
    bool *core;                                    /* of each group */
    int32_t *fitted, fitted_count;                 /* candidates of the core: what is superposed */
    tml_core_kind kind;
    char *core_text, *atoms_text; /* as asked */
    bool heavy_instead;           /* there is no backbone; heavy atoms stand for it, or all where there are none */
    bool alone;                   /* one model: the core is all of it */
    double met;                   /* the cutoff that the core met, see tml_core_find */
    double *places, **xyz;        /* superposed: model by model, atom_count * 3 */
    double *mean, *spread;        /* of each atom: place, r.m.s. distance from it */
    tml_torsion_order *order;     /* of each of the models' residues */
    float *pairs;                 /* packed triangle, see tml_pair_index; NULL for one model */
    double pair_mean, pair_least, pair_greatest;
    double *to_others, *to_mean, mean_to_mean;
    int32_t medoid;
    int32_t *cluster, cluster_count,
        *representatives; /* of each model; of each cluster its model nearest to the others in it */
    double cut;           /* the greatest height of a merge made */
    bool cut_given;
    double cut_asked;
    tml_reference reference;
};

/* The comparison of what was read: tml_compare without the reading.
 *
 * models, reference  taken over, and left empty, after a failure too; reference may be NULL
 */
tml_status tml_compare_coordinates(tml_coordinates *models, tml_coordinates *reference, const tml_compare_options *options,
                                   const tml_watch *watch, tml_comparison **out, tml_error *error);

/* Whether a core is asked for in words that can be understood. TML_OK or TML_BAD_INPUT. */
tml_status tml_core_check(const char *core, tml_error *error);

/* R.m.s. distances between all models after superposition on the chosen atoms, as a packed triangle.
 *
 * out   the caller frees it; NULL for one model
 * Returns TML_OK, TML_TOO_LARGE (pairs need more than half of the memory that is free), TML_NO_MEMORY or TML_INTERRUPTED.
 */
tml_status tml_pairs_measure(const tml_stack *stack, const int32_t *chosen, int32_t chosen_count, int threads,
                             const tml_watch *watch, float **out, tml_error *error);

/* The mean distance of each to the others; the index of the one with the least, the first among equals. to_others: filled. */
int32_t tml_pairs_medoid(const float *pairs, int32_t count, double *to_others);

/* The last step: match with the reference's coordinates, which are there, and measure. */
tml_status tml_compare_reference(tml_comparison *c, int threads, const tml_watch *watch, tml_error *error);
void tml_reference_clear(tml_reference *reference);

static inline const tml_site *tml_compared_site(const tml_comparison *c, int32_t atom) {
    return &c->models.atoms[c->sites[atom]];
}

#endif
