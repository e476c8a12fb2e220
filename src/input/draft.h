/* draft.h: what one run's inputs say, all files together, before it becomes a problem. Each reader appends to it. */
#ifndef TML_DRAFT_H
#define TML_DRAFT_H

#include "input/problem.h"
#include "input/star.h"

typedef struct tml_draft {
    tml_problem *problem; /* borrowed: string pool, file names, title and notes go there at once */
    tml_outline outline;
    tml_rows rows;
} tml_draft;

/* Read all inputs into a draft, and its problem: molecule made, restraints matched. tml_draft_clear frees outline and rows, after a failure
 * too; the problem stays the caller's, to be freed after a failure, too. Otherwise as tml_problem_read. */
tml_status tml_draft_read(const char *const *paths, size_t path_count, const tml_read_options *options, tml_draft *draft, tml_error *error);
void tml_draft_clear(tml_draft *draft);

/* Readers; file indexes problem->files. A sheet is the whole text, ended by '\0'. */
tml_status tml_read_nef(tml_draft *draft, const tml_star *star, int32_t file, tml_error *error);
tml_status tml_read_nmrstar(tml_draft *draft, tml_star *star, int32_t file, tml_error *error);
tml_status tml_read_sheet(tml_draft *draft, const char *text, int32_t file, tml_error *error);
bool tml_is_sheet(const char *text);

/* A table, after the other inputs, whose sequence it needs; its text is changed. */
tml_status tml_read_table(tml_draft *draft, const tml_table *given, char *text, int32_t file, tml_error *error);

/* Component dictionaries: those of a CIF; the one that a sheet names, at the path as seen from the sheet's folder; and making templates
 * of those that residues name, with notes on what they lack, once all inputs are read. */
tml_status tml_read_components(tml_draft *draft, tml_star *star, int32_t file, tml_error *error);
tml_status tml_read_component_file(tml_draft *draft, const char *name, const char *path, tml_place place, tml_error *error);
tml_status tml_make_components(tml_draft *draft, tml_error *error);
bool tml_is_component(const tml_star *star);

/* Whether a parsed document is NEF; readers of other dialects ask the same way. */
bool tml_is_nef(const tml_star *star);
bool tml_is_nmrstar(const tml_star *star);

#endif
