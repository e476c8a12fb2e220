#include "output/values.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "output/file.h"
#include "output/output.h"

void tml_json_append(json_t **list, json_t *item) {
    if (json_array_append_new(*list, item) == 0) return;
    json_decref(*list);
    *list = NULL;
}

void tml_json_put(json_t **object, const char *key, json_t *item) {
    if (json_object_set_new(*object, key, item) == 0) return;
    json_decref(*object);
    *object = NULL;
}

json_t *tml_json_number(double value) {
    return isfinite(value) ? json_real(value) : json_null();
}

json_t *tml_json_rounded(double value) {
    return isfinite(value) && fabs(value) < 1e9 ? json_real(round(value * 1e6) / 1e6) : tml_json_number(value);
}

json_t *tml_json_text(const char *text) {
    if (text == NULL) return json_null();
    if (tml_text_is_utf8(text)) return json_string(text);
    size_t length = strlen(text);
    char *plain = tml_alloc(length + 1, 1);
    if (plain == NULL) return NULL;
    for (size_t at = 0; at < length; at++) plain[at] = (unsigned char)text[at] < 0x80 ? text[at] : '?';
    json_t *good = json_string(plain);
    free(plain);
    return good;
}

static int take(const char *text, size_t length, void *file) {
    tml_file_write(file, text, length);
    return 0;
}

tml_status tml_json_write(json_t *root, const char *path, tml_error *error) {
    enum { DIGITS = 12 };
    bool compressed;
    tml_file *file;
    if (root == NULL) return tml_no_memory(error);
    tml_format_of(path, &compressed);
    tml_status status = tml_file_open(path, compressed, &file, error);
    if (status == TML_OK) {
        bool dumped = json_dump_callback(root, take, file, JSON_INDENT(2) | JSON_REAL_PRECISION(DIGITS)) == 0;
        tml_file_write(file, "\n", 1);
        if (dumped) {
            status = tml_file_close(file, error);
        } else {
            tml_file_discard(file);
            status = tml_no_memory(error);
        }
    }
    json_decref(root);
    return status;
}
