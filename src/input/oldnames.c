/* oldnames.c: mappings from old atom names.
 *
 *   built in     hydrogens-1-2 and hydrogens-1-2-crossed
 *   files        old-names 1
 *   applying     one name, all rows, the note
 */
#include "input/oldnames.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "input/source.h"

/* ---- built in ---- */

/* Groups of two hydrogens on one carbon, which Markley et al., Pure Appl. Chem. 70 (1998) 117 number 2 and 3, and older files
 * 1 and 2. Which of the two is which was not the same in all of them (common practice, from memory): hence two mappings. Where
 * it is not known, HB% is the honest name. */
static const struct { const char *residues, *stem; } PAIRS[] = {
    {"GLY", "HA"},
    {"ARG ASN ASP CYS GLN GLU HIS LEU LYS MET PHE PRO SER TRP TYR", "HB"},
    {"ARG GLN GLU LYS MET PRO", "HG"},
    {"ILE", "HG1"},
    {"ARG LYS PRO", "HD"},
    {"LYS", "HE"},
};

/* In each, 1 becomes `one` and 2 becomes `two`; HN becomes H, and a digit in front goes to the end (1HB is HB1). */
static const struct { const char *name; char one, two; } BUILT_IN[] = {
    {"hydrogens-1-2", '2', '3'},
    {"hydrogens-1-2-crossed", '3', '2'},
};
enum { BUILT_IN_COUNT = sizeof BUILT_IN / sizeof *BUILT_IN };

static tml_status load_built_in(tml_old_names *out, size_t which, tml_strings *pool, tml_error *error);
static tml_status load_file(tml_old_names *out, const char *path, tml_strings *pool, tml_error *error);

tml_status tml_old_names_load(const char *name, tml_strings *pool, tml_old_names *out, tml_error *error) {
    *out = (tml_old_names){0};
    if (name == NULL) return TML_OK;
    out->label = tml_strings_add(pool, name);
    out->index = tml_index_new();
    if (out->label == NULL || out->index == NULL) return tml_no_memory(error);
    for (size_t i = 0; i < BUILT_IN_COUNT; i++)
        if (strcmp(name, BUILT_IN[i].name) == 0) return load_built_in(out, i, pool, error);
    return load_file(out, name, pool, error);
}

void tml_old_names_clear(tml_old_names *names) {
    free(names->rows);
    tml_index_free(names->index);
    *names = (tml_old_names){0};
}

/* The number of a residue name; a new one is entered. -1 without memory. Twice this number owns the old names in the index, and
 * one more the new ones. */
static int32_t residue_number(tml_old_names *names, const char *residue) {
    int32_t number = tml_index_find(names->index, -1, residue);
    if (number >= 0) return number;
    return tml_index_add(names->index, -1, residue, names->residues) ? names->residues++ : -1;
}

static int32_t find_row(const tml_old_names *names, const char *residue, const char *name, int32_t side) {
    int32_t number = tml_index_find(names->index, -1, residue);
    return number < 0 ? -1 : tml_index_find(names->index, 2 * number + side, name);
}

/* Add a row; *twice where its old name has one already. false without memory. */
static bool add_row(tml_old_names *names, tml_old_row row, bool *twice) {
    int32_t number = residue_number(names, row.residue);
    if (number < 0 || !tml_grow(&names->rows, &names->capacity, names->count + 1, sizeof *names->rows)) return false;
    *twice = tml_index_find(names->index, 2 * number, row.old) >= 0;
    if (*twice) return true;
    if (!tml_index_add(names->index, 2 * number, row.old, (int32_t)names->count)) return false;
    if (tml_index_find(names->index, 2 * number + 1, row.now) < 0 &&
        !tml_index_add(names->index, 2 * number + 1, row.now, (int32_t)names->count))
        return false;
    names->rows[names->count++] = row;
    return true;
}

static bool add_pair(tml_old_names *names, size_t which, const char *residue, const char *stem, tml_strings *pool) {
    bool twice;
    for (int second = 0; second < 2; second++) {
        char old[8], now[8];
        snprintf(old, sizeof old, "%s%c", stem, second ? '2' : '1');
        snprintf(now, sizeof now, "%s%c", stem, second ? BUILT_IN[which].two : BUILT_IN[which].one);
        tml_old_row row = {residue, tml_strings_add(pool, old), tml_strings_add(pool, now)};
        if (row.old == NULL || row.now == NULL || !add_row(names, row, &twice)) return false;
    }
    return true;
}

