/* coordinates.h: models as PDB and mmCIF files hold them: atoms by name, positions, links.
 *
 * A tml_coordinates owns all of it, strings included. Where an atom has alternative places, the one with the highest occupancy
 * is taken (the first of equals) and the others are counted. Sources: Atomic Coordinate Entry Format Description 3.3 (wwPDB
 * 2012); PDBx/mmCIF dictionary, version 5.
 */
#ifndef TML_COORDINATES_H
#define TML_COORDINATES_H

#include "base/memory.h"
#include "base/status.h"
#include "molecule/index.h"

/* One atom; number is the residue's with its insertion code, such as "52A"; chain is "_" where the file leaves it blank. */
typedef struct tml_site {
    const char *name;
    int32_t residue;  /* into residues */
    int element;      /* atomic number, 0 where unknown */
} tml_site;

typedef struct tml_site_residue { const char *chain, *number, *name; bool water; } tml_site_residue;

typedef struct tml_site_link { int32_t a, b; } tml_site_link; /* atoms */

typedef struct tml_coordinates {
    tml_strings *pool;
    tml_site *atoms;             size_t atom_count, atom_capacity;       /* of all models, in order of appearance */
    tml_site_residue *residues;  size_t residue_count, residue_capacity;
    tml_site_link *links;        size_t link_count, link_capacity;
    double *xyz;                 /* model by model, atom_count * 3, Å; NAN where a model lacks the atom */
    int32_t model_count;
    size_t alternatives;         /* places passed over */
    tml_index *index;            /* for reading only */
} tml_coordinates;

/* Read a file ("-": standard input; gzip understood), its format told by its content. tml_coordinates_clear frees, after a
 * failure too. Returns TML_OK, TML_BAD_INPUT (with line and column), TML_TOO_LARGE, TML_NO_MEMORY or TML_IO. */
tml_status tml_coordinates_read(const char *path, tml_coordinates *out, tml_error *error);

/* The same from a text ended by '\0'; `path` is for messages. */
tml_status tml_coordinates_parse(const char *text, size_t length, const char *path, tml_coordinates *out, tml_error *error);
void tml_coordinates_clear(tml_coordinates *coordinates);

static inline const double *tml_coordinates_at(const tml_coordinates *coordinates, int32_t model, size_t atom) {
    return &coordinates->xyz[((size_t)model * coordinates->atom_count + atom) * 3];
}

#endif
