/* metrize.h: draws one set of distances between closed limits so that all of them obey the triangle inequality.
 *
 * Sources: Havel, Biopolymers 29 (1990) 1565; partial: Kuszewski, Nilges & Brünger, J. Biomol. NMR 2 (1992) 33.
 */
#ifndef TML_METRIZE_H
#define TML_METRIZE_H

#include "base/pcg.h"
#include "bounds/bounds.h"

/* Draw one set of distances.
 *
 * bounds     closed limits, all uppers finite; not changed
 * roots      atoms whose rows are metrized; n or more for all (full metrization). The other distances are then drawn between
 *            their current limits without further narrowing.
 * work       n * stride floats, aligned to 64 bytes; on return the symmetric matrix of distances, Å, diagonal 0, in the random
 *            order in which atoms were taken
 * order      n atoms: row i of work belongs to atom order[i]
 *
 * Returns TML_OK or TML_NO_MEMORY.
 */
tml_status tml_metrize(const tml_bounds *bounds, int32_t roots, tml_pcg *pcg, float *work, int32_t *order, tml_error *error);

#endif
