/* cells.h: values of STAR loops as a reader takes them: pooled texts, numbers, places, and what is said where they do not fit. */
#ifndef TML_CELLS_H
#define TML_CELLS_H

#include "input/draft.h"

/* One document and what it is read into; borrowed. */
typedef struct tml_cells {
    tml_draft *draft;
    const tml_star *star;
    int32_t file;
    tml_error *error;
} tml_cells;

tml_place tml_cell_place(const tml_cells *in, const tml_star_value *value);

/* A value as a pooled string; `missing` stands for a null. TML_OK or TML_NO_MEMORY. */
tml_status tml_cell_text(const tml_cells *in, const tml_star_value *value, const char *missing, const char **out);

/* A number or null (NAN); anything else is an error at its place. */
tml_status tml_cell_number(const tml_cells *in, const tml_star_value *value, double *out);

/* "found … where … is expected", at the value. */
tml_status tml_cell_expected(const tml_cells *in, const tml_star_value *value, const char *what);

/* That a loop lacks a column, at its first tag. */
tml_status tml_cell_missing(const tml_cells *in, const tml_star_loop *loop, const char *name);

/* Whether a loop is of a category ("_nef_sequence"), by its first tag. */
bool tml_loop_is(const tml_star *star, const tml_star_loop *loop, const char *category);

#endif
