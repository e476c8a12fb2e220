#include "base/status.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

static tml_status record(tml_error *error, tml_status status, const char *file, long line, long column, const char *format,
                         va_list arguments) {
    if (error == NULL) return status;
    error->status = status;
    error->line = line;
    error->column = column;
    snprintf(error->file, sizeof error->file, "%s", file == NULL ? "" : file);
    vsnprintf(error->message, sizeof error->message, format, arguments);
    return status;
}

tml_status(tml_fail)(tml_error *error, tml_status status, const char *format, ...) {
    va_list arguments;
    va_start(arguments, format);
    record(error, status, NULL, 0, 0, format, arguments);
    va_end(arguments);
    return status;
}

tml_status(tml_fail_at)(tml_error *error, tml_status status, const char *file, long line, long column, const char *format, ...) {
    va_list arguments;
    va_start(arguments, format);
    record(error, status, file, line, column, format, arguments);
    va_end(arguments);
    return status;
}

const char *tml_version(void) {
    return TML_VERSION;
}
