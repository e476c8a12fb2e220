/* map.c: from names to atoms.
 *
 *   gathering     rows of one list and id, in the order of their first rows
 *   distances     alternatives, combinations, range
 *   dihedrals     intervals
 *   leftovers     unmapped restraints and notes
 */
#include "restraint/map.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "restraint/names.h"

static const double PI = 3.14159265358979323846;
/* A limit beyond this is as good as none, Å. */
static const double MOST_DISTANCE = 1e6;
enum { GROUP_ROOM = 4096, MOST_PAIRS = 1 << 24 };

typedef struct map {
    const tml_rows *rows;
    tml_problem *problem;
    tml_restraints *out;
    tml_error *error;
    size_t distances, alternatives, groups, dihedrals, intervals, unmapped; /* capacities */
    bool pseudo_noted, amide_noted;
    char why[512];
} map;

/* Rows of one restraint stand together: order[first[k] … first[k+1]-1] are row numbers of restraint k. */
typedef struct gathering { int32_t *order, *first; int32_t count; } gathering;

static tml_status map_distances(map *m);
static tml_status map_dihedrals(map *m);

tml_status tml_restraints_map(const tml_rows *rows, tml_problem *problem, tml_error *error) {
    map m = {.rows = rows, .problem = problem, .out = &problem->restraints, .error = error};
    if (rows->distance_count > INT32_MAX / 2 || rows->dihedral_count > INT32_MAX / 2)
        return tml_fail(error, TML_TOO_LARGE, "too many restraint rows");
    tml_status status = map_distances(&m);
    return status == TML_OK ? map_dihedrals(&m) : status;
}

static tml_status fail_at(map *m, tml_place place, const char *text) {
    const char *file = place.file >= 0 && (size_t)place.file < m->problem->file_count ? m->problem->files[place.file] : "";
    return tml_fail_at(m->error, TML_BAD_INPUT, file, place.line, place.column, "%s", text);
}

/* ---- gathering ---- */

/* list and id are pooled, so their pointers are their identities. */
static size_t slot_of(const void *const (*keys)[2], size_t slots, const char *list, const char *id) {
    size_t at = (((size_t)list >> 3) * 31 + ((size_t)id >> 3)) * 0x9e3779b97f4a7c15u >> 16 & (slots - 1);
    while (keys[at][1] != NULL && (keys[at][0] != list || keys[at][1] != id)) at = (at + 1) & (slots - 1);
    return at;
}

/* list_id gives row number i's list and id. */
static bool gather(size_t row_count, const void *rows, size_t row_size, gathering *out) {
    size_t slots = 64;
    while (slots < 2 * row_count) slots *= 2;
    const void *(*keys)[2] = tml_alloc(slots, sizeof *keys);
    int32_t *number = tml_alloc(slots, sizeof *number), *of_row = tml_alloc(row_count, sizeof *of_row);
    out->order = tml_alloc(row_count, sizeof *out->order);
    out->first = tml_alloc(row_count + 2, sizeof *out->first);
    bool room = keys != NULL && number != NULL && of_row != NULL && out->order != NULL && out->first != NULL;
    for (size_t i = 0; room && i < row_count; i++) {
        /* Both kinds of row begin with list and id. */
        const char *const *names = (const char *const *)((const char *)rows + i * row_size);
        size_t at = slot_of((const void *const (*)[2])keys, slots, names[0], names[1]);
        if (keys[at][1] == NULL) {
            keys[at][0] = names[0];
            keys[at][1] = names[1];
            number[at] = out->count++;
        }
        of_row[i] = number[at];
        out->first[of_row[i] + 2]++;
    }
    for (int32_t k = 0; room && k < out->count; k++) out->first[k + 2] += out->first[k + 1];
    for (size_t i = 0; room && i < row_count; i++) out->order[out->first[of_row[i] + 1]++] = (int32_t)i;
    free(keys);
    free(number);
    free(of_row);
    return room;
}

