/* cis.h: finds peptide bonds to proline that the restraints need cis. */
#ifndef TML_CIS_H
#define TML_CIS_H

#include "input/problem.h"

/* Try every undeclared peptide bond to proline, as a fragment with the residues about it and the restraints within it, both
 * trans and cis, from many random starts; where trans always violates and cis does not, set the bond cis and note it.
 *
 * problem   changed: peptide bonds set cis, and a note for each
 * seed      of the random starts
 */
tml_status tml_find_cis(tml_problem *problem, uint64_t seed, const volatile int *stop, tml_error *error);

#endif
