/* nef.c: the NMR Exchange Format, version 1.1 (Gutmanas et al., Nature Struct. Mol. Biol. 22 (2015) 433).
 *
 *   sequence, covalent links
 *   distance and dihedral restraints
 *   lists of other kinds: counted, named, not used
 */
#include <math.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>

#include "input/cells.h"

static tml_status read_sequence(tml_cells *in, const tml_star_loop *loop);
static tml_status read_links(tml_cells *in, const tml_star_loop *loop);
static tml_status read_distances(tml_cells *in, const tml_star_frame *frame, const tml_star_loop *loop);
static tml_status read_dihedrals(tml_cells *in, const tml_star_frame *frame, const tml_star_loop *loop);
static tml_status pass_over(tml_cells *in, const tml_star_loop *loop);

bool tml_is_nef(const tml_star *star) {
    for (size_t i = 0; i < star->loop_count; i++)
        if (strncasecmp(star->tags[star->loops[i].first_tag].text, "_nef_", 5) == 0) return true;
    return false;
}

tml_status tml_read_nef(tml_draft *draft, const tml_star *star, int32_t file, tml_error *error) {
    tml_cells in = {draft, star, file, error};
    tml_status status = TML_OK;
    for (size_t f = 0; status == TML_OK && f < star->frame_count; f++) {
        const tml_star_frame *frame = &star->frames[f];
        for (size_t i = frame->first_loop; status == TML_OK && i < frame->first_loop + frame->loop_count; i++) {
            const tml_star_loop *loop = &star->loops[i];
            if (tml_loop_is(star, loop, "_nef_sequence"))
                status = read_sequence(&in, loop);
            else if (tml_loop_is(star, loop, "_nef_covalent_links"))
                status = read_links(&in, loop);
            else if (tml_loop_is(star, loop, "_nef_distance_restraint"))
                status = read_distances(&in, frame, loop);
            else if (tml_loop_is(star, loop, "_nef_dihedral_restraint"))
                status = read_dihedrals(&in, frame, loop);
            else
                status = pass_over(&in, loop);
        }
    }
    return status;
}

/* ---- values ---- */

/* Columns chain_code_K, sequence_code_K, residue_name_K, atom_name_K of one address. */
typedef struct address_columns { int chain, number, residue, atom; } address_columns;

static tml_status find_address(tml_cells *in, const tml_star_loop *loop, int which, address_columns *out) {
    static const char *const NAMES[4] = {"chain_code", "sequence_code", "residue_name", "atom_name"};
    int *columns[4] = {&out->chain, &out->number, &out->residue, &out->atom};
    *out = (address_columns){-1, -1, -1, -1};
    for (int k = 0; k < 4; k++) {
        char name[32];
        snprintf(name, sizeof name, "%s_%d", NAMES[k], which);
        *columns[k] = tml_star_column(in->star, loop, name);
        if (*columns[k] < 0 && k != 2) return tml_cell_missing(in, loop, name);
    }
    return TML_OK;
}

static tml_status read_address(tml_cells *in, const tml_star_loop *loop, size_t row, const address_columns *columns, tml_address *out) {
    const tml_star_value *atom = tml_star_at(in->star, loop, row, columns->atom);
    tml_status status = tml_cell_text(in, tml_star_at(in->star, loop, row, columns->chain), ".", &out->chain);
    if (status == TML_OK) status = tml_cell_text(in, tml_star_at(in->star, loop, row, columns->number), ".", &out->number);
    if (status == TML_OK) status = tml_cell_text(in, tml_star_at(in->star, loop, row, columns->residue), "", &out->residue);
    if (status == TML_OK) status = tml_cell_text(in, atom, ".", &out->atom);
    out->place = tml_cell_place(in, atom);
    return status;
}

/* ---- sequence, links ---- */