static void gathering_clear(gathering *g) {
    free(g->order);
    free(g->first);
}

/* ---- addresses ---- */

/* Atoms of one address into `atoms`; 0 with the reason in m->why where there are none. */
static int32_t resolve(map *m, const tml_address *address, int32_t *atoms) {
    const tml_molecule *molecule = &m->problem->molecule;
    int32_t residue = tml_molecule_locate_residue(molecule, address->chain, address->number, m->why, sizeof m->why);
    if (residue < 0) return 0;
    if (*address->residue != '\0' && strcmp(address->residue, molecule->residues[residue].name) != 0) {
        snprintf(m->why, sizeof m->why, "%s:%s is %s in the sequence, %s in the restraint", address->chain, address->number,
                 molecule->residues[residue].name, address->residue);
        return 0;
    }
    tml_name_kind kind;
    int32_t count = tml_names_match(molecule, residue, address->atom, atoms, GROUP_ROOM, &kind);
    if (count == 0) {
        tml_molecule_suggest(molecule, residue, address->atom, m->why, sizeof m->why);
        return 0;
    }
    if (kind == TML_NAME_PSEUDO && !m->pseudo_noted) {
        m->pseudo_noted = true;
        if (tml_problem_add_note(m->problem, address->place, m->error,
                                 "pseudo-atoms (%s …) count as the sum over their group; limits are not corrected", address->atom) != TML_OK)
            return -1;
    }
    if (kind == TML_NAME_AMIDE && !m->amide_noted) {
        m->amide_noted = true;
        if (tml_problem_add_note(m->problem, address->place, m->error, "%s of %s:%s is taken as %s", address->atom, address->chain,
                                 address->number, molecule->atoms[atoms[0]].name) != TML_OK)
            return -1;
    }
    return count;
}

/* Append atoms to the group array; -1 without memory. */
static int32_t add_group(map *m, const int32_t *atoms, int32_t count) {
    int32_t first = m->out->group_atom_count;
    if (count > INT32_MAX - first) return -1;
    if (!tml_grow(&m->out->group_atoms, &m->groups, (size_t)first + (size_t)count, sizeof *atoms)) return -1;
    memcpy(&m->out->group_atoms[first], atoms, (size_t)count * sizeof *atoms);
    m->out->group_atom_count += count;
    return first;
}

static tml_status add_unmapped(map *m, const char *list, const char *id, tml_place place, bool dihedral) {
    const char *reason = tml_strings_add(m->problem->pool, m->why);
    if (reason == NULL || !tml_grow(&m->out->unmapped, &m->unmapped, (size_t)m->out->unmapped_count + 1, sizeof *m->out->unmapped))
        return tml_no_memory(m->error);
    m->out->unmapped[m->out->unmapped_count++] = (tml_unmapped){list, id, reason, place, dihedral};
    return TML_OK;
}

/* ---- distances ---- */

static tml_status check_distance(map *m, const tml_distance_row *row) {
    char text[160] = "";
    if (row->lower < 0 || row->upper < 0)
        snprintf(text, sizeof text, "restraint %s: a distance of %g Å", row->id, row->lower < 0 ? row->lower : row->upper);
    else if (row->upper < row->lower)
        snprintf(text, sizeof text, "restraint %s: the upper limit %g is below the lower limit %g", row->id, row->upper, row->lower);
    else if (isinf(row->lower))
        snprintf(text, sizeof text, "restraint %s: the lower limit is infinite", row->id);
    else if (!(row->weight >= 0) || isinf(row->weight))
        snprintf(text, sizeof text, "restraint %s: a weight of %g; it must be 0 or more", row->id, row->weight);
    return *text == '\0' ? TML_OK : fail_at(m, row->place, text);
}

/* A combination of one restraint; broken where a row of it names nothing. */
typedef struct together { const char *name; bool broken; } together;

