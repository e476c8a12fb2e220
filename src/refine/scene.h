/* scene.h: one thread's coordinates, forces and neighbour list while it refines a model.
 *
 * A scene owns its arrays; the refiner it was made for is borrowed. Atoms n and n+1 are dummies, 1 Å apart, for padding.
 */
#ifndef TML_SCENE_H
#define TML_SCENE_H

#include "base/target.h"
#include "refine/terms.h"

typedef struct tml_scene {
    const tml_refiner *refiner;
    tml_v4 *x, *f, *v;       /* n + 2 positions (Å), forces and velocities */
    tml_v4 *listed_at;       /* positions when the neighbour list was made */
    tml_pair *near;          /* pairs that may touch before the next list; padded to a multiple of four */
    float *near_contact;     /* their contact distances, Å */
    int32_t near_count;      /* with padding */
    size_t near_capacity, contact_capacity;
    double skin;             /* how much farther than contact the list reaches, Å; negative: no list */
    bool heavy_only;         /* hydrogens are left out of the list */
    tml_pair *sum_pairs;     /* the refiner's, with the swapped stereo pairs' members exchanged */
    bool *swapped;           /* per stereo pair of the restraints */
    bool both;               /* both members of open stereo pairs count, summed, whatever is assigned */
    double *copies;          /* work space of alike.c: two copies of a chain */
    struct tml_cells *cells; /* work space of neighbour.c */
} tml_scene;

tml_status tml_scene_new(const tml_refiner *refiner, tml_scene **out, tml_error *error);
void tml_scene_free(tml_scene *scene);

void tml_scene_load(tml_scene *scene, const double *xyz);       /* positions from atom_count*3 doubles */
void tml_scene_store(const tml_scene *scene, double *xyz);

/* Whether hydrogens repel; a change calls for a new list. */
void tml_scene_repel_hydrogens(tml_scene *scene, bool repel);

/* Make the neighbour list for the present positions, reaching `skin` Å beyond contact. TML_OK or TML_NO_MEMORY. */
tml_status tml_scene_list(tml_scene *scene, double skin);

/* The same, only if some atom has moved by more than half the skin since the last list. */
tml_status tml_scene_relist(tml_scene *scene, double skin);

/* Weights of the error function's terms, and where some bend from quadratic to linear. */
typedef struct tml_weights {
    double bond, angle, planar;              /* k of k·(d - d0)² */
    double volume, flat;                     /* k of k·(V - V0)², V in Å³ */
    double plane;                            /* k of k·Σ (distance from the best plane)²; 0 leaves the term out */
    double restraint, restraint_bend;        /* k·δ² up to bend Å; then with a slope that fades over `restraint_fade` Å */
    double restraint_fade;
    double dihedral, dihedral_bend;          /* k·δ², linear beyond bend radians */
    double repulsion, radius_scale;          /* k·(scale·contact - d)² where closer */
    double alike;                            /* k·(distance after superposition)² of atoms of chains that are alike */
    double symmetric, symmetric_bend;        /* k/points·(difference of distances that symmetry makes equal)², linear beyond bend Å */
    double backbone;                         /* height of the preference for usual phi and psi; 0 leaves it out */
} tml_weights;

/* Energy of what keeps chains alike, its forces added to scene->f. */
double tml_alike_energy(tml_scene *scene, const tml_weights *weights);

/* Let every open stereo pair take the assignment of less error at the scene's positions, one after the other until none changes.
 * Returns whether any did. */
bool tml_scene_assign(tml_scene *scene, const tml_weights *weights);

/* Energy of one restraint that hangs on a stereo pair, at the scene's positions and assignments. */
double tml_energy_of_use(const tml_scene *scene, const tml_open_use *use, const tml_weights *weights);

/* The error function at the scene's positions; forces (its negative gradient) go to scene->f. */
double tml_energy(tml_scene *scene, const tml_weights *weights);

#endif
