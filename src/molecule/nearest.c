#include "molecule/nearest.h"

#include <limits.h>
#include <stdio.h>
#include <string.h>

enum { LONGEST = 32 }; /* longer names are compared by their beginnings */

void tml_nearest_start(tml_nearest *nearest, const char *wanted) {
    *nearest = (tml_nearest){.wanted = wanted, .distance = INT_MAX};
}

static int smallest(int a, int b, int c) {
    int least = a < b ? a : b;
    return least < c ? least : c;
}

/* Edit distance (Levenshtein 1966), and of equals the one with the longer common beginning. */
static int distance_between(const char *a, const char *b) {
    int row[LONGEST + 1], la = (int)strnlen(a, LONGEST), lb = (int)strnlen(b, LONGEST), common = 0;
    while (common < la && common < lb && a[common] == b[common]) common++;
    for (int j = 0; j <= lb; j++) row[j] = j;
    for (int i = 1; i <= la; i++) {
        int diagonal = row[0];
        row[0] = i;
        for (int j = 1; j <= lb; j++) {
            int above = row[j];
            row[j] = smallest(above + 1, row[j - 1] + 1, diagonal + (a[i - 1] != b[j - 1]));
            diagonal = above;
        }
    }
    return row[lb] * 2 * LONGEST - common;
}

void tml_nearest_offer(tml_nearest *nearest, const char *name) {
    int distance = distance_between(nearest->wanted, name);
    if (distance > nearest->distance) return;
    if (distance < nearest->distance) nearest->count = 0;
    nearest->distance = distance;
    if (nearest->count < TML_NEAREST_KEPT) nearest->names[nearest->count++] = name;
}

void tml_nearest_append(const tml_nearest *nearest, char *text, size_t size) {
    for (int i = 0; i < nearest->count; i++) {
        size_t used = strlen(text);
        snprintf(text + used, size - used, "%s%.32s", i == 0 ? "" : ", ", nearest->names[i]);
    }
}
