/* rows.h: restraints as the inputs write them, before names are matched with atoms.
 *
 * Readers fill tml_rows; restraint/map.c turns them into restraints of a molecule. Strings belong to the string pool. Atom
 * names may hold NEF wildcards (`%` any digits, `*` anything) and `x`/`y` for a stereo pair not yet told apart.
 */
#ifndef TML_ROWS_H
#define TML_ROWS_H

#include "molecule/outline.h"

/* What a file says of a row beside its limits: kept for writing it again, and no part of the restraint. All zero for nothing. */
typedef struct tml_row_beside {
    bool values;                                          /* the four below are given; NAN where one is open */
    double target, uncertainty, lower_linear, upper_linear;
    const char *origin, *potential, *angle;               /* of its list: where it comes from, its potential; a torsion's name. NULL for none */
} tml_row_beside;

/* One row of a distance restraint. Rows of one file with the same list and id are alternatives (OR), but for those that are
 * `alone`, whose ids are not the user's; rows that share, within an id, a combination other than "" hold together (AND).
 * Several addresses on one side are alternatives that multiply out. */
typedef struct tml_distance_row {
    const char *list, *id, *combination;
    int32_t first_a, count_a, first_b, count_b; /* into tml_rows.addresses */
    double lower, upper;                        /* Å; NAN where the input leaves a limit open */
    double weight;
    tml_row_beside beside;
    bool average;                               /* divide the sum of r^-6 by the number of pairs */
    bool alone;
    tml_place place;
} tml_distance_row;

/* One row of a dihedral restraint, degrees as written: the interval runs upwards from lower to upper, modulo 360. */
typedef struct tml_dihedral_row {
    const char *list, *id, *combination;
    tml_address atoms[4];
    double lower, upper;
    double weight;
    tml_row_beside beside;
    bool alone;
    tml_place place;
} tml_dihedral_row;

typedef struct tml_rows {
    tml_distance_row *distances; size_t distance_count, distance_capacity;
    tml_dihedral_row *dihedrals; size_t dihedral_count, dihedral_capacity;
    tml_address *addresses;      size_t address_count, address_capacity;
} tml_rows;

/* Append a row; the addresses, count_a of side a and count_b of side b, are copied and first_a, first_b set. false without
 * memory. */
bool tml_rows_add_distance(tml_rows *rows, const tml_distance_row *row, const tml_address *addresses);
bool tml_rows_add_dihedral(tml_rows *rows, const tml_dihedral_row *row);

void tml_rows_clear(tml_rows *rows);

#endif
