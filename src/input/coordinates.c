#include "input/coordinates.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "input/source.h"
#include "input/star.h"
#include "molecule/elements.h"

/* Contents: reading - gathering - PDB - mmCIF - models out of what was gathered */

/* One place of one atom in one model, as read. */
typedef struct place_read { int32_t model, atom; double xyz[3]; float occupancy; } place_read;

enum { NAME_ROOM = 64 };

/* What a row says of an atom. */
typedef struct row_read {
    char chain[NAME_ROOM], number[NAME_ROOM], residue[NAME_ROOM], name[NAME_ROOM];
    int element;
    place_read place;
} row_read;

typedef struct gathering {
    tml_coordinates *out;
    tml_error *error;
    const char *path;
    place_read *places; size_t place_count, place_capacity;
    int32_t chain_count;
} gathering;

/* Owners of names in the index. */
enum { OWNER_CHAINS = -1, OWNER_MODELS = -2, OWNER_FIRST_ATOMS = 1 << 30 };

static tml_status read_pdb(gathering *g, const char *text);
static tml_status read_cif(gathering *g, const char *text, size_t length);
static tml_status make_models(gathering *g);

/* ---- reading ---- */

tml_status tml_coordinates_read(const char *path, tml_coordinates *out, tml_error *error) {
    char *text;
    size_t length;
    *out = (tml_coordinates){0};
    tml_status status = tml_source_read(path, &text, &length, error);
    if (status == TML_OK) status = tml_coordinates_parse(text, length, path, out, error);
    free(text);
    return status;
}

/* The first word of a CIF, behind comments, begins with data_. */
static bool looks_like_cif(const char *text) {
    static const char WORD[] = "data_";
    for (;;) {
        text += strspn(text, " \t\r\n");
        if (*text != '#') break;
        text += strcspn(text, "\n");
    }
    for (int k = 0; WORD[k] != '\0'; k++)
        if (tolower((unsigned char)text[k]) != WORD[k]) return false;
    return true;
}

tml_status tml_coordinates_parse(const char *text, size_t length, const char *path, tml_coordinates *out, tml_error *error) {
    *out = (tml_coordinates){.pool = tml_strings_new(), .index = tml_index_new()};
    gathering g = {.out = out, .error = error, .path = path};
    if (out->pool == NULL || out->index == NULL) return tml_no_memory(error);
    tml_status status = looks_like_cif(text) ? read_cif(&g, text, length) : read_pdb(&g, text);
    if (status == TML_OK && g.place_count == 0)
        status = tml_fail_at(error, TML_BAD_INPUT, path, 0, 0, "no atoms found; a PDB or mmCIF file of coordinates is expected");
    if (status == TML_OK) status = make_models(&g);
    free(g.places);
    tml_index_free(out->index);
    out->index = NULL;
    return status;
}

void tml_coordinates_clear(tml_coordinates *coordinates) {
    tml_strings_free(coordinates->pool);
    tml_index_free(coordinates->index);
    free(coordinates->atoms);
    free(coordinates->residues);
    free(coordinates->links);
    free(coordinates->xyz);
    *coordinates = (tml_coordinates){0};
}

/* ---- gathering ---- */

/* Index of a name under its owner; made with the value `next` if it is new, which *is_new tells. -1 without memory. */
static int32_t indexed(gathering *g, int32_t owner, const char *name, int32_t next, bool *is_new) {
    int32_t found = tml_index_find(g->out->index, owner, name);
    *is_new = found < 0;
    if (found >= 0) return found;
    const char *kept = tml_strings_add(g->out->pool, name);
    return kept != NULL && tml_index_add(g->out->index, owner, kept, next) ? next : -1;
}

static bool is_water(const char *name) {
    static const char *const NAMES[] = {"HOH", "DOD", "WAT", "H2O"};
    for (size_t i = 0; i < sizeof NAMES / sizeof NAMES[0]; i++)
        if (strcmp(name, NAMES[i]) == 0) return true;
    return false;
}

