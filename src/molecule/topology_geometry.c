/* Lengths: F. H. Allen et al., J. Chem. Soc. Perkin Trans. 2 (1987) S1; typed from memory, rounded, means of the sorts of one
 * row. Bonds to hydrogen: usual values from neutron diffraction (C, N, O, S, as in residue_data.c) and microwave spectra of the
 * hydrides (others), from memory. Metal to donor: M. M. Harding, Acta Cryst. D62 (2006) 678, from memory. Pairs in none of
 * these: sums of the covalent radii of elements.c, times 0.87 for double and 0.78 for triple bonds, as the radii of P. Pyykkö &
 * M. Atsumi, Chem. Eur. J. 15 (2009) 12770 shrink on average (from memory).
 *
 * Angles: tetrahedral, trigonal and linear, but in small rings those of a regular or usual ring; on two-armed oxygen and
 * sulphur those of dimethyl ether, dimethyl sulphide, cystine, methanol and methanethiol; on sulphonyl groups those of dimethyl
 * sulphone (gas-phase values, from memory), in rings with sulphur or selenium those of thiophene and selenophene (microwave
 * spectra, from memory).
 *
 * Contents: making - rings - shapes - ranks - lengths - angles
 */
#include "molecule/topology_geometry.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "molecule/elements.h"

enum { H = 1, B = 5, C = 6, N = 7, O = 8, F = 9, SI = 14, P = 15, S = 16, CL = 17, AS = 33, SE = 34, BR = 35, I = 53 };
enum { LARGEST_RING = 8 };

static bool find_neighbours(tml_topology *t);
static bool find_rings(tml_topology *t);
static void find_shapes(tml_topology *t);
static void find_aromatic(tml_topology *t);
static bool find_ranks(tml_topology *t);

/* ---- making ---- */

bool tml_topology_new(tml_topology *t, int32_t atom_count, int32_t bond_count) {
    size_t atoms = (size_t)atom_count, bonds = (size_t)bond_count;
    *t = (tml_topology){.atom_count = atom_count, .bond_count = bond_count};
    t->elements = tml_alloc(atoms, sizeof *t->elements);
    t->charges = tml_alloc(atoms, sizeof *t->charges);
    t->shapes = tml_alloc(atoms, sizeof *t->shapes);
    t->ranks = tml_alloc(atoms, sizeof *t->ranks);
    t->bonds = tml_alloc(bonds, sizeof *t->bonds);
    t->first = tml_alloc(atoms + 1, sizeof *t->first);
    t->neighbours = tml_alloc(2 * bonds, sizeof *t->neighbours);
    t->via = tml_alloc(2 * bonds, sizeof *t->via);
    t->ring_first = tml_alloc(bonds + 1, sizeof *t->ring_first);
    t->ring_atoms = tml_alloc(bonds, LARGEST_RING * sizeof *t->ring_atoms);
    return t->elements != NULL && t->charges != NULL && t->shapes != NULL && t->ranks != NULL && t->bonds != NULL &&
           t->first != NULL && t->neighbours != NULL && t->via != NULL && t->ring_first != NULL && t->ring_atoms != NULL;
}

bool tml_topology_finish(tml_topology *t) {
    if (!find_neighbours(t) || !find_rings(t)) return false;
    find_shapes(t);
    find_aromatic(t);
    return find_ranks(t);
}

void tml_topology_clear(tml_topology *t) {
    free(t->elements);
    free(t->charges);
    free(t->shapes);
    free(t->ranks);
    free(t->bonds);
    free(t->first);
    free(t->neighbours);
    free(t->via);
    free(t->ring_first);
    free(t->ring_atoms);
    *t = (tml_topology){0};
}

static bool find_neighbours(tml_topology *t) {
    int32_t *filled = tml_alloc((size_t)t->atom_count, sizeof *filled);
    if (filled == NULL) return false;
    for (int32_t i = 0; i < t->bond_count; i++) {
        t->first[t->bonds[i].a + 1]++;
        t->first[t->bonds[i].b + 1]++;
    }
    for (int32_t i = 0; i < t->atom_count; i++) t->first[i + 1] += t->first[i];
    for (int32_t i = 0; i < t->bond_count; i++) {
        const int32_t ends[2] = {t->bonds[i].a, t->bonds[i].b};
        for (int k = 0; k < 2; k++) {
            int32_t at = t->first[ends[k]] + filled[ends[k]]++;
            t->neighbours[at] = ends[1 - k];
            t->via[at] = i;
        }
    }
    free(filled);
    return true;
}

