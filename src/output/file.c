#define _XOPEN_SOURCE 700 /* realpath */

#include "output/file.h"

#include <errno.h>
#include <fcntl.h>
#include <locale.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>
#include <zlib.h>

#include "base/memory.h"

/* Contents: opening - writing - paragraphs - closing */

struct tml_file {
    char *path;      /* as named by the caller, for messages; NULL over a caller's stream */
    char *target;    /* where the file goes; NULL where it is written directly */
    char *temporary; /* written until then */
    FILE *stream;    /* NULL while `packed` is written */
    gzFile packed;
    bool borrowed;   /* the stream is standard output or the caller's */
    tml_status failed;
    int reason;      /* errno of the first failure, 0 where unknown */
    locale_t plain, before;
};

static tml_status open_target(tml_file *file, bool compressed, tml_error *error);
static tml_status open_directly(tml_file *file, int descriptor, bool compressed, tml_error *error);
static tml_status failure(const tml_file *file, tml_error *error);
static void fail(tml_file *file, tml_status status, int reason);
static void release(tml_file *file);

/* ---- opening ---- */

static tml_file *new_file(void) {
    tml_file *file = tml_alloc(1, sizeof *file);
    if (file == NULL) return NULL;
    file->plain = newlocale(LC_NUMERIC_MASK, "C", (locale_t)0);
    if (file->plain != (locale_t)0) file->before = uselocale(file->plain);
    return file;
}

tml_status tml_file_open(const char *path, bool compressed, tml_file **out, tml_error *error) {
    *out = NULL;
    tml_file *file = new_file();
    if (file == NULL || (file->path = strdup(path)) == NULL) {
        release(file);
        return tml_no_memory(error);
    }
    tml_status status;
    if (strcmp(path, "-") == 0) {
        file->borrowed = true;
        file->stream = stdout;
        fflush(stdout);
        status = compressed ? open_directly(file, dup(STDOUT_FILENO), true, error) : TML_OK;
    } else {
        status = open_target(file, compressed, error);
    }
    if (status == TML_OK)
        *out = file;
    else
        release(file);
    return status;
}

tml_status tml_file_wrap(FILE *stream, tml_file **out, tml_error *error) {
    *out = new_file();
    if (*out == NULL) return tml_no_memory(error);
    (*out)->stream = stream;
    (*out)->borrowed = true;
    return TML_OK;
}

/* A temporary name in the folder of `target`, open for writing; -1 with errno where that fails. */
static int open_temporary(tml_file *file, mode_t mode) {
    enum { MOST_TRIES = 1000, ROOM = 48 };
    const char *slash = strrchr(file->target, '/');
    int folder = slash == NULL ? 0 : (int)(slash - file->target + 1);
    size_t size = (size_t)folder + ROOM;
    file->temporary = tml_alloc(size, 1);
    if (file->temporary == NULL) {
        errno = ENOMEM;
        return -1;
    }
    for (int i = 0; i < MOST_TRIES; i++) {
        snprintf(file->temporary, size, "%.*s.trammel-%ld-%d", folder, file->target, (long)getpid(), i);
        int descriptor = open(file->temporary, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, mode);
        if (descriptor >= 0 || errno != EEXIST) return descriptor;
    }
    return -1;
}

static tml_status open_target(tml_file *file, bool compressed, tml_error *error) {
    struct stat old;
    int descriptor;
    bool exists = stat(file->path, &old) == 0;
    if (exists && !S_ISREG(old.st_mode)) {
        descriptor = open(file->path, O_WRONLY | O_CLOEXEC);
    } else if (exists && access(file->path, W_OK) != 0) {
        descriptor = -1;
    } else {
        file->target = exists ? realpath(file->path, NULL) : strdup(file->path); /* a link stays a link */
        if (file->target == NULL) return tml_no_memory(error);
        descriptor = open_temporary(file, 0666);
        if (descriptor < 0) {
            free(file->temporary);
            file->temporary = NULL;
        } else if (exists && fchmod(descriptor, old.st_mode & 0777) != 0) {
            fail(file, TML_IO, errno);
        }
    }
    return open_directly(file, descriptor, compressed, error);
}

