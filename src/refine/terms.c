/* terms.c: makes the flat arrays of terms.h.
 *
 *   springs      bonds, 1-3 distances, distances within planar groups and across known torsions
 *   volumes      all four triples of a tetrahedral centre; flat centres
 *   restraints   sums over pairs, choices, dihedrals
 *   backbones    phi and psi of each residue
 *   points       of alike chains, whose distances symmetry makes equal
 *   contacts     classes of atoms, and the pairs that do not repel each other
 */
#include "refine/terms.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "bounds/radii.h"
#include "molecule/geometry.h"

static const double PI = 3.14159265358979323846;

static tml_status make_springs(tml_refiner *refiner, tml_geometry *table, tml_error *error);
static tml_status make_volumes(tml_refiner *refiner, const tml_geometry *table, tml_error *error);
static tml_status make_sums(tml_refiner *refiner, tml_error *error);
static tml_status make_torsions(tml_refiner *refiner, tml_error *error);
static tml_status make_backbones(tml_refiner *refiner, tml_error *error);
static tml_status make_points(tml_refiner *refiner, tml_error *error);
static tml_status make_contacts(tml_refiner *refiner, const tml_geometry *table, tml_error *error);

tml_status tml_refiner_new(const tml_problem *problem, bool free_backbone, tml_refiner **out, tml_error *error) {
    *out = NULL;
    tml_refiner *refiner = tml_alloc(1, sizeof *refiner);
    if (refiner == NULL) return tml_no_memory(error);
    refiner->problem = problem;
    refiner->atom_count = problem->molecule.atom_count;

    tml_geometry table = {0};
    tml_status status = make_springs(refiner, &table, error);
    if (status == TML_OK) status = make_volumes(refiner, &table, error);
    if (status == TML_OK) status = make_sums(refiner, error);
    if (status == TML_OK) status = make_torsions(refiner, error);
    if (status == TML_OK && !free_backbone) status = make_backbones(refiner, error);
    if (status == TML_OK) status = make_points(refiner, error);
    if (status == TML_OK) status = make_contacts(refiner, &table, error);
    tml_geometry_clear(&table);
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
    free(refiner->centres);
    free(refiner->points_of_centres);
    free(refiner->centre_atoms);
    free(refiner->open_pairs);
    free(refiner->both_sums);
    free(refiner->open_uses);
    free(refiner->torsions);
    free(refiner->arcs);
    free(refiner->backbones);
    free(refiner->points);
    free(refiner->point_first);
    tml_contacts_clear(&refiner->contacts);
    free(refiner->near_mask);
    free(refiner->far_first);
    free(refiner->far);
    free(refiner);
}

/* ---- springs ---- */

static bool spring_add(tml_spring_set *set, int32_t a, int32_t b, double length) {
    size_t pairs = (size_t)set->capacity, lengths = (size_t)set->capacity, need = (size_t)set->count + 1;
    if (!tml_grow(&set->pairs, &pairs, need, sizeof *set->pairs)) return false;
    if (!tml_grow(&set->length, &lengths, need, sizeof *set->length)) return false;
    set->capacity = (int32_t)pairs;
    set->pairs[set->count] = (tml_pair){a, b};
    set->length[set->count++] = length;
    return true;
}

static bool spring_for(void *context, tml_fixed fixed, int32_t a, int32_t b, double length) {
    tml_refiner *refiner = context;
    return spring_add(fixed == TML_FIXED_BOND    ? &refiner->bonds
                      : fixed == TML_FIXED_ANGLE ? &refiner->angles
                                                 : &refiner->planars,
                      a, b, length);
}

/* Fill up to a multiple of four with the dummy pair, at its distance of 1 Å. */
static bool spring_pad(tml_spring_set *set, int32_t atom_count) {
    while (set->count % 4 != 0)
        if (!spring_add(set, atom_count, atom_count + 1, 1.0)) return false;
    return true;
}