/* The residue of a row; a residue has the name that it was first met with. */
static tml_status find_residue(gathering *g, const row_read *row, int32_t *residue) {
    tml_coordinates *out = g->out;
    bool is_new;
    int32_t chain = indexed(g, OWNER_CHAINS, row->chain, g->chain_count, &is_new);
    if (chain < 0) return tml_no_memory(g->error);
    g->chain_count += is_new;
    if (out->residue_count >= OWNER_FIRST_ATOMS) return tml_fail_at(g->error, TML_TOO_LARGE, g->path, 0, 0, "too many residues");
    *residue = indexed(g, chain, row->number, (int32_t)out->residue_count, &is_new);
    if (*residue < 0) return tml_no_memory(g->error);
    if (!is_new) return TML_OK;
    if (!tml_grow(&out->residues, &out->residue_capacity, out->residue_count + 1, sizeof *out->residues))
        return tml_no_memory(g->error);
    tml_site_residue *made = &out->residues[out->residue_count++];
    *made = (tml_site_residue){.chain = tml_strings_add(out->pool, row->chain),
                               .number = tml_strings_add(out->pool, row->number),
                               .name = tml_strings_add(out->pool, row->residue),
                               .water = is_water(row->residue)};
    return made->chain == NULL || made->number == NULL || made->name == NULL ? tml_no_memory(g->error) : TML_OK;
}

static tml_status add_row(gathering *g, row_read *row) {
    tml_coordinates *out = g->out;
    int32_t residue = -1;
    bool is_new;
    tml_status status = find_residue(g, row, &residue);
    if (status != TML_OK) return status;
    if (strcmp(out->residues[residue].name, row->residue) != 0) { /* another residue in the same place */
        out->alternatives++;
        return TML_OK;
    }
    if (out->atom_count >= OWNER_FIRST_ATOMS) return tml_fail_at(g->error, TML_TOO_LARGE, g->path, 0, 0, "too many atoms");
    row->place.atom = indexed(g, OWNER_FIRST_ATOMS + residue, row->name, (int32_t)out->atom_count, &is_new);
    if (row->place.atom < 0) return tml_no_memory(g->error);
    if (is_new) {
        if (!tml_grow(&out->atoms, &out->atom_capacity, out->atom_count + 1, sizeof *out->atoms)) return tml_no_memory(g->error);
        const char *name = tml_strings_add(out->pool, row->name);
        if (name == NULL) return tml_no_memory(g->error);
        out->atoms[out->atom_count++] = (tml_site){.name = name, .residue = residue, .element = row->element};
    }
    if (!tml_grow(&g->places, &g->place_capacity, g->place_count + 1, sizeof *g->places)) return tml_no_memory(g->error);
    g->places[g->place_count++] = row->place;
    return TML_OK;
}

/* Atom by its names; -1 if there is none. */
static int32_t find_atom(const gathering *g, const row_read *row) {
    int32_t chain = tml_index_find(g->out->index, OWNER_CHAINS, row->chain);
    int32_t residue = chain < 0 ? -1 : tml_index_find(g->out->index, chain, row->number);
    return residue < 0 ? -1 : tml_index_find(g->out->index, OWNER_FIRST_ATOMS + residue, row->name);
}

/* A link between atoms that are there; one to an atom that is not, or to itself, is passed over. */
static tml_status add_link(gathering *g, const row_read *one, const row_read *two) {
    tml_coordinates *out = g->out;
    int32_t a = find_atom(g, one), b = find_atom(g, two);
    if (a < 0 || b < 0 || a == b) return TML_OK;
    if (!tml_grow(&out->links, &out->link_capacity, out->link_count + 1, sizeof *out->links)) return tml_no_memory(g->error);
    out->links[out->link_count++] = (tml_site_link){a, b};
    return TML_OK;
}

/* ---- PDB ---- */

typedef struct line_read { const char *text; int length; long number; } line_read;

