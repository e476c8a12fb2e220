#include "input/nmrstar_tree.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "base/memory.h"
#include "molecule/index.h"

/* Contents: nodes - walking them - leaves */

enum { DEPTH_MOST = 32, ATOMS_MOST = 512 };

/* Rows of the three tables by "constraint" and "constraint node". */
typedef struct walk {
    const tml_distance_tree *tree;
    const char *id;        /* of the restraint, pooled */
    tml_index *nodes;      /* (constraint's number, node) to its row */
    tml_index *constraints; /* id to its number */
    int32_t *first_member, *next_member; /* of each node's row: its first row of members; of each such row the next */
    int32_t *value_of;     /* of each node's row: its row of values, -1 */
    bool *seen;            /* per node: visited */
    bool *referred;        /* per node: another one leads to it */
    bool *started;         /* per restraint */
    size_t lost_nodes, lost_rows, lost_leaves, other_limits; /* what is wrong with the trees, for the note at the end */
    double lower, upper;
    bool limited;          /* limits were found on the way */
    tml_place place;
    bool beyond;           /* AND over OR */
    int32_t combinations;  /* so far */
} walk;

static tml_status index_tables(walk *w);
static tml_status read_constraint(walk *w, int32_t number, int32_t root);
static tml_status mark_referred(walk *w);
static tml_status note_faults(walk *w);

static const tml_star_value *cell(const walk *w, const tml_star_loop *loop, size_t row, const char *name) {
    return tml_star_at(w->tree->cells->star, loop, row, tml_star_column(w->tree->cells->star, loop, name));
}

tml_status tml_distance_tree_read(const tml_distance_tree *tree) {
    walk w = {.tree = tree, .nodes = tml_index_new(), .constraints = tml_index_new()};
    size_t count = tree->nodes.row_count;
    w.first_member = tml_alloc(count, sizeof *w.first_member);
    w.value_of = tml_alloc(count, sizeof *w.value_of);
    w.next_member = tml_alloc(tree->members.row_count, sizeof *w.next_member);
    w.seen = tml_alloc(count, sizeof *w.seen);
    w.referred = tml_alloc(count, sizeof *w.referred);
    w.started = tml_alloc(count, sizeof *w.started);
    bool room = w.nodes != NULL && w.constraints != NULL && w.first_member != NULL && w.value_of != NULL && w.next_member != NULL && w.seen != NULL &&
                w.referred != NULL && w.started != NULL;
    tml_status status = room ? index_tables(&w) : tml_no_memory(tree->cells->error);
    if (status == TML_OK) status = mark_referred(&w);
    for (size_t row = 0; status == TML_OK && row < count; row++) {
        /* A restraint begins with the node that no other one leads to. */
        const char *id;
        if (w.seen[row] || w.referred[row]) continue;
        status = tml_cell_text(tree->cells, cell(&w, &tree->nodes, row, "Constraint_ID"), ".", &id);
        int32_t number = status == TML_OK ? tml_index_find(w.constraints, -1, id) : -1;
        if (number < 0 || w.started[number]) continue;
        w.started[number] = true;
        w.id = id;
        w.place = tml_cell_place(tree->cells, cell(&w, &tree->nodes, row, "Constraint_ID"));
        status = read_constraint(&w, number, (int32_t)row);
    }
    if (status == TML_OK) status = note_faults(&w);
    tml_index_free(w.nodes);
    tml_index_free(w.constraints);
    free(w.first_member);
    free(w.next_member);
    free(w.value_of);
    free(w.seen);
    free(w.referred);
    free(w.started);
    return status;
}

/* Nothing of a tree goes without a word. */
static tml_status note_faults(walk *w) {
    for (size_t i = 0; i < w->tree->nodes.row_count; i++) w->lost_nodes += !w->seen[i];
    if (w->lost_nodes + w->lost_rows + w->lost_leaves + w->other_limits == 0) return TML_OK;
    const tml_star_value *tag = &w->tree->cells->star->tags[w->tree->nodes.first_tag];
    return tml_problem_add_note(w->tree->cells->draft->problem, tml_cell_place(w->tree->cells, tag), w->tree->cells->error,
                                "trees of restraints: %zu nodes hang on no other or lead nowhere, %zu rows of members or values belong to no node, "
                                "%zu leaves have not two members; these are left out. %zu nodes have limits other than their restraint's first.",
                                w->lost_nodes, w->lost_rows, w->lost_leaves, w->other_limits);
}

/* ---- nodes ---- */

