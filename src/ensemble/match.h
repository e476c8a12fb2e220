/* match.h: which atoms of two files of coordinates are the same, by chain, residue number and atom name.
 *
 * Chains of the same code belong together. What is left over is matched with a chain of another code, if most residues have the
 * same number and name. Chains that could stand for each other (the copies of a homo-oligomer) can be exchanged.
 */
#ifndef TML_MATCH_H
#define TML_MATCH_H

#include "input/coordinates.h"

typedef struct tml_match tml_match;

/* How many ways to exchange chains are tried at most: all of seven alike ones. */
enum { TML_MATCH_MOST_WAYS = 5040 };

/* Make the match that codes tell. counts: of the atoms of `one`, those whose chains are worth exchanging. Both are borrowed.
 * The caller frees it with tml_match_free, after a failure too. Returns TML_OK or TML_NO_MEMORY. */
tml_status tml_match_new(const tml_coordinates *one, const tml_coordinates *other, const bool *counts, tml_match **out,
                         tml_error *error);
void tml_match_free(tml_match *match);

/* For each atom of `one` that of `other`, or -1. */
const int32_t *tml_match_atoms(const tml_match *match);

/* Go on to the next way to exchange chains; false when all were seen: the first one is back then. Never true where there are
 * more ways than are tried, which tml_match_too_many tells. */
bool tml_match_next(tml_match *match);
bool tml_match_too_many(const tml_match *match);

/* Keep the present way in mind; return to the way kept. */
void tml_match_keep(tml_match *match);
void tml_match_restore(tml_match *match);

/* Chain number `index` of `one`, and what it is matched with (NULL: nothing); false past the end. */
bool tml_match_chain(const tml_match *match, int32_t index, const char **one, const char **other);

/* Residues that are matched in spite of different names. */
int32_t tml_match_renamed(const tml_match *match);

#endif
