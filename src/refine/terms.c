/* terms.c: makes the flat arrays of terms.h.
 *
 *   springs      bonds, 1-3 distances, distances within planar groups and across known torsions
 *   volumes      all four triples of a tetrahedral centre; flat centres
 *   restraints   sums over pairs, choices, dihedrals
 *   backbones    phi and psi of each residue
 *   contacts     classes of atoms, and the pairs that do not repel each other
 */
#include "refine/terms.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "bounds/bounds.h"

static const double PI = 3.14159265358979323846;

/* Distances known from covalent geometry, by pair: an open-addressing table. */
typedef struct known { uint64_t *keys; double *values; size_t slots, used; } known;

static tml_status make_springs(tml_refiner *refiner, known *table, tml_error *error);
static tml_status make_volumes(tml_refiner *refiner, const known *table, tml_error *error);
static tml_status make_sums(tml_refiner *refiner, tml_error *error);
static tml_status make_torsions(tml_refiner *refiner, tml_error *error);
static tml_status make_backbones(tml_refiner *refiner, tml_error *error);
static tml_status make_contacts(tml_refiner *refiner, const known *table, tml_error *error);

tml_status tml_refiner_new(const tml_problem *problem, tml_refiner **out, tml_error *error) {
    *out = NULL;
    tml_refiner *refiner = tml_alloc(1, sizeof *refiner);
    if (refiner == NULL) return tml_no_memory(error);
    refiner->problem = problem;
    refiner->atom_count = problem->molecule.atom_count;

    known table = {0};
    tml_status status = make_springs(refiner, &table, error);
    if (status == TML_OK) status = make_volumes(refiner, &table, error);
    if (status == TML_OK) status = make_sums(refiner, error);
    if (status == TML_OK) status = make_torsions(refiner, error);
    if (status == TML_OK) status = make_backbones(refiner, error);
    if (status == TML_OK) status = make_contacts(refiner, &table, error);
    free(table.keys);
    free(table.values);
    if (status != TML_OK) {
        tml_refiner_free(refiner);
        return status;
    }
    *out = refiner;
    return TML_OK;
}

void tml_refiner_free(tml_refiner *refiner) {
    if (refiner == NULL) return;
    tml_spring_set *sets[] = {&refiner->bonds, &refiner->angles, &refiner->planars};
    for (int i = 0; i < 3; i++) {
        free(sets[i]->pairs);
        free(sets[i]->length);
    }
    free(refiner->volumes);
    free(refiner->flats);
    free(refiner->sums);
    free(refiner->sum_pairs);
    free(refiner->choices);
    free(refiner->torsions);
    free(refiner->backbones);
    free(refiner->contact_class);
    free(refiner->contact);
    free(refiner->reach);
    free(refiner->near_mask);
    free(refiner->far_first);
    free(refiner->far);
    free(refiner);
}

/* ---- distances known from geometry ---- */

static uint64_t pair_key(int32_t a, int32_t b) {
    uint32_t low = (uint32_t)(a < b ? a : b), high = (uint32_t)(a < b ? b : a);
    return ((uint64_t)low << 32 | high) + 1; /* never 0, the mark of an empty slot */
}

static size_t known_slot(const known *table, uint64_t key) {
    size_t at = (size_t)((key * 0x9e3779b97f4a7c15u) >> 20) & (table->slots - 1);
    while (table->keys[at] != 0 && table->keys[at] != key) at = (at + 1) & (table->slots - 1);
    return at;
}

static bool known_add(known *table, int32_t a, int32_t b, double value) {
    if (table->used * 2 >= table->slots) {
        known larger = {.slots = table->slots == 0 ? 1024 : table->slots * 2};
        larger.keys = tml_alloc(larger.slots, sizeof *larger.keys);
        larger.values = tml_alloc(larger.slots, sizeof *larger.values);
        if (larger.keys == NULL || larger.values == NULL) {
            free(larger.keys);
            free(larger.values);
            return false;
        }
        for (size_t i = 0; i < table->slots; i++)
            if (table->keys[i] != 0) {
                size_t at = known_slot(&larger, table->keys[i]);
                larger.keys[at] = table->keys[i];
                larger.values[at] = table->values[i];
            }
        larger.used = table->used;
        free(table->keys);
        free(table->values);
        *table = larger;
    }
    size_t at = known_slot(table, pair_key(a, b));
    table->used += table->keys[at] == 0;
    table->keys[at] = pair_key(a, b);
    table->values[at] = value;
    return true;
}

