/* table.c: delimited tables of restraints, whose columns the user names (columns.h).
 *
 *   reading      rows to restraints
 *   lines        comments, the separator, fields, the heading
 *   values       texts and numbers of one field
 *   addresses    atoms of a row, checked against the sequence
 *   angles       dihedrals by their names
 *   limits       lower and upper, or target and error
 */
#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "input/columns.h"
#include "input/draft.h"
#include "input/oldnames.h"
#include "input/roll.h"
#include "molecule/nearest.h"

enum { ALTERNATIVES_MOST = 64, NAME_MOST = 40, SHOWN_MOST = 40 };

typedef struct field { const char *text; int length, column; } field;

typedef struct table {
    tml_draft *draft;
    tml_problem *problem;
    tml_error *error;
    const char *path;
    int32_t file, line;
    tml_layout layout;
    tml_roll roll;
    tml_old_names old_names;
    field *fields;
    int count;       /* fields of this line */
    int end_column;  /* where the line ends */
    int wide;        /* fields that a row has; 0 before the first */
    int32_t rows;    /* so far, without the heading */
    int32_t floored; /* rows whose error is wider than their distance */
    int32_t head;    /* the line taken as the heading; 0 for none */
    const char *none; /* "", pooled */
} table;

static tml_status read_lines(table *t, char *text);
static tml_status read_row(table *t);
static tml_status tell(table *t);

tml_status tml_read_table(tml_draft *draft, const tml_table *given, char *text, int32_t file, tml_error *error) {
    table t = {.draft = draft, .problem = draft->problem, .error = error, .path = draft->problem->files[file], .file = file};
    if (given->columns == NULL)
        return tml_fail_at(error, TML_BAD_INPUT, t.path, 0, 0, "what its columns hold is not told");
    tml_status status = tml_layout_parse(given->columns, given->form, t.path, t.problem->pool, &t.layout, error);
    if (status == TML_OK) status = tml_old_names_load(given->old_names, t.problem->pool, &t.old_names, error);
    t.none = tml_strings_add(t.problem->pool, "");
    t.fields = tml_alloc(TML_FIELDS_MOST + 1, sizeof *t.fields);
    bool room = tml_roll_make(&draft->outline, &t.roll) && t.none != NULL && t.fields != NULL;
    if (status == TML_OK && !room) status = tml_no_memory(error);
    if (status == TML_OK) status = read_lines(&t, text);
    if (status == TML_OK) status = tell(&t);
    tml_roll_clear(&t.roll);
    tml_old_names_clear(&t.old_names);
    free(t.fields);
    return status;
}

static tml_status tell(table *t) {
    tml_place place = {t->file, t->head, 0};
    tml_status status = TML_OK;
    if (t->rows == 0) return tml_fail_at(t->error, TML_BAD_INPUT, t->path, 0, 0, "the table has no rows");
    if (t->head > 0 && !t->layout.by_heading)
        status = tml_problem_add_note(t->problem, place, t->error, "this line is taken as the table's heading");
    place.line = 0;
    if (status == TML_OK && t->floored > 0)
        status = tml_problem_add_note(t->problem, place, t->error,
                                      "%d rows have an error wider than their distance; their lower limit is 0", t->floored);
    if (status == TML_OK && t->layout.nanometres)
        status = tml_problem_add_note(t->problem, place, t->error, "distances are read in nm");
    return status == TML_OK ? tml_old_names_note(&t->old_names, place, t->problem, t->error) : status;
}

/* ---- messages ---- */

static tml_status fail_column(table *t, int column, const char *text) {
    return tml_fail_at(t->error, TML_BAD_INPUT, t->path, t->line, column, "%s", text);
}

/* What a column of this row holds; a fixed value where it holds none. NULL column: an empty value. */
static field value_of(const table *t, const tml_column *column) {
    if (column == NULL) return (field){"", 0, 0};
    if (column->fixed != NULL) return (field){column->fixed, (int)strlen(column->fixed), 0};
    return t->fields[column->field];
}

static int column_of(const table *t, const tml_column *column) {
    return column == NULL || column->fixed != NULL ? 0 : t->fields[column->field].column;
}