/* Columns first to last, counted from 1, without the blanks around them. */
static void columns(const line_read *line, int first, int last, char out[NAME_ROOM]) {
    int from = first - 1, to = last < line->length ? last : line->length;
    while (from < to && isspace((unsigned char)line->text[from])) from++;
    while (to > from && isspace((unsigned char)line->text[to - 1])) to--;
    int length = to > from ? to - from : 0;
    if (length >= NAME_ROOM) length = NAME_ROOM - 1;
    if (length > 0) memcpy(out, line->text + from, (size_t)length);
    out[length] = '\0';
}

static bool begins(const line_read *line, const char *record) {
    size_t length = strlen(record);
    return (size_t)line->length >= length && memcmp(line->text, record, length) == 0;
}

static bool number_in(const char *text, double *value) {
    char *end;
    if (text[strspn(text, "+-0123456789.eE")] != '\0') return false; /* strtod would take hexadecimal and names, too */
    *value = strtod(text, &end);
    return end != text && *end == '\0' && isfinite(*value);
}

/* Where columns 77 and 78 do not tell it, the name does: its first two columns hold the symbol, right-justified, but for
 * hydrogens of four letters. */
static int element_of(const line_read *line) {
    char symbol[NAME_ROOM], name[NAME_ROOM];
    columns(line, 77, 78, symbol);
    int element = symbol[0] == '\0' ? -1 : tml_element_number(symbol);
    if (element > 0) return element;
    columns(line, 13, 16, name);
    columns(line, 13, 14, symbol);
    if (strlen(symbol) == 2 && isalpha((unsigned char)symbol[0]) && !(strlen(name) == 4 && symbol[0] == 'H')) {
        element = tml_element_number(symbol);
        if (element > 0) return element;
    }
    const char *letter = name + strspn(name, "0123456789");
    element = tml_element_number((const char[]){*letter, '\0'});
    return element > 0 ? element : 0;
}

static void read_names(const line_read *line, int name, int residue, int chain, int number, row_read *row) {
    char insertion[NAME_ROOM];
    columns(line, name, name + 3, row->name);
    columns(line, residue, residue + 2, row->residue);
    columns(line, chain, chain, row->chain);
    columns(line, number, number + 3, row->number);
    columns(line, number + 4, number + 4, insertion);
    size_t length = strlen(row->number);
    row->number[length] = insertion[0]; /* four columns and one */
    row->number[length + 1] = '\0';
    if (row->chain[0] == '\0') snprintf(row->chain, sizeof row->chain, "_");
}

static tml_status read_atom(gathering *g, const line_read *line, int32_t model) {
    enum { NAME = 13, RESIDUE = 18, CHAIN = 22, NUMBER = 23, X = 31, WIDTH = 8, OCCUPANCY = 55, OCCUPANCY_END = 60 };
    row_read row = {.place = {.model = model, .occupancy = 1}};
    char text[NAME_ROOM];
    double occupancy;
    read_names(line, NAME, RESIDUE, CHAIN, NUMBER, &row);
    if (row.name[0] == '\0')
        return tml_fail_at(g->error, TML_BAD_INPUT, g->path, line->number, NAME, "an atom's name is expected in columns 13 to 16");
    if (row.number[0] == '\0')
        return tml_fail_at(g->error, TML_BAD_INPUT, g->path, line->number, NUMBER, "a residue number is expected in columns 23 to 26");
    for (int k = 0; k < 3; k++) {
        columns(line, X + k * WIDTH, X + k * WIDTH + WIDTH - 1, text);
        if (!number_in(text, &row.place.xyz[k]))
            return tml_fail_at(g->error, TML_BAD_INPUT, g->path, line->number, X + k * WIDTH,
                               "found '%s' where a coordinate in columns %d to %d is expected", text, X + k * WIDTH,
                               X + k * WIDTH + WIDTH - 1);
    }
    columns(line, OCCUPANCY, OCCUPANCY_END, text);
    if (number_in(text, &occupancy) && fabs(occupancy) < 1e6) row.place.occupancy = (float)occupancy;
    row.element = element_of(line);
    return add_row(g, &row);
}