int32_t tml_topology_bond_between(const tml_topology *t, int32_t a, int32_t b) {
    for (int32_t k = t->first[a]; k < t->first[a + 1]; k++)
        if (t->neighbours[k] == b) return t->via[k];
    return -1;
}

/* ---- rings ---- */

static bool is_metal(const tml_topology *t, int32_t atom) {
    return tml_element_is_metal(t->elements[atom]);
}

/* A shortest way from a to b that is not their bond, breadth first, through no metal; its length in atoms, or 0. `from` holds
 * for each atom the one it was reached from, plus one; `queue` and `from` have room for all atoms, and `from` is zeroed again.
 */
static int32_t ring_through(const tml_topology *t, int32_t bond, int32_t *from, int32_t *queue, int32_t *ring) {
    int32_t a = t->bonds[bond].a, b = t->bonds[bond].b, head = 0, tail = 0, size = 0;
    if (is_metal(t, a) || is_metal(t, b)) return 0;
    queue[tail++] = a;
    from[a] = a + 1;
    for (int32_t depth = 1, level = 1; head < tail && from[b] == 0 && depth < LARGEST_RING; depth++, level = tail)
        for (; head < level && from[b] == 0; head++)
            for (int32_t k = t->first[queue[head]]; k < t->first[queue[head] + 1]; k++) {
                int32_t next = t->neighbours[k];
                if (t->via[k] == bond || from[next] != 0 || is_metal(t, next)) continue;
                from[next] = queue[head] + 1;
                queue[tail++] = next;
            }
    if (from[b] != 0)
        for (int32_t at = b; size < LARGEST_RING; at = from[at] - 1) {
            ring[size++] = at;
            if (at == a) break;
        }
    for (int32_t i = 0; i < tail; i++) from[queue[i]] = 0;
    return size;
}

static bool known_ring(const tml_topology *t, const int32_t *ring, int32_t size) {
    for (int32_t r = 0; r < t->ring_count; r++) {
        int32_t held = 0;
        if (tml_topology_ring_size(t, r) != size) continue;
        for (int32_t i = 0; i < size; i++)
            for (int32_t k = t->ring_first[r]; k < t->ring_first[r + 1]; k++) held += t->ring_atoms[k] == ring[i];
        if (held == size) return true;
    }
    return false;
}

static bool find_rings(tml_topology *t) {
    int32_t *from = tml_alloc((size_t)t->atom_count, sizeof *from), *queue = tml_alloc((size_t)t->atom_count, sizeof *queue);
    bool room = from != NULL && queue != NULL;
    for (int32_t i = 0; room && i < t->bond_count; i++) {
        int32_t ring[LARGEST_RING], size = ring_through(t, i, from, queue, ring);
        t->bonds[i].ring = size;
        if (size == 0 || known_ring(t, ring, size)) continue;
        int32_t at = t->ring_first[t->ring_count];
        memcpy(&t->ring_atoms[at], ring, (size_t)size * sizeof *ring);
        t->ring_first[++t->ring_count] = at + size;
    }
    free(from);
    free(queue);
    return room;
}

int32_t tml_topology_ring_size(const tml_topology *t, int32_t ring) {
    return t->ring_first[ring + 1] - t->ring_first[ring];
}

int32_t tml_topology_ring_of(const tml_topology *t, int32_t a, int32_t centre, int32_t c) {
    int32_t best = -1;
    for (int32_t r = 0; r < t->ring_count; r++) {
        const int32_t *atoms = &t->ring_atoms[t->ring_first[r]];
        int32_t size = tml_topology_ring_size(t, r);
        if (best >= 0 && size >= tml_topology_ring_size(t, best)) continue;
        for (int32_t i = 0; i < size; i++) {
            int32_t before = atoms[(i + size - 1) % size], after = atoms[(i + 1) % size];
            if (atoms[i] == centre && ((before == a && after == c) || (before == c && after == a))) best = r;
        }
    }
    return best;
}

