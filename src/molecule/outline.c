#include "molecule/outline.h"

#include <stdlib.h>
#include <string.h>

void tml_outline_clear(tml_outline *outline) {
    for (size_t i = 0; i < outline->plane_count; i++) free(outline->planes[i].atoms);
    for (size_t i = 0; i < outline->component_count; i++) tml_component_free(outline->components[i]);
    free(outline->components);
    free(outline->residues);
    free(outline->atoms);
    free(outline->links);
    free(outline->chirals);
    free(outline->planes);
    free(outline->ends);
    for (size_t i = 0; i < outline->alike_count; i++) free(outline->alike[i].chains);
    free(outline->alike);
    *outline = (tml_outline){0};
}

/* ---- chains of the same residues ---- */

/* The residues of one chain in their order, as a linked list through `next`. */
typedef struct chain { const char *code; size_t first, last, count; bool taken; } chain;

static bool same_residues(const tml_outline *outline, const size_t *next, const chain *a, const chain *b) {
    if (a->count != b->count) return false;
    size_t i = a->first, j = b->first;
    for (size_t k = 0; k < a->count; k++, i = next[i], j = next[j])
        if (strcmp(outline->residues[i].name, outline->residues[j].name) != 0) return false;
    return true;
}

static bool stated(const tml_outline *outline, const char *code) {
    for (size_t i = 0; i < outline->alike_count; i++)
        for (size_t k = 0; k < outline->alike[i].chain_count; k++)
            if (strcmp(outline->alike[i].chains[k], code) == 0) return true;
    return false;
}

/* Chains by their codes, with their residues threaded through `next`; a file's residues mostly come chain by chain. */
static bool list_chains(const tml_outline *outline, size_t *next, chain **chains, size_t *count) {
    size_t capacity = 0, at = 0;
    for (size_t i = 0; i < outline->residue_count; i++) {
        const char *code = outline->residues[i].chain;
        if (at >= *count || strcmp((*chains)[at].code, code) != 0)
            for (at = 0; at < *count && strcmp((*chains)[at].code, code) != 0;) at++;
        if (at == *count) {
            if (!tml_grow(chains, &capacity, *count + 1, sizeof **chains)) return false;
            (*chains)[(*count)++] = (chain){.code = code, .first = i, .last = i, .taken = stated(outline, code)};
        }
        next[(*chains)[at].last] = i;
        (*chains)[at].last = i;
        (*chains)[at].count++;
    }
    return true;
}

static bool add_alike(tml_outline *outline, const size_t *next, chain *chains, size_t count, size_t first) {
    size_t capacity = 0;
    tml_outline_alike made = {.place = outline->residues[chains[first].first].place};
    for (size_t k = first; k < count; k++) {
        if (chains[k].taken || !same_residues(outline, next, &chains[first], &chains[k])) continue;
        chains[k].taken = true;
        if (!tml_grow(&made.chains, &capacity, made.chain_count + 1, sizeof *made.chains)) {
            free(made.chains);
            return false;
        }
        made.chains[made.chain_count++] = chains[k].code;
    }
    if (made.chain_count < 2) {
        free(made.chains);
        return true;
    }
    if (!tml_grow(&outline->alike, &outline->alike_capacity, outline->alike_count + 1, sizeof *outline->alike)) {
        free(made.chains);
        return false;
    }
    outline->alike[outline->alike_count++] = made;
    return true;
}

bool tml_outline_find_alike(tml_outline *outline) {
    size_t *next = tml_alloc(outline->residue_count, sizeof *next), count = 0;
    chain *chains = NULL;
    bool room = next != NULL && list_chains(outline, next, &chains, &count);
    for (size_t k = 0; room && k < count; k++)
        if (!chains[k].taken && chains[k].count > 1) room = add_alike(outline, next, chains, count, k);
    free(next);
    free(chains);
    return room;
}
