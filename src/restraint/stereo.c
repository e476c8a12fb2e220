#include "restraint/stereo.h"

#include <math.h>
#include <stdlib.h>

#include "base/memory.h"

bool tml_stereo_open(tml_stereo_book *book, const tml_molecule *molecule, tml_restraints *restraints) {
    *book = (tml_stereo_book){.molecule = molecule, .restraints = restraints};
    book->of_carrier = tml_alloc((size_t)molecule->atom_count, sizeof *book->of_carrier);
    book->listed = tml_alloc((size_t)molecule->atom_count, sizeof *book->listed);
    return book->of_carrier != NULL && book->listed != NULL;
}

/* What a pair stands on: the heavy atoms that carry its members, or, where one atom carries both, the members themselves. */
static void find_carriers(const tml_molecule *molecule, int32_t first, int32_t second, int32_t carrier[2]) {
    const int32_t atoms[2] = {first, second};
    for (int k = 0; k < 2; k++) {
        int32_t at = molecule->neighbour_first[atoms[k]];
        bool held = molecule->atoms[atoms[k]].element == 1 && at < molecule->neighbour_first[atoms[k] + 1];
        carrier[k] = held ? molecule->neighbours[at] : atoms[k];
    }
    if (carrier[0] != carrier[1]) return;
    carrier[0] = first;
    carrier[1] = second;
}

/* The pair that stands on two atoms, or on two that are bonded to them, in either order. */
static int32_t known_pair(const tml_stereo_book *book, const int32_t carrier[2]) {
    const tml_molecule *molecule = book->molecule;
    int32_t mark = book->of_carrier[carrier[0]];
    if (mark != 0 && book->of_carrier[carrier[1]] == -mark) return mark;
    if (molecule->atoms[carrier[0]].element == 1) return 0;
    for (int32_t k = molecule->neighbour_first[carrier[0]]; k < molecule->neighbour_first[carrier[0] + 1]; k++)
        for (int32_t l = molecule->neighbour_first[carrier[1]]; l < molecule->neighbour_first[carrier[1] + 1]; l++) {
            mark = book->of_carrier[molecule->neighbours[k]];
            if (mark != 0 && molecule->atoms[molecule->neighbours[k]].element != 1 &&
                book->of_carrier[molecule->neighbours[l]] == -mark)
                return mark;
        }
    return 0;
}

int32_t tml_stereo_pair(tml_stereo_book *book, const int32_t *atoms, int32_t half, bool *reversed) {
    tml_restraints *restraints = book->restraints;
    int32_t carrier[2];
    find_carriers(book->molecule, atoms[0], atoms[half], carrier);
    int32_t mark = known_pair(book, carrier);
    if (mark == 0) {
        if (!tml_grow(&restraints->stereo, &book->pairs, (size_t)restraints->stereo_count + 1, sizeof *restraints->stereo)) return -1;
        restraints->stereo[restraints->stereo_count++] = (tml_stereo){.residue = book->molecule->atoms[atoms[0]].residue};
        mark = restraints->stereo_count;
    }
    book->of_carrier[carrier[0]] = mark;
    book->of_carrier[carrier[1]] = -mark;
    *reversed = mark < 0;
    int32_t pair = abs(mark) - 1;
    for (int32_t k = 0; k < half; k++) {
        if (book->listed[atoms[k]]) continue;
        if (!tml_grow(&restraints->stereo_members, &book->members, (size_t)restraints->stereo_member_count + 1,
                      sizeof *restraints->stereo_members))
            return -1;
        book->listed[atoms[k]] = book->listed[atoms[half + k]] = true;
        restraints->stereo_members[restraints->stereo_member_count++] =
            *reversed ? (tml_stereo_member){pair, atoms[half + k], atoms[k]} : (tml_stereo_member){pair, atoms[k], atoms[half + k]};
    }
    return pair;
}

static int by_pair(const void *left, const void *right) {
    const tml_stereo_member *l = left, *r = right;
    if (l->stereo != r->stereo) return l->stereo < r->stereo ? -1 : 1;
    return l->first < r->first ? -1 : l->first > r->first;
}

void tml_stereo_close(tml_stereo_book *book) {
    tml_restraints *restraints = book->restraints;
    free(book->of_carrier);
    free(book->listed);
    book->of_carrier = NULL;
    book->listed = NULL;
    if (restraints == NULL || restraints->stereo_member_count == 0) return;
    qsort(restraints->stereo_members, (size_t)restraints->stereo_member_count, sizeof *restraints->stereo_members, by_pair);
    for (int32_t k = restraints->stereo_member_count - 1; k >= 0; k--) {
        tml_stereo *pair = &restraints->stereo[restraints->stereo_members[k].stereo];
        pair->first_member = k;
        pair->member_count++;
    }
}

/* ---- choosing for given models ---- */

static bool hangs_on(const tml_restraints *restraints, const tml_distance_restraint *restraint, int32_t pair) {
    for (int32_t k = restraint->first_alternative; k < restraint->first_alternative + restraint->alternative_count; k++)
        if (restraints->alternatives[k].stereo_a == pair || restraints->alternatives[k].stereo_b == pair) return true;
    return false;
}

static double squares_of(const tml_restraints *restraints, int32_t pair, const bool *swapped, const double *xyz) {
    double sum = 0;
    for (int32_t i = 0; i < restraints->distance_count; i++) {
        const tml_distance_restraint *restraint = &restraints->distances[i];
        if (!hangs_on(restraints, restraint, pair)) continue;
        double off = tml_distance_violation(restraints, restraint, swapped, xyz);
        if (!isnan(off)) sum += restraint->weight * off * off;
    }
    return sum;
}

void tml_stereo_choose(const tml_restraints *restraints, const double *xyz, bool *swapped) {
    enum { ROUNDS = 10 };
    bool changed = true;
    for (int round = 0; changed && round < ROUNDS; round++) {
        changed = false;
        for (int32_t pair = 0; pair < restraints->stereo_count; pair++) {
            double before = squares_of(restraints, pair, swapped, xyz);
            if (before == 0) continue;
            swapped[pair] = !swapped[pair];
            if (squares_of(restraints, pair, swapped, xyz) < before - 1e-9)
                changed = true;
            else
                swapped[pair] = !swapped[pair];
        }
    }
}