static double known_distance(const known *table, int32_t a, int32_t b) {
    if (table->slots == 0) return NAN;
    size_t at = known_slot(table, pair_key(a, b));
    return table->keys[at] == 0 ? NAN : table->values[at];
}

/* ---- springs ---- */

static bool spring_add(tml_spring_set *set, known *table, int32_t a, int32_t b, double length) {
    if (!isnan(known_distance(table, a, b))) return true;
    size_t pairs = (size_t)set->capacity, lengths = (size_t)set->capacity, need = (size_t)set->count + 1;
    if (!tml_grow(&set->pairs, &pairs, need, sizeof *set->pairs)) return false;
    if (!tml_grow(&set->length, &lengths, need, sizeof *set->length)) return false;
    set->capacity = (int32_t)pairs;
    set->pairs[set->count] = (tml_pair){a, b};
    set->length[set->count++] = length;
    return known_add(table, a, b, length);
}

/* Distance a-d across the bond b-c, from the five other distances and the torsion; NAN where one is not known. */
static double across_torsion(const known *table, const tml_torsion *torsion) {
    double ab = known_distance(table, torsion->a, torsion->b), bc = known_distance(table, torsion->b, torsion->c),
           cd = known_distance(table, torsion->c, torsion->d), ac = known_distance(table, torsion->a, torsion->c),
           bd = known_distance(table, torsion->b, torsion->d);
    /* b at the origin, c at (bc, 0): heights and feet of a and d over the axis. */
    double foot_a = (ab * ab + bc * bc - ac * ac) / (2 * bc), foot_d = (bd * bd + bc * bc - cd * cd) / (2 * bc);
    double height_a = sqrt(fmax(ab * ab - foot_a * foot_a, 0)), height_d = sqrt(fmax(bd * bd - foot_d * foot_d, 0));
    double along = foot_a - foot_d;
    return sqrt(along * along + height_a * height_a + height_d * height_d - 2 * height_a * height_d * cos(torsion->angle));
}

/* Fill up to a multiple of four with the dummy pair, at its distance of 1 Å. */
static bool spring_pad(tml_spring_set *set, int32_t atom_count) {
    known none = {0};
    while (set->count % 4 != 0) {
        bool added = spring_add(set, &none, atom_count, atom_count + 1, 1.0);
        free(none.keys);
        free(none.values);
        none = (known){0};
        if (!added) return false;
    }
    return true;
}

static tml_status make_springs(tml_refiner *refiner, known *table, tml_error *error) {
    const tml_molecule *molecule = &refiner->problem->molecule;
    const double KNOWN_TORSION = 10.0 * PI / 180.0; /* wider ones are ranges, not values */
    bool room = true;
    for (int32_t i = 0; room && i < molecule->bond_count; i++) {
        const tml_bond *bond = &molecule->bonds[i];
        room = spring_add(&refiner->bonds, table, bond->a, bond->b, bond->length);
    }
    for (int32_t i = 0; room && i < molecule->angle_count; i++) {
        const tml_angle *angle = &molecule->angles[i];
        double ab = known_distance(table, angle->a, angle->b), bc = known_distance(table, angle->b, angle->c);
        double ac = sqrt(ab * ab + bc * bc - 2 * ab * bc * cos(angle->angle));
        if (!isnan(ac)) room = spring_add(&refiner->angles, table, angle->a, angle->c, ac);
    }
    for (int32_t i = 0; room && i < molecule->plane_count; i++) {
        const tml_plane *plane = &molecule->planes[i];
        const int32_t *atoms = &molecule->plane_atoms[plane->first];
        const double *xy = &molecule->plane_xy[2 * plane->first];
        for (int32_t j = 0; room && plane->has_xy && j < plane->count; j++)
            for (int32_t k = 0; room && k < j; k++)
                room = spring_add(&refiner->planars, table, atoms[k], atoms[j],
                                  hypot(xy[2 * j] - xy[2 * k], xy[2 * j + 1] - xy[2 * k + 1]));
    }
    for (int32_t i = 0; room && i < molecule->torsion_count; i++) {
        const tml_torsion *torsion = &molecule->torsions[i];
        if (torsion->kind != TML_TORSION_FIXED && torsion->kind != TML_TORSION_PEPTIDE) continue;
        double length = torsion->tolerance < KNOWN_TORSION ? across_torsion(table, torsion) : NAN;
        if (!isnan(length)) room = spring_add(&refiner->planars, table, torsion->a, torsion->d, length);
    }
    room = room && spring_pad(&refiner->bonds, refiner->atom_count) && spring_pad(&refiner->angles, refiner->atom_count) &&
           spring_pad(&refiner->planars, refiner->atom_count);
    return room ? TML_OK : tml_no_memory(error);
}

