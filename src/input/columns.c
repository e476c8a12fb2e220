/* columns.c: the words for a table's columns and form.
 *
 *   words      apart by blanks, with quotes
 *   columns    NAME, NAME@HEADING, NAME=VALUE, - and ...
 *   agreement  which columns need or exclude each other
 *   form       separator, unit, decimal comma, heading, comments
 */
#include "input/columns.h"

#include <stdio.h>
#include <string.h>

#include "molecule/nearest.h"

/* Which atoms a kind is said of: none, one of them (`atom_1`), or one of them or all (`chain_1`, `chain`). */
typedef enum said_of { OF_NONE, OF_ONE, OF_ANY } said_of;

static const struct { const char *name; said_of of; bool number; } KINDS[TML_COLUMN_KINDS] = {
    [TML_COLUMN_CHAIN] = {"chain", OF_ANY, false},
    [TML_COLUMN_RESIDUE] = {"residue", OF_ANY, false},
    [TML_COLUMN_RESIDUE_NAME] = {"residue_name", OF_ANY, false},
    [TML_COLUMN_ATOM] = {"atom", OF_ONE, false},
    [TML_COLUMN_ADDRESS] = {"address", OF_ONE, false},
    [TML_COLUMN_ANGLE] = {"angle", OF_NONE, false},
    [TML_COLUMN_LOWER] = {"lower", OF_NONE, true},
    [TML_COLUMN_UPPER] = {"upper", OF_NONE, true},
    [TML_COLUMN_TARGET] = {"target", OF_NONE, true},
    [TML_COLUMN_MINUS] = {"minus", OF_NONE, true},
    [TML_COLUMN_PLUS] = {"plus", OF_NONE, true},
    [TML_COLUMN_ERROR] = {"error", OF_NONE, true},
    [TML_COLUMN_WEIGHT] = {"weight", OF_NONE, true},
    [TML_COLUMN_ID] = {"id", OF_NONE, false},
    [TML_COLUMN_LIST] = {"list", OF_NONE, false},
};

enum { WORD_MOST = 120 };

typedef struct parser {
    const char *path, *option; /* "columns" or "form" */
    tml_strings *pool;
    tml_layout *out;
    tml_error *error;
    const char *at;
    int number;                /* of the word, from 1 */
    char word[WORD_MOST + 1];  /* the word without its quotes */
    size_t sign;               /* where its first @ or = outside quotes stands; its length where there is none */
} parser;

static tml_status next_word(parser *p, bool *found);
static tml_status column_word(parser *p);
static tml_status agree(parser *p);
static tml_status form_word(parser *p);

tml_status tml_layout_parse(const char *columns, const char *form, const char *path, tml_strings *pool, tml_layout *out,
                            tml_error *error) {
    parser p = {.path = path, .option = "columns", .pool = pool, .out = out, .error = error, .at = columns};
    bool found = true;
    *out = (tml_layout){.comment = "#"};
    memset(out->slot, -1, sizeof out->slot);
    tml_status status = next_word(&p, &found);
    for (; status == TML_OK && found; status = status == TML_OK ? next_word(&p, &found) : status) status = column_word(&p);
    if (status == TML_OK && form != NULL) {
        p.option = "form";
        p.at = form;
        p.number = 0;
        status = next_word(&p, &found);
        for (; status == TML_OK && found; status = status == TML_OK ? next_word(&p, &found) : status) status = form_word(&p);
    }
    return status == TML_OK ? agree(&p) : status;
}

const tml_column *tml_layout_column(const tml_layout *layout, tml_column_kind kind, int atom) {
    int own = layout->slot[kind][atom], all = layout->slot[kind][TML_COLUMN_ALL];
    return own >= 0 ? &layout->columns[own] : all >= 0 ? &layout->columns[all] : NULL;
}

bool tml_column_is_number(tml_column_kind kind) {
    return KINDS[kind].number;
}

/* ---- words ---- */

static tml_status bad_word(parser *p, const char *text) {
    return tml_fail_at(p->error, TML_BAD_INPUT, p->path, 0, 0, "word %d of its %s, '%s': %s", p->number, p->option, p->word,
                       text);
}

static bool is_blank(char c) {
    return c == ' ' || c == '\t' || c == '\n' || c == '\r';
}

static tml_status next_word(parser *p, bool *found) {
    size_t length = 0;
    char quote = 0;
    while (is_blank(*p->at)) p->at++;
    *found = *p->at != '\0';
    p->number++;
    p->sign = SIZE_MAX;
    for (; *p->at != '\0' && (quote != 0 || !is_blank(*p->at)); p->at++) {
        p->word[length] = '\0';
        if (quote == 0 && (*p->at == '"' || *p->at == '\'') && (length == 0 || length == p->sign + 1)) {
            quote = *p->at; /* opens only where a word or its value begins: H5' is a name */
        } else if (quote != 0 && *p->at == quote) {
            quote = 0;
        } else {
            if (length == WORD_MOST) return bad_word(p, "this word is too long");
            if (quote == 0 && p->sign == SIZE_MAX && (*p->at == '@' || *p->at == '=')) p->sign = length;
            p->word[length++] = *p->at;
        }
    }
    p->word[length] = '\0';
    if (p->sign == SIZE_MAX) p->sign = length;
    return quote == 0 ? TML_OK : bad_word(p, "its quote is not closed");
}

