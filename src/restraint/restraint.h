/* restraint.h: restraints of a molecule, with every name resolved to atoms.
 *
 * A tml_restraints owns its arrays; map.h fills it, everything later only reads it. A distance restraint is a set of
 * alternatives. Each alternative is a pair of atom groups: all pairs (a, b), a from the first and b from the second, a != b,
 * enter the sum (Σ r⁻⁶)^(-1/6), which runs over the pairs of all alternatives. Where alternatives carry combinations, those of
 * one combination hold together, each by its own sum, and the combination that is violated least counts.
 *
 * Names with x and y (HBx, HBy) mean the two members of a stereo pair that nobody has told apart. Which member x is, is open and
 * is chosen for each model: `swapped`, an array with an element for each stereo pair, says where x is the second member. With
 * NULL in its place, names with x or y mean both members.
 */
#ifndef TML_RESTRAINT_H
#define TML_RESTRAINT_H

#include "molecule/molecule.h"
#include "restraint/rows.h"

typedef enum tml_range { TML_RANGE_INTRA, TML_RANGE_SEQUENTIAL, TML_RANGE_MEDIUM, TML_RANGE_LONG, TML_RANGE_INTER_CHAIN } tml_range;
enum { TML_RANGE_COUNT = 5 };

/* A stereo pair that is open. Its members (one atom each, or as many as hang on the branch) are in stereo_members. */
typedef struct tml_stereo { int32_t residue, first_member, member_count; } tml_stereo;
typedef struct tml_stereo_member { int32_t stereo, first, second; } tml_stereo_member; /* atoms that stand for each other */

/* A side with an open stereo pair (index, otherwise -1) holds the atoms of its first member, then those of the second in the same
 * order; only one half counts: the second where `second` (the name has y) and not swapped, or swapped and not second. */
typedef struct tml_alternative {
    int32_t first_a, count_a, first_b, count_b; /* into group_atoms */
    int32_t pair_count;                         /* pairs (a, b) with a != b, over both members of open pairs */
    int32_t combination;                        /* within its restraint; one's alternatives stand together. -1: alone */
    int32_t stereo_a, stereo_b;
    bool second_a, second_b;
    bool centre_a, centre_b;                    /* that side is one point, the centre of its atoms */
} tml_alternative;

typedef struct tml_distance_restraint {
    const char *list, *id;
    double lower, upper; /* Å; 0 and INFINITY where open */
    double weight;
    int32_t first_alternative, alternative_count;
    int32_t pair_count;  /* over all alternatives */
    bool average, combined; /* combined: some alternatives carry combinations */
    tml_range range;        /* by the alternative nearest in sequence */
    tml_place place;
} tml_distance_restraint;

/* One interval of a dihedral, radians: from lower upwards to upper, lower <= upper <= lower + 2 pi. */
typedef struct tml_dihedral_interval { int32_t atoms[4]; double lower, upper; } tml_dihedral_interval;

/* A dihedral restraint: any one of its intervals suffices. */
typedef struct tml_dihedral_restraint {
    const char *list, *id;
    double weight;
    int32_t first_interval, interval_count;
    tml_place place;
} tml_dihedral_restraint;

/* A restraint that names atoms which the molecule lacks. */
typedef struct tml_unmapped { const char *list, *id, *reason; tml_place place; bool dihedral; } tml_unmapped;

typedef struct tml_restraints {
    tml_distance_restraint *distances; int32_t distance_count;
    tml_alternative *alternatives;     int32_t alternative_count;
    int32_t *group_atoms;              int32_t group_atom_count;
    tml_dihedral_restraint *dihedrals; int32_t dihedral_count;
    tml_dihedral_interval *intervals;  int32_t interval_count;
    tml_unmapped *unmapped;            int32_t unmapped_count;
    tml_stereo *stereo;                int32_t stereo_count;
    tml_stereo_member *stereo_members; int32_t stereo_member_count;
} tml_restraints;

void tml_restraints_clear(tml_restraints *restraints);

/* The atoms of an alternative's sides that count with these assignments. */
typedef struct tml_group { const int32_t *atoms; int32_t count; } tml_group;
void tml_alternative_sides(const tml_restraints *restraints, const tml_alternative *alternative, const bool *swapped, tml_group *a,
                           tml_group *b);

/* Whether a stereo pair of one of its sides is open. */
static inline bool tml_alternative_open(const tml_alternative *alternative) {
    return alternative->stereo_a >= 0 || alternative->stereo_b >= 0;
}

/* Whether a side of it is the centre of a group. */
static inline bool tml_alternative_centred(const tml_alternative *alternative) {
    return alternative->centre_a || alternative->centre_b;
}

/* (Σ r⁻⁶)^(-1/6) of one alternative or of a whole restraint without combinations; xyz holds atom_count*3 Å. */
double tml_alternative_distance(const tml_restraints *restraints, const tml_alternative *alternative, bool average, const bool *swapped,
                                const double *xyz);
double tml_restraint_distance(const tml_restraints *restraints, const tml_distance_restraint *restraint, const bool *swapped,
                              const double *xyz);

/* The share of a restraint's Σ r⁻⁶ that pairs between different chains have, 0 to 1; NAN where all alternatives lie within chains or
 * all between them, so that nothing is to be told apart. */
double tml_between_chains(const tml_restraints *restraints, const tml_molecule *molecule, const tml_distance_restraint *restraint,
                          const bool *swapped, const double *xyz);

/* By how much a restraint is violated: Å beyond a limit (positive above, negative below the lower; 0 within); radians, >= 0. Atoms
 * whose coordinates are NAN are missing: sums run over the pairs that are there, and NAN comes out where there is none. */
double tml_distance_violation(const tml_restraints *restraints, const tml_distance_restraint *restraint, const bool *swapped,
                              const double *xyz);
/* Choose which member of each open stereo pair is x so that the squares of violations add up to least, pair after pair until none
 * changes. swapped: stereo_count elements, as they are to start with. */
void tml_stereo_choose(const tml_restraints *restraints, const double *xyz, bool *swapped);

double tml_dihedral_violation(const tml_restraints *restraints, const tml_dihedral_restraint *restraint, const double *xyz);

#endif