static tml_status load_built_in(tml_old_names *out, size_t which, tml_strings *pool, tml_error *error) {
    bool twice, room = add_row(out, (tml_old_row){"*", "HN", "H"}, &twice);
    out->digits_first = true;
    for (size_t i = 0; i < sizeof PAIRS / sizeof *PAIRS; i++) {
        for (const char *at = PAIRS[i].residues; room && *at != '\0';) {
            size_t length = strcspn(at, " ");
            const char *residue = tml_strings_add_part(pool, at, length);
            room = residue != NULL && add_pair(out, which, residue, PAIRS[i].stem, pool);
            at += length + strspn(at + length, " ");
        }
    }
    return room ? TML_OK : tml_no_memory(error);
}

/* ---- files ---- */

enum { WORDS_MOST = 4, NAME_MOST = 40 };

typedef struct words { const char *text[WORDS_MOST]; int length[WORDS_MOST], count; } words;

static words words_of(const char *line, size_t length) {
    words out = {0};
    const char *end = line + length, *comment = memchr(line, '#', length);
    if (comment != NULL) end = comment;
    while (out.count < WORDS_MOST) {
        while (line < end && strchr(" \t\r", *line) != NULL) line++;
        if (line == end) return out;
        out.text[out.count] = line;
        while (line < end && strchr(" \t\r", *line) == NULL) line++;
        out.length[out.count] = (int)(line - out.text[out.count]);
        out.count++;
    }
    return out;
}

static bool is_head(const words *w) {
    return w->count == 2 && w->length[0] == 9 && memcmp(w->text[0], "old-names", 9) == 0 && w->length[1] == 1 &&
           *w->text[1] == '1';
}

static tml_status read_row(tml_old_names *out, const words *w, const char *path, long line, const char *start,
                           tml_strings *pool, tml_error *error) {
    const char *parts[3];
    bool twice = false;
    if (w->count != 3)
        return tml_fail_at(error, TML_BAD_INPUT, path, line, (long)(w->text[0] - start) + 1,
                           "%s words where three are expected: residue, old name, new name",
                           w->count > 3    ? "more than three"
                           : w->count == 2 ? "two"
                                           : "one");
    for (int i = 0; i < 3; i++) {
        if (w->length[i] > NAME_MOST)
            return tml_fail_at(error, TML_BAD_INPUT, path, line, (long)(w->text[i] - start) + 1,
                               "a name of at most %d characters is expected", NAME_MOST);
        parts[i] = tml_strings_add_part(pool, w->text[i], (size_t)w->length[i]);
        if (parts[i] == NULL) return tml_no_memory(error);
    }
    if (!add_row(out, (tml_old_row){parts[0], parts[1], parts[2]}, &twice)) return tml_no_memory(error);
    if (!twice) return TML_OK;
    return tml_fail_at(error, TML_BAD_INPUT, path, line, (long)(w->text[1] - start) + 1, "%s of %s has a new name already",
                       parts[1], parts[0]);
}

static tml_status load_file(tml_old_names *out, const char *path, tml_strings *pool, tml_error *error) {
    char *text = NULL;
    size_t length;
    bool begun = false;
    long line = 0;
    tml_status status = tml_source_read(path, &text, &length, error);
    if (status != TML_OK && status != TML_NO_MEMORY && error != NULL) {
        size_t used = strlen(error->message);
        snprintf(error->message + used, sizeof error->message - used, "; the built-in mappings are %s and %s", BUILT_IN[0].name,
                 BUILT_IN[1].name);
    }
    for (const char *at = text; status == TML_OK && *at != '\0';) {
        size_t span = strcspn(at, "\n");
        words w = words_of(at, span);
        line++;
        if (w.count > 0 && !begun && !is_head(&w))
            status = tml_fail_at(error, TML_BAD_INPUT, path, line, (long)(w.text[0] - at) + 1,
                                 "found '%.*s' where 'old-names 1', which begins every mapping, is expected",
                                 w.length[0] > 40 ? 40 : w.length[0], w.text[0]);
        else if (w.count > 0 && begun)
            status = read_row(out, &w, path, line, at, pool, error);
        begun = begun || w.count > 0;
        at += span + (at[span] != '\0');
    }
    if (status == TML_OK && !begun)
        status = tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, "the mapping is empty; 'old-names 1' is expected");
    free(text);
    return status;
}