static tml_status expected(table *t, const tml_column *column, const char *what) {
    field value = value_of(t, column);
    int shown = value.length > SHOWN_MOST ? SHOWN_MOST : value.length;
    if (value.length == 0)
        return tml_fail_at(t->error, TML_BAD_INPUT, t->path, t->line, column_of(t, column),
                           "%s: the field is empty where %s is expected", column->word, what);
    return tml_fail_at(t->error, TML_BAD_INPUT, t->path, t->line, column_of(t, column), "%s: found '%.*s' where %s is expected",
                       column->word, shown, value.text, what);
}

/* ---- lines ---- */

static const char *separator_name(char separator) {
    switch (separator) {
    case '\t': return "tabs";
    case ',': return "commas";
    case ';': return "semicolons";
    case '|': return "bars";
    default: return "blanks";
    }
}

/* Told from the first line: a tab, else a semicolon, else a comma outside quotes; else blanks. */
static char separator_of(const table *t, const char *line, const char *end) {
    static const char SIGNS[] = "\t;,";
    for (const char *sign = SIGNS; *sign != '\0'; sign++) {
        bool quoted = false;
        if (*sign == ',' && t->layout.decimal_comma) continue;
        for (const char *at = line; at < end; at++) {
            if (*at == '"') quoted = !quoted;
            if (*at == *sign && !quoted) return *sign;
        }
    }
    return ' ';
}

static bool is_blank(char c) {
    return c == ' ' || c == '\t' || c == '\r';
}

/* A quoted field; two quotes in it stand for one, and the text is moved together in its place. *at moves behind it. */
static tml_status quoted_field(table *t, char **at, const char *end, const char *line, field *out) {
    char *from = *at + 1, *to = from;
    *out = (field){from, 0, (int)(*at - line) + 1};
    for (; from < end; from++) {
        if (*from == '"' && !(from + 1 < end && from[1] == '"')) break;
        if (*from == '"') from++;
        *to++ = *from;
    }
    if (from >= end) return fail_column(t, out->column, "the quote is not closed on its line");
    out->length = (int)(to - out->text);
    *at = from + 1;
    return TML_OK;
}

/* Whether a character ends a field. */
static bool is_apart(char separator, char c) {
    return separator == ' ' ? is_blank(c) : c == separator;
}

/* Blanks around a field that do not end it. */
static char *skip_blanks(char separator, char *at, const char *end) {
    while (at < end && is_blank(*at) && (separator == ' ' || *at != separator)) at++;
    return at;
}

static tml_status read_field(table *t, char **at, const char *end, const char *line, field *out) {
    char separator = t->layout.separator;
    if (*at < end && **at == '"') {
        tml_status status = quoted_field(t, at, end, line, out);
        if (status == TML_OK && separator != ' ') *at = skip_blanks(separator, *at, end);
        if (status != TML_OK || *at == end || is_apart(separator, **at)) return status;
        return fail_column(t, (int)(*at - line) + 1, "the field goes on after its quote");
    }
    *out = (field){*at, 0, (int)(*at - line) + 1};
    while (*at < end && !is_apart(separator, **at)) (*at)++;
    out->length = (int)(*at - out->text);
    while (out->length > 0 && is_blank(out->text[out->length - 1])) out->length--;
    return TML_OK;
}

static tml_status split_line(table *t, char *line, char *end) {
    char separator = t->layout.separator;
    t->count = 0;
    t->end_column = (int)(end - line) + 1;
    for (char *at = line;; at++) {
        at = skip_blanks(separator, at, end);
        if (separator == ' ' && at == end) return TML_OK;
        if (t->count == TML_FIELDS_MOST) return fail_column(t, (int)(at - line) + 1, "the row has more than 256 fields");
        tml_status status = read_field(t, &at, end, line, &t->fields[t->count++]);
        if (status != TML_OK || at == end) return status;
    }
}

static bool is_open(field value) {
    return value.length == 0 || (value.length == 1 && strchr("-.?", *value.text) != NULL);
}

/* A first line is a heading where each column of numbers holds a word; not one that could be a number gone wrong. */
static bool looks_like_heading(const table *t) {
    int numbers = 0;
    for (int i = 0; i < t->layout.count; i++) {
        const tml_column *column = &t->layout.columns[i];
        if (!tml_column_is_number(column->kind) || column->field < 0 || column->field >= t->count) continue;
        field value = t->fields[column->field];
        if (value.length == 0 || !isalpha((unsigned char)*value.text)) return false;
        numbers++;
    }
    return numbers > 0;
}

