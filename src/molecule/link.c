#include "molecule/making.h"

#include <math.h>
#include <string.h>

#include "molecule/elements.h"
#include "molecule/topology_geometry.h"

/* Contents: bonds of templates - bonds along chains - `link` statements - room for a bond */

static tml_status add_bond(tml_making *making, int32_t a, int32_t b, double length, tml_bond_kind kind);
static tml_status add_inner_bonds(tml_making *making, int32_t r);
static tml_status add_chain_bond(tml_making *making, int32_t r);
static tml_status add_link(tml_making *making, const tml_outline_link *link);
static tml_status make_room(tml_making *making, int32_t atom, int32_t other, tml_place place);

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

static const double AMIDE = 1.329; /* Å, as the peptide bond's */

static tml_status add_chain_bond(tml_making *making, int32_t r) {
    const tml_layout_residue *residue = &making->residues[r];
    const tml_template *one = making->residues[residue->previous].form, *two = residue->form;
    if (one == NULL || two == NULL) return TML_OK; /* never so: single atoms are in no chain */
    const char *from = one->family->tail, *to = two->family->head;
    int32_t tail = atom_named(making, residue->previous, from), head = atom_named(making, r, to);
    if (tail < 0 || head < 0 || !making->atoms[tail].present || !making->atoms[head].present)
        return tml_making_fail(making, residue->place, "%s:%s: it cannot be bonded to the residue before: %s or %s is missing",
                               residue->chain, residue->number, from, to);
    tml_status status = make_room(making, tail, head, residue->place);
    if (status == TML_OK) status = make_room(making, head, tail, residue->place);
    if (status != TML_OK) return status;
    double length = tml_lookup_bond(making, tail, head, TML_BOND_CHAIN);
    if (isnan(length)) length = AMIDE; /* after a cap, whose rows have none */
    return add_bond(making, tail, head, length, TML_BOND_CHAIN);
}

/* ---- `link` statements ---- */

static int most_bonds(const tml_making *making, int32_t atom);
static bool is_amide(const tml_making *making, int32_t carbon, int32_t nitrogen);


/* Trigonal where a carbon has three neighbours in its residue. */
static tml_shape shape_in(const tml_making *making, int32_t atom) {
    const tml_layout_atom *at = &making->atoms[atom];
    return !at->bare && at->element == 6 && most_bonds(making, atom) == 3 ? TML_SHAPE_TRIGONAL : TML_SHAPE_TETRAHEDRAL;
}

/* As between such atoms in organic molecules; of two single atoms nothing is known but their elements. */
static double usual_length(const tml_making *making, int32_t a, int32_t b) {
    const tml_layout_atom *first = &making->atoms[a], *second = &making->atoms[b];
    bool metal = tml_element_is_metal(first->element) || tml_element_is_metal(second->element);
    if (first->bare && second->bare && !metal)
        return tml_element_covalent_radius(first->element) + tml_element_covalent_radius(second->element);
    if (is_amide(making, a, b) || is_amide(making, b, a)) return AMIDE;
    return tml_single_length(first->element, shape_in(making, a), second->element, shape_in(making, b));
}

static tml_status add_link(tml_making *making, const tml_outline_link *link) {
    int32_t a, b;
    tml_status status = tml_find_layout_atom(making, &link->a, &a);
    if (status == TML_OK) status = tml_find_layout_atom(making, &link->b, &b);
    if (status != TML_OK) return status;
    if (a == b) return tml_making_fail(making, link->place, "a link from an atom to itself");
    const tml_layout_atom *ends[2] = {&making->atoms[a], &making->atoms[b]};
    for (int k = 0; k < 2; k++) {
        if (ends[k]->element == 0)
            return tml_making_fail(making, link->place, "%s is a bead and has no bond length; say how far apart with `limit`",
                                   ends[k]->name);
    }
    if (making->atoms[a].residue == making->atoms[b].residue && !isnan(tml_lookup_bond(making, a, b, TML_BOND_INNER)))
        return tml_making_fail(making, link->place, "%s and %s are bonded already", ends[0]->name, ends[1]->name);
    status = make_room(making, a, b, link->place);
    if (status == TML_OK) status = make_room(making, b, a, link->place);
    if (status != TML_OK) return status;
    double length = tml_lookup_bond(making, a, b, TML_BOND_LINK);
    if (isnan(length)) length = tml_lookup_bond(making, b, a, TML_BOND_LINK);
    if (isnan(length)) length = usual_length(making, a, b);
    return add_bond(making, a, b, length, TML_BOND_LINK);
}

/* ---- room for a bond ---- */

static int usual_neighbours(const tml_template *form, const char *name);

