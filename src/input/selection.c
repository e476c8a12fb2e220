#include "input/selection.h"

#include <ctype.h>
#include <string.h>

#include "molecule/elements.h"

/* `*` for anything, `%` for digits; no backtracking beyond the last star. */
static bool matches(const char *pattern, size_t length, const char *name) {
    const char *end = pattern + length, *star = NULL, *resume = NULL;
    while (*name != '\0' || pattern < end) {
        if (pattern < end && (*pattern == '*' || *pattern == '%')) {
            star = pattern++;
            resume = name;
        } else if (pattern < end && *name != '\0' && *pattern == *name) {
            pattern++;
            name++;
        } else if (star != NULL && *resume != '\0' && (*star == '*' || isdigit((unsigned char)*resume))) {
            pattern = star + 1;
            name = ++resume;
        } else {
            return false;
        }
    }
    return true;
}

static bool word_is(const char *word, size_t length, const char *text) {
    return strlen(text) == length && memcmp(word, text, length) == 0;
}

static int element_word(const char *word, size_t length) {
    char symbol[4] = "";
    if (length < 2 || length > 3) return -1;
    memcpy(symbol, word + 1, length - 1);
    return tml_element_number(symbol);
}

static bool selected_by(const char *word, size_t length, const tml_site *site) {
    static const char *const BACKBONE[] = {"N", "CA", "C", "O", "P", "O5'", "C5'", "C4'", "C3'", "O3'"};
    if (word_is(word, length, "all")) return true;
    if (word_is(word, length, "heavy")) return site->element != 1;
    if (word_is(word, length, "hydrogens")) return site->element == 1;
    if (word_is(word, length, "backbone")) {
        for (size_t i = 0; i < sizeof BACKBONE / sizeof BACKBONE[0]; i++)
            if (strcmp(site->name, BACKBONE[i]) == 0) return true;
        return false;
    }
    if (word[0] == '@') return site->element == element_word(word, length);
    return matches(word, length, site->name);
}

bool tml_selected(const char *atoms, const tml_site *site) {
    for (const char *word = atoms;; word++) {
        size_t length = strcspn(word, ",");
        if (selected_by(word, length, site)) return true;
        word += length;
        if (*word == '\0') return false;
    }
}

tml_status tml_selection_check(const char *atoms, tml_error *error) {
    for (const char *word = atoms;; word++) {
        size_t length = strcspn(word, ",");
        if (length == 0) return tml_fail(error, TML_BAD_INPUT, "'%.64s' has an empty word among its atoms", atoms);
        if (word[0] == '@' && element_word(word, length) < 0)
            return tml_fail(error, TML_BAD_INPUT, "'%.*s' names no element; @C or @ZN would", length > 32 ? 32 : (int)length, word);
        word += length;
        if (*word == '\0') return TML_OK;
    }
}