/* ---- volumes ---- */

/* Signed volume of three arms from lengths and the distances between their ends; NAN where one is not known. */
static double ideal_volume(const known *table, int32_t centre, int32_t p, int32_t q, int32_t r) {
    const int32_t arm[3] = {p, q, r};
    double length[3], cosine[3];
    for (int k = 0; k < 3; k++) length[k] = known_distance(table, centre, arm[k]);
    for (int k = 0; k < 3; k++) {
        int i = (k + 1) % 3, j = (k + 2) % 3;
        double d = known_distance(table, arm[i], arm[j]);
        cosine[k] = (length[i] * length[i] + length[j] * length[j] - d * d) / (2 * length[i] * length[j]);
    }
    double gram = 1 + 2 * cosine[0] * cosine[1] * cosine[2] - cosine[0] * cosine[0] - cosine[1] * cosine[1] - cosine[2] * cosine[2];
    return isnan(gram) ? NAN : length[0] * length[1] * length[2] * sqrt(fmax(gram, 0));
}

/* A centre whose arms have no known geometry (a sheet's `chiral`): unit-like volume of the arms' present lengths is not
 * known either, so the sign is asked for with a volume that tetrahedral single bonds have. */
static const double USUAL_VOLUME = 2.0;

static tml_status make_volumes(tml_refiner *refiner, const known *table, tml_error *error) {
    static const int TRIPLE[4][3] = {{0, 1, 2}, {0, 1, 3}, {0, 2, 3}, {1, 2, 3}};
    static const int TURN[4] = {1, -1, 1, -1}; /* of a tetrahedron's triples against the first */
    const tml_molecule *molecule = &refiner->problem->molecule;
    refiner->volumes = tml_alloc((size_t)molecule->centre_count, sizeof *refiner->volumes);
    if (refiner->volumes == NULL) return tml_no_memory(error);
    for (int32_t i = 0; i < molecule->centre_count; i++) {
        const tml_centre *centre = &molecule->centres[i];
        tml_volume_term *term = &refiner->volumes[refiner->volume_count++];
        term->centre = centre->centre;
        memcpy(term->arms, centre->arms, sizeof term->arms);
        for (int k = 0; k < (centre->arms[3] < 0 ? 1 : 4); k++) {
            double size = ideal_volume(table, centre->centre, centre->arms[TRIPLE[k][0]], centre->arms[TRIPLE[k][1]],
                                       centre->arms[TRIPLE[k][2]]);
            term->volume[k] = centre->sign * TURN[k] * (isnan(size) ? USUAL_VOLUME : size);
        }
    }

    /* Every atom of a planar group with exactly three bonded neighbours in the group is flat. */
    size_t capacity = 0;
    for (int32_t i = 0; i < molecule->plane_count; i++) {
        const tml_plane *plane = &molecule->planes[i];
        const int32_t *atoms = &molecule->plane_atoms[plane->first];
        for (int32_t j = 0; j < plane->count; j++) {
            int32_t first = molecule->neighbour_first[atoms[j]], count = molecule->neighbour_first[atoms[j] + 1] - first, inside = 0;
            for (int32_t k = 0; k < count && count == 3; k++)
                for (int32_t l = 0; l < plane->count; l++) inside += atoms[l] == molecule->neighbours[first + k];
            if (inside != 3) continue;
            if (!tml_grow(&refiner->flats, &capacity, (size_t)refiner->flat_count + 1, sizeof *refiner->flats))
                return tml_no_memory(error);
            tml_volume_term *term = &refiner->flats[refiner->flat_count++];
            term->centre = atoms[j];
            for (int k = 0; k < 3; k++) term->arms[k] = molecule->neighbours[first + k];
            term->arms[3] = -1;
        }
    }
    return TML_OK;
}

