/* energy.c: the error function and its gradient, term by term.
 *
 *   springs      bonds, 1-3 and planar distances
 *   volumes      signed volumes of centres, flat centres
 *   planes       distance from the best plane
 *   sums         restraints as (Σ r⁻⁶)^(-1/6), choices between combinations
 *   centres      restraints from centres of groups
 *   torsions     dihedral intervals
 *   backbones    preference for the usual regions of phi and psi
 *   repulsion    over the neighbour list
 *
 * Every term is inlined into tml_energy, which is compiled for several vector widths (base/target.h).
 */
#include "base/vector.h"
#include "refine/scene.h"

#define INLINE static inline __attribute__((always_inline))

static const double PI = 3.14159265358979323846;

/* ---- springs ---- */

INLINE double springs(const tml_spring_set *set, double k, const tml_v4 *x, tml_v4 *f) {
    tml_v4 energy = TML_V4(0);
    for (int32_t i = 0; i < set->count; i += 4) {
        const tml_pair *pair = &set->pairs[i];
        tml_v4 d0 = x[pair[0].a] - x[pair[0].b], d1 = x[pair[1].a] - x[pair[1].b], d2 = x[pair[2].a] - x[pair[2].b],
               d3 = x[pair[3].a] - x[pair[3].b], square, length;
        TML_V4_NORMS(square, d0, d1, d2, d3);
        for (int l = 0; l < 4; l++) length[l] = sqrt(square[l] + 1e-12);
        const double *ideal = &set->length[i];
        tml_v4 off = length - (tml_v4){ideal[0], ideal[1], ideal[2], ideal[3]};
        energy += off * off;
        tml_v4 pull = -2.0 * k * off / length;
        d0 *= pull[0];
        d1 *= pull[1];
        d2 *= pull[2];
        d3 *= pull[3];
        f[pair[0].a] += d0;
        f[pair[0].b] -= d0;
        f[pair[1].a] += d1;
        f[pair[1].b] -= d1;
        f[pair[2].a] += d2;
        f[pair[2].b] -= d2;
        f[pair[3].a] += d3;
        f[pair[3].b] -= d3;
    }
    return k * (energy[0] + energy[1] + energy[2] + energy[3]);
}

/* ---- volumes ---- */

/* The vector product, by rotated lanes; the fourth lane stays 0. */
#define CROSS(out, u, v)                                                                                           \
    do {                                                                                                           \
        tml_v4 u1_ = __builtin_shufflevector(u, u, 1, 2, 0, 3), v1_ = __builtin_shufflevector(v, v, 1, 2, 0, 3);   \
        tml_v4 w_ = (u) * v1_ - u1_ * (v);                                                                         \
        (out) = __builtin_shufflevector(w_, w_, 1, 2, 0, 3);                                                       \
    } while (0)

/* Scalar product; a macro, since a vector may not pass a function boundary. */
#define DOT(a, b)                \
    __extension__({              \
        tml_v4 p_ = (a) * (b);   \
        p_[0] + p_[1] + p_[2];   \
    })

/* Energy of the volume u·(v×w) against its ideal; pushes go to the three arms' forces. */
#define TRIPLE(u, v, w, vw, wu, uv, ideal, push_u, push_v, push_w) \
    do {                                                           \
        double off_ = DOT(u, vw) - (ideal);                       \
        energy += off_ * off_;                                     \
        double c_ = -2.0 * k * off_;                               \
        (push_u) += c_ * (vw);                                     \
        (push_v) += c_ * (wu);                                     \
        (push_w) += c_ * (uv);                                     \
    } while (0)

