/* nmrstar_tree.h: distance restraints of NMR-STAR 3.0: a tree of nodes for each, whose leaves hold atoms and whose inner nodes say
 * OR or AND. For nmrstar.c only.
 */
#ifndef TML_NMRSTAR_TREE_H
#define TML_NMRSTAR_TREE_H

#include "input/cells.h"

typedef struct tml_distance_tree {
    const tml_cells *cells;
    const tml_star_frame *frame;
    tml_star_loop nodes, members, values; /* _Dist_constraint_tree, _Dist_constraint, _Dist_constraint_value */
    tml_status (*address)(void *context, const tml_star_loop *loop, size_t row, tml_address *out); /* atoms of a row of members */
    void *context;
} tml_distance_tree;

/* Append its restraints to the draft: leaves under OR are alternatives, leaves under AND hold together. What goes beyond that
 * (AND over OR) is noted and left out. */
tml_status tml_distance_tree_read(const tml_distance_tree *tree);

#endif
