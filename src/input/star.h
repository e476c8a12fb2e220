/* star.h: STAR and CIF documents: blocks and save frames of items and loops.
 *
 * A tml_star owns its arrays; values and tags are slices of the text it was parsed from, which must outlive it.
 * Syntax: Hall, J. Chem. Inf. Comput. Sci. 31 (1991) 326 (STAR); CIF 1.1 (International Tables for Crystallography G, 2.2);
 * `stop_` ends a loop as in NEF and NMR-STAR.
 */
#ifndef TML_STAR_H
#define TML_STAR_H

#include "base/status.h"

/* One token. quote is 0 for a bare word, otherwise ' " or ; */
typedef struct tml_star_value { const char *text; int32_t length, line, column; char quote; } tml_star_value;

typedef struct tml_star_item { tml_star_value tag, value; } tml_star_item;

/* tags[first_tag … +tag_count), values[first_value … +row_count*tag_count), row by row. */
typedef struct tml_star_loop { size_t first_tag, tag_count, first_value, row_count; } tml_star_loop;

/* A save frame, or a stretch of a data block between save frames. */
typedef struct tml_star_frame {
    tml_star_value name;           /* without data_ or save_ */
    bool is_save;
    size_t first_item, item_count; /* into items */
    size_t first_loop, loop_count; /* into loops */
} tml_star_frame;

typedef struct tml_star {
    tml_star_frame *frames; size_t frame_count, frame_capacity;
    tml_star_item *items;   size_t item_count, item_capacity;
    tml_star_loop *loops;   size_t loop_count, loop_capacity;
    tml_star_value *tags;   size_t tag_count, tag_capacity;
    tml_star_value *values; size_t value_count, value_capacity;
} tml_star;

/* Parse a whole text; `path` is for messages. tml_star_clear frees, after a failure too.
 * Returns TML_OK, TML_BAD_INPUT (with line and column), TML_TOO_LARGE or TML_NO_MEMORY. */
tml_status tml_star_parse(const char *text, size_t length, const char *path, tml_star *out, tml_error *error);
void tml_star_clear(tml_star *star);

/* Bare `.` or `?`: no value. */
bool tml_star_is_null(const tml_star_value *value);

/* Whether a value is `text`, letters compared without case. */
bool tml_star_is(const tml_star_value *value, const char *text);

/* The first loop of a frame whose tags belong to `category` ("_nef_sequence"); NULL if there is none. Empty loops count. */
const tml_star_loop *tml_star_find_loop(const tml_star *star, const tml_star_frame *frame, const char *category);

/* A category as a table: its loop, or, as CIF writes a table of one row, its items as a loop of one row; *found is false
 * where the frame has neither. TML_OK or TML_NO_MEMORY. */
tml_status tml_star_find_table(tml_star *star, const tml_star_frame *frame, const char *category, tml_star_loop *table, bool *found,
                               tml_error *error);

/* Column of a loop by the tag's part after the dot ("chain_code"), without case; -1 if there is none. */
int tml_star_column(const tml_star *star, const tml_star_loop *loop, const char *name);

/* One value of a loop; a static null for column -1. */
const tml_star_value *tml_star_at(const tml_star *star, const tml_star_loop *loop, size_t row, int column);

/* The value of a frame's item by its full tag ("_nef_distance_restraint_list.sf_framecode"); NULL if there is none. */
const tml_star_value *tml_star_find_item(const tml_star *star, const tml_star_frame *frame, const char *tag);

/* A number; false for null or what is none. A standard uncertainty in brackets ("1.54(2)") is passed over. */
bool tml_star_number(const tml_star_value *value, double *out);

#endif