static tml_status make_springs(tml_refiner *refiner, tml_geometry *table, tml_error *error) {
    const tml_molecule *molecule = &refiner->problem->molecule;
    const double KNOWN_TORSION = 10.0 * PI / 180.0; /* wider ones are ranges, not values */
    bool room = tml_geometry_fill(table, molecule, spring_for, refiner);
    for (int32_t i = 0; room && i < molecule->torsion_count; i++) {
        const tml_torsion *torsion = &molecule->torsions[i];
        bool known = (torsion->kind == TML_TORSION_FIXED || torsion->kind == TML_TORSION_PEPTIDE) && torsion->tolerance < KNOWN_TORSION;
        if (!known || !isnan(tml_geometry_distance(table, torsion->a, torsion->d))) continue;
        double length = tml_geometry_across(table, torsion->a, torsion->b, torsion->c, torsion->d, torsion->angle);
        if (!isnan(length)) room = spring_add(&refiner->planars, torsion->a, torsion->d, length);
    }
    room = room && spring_pad(&refiner->bonds, refiner->atom_count) && spring_pad(&refiner->angles, refiner->atom_count) &&
           spring_pad(&refiner->planars, refiner->atom_count);
    return room ? TML_OK : tml_no_memory(error);
}

/* ---- volumes ---- */

/* Signed volume of three arms from lengths and the distances between their ends; NAN where one is not known. */
static double ideal_volume(const tml_geometry *table, int32_t centre, int32_t p, int32_t q, int32_t r) {
    const int32_t arm[3] = {p, q, r};
    double length[3], cosine[3];
    for (int k = 0; k < 3; k++) length[k] = tml_geometry_distance(table, centre, arm[k]);
    for (int k = 0; k < 3; k++) {
        int i = (k + 1) % 3, j = (k + 2) % 3;
        double d = tml_geometry_distance(table, arm[i], arm[j]);
        cosine[k] = (length[i] * length[i] + length[j] * length[j] - d * d) / (2 * length[i] * length[j]);
    }
    double gram = 1 + 2 * cosine[0] * cosine[1] * cosine[2] - cosine[0] * cosine[0] - cosine[1] * cosine[1] - cosine[2] * cosine[2];
    return isnan(gram) ? NAN : length[0] * length[1] * length[2] * sqrt(fmax(gram, 0));
}

/* A centre whose arms have no known geometry (a sheet's `chiral`): unit-like volume of the arms' present lengths is not
 * known either, so the sign is asked for with a volume that tetrahedral single bonds have. */
static const double USUAL_VOLUME = 2.0;

static tml_status make_volumes(tml_refiner *refiner, const tml_geometry *table, tml_error *error) {
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

typedef struct sum_builder { tml_refiner *refiner; size_t sums, pairs, choices, open, uses, both, centres, points, atoms; } sum_builder; /* capacities */

static bool sum_begin(sum_builder *builder, const tml_distance_restraint *restraint, int32_t combination) {
    tml_refiner *refiner = builder->refiner;
    if (!tml_grow(&refiner->sums, &builder->sums, (size_t)refiner->sum_count + 1, sizeof *refiner->sums)) return false;
    refiner->sums[refiner->sum_count++] = (tml_sum_term){.first_pair = refiner->sum_pair_count,
                                                         .lower = restraint->lower,
                                                         .upper = restraint->upper,
                                                         .weight = restraint->weight,
                                                         .share = 1.0,
                                                         .combination = combination,
                                                         .both = -1,
                                                         .first_open = refiner->open_pair_count};
    return true;
}

static bool sum_add_pair(sum_builder *builder, int32_t a, int32_t b) {
    tml_refiner *refiner = builder->refiner;
    if (!tml_grow(&refiner->sum_pairs, &builder->pairs, (size_t)refiner->sum_pair_count + 1, sizeof *refiner->sum_pairs)) return false;
    refiner->sum_pairs[refiner->sum_pair_count++] = (tml_pair){a, b};
    return true;
}

/* Pairs of an alternative of which it is open what its names mean; the sides with every stereo pair swapped run beside. */
static bool sum_add_open(sum_builder *builder, const tml_alternative *alternative, const tml_group *a, const tml_group *b) {
    tml_refiner *refiner = builder->refiner;
    int32_t shift_a = alternative->stereo_a < 0 ? 0 : alternative->second_a ? -a->count : a->count;
    int32_t shift_b = alternative->stereo_b < 0 ? 0 : alternative->second_b ? -b->count : b->count;
    for (int32_t i = 0; i < a->count; i++)
        for (int32_t j = 0; j < b->count; j++) {
            if (!tml_grow(&refiner->open_pairs, &builder->open, (size_t)refiner->open_pair_count + 1, sizeof *refiner->open_pairs))
                return false;
            const int32_t *x = &a->atoms[i], *y = &b->atoms[j];
            refiner->open_pairs[refiner->open_pair_count++] =
                (tml_open_pair){refiner->sum_pair_count, alternative->stereo_a, alternative->stereo_b, {x[0], x[shift_a]}, {y[0], y[shift_b]}};
            if (!sum_add_pair(builder, *x, *y)) return false;
        }
    return true;
}

/* swapped: nothing is; or NULL: names with x and y mean both members. */
static bool sum_add(sum_builder *builder, const tml_alternative *alternative, const bool *swapped) {
    tml_group a, b;
    tml_alternative_sides(&builder->refiner->problem->restraints, alternative, swapped, &a, &b);
    if (swapped != NULL && tml_alternative_open(alternative)) return sum_add_open(builder, alternative, &a, &b);
    for (int32_t i = 0; i < a.count; i++)
        for (int32_t j = 0; j < b.count; j++)
            if (a.atoms[i] != b.atoms[j] && !sum_add_pair(builder, a.atoms[i], b.atoms[j])) return false;
    return true;
}

/* Note which stereo pairs a single sum or a choice hangs on. */
static bool note_uses(sum_builder *builder, const tml_distance_restraint *restraint, int32_t sum, int32_t choice) {
    tml_refiner *refiner = builder->refiner;
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++) {
        const tml_alternative *alternative = &refiner->problem->restraints.alternatives[k];
        const int32_t stereo[2] = {alternative->stereo_a, alternative->stereo_b == alternative->stereo_a ? -1 : alternative->stereo_b};
        for (int s = 0; s < 2; s++) {
            if (stereo[s] < 0) continue;
            if (!tml_grow(&refiner->open_uses, &builder->uses, (size_t)refiner->open_use_count + 1, sizeof *refiner->open_uses)) return false;
            refiner->open_uses[refiner->open_use_count++] = (tml_open_use){stereo[s], sum, choice};
        }
    }
    return true;
}

