/* place.h: where in the inputs a statement stands; files are numbered in the order in which they were given. */
#ifndef TML_PLACE_H
#define TML_PLACE_H

#include <stdint.h>

typedef struct tml_place {
    int32_t file;   /* index into the list of input names; -1 for none */
    int32_t line;   /* from 1; 0 where unknown */
    int32_t column; /* from 1; 0 where unknown */
} tml_place;

#endif
