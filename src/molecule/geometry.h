/* geometry.h: distances that a molecule's bonds, angles and planar groups fix, by pair of atoms.
 *
 * A tml_geometry owns its table; tml_geometry_clear frees it. Å.
 */
#ifndef TML_GEOMETRY_H
#define TML_GEOMETRY_H

#include "molecule/molecule.h"

typedef struct tml_geometry { uint64_t *keys; double *values; size_t slots, used; } tml_geometry;

/* The kinds of distance, in the order in which they are looked for: a pair is visited once, by the first that fixes it. */
typedef enum tml_fixed { TML_FIXED_BOND, TML_FIXED_ANGLE, TML_FIXED_PLANE } tml_fixed;

/* Add all bonds, 1-3 distances and distances within planar groups of known shape. visit, where not NULL, is told of each; a false
 * return ends it. Returns false without memory or where visit does. */
bool tml_geometry_fill(tml_geometry *geometry, const tml_molecule *molecule,
                       bool (*visit)(void *context, tml_fixed fixed, int32_t a, int32_t b, double length), void *context);
void tml_geometry_clear(tml_geometry *geometry);

/* The fixed distance of a pair; NAN where there is none. */
double tml_geometry_distance(const tml_geometry *geometry, int32_t a, int32_t b);

/* Distance a-d for a torsion a-b-c-d at `angle`, from the five other distances; NAN where one of these is not fixed. */
double tml_geometry_across(const tml_geometry *geometry, int32_t a, int32_t b, int32_t c, int32_t d, double angle);

/* Every pair of the table, in no particular order. */
bool tml_geometry_each(const tml_geometry *geometry, bool (*visit)(void *context, int32_t a, int32_t b), void *context);

#endif
