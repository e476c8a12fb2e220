/* component_making.h: the workbench on which a component becomes a template. For src/molecule only.
 *
 * component.c makes rows of what the dictionary, its coordinates and the topology tell, component_planes.c those of planes;
 * component_chain.c fits the ends of an amino acid or a nucleotide to its chain.
 */
#ifndef TML_COMPONENT_MAKING_H
#define TML_COMPONENT_MAKING_H

#include <math.h>

#include "base/status.h"
#include "base/vector.h"
#include "molecule/component.h"

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

/* An atom's coordinates, and whether these atoms have any that can be used. */
static inline const double *tml_placed_at(const tml_component_making *making, int32_t atom) {
    return making->component->atoms[atom].xyz;
}

static inline bool tml_all_placed(const tml_component_making *making, const int32_t *atoms, int count) {
    for (int k = 0; k < count; k++)
        if (isnan(tml_placed_at(making, atoms[k])[0])) return false;
    return making->placed;
}

/* Signed volume of three unit arms; NAN without coordinates. */
static inline double tml_measured_volume(const tml_component_making *making, int32_t centre, const int32_t arms[3]) {
    const int32_t atoms[4] = {centre, arms[0], arms[1], arms[2]};
    if (!tml_all_placed(making, atoms, 4)) return NAN;
    double volume = tml_volume_of(tml_placed_at(making, centre), tml_placed_at(making, arms[0]), tml_placed_at(making, arms[1]),
                                  tml_placed_at(making, arms[2]));
    for (int k = 0; k < 3; k++) volume /= tml_distance(tml_placed_at(making, centre), tml_placed_at(making, arms[k]));
    return volume;
}

/* Atoms of the backbone have their plane in the rows of all amino acids. */
static inline bool tml_is_backbone(const tml_component_making *making, int32_t atom) {
    return making->ca >= 0 && (atom == making->n || atom == making->ca || atom == making->c || atom == making->o);
}

/* component_planes.c: planes, and which atoms are flat */
tml_status tml_component_make_planes(tml_component_making *making);

/* component_chain.c: the family, and which of the atoms give way to the chain's own; before the rows are made */
tml_status tml_component_join_chain(tml_component_making *making);

/* component_chain.c: rows for the chain's own atoms, after all others */
tml_status tml_component_add_ends(tml_component_making *making);

/* component.c and component_planes.c, for component_chain.c */
tml_status tml_component_note(tml_component_making *making, const char *format, ...) __attribute__((format(printf, 2, 3)));
bool tml_component_add_atom(tml_component *component, tml_atom_row row);
bool tml_component_add_angle(tml_component *component, const char *a, const char *b, const char *c, double degrees);
bool tml_component_add_plane(tml_component_making *making, const char *const *names, size_t count);

#endif
