/* Any bytes as models and, behind a line of equal signs, a reference; compared on every kind of core. */
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "ensemble/compare.h"
#include "input/selection.h"
#include "output/output.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static bool parsed(const char *text, tml_coordinates *out) {
    enum { MOST = 3000 };
    tml_error error = {0};
    tml_status status = tml_coordinates_parse(text, strlen(text), "fuzz", out, &error);
    if (status != TML_OK && status != TML_BAD_INPUT && status != TML_TOO_LARGE) abort();
    return status == TML_OK && out->atom_count * (size_t)out->model_count <= MOST;
}

static void compare(const char *models, const char *reference, const char *core, const char *atoms) {
    static FILE *nowhere;
    tml_coordinates one = {0}, other = {0};
    tml_comparison *comparison = NULL;
    tml_error error = {0};
    const tml_compare_options options = {.core = core, .atoms = atoms, .cut = core[0] == 'a' ? 2 : -1, .threads = 1};
    if (nowhere == NULL) nowhere = fopen("/dev/null", "w");
    if (parsed(models, &one) && (reference == NULL || parsed(reference, &other))) {
        tml_status status =
            tml_compare_coordinates(&one, reference == NULL ? NULL : &other, &options, NULL, &comparison, &error);
        if (status != TML_OK && status != TML_BAD_INPUT) abort();
        if (status != TML_OK && (comparison != NULL || error.message[0] == '\0')) abort();
        if (status == TML_OK && tml_print_comparison(nowhere, comparison, &error) != TML_OK) abort();
        if (status == TML_OK && tml_write_comparison_json(comparison, "/dev/null", &error) != TML_OK) abort();
    }
    tml_comparison_free(comparison);
    tml_coordinates_clear(&one);
    tml_coordinates_clear(&other);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    static const char BETWEEN[] = "\n===\n";
    char *text = malloc(size + 1);
    if (text == NULL) return 0;
    memcpy(text, data, size);
    text[size] = '\0';
    char *reference = strstr(text, BETWEEN);
    if (reference != NULL) {
        *reference = '\0';
        reference += strlen(BETWEEN);
    }
    compare(text, reference, "spread", "backbone");
    compare(text, reference, "order", "all");
    compare(text, reference, "all", "heavy");
    if (size < 100) (void)tml_stretches_check(text, NULL);
    compare(text, reference, "A:1-2", "CA,C*,H%");
    free(text);
    return 0;
}
