#include "restraint/difference.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"

/* Contents: atoms that correspond - restraints as keys - partners by key - distances - dihedrals */

/* Limits that agree so far are the same: what files round to. Å and radians. */
static const double SAME_LIMIT = 1e-3, SAME_ANGLE = 2e-4;

/* A restraint's meaning as sorted 64-bit words: pairs (of one problem's atoms), with what tells combinations apart. */
typedef struct meaning { int32_t first, count; int32_t restraint; uint64_t pairs, residues; } meaning; /* hashes of words and residue pairs */

typedef struct side {
    const tml_problem *problem;
    const int32_t *to_one;   /* per atom: the first problem's atom (or, beyond those, one of its own) */
    const int32_t *residue_to_one;
    meaning *meanings; int32_t count;
    uint64_t *words; size_t word_count, word_capacity;
    bool *taken;
} side;

static tml_status match_atoms(tml_difference *out, int32_t **to_one, int32_t **residue_to_one, tml_error *error);
static bool compare_distances(tml_difference *out, const int32_t *to_one, const int32_t *residue_to_one);
static bool compare_dihedrals(tml_difference *out, const int32_t *to_one);

tml_status tml_difference_find(const tml_problem *one, const tml_problem *other, tml_difference *out, tml_error *error) {
    *out = (tml_difference){.one = one, .other = other, .first_only_one = -1, .first_only_other = -1};
    int32_t *to_one = NULL, *residue_to_one = NULL;
    if (one->molecule.atom_count > INT32_MAX / 2 - other->molecule.atom_count) return tml_fail(error, TML_TOO_LARGE, "too many atoms to compare");
    tml_status status = match_atoms(out, &to_one, &residue_to_one, error);
    if (status == TML_OK && (!compare_distances(out, to_one, residue_to_one) || !compare_dihedrals(out, to_one))) status = tml_no_memory(error);
    free(to_one);
    free(residue_to_one);
    return status;
}

void tml_difference_clear(tml_difference *difference) {
    free(difference->distances);
    free(difference->dihedrals);
    *difference = (tml_difference){0};
}

/* ---- atoms that correspond ---- */

/* The first problem's chain for one of the other's: of the same code, or, where it has none, a free one of the same residues. */
static int32_t chain_for(const tml_molecule *one, const tml_molecule *other, int32_t chain, const bool *taken) {
    const tml_chain *wanted = &other->chains[chain];
    for (int32_t c = 0; c < one->chain_count; c++)
        if (strcmp(one->chains[c].code, wanted->code) == 0) return c;
    for (int32_t c = 0; c < one->chain_count; c++) {
        bool same = !taken[c] && one->chains[c].residue_count == wanted->residue_count;
        for (int32_t k = 0; same && k < wanted->residue_count; k++)
            same = strcmp(one->residues[one->chains[c].first_residue + k].name, other->residues[wanted->first_residue + k].name) == 0;
        if (same) return c;
    }
    return -1;
}

static bool has_bond(const tml_molecule *molecule, int32_t a, int32_t b) {
    for (int32_t k = molecule->neighbour_first[a]; k < molecule->neighbour_first[a + 1]; k++)
        if (molecule->neighbours[k] == b) return true;
    return false;
}

