/* component.c: component dictionaries: the chem_comp categories of mmCIF, as the archive of the Protein Data Bank and monomer
 * libraries write them. Source: PDBx/mmCIF dictionary, version 5; value_dist_nucleus and plane_atom as in the CIF of monomer
 * libraries.
 *
 *   whole files    told by content, or named by a sheet
 *   values         names, numbers, atoms of a component
 *   categories     atoms, bonds, angles, torsions, centres, planes, types
 *   making         those that the molecule uses
 */
#include "molecule/component.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "input/draft.h"
#include "input/source.h"
#include "molecule/elements.h"
#include "molecule/nearest.h"

enum { MOST_BONDS = 4 * TML_COMPONENT_ATOMS, MOST_TERMS = 16 * TML_COMPONENT_ATOMS, LONGEST_NAME = 32 };

typedef struct reader {
    tml_draft *draft;
    const tml_star *star;
    int32_t file;
    size_t first, last; /* components of this file: from `first` on; the one found last */
    tml_error *error;
} reader;

typedef tml_status category_fn(reader *in, const tml_star_loop *loop);

static category_fn read_atoms, read_bonds, read_angles, read_torsions, read_centres, read_plane_atoms, read_types;
static void choose_coordinates(reader *in);

/* ---- whole files ---- */

static bool begins(const tml_star_value *tag, const char *text) {
    size_t length = strlen(text);
    return (size_t)tag->length > length && strncasecmp(tag->text, text, length) == 0;
}

bool tml_is_component(const tml_star *star) {
    for (size_t i = 0; i < star->loop_count; i++)
        if (begins(&star->tags[star->loops[i].first_tag], "_chem_comp_atom.")) return true;
    for (size_t i = 0; i < star->item_count; i++)
        if (begins(&star->items[i].tag, "_chem_comp_atom.")) return true;
    return false;
}

tml_status tml_read_components(tml_draft *draft, tml_star *star, int32_t file, tml_error *error) {
    static const struct {
        const char *category;
        category_fn *read;
    } CATEGORIES[] = {
        {"_chem_comp_atom", read_atoms},   {"_chem_comp_bond", read_bonds},   {"_chem_comp_angle", read_angles},
        {"_chem_comp_tor", read_torsions}, {"_chem_comp_chir", read_centres}, {"_chem_comp_plane_atom", read_plane_atoms},
        {"_chem_comp", read_types},
    };
    reader in = {draft, star, file, draft->outline.component_count, draft->outline.component_count, error};
    tml_status status = TML_OK;
    for (size_t c = 0; c < sizeof CATEGORIES / sizeof *CATEGORIES; c++) /* atoms of all blocks come first */
        for (size_t f = 0; status == TML_OK && f < star->frame_count; f++) {
            tml_star_loop table;
            bool found = false;
            status = tml_star_find_table(star, &star->frames[f], CATEGORIES[c].category, &table, &found, error);
            if (status == TML_OK && found && table.row_count > 0) status = CATEGORIES[c].read(&in, &table);
        }
    choose_coordinates(&in);
    return status;
}

/* A path as seen from the folder of the file that names it. */
static char *beside(const char *file, const char *path) {
    const char *slash = strrchr(file, '/');
    size_t folder = *path == '/' || slash == NULL ? 0 : (size_t)(slash + 1 - file);
    char *whole = tml_alloc(folder + strlen(path) + 1, 1);
    if (whole == NULL) return NULL;
    memcpy(whole, file, folder);
    memcpy(whole + folder, path, strlen(path) + 1);
    return whole;
}

static tml_status take_name(tml_draft *draft, size_t first, const char *name, tml_place place, tml_error *error);

tml_status tml_read_component_file(tml_draft *draft, const char *name, const char *path, tml_place place, tml_error *error) {
    tml_problem *problem = draft->problem;
    char *whole = beside(problem->files[place.file], path), *text = NULL;
    const char *kept = whole == NULL ? NULL : tml_strings_add(problem->pool, whole);
    free(whole);
    if (kept == NULL || !tml_grow(&problem->files, &problem->file_capacity, problem->file_count + 1, sizeof *problem->files))
        return tml_no_memory(error);
    int32_t file = (int32_t)problem->file_count;
    problem->files[problem->file_count++] = kept;
    size_t length = 0, first = draft->outline.component_count;
    tml_star star = {0};
    tml_status status = tml_source_read(kept, &text, &length, error);
    if (status == TML_OK) status = tml_star_parse(text, length, kept, &star, error);
    if (status == TML_OK && !tml_is_component(&star))
        status = tml_fail_at(error, TML_BAD_INPUT, kept, 1, 1, "no component dictionary: it has no _chem_comp_atom");
    if (status == TML_OK) status = tml_read_components(draft, &star, file, error);
    if (status == TML_OK) status = take_name(draft, first, name, place, error);
    tml_star_clear(&star);
    free(text);
    return status;
}

