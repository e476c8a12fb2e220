/* nearest.h: the known names nearest to an unknown one, for messages. */
#ifndef TML_NEAREST_H
#define TML_NEAREST_H

#include <stddef.h>

enum { TML_NEAREST_KEPT = 8 };

typedef struct tml_nearest {
    const char *wanted;
    const char *names[TML_NEAREST_KEPT]; /* borrowed; all at the same, least distance, in the order offered */
    int count, distance;
} tml_nearest;

void tml_nearest_start(tml_nearest *nearest, const char *wanted);
void tml_nearest_offer(tml_nearest *nearest, const char *name);

/* Appends "HB2, HB3" to text (ended, `size` bytes in all); nothing where no name was offered. */
void tml_nearest_append(const tml_nearest *nearest, char *text, size_t size);

#endif