/* Atoms and residues of the other problem that the first one lacks get numbers beyond its own. */
static tml_status match_atoms(tml_difference *out, int32_t **to_one, int32_t **residue_to_one, tml_error *error) {
    const tml_molecule *one = &out->one->molecule, *other = &out->other->molecule;
    bool *taken = tml_alloc((size_t)one->chain_count, sizeof *taken), *found = tml_alloc((size_t)one->atom_count, sizeof *found);
    int32_t *back = tml_alloc((size_t)one->atom_count, sizeof *back);
    *to_one = tml_alloc((size_t)other->atom_count, sizeof **to_one);
    *residue_to_one = tml_alloc((size_t)other->residue_count, sizeof **residue_to_one);
    bool room = taken != NULL && found != NULL && back != NULL && *to_one != NULL && *residue_to_one != NULL;
    for (int32_t c = 0; room && c < other->chain_count; c++) {
        const tml_chain *chain = &other->chains[c];
        int32_t partner = chain_for(one, other, c, taken);
        if (partner >= 0) taken[partner] = true;
        for (int32_t r = chain->first_residue; r < chain->first_residue + chain->residue_count; r++) {
            const tml_residue *residue = &other->residues[r];
            int32_t to = partner < 0 ? -1 : tml_molecule_find_residue(one, one->chains[partner].code, residue->number);
            if (to >= 0 && strcmp(one->residues[to].name, residue->name) != 0) to = -1;
            (*residue_to_one)[r] = to >= 0 ? to : one->residue_count + r;
            for (int32_t i = residue->first_atom; i < residue->first_atom + residue->atom_count; i++) {
                int32_t atom = to < 0 ? -1 : tml_molecule_find_atom(one, to, other->atoms[i].name);
                (*to_one)[i] = atom >= 0 ? atom : one->atom_count + i;
                if (atom >= 0) {
                    found[atom] = true;
                    back[atom] = i;
                } else if (out->atoms_only_other++ == 0) {
                    out->first_only_other = i;
                }
            }
        }
    }
    for (int32_t i = 0; room && i < one->atom_count; i++)
        if (!found[i] && out->atoms_only_one++ == 0) out->first_only_one = i;
    for (int32_t b = 0; room && b < one->bond_count; b++) {
        const tml_bond *bond = &one->bonds[b];
        if (found[bond->a] && found[bond->b]) out->bonds_only_one += !has_bond(other, back[bond->a], back[bond->b]);
    }
    for (int32_t b = 0; room && b < other->bond_count; b++) {
        int32_t a1 = (*to_one)[other->bonds[b].a], b1 = (*to_one)[other->bonds[b].b];
        if (a1 < one->atom_count && b1 < one->atom_count) out->bonds_only_other += !has_bond(one, a1, b1);
    }
    free(taken);
    free(found);
    free(back);
    return room ? TML_OK : tml_no_memory(error);
}

/* ---- restraints as keys ---- */

static uint64_t mix(uint64_t hash, uint64_t word) {
    hash = (hash ^ word) * 0x9e3779b97f4a7c15u;
    return hash ^ hash >> 29;
}

static int by_word(const void *left, const void *right) {
    const uint64_t *l = left, *r = right;
    return *l < *r ? -1 : *l > *r;
}

/* Each word once, in order. */
static int32_t sort_words(uint64_t *words, int32_t count) {
    int32_t kept = 0;
    if (count > 1) qsort(words, (size_t)count, sizeof *words, by_word);
    for (int32_t i = 0; i < count; i++)
        if (kept == 0 || words[kept - 1] != words[i]) words[kept++] = words[i];
    return kept;
}

static uint64_t pair_word(int32_t a, int32_t b) {
    return a < b ? (uint64_t)(uint32_t)a << 32 | (uint32_t)b : (uint64_t)(uint32_t)b << 32 | (uint32_t)a;
}

static int32_t atom_of(const side *s, int32_t atom) {
    return s->to_one == NULL ? atom : s->to_one[atom];
}

static int32_t residue_of(const side *s, int32_t atom) {
    int32_t residue = s->problem->molecule.atoms[atom].residue;
    return s->residue_to_one == NULL ? residue : s->residue_to_one[residue];
}

/* The pairs of residues, each once; the words of them are taken away again. */
static bool hash_residues(side *s, meaning *made) {
    const tml_restraints *restraints = &s->problem->restraints;
    const tml_distance_restraint *restraint = &restraints->distances[made->restraint];
    size_t first = s->word_count;
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++) {
        const tml_alternative *alternative = &restraints->alternatives[k];
        if (!tml_grow(&s->words, &s->word_capacity, s->word_count + 1, sizeof *s->words)) return false;
        s->words[s->word_count++] = pair_word(residue_of(s, restraints->group_atoms[alternative->first_a]),
                                              residue_of(s, restraints->group_atoms[alternative->first_b]));
    }
    if (s->words == NULL) return true; /* a restraint without alternatives */
    int32_t count = sort_words(&s->words[first], (int32_t)(s->word_count - first));
    for (int32_t i = 0; i < count; i++) made->residues = mix(made->residues + 5, s->words[first + (size_t)i]);
    s->word_count = first;
    return true;
}

