/* Any bytes as a file of coordinates, then as a sheet with and without chemistry, which must be read again. */
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "output/sheet.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void derive(const tml_coordinates *coordinates, bool covalent) {
    enum { ATOMS_MOST = 300 };
    tml_error error = {0};
    tml_derived derived;
    tml_derive_options options = {.cutoff = 4, .atoms = "all", .error = 0.2, .noise = 0.1, .keep = 0.9, .seed = 1, .model = -1,
                                  .covalent = covalent};
    if (coordinates->atom_count > ATOMS_MOST) return;
    tml_status status = tml_sheet_derive(coordinates, &options, "/dev/null", NULL, &derived, &error);
    if (status != TML_OK && status != TML_BAD_INPUT && status != TML_TOO_LARGE) abort();
    if (status != TML_OK && error.message[0] == '\0') abort();
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    tml_coordinates coordinates;
    tml_error error = {0};
    char *text = malloc(size + 1);
    if (text == NULL) return 0;
    memcpy(text, data, size);
    text[size] = '\0';
    size_t length = strlen(text); /* as the reader of files hands it on */
    tml_status status = tml_coordinates_parse(text, length, "fuzz", &coordinates, &error);
    if (status != TML_OK && (status != TML_BAD_INPUT && status != TML_TOO_LARGE)) abort();
    if (status == TML_OK) {
        derive(&coordinates, true);
        derive(&coordinates, false);
    }
    tml_coordinates_clear(&coordinates);
    free(text);
    return 0;
}
