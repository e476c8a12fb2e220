/* fill.c: the limits of a problem, with the reason for each.
 *
 *   covalent     bonds, angles, planar groups, torsions
 *   dihedrals    the 1-4 distance of a bonded, restrained dihedral
 *   restraints   by the rule for sums over groups
 *   matrix       all of these over the floors of radii.h
 */
#include <math.h>
#include <stdlib.h>

#include "base/memory.h"
#include "bounds/bounds.h"
#include "bounds/graph.h"
#include "bounds/radii.h"
#include "molecule/geometry.h"

static const double PI = 3.14159265358979323846;
/* What good structures stray from ideal distances across a torsion and within a planar group, Å. */
static const double TORSION_SLACK = 0.15, PLANE_SLACK = 0.15;
/* A chain of covalent limits within one group is never longer than this, Å; farther means the group is not connected. */
static const double GROUP_REACH = 40.0;

typedef struct filler {
    const tml_problem *problem;
    tml_givens *givens;
    tml_geometry geometry;
    int32_t bond, angle;     /* next to be visited by note_fixed */
    int32_t *before, *after; /* per atom: the undeclared peptide bond on whose C (N) it stands, -1 for none */
} filler;

static bool find_assumed(filler *f);
static bool note_fixed(void *context, tml_fixed fixed, int32_t a, int32_t b, double length);
static bool fill_torsions(filler *f);
static bool fill_dihedrals(filler *f);
static bool fill_restraints(filler *f);

tml_status tml_givens_collect(const tml_problem *problem, tml_givens *givens, tml_error *error) {
    filler f = {.problem = problem, .givens = givens};
    bool room = find_assumed(&f) && tml_geometry_fill(&f.geometry, &problem->molecule, note_fixed, &f) && fill_torsions(&f) && fill_dihedrals(&f) &&
                fill_restraints(&f);
    tml_geometry_clear(&f.geometry);
    free(f.before);
    free(f.after);
    return room ? TML_OK : tml_no_memory(error);
}

static bool add(filler *f, int32_t a, int32_t b, double value, bool is_upper, tml_reason reason, bool conditional, int32_t source) {
    tml_givens *givens = f->givens;
    if (a == b || !(value >= 0) || isinf(value)) return true;
    if (!tml_grow(&givens->items, &givens->capacity, givens->count + 1, sizeof *givens->items)) return false;
    givens->items[givens->count++] = (tml_given){.a = a < b ? a : b, .b = a < b ? b : a, .value = value, .reason = reason,
                                                 .is_upper = is_upper, .conditional = conditional, .source = source};
    return true;
}

static bool add_range(filler *f, int32_t a, int32_t b, double lower, double upper, tml_reason reason, bool conditional, int32_t source) {
    return add(f, a, b, fmax(lower, 0), false, reason, conditional, source) && add(f, a, b, upper, true, reason, conditional, source);
}

/* ---- covalent ---- */

/* A peptide bond that nobody declared is taken as trans, which is an assumption of ours: what it fixes, the distances between the
 * atoms on its C and those on its N, is conditional. */
static bool find_assumed(filler *f) {
    const tml_molecule *molecule = &f->problem->molecule;
    f->before = tml_alloc((size_t)molecule->atom_count, sizeof *f->before);
    f->after = tml_alloc((size_t)molecule->atom_count, sizeof *f->after);
    if (f->before == NULL || f->after == NULL) return false;
    for (int32_t i = 0; i < molecule->atom_count; i++) f->before[i] = f->after[i] = -1;
    for (int32_t i = 0; i < molecule->peptide_count; i++) {
        const tml_peptide *peptide = &molecule->peptides[i];
        if (peptide->declared) continue;
        for (int32_t k = molecule->neighbour_first[peptide->c]; k < molecule->neighbour_first[peptide->c + 1]; k++)
            f->before[molecule->neighbours[k]] = i;
        for (int32_t k = molecule->neighbour_first[peptide->n]; k < molecule->neighbour_first[peptide->n + 1]; k++)
            f->after[molecule->neighbours[k]] = i;
    }
    return true;
}

