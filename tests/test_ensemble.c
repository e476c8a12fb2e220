/* Models together: superposition, measures, spread, fragments. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "base/pcg.h"
#include "base/vector.h"
#include "ensemble/ensemble.h"
#include "ensemble/fragment.h"
#include "base/superpose.h"
#include "molecule/elements.h"
#include "sheets.h"

enum { POINTS = 40 };

/* ---- superposition ---- */

/* A rotation by a random unit quaternion, and a shift. */
static tml_motion random_motion(tml_pcg *pcg) {
    double q[4], length = 0;
    tml_motion m = {.from = {0}};
    for (int k = 0; k < 4; k++) q[k] = tml_pcg_normal(pcg), length += q[k] * q[k];
    for (int k = 0; k < 4; k++) q[k] /= sqrt(length);
    double w = q[0], x = q[1], y = q[2], z = q[3];
    double rows[3][3] = {{1 - 2 * (y * y + z * z), 2 * (x * y - z * w), 2 * (x * z + y * w)},
                         {2 * (x * y + z * w), 1 - 2 * (x * x + z * z), 2 * (y * z - x * w)},
                         {2 * (x * z - y * w), 2 * (y * z + x * w), 1 - 2 * (x * x + y * y)}};
    memcpy(m.rotation, rows, sizeof rows);
    for (int k = 0; k < 3; k++) m.to[k] = 50 * tml_pcg_normal(pcg);
    return m;
}

static void random_points(tml_pcg *pcg, int count, double *xyz) {
    for (int i = 0; i < 3 * count; i++) xyz[i] = 10 * tml_pcg_normal(pcg);
}

static double rms_apart(const double *a, const double *b, int count) {
    double square = 0;
    for (int i = 0; i < 3 * count; i++) square += (a[i] - b[i]) * (a[i] - b[i]) / count;
    return sqrt(square);
}

static void assert_proper(const tml_motion *m) {
    double n[3];
    tml_cross(n, m->rotation[0], m->rotation[1]);
    for (int i = 0; i < 3; i++) {
        cr_assert_float_eq(tml_dot(m->rotation[i], m->rotation[i]), 1, 1e-10);
        cr_assert_float_eq(n[i], m->rotation[2][i], 1e-10); /* right-handed: no reflection */
    }
}

Test(superpose, a_known_motion_is_found) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 1, 3);
    for (int set = 0; set < 200; set++) {
        int count = 3 + (int)tml_pcg_below(&pcg, POINTS - 2);
        double start[3 * POINTS], moved[3 * POINTS];
        tml_motion known = random_motion(&pcg), found;
        random_points(&pcg, count, start);
        memcpy(moved, start, sizeof moved);
        tml_motion_apply(&known, moved, count);
        cr_assert_float_eq(tml_superpose(start, moved, NULL, count, &found), 0, 1e-5);
        assert_proper(&found);
        tml_motion_apply(&found, start, count);
        cr_assert_lt(rms_apart(start, moved, count), 1e-9);
    }
}

Test(superpose, the_distance_told_is_the_least_and_true) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 2, 3);
    for (int set = 0; set < 50; set++) {
        double one[3 * POINTS], other[3 * POINTS], fitted[3 * POINTS], mean[3] = {0};
        tml_motion found;
        random_points(&pcg, POINTS, one);
        random_points(&pcg, POINTS, other);
        double told = tml_superpose(one, other, NULL, POINTS, &found);
        memcpy(fitted, one, sizeof fitted);
        tml_motion_apply(&found, fitted, POINTS);
        cr_assert_float_eq(told, rms_apart(fitted, other, POINTS), 1e-9);
        for (int i = 0; i < POINTS; i++)
            for (int k = 0; k < 3; k++) mean[k] += fitted[3 * i + k] / POINTS;
        for (int k = 0; k < 30; k++) { /* no small turn about the centre, nor shift, does better */
            double tried[3 * POINTS], angle = 0.1 * tml_pcg_normal(&pcg);
            memcpy(tried, fitted, sizeof tried);
            for (int i = 0; i < POINTS; i++) {
                double a = tried[3 * i + k % 3] - mean[k % 3], b = tried[3 * i + (k + 1) % 3] - mean[(k + 1) % 3];
                tried[3 * i + k % 3] = mean[k % 3] + a * cos(angle) - b * sin(angle) + (k > 15) * 0.1;
                tried[3 * i + (k + 1) % 3] = mean[(k + 1) % 3] + a * sin(angle) + b * cos(angle);
            }
            cr_assert_geq(rms_apart(tried, other, POINTS), told - 1e-12);
        }
    }
}