INLINE double volumes(const tml_volume_term *terms, int32_t count, double k, const tml_v4 *x, tml_v4 *f) {
    double energy = 0;
    for (int32_t i = 0; i < count; i++) {
        const tml_volume_term *term = &terms[i];
        tml_v4 centre = x[term->centre];
        tml_v4 a = x[term->arms[0]] - centre, b = x[term->arms[1]] - centre, c = x[term->arms[2]] - centre;
        tml_v4 ab, bc, ca, push_a = TML_V4(0), push_b = TML_V4(0), push_c = TML_V4(0), push_d = TML_V4(0);
        CROSS(ab, a, b);
        CROSS(bc, b, c);
        CROSS(ca, c, a);
        TRIPLE(a, b, c, bc, ca, ab, term->volume[0], push_a, push_b, push_c);
        if (term->arms[3] >= 0) {
            tml_v4 d = x[term->arms[3]] - centre, da, bd, cd;
            CROSS(da, d, a);
            CROSS(bd, b, d);
            CROSS(cd, c, d);
            TRIPLE(a, b, d, bd, da, ab, term->volume[1], push_a, push_b, push_d);
            TRIPLE(a, c, d, cd, da, -ca, term->volume[2], push_a, push_c, push_d);
            TRIPLE(b, c, d, cd, -bd, bc, term->volume[3], push_b, push_c, push_d);
            f[term->arms[3]] += push_d;
        }
        f[term->arms[0]] += push_a;
        f[term->arms[1]] += push_b;
        f[term->arms[2]] += push_c;
        f[term->centre] -= push_a + push_b + push_c + push_d;
    }
    return k * energy;
}

/* ---- planes ---- */

/* Least eigenvalue of a symmetric 3×3 matrix and its unit vector, by the trigonometric solution of the cubic. */
INLINE double least_eigenpair(const double m[6], double vector[3]) {
    double a = m[0], b = m[1], c = m[2], d = m[3], e = m[4], g = m[5]; /* xx yy zz xy xz yz */
    double third = (a + b + c) / 3;
    double p2 = (a - third) * (a - third) + (b - third) * (b - third) + (c - third) * (c - third) + 2 * (d * d + e * e + g * g);
    double p = sqrt(p2 / 6), value = third;
    if (p > 0) {
        double xx = (a - third) / p, yy = (b - third) / p, zz = (c - third) / p, xy = d / p, xz = e / p, yz = g / p;
        double half = (xx * (yy * zz - yz * yz) - xy * (xy * zz - yz * xz) + xz * (xy * yz - yy * xz)) / 2;
        double turn = acos(fmax(-1, fmin(1, half))) / 3;
        value = third + 2 * p * cos(turn + 2 * PI / 3);
    }
    /* The vector stands square on the rows of m - value; the longest of their three products is the safest. */
    double r0[3] = {a - value, d, e}, r1[3] = {d, b - value, g}, r2[3] = {e, g, c - value}, best = -1, product[3];
    const double *rows[3][2] = {{r0, r1}, {r0, r2}, {r1, r2}};
    vector[0] = vector[1] = 0;
    vector[2] = 1;
    for (int k = 0; k < 3; k++) {
        tml_cross(product, rows[k][0], rows[k][1]);
        double square = tml_dot(product, product);
        if (square <= best || square <= 0) continue;
        best = square;
        for (int l = 0; l < 3; l++) vector[l] = product[l] / sqrt(square);
    }
    return value;
}

INLINE double planes(const tml_molecule *molecule, double k, const tml_v4 *x, tml_v4 *f) {
    double energy = 0;
    for (int32_t i = 0; i < molecule->plane_count; i++) {
        const tml_plane *plane = &molecule->planes[i];
        const int32_t *atoms = &molecule->plane_atoms[plane->first];
        if (plane->count < 4) continue;
        tml_v4 centre = TML_V4(0);
        for (int32_t j = 0; j < plane->count; j++) centre += x[atoms[j]];
        centre /= TML_V4((double)plane->count);
        double m[6] = {0}, normal[3];
        for (int32_t j = 0; j < plane->count; j++) {
            tml_v4 d = x[atoms[j]] - centre;
            m[0] += d[0] * d[0];
            m[1] += d[1] * d[1];
            m[2] += d[2] * d[2];
            m[3] += d[0] * d[1];
            m[4] += d[0] * d[2];
            m[5] += d[1] * d[2];
        }
        least_eigenpair(m, normal);
        tml_v4 n = {normal[0], normal[1], normal[2], 0};
        for (int32_t j = 0; j < plane->count; j++) {
            double off = DOT(x[atoms[j]] - centre, n);
            energy += off * off;
            f[atoms[j]] -= 2 * k * off * n;
        }
    }
    return k * energy;
}

/* ---- sums ---- */

/* Quadratic up to `bend`; beyond, the slope it has there fades: t Å farther on it is 1/(1 + t/fade) of that.
 * *slope is dE/dδ. */
