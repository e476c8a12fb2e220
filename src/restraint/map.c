/* map.c: from names to atoms.
 *
 *   gathering     rows of one list and id, in the order of their first rows
 *   distances     alternatives, combinations, range
 *   dihedrals     intervals
 *   leftovers     unmapped restraints, open stereo pairs and notes
 */
#include "restraint/map.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "restraint/names.h"
#include "restraint/stereo.h"

static const double PI = 3.14159265358979323846;
/* A limit beyond this is as good as none, Å. */
static const double MOST_DISTANCE = 1e6;
/* Pairs over all restraints: beyond this, one evaluation takes seconds. */
enum { MOST_PAIRS = 1 << 25 };

typedef struct map {
    const tml_rows *rows;
    tml_problem *problem;
    tml_restraints *out;
    tml_error *error;
    size_t distances, alternatives, groups, dihedrals, intervals, unmapped; /* capacities */
    int64_t pairs;          /* so far */
    struct side { int32_t *atoms, count, *members, half; bool open, second, pseudo; } a, b; /* room for the largest residue each */
    tml_stereo_book book;
    bool keep_open; /* x and y are left open */
    tml_pseudo pseudo;
    int32_t centred; /* restraints that run from the centre of a pseudo-atom's group */
    double widened;  /* the most that an upper limit was widened, Å */
    tml_place centred_place;
    bool pseudo_noted, amide_noted;
    char why[512];    /* why the latest row names nothing */
    char reason[512]; /* the same of the restraint's first such row, "" for none */
} map;

/* Rows of one restraint stand together: order[first[k] … first[k+1]-1] are row numbers of restraint k. */
typedef struct gathering { int32_t *order, *first; int32_t count; } gathering;

static bool make_room(map *m);
static tml_status map_distances(map *m);
static tml_status map_dihedrals(map *m);
static tml_status note_open(map *m);

tml_status tml_restraints_map(const tml_rows *rows, const tml_read_options *options, tml_problem *problem, tml_error *error) {
    map m = {.rows = rows, .problem = problem, .out = &problem->restraints, .error = error, .keep_open = !options->sum_stereo_pairs, .pseudo = options->pseudo};
    if (rows->distance_count > INT32_MAX / 2 || rows->dihedral_count > INT32_MAX / 2)
        return tml_fail(error, TML_TOO_LARGE, "too many restraint rows");
    tml_status status = make_room(&m) ? TML_OK : tml_no_memory(error);
    if (status == TML_OK) status = map_distances(&m);
    if (status == TML_OK) status = map_dihedrals(&m);
    if (status == TML_OK) status = note_open(&m);
    tml_stereo_close(&m.book);
    struct side *sides[] = {&m.a, &m.b};
    for (int k = 0; k < 2; k++) {
        free(sides[k]->atoms);
        free(sides[k]->members);
    }
    return status;
}

static bool make_room(map *m) {
    const tml_molecule *molecule = &m->problem->molecule;
    int32_t most = 1;
    for (int32_t i = 0; i < molecule->residue_count; i++)
        if (molecule->residues[i].atom_count > most) most = molecule->residues[i].atom_count;
    struct side *sides[] = {&m->a, &m->b};
    for (int k = 0; k < 2; k++) {
        sides[k]->atoms = tml_alloc((size_t)most, sizeof *sides[k]->atoms);
        sides[k]->members = tml_alloc((size_t)most, sizeof *sides[k]->members);
        if (sides[k]->atoms == NULL || sides[k]->members == NULL) return false;
    }
    return tml_stereo_open(&m->book, molecule, m->out);
}

static tml_status fail_at(map *m, tml_status status, tml_place place, const char *text) {
    const char *file = place.file >= 0 && (size_t)place.file < m->problem->file_count ? m->problem->files[place.file] : "";
    return tml_fail_at(m->error, status, file, place.line, place.column, "%s", text);
}

static void keep_reason(map *m) {
    if (*m->reason == '\0') memcpy(m->reason, m->why, sizeof m->reason);
}

/* ---- gathering ---- */

/* What makes two rows alternatives of one restraint: file, list and id; and two rows of a restraint one combination. Strings are
 * pooled, so that their pointers are their identities. */
