#include "molecule/making.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "molecule/elements.h"
#include "molecule/nearest.h"

/* Contents: residues in chain order - their templates - atoms - messages and finding */

static tml_status number_chains(tml_making *making);
static tml_status add_chain(tml_making *making, const char *code, int32_t *index);
static tml_status order_by_chain(tml_making *making);
static tml_status find_template(tml_making *making, tml_layout_residue *residue);

enum { MOST_ATOMS = 50 * 1000 * 1000 }; /* keeps every count of terms within 32 bits */

/* ---- residues in chain order ---- */

/* Residues of the sequence and of single atoms, chains together, each chain in the order of the outline. */
tml_status tml_lay_out_residues(tml_making *making) {
    const tml_outline *outline = making->outline;
    tml_molecule *molecule = making->molecule;
    if (outline->residue_count > MOST_ATOMS || outline->atom_count > MOST_ATOMS)
        return tml_fail(making->error, TML_TOO_LARGE, "the molecule has more than %d atoms", MOST_ATOMS);
    making->residues = tml_alloc(outline->residue_count + outline->atom_count, sizeof *making->residues);
    molecule->chain_index = tml_index_new();
    molecule->residue_index = tml_index_new();
    making->atom_index = tml_index_new();
    if (making->residues == NULL || molecule->chain_index == NULL || molecule->residue_index == NULL ||
        making->atom_index == NULL)
        return tml_no_memory(making->error);
    tml_status status = number_chains(making);
    if (status == TML_OK) status = order_by_chain(making);
    return status;
}

/* A residue for every one of the sequence, and for every new chain and number among the single atoms. */
static tml_status number_chains(tml_making *making) {
    const tml_outline *outline = making->outline;
    tml_molecule *molecule = making->molecule;
    for (size_t i = 0; i < outline->residue_count; i++) {
        const tml_outline_residue *from = &outline->residues[i];
        tml_layout_residue *residue = &making->residues[making->residue_count];
        *residue = (tml_layout_residue){.chain = from->chain,
                                        .number = from->number,
                                        .name = from->name,
                                        .variant = from->variant,
                                        .linking = from->linking,
                                        .cis = from->cis,
                                        .trans = from->trans,
                                        .previous = -1,
                                        .next = -1,
                                        .place = from->place};
        tml_status status = add_chain(making, from->chain, &residue->chain_index);
        if (status == TML_OK) status = find_template(making, residue);
        if (status != TML_OK) return status;
        int32_t other = tml_index_find(molecule->residue_index, residue->chain_index, from->number);
        if (other >= 0)
            return tml_making_fail(making, from->place, "%s:%s is given twice, as %s and as %s", from->chain, from->number,
                                   making->residues[other].name, from->name);
        if (!tml_index_add(molecule->residue_index, residue->chain_index, residue->number, making->residue_count++))
            return tml_no_memory(making->error);
    }
    int32_t sequence_count = making->residue_count;
    for (size_t i = 0; i < outline->atom_count; i++) {
        const tml_outline_atom *from = &outline->atoms[i];
        int32_t chain;
        tml_status status = add_chain(making, from->chain, &chain);
        if (status != TML_OK) return status;
        int32_t other = tml_index_find(molecule->residue_index, chain, from->number);
        if (other >= 0 && other < sequence_count)
            return tml_making_fail(making, from->place,
                                   "%s:%s is %s of the sequence already; atom %s needs a residue number of its own",
                                   from->chain, from->number, making->residues[other].name, from->name);
        if (other >= 0) continue;
        making->residues[making->residue_count] = (tml_layout_residue){.chain = from->chain,
                                                                       .number = from->number,
                                                                       .name = from->residue,
                                                                       .variant = "",
                                                                       .previous = -1,
                                                                       .next = -1,
                                                                       .chain_index = chain,
                                                                       .place = from->place};
        if (!tml_index_add(molecule->residue_index, chain, from->number, making->residue_count++))
            return tml_no_memory(making->error);
    }
    return TML_OK;
}

static tml_status add_chain(tml_making *making, const char *code, int32_t *index) {
    tml_molecule *molecule = making->molecule;
    *index = tml_index_find(molecule->chain_index, -1, code);
    if (*index >= 0) return TML_OK;
    *index = molecule->chain_count++;
    return tml_index_add(molecule->chain_index, -1, code, *index) ? TML_OK : tml_no_memory(making->error);
}

