#include "molecule/molecule.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "molecule/nearest.h"

void tml_molecule_clear(tml_molecule *molecule) {
    free(molecule->atoms);
    free(molecule->residues);
    free(molecule->chains);
    free(molecule->alike);
    free(molecule->alike_atoms);
    free(molecule->bonds);
    free(molecule->angles);
    free(molecule->torsions);
    free(molecule->centres);
    free(molecule->planes);
    free(molecule->plane_atoms);
    free(molecule->plane_xy);
    free(molecule->peptides);
    free(molecule->neighbour_first);
    free(molecule->neighbours);
    free(molecule->neighbour_bonds);
    free(molecule->angle_first);
    free(molecule->torsion_first);
    tml_index_free(molecule->chain_index);
    tml_index_free(molecule->residue_index);
    tml_index_free(molecule->atom_index);
    *molecule = (tml_molecule){0};
}

int32_t tml_molecule_find_residue(const tml_molecule *molecule, const char *chain, const char *number) {
    int32_t index = tml_index_find(molecule->chain_index, -1, chain);
    return index < 0 ? -1 : tml_index_find(molecule->residue_index, index, number);
}

int32_t tml_molecule_locate_residue(const tml_molecule *molecule, const char *chain, const char *number, char *why,
                                    size_t size) {
    int32_t found = tml_molecule_find_residue(molecule, chain, number);
    if (size == 0) return found;
    why[0] = '\0';
    if (found >= 0) return found;
    int32_t index = tml_index_find(molecule->chain_index, -1, chain);
    if (*chain == '\0') {
        snprintf(why, size, "there are no atoms without a residue");
    } else if (index < 0) {
        tml_nearest nearest;
        tml_nearest_start(&nearest, chain);
        for (int32_t c = 0; c < molecule->chain_count; c++)
            if (*molecule->chains[c].code != '\0') tml_nearest_offer(&nearest, molecule->chains[c].code);
        snprintf(why, size, "%.32s:%.32s: no such chain; %s", chain, number,
                 nearest.count > 0 ? "nearest: " : "there are none");
        tml_nearest_append(&nearest, why, size);
    } else {
        const tml_chain *within = &molecule->chains[index];
        snprintf(why, size, "%.32s:%.32s: no such residue; chain %.32s has %.32s to %.32s", chain, number, chain,
                 molecule->residues[within->first_residue].number,
                 molecule->residues[within->first_residue + within->residue_count - 1].number);
    }
    return -1;
}

int32_t tml_molecule_find_atom(const tml_molecule *molecule, int32_t residue, const char *name) {
    return tml_index_find(molecule->atom_index, residue, name);
}

void tml_molecule_suggest(const tml_molecule *molecule, int32_t residue, const char *name, char *text, size_t size) {
    if (size == 0) return;
    const tml_residue *in = &molecule->residues[residue];
    tml_nearest nearest;
    tml_nearest_start(&nearest, name);
    for (int32_t i = 0; i < in->atom_count; i++) tml_nearest_offer(&nearest, molecule->atoms[in->first_atom + i].name);
    const char *colon = *in->chain != '\0' || *in->number != '\0' ? ":" : "";
    bool named = *in->name != '\0';
    snprintf(text, size, "%.32s%s%.32s%s%.32s: no such atom%s%.32s; %s ", in->chain, colon, in->number, colon, name,
             named ? " in " : "", in->name, named ? "it has" : "nearest:");
    tml_nearest_append(&nearest, text, size);
}

/* Whether the order of three of a centre's arms turns as the centre's own first three do: 1, or -1. */
static int turn_of(const tml_centre *centre, const int32_t arms[3]) {
    int at[3] = {3, 3, 3}, missing = 6, turn = 1;
    for (int k = 0; k < 3; k++)
        for (int i = 0; i < 4; i++)
            if (centre->arms[i] == arms[k]) at[k] = i;
    for (int k = 0; k < 3; k++) {
        missing -= at[k];
        for (int i = 0; i < k; i++)
            if (at[i] > at[k]) turn = -turn;
    }
    return missing % 2 == 0 ? -turn : turn; /* leaving out the fourth arm or the second keeps the sense, the others turn it */
}

int tml_molecule_hand(const tml_molecule *molecule, int32_t n, int32_t ca, int32_t c) {
    int32_t side = -1;
    for (int32_t k = molecule->neighbour_first[ca]; k < molecule->neighbour_first[ca + 1]; k++) {
        int32_t next = molecule->neighbours[k];
        if (next == n || next == c || molecule->atoms[next].element == 1) continue;
        if (side >= 0) return 0;
        side = next;
    }
    if (side < 0) return 0;
    int32_t low = 0, high = molecule->sorted_centres;
    while (low < high) {
        int32_t middle = low + (high - low) / 2;
        if (molecule->centres[middle].centre < ca)
            low = middle + 1;
        else
            high = middle;
    }
    if (low == molecule->sorted_centres || molecule->centres[low].centre != ca || !molecule->centres[low].fixed) return 0;
    return molecule->centres[low].sign * turn_of(&molecule->centres[low], (const int32_t[3]){n, c, side});
}

void tml_molecule_address(const tml_molecule *molecule, int32_t atom, char *text, size_t size) {
    if (size == 0) return;
    const tml_residue *in = &molecule->residues[molecule->atoms[atom].residue];
    if (*in->chain == '\0' && *in->number == '\0')
        snprintf(text, size, "%s", molecule->atoms[atom].name);
    else
        snprintf(text, size, "%s:%s:%s", in->chain, in->number, molecule->atoms[atom].name);
}

bool tml_molecule_same_neighbours(const tml_molecule *molecule, int32_t a, int32_t b) {
    int32_t elements[UINT8_MAX + 1] = {0};
    for (int32_t k = molecule->neighbour_first[a]; k < molecule->neighbour_first[a + 1]; k++)
        elements[molecule->atoms[molecule->neighbours[k]].element]++;
    for (int32_t k = molecule->neighbour_first[b]; k < molecule->neighbour_first[b + 1]; k++)
        elements[molecule->atoms[molecule->neighbours[k]].element]--;
    for (int e = 0; e <= UINT8_MAX; e++)
        if (elements[e] != 0) return false;
    return true;
}

/* Like arms end alike two bonds away, too: methyl groups do, the carbonyl and the side chain at an alpha carbon do not. */
bool tml_molecule_is_prochiral(const tml_molecule *molecule, const tml_centre *centre) {
    for (int i = 0; i < 4; i++)
        for (int j = i + 1; j < 4; j++) {
            int32_t a = centre->arms[i], b = centre->arms[j];
            if (a < 0 || b < 0 || molecule->atoms[a].element != molecule->atoms[b].element) continue;
            bool held = false, ends = true; /* all but the centre are hydrogens, or there are none */
            for (int32_t k = molecule->neighbour_first[a]; k < molecule->neighbour_first[a + 1]; k++) {
                held = held || molecule->neighbours[k] == centre->centre;
                ends = ends && (molecule->neighbours[k] == centre->centre || molecule->atoms[molecule->neighbours[k]].element == 1);
            }
            if (held && ends && tml_molecule_same_neighbours(molecule, a, b)) return true;
        }
    return false;
}