typedef struct key { const void *owner; const char *name; int64_t which; } key;

/* Numbers for keys, by open hashing. */
typedef struct numbering { key *keys; int32_t *numbers; size_t slots; } numbering;

static bool numbering_new(numbering *n, size_t most) {
    n->slots = 64;
    while (n->slots < 2 * most) n->slots *= 2;
    n->keys = tml_alloc(n->slots, sizeof *n->keys);
    n->numbers = tml_alloc(n->slots, sizeof *n->numbers);
    return n->keys != NULL && n->numbers != NULL;
}

static void numbering_clear(numbering *n) {
    free(n->keys);
    free(n->numbers);
}

/* The number of a key; a new one gets *next, which goes up. */
static int32_t number_of(numbering *n, key wanted, int32_t *next) {
    uint64_t hash = ((uintptr_t)wanted.owner >> 3) * 31 + ((uintptr_t)wanted.name >> 3) + (uint64_t)wanted.which * 0x2545f4914f6cdd1du;
    size_t at = (hash * 0x9e3779b97f4a7c15u >> 16) & (n->slots - 1);
    while (n->keys[at].name != NULL &&
           (n->keys[at].owner != wanted.owner || n->keys[at].name != wanted.name || n->keys[at].which != wanted.which))
        at = (at + 1) & (n->slots - 1);
    if (n->keys[at].name == NULL) {
        n->keys[at] = wanted;
        n->numbers[at] = (*next)++;
    }
    return n->numbers[at];
}

/* A row without an id of its own is alone: its number takes the place of the file's. */
static key row_key(const char *list, const char *id, bool alone, tml_place place, size_t row) {
    return (key){list, id, alone ? -2 - (int64_t)row : place.file};
}

static key distance_key(const tml_rows *rows, size_t i) {
    const tml_distance_row *row = &rows->distances[i];
    return row_key(row->list, row->id, row->alone, row->place, i);
}

static key dihedral_key(const tml_rows *rows, size_t i) {
    const tml_dihedral_row *row = &rows->dihedrals[i];
    return row_key(row->list, row->id, row->alone, row->place, i);
}

static bool gather(const tml_rows *rows, size_t row_count, key (*key_of)(const tml_rows *, size_t), gathering *out) {
    numbering numbers = {0};
    int32_t *of_row = tml_alloc(row_count, sizeof *of_row);
    out->order = tml_alloc(row_count, sizeof *out->order);
    out->first = tml_alloc(row_count + 2, sizeof *out->first);
    bool room = numbering_new(&numbers, row_count) && of_row != NULL && out->order != NULL && out->first != NULL;
    for (size_t i = 0; room && i < row_count; i++) {
        of_row[i] = number_of(&numbers, key_of(rows, i), &out->count);
        out->first[of_row[i] + 2]++;
    }
    for (int32_t k = 0; room && k < out->count; k++) out->first[k + 2] += out->first[k + 1];
    for (size_t i = 0; room && i < row_count; i++) out->order[out->first[of_row[i] + 1]++] = (int32_t)i;
    numbering_clear(&numbers);
    free(of_row);
    return room;
}

static void gathering_clear(gathering *g) {
    free(g->order);
    free(g->first);
}

/* ---- addresses ---- */