/* Pairs of all alternatives; that some hold together is told by the hash alone. */
static bool add_meaning(side *s, int32_t index) {
    const tml_restraints *restraints = &s->problem->restraints;
    const tml_distance_restraint *restraint = &restraints->distances[index];
    meaning *made = &s->meanings[s->count++];
    *made = (meaning){.first = (int32_t)s->word_count, .restraint = index};
    uint64_t together = 0;
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++) {
        const tml_alternative *alternative = &restraints->alternatives[k];
        tml_group a, b;
        uint64_t of_alternative = 0;
        tml_alternative_sides(restraints, alternative, NULL, &a, &b);
        if (!tml_grow(&s->words, &s->word_capacity, s->word_count + (size_t)a.count * (size_t)b.count, sizeof *s->words)) return false;
        for (int32_t i = 0; i < a.count; i++)
            for (int32_t j = 0; j < b.count; j++) {
                if (a.atoms[i] == b.atoms[j]) continue;
                uint64_t word = pair_word(atom_of(s, a.atoms[i]), atom_of(s, b.atoms[j]));
                s->words[s->word_count++] = word;
                of_alternative += mix(1, word);
            }
        if (alternative->combination >= 0) together += mix((uint64_t)alternative->combination + 7, of_alternative);
    }
    if (s->words == NULL) return true; /* a restraint without alternatives */
    made->count = sort_words(&s->words[made->first], (int32_t)(s->word_count - (size_t)made->first));
    s->word_count = (size_t)made->first + (size_t)made->count;
    made->pairs = mix(3, together) + (restraint->average ? 11 : 0);
    for (int32_t i = 0; i < made->count; i++) made->pairs = mix(made->pairs, s->words[made->first + i]);
    return hash_residues(s, made);
}

static bool open_side(side *s) {
    size_t count = (size_t)s->problem->restraints.distance_count;
    s->meanings = tml_alloc(count, sizeof *s->meanings);
    s->taken = tml_alloc(count, sizeof *s->taken);
    bool room = s->meanings != NULL && s->taken != NULL;
    for (int32_t i = 0; room && i < s->problem->restraints.distance_count; i++) room = add_meaning(s, i);
    return room;
}

static void close_side(side *s) {
    free(s->meanings);
    free(s->words);
    free(s->taken);
}

/* ---- partners by key ---- */

static int by_pairs(const void *left, const void *right) {
    const meaning *l = left, *r = right;
    if (l->pairs != r->pairs) return l->pairs < r->pairs ? -1 : 1;
    return l->restraint < r->restraint ? -1 : l->restraint > r->restraint;
}

static int by_residues(const void *left, const void *right) {
    const meaning *l = left, *r = right;
    if (l->residues != r->residues) return l->residues < r->residues ? -1 : 1;
    return l->restraint < r->restraint ? -1 : l->restraint > r->restraint;
}

static bool same_limits(const side *a, const meaning *one, const side *b, const meaning *other) {
    const tml_distance_restraint *x = &a->problem->restraints.distances[one->restraint], *y = &b->problem->restraints.distances[other->restraint];
    bool upper = isinf(x->upper) || isinf(y->upper) ? isinf(x->upper) == isinf(y->upper) : fabs(x->upper - y->upper) <= SAME_LIMIT;
    return upper && fabs(x->lower - y->lower) <= SAME_LIMIT && fabs(x->weight - y->weight) <= SAME_LIMIT;
}

/* Whether all words of one are among those of the other; both are sorted. */
static bool is_among(const uint64_t *few, int32_t few_count, const uint64_t *many, int32_t many_count) {
    int32_t j = 0;
    for (int32_t i = 0; i < few_count; i++) {
        while (j < many_count && many[j] < few[i]) j++;
        if (j == many_count || many[j] != few[i]) return false;
    }
    return true;
}