static bool sum_end(sum_builder *builder, bool average) {
    tml_refiner *refiner = builder->refiner;
    tml_sum_term *sum = &refiner->sums[refiner->sum_count - 1];
    sum->pair_count = refiner->sum_pair_count - sum->first_pair;
    sum->open_count = refiner->open_pair_count - sum->first_open;
    if (average && sum->pair_count > 0) sum->share = 1.0 / sum->pair_count;
    sum->least = isinf(sum->upper) ? 0 : pow(sum->upper, -6) / sum->share;
    sum->most = sum->lower > 0 ? pow(sum->lower, -6) / sum->share : INFINITY;
    while (refiner->sum_pair_count % 4 != 0)
        if (!sum_add_pair(builder, refiner->atom_count, refiner->atom_count + 1)) return false;
    return true;
}

/* A lower limit no longer than this, Å, twice the radius of hydrogen in Bondi, J. Phys. Chem. 68 (1964) 441, says that atoms do not
 * overlap; that holds for both members of a stereo pair, whichever is x. */
static const double CONTACT = 2.4;

static bool floor_holds_for_both(const tml_distance_restraint *restraint, const tml_alternative *alternatives) {
    bool any_open = false;
    for (int32_t k = 0; k < restraint->alternative_count; k++) {
        any_open = any_open || tml_alternative_open(&alternatives[k]);
        if (alternatives[k].stereo_a >= 0 && alternatives[k].stereo_a == alternatives[k].stereo_b) return false;
    }
    return any_open && restraint->lower > 0 && restraint->lower <= CONTACT && !restraint->average;
}

static bool add_sum(sum_builder *builder, const tml_distance_restraint *restraint, const tml_alternative *alternatives,
                    const bool *swapped) {
    if (!sum_begin(builder, restraint, -1)) return false;
    for (int32_t k = 0; k < restraint->alternative_count; k++)
        if (!sum_add(builder, &alternatives[k], swapped)) return false;
    return sum_end(builder, restraint->average);
}

/* The last sum once more, with both members of its open pairs, in the array beside. */
static bool add_both(sum_builder *builder, const tml_distance_restraint *restraint, const tml_alternative *alternatives) {
    tml_refiner *refiner = builder->refiner;
    if (!tml_grow(&refiner->both_sums, &builder->both, (size_t)refiner->both_count + 1, sizeof *refiner->both_sums)) return false;
    if (!add_sum(builder, restraint, alternatives, NULL)) return false;
    refiner->both_sums[refiner->both_count] = refiner->sums[--refiner->sum_count];
    refiner->sums[refiner->sum_count - 1].both = refiner->both_count++;
    return true;
}