/* Atoms of one address into `side`; none with the reason in m->why. */
static tml_status resolve(map *m, const tml_address *address, struct side *side) {
    const tml_molecule *molecule = &m->problem->molecule;
    int32_t residue = tml_molecule_locate_residue(molecule, address->chain, address->number, m->why, sizeof m->why);
    int32_t *atoms = side->atoms, *count = &side->count;
    *count = 0;
    side->open = side->pseudo = false;
    if (residue < 0) return TML_OK;
    if (*address->residue != '\0' && strcmp(address->residue, molecule->residues[residue].name) != 0) {
        snprintf(m->why, sizeof m->why, "%.32s:%.32s is %.32s in the sequence, %.32s in the restraint", address->chain, address->number,
                 molecule->residues[residue].name, address->residue);
        return TML_OK;
    }
    tml_name_kind kind;
    *count = tml_names_match(molecule, residue, address->atom, atoms, &kind);
    side->open = m->keep_open && kind == TML_NAME_WILD && *count > 1 &&
                 tml_names_stereo(molecule, residue, address->atom, side->members, &side->half, &side->second) &&
                 *count == 2 * side->half;
    if (*count == 0) tml_molecule_suggest(molecule, residue, address->atom, m->why, sizeof m->why);
    side->pseudo = *count > 1 && kind == TML_NAME_PSEUDO;
    if (side->pseudo && m->pseudo == TML_PSEUDO_SUM && !m->pseudo_noted) {
        m->pseudo_noted = true;
        return tml_problem_add_note(m->problem, address->place, m->error,
                                    "pseudo-atoms (%s …) count as the sum over their group; limits are not corrected", address->atom);
    }
    if (*count > 0 && kind == TML_NAME_AMIDE && !m->amide_noted) {
        m->amide_noted = true;
        return tml_problem_add_note(m->problem, address->place, m->error, "%s of %s:%s is taken as %s", address->atom, address->chain,
                                    address->number, molecule->atoms[atoms[0]].name);
    }
    return TML_OK;
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
    const char *reason = tml_strings_add(m->problem->pool, m->reason);
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
    return *text == '\0' ? TML_OK : fail_at(m, TML_BAD_INPUT, row->place, text);
}

/* Atoms that both groups hold; each is in the molecule's order. */
static int32_t shared_atoms(const int32_t *a, int32_t count_a, const int32_t *b, int32_t count_b) {
    int32_t shared = 0;
    for (int32_t i = 0, j = 0; i < count_a && j < count_b;) {
        shared += a[i] == b[j];
        if (a[i] <= b[j])
            i++;
        else
            j++;
    }
    return shared;
}

/* Sides with atoms in common cannot be left open, but for the two members of one pair, which never meet. */
static void settle_open(struct side *a, struct side *b, int32_t same) {
    bool partners = a->open && b->open && a->half == b->half && a->second != b->second &&
                    memcmp(a->members, b->members, 2 * (size_t)a->half * sizeof *a->members) == 0;
    if (same == 0 || partners) return;
    a->open = b->open = false;
}

/* One side into the group array, *first its place there; *stereo and *second tell of its open pair. false without memory. */
static bool add_side(map *m, const struct side *side, int32_t *first, int32_t *stereo, bool *second) {
    *first = add_group(m, side->open ? side->members : side->atoms, side->count);
    *stereo = -1;
    *second = false;
    if (*first < 0) return false;
    if (!side->open) return true;
    bool reversed;
    *stereo = tml_stereo_pair(&m->book, side->members, side->half, &reversed);
    *second = side->second != reversed;
    return *stereo >= 0;
}

/* The pairs of the two groups in m->a and m->b. *whole turns false where there is none. */
static tml_status add_alternative(map *m, const tml_distance_row *row, int32_t combination, bool *whole) {
    struct side a = m->a, b = m->b;
    int32_t same = shared_atoms(a.atoms, a.count, b.atoms, b.count);
    int64_t pairs = (int64_t)a.count * b.count - same;
    settle_open(&a, &b, same);
    /* A centre has no partner that could be exchanged, and takes part in no combination. */
    bool centre = m->pseudo != TML_PSEUDO_SUM && combination < 0;
    if (centre && (a.pseudo || b.pseudo)) a.open = b.open = false;
    if (pairs == 0) {
        char address[128];
        tml_molecule_address(&m->problem->molecule, a.atoms[0], address, sizeof address);
        snprintf(m->why, sizeof m->why, "%s: both sides name the same atom", address);
        *whole = false;
        return TML_OK;
    }
    m->pairs += pairs;
    if (m->pairs > MOST_PAIRS) return fail_at(m, TML_TOO_LARGE, row->place, "up to here the restraints run over more than 33 million pairs of atoms");
    if (!tml_grow(&m->out->alternatives, &m->alternatives, (size_t)m->out->alternative_count + 1, sizeof *m->out->alternatives))
        return tml_no_memory(m->error);
    tml_alternative made = {.count_a = a.count, .count_b = b.count, .pair_count = (int32_t)pairs, .combination = combination};
    if (!add_side(m, &a, &made.first_a, &made.stereo_a, &made.second_a) || !add_side(m, &b, &made.first_b, &made.stereo_b, &made.second_b))
        return tml_no_memory(m->error);
    made.centre_a = centre && a.pseudo;
    made.centre_b = centre && b.pseudo;
    m->out->alternatives[m->out->alternative_count++] = made;
    return TML_OK;
}

