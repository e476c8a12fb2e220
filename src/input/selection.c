#include "input/selection.h"

#include <ctype.h>
#include <stdlib.h>
#include <string.h>

#include "molecule/elements.h"

/* The names of sugar atoms had a star where they have a prime now. */
static bool same_letter(char in_pattern, char in_name) {
    return in_pattern == in_name || (in_pattern == '\'' && in_name == '*');
}

/* `*` for anything, `%` for digits; no backtracking beyond the last star. */
static bool matches(const char *pattern, size_t length, const char *name) {
    const char *end = pattern + length, *star = NULL, *resume = NULL;
    while (*name != '\0' || pattern < end) {
        if (pattern < end && (*pattern == '*' || *pattern == '%')) {
            star = pattern++;
            resume = name;
        } else if (pattern < end && *name != '\0' && same_letter(*pattern, *name)) {
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
            if (matches(BACKBONE[i], strlen(BACKBONE[i]), site->name)) return true;
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
            return tml_fail(error, TML_BAD_INPUT, "'%.*s' names no element; @C or @ZN would", length > 32 ? 32 : (int)length,
                            word);
        word += length;
        if (*word == '\0') return TML_OK;
    }
}

/* ---- stretches of residues ---- */

/* A residue's number and insertion code; false where the text does not begin with one. *at goes behind it. */
static bool read_code(const char **at, long *number, char *insertion) {
    enum { MOST_DIGITS = 9 };
    const char *digits = *at + (**at == '-');
    size_t length = strspn(digits, "0123456789");
    if (length == 0 || length > MOST_DIGITS) return false;
    *number = strtol(*at, NULL, 10);
    *at = digits + length;
    *insertion = isalpha((unsigned char)**at) ? *(*at)++ : ' ';
    return true;
}

/* The first word of `text`, which a comma or the end closes; blanks may stand before it. */
static bool read_stretch(const char *text, tml_stretch *out) {
    text += strspn(text, " ");
    size_t length = strcspn(text, ","), chain = strcspn(text, ":,");
    const char *at = text, *end = text + length;
    *out = (tml_stretch){.word = text, .length = length};
    if (length == 0) return false;
    bool bare = chain == length && (isdigit((unsigned char)*text) || *text == '-');
    if (!bare) {
        out->chain = text;
        out->chain_length = chain;
        at = text + chain + (text[chain] == ':');
        if (chain == 0) return false;
    }
    if (at == end) {
        out->whole = text[chain] != ':'; /* "A:" asks for something and does not say what */
        return out->whole;
    }
    if (!read_code(&at, &out->first, &out->first_insertion)) return false;
    out->last = out->first;
    out->last_insertion = out->first_insertion;
    if (*at == '-' && (at++, !read_code(&at, &out->last, &out->last_insertion))) return false;
    return at == end && (out->first < out->last || (out->first == out->last && out->first_insertion <= out->last_insertion));
}

bool tml_stretch_next(const char **text, tml_stretch *out) {
    if (**text == '\0' || !read_stretch(*text, out)) return false;
    *text = out->word + out->length + (out->word[out->length] == ',');
    return true;
}

tml_status tml_stretches_check(const char *text, tml_error *error) {
    tml_stretch stretch;
    for (const char *at = text;; at += strcspn(at, ",") + 1) {
        if (!read_stretch(at, &stretch))
            return tml_fail(error, TML_BAD_INPUT, "'%.*s' is no stretch of residues; A:8-69, A:12, 8-69 or A would be",
                            stretch.length > 64 ? 64 : (int)stretch.length, at);
        if (stretch.word[stretch.length] == '\0') return TML_OK;
    }
}

bool tml_stretch_holds(const tml_stretch *stretch, const tml_site_residue *residue) {
    long number;
    char insertion;
    const char *code = residue->number;
    if (stretch->chain != NULL && !word_is(stretch->chain, stretch->chain_length, residue->chain)) return false;
    if (stretch->whole) return true;
    if (!read_code(&code, &number, &insertion) || *code != '\0') return false;
    if (number < stretch->first || (number == stretch->first && insertion < stretch->first_insertion)) return false;
    return number < stretch->last || (number == stretch->last && insertion <= stretch->last_insertion);
}
