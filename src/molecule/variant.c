#include "molecule/making.h"

#include <stdio.h>
#include <string.h>

#include "molecule/nearest.h"

/* Contents: which residues stand at an end - what ends do - variants */

static tml_status join_residues(tml_making *making);
static tml_status apply_ends(tml_making *making);
static tml_status apply_changes(tml_making *making, int32_t r, const char *changes);

tml_status tml_apply_ends_and_variants(tml_making *making) {
    tml_status status = join_residues(making);
    if (status == TML_OK) status = apply_ends(making);
    for (int32_t r = 0; r < making->residue_count && status == TML_OK; r++)
        if (making->residues[r].form != NULL && making->residues[r].variant != NULL)
            status = apply_changes(making, r, making->residues[r].variant);
    return status;
}

/* ---- which residues stand at an end ---- */

/* Does the number run on from one residue to the next? */
static bool runs_on(const tml_layout_residue *a, const tml_layout_residue *b) {
    int first, second;
    if (sscanf(a->number, "%9d", &first) != 1 || sscanf(b->number, "%9d", &second) != 1) return true;
    return second - first <= 1;
}

/* Neighbours in a chain are linked unless one says otherwise; a break lies between two that both say so, or where a residue
 * that says so meets a jump of numbers. */
static bool linked(const tml_layout_residue *a, const tml_layout_residue *b) {
    if (a->form == NULL || b->form == NULL || a->form->family->polymer != b->form->family->polymer ||
        *a->form->family->tail == '\0' || *b->form->family->head == '\0')
        return false;
    if (a->linking == TML_LINKING_END || a->linking == TML_LINKING_SINGLE) return false;
    if (b->linking == TML_LINKING_START || b->linking == TML_LINKING_SINGLE) return false;
    bool a_breaks = a->linking == TML_LINKING_BREAK, b_breaks = b->linking == TML_LINKING_BREAK;
    return !(a_breaks && b_breaks) && !((a_breaks || b_breaks) && !runs_on(a, b));
}

static tml_status join_ring(tml_making *making, int32_t first, int32_t last);

static tml_status join_residues(tml_making *making) {
    for (int32_t c = 0; c < making->molecule->chain_count; c++) {
        const tml_chain *chain = &making->molecule->chains[c];
        int32_t ring_start = -1;
        for (int32_t k = 0; k < chain->residue_count; k++) {
            int32_t r = chain->first_residue + k;
            tml_layout_residue *residue = &making->residues[r];
            if (k > 0 && linked(residue - 1, residue)) {
                residue->previous = r - 1;
                residue[-1].next = r;
            }
            if (residue->linking != TML_LINKING_CYCLIC) continue;
            if (ring_start >= 0) {
                tml_status status = join_ring(making, ring_start, r);
                if (status != TML_OK) return status;
                ring_start = -1;
            } else {
                ring_start = r;
            }
        }
        if (ring_start >= 0)
            return tml_making_fail(making, making->residues[ring_start].place,
                                   "%s:%s is marked cyclic, but no other residue of the chain closes the ring",
                                   making->residues[ring_start].chain, making->residues[ring_start].number);
    }
    for (int32_t r = 0; r < making->residue_count; r++)
        if (making->residues[r].cis && making->residues[r].next < 0)
            return tml_making_fail(making, making->residues[r].place,
                                   "%s:%s has no peptide bond to a next residue that could be cis", making->residues[r].chain,
                                   making->residues[r].number);
    return TML_OK;
}

static tml_status join_ring(tml_making *making, int32_t first, int32_t last) {
    tml_layout_residue *start = &making->residues[first], *end = &making->residues[last];
    if (last == first + 1 || start->previous >= 0 || end->next >= 0)
        return tml_making_fail(making, end->place, "%s:%s and %s:%s cannot close a ring: %s", start->chain, start->number,
                               end->chain, end->number,
                               last == first + 1 ? "it would have two residues only" : "they are not the ends of their chain");
    start->previous = last;
    end->next = first;
    return TML_OK;
}

/* ---- what ends do ---- */

static const char *end_changes(const tml_end_row *rows, const char *name, tml_ends ends) {
    while (*rows->residue != '\0' && strcmp(rows->residue, name) != 0) rows++;
    return ends == TML_ENDS_CHARGED ? rows->charged : ends == TML_ENDS_NEUTRAL ? rows->neutral : "";
}

