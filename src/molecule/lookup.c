#include "molecule/making.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/vector.h"

/* Contents: conditions - bonds - angles - charges and atoms - the graph of bonds */

enum { NAME_ROOM = 48 };

/* ---- conditions ---- */

static bool is_present(const tml_making *making, int32_t r, const char *name, size_t length) {
    const tml_layout_residue *residue = &making->residues[r];
    for (int32_t i = residue->first_atom; i < residue->first_atom + residue->atom_count; i++)
        if (strncmp(making->atoms[i].name, name, length) == 0 && making->atoms[i].name[length] == '\0')
            return making->atoms[i].present;
    return false;
}

bool tml_condition_holds(const tml_making *making, int32_t r, const char *condition) {
    while (*condition != '\0') {
        size_t length = strcspn(condition + 1, "+-");
        if (is_present(making, r, condition + 1, length) != (*condition == '+')) return false;
        condition += length + 1;
    }
    return true;
}

/* ---- bonds ---- */

static double bond_in(const tml_making *making, int32_t r, const tml_bond_row *rows, const char *a, const char *b) {
    for (; rows->a != NULL; rows++)
        if (((strcmp(rows->a, a) == 0 && strcmp(rows->b, b) == 0) || (strcmp(rows->a, b) == 0 && strcmp(rows->b, a) == 0)) &&
            tml_condition_holds(making, r, rows->condition))
            return rows->length;
    return NAN;
}

/* From the rows of residue r, the backbone's rows after its own. */
static double bond_of(const tml_making *making, int32_t r, const char *a, const char *b) {
    const tml_template *form = making->residues[r].form;
    double length = bond_in(making, r, form->bonds, a, b);
    if (isnan(length)) length = bond_in(making, r, form->family->common->bonds, a, b);
    for (const tml_atom_row *row = form->atoms; isnan(length) && row->name != NULL; row++)
        if ((strcmp(row->name, a) == 0 && strcmp(row->parent, b) == 0) ||
            (strcmp(row->name, b) == 0 && strcmp(row->parent, a) == 0))
            length = row->length;
    return length;
}

double tml_lookup_bond(const tml_making *making, int32_t a, int32_t b, tml_bond_kind kind) {
    const tml_layout_atom *first = &making->atoms[a], *second = &making->atoms[b];
    char name[NAME_ROOM];
    if (first->bare || second->bare) return NAN;
    if (kind == TML_BOND_INNER) return bond_of(making, first->residue, first->name, second->name);
    snprintf(name, sizeof name, "%c%s", kind == TML_BOND_CHAIN ? '-' : '=', first->name);
    return bond_of(making, second->residue, name, second->name);
}

/* ---- angles ---- */

static double angle_in(const tml_making *making, int32_t r, const tml_angle_row *rows, const char *a, const char *b,
                       const char *c) {
    for (; rows->a != NULL; rows++)
        if (strcmp(rows->b, b) == 0 &&
            ((strcmp(rows->a, a) == 0 && strcmp(rows->c, c) == 0) || (strcmp(rows->a, c) == 0 && strcmp(rows->c, a) == 0)) &&
            tml_condition_holds(making, r, rows->condition))
            return rows->degrees * TML_PI / 180;
    return NAN;
}

tml_bond_kind tml_kind_between(const tml_making *making, int32_t a, int32_t b) {
    const tml_molecule *molecule = making->molecule;
    for (int32_t k = molecule->neighbour_first[a]; k < molecule->neighbour_first[a + 1]; k++)
        if (molecule->neighbours[k] == b) return making->bond_kinds[molecule->neighbour_bonds[k]];
    return TML_BOND_LINK;
}

/* The name of `atom` as the rows of the residue of its neighbour `centre` call it. */
static void relative_name(const tml_making *making, int32_t atom, int32_t centre, char name[NAME_ROOM]) {
    const tml_atom *atoms = making->molecule->atoms;
    tml_bond_kind kind = tml_kind_between(making, centre, atom);
    const char *sign = "";
    if (kind == TML_BOND_LINK) sign = "=";
    if (kind == TML_BOND_CHAIN) sign = making->residues[atoms[centre].residue].next == atoms[atom].residue ? "+" : "-";
    snprintf(name, NAME_ROOM, "%s%.40s", sign, atoms[atom].name);
}

