/* Any bytes as a table, its columns and form in its first lines: it is read or refused with a reason, and what is read has
 * finite numbers, in order, and lies inside the rows.
 *
 * The first line is the columns, the second the form, the third the mapping of old names: the name of one that is built in, or
 * the text of a file, with | for its line ends. Then comes the table.
 */
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "input/draft.h"
#include "restraint/map.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static const char MOLECULE[] = "sheet 1\nsequence A 1 ALA LYS ILE PHE\nsequence B 1 GLY ARG\natom P bead\natom Q bead\n";

/* Cut the next line off. */
static char *next_line(char **text) {
    char *line = *text, *end = line + strcspn(line, "\n");
    *text = *end == '\0' ? end : end + 1;
    *end = '\0';
    return line;
}

/* The mapping that a line means; NULL for none. Its text goes to a file that has no name any more. */
static const char *old_names(char *line) {
    static char path[64];
    static FILE *file;
    if (*line == '\0') return NULL;
    if (strncmp(line, "hydrogens", 9) == 0) return strstr(line, "crossed") != NULL ? "hydrogens-1-2-crossed" : "hydrogens-1-2";
    if (file == NULL && (file = tmpfile()) == NULL) abort();
    for (char *at = line; *at != '\0'; at++)
        if (*at == '|') *at = '\n';
    rewind(file);
    if (ftruncate(fileno(file), 0) != 0 || fputs(line, file) == EOF || fflush(file) != 0) abort();
    snprintf(path, sizeof path, "/dev/fd/%d", fileno(file));
    return path;
}

static void check_name(const char *name) {
    if (name == NULL || strlen(name) > 64) abort();
}

static void check_rows(const tml_rows *rows) {
    for (size_t i = 0; i < rows->distance_count; i++) {
        const tml_distance_row *row = &rows->distances[i];
        if (row->lower < 0 || row->upper < 0 || row->upper < row->lower || isinf(row->lower) || !(row->weight >= 0)) abort();
        if (row->count_a < 1 || row->count_b < 1 || row->place.line < 1) abort();
        if ((size_t)row->first_b + (size_t)row->count_b > rows->address_count) abort();
        check_name(row->id);
        check_name(row->list);
    }
    for (size_t i = 0; i < rows->address_count; i++) check_name(rows->addresses[i].atom);
    for (size_t i = 0; i < rows->dihedral_count; i++)
        for (int k = 0; k < 4; k++) check_name(rows->dihedrals[i].atoms[k].number);
}

static tml_problem *new_problem(void) {
    static const char *files[2] = {"molecule", "fuzz"};
    tml_problem *problem = calloc(1, sizeof *problem);
    if (problem == NULL) abort();
    problem->pool = tml_strings_new();
    problem->title = "";
    problem->files = calloc(2, sizeof *problem->files);
    if (problem->pool == NULL || problem->files == NULL) abort();
    memcpy(problem->files, files, sizeof files);
    problem->file_count = 2;
    return problem;
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    static const tml_read_options DEFAULTS = {0};
    tml_error error = {0};
    tml_problem *problem = new_problem();
    char *text = malloc(size + 1), *rest = text;
    if (text == NULL) abort();
    memcpy(text, data, size);
    text[size] = '\0';
    tml_table table = {.path = "fuzz", .columns = next_line(&rest), .form = next_line(&rest)};
    table.old_names = old_names(next_line(&rest));

    tml_draft draft = {.problem = problem};
    tml_status status = tml_read_sheet(&draft, MOLECULE, 0, &error);
    if (status == TML_OK) status = tml_read_table(&draft, &table, rest, 1, &error);
    if (status == TML_OK) check_rows(&draft.rows);
    if (status == TML_OK)
        status = tml_molecule_build(&draft.outline, problem->files, problem->pool, &problem->molecule, &error);
    if (status == TML_OK) status = tml_restraints_map(&draft.rows, &DEFAULTS, problem, &error);
    if (status != TML_OK && ((status != TML_BAD_INPUT && status != TML_TOO_LARGE) || *error.message == '\0')) abort();
    tml_outline_clear(&draft.outline);
    tml_rows_clear(&draft.rows);
    tml_problem_free(problem);
    free(text);
    return 0;
}