/* Keep the component of that name; a single one takes the name. */
static tml_status take_name(tml_draft *draft, size_t first, const char *name, tml_place place, tml_error *error) {
    tml_outline *outline = &draft->outline;
    size_t found = outline->component_count - first == 1 ? first : outline->component_count;
    char text[512] = "";
    for (size_t i = first; i < outline->component_count; i++) {
        if (strcmp(outline->components[i]->name, name) == 0) found = i;
        size_t used = strlen(text);
        snprintf(text + used, sizeof text - used, "%s%.32s", used == 0 ? "" : ", ", outline->components[i]->name);
    }
    if (found == outline->component_count)
        return tml_fail_at(error, TML_BAD_INPUT, draft->problem->files[place.file], place.line, place.column,
                           "the dictionary has no component %.32s; it has %.300s", name, text);
    tml_component *kept = outline->components[found];
    for (size_t i = first; i < outline->component_count; i++)
        if (i != found) tml_component_free(outline->components[i]);
    outline->components[first] = kept;
    outline->component_count = first + 1;
    kept->name = tml_strings_add(draft->problem->pool, name);
    return kept->name == NULL ? tml_no_memory(error) : TML_OK;
}

/* ---- values ---- */

static tml_place place_of(const reader *in, const tml_star_value *value) {
    return (tml_place){in->file, value->line, value->column};
}

static tml_status expected(const reader *in, const tml_star_value *value, const char *what) {
    return tml_fail_at(in->error, TML_BAD_INPUT, in->draft->problem->files[in->file], value->line, value->column,
                       "found '%.*s' where %s is expected", value->length > 40 ? 40 : value->length, value->text, what);
}

static tml_status pooled(const reader *in, const tml_star_value *value, const char **out) {
    *out = tml_strings_add_part(in->draft->problem->pool, value->text, (size_t)value->length);
    return *out == NULL ? tml_no_memory(in->error) : TML_OK;
}

static tml_status too_many(const reader *in, const tml_star_value *value, const char *what, int most) {
    return tml_fail_at(in->error, TML_TOO_LARGE, in->draft->problem->files[in->file], value->line, value->column,
                       "a component of more than %d %s", most, what);
}

/* The columns that a category must have; -1 for others that it lacks. */
static tml_status columns_of(const reader *in, const tml_star_loop *loop, const char *const *names, int needed, int *columns) {
    for (int k = 0; names[k] != NULL; k++) {
        columns[k] = tml_star_column(in->star, loop, names[k]);
        if (columns[k] >= 0 || k >= needed) continue;
        const tml_star_value *tag = &in->star->tags[loop->first_tag];
        return tml_fail_at(in->error, TML_BAD_INPUT, in->draft->problem->files[in->file], tag->line, tag->column,
                           "this category has no %s, which it needs", names[k]);
    }
    return TML_OK;
}

/* Some dictionaries fill quoted names up with blanks. */
static tml_star_value trimmed(const tml_star_value *value) {
    tml_star_value name = *value;
    for (; name.quote != 0 && name.length > 0 && *name.text == ' '; name.length--) name.text++;
    while (name.quote != 0 && name.length > 0 && name.text[name.length - 1] == ' ') name.length--;
    return name;
}

/* A name of a residue or atom: what messages, tables and model files can hold. */
static tml_status name_of(const reader *in, const tml_star_value *given, const char *what, const char **out) {
    const tml_star_value name = trimmed(given), *value = &name;
    bool good = !tml_star_is_null(value) && value->length > 0 && value->length <= LONGEST_NAME;
    for (int32_t i = 0; good && i < value->length; i++) good = value->text[i] > ' ' && value->text[i] <= '~';
    if (good && (strchr("+-=", value->text[0]) != NULL)) good = false; /* signs that the tables use */
    return good ? pooled(in, value, out) : expected(in, given, what);
}