static tml_status apply_ends(tml_making *making) {
    const tml_outline *outline = making->outline;
    tml_molecule *molecule = making->molecule;
    for (size_t i = 0; i < outline->ends_count; i++) {
        int32_t chain = tml_index_find(molecule->chain_index, -1, outline->ends[i].chain);
        if (chain < 0)
            return tml_making_fail(making, outline->ends[i].place, "no chain \"%.32s\" in the sequence",
                                   outline->ends[i].chain);
        molecule->chains[chain].ends = outline->ends[i].ends;
    }
    for (int32_t r = 0; r < making->residue_count; r++) {
        const tml_layout_residue *residue = &making->residues[r];
        if (residue->form == NULL) continue;
        tml_ends ends = molecule->chains[residue->chain_index].ends;
        tml_linking linking = residue->linking;
        bool either = linking == TML_LINKING_DEFAULT || linking == TML_LINKING_SINGLE;
        tml_status status = TML_OK;
        if (residue->previous < 0 && (either || linking == TML_LINKING_START))
            status = apply_changes(making, r, end_changes(residue->form->family->first_ends, residue->name, ends));
        if (status == TML_OK && residue->next < 0 && (either || linking == TML_LINKING_END))
            status = apply_changes(making, r, end_changes(residue->form->family->last_ends, residue->name, ends));
        if (status != TML_OK) return status;
    }
    return TML_OK;
}

/* ---- variants ---- */

static tml_status unknown_atom(tml_making *making, int32_t r, const char *name, int length);
static tml_status check_held(tml_making *making, int32_t r);

/* "-HD1,+HE2": take away or add; what is so already may be said again. */
static tml_status apply_changes(tml_making *making, int32_t r, const char *changes) {
    const tml_layout_residue *residue = &making->residues[r];
    const char *at = changes;
    while (*at != '\0') {
        at += strspn(at, ", ");
        if (*at == '\0') break;
        size_t length = strcspn(at, ", ");
        if ((*at != '+' && *at != '-') || length < 2)
            return tml_making_fail(making, residue->place,
                                   "%s:%s: variant \"%.64s\": expected + or - and an atom name, as in -HD1,+HE2",
                                   residue->chain, residue->number, changes);
        int32_t found = -1;
        for (int32_t i = residue->first_atom; i < residue->first_atom + residue->atom_count && found < 0; i++)
            if (strncmp(making->atoms[i].name, at + 1, length - 1) == 0 && making->atoms[i].name[length - 1] == '\0') found = i;
        if (found < 0) return unknown_atom(making, r, at + 1, (int)(length - 1));
        making->atoms[found].present = *at == '+';
        at += length;
    }
    return check_held(making, r);
}

static tml_status unknown_atom(tml_making *making, int32_t r, const char *name, int length) {
    const tml_layout_residue *residue = &making->residues[r];
    char wanted[33], text[256] = "";
    snprintf(wanted, sizeof wanted, "%.*s", length, name);
    tml_nearest nearest;
    tml_nearest_start(&nearest, wanted);
    for (int32_t i = 0; i < residue->atom_count; i++) tml_nearest_offer(&nearest, making->atoms[residue->first_atom + i].name);
    tml_nearest_append(&nearest, text, sizeof text);
    return tml_making_fail(making, residue->place, "%s:%s: variant names %s, which %s never has; nearest: %s", residue->chain,
                           residue->number, wanted, residue->name, text);
}

/* Every atom that is there must have its parent. */
static tml_status check_held(tml_making *making, int32_t r) {
    const tml_layout_residue *residue = &making->residues[r];
    for (int32_t i = 0; i < residue->atom_count; i++) {
        const tml_layout_atom *atom = &making->atoms[residue->first_atom + i];
        const char *parent = residue->form->atoms[i].parent;
        if (!atom->present || *parent == '\0') continue;
        if (!making->atoms[tml_index_find(making->atom_index, r, parent)].present)
            return tml_making_fail(making, residue->place, "%s:%s: the variant leaves %s without %s, which carries it",
                                   residue->chain, residue->number, atom->name, parent);
    }
    return TML_OK;
}