INLINE double bent(double delta, double k, double bend, double fade, double *slope) {
    if (delta <= bend) {
        *slope = 2 * k * delta;
        return k * delta * delta;
    }
    double far = 1 + (delta - bend) / fade;
    *slope = 2 * k * bend / far;
    return k * bend * (bend + 2 * fade * log(far));
}

/* Σ r⁻⁶ over the pairs of one sum, without the padding. */
INLINE double sum_of(const tml_sum_term *sum, const tml_pair *pairs, const tml_v4 *x) {
    tml_v4 total = TML_V4(0);
    const tml_pair *pair = &pairs[sum->first_pair];
    int32_t whole = (sum->pair_count + 3) / 4 * 4, i = 0;
    for (; i < whole; i += 4, pair += 4) {
        tml_v4 square, d0 = x[pair[0].a] - x[pair[0].b], d1 = x[pair[1].a] - x[pair[1].b], d2 = x[pair[2].a] - x[pair[2].b],
                       d3 = x[pair[3].a] - x[pair[3].b];
        TML_V4_NORMS(square, d0, d1, d2, d3);
        tml_v4 inverse = 1.0 / (square + 1e-6);
        inverse = inverse * inverse * inverse;
        for (int32_t l = sum->pair_count - i; l < 4; l++) inverse[l] = 0;
        total += inverse;
    }
    return total[0] + total[1] + total[2] + total[3];
}

/* Energy of one sum; *slope gets dE/dr of the effective distance, *effective the distance itself. */
INLINE double sum_energy(const tml_sum_term *sum, double total, const tml_weights *weights, double *effective, double *slope) {
    const double k = weights->restraint, bend = weights->restraint_bend, fade = weights->restraint_fade;
    *slope = 0;
    *effective = 0;
    if (sum->pair_count == 0 || total <= 0) return 0;
    double r = 1.0 / sqrt(cbrt(total * sum->share)), energy = 0;
    *effective = r;
    if (r > sum->upper) {
        energy = bent(r - sum->upper, k * sum->weight, bend, fade, slope);
    } else if (r < sum->lower) {
        energy = bent(sum->lower - r, k * sum->weight, bend, fade, slope);
        *slope = -*slope;
    }
    return energy;
}

/* dr/d(x_a) of one pair is r⁷·share·r_ab⁻⁸·(x_a - x_b). */
INLINE void sum_push(const tml_sum_term *sum, const tml_pair *pairs, double effective, double slope, const tml_v4 *x, tml_v4 *f) {
    double r2 = effective * effective, scale = -slope * sum->share * r2 * r2 * r2 * effective;
    for (int32_t i = 0; i < sum->pair_count; i++) {
        const tml_pair *pair = &pairs[sum->first_pair + i];
        tml_v4 d = x[pair->a] - x[pair->b];
        double inverse = 1.0 / (DOT(d, d) + 1e-6), inverse2 = inverse * inverse;
        d *= scale * inverse2 * inverse2;
        f[pair->a] += d;
        f[pair->b] -= d;
    }
}

INLINE double sums(const tml_refiner *refiner, const tml_pair *pairs, bool both, const tml_weights *weights, const tml_v4 *x, tml_v4 *f) {
    double energy = 0, effective, slope;
    for (int32_t i = 0; i < refiner->single_count; i++) {
        const tml_sum_term *sum = &refiner->sums[i];
        if (both && sum->both >= 0) sum = &refiner->both_sums[sum->both];
        double total = sum_of(sum, pairs, x);
        if (total >= sum->least && total <= sum->most) continue;
        double e = sum_energy(sum, total, weights, &effective, &slope);
        if (slope == 0) continue;
        energy += e;
        sum_push(sum, pairs, effective, slope, x, f);
    }
    return energy;
}

/* The combination of a choice that has the least error, -1 for none, and that error. */
static int32_t best_combination(const tml_sum_term *first, int32_t count, const tml_pair *pairs, const tml_weights *weights,
                                const tml_v4 *x, double *least) {
    int32_t best = -1;
    double effective, slope;
    *least = INFINITY;
    for (int32_t j = 0; j < count; j++) {
        double whole = 0;
        for (int32_t l = 0; l < count; l++)
            if (first[l].combination == first[j].combination)
                whole += sum_energy(&first[l], sum_of(&first[l], pairs, x), weights, &effective, &slope);
        if (whole < *least) {
            *least = whole;
            best = first[j].combination;
        }
    }
    return best;
}