/* ---- applying ---- */

/* The row of a name, its residue's own or one for any residue; side 0 looks among the old names, 1 among the new ones. */
static const tml_old_row *row_of(const tml_old_names *names, const char *residue, const char *name, int32_t side) {
    int32_t row = find_row(names, residue, name, side);
    if (row < 0) row = find_row(names, "*", name, side);
    return row < 0 ? NULL : &names->rows[row];
}

/* Whether a name can only be a present one, and the mapping moves names on in a row: with HB1 to HB2 and HB2 to HB3, a HB3
 * tells that HB2 is not what the mapping takes it for. */
static bool is_mixed(const tml_old_names *names, const char *residue, const char *name) {
    const tml_old_row *to = row_of(names, residue, name, 1);
    return to != NULL && strcmp(to->old, to->now) != 0 && row_of(names, residue, to->old, 1) != NULL;
}

tml_status tml_old_names_apply(tml_old_names *names, const char *residue, tml_address *address, tml_problem *problem,
                               tml_error *error) {
    if (names->label == NULL) return TML_OK;
    names->seen++;
    if (residue == NULL) return TML_OK;
    const char *wanted = address->atom;
    if (names->digits_first && *wanted >= '1' && *wanted <= '3' && wanted[1] == 'H' && strlen(wanted) < NAME_MOST) {
        char turned[NAME_MOST + 1];
        snprintf(turned, sizeof turned, "%s%c", wanted + 1, *wanted);
        wanted = tml_strings_add(problem->pool, turned);
        if (wanted == NULL) return tml_no_memory(error);
    }
    const tml_old_row *row = row_of(names, residue, wanted, 0);
    if (row == NULL && is_mixed(names, residue, wanted))
        return tml_fail_at(
            error, TML_BAD_INPUT, problem->files[address->place.file], address->place.line, address->place.column,
            "%s:%s:%s: %s is no old name of %s in '%s', but what its %s becomes; old and present names are mixed",
            address->chain, address->number, address->atom, wanted, residue, names->label,
            row_of(names, residue, wanted, 1)->old);
    const char *now = row == NULL ? wanted : row->now;
    if (strcmp(now, address->atom) == 0) return TML_OK;
    if (names->changed++ == 0)
        snprintf(names->first, sizeof names->first, "%.40s of %.32s:%.32s (%.20s) to %.40s", address->atom, address->chain,
                 address->number, residue, now);
    address->atom = now;
    return TML_OK;
}

static tml_status apply_in(tml_old_names *names, const tml_roll *roll, tml_address *address, tml_problem *problem,
                           tml_error *error) {
    int32_t residue = tml_roll_find(roll, address->chain, address->number);
    return tml_old_names_apply(names, residue < 0 ? NULL : roll->outline->residues[residue].name, address, problem, error);
}

tml_status tml_old_names_apply_rows(tml_old_names *names, tml_draft *draft, tml_error *error) {
    tml_roll roll;
    tml_rows *rows = &draft->rows;
    tml_status status = tml_roll_make(&draft->outline, &roll) ? TML_OK : tml_no_memory(error);
    for (size_t i = 0; status == TML_OK && i < rows->address_count; i++)
        status = apply_in(names, &roll, &rows->addresses[i], draft->problem, error);
    for (size_t i = 0; status == TML_OK && i < rows->dihedral_count; i++)
        for (int k = 0; status == TML_OK && k < 4; k++)
            status = apply_in(names, &roll, &rows->dihedrals[i].atoms[k], draft->problem, error);
    tml_roll_clear(&roll);
    return status;
}

tml_status tml_old_names_note(const tml_old_names *names, tml_place place, tml_problem *problem, tml_error *error) {
    if (names->label == NULL) return TML_OK;
    return tml_problem_add_note(problem, place, error, "old names by '%.200s': %lld of %lld atom names changed%s%s",
                                names->label, (long long)names->changed, (long long)names->seen,
                                names->changed > 0 ? ", the first of them " : "", names->first);
}