Test(superpose, a_mirror_image_is_not_reflected_back) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 3, 3);
    for (int set = 0; set < 50; set++) {
        double one[3 * POINTS], other[3 * POINTS];
        tml_motion found;
        random_points(&pcg, POINTS, one);
        for (int i = 0; i < 3 * POINTS; i++) other[i] = i % 3 == 0 ? -one[i] : one[i];
        cr_assert_gt(tml_superpose(one, other, NULL, POINTS, &found), 1);
        assert_proper(&found);
    }
    /* Points of one plane are their own mirror image: a turn does it. */
    double flat[3 * POINTS], mirrored[3 * POINTS];
    tml_motion found;
    random_points(&pcg, POINTS, flat);
    for (int i = 0; i < POINTS; i++) flat[3 * i + 2] = 0;
    for (int i = 0; i < 3 * POINTS; i++) mirrored[i] = i % 3 == 0 ? -flat[i] : flat[i];
    cr_assert_lt(tml_superpose(flat, mirrored, NULL, POINTS, &found), 1e-5);
    assert_proper(&found);
}

Test(superpose, few_points_and_lines_have_a_proper_motion_too) {
    double line[15], turned[15], one[3] = {1, 2, 3}, other[3] = {-4, 5, 0};
    tml_motion found;
    cr_assert_eq(tml_superpose(one, other, NULL, 0, &found), 0);
    assert_proper(&found);
    cr_assert_lt(tml_superpose(one, other, NULL, 1, &found), 1e-9);
    assert_proper(&found);
    tml_motion_apply(&found, one, 1);
    cr_assert_lt(rms_apart(one, other, 1), 1e-12);
    for (int i = 0; i < 5; i++)
        for (int k = 0; k < 3; k++) {
            line[3 * i + k] = i * (k + 1);
            turned[3 * i + k] = -i * (3 - k); /* another direction, the same length */
        }
    for (int count = 2; count <= 5; count++) {
        cr_assert_lt(tml_superpose(line, turned, NULL, count, &found), 1e-6);
        assert_proper(&found);
    }
    double same[15];
    for (int i = 0; i < 15; i++) same[i] = i % 3;
    cr_assert_lt(tml_superpose(same, same, NULL, 5, &found), 1e-9);
    assert_proper(&found);
}

Test(superpose, only_the_chosen_points_count) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 4, 3);
    double one[3 * POINTS], other[3 * POINTS];
    int32_t chosen[] = {3, 5, 8, 13, 21, 34};
    tml_motion known = random_motion(&pcg), found;
    random_points(&pcg, POINTS, one);
    random_points(&pcg, POINTS, other);
    double moved[3 * POINTS];
    memcpy(moved, one, sizeof moved);
    tml_motion_apply(&known, moved, POINTS);
    for (int k = 0; k < 6; k++) memcpy(&other[3 * chosen[k]], &moved[3 * chosen[k]], 3 * sizeof *other);
    cr_assert_lt(tml_superpose(one, other, chosen, 6, &found), 1e-5);
    tml_motion_apply(&found, one, POINTS);
    cr_assert_lt(rms_apart(one, moved, POINTS), 1e-8);
}

/* ---- measures ---- */

Test(measure, distances_over_their_limits_are_counted_and_summed) {
    tml_problem *problem = problem_from("atom A bead\natom B bead\natom C bead\natom D bead\natom E bead\n"
                                        "limit A B 0 1.95\nlimit A C 0 1.85\nlimit A D 2.6 9\nlimit A E 0 2\n");
    const double xyz[] = {0, 0, 0, 2, 0, 0, 0, 2.1, 0, 0, 0, 2, 0, 0, -1};
    tml_measures m;
    cr_assert_eq(tml_measure(problem, NULL, xyz, &m, NULL), TML_OK);
    /* over by 0.05, 0.25 and, below, 0.6 */
    cr_assert(m.distance_over_01 == 2 && m.distance_over_02 == 2 && m.distance_over_05 == 1);
    cr_assert_float_eq(m.distance_max, 0.6, 1e-9);
    cr_assert_float_eq(m.distance_rms, sqrt((0.05 * 0.05 + 0.25 * 0.25 + 0.36) / 4), 1e-9);
    cr_assert_not(tml_measures_pass(&m));
    cr_assert(isnan(m.backbone_usual) && m.overlaps == 0 && m.bond_rms == 0);
    tml_problem_free(problem);
}