static bool is_heading(const table *t) {
    if (t->layout.by_heading || t->layout.heading == TML_HEADING_YES) return true;
    return t->layout.heading == TML_HEADING_AUTO && looks_like_heading(t);
}

static tml_status find_heading(table *t, tml_column *column) {
    char near[320] = "", (*names)[33];
    for (int i = 0; i < t->count; i++) {
        if ((size_t)t->fields[i].length != strlen(column->heading) ||
            memcmp(t->fields[i].text, column->heading, (size_t)t->fields[i].length) != 0)
            continue;
        if (column->field >= 0)
            return tml_fail_at(t->error, TML_BAD_INPUT, t->path, t->line, t->fields[i].column,
                               "%s: two columns have the heading '%s'", column->word, column->heading);
        column->field = i;
    }
    if (column->field >= 0) return TML_OK;
    names = tml_alloc((size_t)t->count, sizeof *names);
    if (names == NULL) return tml_no_memory(t->error);
    tml_nearest nearest;
    tml_nearest_start(&nearest, column->heading);
    for (int i = 0; i < t->count; i++) {
        snprintf(names[i], sizeof *names, "%.*s", t->fields[i].length, t->fields[i].text);
        tml_nearest_offer(&nearest, names[i]);
    }
    tml_nearest_append(&nearest, near, sizeof near);
    free(names);
    return tml_fail_at(t->error, TML_BAD_INPUT, t->path, t->line, 1,
                       "%s: no heading '%s' in this line, whose fields are apart by %s; the nearest: %s", column->word,
                       column->heading, separator_name(t->layout.separator), near);
}

static tml_status read_heading(table *t) {
    tml_status status = TML_OK;
    t->head = t->line;
    if (!t->layout.by_heading) return TML_OK;
    for (int i = 0; status == TML_OK && i < t->layout.count; i++)
        if (t->layout.columns[i].heading != NULL) status = find_heading(t, &t->layout.columns[i]);
    t->wide = t->count > t->layout.positions ? t->count : t->layout.positions;
    return status;
}

static tml_status check_width(table *t) {
    char text[200];
    const char *apart = separator_name(t->layout.separator),
               *who = t->layout.by_heading ? "the heading has" : "the columns name";
    bool more = t->layout.more && !t->layout.by_heading;
    if (t->wide == 0) t->wide = t->layout.positions;
    if (t->count == t->wide + 1 && t->fields[t->count - 1].length == 0 && t->layout.separator != ' ')
        t->count--; /* one more at the end */
    if (t->count == t->wide || (more && t->count > t->wide)) return TML_OK;
    if (t->count < t->wide) {
        snprintf(text, sizeof text, "the row ends after %d field%s apart by %s; %s %d", t->count, t->count == 1 ? "" : "s",
                 apart, who, t->wide);
        return fail_column(t, t->end_column, text);
    }
    snprintf(text, sizeof text, "the row has %d fields apart by %s; %s %d%s", t->count, apart, who, t->wide,
             t->layout.by_heading ? "" : " ('...' after them passes over further ones)");
    return fail_column(t, t->fields[t->wide].column, text);
}

static tml_status read_line(table *t, char *line, char *end) {
    bool first = t->head == 0 && t->rows == 0;
    const char *start = line;
    while (start < end && is_blank(*start)) start++;
    size_t mark = strlen(t->layout.comment);
    if (start == end || (mark > 0 && (size_t)(end - start) >= mark && memcmp(start, t->layout.comment, mark) == 0))
        return TML_OK;
    if (t->layout.separator == 0) t->layout.separator = separator_of(t, line, end);
    tml_status status = split_line(t, line, end);
    if (status != TML_OK) return status;
    if (first && is_heading(t)) return read_heading(t);
    status = check_width(t);
    if (status == TML_OK && t->rows == INT32_MAX)
        return tml_fail_at(t->error, TML_TOO_LARGE, t->path, t->line, 0, "too many rows");
    t->rows++;
    return status == TML_OK ? read_row(t) : status;
}

