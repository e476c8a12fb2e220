/* file.h: a file that appears whole or not at all, compressed or not.
 *
 * A tml_file gathers text; errors stick to it and come out when it is closed. Regular files are written beside their final name
 * and moved there by tml_file_close; devices, pipes and standard output ("-") are written directly. Nothing should be computed
 * while one is open: an interruption then never meets a half-written file.
 */
#ifndef TML_FILE_H
#define TML_FILE_H

#include <stdarg.h>
#include <stdio.h>

#include "base/status.h"

typedef struct tml_file tml_file;

/* Returns TML_OK, TML_IO or TML_NO_MEMORY; the caller ends it with tml_file_close or tml_file_discard. gzip output holds no time
 * and no name. Until then numbers are printed in the C locale by this thread. */
tml_status tml_file_open(const char *path, bool compressed, tml_file **out, tml_error *error);

/* The same over a stream that stays the caller's; tml_file_close flushes it. */
tml_status tml_file_wrap(FILE *stream, tml_file **out, tml_error *error);

void tml_file_print(tml_file *file, const char *format, ...) __attribute__((format(printf, 2, 3)));
void tml_file_write(tml_file *file, const char *text, size_t length);

/* Text broken at blanks into lines of at most `width` columns (bytes of UTF-8 beyond the first of a character do not count), the
 * first after `first`, the others after `rest`. Control characters and what is no UTF-8 come out as '?'. */
void tml_file_paragraph(tml_file *file, int width, const char *first, const char *rest, const char *format, ...)
    __attribute__((format(printf, 5, 6)));

/* Finish: TML_OK, or TML_IO or TML_NO_MEMORY for whatever failed since it was opened; the final name is then untouched. */
tml_status tml_file_close(tml_file *file, tml_error *error);

/* Take it back: nothing is left behind. NULL is fine. */
void tml_file_discard(tml_file *file);

bool tml_text_is_utf8(const char *text);

/* Columns that a text takes. */
int tml_text_width(const char *text);

#endif