/* Number of a combination within its restraint, by its name. */
static int32_t combination_of(together *known, int32_t *count, const char *name) {
    if (*name == '\0') return -1;
    for (int32_t k = 0; k < *count; k++)
        if (known[k].name == name) return k;
    known[*count] = (together){.name = name};
    return (*count)++;
}

static tml_status add_alternative(map *m, const int32_t *a, int32_t count_a, const int32_t *b, int32_t count_b, int32_t combination,
                                  bool *added) {
    int32_t same = 0;
    for (int32_t i = 0; i < count_a; i++)
        for (int32_t j = 0; j < count_b; j++) same += a[i] == b[j];
    *added = false;
    if ((int64_t)count_a * count_b - same == 0) {
        char address[128];
        tml_molecule_address(&m->problem->molecule, a[0], address, sizeof address);
        snprintf(m->why, sizeof m->why, "%s: both sides name the same atom", address);
        return TML_OK;
    }
    if ((int64_t)count_a * count_b > MOST_PAIRS) return tml_fail(m->error, TML_TOO_LARGE, "a restraint over more than %d pairs", MOST_PAIRS);
    if (!tml_grow(&m->out->alternatives, &m->alternatives, (size_t)m->out->alternative_count + 1, sizeof *m->out->alternatives))
        return tml_no_memory(m->error);
    int32_t first_a = add_group(m, a, count_a), first_b = first_a < 0 ? -1 : add_group(m, b, count_b);
    if (first_b < 0) return tml_no_memory(m->error);
    m->out->alternatives[m->out->alternative_count++] =
        (tml_alternative){first_a, count_a, first_b, count_b, count_a * count_b - same, combination, true};
    *added = true;
    return TML_OK;
}

/* All alternatives of one row: every address of one side with every address of the other. *whole turns false where an address
 * names nothing. */
static tml_status add_row(map *m, const tml_distance_row *row, int32_t combination, bool *whole) {
    int32_t *atoms = malloc(2 * GROUP_ROOM * sizeof *atoms);
    if (atoms == NULL) return tml_no_memory(m->error);
    tml_status status = TML_OK;
    for (int32_t i = 0; status == TML_OK && i < row->count_a; i++) {
        int32_t count_a = resolve(m, &m->rows->addresses[row->first_a + i], atoms);
        for (int32_t j = 0; status == TML_OK && j < row->count_b; j++) {
            int32_t count_b = count_a <= 0 ? count_a : resolve(m, &m->rows->addresses[row->first_b + j], atoms + GROUP_ROOM);
            bool added = false;
            if (count_b < 0) status = TML_NO_MEMORY;
            if (count_b > 0) status = add_alternative(m, atoms, count_a, atoms + GROUP_ROOM, count_b, combination, &added);
            if (!added) *whole = false;
        }
    }
    free(atoms);
    return status;
}

static tml_range range_of(const map *m, const tml_distance_restraint *restraint) {
    const tml_molecule *molecule = &m->problem->molecule;
    tml_range nearest = TML_RANGE_INTER_CHAIN;
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++) {
        const tml_alternative *alternative = &m->out->alternatives[k];
        const tml_residue *a = &molecule->residues[molecule->atoms[m->out->group_atoms[alternative->first_a]].residue];
        const tml_residue *b = &molecule->residues[molecule->atoms[m->out->group_atoms[alternative->first_b]].residue];
        int64_t apart = llabs((int64_t)a->sequence - b->sequence);
        tml_range range = a->chain_index != b->chain_index ? TML_RANGE_INTER_CHAIN
                          : a == b                         ? TML_RANGE_INTRA
                          : apart <= 1                     ? TML_RANGE_SEQUENTIAL
                          : apart < 5                      ? TML_RANGE_MEDIUM
                                                           : TML_RANGE_LONG;
        if (range < nearest) nearest = range;
    }
    return nearest;
}