static tml_status linking_of(tml_cells *in, const tml_star_value *value, tml_linking *out) {
    static const struct { const char *word; tml_linking linking; } WORDS[] = {
        {"start", TML_LINKING_START},   {"middle", TML_LINKING_MIDDLE}, {"end", TML_LINKING_END},       {"single", TML_LINKING_SINGLE},
        {"break", TML_LINKING_BREAK},   {"cyclic", TML_LINKING_CYCLIC}, {"nonlinear", TML_LINKING_SINGLE}, {"dummy", TML_LINKING_SINGLE},
    };
    *out = TML_LINKING_DEFAULT;
    if (tml_star_is_null(value)) return TML_OK;
    for (size_t i = 0; i < sizeof WORDS / sizeof *WORDS; i++)
        if (tml_star_is(value, WORDS[i].word)) {
            *out = WORDS[i].linking;
            return TML_OK;
        }
    return tml_fail_at(in->error, TML_BAD_INPUT, in->draft->problem->files[in->file], value->line, value->column,
                       "linking '%.*s' is not known; NEF has start, middle, end, single, break, cyclic, nonlinear, dummy",
                       value->length > 40 ? 40 : value->length, value->text);
}

static tml_status read_sequence(tml_cells *in, const tml_star_loop *loop) {
    const tml_star *star = in->star;
    tml_outline *outline = &in->draft->outline;
    int chain = tml_star_column(star, loop, "chain_code"), number = tml_star_column(star, loop, "sequence_code"),
        name = tml_star_column(star, loop, "residue_name"), linking = tml_star_column(star, loop, "linking"),
        variant = tml_star_column(star, loop, "residue_variant"), cis = tml_star_column(star, loop, "cis_peptide");
    if (chain < 0) return tml_cell_missing(in, loop, "chain_code");
    if (number < 0) return tml_cell_missing(in, loop, "sequence_code");
    if (name < 0) return tml_cell_missing(in, loop, "residue_name");
    for (size_t row = 0; row < loop->row_count; row++) {
        if (!tml_grow(&outline->residues, &outline->residue_capacity, outline->residue_count + 1, sizeof *outline->residues))
            return tml_no_memory(in->error);
        tml_outline_residue *residue = &outline->residues[outline->residue_count++];
        const tml_star_value *dummy = tml_star_at(star, loop, row, linking);
        tml_status status = tml_cell_text(in, tml_star_at(star, loop, row, chain), ".", &residue->chain);
        if (status == TML_OK) status = tml_cell_text(in, tml_star_at(star, loop, row, number), ".", &residue->number);
        if (status == TML_OK) status = tml_cell_text(in, tml_star_at(star, loop, row, name), ".", &residue->name);
        if (status == TML_OK) status = tml_cell_text(in, tml_star_at(star, loop, row, variant), "", &residue->variant);
        if (status == TML_OK) status = linking_of(in, dummy, &residue->linking);
        if (status != TML_OK) return status;
        residue->cis = tml_star_is(tml_star_at(star, loop, row, cis), "true");
        residue->place = tml_cell_place(in, tml_star_at(star, loop, row, name));
        if (tml_star_is(dummy, "dummy")) outline->residue_count--; /* a place holder of other programs, no atoms */
    }
    return TML_OK;
}

static tml_status read_links(tml_cells *in, const tml_star_loop *loop) {
    tml_outline *outline = &in->draft->outline;
    address_columns first, second;
    tml_status status = find_address(in, loop, 1, &first);
    if (status == TML_OK) status = find_address(in, loop, 2, &second);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        if (!tml_grow(&outline->links, &outline->link_capacity, outline->link_count + 1, sizeof *outline->links))
            return tml_no_memory(in->error);
        tml_outline_link *link = &outline->links[outline->link_count++];
        status = read_address(in, loop, row, &first, &link->a);
        if (status == TML_OK) status = read_address(in, loop, row, &second, &link->b);
        link->place = link->a.place;
    }
    return status;
}

/* ---- restraints ---- */

typedef struct limit_columns { int id, combination, weight, target, uncertainty, lower, upper, lower_linear, upper_linear; } limit_columns;

static tml_status find_limits(tml_cells *in, const tml_star_loop *loop, limit_columns *out) {
    const tml_star *star = in->star;
    *out = (limit_columns){
        .id = tml_star_column(star, loop, "restraint_id"),
        .combination = tml_star_column(star, loop, "restraint_combination_id"),
        .weight = tml_star_column(star, loop, "weight"),
        .target = tml_star_column(star, loop, "target_value"),
        .uncertainty = tml_star_column(star, loop, "target_value_uncertainty"),
        .lower = tml_star_column(star, loop, "lower_limit"),
        .upper = tml_star_column(star, loop, "upper_limit"),
        .lower_linear = tml_star_column(star, loop, "lower_linear_limit"),
        .upper_linear = tml_star_column(star, loop, "upper_linear_limit"),
    };
    return out->id < 0 ? tml_cell_missing(in, loop, "restraint_id") : TML_OK;
}