static bool assumed(const filler *f, int32_t a, int32_t b) {
    return (f->before[a] >= 0 && f->before[a] == f->after[b]) || (f->before[b] >= 0 && f->before[b] == f->after[a]);
}

static double across_angle(double ab, double bc, double angle) {
    return sqrt(ab * ab + bc * bc - 2 * ab * bc * cos(fmin(fmax(angle, 0), PI)));
}

static bool is_pair(int32_t a, int32_t b, int32_t c, int32_t d) {
    return (a == c && b == d) || (a == d && b == c);
}

/* Bonds and angles come in the order of the molecule's lists, so that each finds its own tolerance. */
static bool note_fixed(void *context, tml_fixed fixed, int32_t a, int32_t b, double length) {
    filler *f = context;
    const tml_molecule *molecule = &f->problem->molecule;
    if (fixed == TML_FIXED_BOND) {
        while (!is_pair(a, b, molecule->bonds[f->bond].a, molecule->bonds[f->bond].b)) f->bond++;
        double slack = molecule->bonds[f->bond].tolerance;
        return add_range(f, a, b, length - slack, length + slack, TML_REASON_BOND, false, -1);
    }
    if (fixed == TML_FIXED_ANGLE) {
        while (!is_pair(a, b, molecule->angles[f->angle].a, molecule->angles[f->angle].c)) f->angle++;
        const tml_angle *angle = &molecule->angles[f->angle];
        double ab = tml_geometry_distance(&f->geometry, angle->a, angle->b), bc = tml_geometry_distance(&f->geometry, angle->b, angle->c);
        return add_range(f, a, b, across_angle(ab, bc, angle->angle - angle->tolerance), across_angle(ab, bc, angle->angle + angle->tolerance),
                         TML_REASON_ANGLE, false, -1);
    }
    return add_range(f, a, b, length - PLANE_SLACK, length + PLANE_SLACK, TML_REASON_PLANE, assumed(f, a, b), -1);
}

/* Least and greatest |angle| in [from, to], radians: the 1-4 distance grows with it. */
static void widest(double from, double to, double *least, double *most) {
    *least = PI;
    *most = 0;
    double ends[2] = {fabs(remainder(from, 2 * PI)), fabs(remainder(to, 2 * PI))};
    for (int k = 0; k < 2; k++) {
        *least = fmin(*least, ends[k]);
        *most = fmax(*most, ends[k]);
    }
    if (floor(to / (2 * PI)) > floor(from / (2 * PI)) || remainder(from, 2 * PI) == 0) *least = 0;   /* passes 0 */
    if (floor((to - PI) / (2 * PI)) > floor((from - PI) / (2 * PI))) *most = PI;                     /* passes pi */
}

static bool add_across(filler *f, int32_t a, int32_t b, int32_t c, int32_t d, double from, double to, tml_reason reason, bool conditional,
                       int32_t source) {
    double least, most;
    widest(from, to, &least, &most);
    double near = tml_geometry_across(&f->geometry, a, b, c, d, least), far = tml_geometry_across(&f->geometry, a, b, c, d, most);
    /* Not known: nothing is said but that the two are too near in the bonds for the radii to count. */
    if (isnan(near) || isnan(far)) return add(f, a, d, 0, false, reason, conditional, source);
    return add_range(f, a, d, near - TORSION_SLACK, far + TORSION_SLACK, reason, conditional, source);
}

static bool fill_torsions(filler *f) {
    const tml_molecule *molecule = &f->problem->molecule;
    for (int32_t i = 0; i < molecule->torsion_count; i++) {
        const tml_torsion *torsion = &molecule->torsions[i];
        if (!isnan(tml_geometry_distance(&f->geometry, torsion->a, torsion->d))) continue;
        bool known = torsion->kind == TML_TORSION_FIXED || torsion->kind == TML_TORSION_PEPTIDE;
        double from = known ? torsion->angle - torsion->tolerance : 0, to = known ? torsion->angle + torsion->tolerance : PI;
        if (!add_across(f, torsion->a, torsion->b, torsion->c, torsion->d, from, to, TML_REASON_TORSION, assumed(f, torsion->a, torsion->d),
                        -1))
            return false;
    }
    return true;
}

