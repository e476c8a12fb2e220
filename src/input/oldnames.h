/* oldnames.h: mappings from atom names of older conventions to the present ones. They apply only where the user asks.
 *
 * A mapping is built in, by its name, or a file: `old-names 1`, then lines of RESIDUE OLD NEW; `*` is any residue, `#` starts a
 * comment.
 */
#ifndef TML_OLDNAMES_H
#define TML_OLDNAMES_H

#include "input/draft.h"
#include "input/roll.h"

typedef struct tml_old_row { const char *residue, *old, *now; } tml_old_row;

typedef struct tml_old_names {
    const char *label;       /* as the user named it */
    bool digits_first;       /* "1HB" is read as "HB1" before it is looked up */
    tml_old_row *rows; size_t count, capacity;
    tml_index *index;        /* residue to its number; old names within it, and new names within its mirror, to rows */
    int32_t residues;
    int64_t seen, changed;   /* names asked for so far, and those of them that changed */
    char first[200];         /* the first change, in words */
} tml_old_names;

/* Load a mapping; an empty one for NULL. tml_old_names_clear frees it, after a failure too.
 * Returns TML_OK, TML_BAD_INPUT, TML_TOO_LARGE, TML_NO_MEMORY or TML_IO. */
tml_status tml_old_names_load(const char *name, tml_strings *pool, tml_old_names *out, tml_error *error);
void tml_old_names_clear(tml_old_names *names);

/* Turn address->atom into its present name, by the residue's name in the sequence (NULL: unknown; then nothing changes).
 * Returns TML_OK, TML_BAD_INPUT (the name belongs to the present convention only and old ones would be mixed with it) or
 * TML_NO_MEMORY. */
tml_status tml_old_names_apply(tml_old_names *names, const char *residue, tml_address *address, tml_problem *problem,
                               tml_error *error);

/* Apply a mapping to all restraint rows of the draft so far. */
tml_status tml_old_names_apply_rows(tml_old_names *names, tml_draft *draft, tml_error *error);

/* Note what was applied and how many names it changed; nothing without a mapping. */
tml_status tml_old_names_note(const tml_old_names *names, tml_place place, tml_problem *problem, tml_error *error);

#endif