static tml_component *component_named(reader *in, const char *name) {
    const tml_outline *outline = &in->draft->outline;
    if (in->last < outline->component_count && in->last >= in->first && outline->components[in->last]->name == name)
        return outline->components[in->last];
    for (size_t i = in->first; i < outline->component_count; i++)
        if (outline->components[i]->name == name) {
            in->last = i;
            return outline->components[i];
        }
    return NULL;
}

/* The component of a row, which has to have atoms. */
static tml_status component_of(reader *in, const tml_star_value *value, tml_component **out) {
    const char *name;
    tml_status status = name_of(in, value, "a component's name", &name);
    if (status != TML_OK) return status;
    *out = component_named(in, name);
    return *out == NULL ? expected(in, value, "a component whose atoms are listed") : TML_OK;
}

static tml_status atom_of(const reader *in, const tml_component *component, const tml_star_value *given, int32_t *out) {
    const tml_star_value known = trimmed(given), *value = &known;
    for (size_t i = 0; i < component->atom_count; i++)
        if ((size_t)value->length == strlen(component->atoms[i].name) &&
            memcmp(component->atoms[i].name, value->text, (size_t)value->length) == 0) {
            *out = (int32_t)i;
            return TML_OK;
        }
    char name[LONGEST_NAME + 1], near[160] = "", text[256];
    snprintf(name, sizeof name, "%.*s", value->length > LONGEST_NAME ? LONGEST_NAME : value->length, value->text);
    tml_nearest nearest;
    tml_nearest_start(&nearest, name);
    for (size_t i = 0; i < component->atom_count; i++) tml_nearest_offer(&nearest, component->atoms[i].name);
    tml_nearest_append(&nearest, near, sizeof near);
    snprintf(text, sizeof text, "an atom of %.32s (nearest: %.160s)", component->name, near);
    return expected(in, given, text);
}

/* A number between two limits, or null: NAN. */
static tml_status number_of(const reader *in, const tml_star_value *value, double least, double most, const char *what,
                            double *out) {
    *out = NAN;
    if (tml_star_is_null(value)) return TML_OK;
    return tml_star_number(value, out) && *out >= least && *out <= most ? TML_OK : expected(in, value, what);
}

static bool is_yes(const tml_star_value *value) {
    return tml_star_is(value, "Y") || tml_star_is(value, "yes");
}

/* ---- atoms ---- */

enum { COMP, ATOM, SYMBOL, CHARGE, LEAVING, IDEAL, MODEL = IDEAL + 3, PLAIN = MODEL + 3, ATOM_COLUMNS = PLAIN + 3 };

static tml_status add_component(reader *in, const char *name, tml_place place, tml_component **out) {
    tml_outline *outline = &in->draft->outline;
    if (!tml_grow(&outline->components, &outline->component_capacity, outline->component_count + 1,
                  sizeof *outline->components))
        return tml_no_memory(in->error);
    *out = tml_alloc(1, sizeof **out);
    if (*out == NULL) return tml_no_memory(in->error);
    **out = (tml_component){.name = name, .type = "", .place = place};
    in->last = outline->component_count;
    outline->components[outline->component_count++] = *out;
    return TML_OK;
}

/* How programs write a number that they do not have, or that does not fit. */
static bool is_no_number(const tml_star_value *value) {
    int32_t stars = 0;
    while (stars < value->length && value->text[stars] == '*') stars++;
    return tml_star_is(value, "nan") || (stars > 0 && stars == value->length);
}

static tml_status place_atom(const reader *in, const tml_star_loop *loop, size_t row, const int *columns,
                             tml_component_atom *atom) {
    static const double FAR = 10000; /* Å */
    double *const sets[3] = {atom->xyz, atom->model_xyz, atom->model_xyz};
    for (int k = 0; k < 3; k++) atom->xyz[k] = atom->model_xyz[k] = NAN;
    for (int set = 0; set < 3; set++) {
        double xyz[3];
        for (int k = 0; k < 3; k++) {
            const tml_star_value *value = tml_star_at(in->star, loop, row, columns[IDEAL + 3 * set + k]);
            xyz[k] = NAN;
            if (is_no_number(value)) continue;
            tml_status status = number_of(in, value, -FAR, FAR, "a coordinate in Å", &xyz[k]);
            if (status != TML_OK) return status;
        }
        if (!isnan(xyz[0] + xyz[1] + xyz[2])) memcpy(sets[set], xyz, sizeof xyz);
    }
    return TML_OK;
}