/* Whether two restraints, whose keys agree, are related in this way. */
static bool related(const side *a, const meaning *one, const side *b, const meaning *other, tml_relation relation) {
    const uint64_t *x = &a->words[one->first], *y = &b->words[other->first];
    switch (relation) {
    case TML_SAME: return same_limits(a, one, b, other);
    case TML_OTHER_LIMITS: return true;
    case TML_WITHIN:
        return same_limits(a, one, b, other) && (is_among(x, one->count, y, other->count) || is_among(y, other->count, x, one->count));
    default: return same_limits(a, one, b, other);
    }
}

/* Pair up what is left on both sides, key by key, each with the first partner that is so related. */
static void pair_up(tml_difference *out, side *a, side *b, tml_relation relation) {
    bool fine = relation == TML_SAME || relation == TML_OTHER_LIMITS;
    int (*order)(const void *, const void *) = fine ? by_pairs : by_residues;
    if (a->count > 1) qsort(a->meanings, (size_t)a->count, sizeof *a->meanings, order);
    if (b->count > 1) qsort(b->meanings, (size_t)b->count, sizeof *b->meanings, order);
    int32_t from = 0;
    for (int32_t i = 0; i < a->count; i++) {
        const meaning *one = &a->meanings[i];
        uint64_t key = fine ? one->pairs : one->residues;
        if (a->taken[one->restraint]) continue;
        while (from < b->count && (fine ? b->meanings[from].pairs : b->meanings[from].residues) < key) from++;
        for (int32_t j = from; j < b->count && (fine ? b->meanings[j].pairs : b->meanings[j].residues) == key; j++) {
            const meaning *other = &b->meanings[j];
            if (b->taken[other->restraint] || !related(a, one, b, other, relation)) continue;
            a->taken[one->restraint] = b->taken[other->restraint] = true;
            out->distances[out->distance_count++] = (tml_related){relation, one->restraint, other->restraint};
            out->distance_of[relation]++;
            break;
        }
    }
}

static int by_one(const void *left, const void *right) {
    const tml_related *l = left, *r = right;
    if (l->relation != r->relation) return l->relation < r->relation ? -1 : 1;
    if (l->one != r->one) return l->one < r->one ? -1 : 1;
    return l->other < r->other ? -1 : l->other > r->other;
}

/* ---- distances ---- */

static bool compare_distances(tml_difference *out, const int32_t *to_one, const int32_t *residue_to_one) {
    side a = {.problem = out->one}, b = {.problem = out->other, .to_one = to_one, .residue_to_one = residue_to_one};
    out->distances = tml_alloc((size_t)out->one->restraints.distance_count + (size_t)out->other->restraints.distance_count, sizeof *out->distances);
    bool room = out->distances != NULL && open_side(&a) && open_side(&b);
    for (tml_relation relation = TML_SAME; room && relation <= TML_OTHER_ATOMS; relation++) pair_up(out, &a, &b, relation);
    for (int32_t i = 0; room && i < a.count; i++)
        if (!a.taken[i]) {
            out->distances[out->distance_count++] = (tml_related){TML_ONLY_ONE, i, -1};
            out->distance_of[TML_ONLY_ONE]++;
        }
    for (int32_t i = 0; room && i < b.count; i++)
        if (!b.taken[i]) {
            out->distances[out->distance_count++] = (tml_related){TML_ONLY_OTHER, -1, i};
            out->distance_of[TML_ONLY_OTHER]++;
        }
    if (room && out->distance_count > 1) qsort(out->distances, (size_t)out->distance_count, sizeof *out->distances, by_one);
    close_side(&a);
    close_side(&b);
    return room;
}

/* ---- dihedrals ---- */

/* A dihedral restraint by the atoms of its first interval, in the direction that begins with the lower index. */
typedef struct angle_key { int32_t atoms[4]; int32_t restraint; } angle_key;

static int by_atoms(const void *left, const void *right) {
    const angle_key *l = left, *r = right;
    for (int k = 0; k < 4; k++)
        if (l->atoms[k] != r->atoms[k]) return l->atoms[k] < r->atoms[k] ? -1 : 1;
    return l->restraint < r->restraint ? -1 : l->restraint > r->restraint;
}

