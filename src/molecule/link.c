#include "molecule/making.h"

#include <math.h>
#include <string.h>

#include "molecule/elements.h"

/* Contents: bonds of templates - bonds along chains - `link` statements - room for a bond */

static tml_status add_bond(tml_making *making, int32_t a, int32_t b, double length, tml_bond_kind kind);
static tml_status add_inner_bonds(tml_making *making, int32_t r);
static tml_status add_chain_bond(tml_making *making, int32_t r);
static tml_status add_link(tml_making *making, const tml_outline_link *link);

tml_status tml_lay_out_bonds(tml_making *making) {
    making->degree = tml_alloc((size_t)making->atom_count, sizeof *making->degree);
    if (making->degree == NULL) return tml_no_memory(making->error);
    tml_status status = TML_OK;
    for (int32_t r = 0; r < making->residue_count && status == TML_OK; r++)
        if (making->residues[r].form != NULL) status = add_inner_bonds(making, r);
    for (int32_t r = 0; r < making->residue_count && status == TML_OK; r++)
        if (making->residues[r].previous >= 0) status = add_chain_bond(making, r);
    for (size_t i = 0; i < making->outline->link_count && status == TML_OK; i++)
        status = add_link(making, &making->outline->links[i]);
    return status;
}

static tml_status add_bond(tml_making *making, int32_t a, int32_t b, double length, tml_bond_kind kind) {
    if (!tml_grow(&making->bonds, &making->bond_capacity, making->bond_count + 1, sizeof *making->bonds))
        return tml_no_memory(making->error);
    making->bonds[making->bond_count++] = (tml_layout_bond){a, b, length, kind};
    making->degree[a]++;
    making->degree[b]++;
    return TML_OK;
}

/* ---- bonds of templates ---- */

static int32_t atom_named(const tml_making *making, int32_t r, const char *name) {
    return tml_index_find(making->atom_index, r, name);
}

/* Is a row of the bonds a ring closure, named for the first time? */
static bool closes_ring(const tml_template *form, const tml_bond_row *row) {
    if (strpbrk(row->a, "+-=") != NULL || strpbrk(row->b, "+-=") != NULL) return false;
    for (const tml_atom_row *atom = form->atoms; atom->name != NULL; atom++)
        if ((strcmp(atom->name, row->a) == 0 && strcmp(atom->parent, row->b) == 0) ||
            (strcmp(atom->name, row->b) == 0 && strcmp(atom->parent, row->a) == 0))
            return false;
    for (const tml_bond_row *earlier = form->bonds; earlier < row; earlier++)
        if (strcmp(earlier->a, row->a) == 0 && strcmp(earlier->b, row->b) == 0) return false;
    return true;
}

static tml_status add_inner(tml_making *making, int32_t a, int32_t b) {
    if (!making->atoms[a].present || !making->atoms[b].present) return TML_OK;
    return add_bond(making, a, b, tml_lookup_bond(making, a, b, TML_BOND_INNER), TML_BOND_INNER);
}

static tml_status add_inner_bonds(tml_making *making, int32_t r) {
    const tml_layout_residue *residue = &making->residues[r];
    tml_status status = TML_OK;
    for (int32_t i = 0; i < residue->atom_count && status == TML_OK; i++) {
        const char *parent = residue->form->atoms[i].parent;
        if (*parent != '\0') status = add_inner(making, atom_named(making, r, parent), residue->first_atom + i);
    }
    for (const tml_bond_row *row = residue->form->bonds; row->a != NULL && status == TML_OK; row++)
        if (closes_ring(residue->form, row))
            status = add_inner(making, atom_named(making, r, row->a), atom_named(making, r, row->b));
    return status;
}

/* ---- bonds along chains ---- */

static tml_status add_chain_bond(tml_making *making, int32_t r) {
    const tml_layout_residue *residue = &making->residues[r];
    const tml_family *family = residue->form->family;
    int32_t tail = atom_named(making, residue->previous, family->tail), head = atom_named(making, r, family->head);
    if (tail < 0 || head < 0 || !making->atoms[tail].present || !making->atoms[head].present)
        return tml_making_fail(making, residue->place, "%s:%s: it cannot be bonded to the residue before: %s or %s is missing",
                               residue->chain, residue->number, family->tail, family->head);
    return add_bond(making, tail, head, tml_lookup_bond(making, tail, head, TML_BOND_CHAIN), TML_BOND_CHAIN);
}