static tml_status read_atom(reader *in, const tml_star_loop *loop, size_t row, const int *columns) {
    const tml_star *star = in->star;
    const tml_star_value *id = tml_star_at(star, loop, row, columns[COMP]), *name = tml_star_at(star, loop, row, columns[ATOM]),
                         *symbol = tml_star_at(star, loop, row, columns[SYMBOL]);
    const char *component_name;
    tml_component_atom atom = {.leaving = is_yes(tml_star_at(star, loop, row, columns[LEAVING]))};
    double charge;
    char element[4] = "";
    tml_status status = name_of(in, id, "a component's name", &component_name);
    if (status == TML_OK)
        status = name_of(in, name, "an atom's name of at most 32 characters, not beginning with +, - or =", &atom.name);
    if (status == TML_OK)
        status = number_of(in, tml_star_at(star, loop, row, columns[CHARGE]), -9, 9, "a formal charge", &charge);
    if (status == TML_OK) status = place_atom(in, loop, row, columns, &atom);
    if (status != TML_OK) return status;
    if (symbol->length < (int)sizeof element) memcpy(element, symbol->text, (size_t)symbol->length);
    int number = tml_element_number(element);
    if (number <= 0) return expected(in, symbol, "an element's symbol");
    atom.element = (uint8_t)number;
    atom.charge = (int8_t)(isnan(charge) ? 0 : lround(charge));
    tml_component *component = component_named(in, component_name);
    if (component == NULL) status = add_component(in, component_name, place_of(in, id), &component);
    if (status != TML_OK) return status;
    if (component->atom_count == TML_COMPONENT_ATOMS) return too_many(in, name, "atoms", TML_COMPONENT_ATOMS);
    for (size_t i = 0; i < component->atom_count; i++)
        if (component->atoms[i].name == atom.name) return expected(in, name, "an atom that is not listed yet");
    if (!tml_grow(&component->atoms, &component->atom_capacity, component->atom_count + 1, sizeof *component->atoms))
        return tml_no_memory(in->error);
    component->charges_given = component->charges_given || !isnan(charge);
    component->atoms[component->atom_count++] = atom;
    return TML_OK;
}

static tml_status read_atoms(reader *in, const tml_star_loop *loop) {
    static const char *const NAMES[] = {"comp_id",
                                        "atom_id",
                                        "type_symbol",
                                        "charge",
                                        "pdbx_leaving_atom_flag",
                                        "pdbx_model_Cartn_x_ideal",
                                        "pdbx_model_Cartn_y_ideal",
                                        "pdbx_model_Cartn_z_ideal",
                                        "model_Cartn_x",
                                        "model_Cartn_y",
                                        "model_Cartn_z",
                                        "x",
                                        "y",
                                        "z",
                                        NULL};
    int columns[ATOM_COLUMNS];
    tml_status status = columns_of(in, loop, NAMES, 3, columns);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) status = read_atom(in, loop, row, columns);
    return status;
}

/* Ideal coordinates where they are as complete as the model's. */
static void choose_coordinates(reader *in) {
    const tml_outline *outline = &in->draft->outline;
    for (size_t i = in->first; i < outline->component_count; i++) {
        tml_component *component = outline->components[i];
        size_t ideal = 0, model = 0;
        for (size_t k = 0; k < component->atom_count; k++) {
            ideal += !isnan(component->atoms[k].xyz[0]);
            model += !isnan(component->atoms[k].model_xyz[0]);
        }
        for (size_t k = 0; ideal < model && k < component->atom_count; k++)
            memcpy(component->atoms[k].xyz, component->atoms[k].model_xyz, sizeof component->atoms[k].xyz);
    }
}

/* ---- bonds ---- */