/* A combination with a row that names nothing cannot hold as a whole: its other rows go, too. Returns how many went. */
static int32_t drop_broken(map *m, const tml_distance_restraint *restraint, const together *known) {
    int32_t kept = restraint->first_alternative, count = m->out->alternative_count;
    for (int32_t k = kept; k < count; k++) {
        int32_t of = m->out->alternatives[k].combination;
        if (of < 0 || !known[of].broken) m->out->alternatives[kept++] = m->out->alternatives[k];
    }
    m->out->alternative_count = kept;
    return count - kept;
}

/* Limits as the rows write them: NAN, an open limit, equals itself. */
static bool same_limit(double a, double b) {
    return a == b || (isnan(a) && isnan(b));
}

static tml_status map_distance(map *m, const int32_t *order, int32_t row_count, together *known) {
    const tml_distance_row *first = &m->rows->distances[order[0]];
    tml_restraints *out = m->out;
    if (!tml_grow(&out->distances, &m->distances, (size_t)out->distance_count + 1, sizeof *out->distances)) return tml_no_memory(m->error);
    tml_distance_restraint *restraint = &out->distances[out->distance_count];
    *restraint = (tml_distance_restraint){.list = first->list,
                                          .id = first->id,
                                          .lower = isnan(first->lower) ? 0 : first->lower,
                                          .upper = isnan(first->upper) || first->upper > MOST_DISTANCE ? INFINITY : first->upper,
                                          .weight = first->weight,
                                          .first_alternative = out->alternative_count,
                                          .average = first->average,
                                          .place = first->place};
    int32_t combinations = 0, lost = 0, differing = 0;
    for (int32_t k = 0; k < row_count; k++) {
        const tml_distance_row *row = &m->rows->distances[order[k]];
        bool whole = true;
        tml_status status = check_distance(m, row);
        int32_t which = combination_of(known, &combinations, row->combination);
        if (status == TML_OK) status = add_row(m, row, which, &whole);
        if (status != TML_OK) return status == TML_NO_MEMORY ? tml_no_memory(m->error) : status;
        lost += !whole;
        if (!whole && which >= 0) known[which].broken = true;
        differing += !same_limit(row->lower, first->lower) || !same_limit(row->upper, first->upper);
    }
    lost += drop_broken(m, restraint, known);
    restraint->alternative_count = out->alternative_count - restraint->first_alternative;
    if (restraint->alternative_count == 0) return add_unmapped(m, first->list, first->id, first->place, false);
    if (isnan(first->lower) && isnan(first->upper)) {
        out->alternative_count = restraint->first_alternative;
        return tml_problem_add_note(m->problem, first->place, m->error, "restraint %s has no limits and is left out", first->id);
    }
    out->distance_count++;
    for (int32_t k = restraint->first_alternative; k < out->alternative_count; k++) {
        restraint->pair_count += out->alternatives[k].pair_count;
        restraint->combined = restraint->combined || out->alternatives[k].combination >= 0;
    }
    restraint->range = range_of(m, restraint);
    tml_status status = TML_OK;
    if (lost > 0)
        status = tml_problem_add_note(m->problem, first->place, m->error, "restraint %s: %d of its %d alternatives are left out: %s",
                                      first->id, lost, row_count, m->why);
    if (status == TML_OK && differing > 0)
        status = tml_problem_add_note(m->problem, first->place, m->error, "restraint %s: its rows differ in limits; the first row's count",
                                      first->id);
    return status;
}

static tml_status map_distances(map *m) {
    gathering g = {0};
    together *known = tml_alloc(m->rows->distance_count + 1, sizeof *known);
    tml_status status = known != NULL && gather(m->rows->distance_count, m->rows->distances, sizeof *m->rows->distances, &g)
                            ? TML_OK
                            : tml_no_memory(m->error);
    for (int32_t k = 0; status == TML_OK && k < g.count; k++)
        status = map_distance(m, &g.order[g.first[k]], g.first[k + 1] - g.first[k], known);
    gathering_clear(&g);
    free(known);
    return status;
}

