/* selection.h: atoms chosen by words: `all`, `heavy`, `hydrogens`, `backbone`, `@` and an element's symbol, or an atom's name,
 * in which `*` stands for anything and `%` for digits; words are joined by commas.
 *
 * The backbone is N, CA, C and O of amino acids, and P, O5', C5', C4', C3' and O3' of nucleotides. A prime also stands for the
 * star that it was in older names.
 */
#ifndef TML_SELECTION_H
#define TML_SELECTION_H

#include "input/coordinates.h"

/* Whether a selection can be understood: TML_OK or TML_BAD_INPUT. */
tml_status tml_selection_check(const char *atoms, tml_error *error);

/* Whether a selection that was checked takes the atom. */
bool tml_selected(const char *atoms, const tml_site *site);

/* A stretch of residues: "A:8-69", "A:12", "8-69" for any chain, "A" for a whole chain; codes may be negative and have
 * insertion codes (A:-3-52A). Words are joined by commas. */
typedef struct tml_stretch {
    const char *word;
    size_t length; /* as written; borrowed */
    const char *chain;
    size_t chain_length; /* NULL for any */
    bool whole;          /* all of the chain; otherwise … */
    long first, last;
    char first_insertion, last_insertion; /* ' ' for none */
} tml_stretch;

/* Whether a list of stretches can be understood: TML_OK or TML_BAD_INPUT. */
tml_status tml_stretches_check(const char *text, tml_error *error);

/* The next stretch of a list that was checked; *text moves on. false at the end. */
bool tml_stretch_next(const char **text, tml_stretch *out);
bool tml_stretch_holds(const tml_stretch *stretch, const tml_site_residue *residue);

#endif