static tml_status read_lines(table *t, char *text) {
    tml_status status = TML_OK;
    while (status == TML_OK && *text != '\0') {
        size_t length = strcspn(text, "\n");
        char *end = text + length, *next = *end == '\0' ? end : end + 1;
        if (length >= INT32_MAX || t->line == INT32_MAX)
            return tml_fail_at(t->error, TML_TOO_LARGE, t->path, t->line, 0, "too many lines, or too long a line");
        if (length > 0 && end[-1] == '\r') end--;
        t->line++;
        status = read_line(t, text, end);
        text = next;
    }
    return status;
}

/* ---- values ---- */

static tml_status pooled(table *t, const char *text, int length, const char **out) {
    *out = tml_strings_add_part(t->problem->pool, text, (size_t)length);
    return *out == NULL ? tml_no_memory(t->error) : TML_OK;
}

static tml_status name_at(table *t, const tml_column *column, const char *what, const char **out) {
    field value = value_of(t, column);
    if (value.length == 0 || value.length > NAME_MOST) return expected(t, column, what);
    return pooled(t, value.text, value.length, out);
}

/* A number, or NAN where there is no such column or its field is open. */
static tml_status number_at(table *t, const tml_column *column, const char *what, double *out) {
    field value = value_of(t, column);
    char text[64];
    *out = NAN;
    if (is_open(value)) return TML_OK;
    if (value.length >= (int)sizeof text) return expected(t, column, what);
    memcpy(text, value.text, (size_t)value.length);
    text[value.length] = '\0';
    char *comma = strchr(text, ',');
    if (comma != NULL && !t->layout.decimal_comma) {
        char longer[160];
        snprintf(longer, sizeof longer, "%s with a point (or decimal-comma in the table's form)", what);
        return expected(t, column, longer);
    }
    if (t->layout.decimal_comma && strchr(text, '.') != NULL) return expected(t, column, "a number with a decimal comma");
    if (comma != NULL) *comma = '.';
    tml_star_value number = {.text = text, .length = value.length};
    if (strchr(text, '(') != NULL || !tml_star_number(&number, out)) return expected(t, column, what);
    return TML_OK;
}

static const tml_column *column_at(const table *t, tml_column_kind kind) {
    return tml_layout_column(&t->layout, kind, TML_COLUMN_ALL);
}

/* ---- addresses ---- */

/* The one-letter codes of IUPAC-IUB, J. Biol. Chem. 243 (1968) 3557. */
static const struct { char letter; const char *name;
} LETTERS[] = {
    {'A', "ALA"}, {'R', "ARG"}, {'N', "ASN"}, {'D', "ASP"}, {'C', "CYS"}, {'Q', "GLN"}, {'E', "GLU"},
    {'G', "GLY"}, {'H', "HIS"}, {'I', "ILE"}, {'L', "LEU"}, {'K', "LYS"}, {'M', "MET"}, {'F', "PHE"},
    {'P', "PRO"}, {'S', "SER"}, {'T', "THR"}, {'W', "TRP"}, {'Y', "TYR"}, {'V', "VAL"},
};

static bool same_residue(const char *name, const char *text, int length) {
    if (strlen(name) == (size_t)length && strncasecmp(name, text, (size_t)length) == 0) return true;
    for (size_t i = 0; length == 1 && i < sizeof LETTERS / sizeof *LETTERS; i++)
        if (LETTERS[i].letter == toupper((unsigned char)*text)) return strcmp(LETTERS[i].name, name) == 0;
    return false;
}

/* Letters before a residue's number are its name ("LYS12", "K12"), unless the sequence has just that number. */
static int letters_before_number(const table *t, const char *chain, const char *number) {
    int letters = 0;
    while (isalpha((unsigned char)number[letters])) letters++;
    bool split = letters > 0 && isdigit((unsigned char)number[letters]) && tml_roll_find(&t->roll, chain, number) < 0;
    return split ? letters : 0;
}

