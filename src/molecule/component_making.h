/* component_making.h: the workbench on which a component becomes a template. For src/molecule only.
 *
 * component.c makes rows of what the dictionary, its coordinates and the topology tell; component_chain.c fits the ends of an
 * amino acid to its chain.
 */
#ifndef TML_COMPONENT_MAKING_H
#define TML_COMPONENT_MAKING_H

#include "base/status.h"
#include "molecule/component.h"

enum { TML_COMPONENT_LONGEST_NAME = 32 };

typedef struct tml_component_making {
    tml_component *component;
    tml_strings *pool;
    tml_error *error;
    tml_topology topology;
    bool placed;         /* the coordinates can be used */
    bool rejected;       /* there are coordinates, but they cannot */
    bool *dropped;       /* of each atom: the chain's own rows stand for it */
    bool *flat;          /* of each atom: it lies in one plane with its neighbours */
    bool *doubted;       /* of each atom: the dictionary's angles about it cannot all be met */
    int32_t n, ca, c, o; /* the backbone of an amino acid; -1 for none */
    int32_t p;           /* the phosphorus of a nucleotide whose arms are the usual ones; -1 for none */
    int32_t root;        /* the atom that the others hang on; -1 for the first */
} tml_component_making;

/* component_chain.c: the family, and which of the atoms give way to the chain's own; before the rows are made */
tml_status tml_component_join_chain(tml_component_making *making);

/* component_chain.c: rows for the chain's own atoms, after all others */
tml_status tml_component_add_ends(tml_component_making *making);

/* component.c, for component_chain.c */
tml_status tml_component_note(tml_component_making *making, const char *format, ...) __attribute__((format(printf, 2, 3)));
bool tml_component_add_atom(tml_component *component, tml_atom_row row);
bool tml_component_add_angle(tml_component *component, const char *a, const char *b, const char *c, double degrees);
bool tml_component_add_plane(tml_component_making *making, const char *const *names, size_t count);

#endif
