#include "ensemble/match.h"

#include <stdlib.h>
#include <string.h>

/* Contents: making - chains - which are alike - atoms - exchanging */

/* A chain's residues stand together in the list's `residues`. */
typedef struct chain {
    const char *code;
    int32_t first, count;
    bool counts;
} chain;

typedef struct chain_list {
    chain *chains;
    int32_t count;
    int32_t *of_residue, *residues;
} chain_list;

struct tml_match {
    const tml_coordinates *one, *other;
    chain_list ones, others;
    tml_index *index;   /* (chain, number) to residues and (ATOMS + residue, name) to atoms, of `other` */
    int32_t *to, *kept; /* for each chain of `one` that of `other`, or -1 */
    int32_t *atoms;
    int32_t *members, *group_first,
        group_count;          /* chains of `one` that can be exchanged, group by group; group_count + 1 firsts */
    int32_t *by_code, *order; /* for each member what its code tells, and whose partner it has now, from 0 in its group */
    bool too_many;
};

/* Comparing chains with each other ends where there are so many that it would take minutes. */
enum { CODES = -1, ATOMS = 1 << 30, MOST_COMPARED = 1 << 26 };

static tml_status list_chains(const tml_coordinates *of, chain_list *list);
static bool index_other(tml_match *match);
static void pair_chains(tml_match *match, bool *used);
static void find_groups(tml_match *match, bool *taken);
static void match_atoms(tml_match *match);

/* ---- making ---- */

tml_status tml_match_new(const tml_coordinates *one, const tml_coordinates *other, const bool *counts, tml_match **out,
                         tml_error *error) {
    tml_match *match = *out = tml_alloc(1, sizeof *match);
    if (match == NULL) return tml_no_memory(error);
    match->one = one;
    match->other = other;
    match->index = tml_index_new();
    if (match->index == NULL || list_chains(one, &match->ones) != TML_OK || list_chains(other, &match->others) != TML_OK)
        return tml_no_memory(error);
    size_t chains = (size_t)match->ones.count;
    match->to = tml_alloc(chains, sizeof *match->to);
    match->kept = tml_alloc(chains, sizeof *match->kept);
    match->members = tml_alloc(chains, sizeof *match->members);
    match->group_first = tml_alloc(chains + 1, sizeof *match->group_first);
    match->by_code = tml_alloc(chains, sizeof *match->by_code);
    match->order = tml_alloc(chains, sizeof *match->order);
    match->atoms = tml_alloc(one->atom_count, sizeof *match->atoms);
    bool *used = tml_alloc((size_t)match->others.count, sizeof *used), *taken = tml_alloc(chains, sizeof *taken);
    bool room = match->to != NULL && match->kept != NULL && match->members != NULL && match->group_first != NULL &&
                match->by_code != NULL && match->order != NULL && match->atoms != NULL && used != NULL && taken != NULL &&
                index_other(match);
    if (room) {
        for (size_t a = 0; a < one->atom_count; a++) {
            int32_t in = match->ones.of_residue[one->atoms[a].residue];
            if (counts[a] && in >= 0) match->ones.chains[in].counts = true;
        }
        match->too_many = (double)match->ones.count * (double)other->residue_count > MOST_COMPARED ||
                          (double)match->ones.count * (double)one->residue_count > MOST_COMPARED;
        pair_chains(match, used);
        if (!match->too_many) find_groups(match, taken);
        match_atoms(match);
        tml_match_keep(match);
    }
    free(used);
    free(taken);
    return room ? TML_OK : tml_no_memory(error);
}

void tml_match_free(tml_match *match) {
    if (match == NULL) return;
    tml_index_free(match->index);
    free(match->ones.chains);
    free(match->ones.of_residue);
    free(match->ones.residues);
    free(match->others.chains);
    free(match->others.of_residue);
    free(match->others.residues);
    free(match->to);
    free(match->kept);
    free(match->members);
    free(match->by_code);
    free(match->order);
    free(match->group_first);
    free(match->atoms);
    free(match);
}

const int32_t *tml_match_atoms(const tml_match *match) {
    return match->atoms;
}

bool tml_match_too_many(const tml_match *match) {
    return match->too_many;
}

