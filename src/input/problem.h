/* problem.h: molecule and restraints of one job; everything right of `bound` needs only this.
 *
 * A tml_problem owns all it points to. read.c makes it from inputs, nothing changes it afterwards but the finding of cis
 * peptides (tml_molecule_set_peptide). tml_problem_read and tml_problem_free are public: trammel.h.
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

/* Add a note, printf style. TML_OK or TML_NO_MEMORY. */
tml_status tml_problem_add_note(tml_problem *problem, tml_place place, tml_error *error, const char *format, ...)
    __attribute__((format(printf, 4, 5)));

#endif
