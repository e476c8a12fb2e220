#include "molecule/making.h"

#include <stdlib.h>
#include <string.h>

/* Contents: sets of chains - their residues - their atoms */

static tml_status make_set(tml_making *making, const tml_outline_alike *given, size_t *sets, size_t *atoms);

tml_status tml_make_alike(tml_making *making) {
    size_t sets = 0, atoms = 0; /* capacities */
    tml_status status = TML_OK;
    for (size_t i = 0; i < making->outline->alike_count && status == TML_OK; i++)
        status = make_set(making, &making->outline->alike[i], &sets, &atoms);
    return status;
}

/* ---- sets of chains ---- */

static tml_status find_chains(tml_making *making, const tml_outline_alike *given, int32_t *chains);
static tml_status match_chains(tml_making *making, const tml_outline_alike *given, const int32_t *chains);
static int32_t partner(const tml_molecule *molecule, int32_t atom, int32_t other_residue);
static bool turns_over(const tml_making *making, int32_t atom);

static tml_status make_set(tml_making *making, const tml_outline_alike *given, size_t *sets, size_t *atoms) {
    tml_molecule *molecule = making->molecule;
    int32_t copies = (int32_t)given->chain_count;
    int32_t *chains = tml_alloc(given->chain_count, sizeof *chains);
    if (chains == NULL) return tml_no_memory(making->error);
    tml_status status = find_chains(making, given, chains);
    if (status == TML_OK) status = match_chains(making, given, chains);
    const tml_chain *first = status == TML_OK ? &molecule->chains[chains[0]] : NULL;
    if (status == TML_OK && !tml_grow(&molecule->alike, sets, (size_t)molecule->alike_count + 1, sizeof *molecule->alike))
        status = tml_no_memory(making->error);
    if (status != TML_OK) {
        free(chains);
        return status;
    }
    tml_alike *set = &molecule->alike[molecule->alike_count++];
    *set = (tml_alike){.first = molecule->alike_atom_count, .copies = copies};
    for (int pass = 0; pass < 2 && status == TML_OK; pass++) { /* counts, then fills */
        int32_t at = 0;
        for (int32_t k = 0; k < first->residue_count; k++) {
            const tml_residue *residue = &molecule->residues[first->first_residue + k];
            for (int32_t i = residue->first_atom; i < residue->first_atom + residue->atom_count; i++) {
                bool all = molecule->atoms[i].element > 1 && !turns_over(making, i);
                for (int32_t c = 1; c < copies && all; c++)
                    all = partner(molecule, i, molecule->chains[chains[c]].first_residue + k) >= 0;
                if (!all) continue;
                for (int32_t c = 0; c < copies && pass == 1; c++)
                    molecule->alike_atoms[set->first + c * set->count + at] =
                        partner(molecule, i, molecule->chains[chains[c]].first_residue + k);
                at++;
            }
        }
        set->count = at;
        size_t need = (size_t)set->first + (size_t)copies * (size_t)at;
        if (pass == 0 && (need > INT32_MAX || !tml_grow(&molecule->alike_atoms, atoms, need, sizeof *molecule->alike_atoms)))
            status = tml_no_memory(making->error);
    }
    molecule->alike_atom_count += copies * set->count;
    free(chains);
    return status;
}

/* ---- their residues ---- */

static tml_status find_chains(tml_making *making, const tml_outline_alike *given, int32_t *chains) {
    for (size_t c = 0; c < given->chain_count; c++) {
        chains[c] = tml_index_find(making->molecule->chain_index, -1, given->chains[c]);
        if (chains[c] < 0)
            return tml_making_fail(making, given->place, "no chain \"%.32s\" in the sequence", given->chains[c]);
        for (size_t k = 0; k < c; k++)
            if (chains[k] == chains[c])
                return tml_making_fail(making, given->place, "chain %.32s is named twice", given->chains[c]);
    }
    return TML_OK;
}

/* Chains match residue by residue, in their order. */
static tml_status match_chains(tml_making *making, const tml_outline_alike *given, const int32_t *chains) {
    const tml_molecule *molecule = making->molecule;
    const tml_chain *first = &molecule->chains[chains[0]];
    for (size_t c = 1; c < given->chain_count; c++) {
        const tml_chain *other = &molecule->chains[chains[c]];
        if (other->residue_count != first->residue_count)
            return tml_making_fail(making, given->place, "chains %.32s and %.32s cannot be alike: they have %d and %d residues",
                                   first->code, other->code, first->residue_count, other->residue_count);
        for (int32_t k = 0; k < first->residue_count; k++) {
            const tml_residue *a = &molecule->residues[first->first_residue + k], *b = &molecule->residues[other->first_residue + k];
            if (strcmp(a->name, b->name) != 0)
                return tml_making_fail(making, given->place, "chains %.32s and %.32s cannot be alike: %s:%s is %s, %s:%s is %s",
                                       first->code, other->code, a->chain, a->number, a->name, b->chain, b->number, b->name);
        }
    }
    return TML_OK;
}

/* ---- their atoms ---- */

static int32_t partner(const tml_molecule *molecule, int32_t atom, int32_t other_residue) {
    return tml_molecule_find_atom(molecule, other_residue, molecule->atoms[atom].name);
}

/* Whether a half turn about a bond brings another atom to this one's place: both hang on one planar atom and look the same. */
static bool turns_over(const tml_making *making, int32_t atom) {
    const tml_molecule *molecule = making->molecule;
    for (int32_t k = molecule->neighbour_first[atom]; k < molecule->neighbour_first[atom + 1]; k++) {
        int32_t middle = molecule->neighbours[k];
        if (!making->planar[middle] || tml_degree(molecule, middle) != 3) continue;
        for (int32_t l = molecule->neighbour_first[middle]; l < molecule->neighbour_first[middle + 1]; l++) {
            int32_t other = molecule->neighbours[l];
            if (other != atom && molecule->atoms[other].element == molecule->atoms[atom].element &&
                molecule->atoms[other].residue == molecule->atoms[atom].residue && tml_molecule_same_neighbours(molecule, atom, other))
                return true;
        }
    }
    return false;
}