static tml_status unknown_word(parser *p, const char *what, const char *const *names, size_t count) {
    char near[160] = "", text[320];
    tml_nearest nearest;
    tml_nearest_start(&nearest, p->word);
    for (size_t i = 0; i < count; i++) tml_nearest_offer(&nearest, names[i]);
    tml_nearest_append(&nearest, near, sizeof near);
    snprintf(text, sizeof text, "no %s is called so; the nearest: %s", what, near);
    return bad_word(p, text);
}

/* ---- columns ---- */

/* "chain_1" to its kind and atom; false where it is none. */
static bool kind_of(const char *word, size_t length, tml_column_kind *kind, int *atom) {
    for (int k = 0; k < TML_COLUMN_KINDS; k++) {
        size_t own = strlen(KINDS[k].name);
        if (own > length || memcmp(word, KINDS[k].name, own) != 0) continue;
        *kind = (tml_column_kind)k;
        *atom = TML_COLUMN_ALL;
        if (own == length) return KINDS[k].of != OF_ONE;
        *atom = word[own + 1] - '1';
        if (own + 2 == length && word[own] == '_' && *atom >= 0 && *atom < TML_TABLE_ATOMS) return KINDS[k].of != OF_NONE;
    }
    return false;
}

static tml_status unknown_column(parser *p) {
    char spelt[TML_COLUMN_KINDS * (TML_TABLE_ATOMS + 1)][24];
    const char *names[TML_COLUMN_KINDS * (TML_TABLE_ATOMS + 1)];
    size_t count = 0;
    for (int k = 0; k < TML_COLUMN_KINDS; k++) {
        for (int atom = 0; KINDS[k].of != OF_NONE && atom < TML_TABLE_ATOMS; atom++)
            snprintf(spelt[count++], sizeof *spelt, "%s_%d", KINDS[k].name, atom + 1);
        if (KINDS[k].of != OF_ONE) snprintf(spelt[count++], sizeof *spelt, "%s", KINDS[k].name);
    }
    for (size_t i = 0; i < count; i++) names[i] = spelt[i];
    p->word[p->sign] = '\0';
    return unknown_word(p, "column", names, count);
}

static tml_status column_word(parser *p) {
    tml_layout *out = p->out;
    tml_column column = {.field = -1};
    if (out->more) return bad_word(p, "'...' stands for all further columns and comes last");
    if (strcmp(p->word, "...") == 0) {
        out->more = true;
        return TML_OK;
    }
    bool skipped = strcmp(p->word, "-") == 0;
    if (!skipped && !kind_of(p->word, p->sign, &column.kind, &column.atom)) return unknown_column(p);
    char sign = p->word[p->sign];
    if (sign == '\0' && out->positions == TML_FIELDS_MOST) return bad_word(p, "there are too many columns");
    if (sign == '\0') column.field = out->positions++;
    if (skipped) return TML_OK;
    if (out->slot[column.kind][column.atom] >= 0) return bad_word(p, "this column is named twice");
    const char *value = p->word + p->sign + 1;
    if (sign != '\0' && *value == '\0')
        return bad_word(p, sign == '@' ? "a heading is expected after '@'" : "a value is expected after '='");
    if (out->count == TML_COLUMNS_MOST) return bad_word(p, "there are too many columns");
    if (sign == '@' && (column.heading = tml_strings_add(p->pool, value)) == NULL) return tml_no_memory(p->error);
    if (sign == '=' && (column.fixed = tml_strings_add(p->pool, value)) == NULL) return tml_no_memory(p->error);
    if ((column.word = tml_strings_add_part(p->pool, p->word, p->sign)) == NULL) return tml_no_memory(p->error);
    out->by_heading = out->by_heading || sign == '@';
    out->slot[column.kind][column.atom] = out->count;
    out->columns[out->count++] = column;
    return TML_OK;
}

/* ---- agreement ---- */

static bool has(const parser *p, tml_column_kind kind) {
    return p->out->slot[kind][TML_COLUMN_ALL] >= 0;
}

static tml_status disagree(parser *p, const char *text) {
    return tml_fail_at(p->error, TML_BAD_INPUT, p->path, 0, 0, "its columns: %s", text);
}