/* ---- shapes ---- */

static int count_order(const tml_topology *t, int32_t atom, tml_order order) {
    int count = 0;
    for (int32_t k = t->first[atom]; k < t->first[atom + 1]; k++) count += t->bonds[t->via[k]].order == order;
    return count;
}

static tml_shape shape_of(const tml_topology *t, int32_t atom) {
    int32_t degree = tml_topology_degree(t, atom);
    int element = t->elements[atom];
    int doubles = count_order(t, atom, TML_ORDER_DOUBLE);
    bool mixed = doubles + count_order(t, atom, TML_ORDER_AROMATIC) + count_order(t, atom, TML_ORDER_DELOCALISED) > 0;
    bool aromatic = count_order(t, atom, TML_ORDER_AROMATIC) > 0;
    if (is_metal(t, atom) || degree > 4) return TML_SHAPE_OTHER;
    if (count_order(t, atom, TML_ORDER_TRIPLE) > 0 || (doubles == 2 && degree == 2 && (element == C || element == N)))
        return TML_SHAPE_LINEAR;
    if (degree == 4) return TML_SHAPE_TETRAHEDRAL;
    if (mixed && (element == B || element == C || element == N || element == O)) return TML_SHAPE_TRIGONAL;
    if (aromatic) return TML_SHAPE_TRIGONAL;
    if (element == B && degree == 3) return TML_SHAPE_TRIGONAL;
    if (element == C && degree == 3 && t->charges[atom] > 0) return TML_SHAPE_TRIGONAL;
    return TML_SHAPE_TETRAHEDRAL;
}

/* A double bond, or one that is partly so, from a carbon or nitrogen beside this atom. */
static bool beside_double(const tml_topology *t, int32_t atom) {
    for (int32_t k = t->first[atom]; k < t->first[atom + 1]; k++) {
        int32_t next = t->neighbours[k];
        if (t->shapes[next] != TML_SHAPE_TRIGONAL || (t->elements[next] != C && t->elements[next] != N)) continue;
        if (count_order(t, next, TML_ORDER_DOUBLE) + count_order(t, next, TML_ORDER_AROMATIC) +
                count_order(t, next, TML_ORDER_DELOCALISED) >
            0)
            return true;
    }
    return false;
}

/* Nitrogen of three arms is flat beside a double bond: amides, anilines. */
static void find_shapes(tml_topology *t) {
    for (int32_t i = 0; i < t->atom_count; i++) t->shapes[i] = shape_of(t, i);
    for (int32_t i = 0; i < t->atom_count; i++)
        if (t->elements[i] == N && t->shapes[i] == TML_SHAPE_TETRAHEDRAL && tml_topology_degree(t, i) <= 3 &&
            beside_double(t, i))
            t->shapes[i] = TML_SHAPE_TRIGONAL;
}

/* Rings of five or six trigonal atoms with six electrons, whatever their bonds were called: two from each double bond of the
 * ring, two from a two- or three-armed N, O or S without one. */
static void find_aromatic(tml_topology *t) {
    for (int32_t r = 0; r < t->ring_count; r++) {
        const int32_t *atoms = &t->ring_atoms[t->ring_first[r]];
        int32_t size = tml_topology_ring_size(t, r), electrons = 0, flat = 0;
        if (size != 5 && size != 6) continue;
        for (int32_t i = 0; i < size; i++) {
            int32_t bond = tml_topology_bond_between(t, atoms[i], atoms[(i + 1) % size]);
            int element = t->elements[atoms[i]];
            bool lone = count_order(t, atoms[i], TML_ORDER_DOUBLE) == 0 && count_order(t, atoms[i], TML_ORDER_AROMATIC) == 0 &&
                        ((element == N && tml_topology_degree(t, atoms[i]) == 3) || element == O || element == S);
            electrons += 2 * (t->bonds[bond].order == TML_ORDER_DOUBLE) + 2 * lone;
            flat += t->shapes[atoms[i]] == TML_SHAPE_TRIGONAL || lone;
        }
        if (flat != size || electrons != 6) continue;
        for (int32_t i = 0; i < size; i++) {
            t->bonds[tml_topology_bond_between(t, atoms[i], atoms[(i + 1) % size])].order = TML_ORDER_AROMATIC;
            t->shapes[atoms[i]] = TML_SHAPE_TRIGONAL;
        }
    }
}