/* SSBOND and LINK; links to symmetry mates are passed over. */
static tml_status read_link(gathering *g, const line_read *line) {
    row_read one = {0}, two = {0};
    char here[NAME_ROOM], there[NAME_ROOM];
    columns(line, 60, 65, here);
    columns(line, 67, 72, there);
    if (strcmp(here, there) != 0) return TML_OK;
    if (begins(line, "LINK  ")) {
        read_names(line, 13, 18, 22, 23, &one);
        read_names(line, 43, 48, 52, 53, &two);
    } else {
        read_names(line, 13, 12, 16, 18, &one);
        read_names(line, 13, 26, 30, 32, &two);
        snprintf(one.name, sizeof one.name, "SG");
        snprintf(two.name, sizeof two.name, "SG");
    }
    return add_link(g, &one, &two);
}

static bool next_line(const char **at, line_read *line) {
    if (**at == '\0') return false;
    size_t length = strcspn(*at, "\n");
    enum { LONGEST = 1 << 20 };
    line->text = *at;
    line->length = length > LONGEST ? LONGEST : (int)length;
    line->number++;
    *at += length + ((*at)[length] == '\n');
    return true;
}

static tml_status read_pdb(gathering *g, const char *text) {
    tml_status status = TML_OK;
    line_read line = {0};
    int32_t model = 0;
    bool filled = false; /* the current model has atoms */
    for (const char *at = text; status == TML_OK && next_line(&at, &line);) {
        if (begins(&line, "ATOM  ") || begins(&line, "HETATM")) {
            status = read_atom(g, &line, model);
            filled = true;
        } else if ((begins(&line, "MODEL ") || begins(&line, "ENDMDL")) && filled) {
            if (model == INT32_MAX - 1) return tml_fail_at(g->error, TML_TOO_LARGE, g->path, line.number, 1, "too many models");
            model++;
            filled = false;
        }
    }
    line = (line_read){0};
    for (const char *at = text; status == TML_OK && next_line(&at, &line);) /* they stand before the atoms */
        if (begins(&line, "SSBOND") || begins(&line, "LINK  ")) status = read_link(g, &line);
    return status;
}

/* ---- mmCIF ---- */

typedef struct cif_columns {
    const tml_star *star;
    const tml_star_loop *loop;
    int chain, number, insertion, residue, name;
} cif_columns;

static int column_of(const tml_star *star, const tml_star_loop *loop, const char *prefix, const char *first, const char *second) {
    char name[NAME_ROOM];
    snprintf(name, sizeof name, "%s%s", prefix, first);
    int column = tml_star_column(star, loop, name);
    if (column >= 0) return column;
    snprintf(name, sizeof name, "%s%s", prefix, second);
    return tml_star_column(star, loop, name);
}

/* The author's names go before the dictionary's, as in PDB files. */
static cif_columns find_columns(const tml_star *star, const tml_star_loop *loop, const char *prefix, const char *insertion) {
    return (cif_columns){.star = star,
                         .loop = loop,
                         .chain = column_of(star, loop, prefix, "auth_asym_id", "label_asym_id"),
                         .number = column_of(star, loop, prefix, "auth_seq_id", "label_seq_id"),
                         .insertion = tml_star_column(star, loop, insertion),
                         .residue = column_of(star, loop, prefix, "auth_comp_id", "label_comp_id"),
                         .name = column_of(star, loop, prefix, "auth_atom_id", "label_atom_id")};
}

static const tml_star_value *at(const cif_columns *in, size_t row, int column) {
    return tml_star_at(in->star, in->loop, row, column);
}

/* A value as text; false where it is too long. Null is "". */
static bool copy_value(const tml_star_value *value, char out[NAME_ROOM]) {
    out[0] = '\0';
    if (tml_star_is_null(value)) return true;
    if (value->length >= NAME_ROOM) return false;
    memcpy(out, value->text, (size_t)value->length);
    out[value->length] = '\0';
    return true;
}