/* One sum over all alternatives of a plain restraint; a second one for a lower limit that both members of open pairs keep. */
static bool add_single(sum_builder *builder, const tml_distance_restraint *restraint, const bool *none_swapped) {
    const tml_alternative *alternatives = &builder->refiner->problem->restraints.alternatives[restraint->first_alternative];
    tml_distance_restraint above = *restraint, below = *restraint;
    if (floor_holds_for_both(restraint, alternatives)) {
        above.lower = 0;
        below.upper = INFINITY;
        if (!add_sum(builder, &below, alternatives, NULL)) return false;
    }
    if (!add_sum(builder, &above, alternatives, none_swapped) || !note_uses(builder, restraint, builder->refiner->sum_count - 1, -1)) return false;
    return builder->refiner->sums[builder->refiner->sum_count - 1].open_count == 0 || add_both(builder, &above, alternatives);
}

/* One sum for each alternative of a combined restraint; an alternative outside combinations is one by itself. */
static bool add_choice(sum_builder *builder, const tml_distance_restraint *restraint, const bool *none_swapped) {
    tml_refiner *refiner = builder->refiner;
    const tml_alternative *alternatives = &refiner->problem->restraints.alternatives[restraint->first_alternative];
    if (!tml_grow(&refiner->choices, &builder->choices, (size_t)refiner->choice_count + 1, sizeof *refiner->choices)) return false;
    tml_choice_term *choice = &refiner->choices[refiner->choice_count++];
    choice->first_sum = refiner->sum_count;
    choice->sum_count = restraint->alternative_count;
    for (int32_t k = 0; k < restraint->alternative_count; k++) {
        int32_t combination = alternatives[k].combination >= 0 ? alternatives[k].combination : restraint->alternative_count + k;
        if (!sum_begin(builder, restraint, combination) || !sum_add(builder, &alternatives[k], none_swapped) ||
            !sum_end(builder, restraint->average))
            return false;
    }
    return note_uses(builder, restraint, -1, refiner->choice_count - 1);
}

static bool add_point(sum_builder *builder, const int32_t *atoms, int32_t count) {
    tml_refiner *refiner = builder->refiner;
    if (!tml_grow(&refiner->points_of_centres, &builder->points, (size_t)refiner->centre_point_count + 1, sizeof *refiner->points_of_centres) ||
        !tml_grow(&refiner->centre_atoms, &builder->atoms, (size_t)refiner->centre_atom_count + (size_t)count, sizeof *refiner->centre_atoms))
        return false;
    refiner->points_of_centres[refiner->centre_point_count++] = (tml_centre_point){refiner->centre_atom_count, count};
    for (int32_t i = 0; i < count; i++) refiner->centre_atoms[refiner->centre_atom_count++] = atoms[i];
    return true;
}

static bool is_centred(const tml_restraints *restraints, const tml_distance_restraint *restraint) {
    for (int32_t k = 0; k < restraint->alternative_count; k++)
        if (tml_alternative_centred(&restraints->alternatives[restraint->first_alternative + k])) return true;
    return false;
}

/* A restraint of which some side is the centre of a group: all its pairs of points. */
static bool add_centred(sum_builder *builder, const tml_distance_restraint *restraint) {
    tml_refiner *refiner = builder->refiner;
    const tml_restraints *restraints = &refiner->problem->restraints;
    if (!tml_grow(&refiner->centres, &builder->centres, (size_t)refiner->centre_count + 1, sizeof *refiner->centres)) return false;
    tml_centre_term *term = &refiner->centres[refiner->centre_count++];
    *term = (tml_centre_term){.first_point = refiner->centre_point_count, .lower = restraint->lower, .upper = restraint->upper,
                              .weight = restraint->weight, .share = 1.0};
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++) {
        const tml_alternative *alternative = &restraints->alternatives[k];
        tml_group a, b;
        tml_alternative_sides(restraints, alternative, NULL, &a, &b);
        for (int32_t i = 0; i < (alternative->centre_a ? 1 : a.count); i++)
            for (int32_t j = 0; j < (alternative->centre_b ? 1 : b.count); j++) {
                if (!tml_alternative_centred(alternative) && a.atoms[i] == b.atoms[j]) continue;
                if (!add_point(builder, &a.atoms[i], alternative->centre_a ? a.count : 1) ||
                    !add_point(builder, &b.atoms[j], alternative->centre_b ? b.count : 1))
                    return false;
                term->pair_count++;
            }
    }
    if (restraint->average && term->pair_count > 0) term->share = 1.0 / term->pair_count;
    return true;
}