bool tml_match_chain(const tml_match *match, int32_t index, const char **one, const char **other) {
    if (index < 0 || index >= match->ones.count) return false;
    *one = match->ones.chains[index].code;
    *other = match->to[index] < 0 ? NULL : match->others.chains[match->to[index]].code;
    return true;
}

/* ---- chains ---- */

/* Waters belong to no chain (-1): their numbers say nothing. */
static tml_status list_chains(const tml_coordinates *of, chain_list *list) {
    size_t capacity = 0;
    tml_index *codes = tml_index_new();
    list->of_residue = tml_alloc(of->residue_count, sizeof *list->of_residue);
    list->residues = tml_alloc(of->residue_count, sizeof *list->residues);
    bool room = codes != NULL && list->of_residue != NULL && list->residues != NULL;
    for (size_t r = 0; room && r < of->residue_count; r++) {
        const char *code = of->residues[r].chain;
        int32_t found = of->residues[r].water ? -1 : tml_index_find(codes, CODES, code);
        if (!of->residues[r].water && found < 0) {
            found = list->count;
            room = tml_grow(&list->chains, &capacity, (size_t)list->count + 1, sizeof *list->chains) &&
                   tml_index_add(codes, CODES, code, found);
            if (room) list->chains[list->count++] = (chain){.code = code};
        }
        list->of_residue[r] = found;
        if (room && found >= 0) list->chains[found].count++;
    }
    for (int32_t c = 1; room && c < list->count; c++)
        list->chains[c].first = list->chains[c - 1].first + list->chains[c - 1].count;
    for (int32_t c = 0; room && c < list->count; c++) list->chains[c].count = 0;
    for (size_t r = 0; room && r < of->residue_count; r++) {
        if (list->of_residue[r] < 0) continue;
        chain *in = &list->chains[list->of_residue[r]];
        list->residues[in->first + in->count++] = (int32_t)r;
    }
    tml_index_free(codes);
    return room ? TML_OK : TML_NO_MEMORY;
}

static bool index_other(tml_match *match) {
    const tml_coordinates *other = match->other;
    for (int32_t c = 0; c < match->others.count; c++)
        if (!tml_index_add(match->index, CODES, match->others.chains[c].code, c)) return false;
    for (size_t r = 0; r < other->residue_count; r++)
        if (match->others.of_residue[r] >= 0 &&
            !tml_index_add(match->index, match->others.of_residue[r], other->residues[r].number, (int32_t)r))
            return false;
    for (size_t a = 0; a < other->atom_count; a++)
        if (!tml_index_add(match->index, ATOMS + other->atoms[a].residue, other->atoms[a].name, (int32_t)a)) return false;
    return true;
}

/* ---- which are alike ---- */

/* Residues of a chain of `one` that a chain of `other` has by number, and those of them with the same name. */
typedef struct likeness {
    int32_t common, same_name;
} likeness;

static likeness compare_chains(const tml_match *match, int32_t one, int32_t other) {
    likeness found = {0, 0};
    const chain *of = &match->ones.chains[one];
    for (int32_t k = of->first; k < of->first + of->count; k++) {
        const tml_site_residue *here = &match->one->residues[match->ones.residues[k]];
        int32_t residue = tml_index_find(match->index, other, here->number);
        found.common += residue >= 0;
        found.same_name += residue >= 0 && strcmp(here->name, match->other->residues[residue].name) == 0;
    }
    return found;
}

/* Common practice: half of the shorter chain's residues in common, nine in ten of these with the same name. */
static bool alike(const tml_match *match, int32_t one, int32_t other) {
    likeness of = compare_chains(match, one, other);
    int32_t ours = match->ones.chains[one].count, others = match->others.chains[other].count,
            shorter = ours < others ? ours : others;
    return of.common > 0 && 2 * (int64_t)of.common >= shorter && 10 * (int64_t)of.same_name >= 9 * (int64_t)of.common;
}

static void pair_chains(tml_match *match, bool *used) {
    for (int32_t i = 0; i < match->ones.count; i++) {
        int32_t k = tml_index_find(match->index, CODES, match->ones.chains[i].code);
        match->to[i] = k >= 0 && compare_chains(match, i, k).common > 0 ? k : -1;
        if (match->to[i] >= 0) used[match->to[i]] = true;
    }
    for (int32_t i = 0; i < match->ones.count && !match->too_many; i++)
        for (int32_t k = 0; k < match->others.count && match->to[i] < 0; k++)
            if (!used[k] && alike(match, i, k)) {
                match->to[i] = k;
                used[k] = true;
            }
}

