#include "molecule/making.h"

#include <math.h>
#include <string.h>

#include "base/vector.h"

/* Contents: a plane's coordinates - placing atom by atom - relaxing by least squares */

enum { MOST = TML_PLANE_MAX, MOST_PAIRS = MOST * 4 };

/* One plane by its local indices. */
typedef struct sketch {
    const tml_molecule *molecule;
    const int32_t *atoms;
    int count;
    double xy[MOST][2];
    bool placed[MOST];
} sketch;

/* Distances that the plane should have. */
typedef struct wish {
    int i, j;
    double distance, weight;
} wish;

static bool place_atoms(sketch *plane);
static void relax(sketch *plane);

/* ---- a plane's coordinates ---- */

/* Ideal coordinates of a plane whose bonds hang together, from their lengths, angles and torsions (0 or 180°). */
void tml_plane_fill(tml_molecule *molecule, int32_t index) {
    tml_plane *plane = &molecule->planes[index];
    plane->has_xy = false;
    if (plane->count > MOST) return;
    sketch drawn = {.molecule = molecule, .atoms = &molecule->plane_atoms[plane->first], .count = plane->count};
    if (!place_atoms(&drawn)) return;
    relax(&drawn);
    for (int i = 0; i < drawn.count; i++)
        for (int k = 0; k < 2; k++) molecule->plane_xy[2 * (plane->first + i) + k] = drawn.xy[i][k];
    plane->has_xy = true;
}

static int local(const sketch *plane, int32_t atom) {
    for (int i = 0; i < plane->count; i++)
        if (plane->atoms[i] == atom) return i;
    return -1;
}

static double bond_length(const sketch *plane, int i, int j) {
    const tml_molecule *molecule = plane->molecule;
    int32_t a = plane->atoms[i];
    for (int32_t k = molecule->neighbour_first[a]; k < molecule->neighbour_first[a + 1]; k++)
        if (molecule->neighbours[k] == plane->atoms[j]) return molecule->bonds[molecule->neighbour_bonds[k]].length;
    return NAN;
}

/* The angle i-j-k, NAN where there is none. */
static double angle_at(const sketch *plane, int i, int j, int k) {
    const tml_molecule *molecule = plane->molecule;
    int32_t a = plane->atoms[i], b = plane->atoms[j], c = plane->atoms[k];
    for (int32_t t = molecule->angle_first[b]; t < molecule->angle_first[b + 1]; t++) {
        const tml_angle *angle = &molecule->angles[t];
        if ((angle->a == a && angle->c == c) || (angle->a == c && angle->c == a)) return angle->angle;
    }
    return NAN;
}

/* ---- placing atom by atom ---- */

static bool place_around(sketch *plane, int centre, int from);

/* From an atom outwards: when an atom's turn comes, its own neighbours are placed, the one that it was reached from already is.
 */
static bool place_atoms(sketch *plane) {
    int queue[MOST], from[MOST], head = 0, tail = 0;
    queue[0] = 0;
    from[0] = -1;
    plane->placed[0] = true;
    tail = 1;
    while (head < tail) {
        int centre = queue[head], source = from[head];
        head++;
        bool before[MOST];
        memcpy(before, plane->placed, sizeof before);
        if (source < 0) {
            for (int j = 1; j < plane->count && source < 0; j++) {
                double length = bond_length(plane, centre, j);
                if (isnan(length)) continue;
                source = j;
                plane->placed[j] = true;
                plane->xy[j][0] = length;
            }
            if (source < 0) return false;
        }
        if (!place_around(plane, centre, source)) return false;
        for (int j = 0; j < plane->count; j++)
            if (plane->placed[j] && !before[j]) {
                queue[tail] = j;
                from[tail++] = centre;
            }
    }
    return tail == plane->count;
}

static int side_by_torsion(const sketch *plane, int from, int centre, int j);
static int side_of(const sketch *plane, int from, int centre, int j);

/* Place the other neighbours of `centre`, each at its angle to `from`: the first on the side that a torsion tells, or any where
 * nothing can tell; the second on the other. */
static bool place_around(sketch *plane, int centre, int from) {
    int taken = 0; /* side of the neighbour placed last: +1, -1 */
    for (int j = 0; j < plane->count; j++)
        if (j != from && plane->placed[j] && !isnan(bond_length(plane, centre, j))) taken = side_of(plane, from, centre, j);
    bool can_tell = false;
    for (int i = 0; i < plane->count; i++)
        can_tell = can_tell || (i != centre && plane->placed[i] && !isnan(bond_length(plane, from, i)));
    for (int j = 0; j < plane->count; j++) {
        double length = bond_length(plane, centre, j), angle = angle_at(plane, from, centre, j);
        if (plane->placed[j] || isnan(length)) continue;
        int side = taken != 0 ? -taken : side_by_torsion(plane, from, centre, j);
        if (isnan(angle) || (side == 0 && can_tell)) return false;
        if (side == 0) side = 1;
        double dx = plane->xy[from][0] - plane->xy[centre][0], dy = plane->xy[from][1] - plane->xy[centre][1];
        double scale = length / hypot(dx, dy), c = cos(angle), s = side * sin(angle);
        plane->xy[j][0] = plane->xy[centre][0] + scale * (c * dx - s * dy);
        plane->xy[j][1] = plane->xy[centre][1] + scale * (s * dx + c * dy);
        plane->placed[j] = true;
        taken = side;
    }
    return true;
}