static tml_status cif_names(gathering *g, const cif_columns *in, size_t row_index, row_read *row) {
    char insertion[NAME_ROOM];
    const int which[] = {in->chain, in->number, in->residue, in->name, in->insertion};
    char *const to[] = {row->chain, row->number, row->residue, row->name, insertion};
    for (int k = 0; k < 5; k++) {
        const tml_star_value *value = at(in, row_index, which[k]);
        if (!copy_value(value, to[k]))
            return tml_fail_at(g->error, TML_BAD_INPUT, g->path, value->line, value->column,
                               "a name of more than %d letters", NAME_ROOM - 1);
    }
    if (row->chain[0] == '\0') snprintf(row->chain, sizeof row->chain, "_");
    if (row->number[0] == '\0') snprintf(row->number, sizeof row->number, "1"); /* a ligand alone in its chain has none */
    if (strlen(row->number) + strlen(insertion) < NAME_ROOM)
        memcpy(row->number + strlen(row->number), insertion, strlen(insertion) + 1);
    return TML_OK;
}

static tml_status cif_model(gathering *g, const tml_star_value *value, int32_t *models, int32_t *model) {
    char name[NAME_ROOM];
    bool is_new;
    if (!copy_value(value, name))
        return tml_fail_at(g->error, TML_BAD_INPUT, g->path, value->line, value->column, "a model's number is expected");
    *model = indexed(g, OWNER_MODELS, name, *models, &is_new);
    if (*model < 0) return tml_no_memory(g->error);
    *models += is_new;
    return TML_OK;
}

static tml_status read_sites(gathering *g, const tml_star *star, const tml_star_loop *loop) {
    static const char *const AXES[] = {"Cartn_x", "Cartn_y", "Cartn_z"};
    cif_columns in = find_columns(star, loop, "", "pdbx_PDB_ins_code");
    int axis[3], model_column = tml_star_column(star, loop, "pdbx_PDB_model_num");
    int symbol = tml_star_column(star, loop, "type_symbol"), occupancy_column = tml_star_column(star, loop, "occupancy");
    int32_t models = 0;
    for (int k = 0; k < 3; k++) {
        axis[k] = tml_star_column(star, loop, AXES[k]);
        if (axis[k] < 0 || in.name < 0)
            return tml_fail_at(g->error, TML_BAD_INPUT, g->path, star->tags[loop->first_tag].line, 1,
                               "the atom_site table lacks %s", in.name < 0 ? "the atoms' names" : AXES[k]);
    }
    for (size_t r = 0; r < loop->row_count; r++) {
        row_read row = {.place = {.occupancy = 1}};
        double occupancy;
        char element[NAME_ROOM];
        tml_status status = cif_names(g, &in, r, &row);
        if (status == TML_OK) status = cif_model(g, at(&in, r, model_column), &models, &row.place.model);
        if (status != TML_OK) return status;
        for (int k = 0; k < 3; k++) {
            const tml_star_value *value = at(&in, r, axis[k]);
            if (!tml_star_number(value, &row.place.xyz[k]) || !isfinite(row.place.xyz[k]))
                return tml_fail_at(g->error, TML_BAD_INPUT, g->path, value->line, value->column,
                                   "found '%.*s' where a coordinate is expected", value->length > 40 ? 40 : value->length,
                                   value->text);
        }
        if (row.name[0] == '\0') {
            const tml_star_value *value = at(&in, r, in.name);
            return tml_fail_at(g->error, TML_BAD_INPUT, g->path, value->line, value->column, "an atom without a name");
        }
        if (tml_star_number(at(&in, r, occupancy_column), &occupancy) && fabs(occupancy) < 1e6) row.place.occupancy = (float)occupancy;
        if (copy_value(at(&in, r, symbol), element)) row.element = tml_element_number(element);
        if (row.element < 0) row.element = 0;
        status = add_row(g, &row);
        if (status != TML_OK) return status;
    }
    return TML_OK;
}

