#include "molecule/making.h"

#include <ctype.h>
#include <stdlib.h>
#include <string.h>

/* Contents: the steps - atoms and residues - bonds and neighbours */

static tml_status make_atoms(tml_making *making);
static tml_status make_bonds(tml_making *making);
static tml_status list_neighbours(tml_making *making);

tml_status tml_molecule_build(const tml_outline *outline, const char *const *files, tml_strings *pool, tml_molecule *out,
                              tml_error *error) {
    *out = (tml_molecule){0};
    tml_making making = {.outline = outline, .files = files, .pool = pool, .molecule = out, .error = error};
    tml_status status = tml_lay_out_residues(&making);
    if (status == TML_OK) status = tml_lay_out_atoms(&making);
    if (status == TML_OK) status = tml_apply_ends_and_variants(&making);
    if (status == TML_OK) status = tml_lay_out_bonds(&making);
    if (status == TML_OK) status = make_atoms(&making);
    if (status == TML_OK) status = make_bonds(&making);
    if (status == TML_OK) status = list_neighbours(&making);
    if (status == TML_OK) status = tml_make_terms(&making);
    if (status == TML_OK) status = tml_make_alike(&making);
    tml_index_free(making.atom_index);
    free(making.residues);
    free(making.atoms);
    free(making.bonds);
    free(making.degree);
    free(making.bond_kinds);
    free(making.planar);
    return status;
}

/* ---- atoms and residues ---- */

static void read_number(tml_residue *residue) {
    char *end;
    long value = strtol(residue->number, &end, 10);
    residue->sequence = value < INT32_MIN ? INT32_MIN : value > INT32_MAX ? INT32_MAX : (int32_t)value;
    residue->insertion = end != residue->number && isalpha((unsigned char)*end) && end[1] == '\0' ? *end : ' ';
}

/* What is present of the layout. */
static tml_status make_atoms(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    size_t count = 0;
    for (int32_t i = 0; i < making->atom_count; i++) count += making->atoms[i].present;
    molecule->atoms = tml_alloc(count, sizeof *molecule->atoms);
    molecule->residues = tml_alloc((size_t)making->residue_count, sizeof *molecule->residues);
    molecule->atom_index = tml_index_new();
    if (molecule->atoms == NULL || molecule->residues == NULL || molecule->atom_index == NULL)
        return tml_no_memory(making->error);
    for (int32_t r = 0; r < making->residue_count; r++) {
        const tml_layout_residue *from = &making->residues[r];
        tml_residue *residue = &molecule->residues[molecule->residue_count++];
        *residue = (tml_residue){.chain = from->chain,
                                 .number = from->number,
                                 .name = from->name,
                                 .chain_index = from->chain_index,
                                 .first_atom = molecule->atom_count,
                                 .position = r - molecule->chains[from->chain_index].first_residue,
                                 .polymer = from->form == NULL ? TML_POLYMER_NONE : from->form->family->polymer,
                                 .type = from->type,
                                 .standard = from->standard};
        read_number(residue);
        for (int32_t i = from->first_atom; i < from->first_atom + from->atom_count; i++) {
            tml_layout_atom *atom = &making->atoms[i];
            if (!atom->present) continue;
            atom->made = molecule->atom_count++;
            const char *name = tml_strings_add(making->pool, atom->name);
            if (name == NULL || !tml_index_add(molecule->atom_index, r, name, atom->made)) return tml_no_memory(making->error);
            int8_t charge = atom->bare ? 0 : tml_lookup_charge(making, r, atom->name);
            molecule->atoms[atom->made] =
                (tml_atom){.name = name, .residue = r, .element = (uint8_t)atom->element, .charge = charge};
        }
        residue->atom_count = molecule->atom_count - residue->first_atom;
    }
    return TML_OK;
}

/* ---- bonds and neighbours ---- */

/* Half-width for bounds, Å: about the spread of the crystal structures that Engh & Huber averaged (0.01 to 0.03). */
static const double BOND_TOLERANCE = 0.02;

