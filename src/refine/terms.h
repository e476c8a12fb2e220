/* terms.h: the error function's terms as flat arrays, made once per problem and read by every thread.
 *
 * A tml_refiner owns all its arrays. Pair arrays are padded to multiples of four with pairs of two dummy atoms, n and n+1,
 * which stand 1 Å apart and feel no force. Lengths in Å, angles in radians.
 */
#ifndef TML_TERMS_H
#define TML_TERMS_H

#include "bounds/radii.h"
#include "refine/refine.h"

/* Two atoms at a wanted distance. */
typedef struct tml_pair { int32_t a, b; } tml_pair;
typedef struct tml_spring_set { tml_pair *pairs; double *length; int32_t count, capacity; } tml_spring_set; /* padded */

/* A centre with three or four arms and the wanted signed volumes of its triples (0,1,2), (0,1,3), (0,2,3), (1,2,3). */
typedef struct tml_volume_term { int32_t centre, arms[4]; double volume[4]; } tml_volume_term;

/* A distance restraint: its pairs stand in pair arrays from first_pair on, padded to a multiple of four. */
typedef struct tml_sum_term {
    int32_t first_pair, pair_count; /* pair_count without padding */
    double lower, upper, weight;
    double share;                   /* 1, or 1 / number of pairs where the sum is an average */
    double least, most;             /* Σ r⁻⁶ between these: within both limits */
    int32_t combination;            /* within its choice */
    int32_t first_open, open_count; /* its open pairs */
    int32_t both;                   /* into both_sums: the same with both members of open stereo pairs; -1 where none is open */
} tml_sum_term;

/* A pair of a sum whose ends depend on which member of a stereo pair (index, otherwise -1) is x: its place among the pairs, and
 * its ends where that stereo pair is not swapped and where it is. */
typedef struct tml_open_pair { int32_t at, stereo_a, stereo_b, a[2], b[2]; } tml_open_pair;

/* A restraint from centres of groups: Σ r⁻⁶ over the distances between its points, two by two. Points are means of atoms. */
typedef struct tml_centre_point { int32_t first, count; } tml_centre_point; /* into centre_atoms */
typedef struct tml_centre_term { int32_t first_point, pair_count; double lower, upper, weight, share; } tml_centre_term;

/* That a single sum, or otherwise a choice, hangs on a stereo pair; the other index is -1. */
typedef struct tml_open_use { int32_t stereo, sum, choice; } tml_open_use;

/* A restraint whose alternatives carry combinations: sums [first_sum, first_sum + sum_count); the combination of least error
 * counts. */
typedef struct tml_choice_term { int32_t first_sum, sum_count; } tml_choice_term;

typedef struct tml_torsion_term { int32_t first_interval, interval_count; double weight; } tml_torsion_term;

/* A backbone's phi and psi: atoms C N CA C N; for the preference of usual regions. */
typedef struct tml_backbone_term { int32_t atoms[5]; bool glycine, proline; } tml_backbone_term;

/* The middle of a dihedral interval and the cosine of half its width: a torsion is inside where cos(angle - middle) >= least. */
typedef struct tml_torsion_arc { double cosine, sine, least; } tml_torsion_arc;

/* One usual region of phi and psi: a product of two von Mises hills. */
enum { TML_BASINS = 5 };
typedef struct tml_basin { double cos_phi, sin_phi, cos_psi, sin_psi, phi_sharp, psi_sharp, share; } tml_basin;

struct tml_refiner {
    const tml_problem *problem;
    int32_t atom_count;
    tml_spring_set bonds, angles, planars;
    tml_volume_term *volumes;  int32_t volume_count;
    tml_volume_term *flats;    int32_t flat_count;   /* three arms, volume 0 */
    tml_sum_term *sums;        int32_t sum_count;    /* single restraints first, then those of choices */
    int32_t single_count;
    tml_sum_term *both_sums;   int32_t both_count; /* for the hot phase, which leaves stereo pairs untold */
    tml_pair *sum_pairs;       int32_t sum_pair_count; /* with no stereo pair swapped */
    tml_choice_term *choices;   int32_t choice_count;
    tml_centre_term *centres;   int32_t centre_count;
    tml_centre_point *points_of_centres; int32_t centre_point_count;
    int32_t *centre_atoms;      int32_t centre_atom_count;
    tml_open_pair *open_pairs;  int32_t open_pair_count;
    tml_open_use *open_uses;    int32_t open_use_count; /* by stereo pair */
    tml_torsion_term *torsions; int32_t torsion_count;
    tml_torsion_arc *arcs;             /* per dihedral interval */
    int32_t *points;           /* of the molecule's first set of alike chains, then of the next: places among its atoms … */
    int32_t *point_first;      /* … set s has points[point_first[s] … point_first[s+1]-1]; none for more than three copies */
    tml_basin basins[TML_BASINS];
    tml_backbone_term *backbones; int32_t backbone_count;
    tml_contacts contacts;             /* what repels whom, and from how near */
    uint64_t (*near_mask)[2];  /* bit d-1 of atom i: atom i+d is not repelled */
    int32_t *far_first, *far;  /* the same for partners 129 and more ahead: far[far_first[i] … far_first[i+1]-1] */
};

#endif