/* Whether two chains of `one` can take each other's place. */
static bool exchangeable(const tml_match *match, int32_t a, int32_t b) {
    return alike(match, a, match->to[a]) && alike(match, b, match->to[b]) && alike(match, a, match->to[b]) &&
           alike(match, b, match->to[a]);
}

static void find_groups(tml_match *match, bool *taken) {
    double ways = 1;
    int32_t used = 0;
    for (int32_t i = 0; i < match->ones.count; i++) taken[i] = match->to[i] < 0 || !match->ones.chains[i].counts;
    for (int32_t i = 0; i < match->ones.count; i++) {
        if (taken[i]) continue;
        int32_t first = used;
        match->members[used++] = i;
        for (int32_t k = i + 1; k < match->ones.count; k++) {
            if (taken[k] || !exchangeable(match, i, k)) continue;
            match->members[used++] = k;
            taken[k] = true;
        }
        if (used == first + 1) used = first; /* alone */
        for (int32_t size = 2; size <= used - first; size++) ways *= size;
        if (used > first) match->group_first[match->group_count++] = first;
    }
    match->group_first[match->group_count] = used;
    match->too_many = ways > TML_MATCH_MOST_WAYS;
    if (match->too_many) match->group_count = 0;
    for (int32_t g = 0; g < match->group_count; g++)
        for (int32_t k = match->group_first[g]; k < match->group_first[g + 1]; k++) {
            match->order[k] = k - match->group_first[g];
            match->by_code[k] = match->to[match->members[k]];
        }
}

/* ---- atoms ---- */

static void match_atoms(tml_match *match) {
    const tml_coordinates *one = match->one;
    for (size_t a = 0; a < one->atom_count; a++) {
        int32_t r = one->atoms[a].residue, chain_one = match->ones.of_residue[r],
                to = chain_one < 0 ? -1 : match->to[chain_one];
        int32_t residue = to < 0 ? -1 : tml_index_find(match->index, to, one->residues[r].number);
        match->atoms[a] = residue < 0 ? -1 : tml_index_find(match->index, ATOMS + residue, one->atoms[a].name);
    }
}

int32_t tml_match_renamed(const tml_match *match) {
    int32_t count = 0;
    for (size_t r = 0; r < match->one->residue_count; r++) {
        int32_t chain_one = match->ones.of_residue[r], to = chain_one < 0 ? -1 : match->to[chain_one];
        int32_t residue = to < 0 ? -1 : tml_index_find(match->index, to, match->one->residues[r].number);
        count += residue >= 0 && strcmp(match->one->residues[r].name, match->other->residues[residue].name) != 0;
    }
    return count;
}

/* ---- exchanging ---- */

/* The next permutation in lexicographic order; false when it is the first one, the one that codes tell, again. */
static bool next_permutation(int32_t *order, int32_t count) {
    int32_t turn = count - 2;
    while (turn >= 0 && order[turn] > order[turn + 1]) turn--;
    if (turn >= 0) {
        int32_t k = count - 1, kept = order[turn];
        while (order[k] < kept) k--;
        order[turn] = order[k];
        order[k] = kept;
    }
    for (int32_t low = turn + 1, high = count - 1; low < high; low++, high--) {
        int32_t kept = order[low];
        order[low] = order[high];
        order[high] = kept;
    }
    return turn >= 0;
}

bool tml_match_next(tml_match *match) {
    bool went_on = false;
    for (int32_t g = 0; g < match->group_count && !went_on; g++) {
        int32_t first = match->group_first[g], count = match->group_first[g + 1] - first;
        went_on = next_permutation(&match->order[first], count);
        for (int32_t k = first; k < first + count; k++) match->to[match->members[k]] = match->by_code[first + match->order[k]];
    }
    match_atoms(match);
    return went_on;
}

void tml_match_keep(tml_match *match) {
    memcpy(match->kept, match->to, (size_t)match->ones.count * sizeof *match->to);
}

void tml_match_restore(tml_match *match) {
    memcpy(match->to, match->kept, (size_t)match->ones.count * sizeof *match->to);
    match_atoms(match);
}