Test(measure, dihedrals_are_measured_around_the_circle) {
    /* The dihedral of these points is 90°. */
    const double xyz[] = {1, 0, 0, 0, 0, 0, 0, 0, 1, 0, 1, 1};
    static const struct { int lower, upper; double off; } CASES[] = {{80, 100, 0}, {90, 90, 0}, {100, 120, 10}, {-30, 60, 30}, {170, -170, 80}, {-100, -80, 170}, {-90, -80, 170}};
    double sign = tml_dihedral_of(&xyz[0], &xyz[3], &xyz[6], &xyz[9]) > 0 ? 1 : -1;
    for (size_t c = 0; c < 7; c++) {
        char text[200];
        int lower = sign > 0 ? CASES[c].lower : -CASES[c].upper, upper = sign > 0 ? CASES[c].upper : -CASES[c].lower;
        snprintf(text, sizeof text, "atom A bead\natom B bead\natom C bead\natom D bead\ndihedral A B C D %d %d\n", lower, upper);
        tml_problem *problem = problem_from(text);
        tml_measures m;
        cr_assert_eq(tml_measure(problem, NULL, xyz, &m, NULL), TML_OK);
        cr_assert_float_eq(m.dihedral_max, CASES[c].off, 1e-6, "%d to %d: %g", lower, upper, m.dihedral_max);
        cr_assert_eq(m.dihedral_over_5, CASES[c].off > 5);
        cr_assert_eq(m.dihedral_over_10, CASES[c].off > 10 + 1e-6);
        tml_problem_free(problem);
    }
}

Test(measure, hands_and_planes_are_seen) {
    tml_problem *problem = problem_from("atom C0 bead\natom A1 bead\natom A2 bead\natom A3 bead\nchiral C0 A1 A2 A3 +\nplane C0 A1 A2 A3 within 0.02\n");
    double xyz[] = {0, 0, 0.3, 1, 0, 0, 0, 1, 0, -1, -1, 0};
    tml_measures m;
    double u[3] = {1, 0, -0.3}, v[3] = {0, 1, -0.3}, w[3] = {-1, -1, -0.3}, n[3];
    tml_cross(n, v, w);
    cr_assert_lt(tml_dot(u, n), 0);
    cr_assert_eq(tml_measure(problem, NULL, xyz, &m, NULL), TML_OK);
    cr_assert_eq(m.wrong_handed, 1);
    /* One point 0.3 above the plane of three about it: r.m.s. from the best plane is 0.3·√3/4. */
    cr_assert_float_eq(m.plane_max, 0.3 * sqrt(3) / 4, 1e-9);
    xyz[2] = -0.3;
    cr_assert_eq(tml_measure(problem, NULL, xyz, &m, NULL), TML_OK);
    cr_assert_eq(m.wrong_handed, 0);
    xyz[2] = 0; /* flat is no hand at all */
    cr_assert_eq(tml_measure(problem, NULL, xyz, &m, NULL), TML_OK);
    cr_assert_eq(m.wrong_handed, 1);
    tml_problem_free(problem);
}

/* Atoms without bonds in a box, counted by trying all pairs. */
Test(measure, overlaps_equal_a_count_over_all_pairs) {
    static const char *const ELEMENTS[] = {"C", "N", "O", "S", "H", "bead"};
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 5, 3);
    for (int set = 0; set < 20; set++) {
        sheet_text sheet = {.length = 0};
        double xyz[3 * 300];
        int32_t expected = 0;
        for (int i = 0; i < 300; i++) say(&sheet, "atom X%d %s\n", i, ELEMENTS[tml_pcg_below(&pcg, 6)]);
        for (int i = 0; i < 900; i++) xyz[i] = 18 * tml_pcg_uniform(&pcg) - 9;
        tml_problem *problem = problem_from(sheet.text);
        tml_measures m;
        for (int i = 0; i < 300; i++)
            for (int j = 0; j < i; j++) {
                int one = problem->molecule.atoms[i].element, other = problem->molecule.atoms[j].element;
                double reach = tml_element_vdw_radius(one) + tml_element_vdw_radius(other);
                bool polar = (one == 7 || one == 8 || one == 16) && (other == 7 || other == 8 || other == 16);
                if (one > 0 && other > 0) expected += tml_distance(&xyz[3 * i], &xyz[3 * j]) < reach - (polar ? 1.0 : 0.6);
            }
        cr_assert_eq(tml_measure(problem, NULL, xyz, &m, NULL), TML_OK);
        cr_assert_gt(expected, 50);
        cr_assert_eq(m.overlaps, expected);
        tml_problem_free(problem);
    }
}