/* The combination of least error counts, and only it pulls. */
static double choices(const tml_refiner *refiner, const tml_pair *pairs, const tml_weights *weights, const tml_v4 *x, tml_v4 *f) {
    double energy = 0, least, effective, slope;
    for (int32_t i = 0; i < refiner->choice_count; i++) {
        const tml_sum_term *first = &refiner->sums[refiner->choices[i].first_sum];
        int32_t count = refiner->choices[i].sum_count, best = best_combination(first, count, pairs, weights, x, &least);
        if (best < 0) continue;
        energy += least;
        for (int32_t l = 0; l < count; l++) {
            if (first[l].combination != best) continue;
            sum_energy(&first[l], sum_of(&first[l], pairs, x), weights, &effective, &slope);
            if (slope != 0) sum_push(&first[l], pairs, effective, slope, x, f);
        }
    }
    return energy;
}

double tml_energy_of_use(const tml_scene *scene, const tml_open_use *use, const tml_weights *weights) {
    const tml_refiner *refiner = scene->refiner;
    double energy, effective, slope;
    if (use->sum >= 0) {
        const tml_sum_term *sum = &refiner->sums[use->sum];
        return sum_energy(sum, sum_of(sum, scene->sum_pairs, scene->x), weights, &effective, &slope);
    }
    const tml_choice_term *choice = &refiner->choices[use->choice];
    int32_t best = best_combination(&refiner->sums[choice->first_sum], choice->sum_count, scene->sum_pairs, weights, scene->x, &energy);
    return best < 0 ? 0 : energy;
}

/* ---- centres ---- */

/* Add `scale` times the mean of a point's atoms to *out. */
INLINE void add_centre(const tml_refiner *refiner, const tml_centre_point *point, double scale, const tml_v4 *x, tml_v4 *out) {
    for (int32_t i = 0; i < point->count; i++) *out += (scale / point->count) * x[refiner->centre_atoms[point->first + i]];
}

INLINE void push_centre(const tml_refiner *refiner, const tml_centre_point *point, double scale, const tml_v4 *push, tml_v4 *f) {
    for (int32_t i = 0; i < point->count; i++) f[refiner->centre_atoms[point->first + i]] += (scale / point->count) * *push;
}

/* Restraints from centres of groups, as sums over pairs of points; a force on a centre is shared out among its atoms. */
INLINE double centres(const tml_refiner *refiner, const tml_weights *weights, const tml_v4 *x, tml_v4 *f) {
    double energy = 0;
    for (int32_t t = 0; t < refiner->centre_count; t++) {
        const tml_centre_term *term = &refiner->centres[t];
        const tml_centre_point *points = &refiner->points_of_centres[term->first_point];
        const tml_sum_term sum = {.pair_count = term->pair_count, .lower = term->lower, .upper = term->upper, .weight = term->weight, .share = term->share};
        double total = 0, effective, slope;
        for (int32_t p = 0; p < term->pair_count; p++) {
            tml_v4 d = TML_V4(0);
            add_centre(refiner, &points[2 * p], 1, x, &d);
            add_centre(refiner, &points[2 * p + 1], -1, x, &d);
            double inverse = 1.0 / (DOT(d, d) + 1e-6);
            total += inverse * inverse * inverse;
        }
        double e = sum_energy(&sum, total, weights, &effective, &slope);
        if (slope == 0) continue;
        energy += e;
        double r2 = effective * effective, scale = -slope * term->share * r2 * r2 * r2 * effective;
        for (int32_t p = 0; p < term->pair_count; p++) {
            tml_v4 d = TML_V4(0);
            add_centre(refiner, &points[2 * p], 1, x, &d);
            add_centre(refiner, &points[2 * p + 1], -1, x, &d);
            double inverse = 1.0 / (DOT(d, d) + 1e-6), inverse2 = inverse * inverse;
            d *= scale * inverse2 * inverse2;
            push_centre(refiner, &points[2 * p], 1, &d, f);
            push_centre(refiner, &points[2 * p + 1], -1, &d, f);
        }
    }
    return energy;
}

