/* order.h: how much the models agree on each residue's phi and psi. */
#ifndef TML_ORDER_H
#define TML_ORDER_H

#include "input/coordinates.h"

typedef struct tml_torsion_order {
    double phi, psi;
} tml_torsion_order; /* 0: no agreement, 1: full; NAN where the torsion is missing */

/* Order parameters, the length of the mean of the torsions' unit vectors, for each residue of the coordinates; `out` has room
 * for residue_count. Returns TML_OK or TML_NO_MEMORY. Source: Hyberts, Goldberg, Havel & Wagner, Protein Sci. 1 (1992) 736. */
tml_status tml_order_parameters(const tml_coordinates *coordinates, tml_torsion_order *out, tml_error *error);

/* Residues with less in phi or psi are not ordered. Common practice since the same paper. */
#define TML_ORDER_LEAST 0.9
static inline bool tml_is_ordered(const tml_torsion_order *order) {
    bool phi = !(order->phi < TML_ORDER_LEAST), psi = !(order->psi < TML_ORDER_LEAST); /* true where missing */
    return phi && psi && (order->phi >= 0 || order->psi >= 0);
}

#endif
