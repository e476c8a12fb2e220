/* fragment.h: a part of a problem as a problem of its own. */
#ifndef TML_FRAGMENT_H
#define TML_FRAGMENT_H

#include "input/problem.h"

/* The atoms with keep[i], the covalent terms wholly within them and the restraints all of whose atoms are among them.
 *
 * out      the caller frees it with tml_fragment_free before `problem`, whose strings it borrows; residues keep their names. It has no look-up
 *          tables (bonds of neighbours, angles by atom, torsions by bond), so its peptide bonds can't be set anew
 * Returns TML_OK or TML_NO_MEMORY.
 */
tml_status tml_fragment_make(const tml_problem *problem, const bool *keep, tml_problem **out, tml_error *error);
void tml_fragment_free(tml_problem *fragment);

#endif