/* ---- torsions ---- */

typedef struct torsion_state { double cosine, sine; tml_v4 n1, n2, b1; double n1_square, n2_square, length; tml_v4 b0, b2; } torsion_state;

INLINE int torsion_at(const int32_t atoms[4], const tml_v4 *x, torsion_state *s) {
    s->b0 = x[atoms[1]] - x[atoms[0]];
    s->b1 = x[atoms[2]] - x[atoms[1]];
    s->b2 = x[atoms[3]] - x[atoms[2]];
    CROSS(s->n1, s->b0, s->b1);
    CROSS(s->n2, s->b1, s->b2);
    s->n1_square = DOT(s->n1, s->n1);
    s->n2_square = DOT(s->n2, s->n2);
    s->length = sqrt(DOT(s->b1, s->b1));
    if (s->n1_square < 1e-8 || s->n2_square < 1e-8) return 0; /* three atoms in line: no angle, no force */
    double scale = 1 / sqrt(s->n1_square * s->n2_square);
    s->cosine = DOT(s->n1, s->n2) * scale;
    s->sine = s->length * DOT(s->b0, s->n2) * scale;
    return 1;
}

/* Forces of an energy whose slope over the torsion is `slope`. Source: Blondel & Karplus, J. Comput. Chem. 17 (1996) 1132. */
INLINE void torsion_push(const int32_t atoms[4], const torsion_state *s, double slope, tml_v4 *f) {
    tml_v4 on_a = (slope * s->length / s->n1_square) * s->n1;    /* -dE/dx_a: dphi/dx_a = -|b1| n1 / n1² */
    tml_v4 on_d = (-slope * s->length / s->n2_square) * s->n2;
    double p = DOT(s->b0, s->b1) / (s->length * s->length), q = DOT(s->b2, s->b1) / (s->length * s->length);
    tml_v4 shift = p * on_a - q * on_d;
    f[atoms[0]] += on_a;
    f[atoms[1]] -= on_a + shift;
    f[atoms[2]] += shift - on_d;
    f[atoms[3]] += on_d;
}

/* How far an angle lies outside an interval: 0 inside, positive above it, negative below; the nearer end counts. */
INLINE double outside(double angle, double lower, double upper) {
    double off = angle - lower;
    off -= 2 * PI * floor(off / (2 * PI));
    double width = upper - lower;
    if (off <= width) return 0;
    return off - width <= 2 * PI - off ? off - width : off - 2 * PI;
}

/* A torsion is never far: its pull keeps its strength. */
static const double NO_FADE = 1e6;

INLINE double torsions(const tml_refiner *refiner, double k, double bend, const tml_v4 *x, tml_v4 *f) {
    double energy = 0, slope;
    const tml_dihedral_interval *intervals = refiner->problem->restraints.intervals;
    for (int32_t i = 0; i < refiner->torsion_count; i++) {
        const tml_torsion_term *term = &refiner->torsions[i];
        torsion_state state, best_state = {0};
        int32_t best = -1;
        double least = INFINITY;
        for (int32_t j = term->first_interval; j < term->first_interval + term->interval_count; j++) {
            if (!torsion_at(intervals[j].atoms, x, &state)) continue;
            const tml_torsion_arc *arc = &refiner->arcs[j];
            bool inside = state.cosine * arc->cosine + state.sine * arc->sine >= arc->least;
            double off = inside ? 0 : outside(atan2(state.sine, state.cosine), intervals[j].lower, intervals[j].upper);
            if (fabs(off) >= fabs(least)) continue;
            least = off;
            best = j;
            best_state = state;
        }
        if (best < 0 || least == 0) continue;
        energy += bent(fabs(least), k * term->weight, bend, NO_FADE, &slope);
        torsion_push(intervals[best].atoms, &best_state, least > 0 ? slope : -slope, f);
    }
    return energy;
}

/* ---- backbones ---- */

/* What every other place gets, so that the preference is bounded: it is a slope, not a wall. */
static const double ELSEWHERE = 0.01;

