/* residue_data.h: residues as tables: atoms, ideal geometry, planes, handedness.
 *
 * The built-in ones are constant data, component.c makes others; lookup.c looks rows up, terms.c turns them into the terms of a molecule. Atom names of the
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

#include "molecule/polymer.h"

enum { TML_OPTIONAL = 1, TML_LEAVING = 2 };

/* One atom and the bond that ties it to another; the bonds to parents hang together without rings. parent "" for the first atom. */
typedef struct tml_atom_row {
    const char *name, *parent;
    double length;    /* of the bond to the parent */
    uint8_t optional; /* TML_OPTIONAL: not there unless a variant or a chain's end adds it; TML_LEAVING: there until a bond takes its place */
    uint8_t element; /* atomic number; 0: the name's first letter tells */
} tml_atom_row;

typedef struct tml_bond_row { const char *a, *b; double length; const char *condition; } tml_bond_row;

typedef struct tml_angle_row { const char *a, *b, *c; double degrees; const char *condition; } tml_angle_row;

/* What is known of rotation about b-c, for one pair of outer atoms; the others follow from the arms of b and c. */
typedef struct tml_torsion_row { const char *a, *b, *c, *d; double degrees, tolerance; } tml_torsion_row;

/* Sign of (a1-c)·((a2-c)×(a3-c)). */
typedef struct tml_centre_row { const char *c, *a1, *a2, *a3; int8_t sign; } tml_centre_row;

typedef struct tml_charge_row { const char *atom; int8_t charge; const char *condition; } tml_charge_row;

typedef struct tml_family tml_family;

typedef struct tml_template {
    const char *name;
    const tml_family *family;
    const tml_atom_row *atoms;
    const tml_bond_row *bonds;       /* ring closures, and other lengths than the atoms' rows give */
    const tml_angle_row *angles;
    const tml_torsion_row *torsions;
    const tml_centre_row *centres;
    const tml_charge_row *charges;
    const char *const *planes;       /* atom names apart by blanks; ends with NULL */
} tml_template;

/* What a chain's end does to its first or last residue: atoms taken away and added, as in a variant. */
typedef struct tml_end_row { const char *residue, *charged, *neutral; } tml_end_row; /* residue "" for all others */

/* What residues of one kind have in common. */
struct tml_family {
    tml_polymer polymer;
    const char *tail, *head;   /* along a chain, a bond leads from a residue's tail atom to the next one's head; "" for none */
    const tml_template *common; /* rows that count where a residue has none of its own; no atoms */
    const tml_end_row *first_ends, *last_ends;
};

extern const tml_family tml_protein_family, tml_nucleic_family, tml_lone_family; /* lone: residues that form no chains */
extern const tml_template tml_amino_acids[], tml_nucleotides[]; /* each ends with a NULL name */

/* builtin.c: all built-in residues, one after the other; NULL past the last. And by name; NULL for none. */
const tml_template *tml_builtin(int32_t index);
const tml_template *tml_find_builtin(const char *name);

#endif