/* All alternatives of one row: every address of one side with every address of the other. *whole turns false where an address
 * names nothing. */
static tml_status add_row(map *m, const tml_distance_row *row, int32_t combination, bool *whole) {
    const tml_address *addresses = m->rows->addresses;
    tml_status status = TML_OK;
    *whole = true;
    for (int32_t i = 0; status == TML_OK && i < row->count_a; i++) {
        status = resolve(m, &addresses[row->first_a + i], &m->a);
        if (m->a.count == 0) *whole = false;
        for (int32_t j = 0; status == TML_OK && m->a.count > 0 && j < row->count_b; j++) {
            status = resolve(m, &addresses[row->first_b + j], &m->b);
            if (m->b.count == 0) *whole = false;
            if (status == TML_OK && m->b.count > 0) status = add_alternative(m, row, combination, whole);
            if (!*whole) keep_reason(m);
        }
        if (!*whole) keep_reason(m);
    }
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

static int by_combination(const void *a, const void *b) {
    const tml_alternative *x = a, *y = b;
    if (x->combination != y->combination) return x->combination < y->combination ? -1 : 1;
    return x->first_a < y->first_a ? -1 : x->first_a > y->first_a;
}

/* A combination with a row that names nothing cannot hold as a whole: its other rows go, too. Those of one combination then stand
 * together. */
static void settle_combinations(map *m, tml_distance_restraint *restraint, const bool *broken) {
    int32_t kept = 0, count = m->out->alternative_count - restraint->first_alternative;
    if (count == 0) return;
    tml_alternative *alternatives = &m->out->alternatives[restraint->first_alternative];
    for (int32_t k = 0; k < count; k++)
        if (alternatives[k].combination < 0 || !broken[alternatives[k].combination]) alternatives[kept++] = alternatives[k];
    if (kept > 0) qsort(alternatives, (size_t)kept, sizeof *alternatives, by_combination);
    m->out->alternative_count = restraint->first_alternative + kept;
}

/* Limits as the rows write them: NAN, an open limit, equals itself. */
static bool same_limit(double a, double b) {
    return a == b || (isnan(a) && isnan(b));
}

static bool same_terms(const tml_distance_row *a, const tml_distance_row *b) {
    return same_limit(a->lower, b->lower) && same_limit(a->upper, b->upper) && same_limit(a->weight, b->weight) && a->average == b->average;
}

/* Corrections of upper limits for the way from a group's centre to its atoms, Å, by the number of heavy atoms that carry hydrogens of
 * the group and of hydrogens on each: K. Wüthrich, M. Billeter & W. Braun, J. Mol. Biol. 169 (1983) 949, from memory. */
static const struct { int carriers, hydrogens; double correction; } CORRECTIONS[] = {
    {1, 2, 1.0}, /* CH2, NH2 */
    {1, 3, 1.0}, /* CH3, NH3 */
    {2, 3, 2.4}, /* the methyl groups of Val and Leu */
    {2, 1, 2.0}, /* one kind of proton of a phenyl ring */
    {2, 2, 2.2}, /* the amino groups of Arg */
    {5, 1, 2.4}, {4, 1, 2.4}, /* all of a ring of Phe, Tyr */
};

static double correction_of(const tml_molecule *molecule, const int32_t *atoms, int32_t count) {
    int32_t carriers[8], found = 0;
    for (int32_t i = 0; i < count; i++) {
        int32_t first = molecule->neighbour_first[atoms[i]], k = 0;
        if (first == molecule->neighbour_first[atoms[i] + 1]) return 0;
        while (k < found && carriers[k] != molecule->neighbours[first]) k++;
        if (k == found && found < (int32_t)(sizeof carriers / sizeof *carriers)) carriers[found++] = molecule->neighbours[first];
    }
    for (size_t c = 0; c < sizeof CORRECTIONS / sizeof *CORRECTIONS; c++)
        if (CORRECTIONS[c].carriers == found && CORRECTIONS[c].hydrogens * found == count) return CORRECTIONS[c].correction;
    return 0;
}

/* Count what runs from centres, and widen its upper limit where that is asked: by the most that one of its alternatives needs. */
static void centre_pseudo_atoms(map *m, tml_distance_restraint *restraint) {
    const tml_molecule *molecule = &m->problem->molecule;
    double most = 0;
    bool any = false;
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++) {
        const tml_alternative *alternative = &m->out->alternatives[k];
        double a = alternative->centre_a ? correction_of(molecule, &m->out->group_atoms[alternative->first_a], alternative->count_a) : 0;
        double b = alternative->centre_b ? correction_of(molecule, &m->out->group_atoms[alternative->first_b], alternative->count_b) : 0;
        any = any || tml_alternative_centred(alternative);
        most = fmax(most, a + b);
    }
    if (!any) return;
    if (m->centred++ == 0) m->centred_place = restraint->place;
    if (m->pseudo != TML_PSEUDO_CORRECTED || isinf(restraint->upper)) return;
    restraint->upper += most;
    m->widened = fmax(m->widened, most);
}