/* ---- restraints ---- */

typedef struct sum_builder { tml_refiner *refiner; size_t sums, pairs, choices; } sum_builder;

static bool sum_begin(sum_builder *builder, const tml_distance_restraint *restraint, int32_t combination) {
    tml_refiner *refiner = builder->refiner;
    if (!tml_grow(&refiner->sums, &builder->sums, (size_t)refiner->sum_count + 1, sizeof *refiner->sums)) return false;
    refiner->sums[refiner->sum_count++] = (tml_sum_term){.first_pair = refiner->sum_pair_count,
                                                         .lower = restraint->lower,
                                                         .upper = restraint->upper,
                                                         .weight = restraint->weight,
                                                         .share = 1.0,
                                                         .combination = combination};
    return true;
}

static bool sum_add_pair(sum_builder *builder, int32_t a, int32_t b) {
    tml_refiner *refiner = builder->refiner;
    if (!tml_grow(&refiner->sum_pairs, &builder->pairs, (size_t)refiner->sum_pair_count + 1, sizeof *refiner->sum_pairs)) return false;
    refiner->sum_pairs[refiner->sum_pair_count++] = (tml_pair){a, b};
    return true;
}

static bool sum_add(sum_builder *builder, const tml_alternative *alternative) {
    const tml_restraints *restraints = &builder->refiner->problem->restraints;
    for (int32_t i = 0; i < alternative->count_a; i++)
        for (int32_t j = 0; j < alternative->count_b; j++) {
            int32_t a = restraints->group_atoms[alternative->first_a + i], b = restraints->group_atoms[alternative->first_b + j];
            if (a != b && !sum_add_pair(builder, a, b)) return false;
        }
    return true;
}

static bool sum_end(sum_builder *builder, bool average) {
    tml_refiner *refiner = builder->refiner;
    tml_sum_term *sum = &refiner->sums[refiner->sum_count - 1];
    sum->pair_count = refiner->sum_pair_count - sum->first_pair;
    if (average && sum->pair_count > 0) sum->share = 1.0 / sum->pair_count;
    sum->least = isinf(sum->upper) ? 0 : pow(sum->upper, -6) / sum->share;
    sum->most = sum->lower > 0 ? pow(sum->lower, -6) / sum->share : INFINITY;
    while (refiner->sum_pair_count % 4 != 0)
        if (!sum_add_pair(builder, refiner->atom_count, refiner->atom_count + 1)) return false;
    return true;
}

/* One sum over all alternatives of a plain restraint. */
static bool add_single(sum_builder *builder, const tml_distance_restraint *restraint) {
    const tml_alternative *alternatives = &builder->refiner->problem->restraints.alternatives[restraint->first_alternative];
    if (!sum_begin(builder, restraint, -1)) return false;
    for (int32_t k = 0; k < restraint->alternative_count; k++)
        if (!sum_add(builder, &alternatives[k])) return false;
    return sum_end(builder, restraint->average);
}

/* One sum for each alternative of a combined restraint; an alternative outside combinations is one by itself. */
static bool add_choice(sum_builder *builder, const tml_distance_restraint *restraint) {
    tml_refiner *refiner = builder->refiner;
    const tml_alternative *alternatives = &refiner->problem->restraints.alternatives[restraint->first_alternative];
    if (!tml_grow(&refiner->choices, &builder->choices, (size_t)refiner->choice_count + 1, sizeof *refiner->choices)) return false;
    tml_choice_term *choice = &refiner->choices[refiner->choice_count++];
    choice->first_sum = refiner->sum_count;
    choice->sum_count = restraint->alternative_count;
    for (int32_t k = 0; k < restraint->alternative_count; k++) {
        int32_t combination = alternatives[k].combination >= 0 ? alternatives[k].combination : restraint->alternative_count + k;
        if (!sum_begin(builder, restraint, combination) || !sum_add(builder, &alternatives[k]) ||
            !sum_end(builder, restraint->average))
            return false;
    }
    return true;
}