/* Counting sort, stable; chains and the residues' index follow. */
static tml_status order_by_chain(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    size_t count = (size_t)making->residue_count;
    tml_layout_residue *ordered = tml_alloc(count, sizeof *ordered);
    int32_t *filled = tml_alloc((size_t)molecule->chain_count, sizeof *filled);
    molecule->chains = tml_alloc((size_t)molecule->chain_count, sizeof *molecule->chains);
    tml_index *index = tml_index_new();
    bool good = ordered != NULL && filled != NULL && molecule->chains != NULL && index != NULL;
    if (good) {
        for (size_t i = 0; i < count; i++) {
            tml_chain *chain = &molecule->chains[making->residues[i].chain_index];
            chain->code = making->residues[i].chain;
            chain->residue_count++;
        }
        for (int32_t c = 1; c < molecule->chain_count; c++)
            molecule->chains[c].first_residue = molecule->chains[c - 1].first_residue + molecule->chains[c - 1].residue_count;
        for (size_t i = 0; i < count && good; i++) {
            int32_t chain = making->residues[i].chain_index, at = molecule->chains[chain].first_residue + filled[chain]++;
            ordered[at] = making->residues[i];
            good = tml_index_add(index, chain, ordered[at].number, at);
        }
    }
    free(filled);
    if (!good) {
        free(ordered);
        tml_index_free(index);
        return tml_no_memory(making->error);
    }
    free(making->residues);
    tml_index_free(molecule->residue_index);
    making->residues = ordered;
    molecule->residue_index = index;
    return TML_OK;
}

/* ---- their templates ---- */

static tml_status find_template(tml_making *making, tml_layout_residue *residue) {
    residue->form = tml_find_builtin(residue->name);
    residue->standard = residue->form != NULL;
    for (size_t i = 0; i < making->outline->component_count; i++) {
        const tml_component *component = making->outline->components[i];
        if (!component->made || strcmp(component->name, residue->name) != 0) continue;
        residue->form = &component->form;
        residue->type = component->type;
        residue->own = true;
    }
    if (residue->form != NULL) return TML_OK;
    char known[256] = "";
    const tml_template *form;
    for (int32_t i = 0; (form = tml_builtin(i)) != NULL; i++) {
        size_t used = strlen(known);
        snprintf(known + used, sizeof known - used, "%s%s", used == 0 ? "" : " ", form->name);
    }
    return tml_making_fail(making, residue->place,
                           "%s:%s: unknown residue \"%.32s\"; a component dictionary (CIF) that describes it can be one more input, or named by "
                           "`component %.32s FILE` in a sheet; built in are %s",
                           residue->chain, residue->number, residue->name, residue->name, known);
}

/* ---- atoms ---- */

static int element_of(const tml_atom_row *row) {
    if (row->element != 0) return row->element;
    const char symbol[2] = {row->name[0], '\0'};
    return tml_element_number(symbol);
}

