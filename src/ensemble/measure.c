/* measure.c: what one model is like.
 *
 *   restraints   distances, dihedrals
 *   geometry     bonds, angles, planes, hands, peptide bonds
 *   alike        chains that are to have one shape
 *   contacts     pairs that overlap, over a grid of cells
 *   backbone     share of usual phi and psi
 */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/best_plane.h"
#include "base/memory.h"
#include "base/superpose.h"
#include "base/vector.h"
#include "ensemble/ensemble.h"
#include "molecule/elements.h"

static const double DEGREES = 180.0 / TML_PI;

static void measure_restraints(const tml_problem *problem, const bool *swapped, const double *xyz, tml_measures *out);
static void measure_geometry(const tml_molecule *molecule, const double *xyz, tml_measures *out);
static void measure_planes(const tml_molecule *molecule, const double *xyz, tml_measures *out);
static void measure_peptides(const tml_molecule *molecule, const double *xyz, tml_measures *out);
static bool measure_overlaps(const tml_molecule *molecule, const double *xyz, tml_measures *out);
static bool measure_alike(const tml_molecule *molecule, const double *xyz, tml_measures *out);
static bool measure_backbone(const tml_molecule *molecule, const double *xyz, tml_measures *out);

tml_status tml_measure(const tml_problem *problem, const bool *swapped, const double *xyz, tml_measures *out, tml_error *error) {
    *out = (tml_measures){0};
    measure_restraints(problem, swapped, xyz, out);
    measure_geometry(&problem->molecule, xyz, out);
    measure_planes(&problem->molecule, xyz, out);
    measure_peptides(&problem->molecule, xyz, out);
    if (!measure_alike(&problem->molecule, xyz, out) || !measure_overlaps(&problem->molecule, xyz, out) || !measure_backbone(&problem->molecule, xyz, out)) return tml_no_memory(error);
    return TML_OK;
}

bool tml_measures_pass(const tml_measures *measures) {
    static const double BOND_OFF = 0.1;
    return measures->distance_over_05 == 0 && measures->dihedral_over_10 == 0 && measures->wrong_handed == 0 && measures->swapped_names == 0 &&
           measures->cis_undeclared == 0 && measures->bond_max <= BOND_OFF;
}

/* ---- restraints ---- */

static void measure_restraints(const tml_problem *problem, const bool *swapped, const double *xyz, tml_measures *out) {
    const tml_restraints *restraints = &problem->restraints;
    double squares = 0;
    int32_t count = 0;
    for (int32_t i = 0; i < restraints->distance_count; i++) {
        double off = fabs(tml_distance_violation(restraints, &restraints->distances[i], swapped, xyz));
        if (isnan(off)) continue;
        count++;
        squares += off * off;
        out->distance_max = fmax(out->distance_max, off);
        out->distance_over_01 += off > 0.1;
        out->distance_over_02 += off > 0.2;
        out->distance_over_05 += off > 0.5;
    }
    if (count > 0) out->distance_rms = sqrt(squares / count);
    for (int32_t i = 0; i < restraints->dihedral_count; i++) {
        double off = DEGREES * tml_dihedral_violation(restraints, &restraints->dihedrals[i], xyz);
        out->dihedral_max = fmax(out->dihedral_max, off);
        out->dihedral_over_5 += off > 5;
        out->dihedral_over_10 += off > 10;
    }
}

/* ---- geometry ---- */

static void measure_geometry(const tml_molecule *molecule, const double *xyz, tml_measures *out) {
    double squares = 0;
    int32_t count = 0;
    for (int32_t i = 0; i < molecule->bond_count; i++) {
        const tml_bond *bond = &molecule->bonds[i];
        double off = tml_distance(&xyz[3 * bond->a], &xyz[3 * bond->b]) - bond->length;
        if (isnan(off)) continue;
        count++;
        squares += off * off;
        out->bond_max = fmax(out->bond_max, fabs(off));
    }
    if (count > 0) out->bond_rms = sqrt(squares / count);
    squares = 0;
    count = 0;
    for (int32_t i = 0; i < molecule->angle_count; i++) {
        const tml_angle *angle = &molecule->angles[i];
        double off = DEGREES * (tml_angle_of(&xyz[3 * angle->a], &xyz[3 * angle->b], &xyz[3 * angle->c]) - angle->angle);
        if (isnan(off)) continue;
        count++;
        squares += off * off;
    }
    if (count > 0) out->angle_rms = sqrt(squares / count);
    for (int32_t i = 0; i < molecule->centre_count; i++) {
        const tml_centre *centre = &molecule->centres[i];
        double volume = tml_volume_of(&xyz[3 * centre->centre], &xyz[3 * centre->arms[0]], &xyz[3 * centre->arms[1]], &xyz[3 * centre->arms[2]]);
        if (!centre->fixed || !(volume * centre->sign <= 0)) continue;
        if (tml_molecule_is_prochiral(molecule, centre))
            out->swapped_names++;
        else
            out->wrong_handed++;
    }
}

