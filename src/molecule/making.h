/* making.h: the workbench on which a molecule is made from an outline. For src/molecule only.
 *
 * layout.c lays out residues and atoms, variant.c and link.c change them, build.c turns what is present into a tml_molecule,
 * terms.c and plane.c add what the tables say of its geometry.
 */
#ifndef TML_MAKING_H
#define TML_MAKING_H

#include "molecule/molecule.h"
#include "molecule/residue_data.h"

typedef enum tml_bond_kind { TML_BOND_INNER, TML_BOND_CHAIN, TML_BOND_LINK } tml_bond_kind;

typedef struct tml_layout_atom {
    const char *name;
    int element;
    int32_t residue;
    int32_t made; /* index in the molecule; -1 until then */
    bool present;
    bool bare;    /* of no template: nothing is known of its chemistry */
    tml_place place;
} tml_layout_atom;

typedef struct tml_layout_bond { int32_t a, b; double length; tml_bond_kind kind; } tml_layout_bond;

typedef struct tml_layout_residue {
    const char *chain, *number, *name, *variant, *type;
    const tml_template *form;  /* NULL for bare atoms */
    bool standard, own;        /* of a name that is built in; of a component dictionary */
    tml_linking linking;
    bool cis, trans;           /* the peptide bond to the next residue is declared so */
    int32_t previous, next;    /* residues that the chain's bonds lead to; -1 for none */
    int32_t chain_index;
    int32_t first_atom, atom_count;
    tml_place place;
} tml_layout_residue;

typedef struct tml_making {
    const tml_outline *outline;
    const char *const *files;
    tml_strings *pool;
    tml_molecule *molecule;
    tml_error *error;
    tml_layout_residue *residues; int32_t residue_count;
    tml_layout_atom *atoms;       int32_t atom_count;
    tml_index *atom_index;        /* of layout atoms, present or not */
    tml_layout_bond *bonds;       size_t bond_count, bond_capacity;
    int32_t *degree;             /* bonds of each layout atom, to atoms that are present */
    tml_bond_kind *bond_kinds;   /* of the molecule's bonds */
    bool *planar;                /* of each of the molecule's atoms: its neighbours lie in one plane with it */
    size_t angle_room, torsion_room, centre_room, plane_room, plane_atom_room, plane_xy_room,
        peptide_room; /* capacities */
} tml_making;

/* An error of the input at a place; returns TML_BAD_INPUT. */
tml_status tml_making_fail(tml_making *making, tml_place place, const char *format, ...) __attribute__((format(printf, 3, 4)));

/* layout.c */
tml_status tml_lay_out_residues(tml_making *making);
tml_status tml_lay_out_atoms(tml_making *making);
tml_status tml_find_layout_atom(tml_making *making, const tml_address *address, int32_t *found);

/* variant.c: chain ends and variants: which of the templates' atoms are present */
tml_status tml_apply_ends_and_variants(tml_making *making);

/* link.c: bonds along chains and `link` statements; inner bonds of templates */
tml_status tml_lay_out_bonds(tml_making *making);

/* lookup.c: rows of the tables, for atoms of the molecule */
bool tml_condition_holds(const tml_making *making, int32_t residue, const char *condition);
double tml_lookup_bond(const tml_making *making, int32_t a, int32_t b, tml_bond_kind kind);  /* layout atoms; NAN for none */
double tml_lookup_angle(const tml_making *making, int32_t a, int32_t b, int32_t c);          /* radians; NAN for none */
int8_t tml_lookup_charge(const tml_making *making, int32_t residue, const char *name);
int32_t tml_lookup_atom(const tml_making *making, int32_t residue, const char *name, size_t length); /* made atom or -1 */
tml_bond_kind tml_kind_between(const tml_making *making, int32_t a, int32_t b);              /* of bonded atoms */

/* lookup.c too: the molecule's bonds as a graph */
bool tml_bonded(const tml_molecule *molecule, int32_t a, int32_t b);
int32_t tml_degree(const tml_molecule *molecule, int32_t atom);
bool tml_is_bare(const tml_making *making, int32_t atom); /* of no template */

/* terms.c: planes, angles, centres, torsions of the made atoms */
tml_status tml_make_terms(tml_making *making);

/* alike.c: chains that take the same shape */
tml_status tml_make_alike(tml_making *making);

/* torsions.c */
tml_status tml_make_torsions(tml_making *making);

enum { TML_PLANE_MAX = 64 }; /* atoms of a plane in the tables */

/* plane.c: ideal coordinates of a plane from its bonds, angles and torsions; has_xy follows */
void tml_plane_fill(tml_molecule *molecule, int32_t plane);

/* arms.c: all angles between the arms of one atom, and directions that realise them */
enum { TML_ARMS_MAX = 4 };
void tml_arms_complete(double angle[TML_ARMS_MAX][TML_ARMS_MAX], int count, bool planar);
bool tml_arms_directions(double angle[TML_ARMS_MAX][TML_ARMS_MAX], int count, double direction[TML_ARMS_MAX][3]);

#endif