/* ---- `link` statements ---- */

static tml_status make_room(tml_making *making, int32_t atom, tml_place place);
static bool is_amide(const tml_making *making, int32_t carbon, int32_t nitrogen);

static const double AMIDE = 1.329; /* Å, as the peptide bond's */

static tml_status add_link(tml_making *making, const tml_outline_link *link) {
    int32_t a, b;
    tml_status status = tml_find_layout_atom(making, &link->a, &a);
    if (status == TML_OK) status = tml_find_layout_atom(making, &link->b, &b);
    if (status != TML_OK) return status;
    if (a == b) return tml_making_fail(making, link->place, "a link from an atom to itself");
    const tml_layout_atom *ends[2] = {&making->atoms[a], &making->atoms[b]};
    double radius[2];
    for (int k = 0; k < 2; k++) {
        radius[k] = tml_element_covalent_radius(ends[k]->element);
        if (radius[k] == 0)
            return tml_making_fail(making, link->place, "%s is a bead and has no bond length; say how far apart with `limit`",
                                   ends[k]->name);
    }
    if (making->atoms[a].residue == making->atoms[b].residue && !isnan(tml_lookup_bond(making, a, b, TML_BOND_INNER)))
        return tml_making_fail(making, link->place, "%s and %s are bonded already", ends[0]->name, ends[1]->name);
    status = make_room(making, a, link->place);
    if (status == TML_OK) status = make_room(making, b, link->place);
    if (status != TML_OK) return status;
    double length = tml_lookup_bond(making, a, b, TML_BOND_LINK);
    if (isnan(length)) length = is_amide(making, a, b) || is_amide(making, b, a) ? AMIDE : radius[0] + radius[1];
    return add_bond(making, a, b, length, TML_BOND_LINK);
}

/* ---- room for a bond ---- */

static int usual_neighbours(const tml_template *form, const char *name);

/* How many bonds an atom of a template takes without charge; a carbon as many as it has in its residue. */
static int most_bonds(const tml_making *making, int32_t atom) {
    const tml_layout_atom *at = &making->atoms[atom];
    switch (tml_element_symbol(at->element)[0]) {
    case 'H':
        return 1;
    case 'N':
        return 3;
    case 'C':
        return usual_neighbours(making->residues[at->residue].form, at->name);
    default:
        return 2; /* O, S */
    }
}

/* A nitrogen linked to a trigonal carbon, as in an isopeptide bond. */
static bool is_amide(const tml_making *making, int32_t carbon, int32_t nitrogen) {
    const tml_layout_atom *c = &making->atoms[carbon], *n = &making->atoms[nitrogen];
    return !c->bare && !n->bare && c->element == 6 && n->element == 7 && most_bonds(making, carbon) == 3;
}

static int usual_neighbours(const tml_template *form, const char *name) {
    int count = strcmp(name, form->family->tail) == 0; /* the bond to the next residue, or an end's atom */
    for (const tml_atom_row *row = form->atoms; row->name != NULL; row++)
        if (strcmp(row->name, name) == 0 || (strcmp(row->parent, name) == 0 && !row->optional)) count++;
    for (const tml_bond_row *row = form->bonds; row->a != NULL; row++)
        if ((strcmp(row->a, name) == 0 || strcmp(row->b, name) == 0) && closes_ring(form, row)) count++;
    return count;
}

/* A bond takes the place of hydrogens where there are too many; the last-named goes first. */
static tml_status make_room(tml_making *making, int32_t atom, tml_place place) {
    const tml_layout_atom *at = &making->atoms[atom];
    if (at->bare) return TML_OK;
    const tml_layout_residue *residue = &making->residues[at->residue];
    int most = most_bonds(making, atom);
    for (int32_t i = residue->atom_count - 1; i >= 0 && making->degree[atom] + 1 > most; i--) {
        tml_layout_atom *hydrogen = &making->atoms[residue->first_atom + i];
        if (hydrogen->element != 1 || !hydrogen->present || strcmp(residue->form->atoms[i].parent, at->name) != 0) continue;
        hydrogen->present = false;
        making->degree[atom]--;
    }
    if (making->degree[atom] + 1 <= most) return TML_OK;
    return tml_making_fail(making, place, "%s:%s:%s has all its %d bonds already; a variant can take an atom away first",
                           residue->chain, residue->number, at->name, most);
}