static tml_status make_sums(tml_refiner *refiner, tml_error *error) {
    const tml_restraints *restraints = &refiner->problem->restraints;
    sum_builder builder = {.refiner = refiner};
    for (int32_t i = 0; i < restraints->distance_count; i++)
        if (!restraints->distances[i].combined && !add_single(&builder, &restraints->distances[i])) return tml_no_memory(error);
    refiner->single_count = refiner->sum_count;
    for (int32_t i = 0; i < restraints->distance_count; i++)
        if (restraints->distances[i].combined && !add_choice(&builder, &restraints->distances[i])) return tml_no_memory(error);
    return TML_OK;
}

static tml_status make_torsions(tml_refiner *refiner, tml_error *error) {
    const tml_restraints *restraints = &refiner->problem->restraints;
    refiner->torsions = tml_alloc((size_t)restraints->dihedral_count, sizeof *refiner->torsions);
    if (refiner->torsions == NULL) return tml_no_memory(error);
    for (int32_t i = 0; i < restraints->dihedral_count; i++) {
        const tml_dihedral_restraint *dihedral = &restraints->dihedrals[i];
        refiner->torsions[refiner->torsion_count++] =
            (tml_torsion_term){dihedral->first_interval, dihedral->interval_count, dihedral->weight};
    }
    return TML_OK;
}

/* ---- backbones ---- */

static tml_status make_backbones(tml_refiner *refiner, tml_error *error) {
    const tml_molecule *molecule = &refiner->problem->molecule;
    refiner->backbones = tml_alloc((size_t)molecule->peptide_count, sizeof *refiner->backbones);
    int32_t *into = malloc(((size_t)molecule->residue_count + 1) * sizeof *into); /* the peptide that ends in a residue */
    if (refiner->backbones == NULL || into == NULL) {
        free(into);
        return tml_no_memory(error);
    }
    for (int32_t i = 0; i < molecule->residue_count; i++) into[i] = -1;
    for (int32_t i = 0; i < molecule->peptide_count; i++) into[molecule->peptides[i].residue2] = i;
    for (int32_t i = 0; i < molecule->peptide_count; i++) {
        const tml_peptide *after = &molecule->peptides[i];
        if (into[after->residue1] < 0) continue;
        const tml_peptide *before = &molecule->peptides[into[after->residue1]];
        const char *name = molecule->residues[after->residue1].name;
        refiner->backbones[refiner->backbone_count++] =
            (tml_backbone_term){{before->c, before->n, before->ca2, after->c, after->n}, strcmp(name, "GLY") == 0, strcmp(name, "PRO") == 0};
    }
    free(into);
    return TML_OK;
}

/* ---- contacts ---- */

enum { CLASS_LIMIT = 64, NEAR_REACH = 128 };

static bool polar_hydrogen(const tml_molecule *molecule, int32_t atom) {
    if (molecule->atoms[atom].element != 1) return false;
    for (int32_t k = molecule->neighbour_first[atom]; k < molecule->neighbour_first[atom + 1]; k++)
        if (molecule->atoms[molecule->neighbours[k]].element != 6) return true;
    return false;
}

