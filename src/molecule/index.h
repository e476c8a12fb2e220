/* index.h: finds numbered things by an owner and a name: atoms in residues, residues in chains.
 *
 * The names are borrowed and must outlive the index.
 */
#ifndef TML_INDEX_H
#define TML_INDEX_H

#include <stdbool.h>
#include <stdint.h>

typedef struct tml_index tml_index;

tml_index *tml_index_new(void); /* NULL without memory */
void tml_index_free(tml_index *index);

/* Value of (owner, name); -1 if there is none, or no index. */
int32_t tml_index_find(const tml_index *index, int32_t owner, const char *name);

/* Add (owner, name), which must not be there yet; false without memory. */
bool tml_index_add(tml_index *index, int32_t owner, const char *name, int32_t value);

#endif