Test(measure, places_beyond_all_bounds_do_no_harm) {
    tml_problem *problem = problem_from("atom A C\natom B C\natom C C\nlimit A B 0 2\n");
    const double xyz[] = {1e300, -1e300, 0, NAN, 0, 0, INFINITY, 1e9, -1e12};
    tml_measures m;
    cr_assert_eq(tml_measure(problem, NULL, xyz, &m, NULL), TML_OK);
    tml_problem_free(problem);
}

/* ---- spread ---- */

/* An ensemble of `models` copies of random points, each moved at random; the first `core` residues within `tight`, the others far. */
static void make_ensemble(tml_pcg *pcg, const tml_problem *problem, int models, int core, double tight, double loose, tml_ensemble *out) {
    int atoms = problem->molecule.atom_count;
    double *base = tml_alloc((size_t)atoms * 3, sizeof *base);
    *out = (tml_ensemble){.problem = problem, .models = tml_alloc((size_t)models, sizeof *out->models), .model_count = models};
    random_points(pcg, atoms, base);
    for (int m = 0; m < models; m++) {
        tml_motion motion = random_motion(pcg);
        double *xyz = out->models[m].xyz = tml_alloc((size_t)atoms * 3, sizeof *xyz), shift[3] = {0};
        for (int i = 0; i < atoms; i++)
            for (int k = 0; k < 3; k++) {
                bool in = problem->molecule.atoms[i].residue < core;
                if (i == problem->molecule.residues[problem->molecule.atoms[i].residue].first_atom) shift[k] = loose * tml_pcg_normal(pcg);
                xyz[3 * i + k] = base[3 * i + k] + (in ? tight * tml_pcg_normal(pcg) : shift[k]);
            }
        tml_motion_apply(&motion, xyz, atoms);
    }
    free(base);
}

static void ensemble_end(tml_ensemble *e) {
    for (int m = 0; m < e->model_count; m++) free(e->models[m].xyz);
    free(e->models);
    free(e->spread);
    free(e->well_defined);
}

Test(spread, a_planted_core_is_found) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 6, 3);
    tml_problem *problem = problem_from("sequence A 1 ALA ALA ALA ALA ALA ALA ALA ALA ALA ALA ALA ALA ALA ALA ALA ALA\n");
    for (int core = 6; core <= 16; core += 5) {
        tml_ensemble e;
        make_ensemble(&pcg, problem, 20, core, 0.3, 8, &e);
        cr_assert_eq(tml_ensemble_superpose(&e, NULL), TML_OK);
        for (int r = 0; r < 16; r++) cr_assert_eq(e.well_defined[r], r < core, "residue %d of a core of %d", r + 1, core);
        for (int i = 0; i < problem->molecule.atom_count; i++) {
            if (problem->molecule.atoms[i].residue < core)
                cr_assert(e.spread[i] > 0.2 && e.spread[i] < 0.9); /* 0.3·√3 = 0.52 */
            else
                cr_assert_gt(e.spread[i], 4);
        }
        ensemble_end(&e);
    }
    tml_problem_free(problem);
}

Test(spread, one_model_alone_and_models_without_a_core_are_told_whole) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 7, 3);
    tml_problem *problem = problem_from("sequence A 1 ALA ALA ALA ALA\n");
    tml_ensemble one, none;
    make_ensemble(&pcg, problem, 1, 0, 0, 5, &one);
    make_ensemble(&pcg, problem, 8, 0, 0, 300, &none);
    cr_assert_eq(tml_ensemble_superpose(&one, NULL), TML_OK);
    cr_assert_eq(tml_ensemble_superpose(&none, NULL), TML_OK);
    for (int r = 0; r < 4; r++) cr_assert(one.well_defined[r] && none.well_defined[r]);
    for (int i = 0; i < problem->molecule.atom_count; i++) cr_assert(one.spread[i] < 1e-6 && none.spread[i] > 1);
    ensemble_end(&one);
    ensemble_end(&none);
    tml_problem_free(problem);
}