static angle_key *angle_keys(const tml_problem *problem, const int32_t *to_one) {
    const tml_restraints *restraints = &problem->restraints;
    angle_key *keys = tml_alloc((size_t)restraints->dihedral_count, sizeof *keys);
    for (int32_t i = 0; keys != NULL && i < restraints->dihedral_count; i++) {
        const int32_t *atoms = restraints->intervals[restraints->dihedrals[i].first_interval].atoms;
        int32_t own[4];
        for (int k = 0; k < 4; k++) own[k] = to_one == NULL ? atoms[k] : to_one[atoms[k]];
        for (int k = 0; k < 4; k++) keys[i].atoms[k] = own[own[0] < own[3] ? k : 3 - k];
        keys[i].restraint = i;
    }
    if (keys != NULL && restraints->dihedral_count > 1) qsort(keys, (size_t)restraints->dihedral_count, sizeof *keys, by_atoms);
    return keys;
}

static bool same_intervals(const tml_problem *one, int32_t i, const tml_problem *other, int32_t j) {
    const double turn = 2 * 3.14159265358979323846;
    const tml_dihedral_restraint *x = &one->restraints.dihedrals[i], *y = &other->restraints.dihedrals[j];
    if (x->interval_count != y->interval_count) return false;
    for (int32_t k = 0; k < x->interval_count; k++) {
        const tml_dihedral_interval *p = &one->restraints.intervals[x->first_interval + k], *q = &other->restraints.intervals[y->first_interval + k];
        if (fabs(remainder(p->lower - q->lower, turn)) > SAME_ANGLE || fabs((p->upper - p->lower) - (q->upper - q->lower)) > SAME_ANGLE) return false;
    }
    return true;
}

static bool same_atoms(const angle_key *l, const angle_key *r) {
    return memcmp(l->atoms, r->atoms, sizeof l->atoms) == 0;
}

static void add_dihedral(tml_difference *out, tml_relation relation, int32_t one, int32_t other) {
    out->dihedrals[out->dihedral_count++] = (tml_related){relation, one, other};
    out->dihedral_of[relation]++;
}

static bool compare_dihedrals(tml_difference *out, const int32_t *to_one) {
    int32_t count = out->one->restraints.dihedral_count, others = out->other->restraints.dihedral_count;
    angle_key *a = angle_keys(out->one, NULL), *b = angle_keys(out->other, to_one);
    bool *taken_a = tml_alloc((size_t)count, sizeof *taken_a), *taken_b = tml_alloc((size_t)others, sizeof *taken_b);
    out->dihedrals = tml_alloc((size_t)count + (size_t)others, sizeof *out->dihedrals);
    bool room = a != NULL && b != NULL && taken_a != NULL && taken_b != NULL && out->dihedrals != NULL;
    for (int pass = 0; room && pass < 2; pass++)
        for (int32_t i = 0, from = 0; i < count; i++) {
            while (from < others && by_atoms(&b[from], &(angle_key){.atoms = {a[i].atoms[0], a[i].atoms[1], a[i].atoms[2], a[i].atoms[3]}, .restraint = -1}) < 0) from++;
            for (int32_t j = from; !taken_a[i] && j < others && same_atoms(&a[i], &b[j]); j++) {
                if (taken_b[j] || (pass == 0 && !same_intervals(out->one, a[i].restraint, out->other, b[j].restraint))) continue;
                taken_a[i] = taken_b[j] = true;
                add_dihedral(out, pass == 0 ? TML_SAME : TML_OTHER_LIMITS, a[i].restraint, b[j].restraint);
            }
        }
    for (int32_t i = 0; room && i < count; i++)
        if (!taken_a[i]) add_dihedral(out, TML_ONLY_ONE, a[i].restraint, -1);
    for (int32_t j = 0; room && j < others; j++)
        if (!taken_b[j]) add_dihedral(out, TML_ONLY_OTHER, -1, b[j].restraint);
    if (room && out->dihedral_count > 1) qsort(out->dihedrals, (size_t)out->dihedral_count, sizeof *out->dihedrals, by_one);
    free(a);
    free(b);
    free(taken_a);
    free(taken_b);
    return room;
}
