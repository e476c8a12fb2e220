#include "input/source.h"

#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>
#include <zlib.h>

#include "base/memory.h"

/* Unpacked size at most; indices of lines and columns stay far inside 32 bits. */
static const size_t MOST_BYTES = (size_t)1 << 30;
enum { CHUNK = 1 << 18 };

static tml_status open_source(const char *path, gzFile *file, tml_error *error);
static tml_status read_all(gzFile file, const char *path, char **text, size_t *length, tml_error *error);

static void tidy(char *text, size_t *length);

tml_status tml_source_read(const char *path, char **text, size_t *length, tml_error *error) {
    gzFile file = NULL;
    *text = NULL;
    *length = 0;
    tml_status status = open_source(path, &file, error);
    if (status != TML_OK) return status;
    status = read_all(file, path, text, length, error);
    int closed = gzclose_r(file);
    if (status == TML_OK && closed != Z_OK)
        status = tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, closed == Z_BUF_ERROR ? "the gzip data end too early" : "closing the file failed");
    if (status == TML_OK && memchr(*text, '\0', *length) != NULL)
        status = tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, "binary data; a text of restraints, a sequence or coordinates is expected");
    if (status != TML_OK) {
        free(*text);
        *text = NULL;
        return status;
    }
    tidy(*text, length);
    return TML_OK;
}

static tml_status open_source(const char *path, gzFile *file, tml_error *error) {
    int descriptor = strcmp(path, "-") == 0 ? dup(STDIN_FILENO) : open(path, O_RDONLY | O_CLOEXEC);
    if (descriptor < 0) {
        bool absent = errno == ENOENT || errno == ENOTDIR || errno == EBADF;
        return tml_fail_at(error, absent ? TML_BAD_INPUT : TML_IO, path, 0, 0, "cannot be opened: %s", strerror(errno));
    }
    struct stat facts;
    if (fstat(descriptor, &facts) == 0 && S_ISDIR(facts.st_mode)) {
        close(descriptor);
        return tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, "is a folder; a file is expected");
    }
    *file = gzdopen(descriptor, "rb");
    if (*file == NULL) {
        close(descriptor);
        return tml_no_memory(error);
    }
    return TML_OK;
}

static tml_status read_all(gzFile file, const char *path, char **text, size_t *length, tml_error *error) {
    size_t capacity = 0;
    for (;;) {
        if (*length > MOST_BYTES)
            return tml_fail_at(error, TML_TOO_LARGE, path, 0, 0, "more than %zu MB; split it", MOST_BYTES >> 20);
        if (!tml_grow(text, &capacity, *length + CHUNK + 1, 1)) return tml_no_memory(error);
        int got = gzread(file, *text + *length, CHUNK);
        if (got < 0) {
            int code;
            const char *why = gzerror(file, &code);
            if (code == Z_ERRNO) return tml_fail_at(error, TML_IO, path, 0, 0, "reading failed: %s", strerror(errno));
            if (code == Z_MEM_ERROR) return tml_no_memory(error);
            return tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, "broken gzip data: %s", why);
        }
        if (got == 0) break;
        *length += (size_t)got;
    }
    (*text)[*length] = '\0';
    return TML_OK;
}

/* Without a byte order mark; where lines end in carriage returns alone (as once on the Macintosh), in line feeds instead. */
static void tidy(char *text, size_t *length) {
    if (*length >= 3 && memcmp(text, "\xef\xbb\xbf", 3) == 0) {
        *length -= 3;
        memmove(text, text + 3, *length + 1);
    }
    if (memchr(text, '\n', *length) != NULL) return;
    for (char *at = text; (at = memchr(at, '\r', *length - (size_t)(at - text))) != NULL;) *at = '\n';
}