bool tml_topology_is_stiff(const tml_topology *t, int32_t index) {
    const tml_topology_bond *bond = &t->bonds[index];
    if (t->shapes[bond->a] != TML_SHAPE_TRIGONAL || t->shapes[bond->b] != TML_SHAPE_TRIGONAL) return false;
    if (bond->order != TML_ORDER_SINGLE) return true;
    for (int k = 0; k < 2; k++) {
        int32_t nitrogen = k == 0 ? bond->a : bond->b, other = k == 0 ? bond->b : bond->a;
        if (t->elements[nitrogen] != N || t->elements[other] != C || tml_topology_degree(t, nitrogen) != 3) continue;
        for (int32_t i = t->first[other]; i < t->first[other + 1]; i++) { /* amide, amidine, thioamide */
            tml_order order = t->bonds[t->via[i]].order;
            int element = t->elements[t->neighbours[i]];
            if ((order == TML_ORDER_DOUBLE || order == TML_ORDER_DELOCALISED) && (element == O || element == N || element == S))
                return true;
        }
    }
    return false;
}

/* ---- ranks ---- */

static uint64_t stir(uint64_t value) {
    value ^= value >> 31;
    value *= 0x9e3779b97f4a7c15u;
    return value ^ value >> 29;
}

/* Refinement by neighbours (H. L. Morgan, J. Chem. Doc. 5 (1965) 107): as many rounds as there are atoms settle it, and few
 * suffice. Equal keys become equal ranks. */
static bool find_ranks(tml_topology *t) {
    enum { ROUNDS = 24 };
    size_t count = (size_t)t->atom_count;
    uint64_t *keys = tml_alloc(2 * count, sizeof *keys), *next = keys == NULL ? NULL : keys + count;
    if (keys == NULL) return false;
    for (size_t i = 0; i < count; i++) keys[i] = stir(t->elements[i] * 16u + (uint64_t)(t->charges[i] + 8) + 1);
    for (int round = 0; round < ROUNDS; round++) {
        for (size_t i = 0; i < count; i++) {
            uint64_t sum = 0;
            for (int32_t k = t->first[i]; k < t->first[i + 1]; k++)
                sum += stir(keys[t->neighbours[k]] + (uint64_t)t->bonds[t->via[k]].order * 0x51ed27u);
            next[i] = stir(keys[i] * 3 + sum);
        }
        memcpy(keys, next, count * sizeof *keys);
    }
    for (size_t i = 0; i < count; i++) {
        size_t k = 0;
        while (keys[k] != keys[i]) k++;
        t->ranks[i] = (int32_t)k;
    }
    free(keys);
    return true;
}

/* ---- lengths ---- */

enum { SP = TML_SHAPE_LINEAR, SP2 = TML_SHAPE_TRIGONAL, SP3 = TML_SHAPE_TETRAHEDRAL, ANY = 0 };

/* The first row that fits counts. */
typedef struct length_row {
    uint8_t element_1, shape_1, element_2, shape_2, order;
    double length;
} length_row;

