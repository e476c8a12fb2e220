/* memory.h: allocation with checked sizes, growing arrays and a pool of strings.
 *
 * Every size is multiplied with a check; NULL means no memory. What is allocated here is freed with free().
 */
#ifndef TML_MEMORY_H
#define TML_MEMORY_H

#include <stdbool.h>
#include <stddef.h>

/* count * size zeroed bytes, at least 1; NULL on overflow or without memory. */
void *tml_alloc(size_t count, size_t size);

/* count * size bytes, not initialised, aligned to 64 bytes for vector code; free with free(). */
void *tml_alloc_aligned(size_t count, size_t size);

/* Make room in *array for `need` elements of `size` bytes; *capacity follows, growing by half. New elements are zeroed.
 * false without memory, and *array is then unchanged. */
bool tml_grow(void *array_pointer, size_t *capacity, size_t need, size_t size);

/* A pool of unique strings: equal text gives the same pointer, valid until the pool is freed. */
typedef struct tml_strings tml_strings;
tml_strings *tml_strings_new(void);
void tml_strings_free(tml_strings *pool);
const char *tml_strings_add(tml_strings *pool, const char *text);                     /* NULL without memory */
const char *tml_strings_add_part(tml_strings *pool, const char *text, size_t length); /* the first `length` bytes */

/* Bytes of memory that this process could still take, as the system tells; SIZE_MAX where it does not. */
size_t tml_memory_available(void);

#endif