static int32_t node_of(const walk *w, const tml_star_value *constraint, const tml_star_value *node, tml_status *status) {
    const char *id, *name;
    *status = tml_cell_text(w->tree->cells, constraint, ".", &id);
    if (*status == TML_OK) *status = tml_cell_text(w->tree->cells, node, ".", &name);
    int32_t number = *status == TML_OK ? tml_index_find(w->constraints, -1, id) : -1;
    return number < 0 ? -1 : tml_index_find(w->nodes, number, name);
}

static tml_status index_tables(walk *w) {
    const tml_distance_tree *tree = w->tree;
    int32_t constraints = 0;
    tml_status status = TML_OK;
    if (tree->nodes.row_count > INT32_MAX || tree->members.row_count > INT32_MAX)
        return tml_fail(tree->cells->error, TML_TOO_LARGE, "too many restraint rows");
    for (size_t row = 0; status == TML_OK && row < tree->nodes.row_count; row++) {
        const char *id, *node;
        w->first_member[row] = w->value_of[row] = -1;
        status = tml_cell_text(tree->cells, cell(w, &tree->nodes, row, "Constraint_ID"), ".", &id);
        if (status == TML_OK) status = tml_cell_text(tree->cells, cell(w, &tree->nodes, row, "Node_ID"), ".", &node);
        if (status != TML_OK) return status;
        int32_t number = tml_index_find(w->constraints, -1, id);
        if (number < 0) {
            number = constraints++;
            if (!tml_index_add(w->constraints, -1, id, number)) return tml_no_memory(tree->cells->error);
        }
        if (tml_index_find(w->nodes, number, node) >= 0)
            return tml_cell_expected(tree->cells, cell(w, &tree->nodes, row, "Node_ID"), "a node that its restraint does not have yet");
        if (!tml_index_add(w->nodes, number, node, (int32_t)row)) return tml_no_memory(tree->cells->error);
    }
    for (size_t k = tree->members.row_count; status == TML_OK && k-- > 0;) { /* backwards: chains of rows then run forwards */
        int32_t node = node_of(w, cell(w, &tree->members, k, "Tree_node_member_constraint_ID"),
                               cell(w, &tree->members, k, "Tree_node_member_node_ID"), &status);
        w->lost_rows += node < 0;
        if (status != TML_OK || node < 0) continue;
        w->next_member[k] = w->first_member[node];
        w->first_member[node] = (int32_t)k;
    }
    for (size_t k = 0; status == TML_OK && k < tree->values.row_count; k++) {
        int32_t node = node_of(w, cell(w, &tree->values, k, "Constraint_ID"), cell(w, &tree->values, k, "Tree_node_ID"), &status);
        w->lost_rows += node < 0;
        if (node >= 0) w->other_limits += w->value_of[node] >= 0;
        if (node >= 0 && w->value_of[node] < 0) w->value_of[node] = (int32_t)k;
    }
    return status;
}

/* Which nodes others lead to, by `down` or `right`. */
static tml_status mark_referred(walk *w) {
    static const char *const WAYS[] = {"Down_node_ID", "Right_node_ID"};
    const tml_star_loop *nodes = &w->tree->nodes;
    tml_status status = TML_OK;
    for (size_t row = 0; status == TML_OK && row < nodes->row_count; row++)
        for (int k = 0; status == TML_OK && k < 2; k++) {
            const tml_star_value *to = cell(w, nodes, row, WAYS[k]);
            if (tml_star_is_null(to)) continue;
            int32_t node = node_of(w, cell(w, nodes, row, "Constraint_ID"), to, &status);
            if (node >= 0)
                w->referred[node] = true;
            else
                w->lost_nodes++;
        }
    return status;
}

/* ---- walking them ---- */

static tml_status take_limits(walk *w, int32_t node);
static tml_status add_leaf(walk *w, int32_t node, int32_t combination);
static tml_status visit(walk *w, int32_t number, int32_t node, int depth, int32_t combination);

/* The children of a node, one beside the other. combination: -1 for alternatives. */
static tml_status visit_children(walk *w, int32_t number, int32_t node, int depth, int32_t combination) {
    const tml_star_loop *nodes = &w->tree->nodes;
    const char *name;
    tml_status status = tml_cell_text(w->tree->cells, cell(w, nodes, (size_t)node, "Down_node_ID"), ".", &name);
    int32_t child = status == TML_OK ? tml_index_find(w->nodes, number, name) : -1;
    while (status == TML_OK && child >= 0 && !w->seen[child]) {
        status = visit(w, number, child, depth + 1, combination);
        if (status == TML_OK) status = tml_cell_text(w->tree->cells, cell(w, nodes, (size_t)child, "Right_node_ID"), ".", &name);
        child = status == TML_OK ? tml_index_find(w->nodes, number, name) : -1;
    }
    return status;
}