/* ---- restraints ---- */

static bool bonded(const tml_molecule *molecule, int32_t a, int32_t b) {
    for (int32_t k = molecule->neighbour_first[a]; k < molecule->neighbour_first[a + 1]; k++)
        if (molecule->neighbours[k] == b) return true;
    return false;
}

static bool fill_dihedrals(filler *f) {
    const tml_restraints *restraints = &f->problem->restraints;
    for (int32_t i = 0; i < restraints->dihedral_count; i++) {
        const tml_dihedral_restraint *dihedral = &restraints->dihedrals[i];
        const tml_dihedral_interval *interval = &restraints->intervals[dihedral->first_interval];
        const int32_t *atoms = interval->atoms;
        if (dihedral->interval_count != 1 || !bonded(&f->problem->molecule, atoms[0], atoms[1]) ||
            !bonded(&f->problem->molecule, atoms[1], atoms[2]) || !bonded(&f->problem->molecule, atoms[2], atoms[3]))
            continue;
        if (!add_across(f, atoms[0], atoms[1], atoms[2], atoms[3], interval->lower, interval->upper, TML_REASON_DIHEDRAL, false, i))
            return false;
    }
    return true;
}

/* The largest covalent upper limit between two atoms of a group; INFINITY where they are not connected. */
static double diameter(tml_graph *covalent, const int32_t *atoms, int32_t count) {
    double most = 0;
    for (int32_t i = 0; i < count; i++) {
        if (count == 1) return 0;
        tml_graph_search(covalent, atoms[i], GROUP_REACH);
        for (int32_t j = 0; j < i; j++) most = fmax(most, covalent->distance[atoms[j]]);
    }
    return most;
}

/* The rule: with N pairs in the sum, its upper limit binds the nearest pair to u·N^(1/6); any pair is farther by no more than
 * the two groups' diameters. A lower limit l of a sum holds for every pair; of an average of N
 * pairs, l·N^(-1/6) does. Where a stereo pair is open, half of the pairs count and it is not known which: the limit on the
 * nearest of all still holds, a lower one of any single pair does not. */
static bool fill_alternative(filler *f, tml_graph *covalent, int32_t index, const tml_alternative *alternative, bool upper) {
    const tml_restraints *restraints = &f->problem->restraints;
    const tml_distance_restraint *restraint = &restraints->distances[index];
    const int32_t *a = &restraints->group_atoms[alternative->first_a], *b = &restraints->group_atoms[alternative->first_b];
    double pairs = restraint->combined ? alternative->pair_count : restraint->pair_count;
    if (tml_alternative_open(alternative)) {
        int32_t half_a = alternative->stereo_a >= 0 ? alternative->count_a / 2 : alternative->count_a;
        int32_t half_b = alternative->stereo_b >= 0 ? alternative->count_b / 2 : alternative->count_b;
        pairs = (double)half_a * half_b;
    }
    double most = restraint->upper * (restraint->average ? 1 : pow(pairs, 1.0 / 6.0));
    if (upper && alternative->pair_count > 1) most += diameter(covalent, a, alternative->count_a) + diameter(covalent, b, alternative->count_b);
    /* From a group's centre: no atom of the group is farther from it than the group's diameter. */
    double off_centre = (alternative->centre_a ? diameter(covalent, a, alternative->count_a) : 0) +
                        (alternative->centre_b ? diameter(covalent, b, alternative->count_b) : 0);
    double least = restraint->average && pairs > 1 ? restraint->lower * pow(pairs, -1.0 / 6.0) : restraint->lower;
    least -= off_centre;
    for (int32_t i = 0; i < alternative->count_a; i++)
        for (int32_t j = 0; j < alternative->count_b; j++) {
            if (upper && !add(f, a[i], b[j], most, true, TML_REASON_RESTRAINT, false, index)) return false;
            if (least > 0 && !tml_alternative_open(alternative) && !add(f, a[i], b[j], least, false, TML_REASON_RESTRAINT, false, index)) return false;
        }
    return true;
}