/* Take over a descriptor. */
static tml_status open_directly(tml_file *file, int descriptor, bool compressed, tml_error *error) {
    if (descriptor < 0) {
        fail(file, errno == ENOMEM ? TML_NO_MEMORY : TML_IO, errno);
        return failure(file, error);
    }
    errno = 0;
    if (compressed)
        file->packed = gzdopen(descriptor, "wb6");
    else
        file->stream = fdopen(descriptor, "w");
    if (compressed ? file->packed == NULL : file->stream == NULL) {
        close(descriptor);
        fail(file, TML_NO_MEMORY, 0);
        return failure(file, error);
    }
    return TML_OK;
}

/* ---- writing ---- */

static void fail(tml_file *file, tml_status status, int reason) {
    if (file->failed != TML_OK) return;
    file->failed = status;
    file->reason = reason;
}

void tml_file_write(tml_file *file, const char *text, size_t length) {
    if (file->failed != TML_OK || length == 0) return;
    errno = 0;
    size_t written = file->packed != NULL ? gzfwrite(text, 1, length, file->packed) : fwrite(text, 1, length, file->stream);
    if (written != length) fail(file, TML_IO, errno);
}

static void print_list(tml_file *file, const char *format, va_list arguments) {
    char brief[512], *text = brief;
    va_list again;
    va_copy(again, arguments);
    int length = vsnprintf(brief, sizeof brief, format, arguments);
    if (length >= (int)sizeof brief) {
        text = tml_alloc((size_t)length + 1, 1);
        if (text != NULL) vsnprintf(text, (size_t)length + 1, format, again);
    }
    va_end(again);
    if (length < 0)
        fail(file, TML_IO, errno);
    else if (text == NULL)
        fail(file, TML_NO_MEMORY, 0);
    else
        tml_file_write(file, text, (size_t)length);
    if (text != brief) free(text);
}

void tml_file_print(tml_file *file, const char *format, ...) {
    va_list arguments;
    va_start(arguments, format);
    print_list(file, format, arguments);
    va_end(arguments);
}

/* ---- paragraphs ---- */

static bool starts_character(char byte) {
    return ((unsigned char)byte & 0xC0) != 0x80;
}

int tml_text_width(const char *text) {
    int width = 0;
    for (; *text != '\0'; text++) width += starts_character(*text);
    return width;
}

/* Bytes of the UTF-8 character that starts here; 0 for what is none. Source: RFC 3629. */
static size_t character_length(const char *text) {
    const unsigned char *c = (const unsigned char *)text;
    size_t length = c[0] < 0x80 ? 1 : c[0] >= 0xC2 && c[0] < 0xE0 ? 2 : c[0] >= 0xE0 && c[0] < 0xF0 ? 3 : c[0] >= 0xF0 && c[0] < 0xF5 ? 4 : 0;
    for (size_t i = 1; i < length; i++)
        if ((c[i] & 0xC0) != 0x80) return 0;
    bool overlong = (c[0] == 0xE0 && c[1] < 0xA0) || (c[0] == 0xF0 && c[1] < 0x90);
    bool beyond = (c[0] == 0xED && c[1] >= 0xA0) || (c[0] == 0xF4 && c[1] >= 0x90);
    return length > 1 && (overlong || beyond) ? 0 : length;
}

bool tml_text_is_utf8(const char *text) {
    while (*text != '\0') {
        size_t length = character_length(text);
        if (length == 0) return false;
        text += length;
    }
    return true;
}

