/* component.h: a residue as a component dictionary describes it, and the template that is made from it.
 *
 * input/component.c fills one from a CIF; the outline owns it and tml_component_free frees it. Names belong to the string pool that
 * it was read with. What a dictionary leaves open is NAN, 0 or empty. Indices are the component's own atoms.
 */
#ifndef TML_COMPONENT_H
#define TML_COMPONENT_H

#include "base/memory.h"
#include "base/place.h"
#include "base/status.h"
#include "molecule/residue_data.h"
#include "molecule/topology_geometry.h"

enum { TML_COMPONENT_ATOMS = 1000 }; /* at most; bonds, angles and planes are limited in proportion */

typedef struct tml_component_atom {
    const char *name;
    uint8_t element;
    int8_t charge;
    bool leaving;
    double xyz[3], model_xyz[3]; /* xyz: what is used: ideal coordinates, or the model's; NAN where there are none */
} tml_component_atom;

typedef struct tml_component_bond { int32_t a, b; tml_order order; double length; } tml_component_bond;
typedef struct tml_component_angle { int32_t a, b, c; double degrees; } tml_component_angle;
typedef struct tml_component_torsion { int32_t a, b, c, d; double degrees, spread; } tml_component_torsion;
typedef struct tml_component_centre { int32_t c, arms[3]; int8_t sign; } tml_component_centre; /* 0: of both hands */
typedef struct tml_component_plane_atom { const char *plane; int32_t atom; } tml_component_plane_atom;

/* What chains a component belongs in, by its dictionary's type. */
typedef enum tml_component_kind { TML_KIND_SINGLE, TML_KIND_PEPTIDE, TML_KIND_NUCLEIC } tml_component_kind;

typedef struct tml_component {
    const char *name, *type; /* the type as written; "" for none */
    tml_place place;
    bool charges_given;
    tml_component_atom *atoms;             size_t atom_count, atom_capacity;
    tml_component_bond *bonds;             size_t bond_count, bond_capacity;
    tml_component_angle *angles;           size_t angle_count, angle_capacity;
    tml_component_torsion *torsions;       size_t torsion_count, torsion_capacity;
    tml_component_centre *centres;         size_t centre_count, centre_capacity;
    tml_component_plane_atom *plane_atoms; size_t plane_atom_count, plane_atom_capacity; /* a plane's stand together */

    /* made by tml_component_make */
    bool made;
    tml_template form;
    tml_family family;
    tml_atom_row *atom_rows;       size_t atom_row_count, atom_row_capacity;
    tml_bond_row *bond_rows;       size_t bond_row_count, bond_row_capacity;
    tml_angle_row *angle_rows;     size_t angle_row_count, angle_row_capacity;
    tml_torsion_row *torsion_rows; size_t torsion_row_count, torsion_row_capacity;
    tml_centre_row *centre_rows;   size_t centre_row_count, centre_row_capacity;
    tml_charge_row *charge_rows;   size_t charge_row_count, charge_row_capacity;
    const char **planes;           size_t plane_count, plane_capacity;
    tml_end_row first_ends[1], last_ends[1];
    const char *notes[6];          int note_count; /* what was missing and what stands for it; each names the component */
} tml_component;

/* Make `form` from what the dictionary says; lengths and angles that it lacks come from its coordinates, else from topology.
 *
 * pool   the names' pool; texts are added
 *
 * Returns TML_OK or TML_NO_MEMORY.
 */
tml_status tml_component_make(tml_component *component, tml_strings *pool, tml_error *error);

void tml_component_free(tml_component *component);

#endif