static bool are_there(const int32_t *atoms, int32_t count, const double *xyz) {
    for (int32_t k = 0; k < count; k++)
        if (!isfinite(xyz[3 * atoms[k]])) return false;
    return true;
}

static void measure_planes(const tml_molecule *molecule, const double *xyz, tml_measures *out) {
    for (int32_t i = 0; i < molecule->plane_count; i++)
        if (molecule->planes[i].count > 3 && are_there(&molecule->plane_atoms[molecule->planes[i].first], molecule->planes[i].count, xyz))
            out->plane_max = fmax(out->plane_max, tml_off_plane(&molecule->plane_atoms[molecule->planes[i].first], molecule->planes[i].count, xyz));
}

static void measure_peptides(const tml_molecule *molecule, const double *xyz, tml_measures *out) {
    static const double OFF = 30.0;
    for (int32_t i = 0; i < molecule->peptide_count; i++) {
        const tml_peptide *peptide = &molecule->peptides[i];
        double omega = DEGREES * fabs(tml_dihedral_of(&xyz[3 * peptide->ca1], &xyz[3 * peptide->c], &xyz[3 * peptide->n], &xyz[3 * peptide->ca2]));
        bool proline = strcmp(molecule->residues[peptide->residue2].name, "PRO") == 0;
        out->cis_undeclared += omega < OFF && !peptide->cis && !proline;
        out->omega_off += (peptide->cis ? omega : 180.0 - omega) > OFF;
    }
}

/* ---- alike chains ---- */

/* The worst two copies, each superposed on the other. */
static bool measure_alike(const tml_molecule *molecule, const double *xyz, tml_measures *out) {
    out->alike_rms = molecule->alike_count > 0 ? 0 : NAN;
    for (int32_t s = 0; s < molecule->alike_count; s++) {
        const tml_alike *set = &molecule->alike[s];
        const int32_t *atoms = &molecule->alike_atoms[set->first];
        size_t count = (size_t)set->count;
        double *copies = tml_alloc((size_t)set->copies * count * 3, sizeof *copies);
        tml_motion motion;
        if (!are_there(atoms, set->copies * set->count, xyz)) out->alike_rms = NAN;
        if (copies == NULL) return false;
        for (size_t i = 0; !isnan(out->alike_rms) && i < (size_t)set->copies * count; i++) memcpy(&copies[3 * i], &xyz[3 * atoms[i]], 3 * sizeof *copies);
        for (int32_t c = 0; !isnan(out->alike_rms) && c < set->copies; c++)
            for (int32_t d = 0; d < c; d++)
                out->alike_rms = fmax(out->alike_rms, tml_superpose(&copies[3 * count * (size_t)c], &copies[3 * count * (size_t)d], NULL, set->count, &motion));
        free(copies);
    }
    return true;
}

/* ---- contacts ---- */

/* Atoms within three bonds of each other are no contact: all that a walk of three bonds from `atom` meets is marked with it. */
static void mark_near(const tml_molecule *molecule, int32_t atom, int32_t *mark) {
    const int32_t *first = molecule->neighbour_first, *next = molecule->neighbours;
    mark[atom] = atom;
    for (int32_t i = first[atom]; i < first[atom + 1]; i++) {
        mark[next[i]] = atom;
        for (int32_t j = first[next[i]]; j < first[next[i] + 1]; j++) {
            mark[next[j]] = atom;
            for (int32_t k = first[next[j]]; k < first[next[j] + 1]; k++) mark[next[k]] = atom;
        }
    }
}

static bool is_polar(const tml_molecule *molecule, int32_t atom) {
    int element = molecule->atoms[atom].element;
    return element == 7 || element == 8 || element == 16;
}

static bool is_polar_hydrogen(const tml_molecule *molecule, int32_t atom) {
    if (molecule->atoms[atom].element != 1) return false;
    for (int32_t k = molecule->neighbour_first[atom]; k < molecule->neighbour_first[atom + 1]; k++)
        if (is_polar(molecule, molecule->neighbours[k])) return true;
    return false;
}

static bool overlap(const tml_molecule *molecule, int32_t a, int32_t b, double distance) {
    static const double LET_OFF = 0.6, LET_OFF_POLAR = 1.0;
    double first = tml_element_vdw_radius(molecule->atoms[a].element), second = tml_element_vdw_radius(molecule->atoms[b].element);
    if (first <= 0 || second <= 0 || first + second - distance <= LET_OFF) return false;
    bool polar = (is_polar(molecule, a) && (is_polar(molecule, b) || is_polar_hydrogen(molecule, b))) ||
                 (is_polar(molecule, b) && is_polar_hydrogen(molecule, a));
    return !polar || first + second - distance > LET_OFF_POLAR;
}

typedef struct by_cell { int64_t key; int32_t atom; } by_cell;

