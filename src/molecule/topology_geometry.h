/* topology_geometry.h: a molecule as a graph of elements and bond orders, and the lengths and angles that it leads one to
 * expect.
 *
 * A tml_topology owns its arrays; tml_topology_clear frees them. Rings are those of eight atoms or fewer that are a smallest
 * one of some bond. Lengths in Å, angles in degrees. The sources of the numbers stand in topology_geometry.c.
 */
#ifndef TML_TOPOLOGY_GEOMETRY_H
#define TML_TOPOLOGY_GEOMETRY_H

#include <stdbool.h>
#include <stdint.h>

typedef enum tml_order {
    TML_ORDER_SINGLE = 1,
    TML_ORDER_DOUBLE,
    TML_ORDER_TRIPLE,
    TML_ORDER_AROMATIC,
    TML_ORDER_DELOCALISED /* between single and double: carboxylate, guanidinium */
} tml_order;

typedef enum tml_shape {
    TML_SHAPE_OTHER, /* metals, and what has more than four arms */
    TML_SHAPE_LINEAR,
    TML_SHAPE_TRIGONAL,
    TML_SHAPE_TETRAHEDRAL
} tml_shape;

typedef struct tml_topology_bond {
    int32_t a, b;
    tml_order order;
    int32_t ring;
} tml_topology_bond; /* ring: of the smallest; 0 for none */

typedef struct tml_topology {
    int32_t atom_count, bond_count, ring_count;
    uint8_t *elements;
    int8_t *charges;
    tml_topology_bond *bonds;
    tml_shape *shapes;
    int32_t *first, *neighbours, *via; /* of atom i: neighbours[first[i] … first[i+1]-1]; via: the bond to each */
    int32_t *ring_first, *ring_atoms;  /* of ring r: ring_atoms[ring_first[r] … ring_first[r+1]-1], around the ring */
    int32_t *ranks;                    /* equal for atoms that the graph cannot tell apart */
} tml_topology;

/* Room for so many atoms and bonds, which the caller then fills in: elements, charges, a, b and order of bonds. */
bool tml_topology_new(tml_topology *topology, int32_t atom_count, int32_t bond_count);

/* All else, from these; false without memory. Bonds join different atoms, no two the same ones. */
bool tml_topology_finish(tml_topology *topology);
void tml_topology_clear(tml_topology *topology);

static inline int32_t tml_topology_degree(const tml_topology *topology, int32_t atom) {
    return topology->first[atom + 1] - topology->first[atom];
}

int32_t tml_topology_bond_between(const tml_topology *topology, int32_t a, int32_t b); /* -1 for none */

/* The smallest listed ring in which a, centre and c follow each other; -1 for none. */
int32_t tml_topology_ring_of(const tml_topology *topology, int32_t a, int32_t centre, int32_t c);
int32_t tml_topology_ring_size(const tml_topology *topology, int32_t ring);

/* Bond about which atoms do not turn: double, aromatic, delocalised, or from a trigonal nitrogen to what it is conjugated with.
 */
bool tml_topology_is_stiff(const tml_topology *topology, int32_t bond);

double tml_topology_length(const tml_topology *topology, int32_t bond);
double tml_topology_angle(const tml_topology *topology, int32_t a, int32_t centre, int32_t c);

/* Nuclear length of a bond to hydrogen; NAN for an element of which none is known. `in_ring`: on a trigonal carbon of a ring.
 */
double tml_hydrogen_length(int element, bool in_ring);

/* Degrees between the two arms of an oxygen, sulphur or selenium atom that is in no ring; NAN for other elements. */
double tml_two_armed_angle(int element, int arm_1, int arm_2);

/* Of a single bond between elements of such shapes. */
double tml_single_length(int element_1, tml_shape shape_1, int element_2, tml_shape shape_2);

/* Length of a bond from a metal to a donor atom, NAN where neither is a metal. */
double tml_metal_length(int element_1, int element_2);

#endif