Test(spread, superposition_changes_no_model_but_its_place) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 8, 3);
    tml_problem *problem = problem_from("sequence A 1 ALA GLY SER ALA ALA GLY\n");
    tml_ensemble e;
    int atoms = problem->molecule.atom_count;
    double before[3 * 100];
    tml_motion motion;
    cr_assert_lt(atoms, 100);
    make_ensemble(&pcg, problem, 5, 3, 0.3, 6, &e);
    memcpy(before, e.models[3].xyz, (size_t)atoms * 3 * sizeof *before);
    cr_assert_eq(tml_ensemble_superpose(&e, NULL), TML_OK);
    cr_assert_lt(tml_superpose(before, e.models[3].xyz, NULL, atoms, &motion), 1e-5);
    ensemble_end(&e);
    tml_problem_free(problem);
}

/* ---- fragments ---- */

static const char *const PEPTIDE =
    "sequence A 1 ALA PHE PRO SER TRP GLY\n"
    "limit A:1:HA A:6:HA2 2 9 as out\nlimit A:2:HB% A:3:HD% 2 5 as in\nlimit A:3:HA A:4:H,A:5:H 2 5 as half\nlimit A:4:H A:4:HA,A:3:HA 2 5 as both\n"
    "dihedral A:2:C A:3:N A:3:CA A:3:C -90 -50 as in\ndihedral A:3:C A:4:N A:4:CA A:4:C -90 -50 as in2\ndihedral A:4:C A:5:N A:5:CA A:5:C -90 -50 as out\n";

static bool all_kept(const bool *keep, const int32_t *atoms, int count) {
    for (int k = 0; k < count; k++)
        if (atoms[k] >= 0 && !keep[atoms[k]]) return false;
    return true;
}

/* Each term of the whole whose atoms are kept is the next of the part, and the part has no other. */
#define SAME_TERMS(field, count_field, width, ...)                                                       \
    do {                                                                                                 \
        int32_t at = 0;                                                                                  \
        for (int32_t i = 0; i < whole->count_field; i++) {                                               \
            const int32_t *old = (const int32_t *)&whole->field[i];                                      \
            if (!all_kept(keep, old, width)) continue;                                                   \
            cr_assert_lt(at, part->count_field);                                                         \
            const int32_t *fresh = (const int32_t *)&part->field[at];                                    \
            for (int k = 0; k < width; k++) cr_assert_eq(fresh[k], old[k] < 0 ? -1 : new_of[old[k]]);    \
            __VA_ARGS__;                                                                                 \
            at++;                                                                                        \
        }                                                                                                \
        cr_assert_eq(at, part->count_field);                                                             \
        cr_assert_gt(at, 0);                                                                             \
    } while (0)

