#include "restraint/restraint.h"

#include <math.h>
#include <stdlib.h>

#include "base/vector.h"

static const double PI = 3.14159265358979323846;

void tml_restraints_clear(tml_restraints *restraints) {
    free(restraints->distances);
    free(restraints->alternatives);
    free(restraints->group_atoms);
    free(restraints->dihedrals);
    free(restraints->intervals);
    free(restraints->unmapped);
    free(restraints->stereo);
    free(restraints->stereo_members);
    *restraints = (tml_restraints){0};
}

static tml_group side(const tml_restraints *restraints, int32_t first, int32_t count, int32_t stereo, bool second, const bool *swapped) {
    const int32_t *atoms = &restraints->group_atoms[first];
    if (stereo < 0 || swapped == NULL) return (tml_group){atoms, count};
    return (tml_group){second != swapped[stereo] ? atoms + count / 2 : atoms, count / 2};
}

void tml_alternative_sides(const tml_restraints *restraints, const tml_alternative *alternative, const bool *swapped, tml_group *a,
                           tml_group *b) {
    *a = side(restraints, alternative->first_a, alternative->count_a, alternative->stereo_a, alternative->second_a, swapped);
    *b = side(restraints, alternative->first_b, alternative->count_b, alternative->stereo_b, alternative->second_b, swapped);
}

/* Point k of a side: an atom, or the centre of all. NAN where one of them is missing. */
static void point_of(const tml_group *side, bool centre, int32_t k, const double *xyz, double out[3]) {
    for (int l = 0; l < 3; l++) {
        out[l] = centre ? 0 : xyz[3 * side->atoms[k] + l];
        for (int32_t i = 0; centre && i < side->count; i++) out[l] += xyz[3 * side->atoms[i] + l] / side->count;
    }
}

/* Σ r⁻⁶ over one alternative's pairs, whose number is added to *pairs. */
static double sum_over(const tml_restraints *restraints, const tml_alternative *alternative, const bool *swapped, const double *xyz,
                       int64_t *pairs) {
    double sum = 0;
    tml_group one, other;
    tml_alternative_sides(restraints, alternative, swapped, &one, &other);
    for (int32_t i = 0; i < (alternative->centre_a ? 1 : one.count); i++)
        for (int32_t j = 0; j < (alternative->centre_b ? 1 : other.count); j++) {
            double a[3], b[3], d[3];
            if (!tml_alternative_centred(alternative) && one.atoms[i] == other.atoms[j]) continue;
            point_of(&one, alternative->centre_a, i, xyz, a);
            point_of(&other, alternative->centre_b, j, xyz, b);
            tml_sub(d, a, b);
            double square = tml_dot(d, d);
            if (isnan(square)) continue;
            ++*pairs;
            sum += 1.0 / (square * square * square);
        }
    return sum;
}

double tml_alternative_distance(const tml_restraints *restraints, const tml_alternative *alternative, bool average, const bool *swapped,
                                const double *xyz) {
    int64_t pairs = 0;
    double sum = sum_over(restraints, alternative, swapped, xyz, &pairs);
    if (pairs == 0) return NAN;
    return pow(average ? sum / (double)pairs : sum, -1.0 / 6.0);
}

double tml_restraint_distance(const tml_restraints *restraints, const tml_distance_restraint *restraint, const bool *swapped,
                              const double *xyz) {
    double sum = 0;
    int64_t pairs = 0;
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++)
        sum += sum_over(restraints, &restraints->alternatives[k], swapped, xyz, &pairs);
    if (pairs == 0) return NAN;
    return pow(restraint->average ? sum / (double)pairs : sum, -1.0 / 6.0);
}

double tml_between_chains(const tml_restraints *restraints, const tml_molecule *molecule, const tml_distance_restraint *restraint,
                          const bool *swapped, const double *xyz) {
    double sum[2] = {0};
    bool any[2] = {false};
    int64_t pairs = 0;
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++) {
        const tml_alternative *alternative = &restraints->alternatives[k];
        const tml_atom *a = &molecule->atoms[restraints->group_atoms[alternative->first_a]];
        const tml_atom *b = &molecule->atoms[restraints->group_atoms[alternative->first_b]];
        bool between = molecule->residues[a->residue].chain_index != molecule->residues[b->residue].chain_index;
        any[between] = true;
        sum[between] += sum_over(restraints, alternative, swapped, xyz, &pairs);
    }
    return any[0] && any[1] ? sum[1] / (sum[0] + sum[1]) : NAN;
}

static double beyond(const tml_distance_restraint *restraint, double distance) {
    if (isnan(distance)) return NAN;
    return distance > restraint->upper ? distance - restraint->upper : distance < restraint->lower ? distance - restraint->lower : 0;
}

double tml_distance_violation(const tml_restraints *restraints, const tml_distance_restraint *restraint, const bool *swapped,
                              const double *xyz) {
    if (!restraint->combined) return beyond(restraint, tml_restraint_distance(restraints, restraint, swapped, xyz));
    const tml_alternative *alternatives = &restraints->alternatives[restraint->first_alternative];
    double least = INFINITY;
    for (int32_t k = 0, count = restraint->alternative_count; k < count;) {
        int32_t combination = alternatives[k].combination;
        double worst = 0; /* of the alternatives that must hold together */
        do {
            double off = beyond(restraint, tml_alternative_distance(restraints, &alternatives[k++], restraint->average, swapped, xyz));
            if (isnan(off) || fabs(off) > fabs(worst)) worst = off;
            if (isnan(worst)) worst = INFINITY; /* with atoms missing it cannot be said to hold */
        } while (combination >= 0 && k < count && alternatives[k].combination == combination);
        if (fabs(worst) < fabs(least)) least = worst;
    }
    return isinf(least) ? NAN : least;
}

double tml_dihedral_violation(const tml_restraints *restraints, const tml_dihedral_restraint *restraint, const double *xyz) {
    double least = INFINITY;
    for (int32_t k = restraint->first_interval; k < restraint->first_interval + restraint->interval_count; k++) {
        const tml_dihedral_interval *interval = &restraints->intervals[k];
        const int32_t *atoms = interval->atoms;
        double off = tml_dihedral_of(&xyz[3 * atoms[0]], &xyz[3 * atoms[1]], &xyz[3 * atoms[2]], &xyz[3 * atoms[3]]) - interval->lower;
        if (isnan(off)) continue;
        off -= 2 * PI * floor(off / (2 * PI));
        double width = interval->upper - interval->lower;
        least = fmin(least, off <= width ? 0 : fmin(off - width, 2 * PI - off));
    }
    return isinf(least) ? NAN : least;
}