static const length_row lengths[] = {
    {C, ANY, C, ANY, TML_ORDER_AROMATIC, 1.390},    {C, SP, C, SP, TML_ORDER_TRIPLE, 1.181},
    {C, SP, C, SP, TML_ORDER_SINGLE, 1.377},        {C, SP2, C, SP, TML_ORDER_DOUBLE, 1.307},
    {C, SP, C, SP, TML_ORDER_DOUBLE, 1.280},        {C, ANY, C, ANY, TML_ORDER_DOUBLE, 1.335},
    {C, SP3, C, SP3, TML_ORDER_SINGLE, 1.530},      {C, SP3, C, SP2, TML_ORDER_SINGLE, 1.507},
    {C, SP2, C, SP2, TML_ORDER_SINGLE, 1.475},      {C, SP3, C, SP, TML_ORDER_SINGLE, 1.466},
    {C, SP2, C, SP, TML_ORDER_SINGLE, 1.431},       {C, ANY, C, ANY, TML_ORDER_DELOCALISED, 1.400},
    {C, ANY, N, ANY, TML_ORDER_AROMATIC, 1.345},    {C, ANY, N, ANY, TML_ORDER_TRIPLE, 1.138},
    {C, ANY, N, ANY, TML_ORDER_DOUBLE, 1.279},      {C, ANY, N, ANY, TML_ORDER_DELOCALISED, 1.326},
    {C, SP3, N, SP2, TML_ORDER_SINGLE, 1.460},      {C, SP3, N, SP3, TML_ORDER_SINGLE, 1.475},
    {C, SP2, N, SP2, TML_ORDER_SINGLE, 1.350},      {C, SP2, N, SP3, TML_ORDER_SINGLE, 1.420},
    {C, ANY, O, ANY, TML_ORDER_DELOCALISED, 1.254}, {C, ANY, O, ANY, TML_ORDER_DOUBLE, 1.215},
    {C, ANY, O, ANY, TML_ORDER_AROMATIC, 1.365},    {C, SP3, O, ANY, TML_ORDER_SINGLE, 1.426},
    {C, SP2, O, ANY, TML_ORDER_SINGLE, 1.345},      {C, ANY, S, ANY, TML_ORDER_AROMATIC, 1.715},
    {C, ANY, S, ANY, TML_ORDER_DOUBLE, 1.671},      {C, SP3, S, ANY, TML_ORDER_SINGLE, 1.810},
    {C, SP2, S, ANY, TML_ORDER_SINGLE, 1.763},      {C, ANY, S, ANY, TML_ORDER_DELOCALISED, 1.700},
    {C, SP3, F, ANY, TML_ORDER_SINGLE, 1.370},      {C, SP2, F, ANY, TML_ORDER_SINGLE, 1.360},
    {C, SP3, CL, ANY, TML_ORDER_SINGLE, 1.790},     {C, SP2, CL, ANY, TML_ORDER_SINGLE, 1.739},
    {C, SP3, BR, ANY, TML_ORDER_SINGLE, 1.966},     {C, SP2, BR, ANY, TML_ORDER_SINGLE, 1.899},
    {C, SP3, I, ANY, TML_ORDER_SINGLE, 2.162},      {C, SP2, I, ANY, TML_ORDER_SINGLE, 2.095},
    {C, ANY, P, ANY, TML_ORDER_SINGLE, 1.813},      {C, ANY, SI, ANY, TML_ORDER_SINGLE, 1.863},
    {C, ANY, B, ANY, TML_ORDER_SINGLE, 1.570},      {C, ANY, SE, ANY, TML_ORDER_SINGLE, 1.950},
    {N, ANY, N, ANY, TML_ORDER_AROMATIC, 1.340},    {N, SP, N, SP, TML_ORDER_DOUBLE, 1.124},
    {N, ANY, N, ANY, TML_ORDER_DOUBLE, 1.240},      {N, ANY, N, ANY, TML_ORDER_TRIPLE, 1.124},
    {N, ANY, N, ANY, TML_ORDER_SINGLE, 1.400},      {N, ANY, O, ANY, TML_ORDER_DOUBLE, 1.217},
    {N, ANY, O, ANY, TML_ORDER_DELOCALISED, 1.217}, {N, ANY, O, ANY, TML_ORDER_SINGLE, 1.396},
    {N, ANY, O, ANY, TML_ORDER_AROMATIC, 1.395},    {N, ANY, S, ANY, TML_ORDER_SINGLE, 1.642},
    {N, ANY, S, ANY, TML_ORDER_DOUBLE, 1.540},      {N, ANY, P, ANY, TML_ORDER_SINGLE, 1.650},
    {O, ANY, O, ANY, TML_ORDER_SINGLE, 1.464},      {O, ANY, S, ANY, TML_ORDER_DOUBLE, 1.436},
    {O, ANY, S, ANY, TML_ORDER_DELOCALISED, 1.455}, {O, ANY, S, ANY, TML_ORDER_SINGLE, 1.577},
    {O, ANY, P, ANY, TML_ORDER_DOUBLE, 1.490},      {O, ANY, P, ANY, TML_ORDER_DELOCALISED, 1.513},
    {O, ANY, P, ANY, TML_ORDER_SINGLE, 1.590},      {O, ANY, SI, ANY, TML_ORDER_SINGLE, 1.630},
    {O, ANY, B, ANY, TML_ORDER_SINGLE, 1.370},      {S, ANY, S, ANY, TML_ORDER_SINGLE, 2.040},
    {P, ANY, S, ANY, TML_ORDER_DOUBLE, 1.950},      {P, ANY, S, ANY, TML_ORDER_SINGLE, 2.080},
};

