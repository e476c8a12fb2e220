/* sites.h: where a molecule's atoms are in models that others made: atoms matched by chain, residue number and name.
 *
 * A tml_sites owns its array; the molecule and the coordinates are borrowed while it is made.
 */
#ifndef TML_SITES_H
#define TML_SITES_H

#include "input/coordinates.h"
#include "molecule/molecule.h"

typedef struct tml_sites {
    int32_t *of;            /* per atom of the molecule: its site, -1 where the models have none */
    int32_t missing;        /* atoms without a site */
    int32_t left;           /* sites, but for waters, that no atom took */
    int32_t first_missing, first_left; /* an atom, a site; -1 for none */
    int32_t renamed_chains; /* chains whose code differs, matched by their residues */
    int32_t other_residues; /* residues that are there by number, but of another name */
    int32_t first_other;    /* such a residue of the molecule; -1 */
} tml_sites;

/* Match. A chain whose code the models lack takes one of theirs that no other chain takes and whose residues agree best with its
 * own in number and name, at least half of them. H, HN and H1 of one residue are the same atom. TML_OK or TML_NO_MEMORY; cleared with
 * tml_sites_clear in any case. */
tml_status tml_sites_match(const tml_molecule *molecule, const tml_coordinates *models, tml_sites *out, tml_error *error);
void tml_sites_clear(tml_sites *sites);

/* Coordinates of one model in the molecule's order, NAN for atoms without a site; xyz has room for atom_count * 3. */
void tml_sites_place(const tml_sites *sites, const tml_molecule *molecule, const tml_coordinates *models, int32_t model, double *xyz);

#endif