static tml_status visit(walk *w, int32_t number, int32_t node, int depth, int32_t combination) {
    const tml_star_value *logic = cell(w, &w->tree->nodes, (size_t)node, "Logic_operation");
    w->seen[node] = true;
    if (depth > DEPTH_MOST) return tml_cell_expected(w->tree->cells, logic, "a tree of at most 32 levels");
    tml_status status = take_limits(w, node);
    if (status != TML_OK) return status;
    if (tml_star_is_null(logic)) return add_leaf(w, node, combination);
    if (tml_star_is(logic, "OR")) {
        w->beyond = w->beyond || combination >= 0;
        return visit_children(w, number, node, depth, combination);
    }
    if (!tml_star_is(logic, "AND")) return tml_cell_expected(w->tree->cells, logic, "OR or AND");
    return visit_children(w, number, node, depth, combination >= 0 ? combination : w->combinations++);
}

static tml_status read_constraint(walk *w, int32_t number, int32_t root) {
    tml_rows *rows = &w->tree->cells->draft->rows;
    size_t before = rows->distance_count;
    w->lower = w->upper = NAN;
    w->limited = w->beyond = false;
    w->combinations = 0;
    tml_status status = visit(w, number, root, 0, -1);
    if (status != TML_OK) return status;
    for (size_t i = before; i < rows->distance_count; i++) {
        rows->distances[i].lower = w->lower;
        rows->distances[i].upper = w->upper;
    }
    if (!w->beyond) return TML_OK;
    rows->distance_count = before; /* their addresses stay behind, unused */
    return tml_problem_add_note(w->tree->cells->draft->problem, w->place, w->tree->cells->error,
                                "restraint %s combines alternatives by AND, which is not understood; it is left out", w->id);
}

/* ---- leaves ---- */

/* Limits may stand at any node of a restraint; they hold for all of it. */
static tml_status take_limits(walk *w, int32_t node) {
    const tml_star_loop *values = &w->tree->values;
    double lower, upper;
    if (w->value_of[node] < 0) return TML_OK;
    size_t row = (size_t)w->value_of[node];
    tml_status status = tml_cell_number(w->tree->cells, cell(w, values, row, "Distance_lower_bound_val"), &lower);
    if (status == TML_OK) status = tml_cell_number(w->tree->cells, cell(w, values, row, "Distance_upper_bound_val"), &upper);
    if (status != TML_OK || (isnan(lower) && isnan(upper))) return status;
    if (w->limited) {
        w->other_limits += (!isnan(lower) && lower != w->lower) || (!isnan(upper) && upper != w->upper);
        return TML_OK;
    }
    w->lower = lower < 0 ? 0 : lower;
    w->upper = upper;
    w->limited = true;
    return TML_OK;
}

/* The two sides of a leaf: the atoms of its first member and of the other. */
static tml_status add_leaf(walk *w, int32_t node, int32_t combination) {
    const tml_distance_tree *tree = w->tree;
    tml_address sides[2][ATOMS_MOST], all[2 * ATOMS_MOST];
    int32_t counts[2] = {0};
    const char *first = NULL, *second = NULL;
    bool third = false;
    tml_status status = TML_OK;
    for (int32_t k = w->first_member[node]; status == TML_OK && k >= 0; k = w->next_member[k]) {
        const char *which;
        status = tml_cell_text(tree->cells, cell(w, &tree->members, (size_t)k, "Constraint_tree_node_member_ID"), ".", &which);
        if (first == NULL) first = which;
        int side = which != first;
        if (side == 1 && second == NULL) second = which;
        third = third || (side == 1 && which != second);
        if (counts[side] == ATOMS_MOST)
            return tml_cell_expected(tree->cells, cell(w, &tree->members, (size_t)k, "Constraint_tree_node_member_ID"), "at most 512 atoms a side");
        if (status == TML_OK) status = tree->address(tree->context, &tree->members, (size_t)k, &sides[side][counts[side]++]);
    }
    if (status != TML_OK) return status;
    if (counts[0] == 0 || counts[1] == 0 || third) {
        w->lost_leaves++;
        return TML_OK;
    }
    for (int side = 0; side < 2; side++)
        for (int32_t k = 0; k < counts[side]; k++) all[side * counts[0] + k] = sides[side][k];
    char text[16] = "";
    if (combination >= 0) snprintf(text, sizeof text, "%d", combination + 1);
    tml_distance_row made = {.id = w->id, .count_a = counts[0], .count_b = counts[1], .weight = 1.0, .place = w->place,
                             .combination = tml_strings_add(tree->cells->draft->problem->pool, text)};
    status = tml_cell_text(tree->cells, &tree->frame->name, "", &made.list);
    if (status == TML_OK && (made.combination == NULL || !tml_rows_add_distance(&tree->cells->draft->rows, &made, all)))
        status = tml_no_memory(tree->cells->error);
    return status;
}