/* Every atom that a template knows, present or not, and every single atom of the outline. */
tml_status tml_lay_out_atoms(tml_making *making) {
    const tml_outline *outline = making->outline;
    tml_molecule *molecule = making->molecule;
    size_t total = outline->atom_count;
    for (size_t i = 0; i < outline->atom_count; i++) {
        const tml_outline_atom *atom = &outline->atoms[i];
        int32_t chain = tml_index_find(molecule->chain_index, -1, atom->chain);
        making->residues[tml_index_find(molecule->residue_index, chain, atom->number)].atom_count++;
    }
    for (int32_t r = 0; r < making->residue_count; r++)
        if (making->residues[r].form != NULL)
            for (const tml_atom_row *row = making->residues[r].form->atoms; row->name != NULL; row++) {
                making->residues[r].atom_count++;
                total++;
            }
    if (total > MOST_ATOMS) return tml_fail(making->error, TML_TOO_LARGE, "the molecule has more than %d atoms", MOST_ATOMS);
    making->atoms = tml_alloc(total, sizeof *making->atoms);
    if (making->atoms == NULL) return tml_no_memory(making->error);
    making->atom_count = (int32_t)total;
    int32_t at = 0;
    for (int32_t r = 0; r < making->residue_count; r++) {
        tml_layout_residue *residue = &making->residues[r];
        residue->first_atom = at;
        at += residue->atom_count;
        if (residue->form == NULL) {
            residue->atom_count = 0;
            continue;
        }
        tml_layout_atom *atom = &making->atoms[residue->first_atom];
        for (const tml_atom_row *row = residue->form->atoms; row->name != NULL; row++, atom++) {
            *atom = (tml_layout_atom){.name = row->name,
                                      .element = element_of(row),
                                      .residue = r,
                                      .made = -1,
                                      .present = row->optional != TML_OPTIONAL,
                                      .place = residue->place};
            if (!tml_index_add(making->atom_index, r, row->name, (int32_t)(atom - making->atoms)))
                return tml_no_memory(making->error);
        }
    }
    for (size_t i = 0; i < outline->atom_count; i++) {
        const tml_outline_atom *from = &outline->atoms[i];
        int32_t chain = tml_index_find(molecule->chain_index, -1, from->chain);
        int32_t r = tml_index_find(molecule->residue_index, chain, from->number);
        tml_layout_residue *residue = &making->residues[r];
        int32_t index = residue->first_atom + residue->atom_count++;
        if (tml_index_find(making->atom_index, r, from->name) >= 0)
            return tml_making_fail(making, from->place, "atom %s%s%s%s%s is given twice", from->chain, *from->chain ? ":" : "",
                                   from->number, *from->number ? ":" : "", from->name);
        making->atoms[index] = (tml_layout_atom){.name = from->name,
                                                 .element = from->element,
                                                 .residue = r,
                                                 .made = -1,
                                                 .present = true,
                                                 .bare = true,
                                                 .place = from->place};
        if (!tml_index_add(making->atom_index, r, from->name, index)) return tml_no_memory(making->error);
    }
    return TML_OK;
}

/* ---- messages and finding ---- */

tml_status tml_making_fail(tml_making *making, tml_place place, const char *format, ...) {
    char text[sizeof making->error->message];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(text, sizeof text, format, arguments);
    va_end(arguments);
    return tml_fail_at(making->error, TML_BAD_INPUT, place.file < 0 || making->files == NULL ? NULL : making->files[place.file],
                       place.line, place.column, "%s", text);
}

tml_status tml_find_layout_atom(tml_making *making, const tml_address *address, int32_t *found) {
    const tml_molecule *molecule = making->molecule;
    int32_t chain = tml_index_find(molecule->chain_index, -1, address->chain);
    int32_t r = chain < 0 ? -1 : tml_index_find(molecule->residue_index, chain, address->number);
    const char *colon = *address->chain != '\0' || *address->number != '\0' ? ":" : "";
    if (r < 0) {
        char text[256] = "";
        tml_nearest nearest;
        tml_nearest_start(&nearest, chain < 0 ? address->chain : address->number);
        if (chain < 0)
            for (int32_t c = 0; c < molecule->chain_count; c++) tml_nearest_offer(&nearest, molecule->chains[c].code);
        else
            for (int32_t k = 0; k < molecule->chains[chain].residue_count; k++)
                tml_nearest_offer(&nearest, making->residues[molecule->chains[chain].first_residue + k].number);
        tml_nearest_append(&nearest, text, sizeof text);
        return tml_making_fail(making, address->place, "%s%s%s%s%s: no such %s; nearest: %s", address->chain, colon,
                               address->number, colon, address->atom, chain < 0 ? "chain" : "residue",
                               *text == '\0' ? "none" : text);
    }
    const tml_layout_residue *residue = &making->residues[r];
    if (address->residue != NULL && *address->residue != '\0' && strcmp(address->residue, residue->name) != 0)
        return tml_making_fail(making, address->place, "%s:%s is %s, not %s", address->chain, address->number, residue->name,
                               address->residue);
    *found = tml_index_find(making->atom_index, r, address->atom);
    if (*found >= 0 && making->atoms[*found].present) return TML_OK;
    char text[256] = "";
    tml_nearest nearest;
    tml_nearest_start(&nearest, address->atom);
    for (int32_t i = residue->first_atom; i < residue->first_atom + residue->atom_count; i++)
        if (making->atoms[i].present) tml_nearest_offer(&nearest, making->atoms[i].name);
    tml_nearest_append(&nearest, text, sizeof text);
    return tml_making_fail(making, address->place, "%s%s%s%s%s: no such atom%s%s; it has %s", address->chain, colon,
                           address->number, colon, address->atom, *residue->name == '\0' ? "" : " in ", residue->name, text);
}