/* Covalent bonds and disulfides within the same copy. */
static tml_status read_connections(gathering *g, const tml_star *star, const tml_star_loop *loop) {
    cif_columns one = find_columns(star, loop, "ptnr1_", "pdbx_ptnr1_PDB_ins_code");
    cif_columns two = find_columns(star, loop, "ptnr2_", "pdbx_ptnr2_PDB_ins_code");
    int type = tml_star_column(star, loop, "conn_type_id");
    int here = tml_star_column(star, loop, "ptnr1_symmetry"), there = tml_star_column(star, loop, "ptnr2_symmetry");
    for (size_t r = 0; r < loop->row_count; r++) {
        row_read a = {0}, b = {0};
        char copy_1[NAME_ROOM], copy_2[NAME_ROOM];
        const tml_star_value *kind = at(&one, r, type);
        if (!tml_star_is(kind, "disulf") && !tml_star_is(kind, "covale")) continue;
        if (!copy_value(at(&one, r, here), copy_1) || !copy_value(at(&one, r, there), copy_2) || strcmp(copy_1, copy_2) != 0) continue;
        tml_status status = cif_names(g, &one, r, &a);
        if (status == TML_OK) status = cif_names(g, &two, r, &b);
        if (status == TML_OK) status = add_link(g, &a, &b);
        if (status != TML_OK) return status;
    }
    return TML_OK;
}

static tml_status read_cif(gathering *g, const char *text, size_t length) {
    tml_star star;
    tml_status status = tml_star_parse(text, length, g->path, &star, g->error);
    bool found = false; /* the first block with atoms */
    for (size_t f = 0; f < star.frame_count && status == TML_OK && !found; f++) {
        tml_star_loop sites, links;
        bool linked = false;
        status = tml_star_find_table(&star, &star.frames[f], "_atom_site", &sites, &found, g->error);
        if (status != TML_OK || !found) continue;
        status = read_sites(g, &star, &sites);
        if (status == TML_OK) status = tml_star_find_table(&star, &star.frames[f], "_struct_conn", &links, &linked, g->error);
        if (status == TML_OK && linked) status = read_connections(g, &star, &links);
    }
    tml_star_clear(&star);
    return status;
}

/* ---- models out of what was gathered ---- */

static tml_status make_models(gathering *g) {
    enum { SPARSEST = 16, SMALL = 1 << 20 }; /* cells for each place that was read */
    tml_coordinates *out = g->out;
    for (size_t i = 0; i < g->place_count; i++)
        if (g->places[i].model >= out->model_count) out->model_count = g->places[i].model + 1;
    size_t cells;
    if (__builtin_mul_overflow((size_t)out->model_count, out->atom_count, &cells) || cells > g->place_count * SPARSEST + SMALL)
        return tml_fail_at(g->error, TML_BAD_INPUT, g->path, 0, 0, "%d models with hardly an atom in common", out->model_count);
    float *occupancy = tml_alloc(cells, sizeof *occupancy);
    out->xyz = cells > SIZE_MAX / 3 ? NULL : tml_alloc(cells * 3, sizeof *out->xyz);
    if (occupancy == NULL || out->xyz == NULL) {
        free(occupancy);
        return tml_no_memory(g->error);
    }
    for (size_t i = 0; i < cells * 3; i++) out->xyz[i] = NAN;
    for (size_t i = 0; i < g->place_count; i++) {
        const place_read *place = &g->places[i];
        size_t cell = (size_t)place->model * out->atom_count + (size_t)place->atom;
        bool taken = !isnan(out->xyz[cell * 3]);
        out->alternatives += taken;
        if (taken && !(place->occupancy > occupancy[cell])) continue;
        occupancy[cell] = place->occupancy;
        memcpy(&out->xyz[cell * 3], place->xyz, sizeof place->xyz);
    }
    free(occupancy);
    return TML_OK;
}