static bool fits(const length_row *row, int element_1, tml_shape shape_1, int element_2, tml_shape shape_2) {
    return row->element_1 == element_1 && row->element_2 == element_2 && (row->shape_1 == ANY || row->shape_1 == shape_1) &&
           (row->shape_2 == ANY || row->shape_2 == shape_2);
}

double tml_hydrogen_length(int element, bool in_ring) {
    static const struct {
        int element;
        double length;
    } KNOWN[] = {{C, 1.09}, {N, 1.02},  {O, 0.97},  {S, 1.34}, {B, 1.19}, {SI, 1.48},
                 {P, 1.42}, {SE, 1.46}, {AS, 1.52}, {H, 0.74}, {F, 0.92}, {CL, 1.27}};
    static const double RING_CARBON = 1.08;
    if (element == C && in_ring) return RING_CARBON;
    for (size_t i = 0; i < sizeof KNOWN / sizeof *KNOWN; i++)
        if (KNOWN[i].element == element) return KNOWN[i].length;
    return NAN;
}

double tml_metal_length(int element_1, int element_2) {
    enum { NA = 11, MG = 12, K = 19, CA = 20, MN = 25, FE = 26, CO = 27, NI = 28, CU = 29, ZN = 30 };
    static const struct {
        int metal;
        double oxygen, nitrogen, sulphur;
    } KNOWN[] = {/* 0: not listed */
                 {NA, 2.41, 0, 0},       {MG, 2.07, 0, 0},       {K, 2.81, 0, 0},        {CA, 2.38, 0, 0},
                 {MN, 2.17, 2.21, 2.35}, {FE, 2.07, 2.16, 2.30}, {CO, 2.08, 2.14, 2.25}, {NI, 2.06, 2.08, 2.23},
                 {CU, 2.00, 2.02, 2.15}, {ZN, 2.04, 2.03, 2.31}};
    int metal = tml_element_is_metal(element_1) ? element_1 : element_2, donor = metal == element_1 ? element_2 : element_1;
    if (!tml_element_is_metal(metal)) return NAN;
    for (size_t i = 0; i < sizeof KNOWN / sizeof *KNOWN; i++) {
        double length = donor == O ? KNOWN[i].oxygen : donor == N ? KNOWN[i].nitrogen : donor == S ? KNOWN[i].sulphur : 0;
        if (KNOWN[i].metal == metal && length > 0) return length;
    }
    return tml_element_covalent_radius(element_1) + tml_element_covalent_radius(element_2);
}

static double length_between(int a, tml_shape shape_a, int b, tml_shape shape_b, tml_order order);

double tml_topology_length(const tml_topology *t, int32_t index) {
    const tml_topology_bond *bond = &t->bonds[index];
    int a = t->elements[bond->a], b = t->elements[bond->b];
    tml_shape shape_a = t->shapes[bond->a], shape_b = t->shapes[bond->b];
    if (a == H || b == H) {
        int32_t heavy = a == H ? bond->b : bond->a;
        bool in_ring = false;
        for (int32_t k = t->first[heavy]; k < t->first[heavy + 1]; k++) in_ring = in_ring || t->bonds[t->via[k]].ring > 0;
        double length = tml_hydrogen_length(t->elements[heavy], in_ring && t->shapes[heavy] == TML_SHAPE_TRIGONAL);
        if (!isnan(length)) return length;
    }
    return length_between(a, shape_a, b, shape_b, bond->order);
}