static int by_stereo(const void *left, const void *right) {
    const tml_open_use *l = left, *r = right;
    if (l->stereo != r->stereo) return l->stereo < r->stereo ? -1 : 1;
    if (l->sum != r->sum) return l->sum < r->sum ? -1 : 1;
    return l->choice < r->choice ? -1 : l->choice > r->choice;
}

/* Sorted by stereo pair, each use once. */
static void sort_uses(tml_refiner *refiner) {
    int32_t kept = 0;
    if (refiner->open_use_count == 0) return;
    qsort(refiner->open_uses, (size_t)refiner->open_use_count, sizeof *refiner->open_uses, by_stereo);
    for (int32_t i = 0; i < refiner->open_use_count; i++)
        if (kept == 0 || by_stereo(&refiner->open_uses[kept - 1], &refiner->open_uses[i]) != 0)
            refiner->open_uses[kept++] = refiner->open_uses[i];
    refiner->open_use_count = kept;
}

static tml_status make_sums(tml_refiner *refiner, tml_error *error) {
    const tml_restraints *restraints = &refiner->problem->restraints;
    sum_builder builder = {.refiner = refiner};
    bool *none_swapped = tml_alloc((size_t)restraints->stereo_count, sizeof *none_swapped), room = none_swapped != NULL;
    for (int32_t i = 0; room && i < restraints->distance_count; i++)
        room = restraints->distances[i].combined
                   || (is_centred(restraints, &restraints->distances[i]) ? add_centred(&builder, &restraints->distances[i])
                                                                          : add_single(&builder, &restraints->distances[i], none_swapped));
    refiner->single_count = refiner->sum_count;
    for (int32_t i = 0; room && i < restraints->distance_count; i++)
        room = !restraints->distances[i].combined || add_choice(&builder, &restraints->distances[i], none_swapped);
    free(none_swapped);
    sort_uses(refiner);
    return room ? TML_OK : tml_no_memory(error);
}

static tml_status make_torsions(tml_refiner *refiner, tml_error *error) {
    const tml_restraints *restraints = &refiner->problem->restraints;
    refiner->torsions = tml_alloc((size_t)restraints->dihedral_count, sizeof *refiner->torsions);
    refiner->arcs = tml_alloc((size_t)restraints->interval_count, sizeof *refiner->arcs);
    if (refiner->torsions == NULL || refiner->arcs == NULL) return tml_no_memory(error);
    for (int32_t i = 0; i < restraints->interval_count; i++) {
        double lower = restraints->intervals[i].lower, upper = restraints->intervals[i].upper, middle = (lower + upper) / 2;
        refiner->arcs[i] = (tml_torsion_arc){cos(middle), sin(middle), cos(fmin((upper - lower) / 2, PI))};
    }
    for (int32_t i = 0; i < restraints->dihedral_count; i++) {
        const tml_dihedral_restraint *dihedral = &restraints->dihedrals[i];
        refiner->torsions[refiner->torsion_count++] =
            (tml_torsion_term){dihedral->first_interval, dihedral->interval_count, dihedral->weight};
    }
    return TML_OK;
}

/* ---- backbones ---- */

/* The basins in which folded proteins keep phi and psi: right-handed helix, its bridge, extended strand, polyproline II,
 * left-handed helix. Centres, degrees, and widths (as the concentration of a von Mises distribution, 1/radians²) are round values
 * for the regions of Lovell et al., Proteins 50 (2003) 437, typed from memory. */
static const struct { double phi, psi, phi_sharp, psi_sharp, share; } BASINS[TML_BASINS] = {
    {-65, -42, 6.0, 4.0, 1.0}, {-90, 0, 4.0, 3.0, 0.3}, {-120, 135, 3.0, 3.0, 1.0}, {-70, 145, 6.0, 4.0, 1.0}, {57, 42, 8.0, 6.0, 0.1},
};

