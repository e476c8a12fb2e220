#include "input/roll.h"

#include <stdlib.h>

static bool enter(tml_roll *roll, int32_t residue, int32_t *chains, int32_t *last) {
    const tml_outline_residue *entered = &roll->outline->residues[residue];
    int32_t chain = tml_index_find(roll->index, -1, entered->chain);
    roll->before[residue] = roll->after[residue] = -1;
    if (chain < 0) {
        chain = (*chains)++;
        if (!tml_index_add(roll->index, -1, entered->chain, chain)) return false;
    } else {
        roll->before[residue] = last[chain];
        roll->after[last[chain]] = residue;
    }
    last[chain] = residue;
    return tml_index_find(roll->index, chain, entered->number) >= 0 ||
           tml_index_add(roll->index, chain, entered->number, residue);
}

bool tml_roll_make(const tml_outline *outline, tml_roll *out) {
    int32_t chains = 0;
    *out = (tml_roll){.outline = outline, .index = tml_index_new()};
    out->before = tml_alloc(outline->residue_count, sizeof *out->before);
    out->after = tml_alloc(outline->residue_count, sizeof *out->after);
    int32_t *last = tml_alloc(outline->residue_count, sizeof *last); /* of each chain */
    bool room =
        out->index != NULL && out->before != NULL && out->after != NULL && last != NULL && outline->residue_count < INT32_MAX;
    for (size_t i = 0; room && i < outline->residue_count; i++) room = enter(out, (int32_t)i, &chains, last);
    free(last);
    return room;
}

void tml_roll_clear(tml_roll *roll) {
    tml_index_free(roll->index);
    free(roll->before);
    free(roll->after);
    *roll = (tml_roll){0};
}

int32_t tml_roll_find(const tml_roll *roll, const char *chain, const char *number) {
    int32_t owner = tml_index_find(roll->index, -1, chain);
    return owner < 0 ? -1 : tml_index_find(roll->index, owner, number);
}
