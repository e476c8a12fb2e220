/* map.h: from the names in restraint rows to the atoms of a molecule. */
#ifndef TML_MAP_H
#define TML_MAP_H

#include "input/problem.h"

/* Match the rows' names with the atoms of problem->molecule and fill problem->restraints.
 *
 * A row that names what is not there makes its restraint unmapped, with the reason; where other alternatives of the same id
 * stand, these are kept and the loss is noted. Rows without any limit are noted and left out.
 * Returns TML_OK, TML_BAD_INPUT (an upper limit below its lower, a negative distance or weight …), TML_TOO_LARGE or
 * TML_NO_MEMORY.
 */
tml_status tml_restraints_map(const tml_rows *rows, const tml_read_options *options, tml_problem *problem, tml_error *error);

#endif