/* E = -h·ln(ELSEWHERE + Σ share·exp(κ(cos(φ-φ0)-1) + κ'(cos(ψ-ψ0)-1))). Glycine, which has no side chain, is left free. */
INLINE double backbones(const tml_refiner *refiner, double height, const tml_v4 *x, tml_v4 *f) {
    double energy = 0;
    for (int32_t i = 0; i < refiner->backbone_count; i++) {
        const tml_backbone_term *term = &refiner->backbones[i];
        torsion_state phi, psi;
        if (term->glycine || !torsion_at(&term->atoms[0], x, &phi) || !torsion_at(&term->atoms[1], x, &psi)) continue;
        double total = ELSEWHERE, by_phi = 0, by_psi = 0;
        for (int b = 0; b < TML_BASINS; b++) {
            const tml_basin *basin = &refiner->basins[b];
            double off_phi = phi.cosine * basin->cos_phi + phi.sine * basin->sin_phi; /* cosine of the way to the basin */
            double off_psi = psi.cosine * basin->cos_psi + psi.sine * basin->sin_psi;
            double part = basin->share * exp(basin->phi_sharp * (off_phi - 1) + basin->psi_sharp * (off_psi - 1));
            total += part;
            by_phi += part * basin->phi_sharp * (phi.sine * basin->cos_phi - phi.cosine * basin->sin_phi);
            by_psi += part * basin->psi_sharp * (psi.sine * basin->cos_psi - psi.cosine * basin->sin_psi);
        }
        energy -= height * log(total);
        torsion_push(&term->atoms[0], &phi, height * by_phi / total, f);
        torsion_push(&term->atoms[1], &psi, height * by_psi / total, f);
    }
    return energy;
}

/* ---- repulsion ---- */

INLINE double repulsion(const tml_scene *scene, double k, double scale, tml_v4 *f) {
    const tml_v4 *x = scene->x;
    double energy = 0;
    for (int32_t i = 0; i < scene->near_count; i += 4) {
        const tml_pair *pair = &scene->near[i];
        const float *contact = &scene->near_contact[i];
        tml_v4 d[4] = {x[pair[0].a] - x[pair[0].b], x[pair[1].a] - x[pair[1].b], x[pair[2].a] - x[pair[2].b],
                       x[pair[3].a] - x[pair[3].b]};
        tml_v4 square, reach = {contact[0], contact[1], contact[2], contact[3]};
        TML_V4_NORMS(square, d[0], d[1], d[2], d[3]);
        reach *= scale;
        tml_v4 room = square - reach * reach;
        if (room[0] >= 0 && room[1] >= 0 && room[2] >= 0 && room[3] >= 0) continue;
        for (int l = 0; l < 4; l++) {
            if (room[l] >= 0) continue;
            double length = sqrt(square[l] + 1e-12), off = reach[l] - length;
            energy += off * off;
            d[l] *= 2 * k * off / length;
            f[pair[l].a] += d[l];
            f[pair[l].b] -= d[l];
        }
    }
    return k * energy;
}

TML_WIDE double tml_energy(tml_scene *scene, const tml_weights *weights) {
    const tml_refiner *refiner = scene->refiner;
    const tml_v4 *x = scene->x;
    tml_v4 *f = scene->f;
    for (int32_t i = 0; i < refiner->atom_count + 2; i++) f[i] = TML_V4(0);
    double energy = springs(&refiner->bonds, weights->bond, x, f);
    energy += springs(&refiner->angles, weights->angle, x, f);
    energy += springs(&refiner->planars, weights->planar, x, f);
    energy += volumes(refiner->volumes, refiner->volume_count, weights->volume, x, f);
    energy += volumes(refiner->flats, refiner->flat_count, weights->flat, x, f);
    if (weights->plane > 0) energy += planes(&refiner->problem->molecule, weights->plane, x, f);
    energy += sums(refiner, scene->sum_pairs, scene->both, weights, x, f);
    if (refiner->choice_count > 0) energy += choices(refiner, scene->sum_pairs, weights, x, f);
    if (refiner->centre_count > 0) energy += centres(refiner, weights, x, f);
    energy += torsions(refiner, weights->dihedral, weights->dihedral_bend, x, f);
    if (weights->backbone > 0) energy += backbones(refiner, weights->backbone, x, f);
    if (refiner->problem->molecule.alike_count > 0) energy += tml_alike_energy(scene, weights);
    if (weights->repulsion > 0) energy += repulsion(scene, weights->repulsion, weights->radius_scale, f);
    return energy;
}