static tml_status map_distance(map *m, const int32_t *order, int32_t row_count, numbering *combinations, bool *broken) {
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
    int32_t combination_count = 0, lost = 0, differing = 0;
    *m->reason = '\0';
    memset(broken, 0, (size_t)row_count * sizeof *broken);
    for (int32_t k = 0; k < row_count; k++) {
        const tml_distance_row *row = &m->rows->distances[order[k]];
        bool whole = true;
        int32_t combination = -1;
        if (*row->combination != '\0') combination = number_of(combinations, (key){first, row->combination, 0}, &combination_count);
        tml_status status = check_distance(m, row);
        if (status == TML_OK) status = add_row(m, row, combination, &whole);
        if (status != TML_OK) return status;
        lost += !whole;
        if (!whole && combination >= 0) broken[combination] = true;
        differing += !same_terms(row, first);
    }
    if (combination_count > 0) settle_combinations(m, restraint, broken);
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
    centre_pseudo_atoms(m, restraint);
    tml_status status = TML_OK;
    if (lost > 0)
        status = tml_problem_add_note(m->problem, first->place, m->error, "restraint %s: %d of its %d rows name what is not there and are left out%s: %s",
                                      first->id, lost, row_count, combination_count > 0 ? ", their combinations with them" : "", m->reason);
    if (status == TML_OK && differing > 0)
        status = tml_problem_add_note(m->problem, first->place, m->error, "restraint %s: its rows differ in limits or weight; the first row's count",
                                      first->id);
    return status;
}

static tml_status map_distances(map *m) {
    gathering g = {0};
    numbering combinations = {0};
    size_t row_count = m->rows->distance_count;
    bool *broken = tml_alloc(row_count, sizeof *broken);
    bool room = broken != NULL && numbering_new(&combinations, row_count) && gather(m->rows, row_count, distance_key, &g);
    tml_status status = room ? TML_OK : tml_no_memory(m->error);
    for (int32_t k = 0; status == TML_OK && k < g.count; k++)
        status = map_distance(m, &g.order[g.first[k]], g.first[k + 1] - g.first[k], &combinations, broken);
    gathering_clear(&g);
    numbering_clear(&combinations);
    free(broken);
    return status;
}

/* ---- dihedrals ---- */

