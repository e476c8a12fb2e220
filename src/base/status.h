/* status.h: how errors travel upwards.
 *
 * The message is made where the fact is known and kept in the caller's tml_error; only src/cli prints it. Every function
 * here takes a NULL error and then only returns the status.
 */
#ifndef TML_STATUS_H
#define TML_STATUS_H

#include "trammel/trammel.h"

/* Record a message without a place; returns status. */
tml_status tml_fail(tml_error *error, tml_status status, const char *format, ...) __attribute__((format(printf, 3, 4)));

/* Record a message with file, line and column (0 where unknown); returns status. */
tml_status tml_fail_at(tml_error *error, tml_status status, const char *file, long line, long column, const char *format, ...)
    __attribute__((format(printf, 6, 7)));

/* TML_NO_MEMORY with the usual message; inline, so that static analysis sees that it is never TML_OK. */
static inline tml_status tml_no_memory(tml_error *error) {
    tml_fail(error, TML_NO_MEMORY, "out of memory");
    return TML_NO_MEMORY;
}

/* Static analysis does not look into other files; this tells it that a failure is not TML_OK. */
#ifdef __clang_analyzer__
#define tml_fail(error, status, ...) ((tml_fail)(error, status, __VA_ARGS__), (status))
#define tml_fail_at(error, status, ...) ((tml_fail_at)(error, status, __VA_ARGS__), (status))
#endif

#endif