static tml_status agree_on_atom(parser *p, int atom) {
    const tml_layout *out = p->out;
    char text[160];
    bool address = out->slot[TML_COLUMN_ADDRESS][atom] >= 0, name = out->slot[TML_COLUMN_ATOM][atom] >= 0;
    bool residue = tml_layout_column(out, TML_COLUMN_RESIDUE, atom) != NULL,
         chain = tml_layout_column(out, TML_COLUMN_CHAIN, atom) != NULL;
    bool residue_name = tml_layout_column(out, TML_COLUMN_RESIDUE_NAME, atom) != NULL;
    if (!address && !name)
        snprintf(text, sizeof text, "atom_%d or address_%d is missing", atom + 1, atom + 1);
    else if (address && (name || residue))
        snprintf(text, sizeof text, "address_%d holds residue and atom; these need no column of their own", atom + 1);
    else if (residue && !chain)
        snprintf(text, sizeof text, "residue_%d needs chain_%d; where the table has none, add chain_%d=A or chain=A", atom + 1,
                 atom + 1, atom + 1);
    else if (!address && !residue && (chain || residue_name))
        snprintf(text, sizeof text, "residue_%d is missing", atom + 1);
    else
        return TML_OK;
    return disagree(p, text);
}

static tml_status agree_on_limits(parser *p, bool dihedral) {
    bool target = has(p, TML_COLUMN_TARGET), limits = has(p, TML_COLUMN_LOWER) || has(p, TML_COLUMN_UPPER);
    bool error = has(p, TML_COLUMN_ERROR), sides = has(p, TML_COLUMN_MINUS) || has(p, TML_COLUMN_PLUS);
    if (!target && !limits) return disagree(p, "lower, upper or target is missing");
    if (target && limits) return disagree(p, "either lower and upper, or target with its error; pass over the others with -");
    if (target && !error && !sides) return disagree(p, "target needs error, or minus and plus");
    if (!target && (error || sides)) return disagree(p, "error, minus and plus need target");
    if (error && sides) return disagree(p, "either error, or minus and plus");
    if (!dihedral) return TML_OK;
    if (limits && !(has(p, TML_COLUMN_LOWER) && has(p, TML_COLUMN_UPPER)))
        return disagree(p, "a dihedral needs both lower and upper");
    if (sides && !(has(p, TML_COLUMN_MINUS) && has(p, TML_COLUMN_PLUS)))
        return disagree(p, "a dihedral needs both minus and plus");
    return p->out->nanometres ? disagree(p, "nm is for distances; dihedrals are in degrees") : TML_OK;
}

static tml_status agree(parser *p) {
    tml_layout *out = p->out;
    bool angle = has(p, TML_COLUMN_ANGLE);
    int most = 0;
    if (out->count == 0)
        return disagree(p, "none is named; such as: chain_1 residue_1 atom_1 chain_2 residue_2 atom_2 lower upper");
    for (int i = 0; i < out->count; i++)
        if (out->columns[i].atom < TML_TABLE_ATOMS && out->columns[i].atom >= most) most = out->columns[i].atom + 1;
    if (angle && most > 0) return disagree(p, "an angle's name goes with chain and residue, not with atoms");
    if (angle && !(has(p, TML_COLUMN_CHAIN) && has(p, TML_COLUMN_RESIDUE)))
        return disagree(p, "an angle's name needs chain and residue; where the table has no chain, add chain=A");
    out->atom_count = angle || most > 2 ? 4 : 2;
    tml_status status = TML_OK;
    for (int atom = 0; status == TML_OK && !angle && atom < out->atom_count; atom++) status = agree_on_atom(p, atom);
    if (status == TML_OK) status = agree_on_limits(p, out->atom_count == 4);
    if (status == TML_OK && out->by_heading && out->heading == TML_HEADING_NO) return disagree(p, "'@' needs a heading line");
    if (status == TML_OK && out->decimal_comma && out->separator == ',')
        return disagree(p, "a comma cannot be both separator and decimal sign");
    return status;
}

/* ---- form ---- */

static tml_status set_separator(parser *p, char separator) {
    if (p->out->separator != 0) return bad_word(p, "the separator is named twice");
    p->out->separator = separator;
    return TML_OK;
}

static tml_status form_word(parser *p) {
    static const char *const WORDS[] = {"tab",  "comma",      "semicolon",     "bar",     "blanks",     "nm",
                                        "angstrom", "decimal-comma", "heading", "no-heading", "comment="};
    static const char SEPARATORS[] = "\t,;| ";
    tml_layout *out = p->out;
    if (strncmp(p->word, "comment=", 8) == 0 && p->word[8] != '\0') {
        out->comment = strcmp(p->word + 8, "none") == 0 ? "" : tml_strings_add(p->pool, p->word + 8);
        return out->comment == NULL ? tml_no_memory(p->error) : TML_OK;
    }
    size_t which = 0;
    while (which < sizeof WORDS / sizeof *WORDS - 1 && strcmp(p->word, WORDS[which]) != 0) which++;
    switch (which) {
    case 0: case 1: case 2: case 3: case 4: return set_separator(p, SEPARATORS[which]);
    case 5: out->nanometres = true; return TML_OK;
    case 6: out->nanometres = false; return TML_OK;
    case 7: out->decimal_comma = true; return TML_OK;
    case 8: out->heading = TML_HEADING_YES; return TML_OK;
    case 9: out->heading = TML_HEADING_NO; return TML_OK;
    default: return unknown_word(p, "form", WORDS, sizeof WORDS / sizeof *WORDS);
    }
}