/* The residue's name as the table tells it must be the sequence's; of residues that are not there the mapping tells. */
static tml_status check_residue(table *t, const tml_column *column, tml_address *address, const char *told, int length) {
    int32_t residue = tml_roll_find(&t->roll, address->chain, address->number);
    if (length == 0 || residue < 0) return TML_OK;
    const char *name = t->roll.outline->residues[residue].name;
    address->residue = name;
    if (same_residue(name, told, length)) return TML_OK;
    return tml_fail_at(t->error, TML_BAD_INPUT, t->path, t->line, column_of(t, column),
                       "%s: found '%.*s' where %s:%s is %s in the sequence", column->word,
                       length > SHOWN_MOST ? SHOWN_MOST : length, told, address->chain, address->number, name);
}

/* Chain, number and name are there but for the letters before the number: take these apart and compare names. */
static tml_status settle_residue(table *t, int atom, const tml_column *holder, tml_address *address) {
    const tml_column *name = tml_layout_column(&t->layout, TML_COLUMN_RESIDUE_NAME, atom);
    const char *written = address->number;
    int letters = letters_before_number(t, address->chain, written);
    tml_status status = pooled(t, written + letters, (int)strlen(written) - letters, &address->number);
    if (status == TML_OK) status = check_residue(t, holder, address, written, letters);
    field value = value_of(t, name);
    if (status == TML_OK && name != NULL && !is_open(value)) status = check_residue(t, name, address, value.text, value.length);
    return status;
}

static tml_status finish_address(table *t, int atom, const tml_column *holder, tml_address *address) {
    tml_status status = *address->number == '\0' ? TML_OK : settle_residue(t, atom, holder, address);
    int32_t residue = tml_roll_find(&t->roll, address->chain, address->number);
    if (status != TML_OK) return status;
    return tml_old_names_apply(&t->old_names, residue < 0 ? NULL : t->roll.outline->residues[residue].name, address, t->problem,
                               t->error);
}

static tml_status by_columns(table *t, int atom, tml_address *out) {
    const tml_column *name = tml_layout_column(&t->layout, TML_COLUMN_ATOM, atom);
    const tml_column *residue = tml_layout_column(&t->layout, TML_COLUMN_RESIDUE, atom);
    tml_status status = name_at(t, name, "an atom", &out->atom);
    if (status != TML_OK || residue == NULL) return status;
    status = name_at(t, tml_layout_column(&t->layout, TML_COLUMN_CHAIN, atom), "a chain", &out->chain);
    if (status == TML_OK) status = name_at(t, residue, "a residue's number", &out->number);
    return status == TML_OK ? finish_address(t, atom, residue, out) : status;
}

/* One of the addresses of a field: atom, residue:atom where the chain has a column, or chain:residue:atom where it has none. */
static tml_status part_of_address(table *t, int atom, const tml_column *column, const char *text, int length,
                                  tml_address *out) {
    const tml_column *chain = tml_layout_column(&t->layout, TML_COLUMN_CHAIN, atom);
    const char *what =
        chain == NULL ? "an atom as chain:residue:atom, such as A:7:CA," : "an atom as residue:atom, such as 7:CA,";
    const char *start[3] = {text}, *end = text + length;
    int parts = 1;
    if (length > NAME_MOST) return expected(t, column, what);
    for (const char *at = text; at < end; at++) {
        if (*at != ':') continue;
        if (parts == 3) return expected(t, column, what);
        start[parts++] = at + 1;
    }
    for (int i = 0; i < parts; i++)
        if (start[i] == end || *start[i] == ':') return expected(t, column, what);
    if (chain != NULL ? parts != 2 : parts == 2) return expected(t, column, what);
    tml_status status = pooled(t, start[parts - 1], (int)(end - start[parts - 1]), &out->atom);
    if (status == TML_OK && parts > 1)
        status = pooled(t, start[parts - 2], (int)(start[parts - 1] - start[parts - 2]) - 1, &out->number);
    if (status == TML_OK && parts == 3) status = pooled(t, start[0], (int)(start[1] - start[0]) - 1, &out->chain);
    if (status == TML_OK && parts == 2) status = name_at(t, chain, "a chain", &out->chain);
    return status == TML_OK ? finish_address(t, atom, column, out) : status;
}