/* One interval, radians, from lower upwards; *whole is false where an atom is missing, *open where there is no restriction. */
static tml_status add_interval(map *m, const tml_dihedral_row *row, bool *whole, bool *open) {
    tml_dihedral_interval made = {0};
    *whole = true;
    *open = isnan(row->lower) || isnan(row->upper) || row->upper - row->lower >= 360;
    if (!(row->weight >= 0) || isinf(row->weight)) return fail_at(m, TML_BAD_INPUT, row->place, "a weight must be 0 or more");
    if (fabs(row->lower) > 1e6 || fabs(row->upper) > 1e6) return fail_at(m, TML_BAD_INPUT, row->place, "a dihedral limit beyond 1,000,000°");
    for (int k = 0; k < 4; k++) {
        tml_status status = resolve(m, &row->atoms[k], &m->a);
        const int32_t *atoms = m->a.atoms, count = m->a.count;
        if (status != TML_OK) return status;
        if (count > 1) snprintf(m->why, sizeof m->why, "%.32s means %d atoms; a dihedral needs one", row->atoms[k].atom, count);
        if (count != 1) {
            *whole = false;
            keep_reason(m);
            return TML_OK;
        }
        made.atoms[k] = atoms[0];
        for (int l = 0; l < k; l++)
            if (made.atoms[l] == atoms[0]) return fail_at(m, TML_BAD_INPUT, row->atoms[k].place, "the same atom twice in one dihedral");
    }
    if (*open) return TML_OK;
    double width = fmod(row->upper - row->lower, 360.0);
    if (width < 0) width += 360.0;
    made.lower = row->lower * PI / 180.0;
    made.upper = made.lower + width * PI / 180.0;
    if (!tml_grow(&m->out->intervals, &m->intervals, (size_t)m->out->interval_count + 1, sizeof *m->out->intervals))
        return tml_no_memory(m->error);
    m->out->intervals[m->out->interval_count++] = made;
    return TML_OK;
}

static tml_status map_dihedral(map *m, const int32_t *order, int32_t row_count) {
    const tml_dihedral_row *first = &m->rows->dihedrals[order[0]];
    tml_restraints *out = m->out;
    int32_t first_interval = out->interval_count;
    bool any_open = false;
    int32_t lost = 0;
    *m->reason = '\0';
    for (int32_t k = 0; k < row_count; k++) {
        bool whole, open;
        tml_status status = add_interval(m, &m->rows->dihedrals[order[k]], &whole, &open);
        if (status != TML_OK) return status;
        any_open = any_open || (whole && open);
        lost += !whole;
    }
    if (any_open) {
        out->interval_count = first_interval;
        return tml_problem_add_note(m->problem, first->place, m->error, "dihedral %s leaves a limit open or allows every angle and is left out",
                                    first->id);
    }
    if (out->interval_count == first_interval) return add_unmapped(m, first->list, first->id, first->place, true);
    if (!tml_grow(&out->dihedrals, &m->dihedrals, (size_t)out->dihedral_count + 1, sizeof *out->dihedrals)) return tml_no_memory(m->error);
    out->dihedrals[out->dihedral_count++] = (tml_dihedral_restraint){.list = first->list,
                                                                     .id = first->id,
                                                                     .weight = first->weight,
                                                                     .first_interval = first_interval,
                                                                     .interval_count = out->interval_count - first_interval,
                                                                     .place = first->place};
    if (lost == 0) return TML_OK;
    return tml_problem_add_note(m->problem, first->place, m->error, "dihedral %s: %d of its %d rows name what is not there and are left out: %s",
                                first->id, lost, row_count, m->reason);
}

static tml_status map_dihedrals(map *m) {
    gathering g = {0};
    tml_status status = gather(m->rows, m->rows->dihedral_count, dihedral_key, &g) ? TML_OK : tml_no_memory(m->error);
    for (int32_t k = 0; status == TML_OK && k < g.count; k++) status = map_dihedral(m, &g.order[g.first[k]], g.first[k + 1] - g.first[k]);
    gathering_clear(&g);
    return status;
}

/* ---- open stereo pairs ---- */

static tml_status note_open(map *m) {
    tml_status status = TML_OK;
    if (m->centred > 0 && m->pseudo == TML_PSEUDO_CORRECTED)
        status = tml_problem_add_note(m->problem, m->centred_place, m->error,
                                      "%d restraints with pseudo-atoms run from the centres of their groups, and their upper limits are widened by "
                                      "the published corrections, up to %.1f Å",
                                      m->centred, m->widened);
    else if (m->centred > 0)
        status = tml_problem_add_note(m->problem, m->centred_place, m->error,
                                      "%d restraints with pseudo-atoms run from the centres of their groups; limits are not corrected", m->centred);
    if (status != TML_OK) return status;
    if (m->out->stereo_count == 0) return TML_OK;
    return tml_problem_add_note(m->problem, (tml_place){-1, 0, 0}, m->error,
                                "%d stereo pair%s named with x and y; each model takes the assignment that it violates least",
                                m->out->stereo_count, m->out->stereo_count == 1 ? " is" : "s are");
}