typedef struct limits { const char *list, *id, *combination; double lower, upper, weight; tml_row_beside beside; tml_place place; bool from_target; } limits;

/* An item or a cell as text; NULL for none. */
static tml_status maybe_text(tml_cells *in, const tml_star_value *value, const char **out) {
    *out = NULL;
    return value == NULL || tml_star_is_null(value) ? TML_OK : tml_cell_text(in, value, "", out);
}

/* What the list says of itself, and a torsion's name. */
static tml_status read_beside(tml_cells *in, const tml_star_frame *frame, const tml_star_loop *loop, size_t row, tml_row_beside *out) {
    bool dihedral = tml_loop_is(in->star, loop, "_nef_dihedral_restraint");
    const char *category = dihedral ? "_nef_dihedral_restraint_list" : "_nef_distance_restraint_list";
    char tag[80];
    snprintf(tag, sizeof tag, "%s.restraint_origin", category);
    tml_status status = maybe_text(in, tml_star_find_item(in->star, frame, tag), &out->origin);
    snprintf(tag, sizeof tag, "%s.potential_type", category);
    if (status == TML_OK) status = maybe_text(in, tml_star_find_item(in->star, frame, tag), &out->potential);
    int name = dihedral ? tml_star_column(in->star, loop, "name") : -1;
    return status == TML_OK ? maybe_text(in, tml_star_at(in->star, loop, row, name), &out->angle) : status;
}

/* Both limits missing: the linear ones, or the target value and its uncertainty. */
static tml_status read_limits(tml_cells *in, const tml_star_frame *frame, const tml_star_loop *loop, size_t row, const limit_columns *columns,
                              limits *out) {
    const tml_star *star = in->star;
    double lower_linear = NAN, upper_linear = NAN, target = NAN, uncertainty = NAN;
    const tml_star_value *id = tml_star_at(star, loop, row, columns->id);
    *out = (limits){.place = tml_cell_place(in, id)};
    if (tml_star_is_null(id)) return tml_cell_expected(in, id, "a restraint_id"); /* or all such rows would be alternatives */
    tml_status status = tml_cell_text(in, &frame->name, "", &out->list);
    if (status == TML_OK) status = tml_cell_text(in, id, ".", &out->id);
    if (status == TML_OK) status = tml_cell_text(in, tml_star_at(star, loop, row, columns->combination), "", &out->combination);
    if (status == TML_OK) status = tml_cell_number(in, tml_star_at(star, loop, row, columns->weight), &out->weight);
    if (status == TML_OK) status = tml_cell_number(in, tml_star_at(star, loop, row, columns->lower), &out->lower);
    if (status == TML_OK) status = tml_cell_number(in, tml_star_at(star, loop, row, columns->upper), &out->upper);
    if (status == TML_OK) status = tml_cell_number(in, tml_star_at(star, loop, row, columns->lower_linear), &lower_linear);
    if (status == TML_OK) status = tml_cell_number(in, tml_star_at(star, loop, row, columns->upper_linear), &upper_linear);
    if (status == TML_OK) status = tml_cell_number(in, tml_star_at(star, loop, row, columns->target), &target);
    if (status == TML_OK) status = tml_cell_number(in, tml_star_at(star, loop, row, columns->uncertainty), &uncertainty);
    if (status != TML_OK) return status;
    if (isnan(out->weight)) out->weight = 1.0;
    out->beside = (tml_row_beside){.values = true, .target = target, .uncertainty = uncertainty, .lower_linear = lower_linear, .upper_linear = upper_linear};
    status = read_beside(in, frame, loop, row, &out->beside);
    if (status != TML_OK) return status;
    if (isnan(out->lower) && isnan(out->upper)) {
        out->lower = lower_linear;
        out->upper = upper_linear;
        if (isnan(out->lower) && isnan(out->upper) && !isnan(target) && uncertainty >= 0) {
            out->lower = target - uncertainty;
            out->upper = target + uncertainty;
            out->from_target = true;
        }
    }
    return TML_OK;
}

static tml_status note_targets(tml_cells *in, const limits *row, size_t count, tml_status status) {
    if (status != TML_OK || count == 0) return status;
    return tml_problem_add_note(in->draft->problem, row->place, in->error,
                                "%zu rows of %s have no limits; target value and uncertainty are taken for them", count, row->list);
}

