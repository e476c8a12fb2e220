/* given_text.h: texts as input files, for tests of readers, and what was read from them by its name. */
#ifndef GIVEN_TEXT_H
#define GIVEN_TEXT_H

#include <criterion/criterion.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "input/problem.h"

/* Read `length` bytes as one input; the caller frees the problem. */
static inline tml_status read_bytes_as(const char *text, size_t length, const tml_read_options *options, tml_problem **problem,
                                       tml_error *error) {
    char path[] = "/tmp/trammel-test-XXXXXX";
    int descriptor = mkstemp(path);
    cr_assert_geq(descriptor, 0);
    cr_assert_eq(write(descriptor, text, length), (ssize_t)length);
    close(descriptor);
    const char *paths[] = {path};
    memset(error, 0, sizeof *error);
    tml_status status = tml_problem_read(paths, 1, options, problem, error);
    unlink(path);
    return status;
}

static inline tml_status read_bytes(const char *text, size_t length, tml_problem **problem, tml_error *error) {
    return read_bytes_as(text, length, NULL, problem, error);
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

enum { TEXTS_MOST = 3 };

/* Read up to three texts (NULL ends them) as the files of one problem. */
static inline tml_status problem_read_texts(const char *const texts[TEXTS_MOST], tml_problem **problem, tml_error *error) {
    char paths[TEXTS_MOST][40];
    const char *names[TEXTS_MOST];
    size_t count = 0;
    *error = (tml_error){0};
    for (; count < TEXTS_MOST && texts[count] != NULL; count++) {
        strcpy(paths[count], "/tmp/trammel-test-XXXXXX");
        int file = mkstemp(paths[count]);
        cr_assert_geq(file, 0);
        cr_assert_eq(write(file, texts[count], strlen(texts[count])), (ssize_t)strlen(texts[count]));
        close(file);
        names[count] = paths[count];
    }
    tml_status status = tml_problem_read(names, count, NULL, problem, error);
    for (size_t i = 0; i < count; i++) unlink(paths[i]);
    return status;
}

/* The text is refused at this line and column, in a message that holds `says`. */
static inline void expect_refused(const char *text, long line, long column, const char *says) {
    tml_problem *problem = NULL;
    tml_error error;
    tml_status status = problem_read_texts((const char *[TEXTS_MOST]){text}, &problem, &error);
    cr_assert_eq(status, TML_BAD_INPUT, "not refused: %s", text);
    cr_assert_null(problem);
    cr_assert(error.line == line && error.column == column, "%s\nis refused at %ld:%ld: %s", text, error.line, error.column, error.message);
    cr_assert(strstr(error.message, says) != NULL, "%s\nis refused with: %s", text, error.message);
}

static inline const tml_distance_restraint *distance_by_id(const tml_problem *problem, const char *id) {
    for (int32_t i = 0; i < problem->restraints.distance_count; i++)
        if (strcmp(problem->restraints.distances[i].id, id) == 0) return &problem->restraints.distances[i];
    cr_assert(false, "no distance restraint %s", id);
    return NULL;
}

static inline const tml_dihedral_restraint *dihedral_by_id(const tml_problem *problem, const char *id) {
    for (int32_t i = 0; i < problem->restraints.dihedral_count; i++)
        if (strcmp(problem->restraints.dihedrals[i].id, id) == 0) return &problem->restraints.dihedrals[i];
    cr_assert(false, "no dihedral restraint %s", id);
    return NULL;
}

/* Limits of time are for a usual build; under the sanitizers everything takes longer. */
static inline double seconds_allowed(double usual) {
    return getenv("TRAMMEL_SANITIZED") != NULL ? 20 * usual : usual;
}

static inline bool has_note(const tml_problem *problem, const char *part) {
    for (size_t i = 0; i < problem->note_count; i++)
        if (strstr(problem->notes[i].text, part) != NULL) return true;
    return false;
}

/* Names of a group's atoms with blanks between, in their order: "HB1 HB2 HB3". */
static inline const char *group_names(const tml_problem *problem, int32_t first, int32_t count, char *text, size_t size) {
    size_t used = 0;
    *text = '\0';
    for (int32_t i = first; i < first + count && used < size; i++)
        used += (size_t)snprintf(text + used, size - used, "%s%s", i == first ? "" : " ",
                                 problem->molecule.atoms[problem->restraints.group_atoms[i]].name);
    return text;
}

#endif