/* The atoms of one side: a field of addresses holds alternatives with commas between. */
static tml_status read_atoms(table *t, int atom, tml_address *out, int room, int *count) {
    const tml_column *column = tml_layout_column(&t->layout, TML_COLUMN_ADDRESS, atom);
    const tml_column *place = column != NULL ? column : tml_layout_column(&t->layout, TML_COLUMN_ATOM, atom);
    tml_address blank = {.chain = t->none,
                         .number = t->none,
                         .residue = t->none,
                         .atom = t->none,
                         .place = {t->file, t->line, column_of(t, place)}};
    *count = 1;
    *out = blank;
    if (column == NULL) return by_columns(t, atom, out);
    field value = value_of(t, column);
    for (*count = 0;;) {
        const char *comma = memchr(value.text, ',', (size_t)value.length);
        int length = comma == NULL ? value.length : (int)(comma - value.text);
        if (*count == room) return expected(t, column, room == 1 ? "one atom" : "fewer alternatives");
        out[*count] = blank;
        tml_status status = part_of_address(t, atom, column, value.text, length, &out[(*count)++]);
        if (status != TML_OK || comma == NULL) return status;
        value = (field){comma + 1, value.length - length - 1, value.column};
    }
}

/* ---- angles ---- */

/* Dihedrals along the main chain; '-' is the residue before, '+' the one after. IUPAC-IUB, Biochemistry 9 (1970) 3471. */
static const struct { const char *name, *atoms[4]; } ANGLES[] = {
    {"PHI", {"-C", "N", "CA", "C"}},
    {"PSI", {"N", "CA", "C", "+N"}},
    {"OMEGA", {"CA", "C", "+N", "+CA"}},
};

/* The side chains along which chi is counted: chi1 is about the bond of the second and third atom, chi2 about the next one. The
 * same source. */
static const struct { const char *residues, *atoms[8]; } SIDE_CHAINS[] = {
    {"ARG", {"N", "CA", "CB", "CG", "CD", "NE", "CZ", "NH1"}}, {"LYS", {"N", "CA", "CB", "CG", "CD", "CE", "NZ"}},
    {"GLN GLU", {"N", "CA", "CB", "CG", "CD", "OE1"}},  {"MET", {"N", "CA", "CB", "CG", "SD", "CE"}},
    {"ASN ASP", {"N", "CA", "CB", "CG", "OD1"}},        {"PRO", {"N", "CA", "CB", "CG", "CD"}},
    {"HIS", {"N", "CA", "CB", "CG", "ND1"}},            {"ILE", {"N", "CA", "CB", "CG1", "CD1"}},
    {"LEU PHE TRP TYR", {"N", "CA", "CB", "CG", "CD1"}}, {"CYS", {"N", "CA", "CB", "SG"}},
    {"SER", {"N", "CA", "CB", "OG"}},                   {"THR", {"N", "CA", "CB", "OG1"}},
    {"VAL", {"N", "CA", "CB", "CG1"}},
};

static const char *const CHIS[] = {"CHI1", "CHI2", "CHI3", "CHI4", "CHI5"};

static tml_status unknown_angle(table *t, const tml_column *column) {
    char name[NAME_MOST + 1], near[120] = "", text[200];
    field value = value_of(t, column);
    snprintf(name, sizeof name, "%.*s", value.length, value.text);
    for (char *at = name; *at != '\0'; at++) *at = (char)toupper((unsigned char)*at);
    tml_nearest nearest;
    tml_nearest_start(&nearest, name);
    for (size_t i = 0; i < sizeof ANGLES / sizeof *ANGLES; i++) tml_nearest_offer(&nearest, ANGLES[i].name);
    for (size_t i = 0; i < sizeof CHIS / sizeof *CHIS; i++) tml_nearest_offer(&nearest, CHIS[i]);
    tml_nearest_append(&nearest, near, sizeof near);
    snprintf(text, sizeof text, "phi, psi, omega or chi1 to chi5 (the nearest: %s)", near);
    return expected(t, column, text);
}

/* The atoms' names of an angle, or NULL where the residue has no such side chain; the field's name is known. */
static const char *const *side_chain(const char *residue, int chi) {
    for (size_t i = 0; i < sizeof SIDE_CHAINS / sizeof *SIDE_CHAINS; i++) {
        const char *found = strstr(SIDE_CHAINS[i].residues, residue);
        if (found == NULL || strlen(residue) != 3) continue;
        int atoms = 0;
        while (atoms < 8 && SIDE_CHAINS[i].atoms[atoms] != NULL) atoms++;
        return chi + 4 <= atoms ? &SIDE_CHAINS[i].atoms[chi] : NULL;
    }
    return NULL;
}