/* Atoms of one element, and hydrogens of one polarity, have the same contact distances. */
static bool make_classes(tml_refiner *refiner) {
    const tml_molecule *molecule = &refiner->problem->molecule;
    int32_t example[CLASS_LIMIT], key[CLASS_LIMIT];
    refiner->contact_class = tml_alloc((size_t)refiner->atom_count, 1);
    if (refiner->contact_class == NULL) return false;
    for (int32_t i = 0; i < refiner->atom_count; i++) {
        int32_t mine = 2 * molecule->atoms[i].element + polar_hydrogen(molecule, i), found = 0;
        while (found < refiner->class_count && key[found] != mine) found++;
        if (found == refiner->class_count && found < CLASS_LIMIT) {
            key[found] = mine;
            example[found] = i;
            refiner->class_count++;
        }
        refiner->contact_class[i] = (uint8_t)(found < CLASS_LIMIT ? found : CLASS_LIMIT - 1);
    }
    size_t count = (size_t)refiner->class_count;
    refiner->contact = tml_alloc(count * count, sizeof *refiner->contact);
    refiner->reach = tml_alloc(count, sizeof *refiner->reach);
    if (refiner->contact == NULL || refiner->reach == NULL) return false;
    for (size_t a = 0; a < count; a++)
        for (size_t b = 0; b < count; b++) {
            float contact = (float)tml_soft_contact(molecule, example[a], example[b]);
            refiner->contact[a * count + b] = contact;
            if (contact > refiner->reach[a]) refiner->reach[a] = contact;
            if (contact > refiner->contact_max) refiner->contact_max = contact;
        }
    return true;
}

typedef struct far_list { tml_pair *pairs; size_t count, capacity; } far_list;

static bool silence(tml_refiner *refiner, far_list *far, int32_t a, int32_t b) {
    if (a == b) return true;
    int32_t low = a < b ? a : b, ahead = (a < b ? b : a) - low;
    if (ahead <= NEAR_REACH) {
        refiner->near_mask[low][(ahead - 1) / 64] |= (uint64_t)1 << ((ahead - 1) % 64);
        return true;
    }
    if (!tml_grow(&far->pairs, &far->capacity, far->count + 1, sizeof *far->pairs)) return false;
    far->pairs[far->count++] = (tml_pair){low, low + ahead};
    return true;
}

static int compare_pairs(const void *left, const void *right) {
    const tml_pair *l = left, *r = right;
    if (l->a != r->a) return l->a < r->a ? -1 : 1;
    return l->b < r->b ? -1 : l->b > r->b;
}

/* Pairs within three bonds of each other do not repel, nor do those whose distance the geometry fixes. */
static bool silence_all(tml_refiner *refiner, const known *table, far_list *far) {
    const tml_molecule *molecule = &refiner->problem->molecule;
    const int32_t *first = molecule->neighbour_first, *next = molecule->neighbours;
    for (int32_t a = 0; a < molecule->atom_count; a++)
        for (int32_t i = first[a]; i < first[a + 1]; i++) {
            if (!silence(refiner, far, a, next[i])) return false;
            for (int32_t j = first[next[i]]; j < first[next[i] + 1]; j++) {
                if (!silence(refiner, far, a, next[j])) return false;
                for (int32_t k = first[next[j]]; k < first[next[j] + 1]; k++)
                    if (!silence(refiner, far, a, next[k])) return false;
            }
        }
    for (size_t i = 0; i < table->slots; i++)
        if (table->keys[i] != 0) {
            uint64_t key = table->keys[i] - 1;
            if (!silence(refiner, far, (int32_t)(key >> 32), (int32_t)(key & 0xffffffffu))) return false;
        }
    return true;
}

static tml_status make_contacts(tml_refiner *refiner, const known *table, tml_error *error) {
    size_t count = (size_t)refiner->atom_count;
    far_list far = {0};
    refiner->near_mask = tml_alloc(count, sizeof *refiner->near_mask);
    refiner->far_first = tml_alloc(count + 1, sizeof *refiner->far_first);
    bool room = refiner->near_mask != NULL && refiner->far_first != NULL && make_classes(refiner) && silence_all(refiner, table, &far);
    if (room) {
        if (far.count > 0) qsort(far.pairs, far.count, sizeof *far.pairs, compare_pairs);
        refiner->far = tml_alloc(far.count, sizeof *refiner->far);
        room = refiner->far != NULL;
    }
    for (size_t i = 0, atom = 0; room && atom <= count; atom++) {
        refiner->far_first[atom] = (int32_t)i;
        for (; i < far.count && (size_t)far.pairs[i].a == atom; i++) refiner->far[i] = far.pairs[i].b;
    }
    free(far.pairs);
    return room ? TML_OK : tml_no_memory(error);
}