/* Inputs may hold anything, and terminals act on control characters: those and what is no UTF-8 become '?'. */
static void make_printable(char *text) {
    while (*text != '\0') {
        size_t length = character_length(text);
        unsigned char first = (unsigned char)*text;
        bool control = length == 1 ? first < 0x20 || first == 0x7F : length == 2 && first == 0xC2 && (unsigned char)text[1] < 0xA0;
        if (length == 0 || control) {
            for (size_t i = 0; i < (length == 0 ? 1 : length); i++) text[i] = '?';
        }
        text += length == 0 ? 1 : length;
    }
}

typedef struct wrapping { const char *first, *rest; int width; } wrapping;

/* One line of a paragraph: bytes that fit in `room` columns, broken at the last blank if there is one. */
static size_t line_length(const char *text, size_t length, int room) {
    size_t at = 0, blank = 0;
    for (int columns = 0; at < length; at++) {
        if (starts_character(text[at]) && ++columns > room) break;
        if (text[at] == ' ') blank = at;
    }
    if (at == length || text[at] == ' ') return at;
    return blank > 0 ? blank : at > 0 ? at : length;
}

static void wrap(tml_file *file, const wrapping *how, const char *text, size_t length) {
    const char *start = how->first;
    do {
        size_t line = line_length(text, length, how->width - tml_text_width(start));
        tml_file_write(file, start, strlen(start));
        tml_file_write(file, text, line);
        tml_file_write(file, "\n", 1);
        text += line;
        length -= line;
        while (length > 0 && *text == ' ') {
            text++;
            length--;
        }
        start = how->rest;
    } while (length > 0);
}

void tml_file_paragraph(tml_file *file, int width, const char *first, const char *rest, const char *format, ...) {
    va_list arguments, again;
    va_start(arguments, format);
    va_copy(again, arguments);
    int length = vsnprintf(NULL, 0, format, arguments);
    char *text = length < 0 ? NULL : tml_alloc((size_t)length + 1, 1);
    if (text == NULL) {
        fail(file, TML_NO_MEMORY, 0);
    } else {
        vsnprintf(text, (size_t)length + 1, format, again);
        make_printable(text);
        wrap(file, &(wrapping){first, rest, width}, text, (size_t)length);
    }
    free(text);
    va_end(again);
    va_end(arguments);
}

/* ---- closing ---- */

static tml_status failure(const tml_file *file, tml_error *error) {
    if (file->failed == TML_NO_MEMORY) return tml_no_memory(error);
    const char *name = file->path == NULL || strcmp(file->path, "-") == 0 ? "standard output" : file->path;
    char reason[128] = "the system does not say why";
    if (file->reason != 0 && strerror_r(file->reason, reason, sizeof reason) != 0) snprintf(reason, sizeof reason, "unknown");
    return tml_fail(error, TML_IO, "%.500s cannot be written: %s", name, reason);
}

/* Flush and close what is ours. */
static void finish(tml_file *file) {
    errno = 0;
    if (file->packed != NULL && gzclose(file->packed) != Z_OK) fail(file, TML_IO, errno);
    file->packed = NULL;
    if (file->stream != NULL && (file->borrowed ? fflush(file->stream) : fclose(file->stream)) != 0) fail(file, TML_IO, errno);
    file->stream = NULL;
}

tml_status tml_file_close(tml_file *file, tml_error *error) {
    finish(file);
    if (file->failed == TML_OK && file->temporary != NULL && rename(file->temporary, file->target) != 0)
        fail(file, TML_IO, errno);
    tml_status status = file->failed == TML_OK ? TML_OK : failure(file, error);
    if (status == TML_OK) {
        free(file->temporary);
        file->temporary = NULL;
    }
    release(file);
    return status;
}

void tml_file_discard(tml_file *file) {
    if (file == NULL) return;
    finish(file);
    release(file);
}

static void release(tml_file *file) {
    if (file == NULL) return;
    if (file->temporary != NULL) unlink(file->temporary);
    if (file->plain != (locale_t)0) {
        uselocale(file->before);
        freelocale(file->plain);
    }
    free(file->temporary);
    free(file->target);
    free(file->path);
    free(file);
}