/* ---- dihedrals ---- */

/* One interval, radians, from lower upwards; *whole is false where an atom is missing, *open where there is no restriction. */
static tml_status add_interval(map *m, const tml_dihedral_row *row, bool *whole, bool *open) {
    tml_dihedral_interval made = {0};
    *whole = true;
    *open = isnan(row->lower) || isnan(row->upper) || row->upper - row->lower >= 360;
    if (!(row->weight >= 0) || isinf(row->weight)) return fail_at(m, row->place, "a weight must be 0 or more");
    if (fabs(row->lower) > 1e6 || fabs(row->upper) > 1e6) return fail_at(m, row->place, "a dihedral limit beyond 1,000,000°");
    for (int k = 0; k < 4; k++) {
        int32_t atoms[GROUP_ROOM];
        int32_t count = resolve(m, &row->atoms[k], atoms);
        if (count < 0) return TML_NO_MEMORY;
        if (count > 1) snprintf(m->why, sizeof m->why, "%s means %d atoms; a dihedral needs one", row->atoms[k].atom, count);
        if (count != 1) {
            *whole = false;
            return TML_OK;
        }
        made.atoms[k] = atoms[0];
        for (int l = 0; l < k; l++)
            if (made.atoms[l] == atoms[0]) return fail_at(m, row->atoms[k].place, "the same atom twice in one dihedral");
    }
    if (*open) return TML_OK;
    double width = fmod(row->upper - row->lower, 360.0);
    if (width < 0) width += 360.0;
    made.lower = row->lower * PI / 180.0;
    made.upper = made.lower + width * PI / 180.0;
    if (!tml_grow(&m->out->intervals, &m->intervals, (size_t)m->out->interval_count + 1, sizeof *m->out->intervals)) return TML_NO_MEMORY;
    m->out->intervals[m->out->interval_count++] = made;
    return TML_OK;
}

static tml_status map_dihedral(map *m, const int32_t *order, int32_t row_count) {
    const tml_dihedral_row *first = &m->rows->dihedrals[order[0]];
    tml_restraints *out = m->out;
    int32_t first_interval = out->interval_count;
    bool any_open = false;
    for (int32_t k = 0; k < row_count; k++) {
        bool whole, open;
        tml_status status = add_interval(m, &m->rows->dihedrals[order[k]], &whole, &open);
        if (status != TML_OK) return status == TML_NO_MEMORY ? tml_no_memory(m->error) : status;
        any_open = any_open || (whole && open);
    }
    if (any_open) {
        out->interval_count = first_interval;
        return tml_problem_add_note(m->problem, first->place, m->error, "dihedral %s allows every angle and is left out", first->id);
    }
    if (out->interval_count == first_interval) return add_unmapped(m, first->list, first->id, first->place, true);
    if (!tml_grow(&out->dihedrals, &m->dihedrals, (size_t)out->dihedral_count + 1, sizeof *out->dihedrals)) return tml_no_memory(m->error);
    out->dihedrals[out->dihedral_count++] = (tml_dihedral_restraint){.list = first->list,
                                                                     .id = first->id,
                                                                     .weight = first->weight,
                                                                     .first_interval = first_interval,
                                                                     .interval_count = out->interval_count - first_interval,
                                                                     .place = first->place};
    return TML_OK;
}

static tml_status map_dihedrals(map *m) {
    gathering g = {0};
    tml_status status = gather(m->rows->dihedral_count, m->rows->dihedrals, sizeof *m->rows->dihedrals, &g) ? TML_OK : tml_no_memory(m->error);
    for (int32_t k = 0; status == TML_OK && k < g.count; k++) status = map_dihedral(m, &g.order[g.first[k]], g.first[k + 1] - g.first[k]);
    gathering_clear(&g);
    return status;
}