static tml_status order_of(const reader *in, const tml_star_value *value, tml_order *out) {
    static const struct {
        const char *word;
        tml_order order;
    } WORDS[] = {{"sin", TML_ORDER_SINGLE},     {"dou", TML_ORDER_DOUBLE},   {"tri", TML_ORDER_TRIPLE},
                 {"quad", TML_ORDER_TRIPLE},    {"aro", TML_ORDER_AROMATIC}, {"del", TML_ORDER_DELOCALISED},
                 {"pi", TML_ORDER_DELOCALISED}, {"metal", TML_ORDER_SINGLE}, {"poly", TML_ORDER_SINGLE},
                 {"coval", TML_ORDER_SINGLE},   {"coord", TML_ORDER_SINGLE}, {"dative", TML_ORDER_SINGLE}};
    *out = TML_ORDER_SINGLE;
    if (tml_star_is_null(value)) return TML_OK;
    for (size_t i = 0; i < sizeof WORDS / sizeof *WORDS; i++)
        if ((size_t)value->length >= strlen(WORDS[i].word) &&
            strncasecmp(value->text, WORDS[i].word, strlen(WORDS[i].word)) == 0) {
            *out = WORDS[i].order;
            return TML_OK;
        }
    return expected(in, value, "a bond order, such as SING, DOUB, TRIP, AROM or DELO,");
}

static tml_status read_bonds(reader *in, const tml_star_loop *loop) {
    enum { ID, FIRST, SECOND, ORDER, TYPE, AROMATIC, FLAG, LENGTH, COLUMNS };
    static const char *const NAMES[] = {"comp_id",  "atom_id_1",          "atom_id_2",  "value_order", "type",
                                        "aromatic", "pdbx_aromatic_flag", "value_dist", NULL};
    const tml_star *star = in->star;
    int columns[COLUMNS];
    tml_status status = columns_of(in, loop, NAMES, 3, columns);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        tml_component *component = NULL;
        tml_component_bond bond = {0};
        const tml_star_value *second = tml_star_at(star, loop, row, columns[SECOND]);
        status = component_of(in, tml_star_at(star, loop, row, columns[ID]), &component);
        if (status == TML_OK) status = atom_of(in, component, tml_star_at(star, loop, row, columns[FIRST]), &bond.a);
        if (status == TML_OK) status = atom_of(in, component, second, &bond.b);
        if (status == TML_OK)
            status = order_of(in, tml_star_at(star, loop, row, columns[columns[ORDER] >= 0 ? ORDER : TYPE]), &bond.order);
        if (status == TML_OK)
            status = number_of(in, tml_star_at(star, loop, row, columns[LENGTH]), 0.3, 10, "a bond length in Å", &bond.length);
        if (status != TML_OK) break;
        if (bond.a == bond.b) return expected(in, second, "another atom");
        bool aromatic =
            is_yes(tml_star_at(star, loop, row, columns[AROMATIC])) || is_yes(tml_star_at(star, loop, row, columns[FLAG]));
        if (aromatic && bond.order <= TML_ORDER_DOUBLE) bond.order = TML_ORDER_AROMATIC;
        bool known = false;
        for (size_t i = 0; i < component->bond_count; i++)
            known = known || (component->bonds[i].a == bond.a && component->bonds[i].b == bond.b) ||
                    (component->bonds[i].a == bond.b && component->bonds[i].b == bond.a);
        if (known) continue;
        if (component->bond_count == MOST_BONDS) return too_many(in, second, "bonds", MOST_BONDS);
        if (!tml_grow(&component->bonds, &component->bond_capacity, component->bond_count + 1, sizeof *component->bonds))
            return tml_no_memory(in->error);
        component->bonds[component->bond_count++] = bond;
    }
    return status;
}

/* ---- angles, torsions, centres ---- */

/* The atoms in columns 1 to `count` of a row, after its component in column 0. Null atoms leave *whole false. */
static tml_status read_row(reader *in, const tml_star_loop *loop, size_t row, const int *columns, int count,
                           tml_component **component, int32_t *atoms, bool *whole) {
    tml_status status = component_of(in, tml_star_at(in->star, loop, row, columns[0]), component);
    *whole = true;
    for (int k = 0; status == TML_OK && k < count && *whole; k++) {
        const tml_star_value *value = tml_star_at(in->star, loop, row, columns[1 + k]);
        if (tml_star_is_null(value))
            *whole = false;
        else
            status = atom_of(in, *component, value, &atoms[k]);
        for (int i = 0; status == TML_OK && *whole && i < k; i++)
            if (atoms[i] == atoms[k]) status = expected(in, value, "another atom");
    }
    return status;
}

