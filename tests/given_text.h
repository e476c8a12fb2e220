/* given_text.h: a text as an input file, for tests of readers. */
#ifndef GIVEN_TEXT_H
#define GIVEN_TEXT_H

#include <criterion/criterion.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "input/problem.h"

/* Read `length` bytes as one input; the caller frees the problem. */
static inline tml_status read_bytes(const char *text, size_t length, tml_problem **problem, tml_error *error) {
    char path[] = "/tmp/trammel-test-XXXXXX";
    int descriptor = mkstemp(path);
    cr_assert_geq(descriptor, 0);
    cr_assert_eq(write(descriptor, text, length), (ssize_t)length);
    close(descriptor);
    const char *paths[] = {path};
    memset(error, 0, sizeof *error);
    tml_status status = tml_problem_read(paths, 1, problem, error);
    unlink(path);
    return status;
}

static inline tml_problem *read_good(const char *text) {
    tml_problem *problem = NULL;
    tml_error error;
    tml_status status = read_bytes(text, strlen(text), &problem, &error);
    cr_assert_eq(status, TML_OK, "line %ld, column %ld: %s", error.line, error.column, error.message);
    return problem;
}

/* The text must be refused at that line (0: any), with a message that holds `part`. */
static inline void read_bad(const char *text, long line, const char *part) {
    tml_problem *problem = NULL;
    tml_error error;
    tml_status status = read_bytes(text, strlen(text), &problem, &error);
    cr_assert_eq(status, TML_BAD_INPUT, "status %d for %s", status, text);
    cr_assert_null(problem);
    cr_assert(line == 0 || error.line == line, "line %ld instead of %ld: %s", error.line, line, error.message);
    cr_assert_not_null(strstr(error.message, part), "'%s' does not hold '%s'", error.message, part);
}

static inline int32_t atom_at(const tml_problem *problem, const char *chain, const char *number, const char *name) {
    int32_t residue = tml_molecule_find_residue(&problem->molecule, chain, number);
    cr_assert_geq(residue, 0);
    int32_t atom = tml_molecule_find_atom(&problem->molecule, residue, name);
    cr_assert_geq(atom, 0, "%s:%s:%s", chain, number, name);
    return atom;
}

#endif
