/* roll.h: the residues of an outline, found by chain and number, with their neighbours along the chain.
 *
 * Borrows the outline, which must not change while the roll lives.
 */
#ifndef TML_ROLL_H
#define TML_ROLL_H

#include "molecule/index.h"
#include "molecule/outline.h"

typedef struct tml_roll {
    const tml_outline *outline;
    tml_index *index;         /* chain (owner -1) to its number; a residue's number within a chain to the residue */
    int32_t *before, *after;  /* of each residue in the outline, within its chain; -1 for none */
} tml_roll;

bool tml_roll_make(const tml_outline *outline, tml_roll *out); /* false without memory; clear it in both cases */
void tml_roll_clear(tml_roll *roll);

/* Index into outline->residues, -1 if there is none. Of two with the same number, an error told later, the first counts. */
int32_t tml_roll_find(const tml_roll *roll, const char *chain, const char *number);

#endif