/* Seen from the residue after b's: a and b are the ones before. */
static double angle_from_next(const tml_making *making, int32_t a, int32_t b, int32_t c, const tml_template *form) {
    const tml_atom *atoms = making->molecule->atoms;
    char first[NAME_ROOM], middle[NAME_ROOM];
    snprintf(first, sizeof first, "-%.40s", atoms[a].name);
    snprintf(middle, sizeof middle, "-%.40s", atoms[b].name);
    return angle_in(making, atoms[c].residue, form->angles, first, middle, atoms[c].name);
}

static bool is_next(const tml_making *making, int32_t b, int32_t c) {
    const tml_atom *atoms = making->molecule->atoms;
    return tml_kind_between(making, b, c) == TML_BOND_CHAIN && making->residues[atoms[b].residue].next == atoms[c].residue;
}

double tml_lookup_angle(const tml_making *making, int32_t a, int32_t b, int32_t c) {
    const tml_atom *atoms = making->molecule->atoms;
    int32_t r = atoms[b].residue;
    const tml_template *form = making->residues[r].form;
    if (is_next(making, b, a)) {
        int32_t swap = a;
        a = c;
        c = swap;
    }
    bool onwards = is_next(making, b, c) && tml_kind_between(making, a, b) == TML_BOND_INNER;
    char first[NAME_ROOM], last[NAME_ROOM];
    relative_name(making, a, b, first);
    relative_name(making, c, b, last);
    double angle = onwards ? angle_from_next(making, a, b, c, making->residues[atoms[c].residue].form) : NAN;
    if (isnan(angle)) angle = angle_in(making, r, form->angles, first, atoms[b].name, last);
    if (isnan(angle)) angle = angle_in(making, r, form->family->common->angles, first, atoms[b].name, last);
    if (isnan(angle) && onwards) angle = angle_from_next(making, a, b, c, form->family->common);
    return angle;
}

/* ---- charges and atoms ---- */

int8_t tml_lookup_charge(const tml_making *making, int32_t r, const char *name) {
    const tml_template *form = making->residues[r].form;
    for (const tml_charge_row *row = form->charges; row->atom != NULL; row++)
        if (strcmp(row->atom, name) == 0 && tml_condition_holds(making, r, row->condition)) return row->charge;
    for (const tml_charge_row *row = form->family->common->charges; row->atom != NULL; row++)
        if (strcmp(row->atom, name) == 0 && tml_condition_holds(making, r, row->condition)) return row->charge;
    return 0;
}

int32_t tml_lookup_atom(const tml_making *making, int32_t r, const char *name, size_t length) {
    if (length > 0 && (*name == '-' || *name == '+')) {
        r = *name == '-' ? making->residues[r].previous : making->residues[r].next;
        name++;
        length--;
    }
    if (r < 0) return -1;
    const tml_layout_residue *residue = &making->residues[r];
    for (int32_t i = residue->first_atom; i < residue->first_atom + residue->atom_count; i++)
        if (strncmp(making->atoms[i].name, name, length) == 0 && making->atoms[i].name[length] == '\0')
            return making->atoms[i].present ? making->atoms[i].made : -1;
    return -1;
}

/* ---- the graph of bonds ---- */

bool tml_bonded(const tml_molecule *molecule, int32_t a, int32_t b) {
    for (int32_t k = molecule->neighbour_first[a]; k < molecule->neighbour_first[a + 1]; k++)
        if (molecule->neighbours[k] == b) return true;
    return false;
}

int32_t tml_degree(const tml_molecule *molecule, int32_t atom) {
    return molecule->neighbour_first[atom + 1] - molecule->neighbour_first[atom];
}

bool tml_is_bare(const tml_making *making, int32_t atom) {
    return making->residues[making->molecule->atoms[atom].residue].form == NULL;
}