static tml_status read_distances(tml_cells *in, const tml_star_frame *frame, const tml_star_loop *loop) {
    tml_rows *rows = &in->draft->rows;
    address_columns first, second;
    limit_columns columns;
    limits row_limits = {0};
    size_t from_targets = 0;
    tml_status status = find_limits(in, loop, &columns);
    if (status == TML_OK) status = find_address(in, loop, 1, &first);
    if (status == TML_OK) status = find_address(in, loop, 2, &second);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        tml_address addresses[2] = {0};
        status = read_limits(in, frame, loop, row, &columns, &row_limits);
        if (status == TML_OK) status = read_address(in, loop, row, &first, &addresses[0]);
        if (status == TML_OK) status = read_address(in, loop, row, &second, &addresses[1]);
        if (status != TML_OK) break;
        from_targets += row_limits.from_target;
        if (row_limits.from_target && row_limits.lower < 0) row_limits.lower = 0; /* an uncertainty wider than the distance */
        tml_distance_row made = {.list = row_limits.list, .id = row_limits.id, .combination = row_limits.combination, .count_a = 1,
                                 .count_b = 1, .lower = row_limits.lower, .upper = row_limits.upper, .weight = row_limits.weight, .beside = row_limits.beside,
                                 .place = row_limits.place};
        if (!tml_rows_add_distance(rows, &made, addresses)) return tml_no_memory(in->error);
    }
    return note_targets(in, &row_limits, from_targets, status);
}

static tml_status read_dihedrals(tml_cells *in, const tml_star_frame *frame, const tml_star_loop *loop) {
    tml_rows *rows = &in->draft->rows;
    address_columns atoms[4];
    limit_columns columns;
    limits row_limits = {0};
    size_t from_targets = 0;
    tml_status status = find_limits(in, loop, &columns);
    for (int k = 0; status == TML_OK && k < 4; k++) status = find_address(in, loop, k + 1, &atoms[k]);
    for (size_t row = 0; status == TML_OK && row < loop->row_count; row++) {
        tml_dihedral_row made = {0};
        status = read_limits(in, frame, loop, row, &columns, &row_limits);
        for (int k = 0; status == TML_OK && k < 4; k++) status = read_address(in, loop, row, &atoms[k], &made.atoms[k]);
        if (status != TML_OK) break;
        from_targets += row_limits.from_target;
        made.list = row_limits.list;
        made.id = row_limits.id;
        made.combination = row_limits.combination;
        made.lower = row_limits.lower;
        made.upper = row_limits.upper;
        made.weight = row_limits.weight;
        made.beside = row_limits.beside;
        made.place = row_limits.place;
        if (!tml_rows_add_dihedral(rows, &made)) return tml_no_memory(in->error);
    }
    return note_targets(in, &row_limits, from_targets, status);
}

/* ---- other lists ---- */

static tml_status pass_over(tml_cells *in, const tml_star_loop *loop) {
    static const struct { const char *category, *name; } OTHER[] = {
        {"_nef_chemical_shift", "chemical shifts"},
        {"_nef_rdc_restraint", "residual dipolar couplings"},
        {"_nef_peak", "peaks"},
    };
    const tml_star_value *tag = &in->star->tags[loop->first_tag];
    for (size_t i = 0; i < sizeof OTHER / sizeof *OTHER; i++)
        if (tml_loop_is(in->star, loop, OTHER[i].category))
            return tml_problem_add_note(in->draft->problem, tml_cell_place(in, tag), in->error, "%zu %s are not used", loop->row_count,
                                        OTHER[i].name);
    if (strncasecmp(tag->text, "_chem_comp", 10) == 0) return TML_OK; /* a component dictionary in the same file */
    bool data = strncasecmp(tag->text, "_nef_", 5) != 0; /* the format's own housekeeping needs no mention */
    const char *dot = memchr(tag->text, '.', (size_t)tag->length);
    int shown = dot == NULL ? tag->length : (int)(dot - tag->text);
    return !data ? TML_OK
                 : tml_problem_add_note(in->draft->problem, tml_cell_place(in, tag), in->error, "%zu rows of %.*s are not used", loop->row_count,
                                        shown > 60 ? 60 : shown, tag->text);
}
