#include "molecule/index.h"

#include <stdlib.h>
#include <string.h>

#include "base/memory.h"

typedef struct entry {
    const char *name;
    int32_t owner, value;
} entry;

struct tml_index {
    entry *slots; /* open hashing; name NULL where free */
    size_t slot_count, used;
};

enum { FIRST_SLOTS = 64 };

tml_index *tml_index_new(void) {
    tml_index *index = tml_alloc(1, sizeof *index);
    if (index == NULL) return NULL;
    index->slots = tml_alloc(FIRST_SLOTS, sizeof *index->slots);
    index->slot_count = FIRST_SLOTS;
    if (index->slots == NULL) {
        free(index);
        return NULL;
    }
    return index;
}

void tml_index_free(tml_index *index) {
    if (index == NULL) return;
    free(index->slots);
    free(index);
}

/* FNV-1a, 64 bits, over the owner and the name. */
static uint64_t hash(int32_t owner, const char *name) {
    uint64_t h = (14695981039346656037u ^ (uint32_t)owner) * 1099511628211u;
    for (; *name != '\0'; name++) h = (h ^ (unsigned char)*name) * 1099511628211u;
    return h ^ h >> 32;
}

static size_t slot_for(const entry *slots, size_t slot_count, int32_t owner, const char *name) {
    size_t at = hash(owner, name) & (slot_count - 1);
    while (slots[at].name != NULL && (slots[at].owner != owner || strcmp(slots[at].name, name) != 0))
        at = (at + 1) & (slot_count - 1);
    return at;
}

int32_t tml_index_find(const tml_index *index, int32_t owner, const char *name) {
    if (index == NULL) return -1;
    const entry *found = &index->slots[slot_for(index->slots, index->slot_count, owner, name)];
    return found->name == NULL ? -1 : found->value;
}

static bool double_slots(tml_index *index) {
    if (index->slot_count > SIZE_MAX / 2) return false;
    size_t count = index->slot_count * 2;
    entry *slots = tml_alloc(count, sizeof *slots);
    if (slots == NULL) return false;
    for (size_t i = 0; i < index->slot_count; i++) {
        const entry *old = &index->slots[i];
        if (old->name != NULL) slots[slot_for(slots, count, old->owner, old->name)] = *old;
    }
    free(index->slots);
    index->slots = slots;
    index->slot_count = count;
    return true;
}

bool tml_index_add(tml_index *index, int32_t owner, const char *name, int32_t value) {
    if (index->used * 2 >= index->slot_count && !double_slots(index)) return false;
    index->slots[slot_for(index->slots, index->slot_count, owner, name)] = (entry){name, owner, value};
    index->used++;
    return true;
}