static tml_status make_backbones(tml_refiner *refiner, tml_error *error) {
    const tml_molecule *molecule = &refiner->problem->molecule;
    refiner->backbones = tml_alloc((size_t)molecule->peptide_count, sizeof *refiner->backbones);
    int32_t *into = malloc(((size_t)molecule->residue_count + 1) * sizeof *into); /* the peptide that ends in a residue */
    if (refiner->backbones == NULL || into == NULL) {
        free(into);
        return tml_no_memory(error);
    }
    for (int b = 0; b < TML_BASINS; b++) {
        double phi = BASINS[b].phi * PI / 180, psi = BASINS[b].psi * PI / 180;
        refiner->basins[b] = (tml_basin){cos(phi), sin(phi), cos(psi), sin(psi), BASINS[b].phi_sharp, BASINS[b].psi_sharp, BASINS[b].share};
    }
    for (int32_t i = 0; i < molecule->residue_count; i++) into[i] = -1;
    for (int32_t i = 0; i < molecule->peptide_count; i++) into[molecule->peptides[i].residue2] = i;
    for (int32_t i = 0; i < molecule->peptide_count; i++) {
        const tml_peptide *after = &molecule->peptides[i];
        if (into[after->residue1] < 0) continue;
        const tml_peptide *before = &molecule->peptides[into[after->residue1]];
        const char *name = molecule->residues[after->residue1].name;
        int hand = tml_molecule_hand(molecule, before->n, before->ca2, after->c);
        bool both = hand == 0 && molecule->neighbour_first[before->ca2 + 1] - molecule->neighbour_first[before->ca2] == 4;
        if (hand < 0) continue; /* the regions are those of L */
        refiner->backbones[refiner->backbone_count++] =
            (tml_backbone_term){{before->c, before->n, before->ca2, after->c, after->n}, both || strcmp(name, "GLY") == 0, strcmp(name, "PRO") == 0};
    }
    free(into);
    return TML_OK;
}

/* ---- points ---- */

/* Points of a chain that stand for it in the distances between copies: one atom a residue, at most so many. */
enum { MOST_POINTS = 48, MOST_COPIES = 3 };

/* The alpha carbon, a nucleotide's C1', or a residue's first atom of the set. */
static bool stands_for_residue(const tml_molecule *molecule, const int32_t *atoms, int32_t i) {
    const tml_atom *atom = &molecule->atoms[atoms[i]];
    if (molecule->residues[atom->residue].polymer == TML_POLYMER_PROTEIN) return strcmp(atom->name, "CA") == 0;
    return i == 0 || molecule->atoms[atoms[i - 1]].residue != atom->residue;
}

static tml_status make_points(tml_refiner *refiner, tml_error *error) {
    const tml_molecule *molecule = &refiner->problem->molecule;
    refiner->points = tml_alloc((size_t)molecule->alike_count * MOST_POINTS, sizeof *refiner->points);
    refiner->point_first = tml_alloc((size_t)molecule->alike_count + 1, sizeof *refiner->point_first);
    if (refiner->points == NULL || refiner->point_first == NULL) return tml_no_memory(error);
    for (int32_t s = 0; s < molecule->alike_count; s++) {
        const tml_alike *set = &molecule->alike[s];
        const int32_t *atoms = &molecule->alike_atoms[set->first];
        int32_t *points = &refiner->points[refiner->point_first[s]], all = 0, taken = 0, seen = 0;
        for (int32_t i = 0; i < set->count; i++) all += stands_for_residue(molecule, atoms, i);
        int32_t wanted = set->copies > MOST_COPIES ? 0 : all < MOST_POINTS ? all : MOST_POINTS;
        for (int32_t i = 0; i < set->count && taken < wanted; i++) {
            if (!stands_for_residue(molecule, atoms, i)) continue;
            if ((int64_t)seen * wanted >= (int64_t)taken * all) points[taken++] = i; /* evenly along the chain */
            seen++;
        }
        refiner->point_first[s + 1] = refiner->point_first[s] + taken;
    }
    return TML_OK;
}

/* ---- contacts ---- */

enum { NEAR_REACH = 128 };

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

typedef struct silencing { tml_refiner *refiner; far_list *far; } silencing;

static bool silence_pair(void *context, int32_t a, int32_t b) {
    silencing *all = context;
    return silence(all->refiner, all->far, a, b);
}

/* Pairs within three bonds of each other do not repel, nor do those whose distance the geometry fixes. */
static bool silence_all(tml_refiner *refiner, const tml_geometry *table, far_list *far) {
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
    silencing all = {refiner, far};
    return tml_geometry_each(table, silence_pair, &all);
}

static tml_status make_contacts(tml_refiner *refiner, const tml_geometry *table, tml_error *error) {
    size_t count = (size_t)refiner->atom_count;
    far_list far = {0};
    refiner->near_mask = tml_alloc(count, sizeof *refiner->near_mask);
    refiner->far_first = tml_alloc(count + 1, sizeof *refiner->far_first);
    bool room = refiner->near_mask != NULL && refiner->far_first != NULL &&
                tml_contacts_make(&refiner->problem->molecule, &refiner->contacts) == TML_OK && silence_all(refiner, table, &far);
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