/* Whether all alternatives of a combined restraint belong to one combination: then all of them hold. */
static bool all_hold(const tml_restraints *restraints, const tml_distance_restraint *restraint) {
    const tml_alternative *alternatives = &restraints->alternatives[restraint->first_alternative];
    for (int32_t k = 0; k < restraint->alternative_count; k++)
        if (restraint->alternative_count > 1 && (alternatives[k].combination < 0 || alternatives[k].combination != alternatives[0].combination))
            return false;
    return true;
}

static bool fill_restraints(filler *f) {
    const tml_restraints *restraints = &f->problem->restraints;
    tml_graph covalent = {0};
    size_t covalent_count = f->givens->count;
    tml_given *covalent_givens = tml_alloc(covalent_count, sizeof *covalent_givens); /* the list grows and moves below */
    if (covalent_givens == NULL) return false;
    for (size_t i = 0; i < covalent_count; i++) covalent_givens[i] = f->givens->items[i];
    bool room = tml_graph_open(&covalent, covalent_givens, covalent_count, f->problem->molecule.atom_count);
    for (int32_t i = 0; room && i < restraints->distance_count; i++) {
        const tml_distance_restraint *restraint = &restraints->distances[i];
        bool certain = restraint->combined ? all_hold(restraints, restraint) : restraint->alternative_count == 1;
        bool lower = restraint->combined ? certain : true;
        for (int32_t k = 0; room && (certain || lower) && k < restraint->alternative_count; k++) {
            const tml_alternative *alternative = &restraints->alternatives[restraint->first_alternative + k];
            room = fill_alternative(f, &covalent, i, alternative, certain && !isinf(restraint->upper));
        }
    }
    tml_graph_close(&covalent);
    free(covalent_givens);
    return room;
}

/* ---- matrix ---- */

static bool is_covalent(const tml_given *given) {
    return given->reason != TML_REASON_RESTRAINT && given->reason != TML_REASON_DIHEDRAL;
}

tml_status tml_bounds_from_givens(const tml_problem *problem, const tml_givens *givens, tml_bounds **out, tml_error *error) {
    const tml_molecule *molecule = &problem->molecule;
    tml_contacts contacts;
    tml_status status = tml_bounds_new(molecule->atom_count, out, error);
    if (status != TML_OK) return status;
    if (tml_contacts_make(molecule, &contacts) != TML_OK) {
        tml_bounds_free(*out);
        *out = NULL;
        return tml_no_memory(error);
    }
    tml_bounds *bounds = *out;
    for (int32_t i = 0; i < bounds->n; i++) {
        const float *floors = &contacts.hard[contacts.class_of[i] * contacts.class_count];
        float *row = tml_bounds_cell(bounds, i, 0);
        for (int32_t j = 0; j < i; j++) row[j] = floors[contacts.class_of[j]];
    }
    tml_contacts_clear(&contacts);
    /* Covalent limits know better than the floors, which are for atoms that nothing holds together. */
    for (size_t i = 0; i < givens->count; i++)
        if (!givens->items[i].is_upper && is_covalent(&givens->items[i])) *tml_bounds_cell(bounds, givens->items[i].b, givens->items[i].a) = 0;
    for (size_t i = 0; i < givens->count; i++) {
        const tml_given *given = &givens->items[i];
        if (given->is_upper)
            tml_bounds_limit_upper(bounds, given->a, given->b, given->value);
        else
            tml_bounds_limit_lower(bounds, given->a, given->b, given->value);
    }
    return TML_OK;
}
