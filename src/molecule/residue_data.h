/* residue_data.h: the built-in residues as tables: atoms, ideal geometry, planes, handedness.
 *
 * Everything is constant data; template.c looks rows up, terms.c turns them into the terms of a molecule. Atom names of the
 * neighbouring residues begin with '-' (the one before) or '+' (the one after). Lengths in Å, angles in degrees. Each list of
 * rows ends with one whose first name is NULL. Where several rows would do, the first one counts.
 *
 * A condition says for which forms of a residue a row holds: "" for all, "+HD2" if it has HD2, "-HE2+HD1" if it lacks HE2 and
 * has HD1.
 */
#ifndef TML_RESIDUE_DATA_H
#define TML_RESIDUE_DATA_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

/* One atom and the bond that ties it to an atom named earlier; parent "" for the first atom. */
typedef struct tml_atom_row {
    const char *name, *parent;
    double length; /* of the bond to the parent */
    bool optional; /* not there unless a variant or a chain's end adds it */
} tml_atom_row;

typedef struct tml_bond_row { const char *a, *b; double length; const char *condition; } tml_bond_row;

typedef struct tml_angle_row { const char *a, *b, *c; double degrees; const char *condition; } tml_angle_row;

/* What is known of rotation about b-c, for one pair of outer atoms; the others follow from the arms of b and c. */
typedef struct tml_torsion_row { const char *a, *b, *c, *d; double degrees, tolerance; } tml_torsion_row;

/* Sign of (a1-c)·((a2-c)×(a3-c)). */
typedef struct tml_centre_row { const char *c, *a1, *a2, *a3; int8_t sign; } tml_centre_row;

typedef struct tml_charge_row { const char *atom; int8_t charge; const char *condition; } tml_charge_row;

typedef struct tml_template {
    const char *name;
    const tml_atom_row *atoms;
    const tml_bond_row *bonds;       /* ring closures, and other lengths than the atoms' rows give */
    const tml_angle_row *angles;
    const tml_torsion_row *torsions;
    const tml_centre_row *centres;
    const tml_charge_row *charges;
    const char *const *planes;       /* atom names apart by blanks; ends with NULL */
} tml_template;

extern const tml_template tml_templates[]; /* ends with a NULL name */
extern const tml_template tml_backbone;    /* rows that hold for every amino acid that has none of its own; no atoms */

/* What a chain's end does to its first or last residue: atoms taken away and added, as in a variant. */
typedef struct tml_end_row { const char *residue, *charged, *neutral; } tml_end_row; /* residue "" for all others */
extern const tml_end_row tml_first_ends[], tml_last_ends[];

#endif
