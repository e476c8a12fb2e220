#include "output/convert.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "base/memory.h"
#include "output/output.h"

/* Contents: the steps - names of lists - values of STAR */

static tml_status name_lists(tml_conversion *c, tml_error *error);

tml_convert_format tml_convert_format_of(const char *path) {
    static const struct { const char *ending; tml_convert_format format; } ENDINGS[] = {
        {".sheet", TML_CONVERT_SHEET}, {".nef", TML_CONVERT_NEF}, {".str", TML_CONVERT_NMR_STAR}};
    size_t length = strlen(path);
    if (length > 3 && strcmp(path + length - 3, ".gz") == 0) length -= 3;
    for (size_t i = 0; i < sizeof ENDINGS / sizeof *ENDINGS; i++) {
        size_t ending = strlen(ENDINGS[i].ending);
        if (length > ending && strncmp(path + length - ending, ENDINGS[i].ending, ending) == 0) return ENDINGS[i].format;
    }
    return TML_CONVERT_UNKNOWN;
}

tml_status tml_convert(const char *const *paths, size_t path_count, const tml_read_options *options, tml_convert_format format,
                       const char *path, tml_problem **problem, tml_error *error) {
    tml_draft draft;
    bool compressed;
    *problem = NULL;
    tml_status status = tml_draft_read(paths, path_count, options, &draft, error);
    if (status != TML_OK) {
        tml_draft_clear(&draft);
        tml_problem_free(draft.problem);
        return status;
    }
    tml_conversion c = {.draft = &draft};
    status = name_lists(&c, error);
    tml_format_of(path, &compressed);
    if (status == TML_OK) status = tml_file_open(path, compressed, &c.file, error);
    if (status == TML_OK) {
        if (format == TML_CONVERT_SHEET) tml_write_sheet(&c);
        if (format == TML_CONVERT_NEF) tml_write_nef(&c);
        if (format == TML_CONVERT_NMR_STAR) status = tml_write_nmrstar(&c, error);
        if (status == TML_OK)
            status = tml_file_close(c.file, error);
        else
            tml_file_discard(c.file);
    }
    static const char *const WORDS[TML_LOSS_COUNT] = {
        "single atoms and beads", "links of single atoms", "statements on handedness and planes", "statements that chains are alike", "statements on chain ends",
        "restraints' averages (they count as sums)", "names that stand for several atoms (each atom has a row of its own)",
        "names with x and y (both members are written)", "residue numbers with letters (residues are numbered anew)",
        "component dictionaries (the residues' names remain; the files have to go along)",
        "rows' target values and linear limits, or origins and potentials of their lists"};
    for (int k = 0; status == TML_OK && k < TML_LOSS_COUNT; k++)
        if (c.lost[k] > 0)
            status = tml_problem_add_note(draft.problem, (tml_place){-1, 0, 0}, error, TML_NOT_HELD "%d %s", c.lost[k], WORDS[k]);
    free(c.lists);
    tml_draft_clear(&draft);
    if (status != TML_OK) {
        tml_problem_free(draft.problem);
        return status;
    }
    *problem = draft.problem;
    return TML_OK;
}

/* ---- names of lists ---- */

/* Rows of two files are never alternatives of each other; in one file they would be, were their lists called the same. */
typedef struct list_name { const char *list; int32_t file; const char *unique; } list_name;

static const char *unique_name(tml_conversion *c, list_name **names, size_t *count, size_t *capacity, const char *list, int32_t file) {
    int same = 0;
    for (size_t i = 0; i < *count; i++) {
        if ((*names)[i].list != list) continue;
        if ((*names)[i].file == file) return (*names)[i].unique;
        same++;
    }
    if (!tml_grow(names, capacity, *count + 1, sizeof **names)) return NULL;
    const char *unique = list;
    if (same > 0) {
        char text[512];
        snprintf(text, sizeof text, "%.480s-%d", list, same + 1);
        unique = tml_strings_add(c->draft->problem->pool, text);
    }
    (*names)[(*count)++] = (list_name){list, file, unique};
    return unique;
}

