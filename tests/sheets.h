/* sheets.h: problems for unit tests, from the text of a sheet. */
#ifndef TESTS_SHEETS_H
#define TESTS_SHEETS_H

#include <criterion/criterion.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <unistd.h>

#include "input/problem.h"

/* A problem from the text of a sheet without its first statement; the caller frees it. */
static inline tml_problem *problem_from(const char *text) {
    char path[] = "/tmp/trammel-sheet-XXXXXX";
    const char *paths[] = {path};
    tml_problem *problem = NULL;
    tml_error error = {0};
    int descriptor = mkstemp(path);
    FILE *file = descriptor >= 0 ? fdopen(descriptor, "w") : NULL;
    cr_assert_not_null(file);
    fprintf(file, "sheet 1\n%s", text);
    fclose(file);
    tml_status status = tml_problem_read(paths, 1, NULL, &problem, &error);
    unlink(path);
    cr_assert_eq(status, TML_OK, "%s", error.message);
    return problem;
}

/* Text in pieces, printf style. */
typedef struct sheet_text { char text[1 << 16]; size_t length; } sheet_text;

static inline void __attribute__((format(printf, 2, 3))) say(sheet_text *sheet, const char *format, ...) {
    va_list arguments;
    va_start(arguments, format);
    sheet->length += (size_t)vsnprintf(sheet->text + sheet->length, sizeof sheet->text - sheet->length, format, arguments);
    va_end(arguments);
    cr_assert_lt(sheet->length, sizeof sheet->text);
}

static inline void say_beads(sheet_text *sheet, int count) {
    for (int i = 0; i < count; i++) say(sheet, "atom B%d bead\n", i);
}

/* An atom "residue number, name" of chain A. */
static inline int32_t atom_of(const tml_problem *problem, const char *number, const char *name) {
    int32_t residue = tml_molecule_find_residue(&problem->molecule, "A", number);
    cr_assert_geq(residue, 0);
    int32_t atom = tml_molecule_find_atom(&problem->molecule, residue, name);
    cr_assert_geq(atom, 0, "%s %s", number, name);
    return atom;
}

#endif
