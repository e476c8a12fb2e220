/* restraint.h: restraints of a molecule, with every name resolved to atoms.
 *
 * A tml_restraints owns its arrays; map.h fills it, everything later only reads it. A distance restraint is a set of
 * alternatives. Each alternative is a pair of atom groups: all pairs (a, b), a from the first and b from the second, a != b,
 * enter the sum (Σ r⁻⁶)^(-1/6), which runs over the pairs of all alternatives. Where alternatives carry combinations, those of
 * one combination hold together, each by its own sum, and the combination that is violated least counts.
 */
#ifndef TML_RESTRAINT_H
#define TML_RESTRAINT_H

#include "molecule/molecule.h"
#include "restraint/rows.h"

typedef enum tml_range { TML_RANGE_INTRA, TML_RANGE_SEQUENTIAL, TML_RANGE_MEDIUM, TML_RANGE_LONG, TML_RANGE_INTER_CHAIN } tml_range;
enum { TML_RANGE_COUNT = 5 };

typedef struct tml_alternative {
    int32_t first_a, count_a, first_b, count_b; /* into group_atoms */
    int32_t pair_count;                         /* pairs (a, b) with a != b */
    int32_t combination;                        /* within its restraint; one's alternatives stand together. -1: alone */
    bool equivalent;                            /* each side is one atom or one group of equivalent atoms */
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
} tml_restraints;

void tml_restraints_clear(tml_restraints *restraints);

/* (Σ r⁻⁶)^(-1/6) of one alternative or of a whole restraint without combinations; xyz holds atom_count*3 Å. */
double tml_alternative_distance(const tml_restraints *restraints, const tml_alternative *alternative, bool average, const double *xyz);
double tml_restraint_distance(const tml_restraints *restraints, const tml_distance_restraint *restraint, const double *xyz);

/* By how much a restraint is violated: Å beyond a limit (positive above, negative below the lower; 0 within); radians, >= 0. */
double tml_distance_violation(const tml_restraints *restraints, const tml_distance_restraint *restraint, const double *xyz);
double tml_dihedral_violation(const tml_restraints *restraints, const tml_dihedral_restraint *restraint, const double *xyz);

#endif
