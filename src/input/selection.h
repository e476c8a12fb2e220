/* selection.h: atoms chosen by words: `all`, `heavy`, `hydrogens`, `backbone`, `@` and an element's symbol, or an atom's name, in
 * which `*` stands for anything and `%` for digits; words are joined by commas.
 *
 * The backbone is N, CA, C and O of amino acids, and P, O5', C5', C4', C3' and O3' of nucleotides.
 */
#ifndef TML_SELECTION_H
#define TML_SELECTION_H

#include "input/coordinates.h"

/* Whether a selection can be understood: TML_OK or TML_BAD_INPUT. */
tml_status tml_selection_check(const char *atoms, tml_error *error);

/* Whether a selection that was checked takes the atom. */
bool tml_selected(const char *atoms, const tml_site *site);

#endif
