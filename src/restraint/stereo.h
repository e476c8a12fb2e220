/* stereo.h: the open stereo pairs of a problem, gathered while its restraints are matched.
 *
 * A tml_stereo_book owns its work space; the pairs and members go to the restraints it was opened for. Names of one branch share a
 * pair: CGx and HGx% of valine, HDx and HEx of a phenyl ring.
 */
#ifndef TML_STEREO_H
#define TML_STEREO_H

#include "restraint/restraint.h"

typedef struct tml_stereo_book {
    const tml_molecule *molecule;
    tml_restraints *restraints;
    int32_t *of_carrier; /* per atom: the pair that stands on it, from 1; 0 for none; negative where it is the second member's */
    bool *listed;        /* per atom: is a member already */
    size_t pairs, members; /* capacities */
} tml_stereo_book;

/* false without memory; closed in any case. */
bool tml_stereo_open(tml_stereo_book *book, const tml_molecule *molecule, tml_restraints *restraints);

/* The pair with these members, as tml_names_stereo gives them; a new one where there is none. *reversed: the pair knows the second
 * as its first. -1 without memory. */
int32_t tml_stereo_pair(tml_stereo_book *book, const int32_t *atoms, int32_t half, bool *reversed);

/* Sort the members by pair and free the work space. */
void tml_stereo_close(tml_stereo_book *book);

#endif