static tml_status make_bonds(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    molecule->bonds = tml_alloc(making->bond_count, sizeof *molecule->bonds);
    making->bond_kinds = tml_alloc(making->bond_count, sizeof *making->bond_kinds);
    if (molecule->bonds == NULL || making->bond_kinds == NULL) return tml_no_memory(making->error);
    for (size_t i = 0; i < making->bond_count; i++) {
        const tml_layout_bond *bond = &making->bonds[i];
        int32_t a = making->atoms[bond->a].made, b = making->atoms[bond->b].made;
        if (a < 0 || b < 0) continue; /* a link took its hydrogen away */
        if (bond->kind == TML_BOND_LINK && molecule->atoms[a].charge < 0) molecule->atoms[a].charge = 0;
        if (bond->kind == TML_BOND_LINK && molecule->atoms[b].charge < 0) molecule->atoms[b].charge = 0;
        making->bond_kinds[molecule->bond_count] = bond->kind;
        molecule->bonds[molecule->bond_count++] = (tml_bond){a, b, bond->length, BOND_TOLERANCE};
    }
    return TML_OK;
}

static tml_status refuse_double_link(tml_making *making, int32_t a, int32_t b);

static tml_status list_neighbours(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    size_t atoms = (size_t)molecule->atom_count, bonds = (size_t)molecule->bond_count;
    molecule->neighbour_first = tml_alloc(atoms + 1, sizeof *molecule->neighbour_first);
    molecule->neighbours = tml_alloc(2 * bonds, sizeof *molecule->neighbours);
    molecule->neighbour_bonds = tml_alloc(2 * bonds, sizeof *molecule->neighbour_bonds);
    int32_t *filled = tml_alloc(atoms, sizeof *filled), *seen = tml_alloc(atoms, sizeof *seen);
    tml_status status = TML_OK;
    if (molecule->neighbour_first == NULL || molecule->neighbours == NULL || molecule->neighbour_bonds == NULL ||
        filled == NULL || seen == NULL) {
        status = tml_no_memory(making->error);
        goto done;
    }
    int32_t *first = molecule->neighbour_first;
    for (size_t i = 0; i < bonds; i++) {
        first[molecule->bonds[i].a + 1]++;
        first[molecule->bonds[i].b + 1]++;
    }
    for (size_t i = 0; i < atoms; i++) first[i + 1] += first[i];
    for (size_t i = 0; i < bonds; i++) {
        int32_t ends[2] = {molecule->bonds[i].a, molecule->bonds[i].b};
        for (int k = 0; k < 2; k++) {
            int32_t at = first[ends[k]] + filled[ends[k]]++;
            molecule->neighbours[at] = ends[1 - k];
            molecule->neighbour_bonds[at] = (int32_t)i;
        }
    }
    for (size_t i = 0; i < atoms && status == TML_OK; i++)
        for (int32_t k = first[i]; k < first[i + 1] && status == TML_OK; k++) {
            if (seen[molecule->neighbours[k]] == (int32_t)i + 1)
                status = refuse_double_link(making, (int32_t)i, molecule->neighbours[k]);
            seen[molecule->neighbours[k]] = (int32_t)i + 1;
        }
done:
    free(filled);
    free(seen);
    return status;
}

/* Two bonds between the same atoms: the later link is to blame. */
static tml_status refuse_double_link(tml_making *making, int32_t a, int32_t b) {
    tml_place place = {-1, 0, 0};
    for (size_t i = 0; i < making->outline->link_count; i++) {
        const tml_outline_link *link = &making->outline->links[i];
        int32_t ends[2];
        if (tml_find_layout_atom(making, &link->a, &ends[0]) != TML_OK ||
            tml_find_layout_atom(making, &link->b, &ends[1]) != TML_OK)
            continue;
        if ((ends[0] == a && ends[1] == b) || (ends[0] == b && ends[1] == a)) place = link->place;
    }
    char first[64], second[64];
    tml_molecule_address(making->molecule, a, first, sizeof first);
    tml_molecule_address(making->molecule, b, second, sizeof second);
    return tml_making_fail(making, place, "%s and %s are bonded already", first, second);
}
