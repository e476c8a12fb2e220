/* outline.h: what the inputs say of the molecule, before it has atoms.
 *
 * Readers fill an outline; molecule/build.c turns it into a tml_molecule. All strings belong to the string pool that the
 * outline was made with. Nothing here has been checked against chemistry yet.
 */
#ifndef TML_OUTLINE_H
#define TML_OUTLINE_H

#include "base/memory.h"
#include "base/place.h"
#include "molecule/component.h"

/* How a residue is linked along its chain; by default worked out from its neighbours in the outline. */
typedef enum tml_linking {
    TML_LINKING_DEFAULT,
    TML_LINKING_START,  /* free N terminus */
    TML_LINKING_MIDDLE,
    TML_LINKING_END,    /* free C terminus */
    TML_LINKING_SINGLE, /* a whole molecule by itself */
    TML_LINKING_BREAK,  /* linked to a residue that is not in the sequence: no end groups on that side */
    TML_LINKING_CYCLIC  /* first or last residue of a ring-closed chain */
} tml_linking;

typedef enum tml_ends { TML_ENDS_CHARGED, TML_ENDS_NEUTRAL, TML_ENDS_OPEN } tml_ends;

typedef struct tml_outline_residue {
    const char *chain, *number, *name; /* chain code, sequence code as written, residue name */
    const char *variant;               /* atoms added or taken away, as in NEF ("-HD2,+HE2"); "" for none */
    tml_linking linking;
    bool cis, trans;                   /* the peptide bond between this residue and the next is declared so */
    tml_place place;
} tml_outline_residue;

/* A single atom that belongs to no residue template. chain, number and residue are "" for a bare name. */
typedef struct tml_outline_atom {
    const char *chain, *number, *residue, *name;
    int element; /* atomic number; 0 for a bead */
    tml_place place;
} tml_outline_atom;

/* One atom, addressed by names. chain and number are "" for a bare atom. */
typedef struct tml_address {
    const char *chain, *number, *residue, *atom; /* residue "" where the input does not give it */
    tml_place place;
} tml_address;

typedef struct tml_outline_link { tml_address a, b; tml_place place; } tml_outline_link;

/* The sign of (a1-c)·((a2-c)×(a3-c)) for centre c and arms a1, a2, a3. */
typedef struct tml_outline_chiral { tml_address centre, arm[3]; int sign; tml_place place; } tml_outline_chiral;

typedef struct tml_outline_plane {
    tml_address *atoms; /* owned by the outline */
    size_t atom_count;
    double within;      /* Å */
    tml_place place;
} tml_outline_plane;

/* Chains that are the same molecule and take the same shape. */
typedef struct tml_outline_alike {
    const char **chains; /* owned by the outline */
    size_t chain_count;
    tml_place place;
} tml_outline_alike;

typedef struct tml_outline_ends { const char *chain; tml_ends ends; tml_place place; } tml_outline_ends;

typedef struct tml_outline {
    tml_outline_residue *residues; size_t residue_count, residue_capacity;
    tml_outline_atom *atoms;       size_t atom_count, atom_capacity;
    tml_outline_link *links;       size_t link_count, link_capacity;
    tml_outline_chiral *chirals;   size_t chiral_count, chiral_capacity;
    tml_outline_plane *planes;     size_t plane_count, plane_capacity;
    tml_outline_ends *ends;        size_t ends_count, ends_capacity;
    tml_component **components;    size_t component_count, component_capacity; /* owned; those that residues name are made */
    tml_outline_alike *alike;      size_t alike_count, alike_capacity;
} tml_outline;

/* State that all chains of the same residues are alike, but for those that are stated to be already. false without memory. */
bool tml_outline_find_alike(tml_outline *outline);

void tml_outline_clear(tml_outline *outline); /* frees what the outline owns and zeroes it */

#endif
