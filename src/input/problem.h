/* problem.h: molecule and restraints of one job; everything right of `bound` needs only this.
 *
 * A tml_problem owns all it points to. read.c makes it from inputs, nothing changes it afterwards but the finding of cis
 * peptides (tml_molecule_set_peptide).
 */
#ifndef TML_PROBLEM_H
#define TML_PROBLEM_H

#include "restraint/restraint.h"

/* Something worth telling about an input that is no error: a list of another kind, a default that was taken. */
typedef struct tml_note { const char *text; tml_place place; } tml_note;

struct tml_problem {
    tml_strings *pool;
    const char **files; size_t file_count, file_capacity; /* the inputs' names, in order; "-" is standard input */
    const char *title;                                    /* "" for none */
    tml_molecule molecule;
    tml_restraints restraints;
    tml_note *notes; size_t note_count, note_capacity;
};

/* Read inputs (sheet, NEF; told by content; "-" for standard input, gzip understood) into one problem.
 *
 * out   the caller frees it with tml_problem_free
 * Returns TML_OK, TML_BAD_INPUT, TML_TOO_LARGE, TML_NO_MEMORY or TML_IO.
 */
tml_status tml_problem_read(const char *const *paths, size_t path_count, tml_problem **out, tml_error *error);

void tml_problem_free(tml_problem *problem);

#endif
