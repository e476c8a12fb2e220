/* names.h: which atoms of a residue a name in a restraint means.
 *
 * Exact names first; then NEF 1.1: `%` stands for digits, `*` for anything, `x` and `y` for the members of a stereo pair not
 * yet told apart (both are taken); then the pseudo-atoms of Markley et al., Pure Appl. Chem. 70 (1998) 117 (Q…, M…).
 */
#ifndef TML_NAMES_H
#define TML_NAMES_H

#include "molecule/molecule.h"

typedef enum tml_name_kind { TML_NAME_EXACT, TML_NAME_WILD, TML_NAME_PSEUDO, TML_NAME_AMIDE } tml_name_kind;

/* Atoms of a residue that `name` means, in atom order; returns their number, 0 for none. `atoms` has room for all atoms of the
 * residue. *kind tells by which rule; TML_NAME_AMIDE is H or HN for the first hydrogen of a charged N terminus, or HN for H. */
int32_t tml_names_match(const tml_molecule *molecule, int32_t residue, const char *name, int32_t *atoms, tml_name_kind *kind);

/* The two members of the stereo pair that a name with one x or y means: `half` atoms of the first, then as many of the second in
 * the same order; *second tells that the name has y. false where the name means no such pair: the atoms are then those of
 * tml_names_match alone. `atoms` has room for all atoms of the residue. */
bool tml_names_stereo(const tml_molecule *molecule, int32_t residue, const char *name, int32_t *atoms, int32_t *half, bool *second);

#endif