double tml_single_length(int element_1, tml_shape shape_1, int element_2, tml_shape shape_2) {
    return length_between(element_1, shape_1, element_2, shape_2, TML_ORDER_SINGLE);
}

static double length_between(int a, tml_shape shape_a, int b, tml_shape shape_b, tml_order order) {
    static const double DOUBLE = 0.87, TRIPLE = 0.78, BETWEEN = 0.93;
    double metal = tml_metal_length(a, b);
    if (!isnan(metal)) return order == TML_ORDER_DOUBLE ? DOUBLE * metal : metal;
    for (size_t i = 0; i < sizeof lengths / sizeof *lengths; i++)
        if (lengths[i].order == order &&
            (fits(&lengths[i], a, shape_a, b, shape_b) || fits(&lengths[i], b, shape_b, a, shape_a)))
            return lengths[i].length;
    double scale = order == TML_ORDER_SINGLE   ? 1
                   : order == TML_ORDER_DOUBLE ? DOUBLE
                   : order == TML_ORDER_TRIPLE ? TRIPLE
                                               : BETWEEN;
    return scale * (tml_element_covalent_radius(a) + tml_element_covalent_radius(b));
}

/* ---- angles ---- */

static const double TETRAHEDRAL = 109.4712;

static double trigonal_angle(const tml_topology *t, int32_t a, int32_t centre, int32_t c);
static double tetrahedral_angle(const tml_topology *t, int32_t a, int32_t centre, int32_t c);

double tml_topology_angle(const tml_topology *t, int32_t a, int32_t centre, int32_t c) {
    switch (t->shapes[centre]) {
    case TML_SHAPE_LINEAR:
        return 180;
    case TML_SHAPE_TRIGONAL:
        return trigonal_angle(t, a, centre, c);
    case TML_SHAPE_TETRAHEDRAL:
        return tetrahedral_angle(t, a, centre, c);
    default:
        return NAN;
    }
}

/* Flat rings of five with one large atom: at it, beside it, opposite to it. Thiophene, selenophene. */
static double hetero_ring_angle(const tml_topology *t, int32_t ring, int32_t centre) {
    static const struct {
        int element;
        double at, beside, opposite;
    } KNOWN[] = {{S, 92.2, 111.5, 112.4}, {SE, 87.8, 111.6, 114.5}};
    const int32_t *atoms = &t->ring_atoms[t->ring_first[ring]];
    int32_t here = 0, large = -1;
    for (int32_t i = 0; i < 5; i++) {
        if (atoms[i] == centre) here = i;
        if (t->elements[atoms[i]] != S && t->elements[atoms[i]] != SE) continue;
        if (large >= 0) return 0;
        large = i;
    }
    if (large < 0) return 0;
    int k = t->elements[atoms[large]] == SE, away = abs(here - large);
    return away == 0 ? KNOWN[k].at : away == 1 || away == 4 ? KNOWN[k].beside : KNOWN[k].opposite;
}

/* Inner angle of a flat ring; 0 outside of rings. */
static double flat_ring_angle(const tml_topology *t, int32_t a, int32_t centre, int32_t c) {
    int32_t ring = tml_topology_ring_of(t, a, centre, c);
    int32_t size = ring < 0 ? 0 : tml_topology_ring_size(t, ring);
    double hetero = size == 5 ? hetero_ring_angle(t, ring, centre) : 0;
    if (hetero > 0) return hetero;
    return size >= 3 && size <= 7 ? 180 - 360.0 / size : 0;
}

/* A ring takes its angle, and the other arms share the rest. */
static double trigonal_angle(const tml_topology *t, int32_t a, int32_t centre, int32_t c) {
    static const double WIDEST = 165; /* beside two small rings no more is left */
    double own = flat_ring_angle(t, a, centre, c), others = 0;
    int unknown = own > 0 ? 0 : 1;
    int32_t degree = tml_topology_degree(t, centre);
    if (own > 0) return own;
    for (int32_t i = t->first[centre]; i < t->first[centre + 1]; i++)
        for (int32_t j = i + 1; j < t->first[centre + 1]; j++) {
            int32_t p = t->neighbours[i], q = t->neighbours[j];
            if ((p == a && q == c) || (p == c && q == a)) continue;
            double other = flat_ring_angle(t, p, centre, q);
            others += other;
            unknown += other == 0;
        }
    return degree == 3 ? fmin((360 - others) / unknown, WIDEST) : 120;
}