Test(fragment, exactly_the_inner_terms_are_kept) {
    tml_problem *problem = problem_from(PEPTIDE), *fragment = NULL;
    const tml_molecule *whole = &problem->molecule;
    bool *keep = tml_alloc((size_t)whole->atom_count, sizeof *keep);
    int32_t *new_of = tml_alloc((size_t)whole->atom_count, sizeof *new_of), count = 0;
    for (int32_t i = 0; i < whole->atom_count; i++) {
        keep[i] = whole->atoms[i].residue >= 1 && whole->atoms[i].residue <= 3;
        new_of[i] = keep[i] ? count++ : -1;
    }
    cr_assert_eq(tml_fragment_make(problem, keep, &fragment, NULL), TML_OK);
    const tml_molecule *part = &fragment->molecule;
    cr_assert_eq(part->atom_count, count);
    cr_assert_eq(part->residue_count, 3);
    for (int32_t i = 0; i < whole->atom_count; i++)
        if (keep[i]) {
            const tml_residue *residue = &part->residues[part->atoms[new_of[i]].residue];
            cr_assert_str_eq(part->atoms[new_of[i]].name, whole->atoms[i].name);
            cr_assert_str_eq(residue->number, whole->residues[whole->atoms[i].residue].number);
            cr_assert(new_of[i] >= residue->first_atom && new_of[i] < residue->first_atom + residue->atom_count);
        }
    SAME_TERMS(bonds, bond_count, 2, cr_assert_eq(part->bonds[at].length, whole->bonds[i].length));
    SAME_TERMS(angles, angle_count, 3, cr_assert_eq(part->angles[at].angle, whole->angles[i].angle));
    SAME_TERMS(torsions, torsion_count, 4, cr_assert(part->torsions[at].angle == whole->torsions[i].angle && part->torsions[at].kind == whole->torsions[i].kind));
    SAME_TERMS(centres, centre_count, 5, cr_assert(part->centres[at].sign == whole->centres[i].sign && part->centres[at].fixed == whole->centres[i].fixed));
    SAME_TERMS(peptides, peptide_count, 5, cr_assert(part->peptides[at].residue2 == whole->peptides[i].residue2 - 1 && part->peptides[at].cis == whole->peptides[i].cis));
    int32_t at = 0;
    for (int32_t i = 0; i < whole->plane_count; i++) {
        const tml_plane *old = &whole->planes[i];
        if (!all_kept(keep, &whole->plane_atoms[old->first], old->count)) continue;
        const tml_plane *fresh = &part->planes[at++];
        cr_assert(fresh->count == old->count && fresh->within == old->within && fresh->has_xy == old->has_xy);
        for (int32_t k = 0; k < old->count; k++) {
            cr_assert_eq(part->plane_atoms[fresh->first + k], new_of[whole->plane_atoms[old->first + k]]);
            for (int l = 0; l < 2; l++) cr_assert_eq(part->plane_xy[2 * (fresh->first + k) + l], whole->plane_xy[2 * (old->first + k) + l]);
        }
    }
    cr_assert_eq(at, part->plane_count);
    cr_assert_gt(at, 1);
    cr_assert_eq(part->neighbour_first[part->atom_count], 2 * part->bond_count);
    for (int32_t i = 0; i < part->bond_count; i++) {
        int seen = 0;
        for (int32_t k = part->neighbour_first[part->bonds[i].a]; k < part->neighbour_first[part->bonds[i].a + 1]; k++) seen += part->neighbours[k] == part->bonds[i].b;
        cr_assert_eq(seen, 1);
    }
    free(keep);
    free(new_of);
    tml_fragment_free(fragment);
    tml_problem_free(problem);
}

Test(fragment, exactly_the_inner_restraints_are_kept_and_measure_the_same) {
    tml_problem *problem = problem_from(PEPTIDE), *fragment = NULL;
    const tml_molecule *whole = &problem->molecule;
    bool *keep = tml_alloc((size_t)whole->atom_count, sizeof *keep);
    double *xyz = tml_alloc((size_t)whole->atom_count * 3, sizeof *xyz), *part = tml_alloc((size_t)whole->atom_count * 3, sizeof *part);
    int32_t count = 0, at = 0;
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 9, 3);
    random_points(&pcg, whole->atom_count, xyz);
    for (int32_t i = 0; i < whole->atom_count; i++) {
        keep[i] = whole->atoms[i].residue >= 1 && whole->atoms[i].residue <= 3;
        if (keep[i]) memcpy(&part[3 * count++], &xyz[3 * i], 3 * sizeof *part);
    }
    cr_assert_eq(tml_fragment_make(problem, keep, &fragment, NULL), TML_OK);
    cr_assert_eq(fragment->restraints.distance_count, 2);
    cr_assert_eq(fragment->restraints.dihedral_count, 2);
    for (int32_t i = 0; i < problem->restraints.distance_count; i++) {
        const tml_distance_restraint *old = &problem->restraints.distances[i], *fresh = &fragment->restraints.distances[at];
        if (strcmp(old->id, "in") != 0 && strcmp(old->id, "both") != 0) continue;
        cr_assert_str_eq(fresh->id, old->id);
        cr_assert_float_eq(tml_restraint_distance(&fragment->restraints, fresh, NULL, part), tml_restraint_distance(&problem->restraints, old, NULL, xyz), 1e-12);
        at++;
    }
    cr_assert_eq(at, 2);
    for (int32_t i = 0; i < 2; i++)
        cr_assert_float_eq(tml_dihedral_violation(&fragment->restraints, &fragment->restraints.dihedrals[i], part),
                           tml_dihedral_violation(&problem->restraints, &problem->restraints.dihedrals[i], xyz), 1e-12);
    free(keep);
    free(xyz);
    free(part);
    tml_fragment_free(fragment);
    tml_problem_free(problem);
}