/* An atom of an angle. Past a chain's end, and for a chi that a residue lacks, the name is one that no residue has: mapping
 * tells of it as of every other name that is not there. */
static tml_status angle_atom(table *t, const char *name, int32_t residue, tml_address *out) {
    int32_t there = *name == '-' ? t->roll.before[residue] : *name == '+' ? t->roll.after[residue] : residue;
    char past[NAME_MOST + 16];
    if (there >= 0) {
        out->number = t->roll.outline->residues[there].number;
        return pooled(t, name + (*name == '-' || *name == '+'), (int)strlen(name) - (*name == '-' || *name == '+'), &out->atom);
    }
    snprintf(past, sizeof past, "%s %s", *name == '-' ? "before" : "after", out->number);
    tml_status status = pooled(t, past, (int)strlen(past), &out->number);
    return status == TML_OK ? pooled(t, name + 1, (int)strlen(name) - 1, &out->atom) : status;
}

static tml_status read_angle(table *t, tml_address atoms[4]) {
    const tml_column *column = column_at(t, TML_COLUMN_ANGLE), *number = column_at(t, TML_COLUMN_RESIDUE);
    const char *const *names = NULL;
    const char *angle;
    field value = value_of(t, column);
    int chi = -1;
    tml_address at = {.residue = t->none, .place = {t->file, t->line, column_of(t, column)}};
    tml_status status = name_at(t, column, "an angle", &angle);
    if (status == TML_OK) status = name_at(t, column_at(t, TML_COLUMN_CHAIN), "a chain", &at.chain);
    if (status == TML_OK) status = name_at(t, number, "a residue's number", &at.number);
    if (status == TML_OK) status = settle_residue(t, 0, number, &at);
    if (status != TML_OK) return status;
    for (size_t i = 0; i < sizeof ANGLES / sizeof *ANGLES; i++)
        if (strcasecmp(ANGLES[i].name, angle) == 0) names = ANGLES[i].atoms;
    for (int i = 0; i < (int)(sizeof CHIS / sizeof *CHIS); i++)
        if (strcasecmp(CHIS[i], angle) == 0) chi = i;
    if (names == NULL && chi < 0) return unknown_angle(t, column);
    int32_t residue = tml_roll_find(&t->roll, at.chain, at.number);
    if (residue >= 0 && chi >= 0) names = side_chain(t->roll.outline->residues[residue].name, chi);
    at.residue = t->none;
    for (int k = 0; status == TML_OK && k < 4; k++) {
        atoms[k] = at;
        if (residue >= 0 && names != NULL)
            status = angle_atom(t, names[k], residue, &atoms[k]);
        else
            status = pooled(t, value.text, value.length, &atoms[k].atom);
    }
    return status;
}

/* ---- limits ---- */

typedef struct limits { double lower, upper, weight; const char *id, *list; bool alone; } limits;

static tml_status width_at(table *t, const tml_column *column, double *out) {
    tml_status status = number_at(t, column, "an error, 0 or more,", out);
    return status == TML_OK && *out < 0 ? expected(t, column, "an error, 0 or more,") : status;
}

static tml_status read_target(table *t, bool distance, limits *out) {
    const tml_column *both = column_at(t, TML_COLUMN_ERROR);
    double target = NAN, minus = NAN, plus = NAN;
    tml_status status = number_at(t, column_at(t, TML_COLUMN_TARGET), distance ? "a distance" : "an angle in degrees", &target);
    if (status == TML_OK) status = width_at(t, both != NULL ? both : column_at(t, TML_COLUMN_MINUS), &minus);
    if (status == TML_OK) status = width_at(t, both != NULL ? both : column_at(t, TML_COLUMN_PLUS), &plus);
    if (status == TML_OK && distance && target < 0)
        status = expected(t, column_at(t, TML_COLUMN_TARGET), "a distance, which is never negative,");
    out->lower = target - minus;
    out->upper = target + plus;
    if (distance && out->lower < 0) {
        out->lower = 0;
        t->floored++;
    }
    return status;
}