/* On which side of the line from `centre` to `from` an atom lies: +1 left, -1 right. */
static int side_of(const sketch *plane, int from, int centre, int j) {
    double ux = plane->xy[from][0] - plane->xy[centre][0], uy = plane->xy[from][1] - plane->xy[centre][1];
    double vx = plane->xy[j][0] - plane->xy[centre][0], vy = plane->xy[j][1] - plane->xy[centre][1];
    return ux * vy - uy * vx > 0 ? 1 : -1;
}

/* The side that a torsion i-from-centre-j of 0 or 180° asks for; 0 where there is none to a placed atom. */
static int side_by_torsion(const sketch *plane, int from, int centre, int j) {
    const tml_molecule *molecule = plane->molecule;
    int32_t b = plane->atoms[from], c = plane->atoms[centre], d = plane->atoms[j];
    for (int32_t k = molecule->neighbour_first[c]; k < molecule->neighbour_first[c + 1]; k++) {
        if (molecule->neighbours[k] != b) continue;
        int32_t bond = molecule->neighbour_bonds[k];
        for (int32_t t = molecule->torsion_first[bond]; t < molecule->torsion_first[bond + 1]; t++) {
            const tml_torsion *torsion = &molecule->torsions[t];
            if (torsion->kind != TML_TORSION_FIXED && torsion->kind != TML_TORSION_PEPTIDE) continue;
            int32_t other = torsion->d == d ? torsion->a : torsion->a == d ? torsion->d : -1;
            int i = other < 0 ? -1 : local(plane, other);
            if (i < 0 || !plane->placed[i] || isnan(bond_length(plane, from, i))) continue;
            int side = side_of(plane, from, centre, i);
            return fabs(torsion->angle) < TML_PI / 2 ? side : -side;
        }
    }
    return 0;
}

/* ---- relaxing by least squares ---- */

static int list_wishes(const sketch *plane, wish wishes[MOST_PAIRS]);
static bool solve(double *matrix, double *right, int n);

/* Gauss-Newton on bond lengths and, at a tenth of the weight, distances across angles: published lengths and angles of a ring
 * never close it exactly. A small damping holds the whole in place. */
static void relax(sketch *plane) {
    enum { STEPS = 20 };
    static const double DAMPING = 1e-6, SMALL = 1e-9;
    wish wishes[MOST_PAIRS];
    double matrix[4 * MOST * MOST], right[2 * MOST];
    int n = 2 * plane->count, wish_count = list_wishes(plane, wishes);
    for (int step = 0; step < STEPS; step++) {
        memset(matrix, 0, sizeof matrix);
        memset(right, 0, sizeof right);
        for (int w = 0; w < wish_count; w++) {
            int i = wishes[w].i, j = wishes[w].j;
            double dx = plane->xy[i][0] - plane->xy[j][0], dy = plane->xy[i][1] - plane->xy[j][1], r = hypot(dx, dy);
            if (r < SMALL) continue;
            const double slope[4] = {dx / r, dy / r, -dx / r, -dy / r};
            const int at[4] = {2 * i, 2 * i + 1, 2 * j, 2 * j + 1};
            for (int p = 0; p < 4; p++) {
                right[at[p]] -= wishes[w].weight * (r - wishes[w].distance) * slope[p];
                for (int q = 0; q < 4; q++) matrix[at[p] * n + at[q]] += wishes[w].weight * slope[p] * slope[q];
            }
        }
        for (int i = 0; i < n; i++) matrix[i * n + i] += DAMPING;
        if (!solve(matrix, right, n)) return;
        double largest = 0;
        for (int i = 0; i < n; i++) {
            plane->xy[i / 2][i % 2] += right[i];
            largest = fmax(largest, fabs(right[i]));
        }
        if (largest < SMALL) return;
    }
}

static int list_wishes(const sketch *plane, wish wishes[MOST_PAIRS]) {
    int count = 0;
    for (int i = 0; i < plane->count; i++)
        for (int j = i + 1; j < plane->count; j++) {
            double length = bond_length(plane, i, j);
            if (!isnan(length) && count < MOST_PAIRS) wishes[count++] = (wish){i, j, length, 1};
        }
    for (int b = 0; b < plane->count; b++)
        for (int i = 0; i < plane->count; i++)
            for (int j = i + 1; j < plane->count; j++) {
                double angle = angle_at(plane, i, b, j);
                if (isnan(angle) || count >= MOST_PAIRS) continue;
                double p = bond_length(plane, i, b), q = bond_length(plane, b, j);
                wishes[count++] = (wish){i, j, sqrt(p * p + q * q - 2 * p * q * cos(angle)), 0.1};
            }
    return count;
}

/* Cholesky (symmetric positive definite), in place; the solution replaces the right side. */
static bool solve(double *matrix, double *right, int n) {
    for (int j = 0; j < n; j++) {
        double pivot = matrix[j * n + j];
        for (int k = 0; k < j; k++) pivot -= matrix[j * n + k] * matrix[j * n + k];
        if (pivot <= 0) return false;
        matrix[j * n + j] = sqrt(pivot);
        for (int i = j + 1; i < n; i++) {
            double sum = matrix[i * n + j];
            for (int k = 0; k < j; k++) sum -= matrix[i * n + k] * matrix[j * n + k];
            matrix[i * n + j] = sum / matrix[j * n + j];
        }
    }
    for (int i = 0; i < n; i++) {
        for (int k = 0; k < i; k++) right[i] -= matrix[i * n + k] * right[k];
        right[i] /= matrix[i * n + i];
    }
    for (int i = n - 1; i >= 0; i--) {
        for (int k = i + 1; k < n; k++) right[i] -= matrix[k * n + i] * right[k];
        right[i] /= matrix[i * n + i];
    }
    return true;
}
