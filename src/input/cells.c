#include "input/cells.h"

#include <math.h>
#include <string.h>
#include <strings.h>

tml_place tml_cell_place(const tml_cells *in, const tml_star_value *value) {
    return (tml_place){in->file, value->line, value->column};
}

tml_status tml_cell_text(const tml_cells *in, const tml_star_value *value, const char *missing, const char **out) {
    *out = tml_star_is_null(value) ? tml_strings_add(in->draft->problem->pool, missing)
                                   : tml_strings_add_part(in->draft->problem->pool, value->text, (size_t)value->length);
    return *out == NULL ? tml_no_memory(in->error) : TML_OK;
}

tml_status tml_cell_number(const tml_cells *in, const tml_star_value *value, double *out) {
    *out = NAN;
    if (tml_star_is_null(value) || tml_star_number(value, out)) return TML_OK;
    return tml_cell_expected(in, value, "a number");
}

tml_status tml_cell_expected(const tml_cells *in, const tml_star_value *value, const char *what) {
    bool null = value->length == 0 || tml_star_is_null(value);
    return tml_fail_at(in->error, TML_BAD_INPUT, in->draft->problem->files[in->file], value->line, value->column,
                       "found '%.*s' where %s is expected", null ? 1 : value->length > 40 ? 40 : value->length,
                       null ? "." : value->text, what);
}

tml_status tml_cell_missing(const tml_cells *in, const tml_star_loop *loop, const char *name) {
    const tml_star_value *tag = &in->star->tags[loop->first_tag];
    return tml_fail_at(in->error, TML_BAD_INPUT, in->draft->problem->files[in->file], tag->line, tag->column,
                       "this loop has no column %s, which it needs", name);
}

bool tml_loop_is(const tml_star *star, const tml_star_loop *loop, const char *category) {
    const tml_star_value *tag = &star->tags[loop->first_tag];
    size_t length = strlen(category);
    return (size_t)tag->length > length && tag->text[length] == '.' && strncasecmp(tag->text, category, length) == 0;
}