static tml_status read_interval(table *t, bool distance, limits *out) {
    const tml_column *lower = column_at(t, TML_COLUMN_LOWER), *upper = column_at(t, TML_COLUMN_UPPER);
    tml_status status = number_at(t, lower, distance ? "a lower limit" : "an angle in degrees", &out->lower);
    if (status == TML_OK) status = number_at(t, upper, distance ? "an upper limit" : "an angle in degrees", &out->upper);
    if (status != TML_OK || !distance) return status;
    if (out->lower < 0) return expected(t, lower, "a distance, which is never negative,");
    if (out->upper < 0) return expected(t, upper, "a distance, which is never negative,");
    if (out->upper < out->lower) return expected(t, upper, "an upper limit that is not below the lower one");
    return TML_OK;
}

static tml_status read_limits(table *t, bool distance, limits *out) {
    const tml_column *id = column_at(t, TML_COLUMN_ID), *list = column_at(t, TML_COLUMN_LIST),
                     *weight = column_at(t, TML_COLUMN_WEIGHT);
    char own[24];
    bool target = column_at(t, TML_COLUMN_TARGET) != NULL;
    tml_status status = target ? read_target(t, distance, out) : read_interval(t, distance, out);
    if (status == TML_OK) status = number_at(t, weight, "a weight, 0 or more,", &out->weight);
    if (status == TML_OK && out->weight < 0) status = expected(t, weight, "a weight, 0 or more,");
    if (status != TML_OK) return status;
    if (isnan(out->weight)) out->weight = 1;
    if (t->layout.nanometres) {
        out->lower *= 10;
        out->upper *= 10;
    }
    snprintf(own, sizeof own, "row%d", t->rows);
    out->alone = id == NULL || is_open(value_of(t, id));
    status =
        out->alone ? pooled(t, own, (int)strlen(own), &out->id) : name_at(t, id, "an id of at most 40 characters", &out->id);
    if (status != TML_OK) return status;
    return list == NULL || is_open(value_of(t, list)) ? pooled(t, "table", 5, &out->list)
                                                      : name_at(t, list, "a list's name of at most 40 characters", &out->list);
}

/* ---- rows ---- */

static tml_status read_distance(table *t) {
    tml_address addresses[2 * ALTERNATIVES_MOST];
    limits given = {0};
    int count_a, count_b;
    tml_status status = read_atoms(t, 0, addresses, ALTERNATIVES_MOST, &count_a);
    if (status == TML_OK) status = read_atoms(t, 1, addresses + count_a, ALTERNATIVES_MOST, &count_b);
    if (status == TML_OK) status = read_limits(t, true, &given);
    if (status != TML_OK) return status;
    tml_distance_row row = {.list = given.list, .id = given.id, .combination = t->none, .count_a = count_a, .count_b = count_b,
                            .lower = given.lower, .upper = given.upper, .weight = given.weight, .alone = given.alone,
                            .place = {t->file, t->line, t->fields[0].column}};
    return tml_rows_add_distance(&t->draft->rows, &row, addresses) ? TML_OK : tml_no_memory(t->error);
}

static tml_status read_dihedral(table *t) {
    tml_dihedral_row row = {.combination = t->none, .place = {t->file, t->line, t->fields[0].column}};
    limits given = {0};
    int count;
    bool named = column_at(t, TML_COLUMN_ANGLE) != NULL;
    tml_status status = named ? read_angle(t, row.atoms) : TML_OK;
    for (int k = 0; status == TML_OK && !named && k < 4; k++) status = read_atoms(t, k, &row.atoms[k], 1, &count);
    if (status == TML_OK) status = read_limits(t, false, &given);
    if (status != TML_OK) return status;
    row.list = given.list;
    row.id = given.id;
    row.lower = given.lower;
    row.upper = given.upper;
    row.weight = given.weight;
    row.alone = given.alone;
    return tml_rows_add_dihedral(&t->draft->rows, &row) ? TML_OK : tml_no_memory(t->error);
}

static tml_status read_row(table *t) {
    return t->layout.atom_count == 2 ? read_distance(t) : read_dihedral(t);
}