double tml_two_armed_angle(int element, int arm_1, int arm_2) {
    static const struct {
        int element;
        double heavy, hydrogen, disulphide;
    } KNOWN[] = {{O, 111.7, 108.5, 111.7}, {S, 98.9, 96.5, 103.8}, {SE, 96.3, 95.5, 100}};
    for (size_t i = 0; i < sizeof KNOWN / sizeof *KNOWN; i++) {
        if (KNOWN[i].element != element) continue;
        bool chalcogens = arm_1 == S || arm_2 == S || arm_1 == SE || arm_2 == SE;
        return arm_1 == H || arm_2 == H ? KNOWN[i].hydrogen : chalcogens ? KNOWN[i].disulphide : KNOWN[i].heavy;
    }
    return NAN;
}

static double sulphonyl_angle(const tml_topology *t, int32_t a, int32_t centre, int32_t c) {
    static const double BY_OXYGENS[3] = {103.5, 107.9, 119.7};
    int oxygens = 0;
    const int32_t ends[2] = {a, c};
    for (int k = 0; k < 2; k++) oxygens += t->bonds[tml_topology_bond_between(t, ends[k], centre)].order != TML_ORDER_SINGLE;
    return BY_OXYGENS[oxygens];
}

/* In small rings: cyclopropane, cyclobutane, and the mean of a puckered five-ring. Two arms beside such an angle share what is
 * left as in arms.c; two arms away from it enclose more the smaller the ring. */
static double tetrahedral_angle(const tml_topology *t, int32_t a, int32_t centre, int32_t c) {
    static const double RING[6] = {0, 0, 0, 60, 88.5, 104.5}, OPPOSITE[6] = {0, 0, 0, 115, 111, TETRAHEDRAL};
    static const double RADIANS = 3.14159265358979323846 / 180;
    int32_t degree = tml_topology_degree(t, centre);
    int32_t own = tml_topology_ring_of(t, a, centre, c), size = own < 0 ? 0 : tml_topology_ring_size(t, own);
    int element = t->elements[centre];
    if (size >= 3 && size <= 5) return size == 5 && element == S && degree == 2 ? 93.0 : RING[size];
    double two_armed = degree == 2 ? tml_two_armed_angle(element, t->elements[a], t->elements[c]) : NAN;
    if (!isnan(two_armed)) return two_armed;
    if (element == S && degree == 4 && count_order(t, centre, TML_ORDER_SINGLE) == 2) return sulphonyl_angle(t, a, centre, c);
    if (element == S && degree == 3)
        return t->bonds[tml_topology_bond_between(t, a, centre)].order != TML_ORDER_SINGLE ||
                       t->bonds[tml_topology_bond_between(t, c, centre)].order != TML_ORDER_SINGLE
                   ? 106.7
                   : 100;
    int32_t smallest = 0, p = -1, q = -1;
    for (int32_t i = t->first[centre]; degree == 4 && i < t->first[centre + 1]; i++)
        for (int32_t j = i + 1; j < t->first[centre + 1]; j++) {
            int32_t ring = tml_topology_ring_of(t, t->neighbours[i], centre, t->neighbours[j]);
            if (ring < 0 || tml_topology_ring_size(t, ring) > 5) continue;
            if (smallest != 0 && tml_topology_ring_size(t, ring) >= smallest) continue;
            smallest = tml_topology_ring_size(t, ring);
            p = t->neighbours[i];
            q = t->neighbours[j];
        }
    if (smallest == 0) return TETRAHEDRAL;
    bool with_a = a == p || a == q, with_c = c == p || c == q;
    if (with_a == with_c) return OPPOSITE[smallest];
    return acos(-cos(OPPOSITE[smallest] / 2 * RADIANS) * cos(RING[smallest] / 2 * RADIANS)) / RADIANS;
}
