#include "base/memory.h"

#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

void *tml_alloc(size_t count, size_t size) {
    size_t bytes;
    if (__builtin_mul_overflow(count, size, &bytes)) return NULL;
    return calloc(1, bytes == 0 ? 1 : bytes);
}

void *tml_alloc_aligned(size_t count, size_t size) {
    enum { ALIGNMENT = 64 };
    size_t bytes;
    if (__builtin_mul_overflow(count, size, &bytes) || bytes > SIZE_MAX - ALIGNMENT) return NULL;
    return aligned_alloc(ALIGNMENT, (bytes + ALIGNMENT) / ALIGNMENT * ALIGNMENT);
}

bool tml_grow(void *array_pointer, size_t *capacity, size_t need, size_t size) {
    if (need <= *capacity) return true;
    size_t wanted = *capacity + *capacity / 2 + 8, bytes;
    if (wanted < need) wanted = need;
    if (__builtin_mul_overflow(wanted, size, &bytes)) return false;
    void *old;
    memcpy(&old, array_pointer, sizeof old);
    char *grown = realloc(old, bytes);
    if (grown == NULL) return false;
    memset(grown + *capacity * size, 0, bytes - *capacity * size);
    memcpy(array_pointer, &grown, sizeof old);
    *capacity = wanted;
    return true;
}

/* Open hashing over strings that never move: each entry is its own allocation. */
struct tml_strings {
    char **slots;
    size_t slot_count, used;
};

enum { FIRST_SLOTS = 256 };

tml_strings *tml_strings_new(void) {
    tml_strings *pool = tml_alloc(1, sizeof *pool);
    if (pool == NULL) return NULL;
    pool->slots = tml_alloc(FIRST_SLOTS, sizeof *pool->slots);
    pool->slot_count = FIRST_SLOTS;
    if (pool->slots == NULL) {
        free(pool);
        return NULL;
    }
    return pool;
}

void tml_strings_free(tml_strings *pool) {
    if (pool == NULL) return;
    for (size_t i = 0; i < pool->slot_count; i++) free(pool->slots[i]);
    free(pool->slots);
    free(pool);
}

/* FNV-1a, 64 bits. */
static uint64_t hash(const char *text, size_t length) {
    uint64_t h = 14695981039346656037u;
    for (size_t i = 0; i < length; i++) h = (h ^ (unsigned char)text[i]) * 1099511628211u;
    return h;
}

static size_t slot_for(char *const *slots, size_t slot_count, const char *text, size_t length) {
    size_t at = hash(text, length) & (slot_count - 1);
    while (slots[at] != NULL && (strncmp(slots[at], text, length) != 0 || slots[at][length] != '\0'))
        at = (at + 1) & (slot_count - 1);
    return at;
}

static bool double_slots(tml_strings *pool) {
    size_t count = pool->slot_count * 2;
    char **slots = tml_alloc(count, sizeof *slots);
    if (slots == NULL) return false;
    for (size_t i = 0; i < pool->slot_count; i++)
        if (pool->slots[i] != NULL) slots[slot_for(slots, count, pool->slots[i], strlen(pool->slots[i]))] = pool->slots[i];
    free(pool->slots);
    pool->slots = slots;
    pool->slot_count = count;
    return true;
}

const char *tml_strings_add(tml_strings *pool, const char *text) {
    return tml_strings_add_part(pool, text, strlen(text));
}

const char *tml_strings_add_part(tml_strings *pool, const char *text, size_t length) {
    length = strnlen(text, length);
    if (pool->used * 2 >= pool->slot_count && !double_slots(pool)) return NULL;
    size_t at = slot_for(pool->slots, pool->slot_count, text, length);
    if (pool->slots[at] != NULL) return pool->slots[at];
    char *copy = malloc(length + 1);
    if (copy == NULL) return NULL;
    memcpy(copy, text, length);
    copy[length] = '\0';
    pool->slots[at] = copy;
    pool->used++;
    return copy;
}

size_t tml_memory_available(void) {
    FILE *file = fopen("/proc/meminfo", "r");
    if (file == NULL) return SIZE_MAX;
    char line[128];
    size_t kilobytes = SIZE_MAX / 1024;
    while (fgets(line, sizeof line, file) != NULL)
        if (sscanf(line, "MemAvailable: %zu kB", &kilobytes) == 1) break;
    fclose(file);
    return kilobytes * 1024;
}
