/* source.h: whole inputs in memory: files, standard input, gzip. */
#ifndef TML_SOURCE_H
#define TML_SOURCE_H

#include "base/status.h"

/* Read all of `path` ("-" is standard input), unpacked if it is gzip by its content.
 *
 * text    the caller frees it; ended by '\0', which length does not count; holds no other '\0' and no byte order mark; lines
 *         end in LF or CR LF
 * Returns TML_OK, TML_BAD_INPUT (a folder, binary data, broken gzip), TML_TOO_LARGE, TML_NO_MEMORY or TML_IO.
 */
tml_status tml_source_read(const char *path, char **text, size_t *length, tml_error *error);

#endif