static int compare_cells(const void *left, const void *right) {
    const by_cell *l = left, *r = right;
    if (l->key != r->key) return l->key < r->key ? -1 : 1;
    return l->atom < r->atom ? -1 : l->atom > r->atom;
}

enum { CELL_HALF = 1 << 19, CELL_SPAN = 2 * CELL_HALF };
static const double CELL = 4.0; /* Å; more than any two radii less what is let off */

static int64_t cell_along(double at) {
    double cell = floor(at / CELL);
    return cell > -CELL_HALF && cell < CELL_HALF ? (int64_t)cell + CELL_HALF : 0;
}

static int64_t key_of(const double *xyz, int dx, int dy, int dz) {
    return ((cell_along(xyz[2]) + dz) * CELL_SPAN + cell_along(xyz[1]) + dy) * CELL_SPAN + cell_along(xyz[0]) + dx;
}

static size_t first_at_least(const by_cell *cells, size_t count, int64_t key) {
    size_t low = 0, high = count;
    while (low < high) {
        size_t middle = (low + high) / 2;
        if (cells[middle].key < key)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

/* Overlaps of one atom with atoms of a greater number in the 27 cells about it: nine runs of three. */
static int32_t overlaps_of(const tml_molecule *molecule, const double *xyz, int32_t atom, const by_cell *cells, size_t count,
                           const int32_t *mark) {
    int32_t found = 0;
    for (int dz = -1; dz <= 1; dz++)
        for (int dy = -1; dy <= 1; dy++) {
            int64_t last = key_of(&xyz[3 * atom], 1, dy, dz);
            for (size_t k = first_at_least(cells, count, key_of(&xyz[3 * atom], -1, dy, dz)); k < count && cells[k].key <= last; k++) {
                int32_t other = cells[k].atom;
                if (other > atom && mark[other] != atom)
                    found += overlap(molecule, atom, other, tml_distance(&xyz[3 * atom], &xyz[3 * other]));
            }
        }
    return found;
}

static bool measure_overlaps(const tml_molecule *molecule, const double *xyz, tml_measures *out) {
    size_t all = (size_t)molecule->atom_count, count = 0; /* atoms that are there */
    by_cell *cells = tml_alloc(all, sizeof *cells);
    int32_t *mark = tml_alloc(all, sizeof *mark);
    bool room = cells != NULL && mark != NULL;
    for (size_t i = 0; room && i < all; i++) {
        if (isfinite(xyz[3 * i])) cells[count++] = (by_cell){key_of(&xyz[3 * i], 0, 0, 0), (int32_t)i};
        mark[i] = -1;
    }
    if (room) qsort(cells, count, sizeof *cells, compare_cells);
    for (int32_t i = 0; room && i < molecule->atom_count; i++) {
        if (!isfinite(xyz[3 * i])) continue;
        mark_near(molecule, i, mark);
        out->overlaps += overlaps_of(molecule, xyz, i, cells, count, mark);
    }
    free(cells);
    free(mark);
    return room;
}

/* ---- backbone ---- */

/* Coarse usual regions of phi and psi, degrees, for all residues but glycine: strand and its bridge, right-handed helix,
 * left-handed helix. Common practice; no source. */
static bool is_usual(double phi, double psi) {
    if (phi >= -180 && phi <= -35 && (psi >= 90 || psi <= -160)) return true;
    if (phi >= -170 && phi <= -35 && psi >= -85 && psi < 90) return true;
    return phi >= 35 && phi <= 90 && psi >= 0 && psi <= 95;
}

static bool measure_backbone(const tml_molecule *molecule, const double *xyz, tml_measures *out) {
    int32_t seen = 0, usual = 0;
    const tml_peptide **into = tml_alloc((size_t)molecule->residue_count, sizeof *into); /* the bond that ends in a residue */
    if (into == NULL) return false;
    for (int32_t i = 0; i < molecule->peptide_count; i++) into[molecule->peptides[i].residue2] = &molecule->peptides[i];
    for (int32_t i = 0; i < molecule->peptide_count; i++) {
        const tml_peptide *after = &molecule->peptides[i], *before = into[after->residue1];
        if (before == NULL || strcmp(molecule->residues[after->residue1].name, "GLY") == 0) continue;
        const double *n = &xyz[3 * before->n], *ca = &xyz[3 * after->ca1], *c = &xyz[3 * after->c];
        int hand = tml_molecule_hand(molecule, before->n, after->ca1, after->c); /* D: the mirrored regions */
        if (hand == 0) continue;
        double phi = hand * DEGREES * tml_dihedral_of(&xyz[3 * before->c], n, ca, c);
        double psi = hand * DEGREES * tml_dihedral_of(n, ca, c, &xyz[3 * after->n]);
        if (isnan(phi) || isnan(psi)) continue;
        seen++;
        usual += is_usual(phi, psi);
    }
    free(into);
    out->backbone_usual = seen > 0 ? (double)usual / seen : NAN;
    return true;
}
