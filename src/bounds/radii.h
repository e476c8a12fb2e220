/* radii.h: how near two atoms come that no bond, angle or torsion holds.
 *
 * Two limits for each pair: a floor that good structures never fall below, for bounds and proofs, and a softer, larger contact
 * distance for the repulsion term. Both follow from the elements' van der Waals radii (elements.h), with less for pairs that may
 * form a hydrogen bond, a disulfide or a metal site. Beads have neither. Å.
 */
#ifndef TML_RADII_H
#define TML_RADII_H

#include "molecule/molecule.h"

double tml_hard_floor(const tml_molecule *molecule, int32_t a, int32_t b);
double tml_soft_contact(const tml_molecule *molecule, int32_t a, int32_t b);

/* The same by classes of atoms: those of one element and, for hydrogens, of one polarity, are alike. */
typedef struct tml_contacts {
    uint8_t *class_of;   /* per atom */
    int32_t class_count;
    float *hard, *soft;  /* class_count² */
    float *reach;        /* per class: its largest soft contact */
    float longest;       /* of all */
} tml_contacts;

/* TML_OK or TML_NO_MEMORY; tml_contacts_clear frees, after a failure too. */
tml_status tml_contacts_make(const tml_molecule *molecule, tml_contacts *out);
void tml_contacts_clear(tml_contacts *contacts);

#endif
