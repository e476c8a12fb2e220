/* draft.h: what one run's inputs say, all files together, before it becomes a problem. Each reader appends to it. */
#ifndef TML_DRAFT_H
#define TML_DRAFT_H

#include "input/problem.h"

typedef struct tml_draft {
    tml_problem *problem; /* borrowed: string pool, file names, title and notes go there at once */
    tml_outline outline;
    tml_rows rows;
} tml_draft;

void tml_draft_clear(tml_draft *draft);

/* A note, printf style. */
tml_status tml_draft_note(tml_draft *draft, tml_place place, tml_error *error, const char *format, ...)
    __attribute__((format(printf, 4, 5)));

/* Readers: text is the whole file, ended by '\0' (length does not count it); file indexes problem->files. */
tml_status tml_read_nef(tml_draft *draft, const char *text, size_t length, int32_t file, tml_error *error);
tml_status tml_read_sheet(tml_draft *draft, const char *text, size_t length, int32_t file, tml_error *error);

#endif
