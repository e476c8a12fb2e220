/* graph.h: shortest paths over given upper limits, in double. */
#ifndef TML_GRAPH_H
#define TML_GRAPH_H

#include "bounds/bounds.h"

/* Adjacency of the uppers among some givens. A tml_graph owns its arrays; the givens are borrowed and must not move. */
typedef struct tml_graph {
    const tml_given *givens;
    int32_t n;
    int32_t *first, *edges;  /* edges of atom i: edges[first[i] … first[i+1]-1], numbers of givens */
    double *distance;        /* of the last search: INFINITY where not reached */
    int32_t *via;            /* the given that led to each atom, -1 at the source */
    int32_t *heap, *place;   /* work space; place[i] is -1 outside the heap */
    int32_t heap_count;
    int32_t *touched, touched_count;
} tml_graph;

bool tml_graph_open(tml_graph *graph, const tml_given *givens, size_t given_count, int32_t n); /* false without memory */
void tml_graph_close(tml_graph *graph);

/* Shortest paths from `source` to all atoms not farther than `reach`, Å. Source: Dijkstra, Numer. Math. 1 (1959) 269. */
void tml_graph_search(tml_graph *graph, int32_t source, double reach);

#endif