/* Rows of one list together, in the order of the lists' first rows; within a list as they were. */
static bool group_rows(tml_conversion *c, const list_name *names, size_t count) {
    tml_rows *rows = &c->draft->rows;
    size_t distances = rows->distance_count, dihedrals = rows->dihedral_count, at = 0;
    tml_distance_row *by_list = tml_alloc(distances, sizeof *by_list);
    tml_dihedral_row *angles = tml_alloc(dihedrals, sizeof *angles);
    const char **lists = tml_alloc(distances + dihedrals, sizeof *lists);
    bool room = by_list != NULL && angles != NULL && lists != NULL;
    for (size_t n = 0; room && n < count; n++)
        for (size_t i = 0; i < distances; i++)
            if (c->lists[i] == names[n].unique) {
                lists[at] = c->lists[i];
                by_list[at++] = rows->distances[i];
            }
    at = 0;
    for (size_t n = 0; room && n < count; n++)
        for (size_t i = 0; i < dihedrals; i++)
            if (c->lists[distances + i] == names[n].unique) {
                lists[distances + at] = c->lists[distances + i];
                angles[at++] = rows->dihedrals[i];
            }
    if (!room) {
        free(by_list);
        free(angles);
        free(lists);
        return false;
    }
    free(rows->distances);
    free(rows->dihedrals);
    free(c->lists);
    rows->distances = by_list;
    rows->dihedrals = angles;
    rows->distance_capacity = distances;
    rows->dihedral_capacity = dihedrals;
    c->lists = lists;
    return true;
}

static tml_status name_lists(tml_conversion *c, tml_error *error) {
    const tml_rows *rows = &c->draft->rows;
    list_name *names = NULL;
    size_t count = 0, capacity = 0;
    c->lists = tml_alloc(rows->distance_count + rows->dihedral_count, sizeof *c->lists);
    bool room = c->lists != NULL;
    for (size_t i = 0; room && i < rows->distance_count; i++) {
        c->lists[i] = unique_name(c, &names, &count, &capacity, rows->distances[i].list, rows->distances[i].place.file);
        room = c->lists[i] != NULL;
    }
    for (size_t i = 0; room && i < rows->dihedral_count; i++) {
        const char *name = unique_name(c, &names, &count, &capacity, rows->dihedrals[i].list, rows->dihedrals[i].place.file);
        c->lists[rows->distance_count + i] = name;
        room = name != NULL;
    }
    room = room && group_rows(c, names, count);
    free(names);
    return room ? TML_OK : tml_no_memory(error);
}

size_t tml_rows_in_list(const char *const *lists, size_t first, size_t count) {
    size_t last = first;
    while (last < count && lists[last] == lists[first]) last++;
    return last - first;
}

const char *tml_row_id(const char *id, bool alone, size_t index, char *text, size_t size) {
    if (!alone) return id;
    snprintf(text, size, "unnamed-%zu", index + 1);
    return text;
}

/* ---- values of STAR ---- */

static bool reserved(const char *text) {
    static const char *const WORDS[] = {"loop_", "global_", "stop_"};
    for (size_t i = 0; i < sizeof WORDS / sizeof *WORDS; i++)
        if (strcasecmp(text, WORDS[i]) == 0) return true;
    return strncasecmp(text, "data_", 5) == 0 || strncasecmp(text, "save_", 5) == 0 || strcmp(text, ".") == 0 || strcmp(text, "?") == 0;
}

/* Whether a quote inside would end the quoted text: it does before a blank. */
static bool ends_early(const char *text, char quote) {
    for (; *text != '\0'; text++)
        if (*text == quote && (isspace((unsigned char)text[1]) || text[1] == '\0')) return true;
    return false;
}

void tml_put_star(tml_file *file, const char *text) {
    bool blank = false;
    for (const char *p = text; *p != '\0'; p++) blank = blank || isspace((unsigned char)*p) || iscntrl((unsigned char)*p);
    if (*text == '\0')
        tml_file_print(file, ". ");
    else if (!blank && strchr("_#$'\"[];", *text) == NULL && !reserved(text))
        tml_file_print(file, "%s ", text);
    else if (!ends_early(text, '\''))
        tml_file_print(file, "'%s' ", text);
    else if (!ends_early(text, '"'))
        tml_file_print(file, "\"%s\" ", text);
    else
        tml_file_print(file, "\n;%s\n;\n", text);
}

bool tml_says_more(const tml_row_beside *beside) {
    bool values = beside->values && !(isnan(beside->target) && isnan(beside->uncertainty) && isnan(beside->lower_linear) && isnan(beside->upper_linear));
    return values || beside->origin != NULL || beside->angle != NULL || (beside->potential != NULL && strcmp(beside->potential, "undefined") != 0);
}

void tml_put_beside(tml_file *file, const tml_row_beside *beside) {
    const double values[] = {beside->target, beside->uncertainty, beside->lower_linear, beside->upper_linear};
    for (int k = 0; k < 4; k++) tml_put_star_number(file, beside->values ? values[k] : NAN);
}

void tml_put_star_number(tml_file *file, double value) {
    if (isnan(value) || isinf(value))
        tml_file_print(file, ". ");
    else
        tml_file_print(file, "%.10g ", value);
}
