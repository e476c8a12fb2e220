/* read.c: inputs of any kind into one problem. */
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>

#include "base/memory.h"
#include "input/draft.h"
#include "input/oldnames.h"
#include "input/source.h"
#include "restraint/map.h"

static tml_status read_one(tml_draft *draft, const char *path, const tml_table *table, tml_error *error);
static tml_status rename_old(tml_draft *draft, const char *mapping, tml_error *error);

tml_status tml_draft_read(const char *const *paths, size_t path_count, const tml_read_options *options, tml_draft *draft, tml_error *error) {
    static const tml_read_options DEFAULTS = {0};
    tml_problem *problem = tml_alloc(1, sizeof *problem);
    *draft = (tml_draft){.problem = problem};
    if (options == NULL) options = &DEFAULTS;
    if (problem == NULL) return tml_no_memory(error);
    problem->pool = tml_strings_new();
    problem->title = "";
    tml_status status = problem->pool == NULL ? tml_no_memory(error) : TML_OK;
    for (size_t i = 0; status == TML_OK && i < path_count; i++) status = read_one(draft, paths[i], NULL, error);
    if (status == TML_OK && options->old_names != NULL) status = rename_old(draft, options->old_names, error);
    for (size_t i = 0; status == TML_OK && i < options->table_count; i++)
        status = read_one(draft, options->tables[i].path, &options->tables[i], error);
    if (status == TML_OK) status = tml_make_components(draft, error);
    if (status == TML_OK && options->alike_chains && !tml_outline_find_alike(&draft->outline)) status = tml_no_memory(error);
    if (status == TML_OK) status = tml_molecule_build(&draft->outline, problem->files, problem->pool, &problem->molecule, error);
    if (status == TML_OK) status = tml_restraints_map(&draft->rows, options, problem, error);
    return status;
}

void tml_draft_clear(tml_draft *draft) {
    tml_outline_clear(&draft->outline);
    tml_rows_clear(&draft->rows);
}

tml_status tml_problem_read(const char *const *paths, size_t path_count, const tml_read_options *options, tml_problem **out,
                            tml_error *error) {
    tml_draft draft;
    *out = NULL;
    tml_status status = tml_draft_read(paths, path_count, options, &draft, error);
    tml_draft_clear(&draft);
    if (status == TML_OK)
        *out = draft.problem;
    else
        tml_problem_free(draft.problem);
    return status;
}

void tml_problem_free(tml_problem *problem) {
    if (problem == NULL) return;
    tml_molecule_clear(&problem->molecule);
    tml_restraints_clear(&problem->restraints);
    tml_strings_free(problem->pool);
    free(problem->files);
    free(problem->notes);
    free(problem);
}

tml_status tml_problem_add_note(tml_problem *problem, tml_place place, tml_error *error, const char *format, ...) {
    char text[1024];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(text, sizeof text, format, arguments);
    va_end(arguments);
    const char *kept = tml_strings_add(problem->pool, text);
    if (kept == NULL || !tml_grow(&problem->notes, &problem->note_capacity, problem->note_count + 1, sizeof *problem->notes))
        return tml_no_memory(error);
    problem->notes[problem->note_count++] = (tml_note){kept, place};
    return TML_OK;
}

/* What kind of text this is shows in its first words; a document of another kind is named by what it begins with. */
static tml_status read_text(tml_draft *draft, const char *text, size_t length, int32_t file, tml_error *error) {
    const char *path = draft->problem->files[file];
    if (tml_is_sheet(text)) return tml_read_sheet(draft, text, file, error);
    int first = 0, blank = 0;
    sscanf(text, " %n%*[^\r\n]%n", &blank, &first);
    if (first == 0) return tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, "the file is empty; a sheet or a NEF file is expected");
    tml_star star;
    tml_error star_error = {0};
    tml_status status = tml_star_parse(text, length, path, &star, &star_error);
    bool is_nef = status == TML_OK && tml_is_nef(&star), is_component = status == TML_OK && tml_is_component(&star);
    bool is_nmrstar = status == TML_OK && !is_nef && tml_is_nmrstar(&star);
    if (is_nef || is_nmrstar || is_component) {
        if (is_component) status = tml_read_components(draft, &star, file, error);
        if (is_nef && status == TML_OK) status = tml_read_nef(draft, &star, file, error);
        if (is_nmrstar && status == TML_OK) status = tml_read_nmrstar(draft, &star, file, error);
    } else if (status == TML_OK) {
        status = tml_fail_at(error, TML_BAD_INPUT, path, 1, 1,
                             "a STAR or CIF document without sequence, restraints or components; a sheet, a NEF or NMR-STAR file or a "
                             "component dictionary is expected");
    } else if (status == TML_BAD_INPUT && star.frame_count == 0) {
        int shown = first - blank > 40 ? 40 : first - blank;
        status = tml_fail_at(error, TML_BAD_INPUT, path, 1, 1,
                             "begins with '%.*s'; expected is a sheet, which begins with 'sheet 1', or a NEF file, which begins with 'data_'",
                             shown, text + blank);
    } else if (error != NULL) {
        *error = star_error;
    }
    tml_star_clear(&star);
    return status;
}

static tml_status rename_old(tml_draft *draft, const char *mapping, tml_error *error) {
    const tml_place nowhere = {.file = -1};
    tml_old_names names;
    tml_status status = tml_old_names_load(mapping, draft->problem->pool, &names, error);
    if (status == TML_OK) status = tml_old_names_apply_rows(&names, draft, error);
    if (status == TML_OK) status = tml_old_names_note(&names, nowhere, draft->problem, error);
    tml_old_names_clear(&names);
    return status;
}

/* An input, or a table. */
static tml_status read_one(tml_draft *draft, const char *path, const tml_table *table, tml_error *error) {
    tml_problem *problem = draft->problem;
    char *text = NULL;
    size_t length = 0;
    const char *name = tml_strings_add(problem->pool, path);
    if (name == NULL || !tml_grow(&problem->files, &problem->file_capacity, problem->file_count + 1, sizeof *problem->files))
        return tml_no_memory(error);
    problem->files[problem->file_count++] = name;
    tml_status status = tml_source_read(path, &text, &length, error);
    int32_t file = (int32_t)problem->file_count - 1;
    if (status == TML_OK && table != NULL)
        status = tml_read_table(draft, table, text, file, error);
    else if (status == TML_OK)
        status = read_text(draft, text, length, file, error);
    free(text);
    return status;
}