/* How many bonds an atom of a template takes without charge; a carbon, and an atom that has more already, as many as in its residue. */
static int most_bonds(const tml_making *making, int32_t atom) {
    enum { HYDROGEN = 1, BORON = 5, NITROGEN = 7, OXYGEN = 8, SULPHUR = 16, SELENIUM = 34, MANY = 1000 };
    const tml_layout_atom *at = &making->atoms[atom];
    int usual = usual_neighbours(making->residues[at->residue].form, at->name);
    switch (at->element) {
    case HYDROGEN:
        return 1;
    case NITROGEN:
        return 3;
    case OXYGEN:
        return 2;
    case SULPHUR:
    case SELENIUM:
        return usual > 2 ? usual : 2;
    case BORON:
        return 4;
    default:
        return tml_element_is_metal(at->element) ? MANY : usual;
    }
}

/* A metal takes no hydrogen's place but an acid one's: that of S-H, of N-H in a plane, the fourth on nitrogen. */
static int most_bonds_with_metal(const tml_making *making, int32_t atom) {
    enum { NITROGEN = 7, OXYGEN = 8 };
    const tml_layout_atom *at = &making->atoms[atom];
    int usual = usual_neighbours(making->residues[at->residue].form, at->name);
    if (at->element == NITROGEN) return usual > 3 ? usual : 3;
    return at->element == OXYGEN ? usual + 1 : most_bonds(making, atom);
}

/* A nitrogen linked to a trigonal carbon, as in an isopeptide bond. */
static bool is_amide(const tml_making *making, int32_t carbon, int32_t nitrogen) {
    const tml_layout_atom *c = &making->atoms[carbon], *n = &making->atoms[nitrogen];
    return !c->bare && !n->bare && c->element == 6 && n->element == 7 && most_bonds(making, carbon) == 3;
}

/* Neighbours within the residue and along the chain, whether they have been linked away or not. */
static int usual_neighbours(const tml_template *form, const char *name) {
    bool is_tail = strcmp(name, form->family->tail) == 0; /* the bond to the next residue, or what is there without one */
    int count = is_tail || strcmp(name, form->family->head) == 0;
    for (const tml_atom_row *row = form->atoms; row->name != NULL; row++) {
        if (strcmp(row->name, name) == 0 && *row->parent != '\0') count++;
        if (strcmp(row->parent, name) == 0 && row->optional != TML_OPTIONAL && !(is_tail && row->optional == TML_LEAVING)) count++;
    }
    for (const tml_bond_row *row = form->bonds; row->a != NULL; row++)
        if ((strcmp(row->a, name) == 0 || strcmp(row->b, name) == 0) && closes_ring(form, row)) count++;
    return count;
}

/* Take an atom away with all that hangs on it. */
static void take_away(tml_making *making, int32_t atom) {
    const tml_layout_residue *residue = &making->residues[making->atoms[atom].residue];
    making->atoms[atom].present = false;
    for (bool more = true; more;) {
        more = false;
        for (int32_t i = 0; i < residue->atom_count; i++) {
            const char *parent = residue->form->atoms[i].parent;
            tml_layout_atom *at = &making->atoms[residue->first_atom + i];
            if (!at->present || *parent == '\0' || making->atoms[atom_named(making, making->atoms[atom].residue, parent)].present) continue;
            at->present = false;
            more = true;
        }
    }
}

/* A bond takes the place of atoms where there are too many: of those that a dictionary says leave, then of hydrogens; the last-named
 * goes first. */
static tml_status make_room(tml_making *making, int32_t atom, int32_t other, tml_place place) {
    enum { LEAVING, HYDROGENS, KINDS };
    const tml_layout_atom *at = &making->atoms[atom];
    if (at->bare) return TML_OK;
    const tml_layout_residue *residue = &making->residues[at->residue];
    bool metal = tml_element_is_metal(making->atoms[other].element);
    int most = metal ? most_bonds_with_metal(making, atom) : most_bonds(making, atom);
    for (int kind = LEAVING; kind < KINDS; kind++)
        for (int32_t i = residue->atom_count - 1; i >= 0 && making->degree[atom] + 1 > most; i--) {
            const tml_atom_row *row = &residue->form->atoms[i];
            const tml_layout_atom *leaver = &making->atoms[residue->first_atom + i];
            if (!leaver->present || strcmp(row->parent, at->name) != 0) continue;
            if (kind == LEAVING ? row->optional != TML_LEAVING : leaver->element != 1) continue;
            take_away(making, residue->first_atom + i);
            making->degree[atom]--;
        }
    if (metal || making->degree[atom] + 1 <= most) return TML_OK;
    return tml_making_fail(making, place, "%s:%s:%s has all its %d bonds already; a variant can take an atom away first",
                           residue->chain, residue->number, at->name, most);
}