static tml_status read_angles(reader *in, const tml_star_loop *loop) {
    static const char *const NAMES[] = {"comp_id", "atom_id_1", "atom_id_2", "atom_id_3", "value_angle", NULL};
    int columns[5];
    tml_status status = columns_of(in, loop, NAMES, 4, columns);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        tml_component *component = NULL;
        int32_t atoms[3];
        double degrees;
        bool whole;
        const tml_star_value *value = tml_star_at(in->star, loop, row, columns[4]);
        status = read_row(in, loop, row, columns, 3, &component, atoms, &whole);
        if (status == TML_OK) status = number_of(in, value, 10, 180, "an angle in degrees between 10 and 180", &degrees);
        if (status != TML_OK) break;
        if (!whole || isnan(degrees)) continue;
        if (component->angle_count == MOST_TERMS) return too_many(in, value, "angles", MOST_TERMS);
        if (!tml_grow(&component->angles, &component->angle_capacity, component->angle_count + 1, sizeof *component->angles))
            return tml_no_memory(in->error);
        component->angles[component->angle_count++] = (tml_component_angle){atoms[0], atoms[1], atoms[2], degrees};
    }
    return status;
}

static tml_status read_torsions(reader *in, const tml_star_loop *loop) {
    static const char *const NAMES[] = {"comp_id",   "atom_id_1",   "atom_id_2",       "atom_id_3",
                                        "atom_id_4", "value_angle", "value_angle_esd", NULL};
    static const double USUAL_SPREAD = 20;
    int columns[7];
    tml_status status = columns_of(in, loop, NAMES, 5, columns);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        tml_component *component = NULL;
        int32_t atoms[4];
        double degrees, spread;
        bool whole;
        const tml_star_value *value = tml_star_at(in->star, loop, row, columns[5]);
        status = read_row(in, loop, row, columns, 4, &component, atoms, &whole);
        if (status == TML_OK) status = number_of(in, value, -360, 360, "an angle in degrees", &degrees);
        if (status == TML_OK)
            status = number_of(in, tml_star_at(in->star, loop, row, columns[6]), 0, 1000, "an angle in degrees", &spread);
        if (status != TML_OK) break;
        if (!whole || isnan(degrees)) continue;
        if (component->torsion_count == MOST_TERMS) return too_many(in, value, "torsions", MOST_TERMS);
        if (!tml_grow(&component->torsions, &component->torsion_capacity, component->torsion_count + 1,
                      sizeof *component->torsions))
            return tml_no_memory(in->error);
        component->torsions[component->torsion_count++] =
            (tml_component_torsion){atoms[0], atoms[1], atoms[2], atoms[3], degrees, isnan(spread) ? USUAL_SPREAD : spread};
    }
    return status;
}

/* Centres by the sign of their volume; "both" and words for metals mean none. A category without arms is passed over. */
static tml_status read_centres(reader *in, const tml_star_loop *loop) {
    static const char *const NAMES[] = {"comp_id",   "atom_id_centre", "atom_id_1", "atom_id_2",
                                        "atom_id_3", "volume_sign",    NULL};
    int columns[6];
    if (tml_star_column(in->star, loop, NAMES[1]) < 0) return TML_OK;
    tml_status status = columns_of(in, loop, NAMES, 6, columns);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        tml_component *component = NULL;
        int32_t atoms[4];
        bool whole;
        const tml_star_value *sign = tml_star_at(in->star, loop, row, columns[5]);
        status = read_row(in, loop, row, columns, 4, &component, atoms, &whole);
        if (status != TML_OK) break;
        if (!whole) continue;
        if (component->centre_count == MOST_TERMS) return too_many(in, sign, "centres", MOST_TERMS);
        if (!tml_grow(&component->centres, &component->centre_capacity, component->centre_count + 1,
                      sizeof *component->centres))
            return tml_no_memory(in->error);
        int hand = sign->length >= 3 && strncasecmp(sign->text, "pos", 3) == 0   ? 1
                   : sign->length >= 3 && strncasecmp(sign->text, "neg", 3) == 0 ? -1
                                                                                 : 0;
        component->centres[component->centre_count++] =
            (tml_component_centre){atoms[0], {atoms[1], atoms[2], atoms[3]}, (int8_t)hand};
    }
    return status;
}

/* ---- planes, types ---- */

