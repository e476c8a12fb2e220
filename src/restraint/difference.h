/* difference.h: two problems, restraint by restraint: what both have, and where they differ.
 *
 * Restraints are compared by what they mean, not by their names: sets of atom pairs and limits. Atoms correspond by chain, residue
 * number and name; a chain whose code the other problem lacks corresponds to the chain of the same residues. A tml_difference owns its
 * arrays; the problems are borrowed.
 */
#ifndef TML_DIFFERENCE_H
#define TML_DIFFERENCE_H

#include "input/problem.h"

/* How two restraints belong together, or one has no partner. */
typedef enum tml_relation {
    TML_SAME,         /* same pairs, same limits */
    TML_OTHER_LIMITS, /* same pairs, other limits (or interval) */
    TML_WITHIN,       /* same limits; the pairs of one are among those of the other: one file leaves open what the other tells */
    TML_OTHER_ATOMS,  /* same limits and residues, other atoms */
    TML_ONLY_ONE, TML_ONLY_OTHER
} tml_relation;
enum { TML_RELATION_COUNT = 6 };

/* Indices of restraints of the two problems, -1 for none. */
typedef struct tml_related { tml_relation relation; int32_t one, other; } tml_related;

typedef struct tml_difference {
    const tml_problem *one, *other;
    tml_related *distances; int32_t distance_count;
    tml_related *dihedrals; int32_t dihedral_count;
    int32_t distance_of[TML_RELATION_COUNT], dihedral_of[TML_RELATION_COUNT]; /* how many of each */
    int32_t atoms_only_one, atoms_only_other;   /* atoms that the other problem lacks */
    int32_t first_only_one, first_only_other;   /* the first of each, -1 */
    int32_t bonds_only_one, bonds_only_other;   /* bonds between atoms of both, in one alone */
} tml_difference;

/* Compare. TML_OK, TML_TOO_LARGE or TML_NO_MEMORY; tml_difference_clear frees, after a failure too. */
tml_status tml_difference_find(const tml_problem *one, const tml_problem *other, tml_difference *out, tml_error *error);
void tml_difference_clear(tml_difference *difference);

#endif