/* After the last atom of the same plane. */
static tml_status add_plane_atom(reader *in, tml_component *component, tml_component_plane_atom added,
                                 const tml_star_value *value) {
    if (component->plane_atom_count == MOST_TERMS) return too_many(in, value, "atoms in planes", MOST_TERMS);
    if (!tml_grow(&component->plane_atoms, &component->plane_atom_capacity, component->plane_atom_count + 1,
                  sizeof *component->plane_atoms))
        return tml_no_memory(in->error);
    size_t at = component->plane_atom_count;
    while (at > 0 && component->plane_atoms[at - 1].plane != added.plane) at--;
    if (at == 0) at = component->plane_atom_count;
    for (size_t i = at; i > 0 && component->plane_atoms[i - 1].plane == added.plane; i--)
        if (component->plane_atoms[i - 1].atom == added.atom) return TML_OK;
    memmove(&component->plane_atoms[at + 1], &component->plane_atoms[at],
            (component->plane_atom_count - at) * sizeof *component->plane_atoms);
    component->plane_atoms[at] = added;
    component->plane_atom_count++;
    return TML_OK;
}

static tml_status read_plane_atoms(reader *in, const tml_star_loop *loop) {
    static const char *const NAMES[] = {"comp_id", "plane_id", "atom_id", NULL};
    int columns[3];
    tml_status status = columns_of(in, loop, NAMES, 3, columns);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        tml_component *component = NULL;
        tml_component_plane_atom added = {0};
        const tml_star_value *value = tml_star_at(in->star, loop, row, columns[2]);
        status = component_of(in, tml_star_at(in->star, loop, row, columns[0]), &component);
        if (status == TML_OK) status = pooled(in, tml_star_at(in->star, loop, row, columns[1]), &added.plane);
        if (status == TML_OK) status = atom_of(in, component, value, &added.atom);
        if (status == TML_OK) status = add_plane_atom(in, component, added, value);
    }
    return status;
}

/* Lists of components hold more of them than are described. */
static tml_status read_types(reader *in, const tml_star_loop *loop) {
    static const char *const NAMES[] = {"id", "type", "group", NULL};
    int columns[3];
    tml_status status = columns_of(in, loop, NAMES, 1, columns);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        const tml_star_value *id = tml_star_at(in->star, loop, row, columns[0]),
                             *type = tml_star_at(in->star, loop, row, columns[columns[1] >= 0 ? 1 : 2]);
        const char *name;
        status = pooled(in, id, &name);
        if (status != TML_OK) break;
        tml_component *component = component_named(in, name);
        if (component != NULL && !tml_star_is_null(type)) status = pooled(in, type, &component->type);
    }
    return status;
}

/* ---- making ---- */

/* One name cannot stand for two components. */
static tml_status refuse_twins(const tml_draft *draft, size_t index, tml_error *error) {
    const tml_component *two = draft->outline.components[index];
    const char *const *files = draft->problem->files;
    for (size_t k = 0; k < index; k++) {
        const tml_component *one = draft->outline.components[k];
        if (one->name == two->name)
            return tml_fail_at(error, TML_BAD_INPUT, files[two->place.file], two->place.line, two->place.column,
                               "component %.32s is described already, at %s:%d", two->name, files[one->place.file],
                               (int)one->place.line);
    }
    return TML_OK;
}

tml_status tml_make_components(tml_draft *draft, tml_error *error) {
    tml_outline *outline = &draft->outline;
    tml_status status = TML_OK;
    for (size_t i = 0; status == TML_OK && i < outline->component_count; i++) {
        tml_component *component = outline->components[i];
        bool used = false;
        for (size_t r = 0; r < outline->residue_count && !used; r++)
            used = strcmp(outline->residues[r].name, component->name) == 0;
        if (!used) continue;
        status = refuse_twins(draft, i, error);
        if (status == TML_OK) status = tml_component_make(component, draft->problem->pool, error);
        for (int k = 0; status == TML_OK && k < component->note_count; k++)
            status = tml_problem_add_note(draft->problem, component->place, error, "%s", component->notes[k]);
        if (status == TML_OK && tml_find_builtin(component->name) != NULL)
            status = tml_problem_add_note(draft->problem, component->place, error,
                                          "%s is used as described here, not as built in", component->name);
    }
    return status;
}
