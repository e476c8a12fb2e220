#include <criterion/criterion.h>
#include <math.h>
#include <string.h>

#include "bounds/radii.h"
#include "refine/anneal.h"
#include "refine/minimise.h"
#include "refine/refine.h"
#include "refine/scene.h"

enum { ATOMS = 12 };

/* Twelve carbon atoms with one term of every kind; the geometry is of no molecule. */
typedef struct model {
    tml_problem problem;
    tml_atom atoms[ATOMS];
    tml_residue residue;
    tml_bond bonds[4];
    tml_angle angles[2];
    tml_centre centres[2];
    tml_plane plane;
    int32_t plane_atoms[4], neighbour_first[ATOMS + 1], neighbours[16];
    double plane_xy[8];
    tml_distance_restraint distances[5];
    tml_alike alike;
    int32_t alike_atoms[9];
    tml_alternative alternatives[7];
    int32_t group_atoms[10];
    tml_dihedral_restraint dihedrals[2];
    tml_dihedral_interval intervals[3];
    tml_peptide peptides[2];
} model;

static void make_model(model *m) {
    *m = (model){0};
    tml_molecule *molecule = &m->problem.molecule;
    for (int i = 0; i < ATOMS; i++) m->atoms[i] = (tml_atom){.name = "C", .element = 6};
    m->residue = (tml_residue){.chain = "A", .number = "1", .name = "UNK", .atom_count = ATOMS};
    m->bonds[0] = (tml_bond){0, 1, 1.5, 0.02};
    m->bonds[1] = (tml_bond){0, 2, 1.5, 0.02};
    m->bonds[2] = (tml_bond){0, 3, 1.5, 0.02};
    m->bonds[3] = (tml_bond){0, 4, 1.1, 0.02};
    m->angles[0] = (tml_angle){1, 0, 2, 1.9, 0.05};
    m->angles[1] = (tml_angle){1, 0, 3, 1.9, 0.05};
    m->centres[0] = (tml_centre){0, {1, 2, 3, 4}, 1, true};
    m->centres[1] = (tml_centre){5, {6, 7, 8, -1}, -1, true};
    m->plane = (tml_plane){0, 4, 0.02, true};
    memcpy(m->plane_atoms, (int32_t[]){5, 6, 7, 8}, sizeof m->plane_atoms);
    memcpy(m->plane_xy, (double[]){0, 0, 1.4, 0, -0.7, 1.2, -0.7, -1.2}, sizeof m->plane_xy);
    const int ends[4][2] = {{0, 1}, {0, 2}, {0, 3}, {0, 4}};
    m->neighbour_first[0] = 0;
    for (int k = 0; k < 4; k++) {
        m->neighbours[k] = ends[k][1];
        m->neighbours[4 + k] = 0;
    }
    for (int i = 1; i <= ATOMS; i++) m->neighbour_first[i] = i <= 5 ? 3 + i : 8;
    *molecule = (tml_molecule){.atoms = m->atoms, .atom_count = ATOMS, .residues = &m->residue, .residue_count = 1,
                               .bonds = m->bonds, .bond_count = 4, .angles = m->angles, .angle_count = 2,
                               .centres = m->centres, .centre_count = 2, .planes = &m->plane, .plane_count = 1,
                               .plane_atoms = m->plane_atoms, .plane_xy = m->plane_xy, .plane_atom_count = 4,
                               .neighbour_first = m->neighbour_first, .neighbours = m->neighbours};

    /* Three chains' worth of atoms that are alike. */
    memcpy(m->alike_atoms, (int32_t[]){0, 1, 2, 5, 6, 7, 8, 9, 10}, sizeof m->alike_atoms);
    m->alike = (tml_alike){.count = 3, .copies = 3};
    molecule->alike = &m->alike;
    molecule->alike_count = 1;
    molecule->alike_atoms = m->alike_atoms;
    molecule->alike_atom_count = 9;

    /* Two peptide bonds that meet in one residue give it phi (1 5 6 7) and psi (5 6 7 10). */
    m->residue.name = "ALA";
    m->peptides[0] = (tml_peptide){.ca1 = 0, .c = 1, .o = 2, .n = 5, .ca2 = 6, .residue1 = 0, .residue2 = 0};
    m->peptides[1] = (tml_peptide){.ca1 = 6, .c = 7, .o = 8, .n = 10, .ca2 = 11, .residue1 = 0, .residue2 = 0};
    molecule->peptides = m->peptides;
    molecule->peptide_count = 2;

    const int32_t groups[10] = {1, 2, 3, 9, 10, 4, 11, 6, 7, 8};
    memcpy(m->group_atoms, groups, sizeof groups);
    m->alternatives[0] = (tml_alternative){0, 3, 3, 2, 6, -1, -1, -1, false, false, false, false}; /* {1,2,3} with {9,10} */
    m->alternatives[1] = (tml_alternative){5, 1, 6, 1, 1, -1, -1, -1, false, false, false, false}; /* 4 with 11 */
    m->alternatives[2] = (tml_alternative){7, 1, 3, 1, 1, 0, -1, -1, false, false, false, false};  /* 6 with 9 */
    m->alternatives[3] = (tml_alternative){8, 1, 4, 1, 1, 0, -1, -1, false, false, false, false};  /* and 7 with 10 */
    m->alternatives[4] = (tml_alternative){9, 1, 6, 1, 1, 1, -1, -1, false, false, false, false};  /* or 8 with 11 */
    m->alternatives[5] = (tml_alternative){5, 1, 7, 2, 2, -1, -1, 0, false, true, false, false}; /* 4 with 7, or with 6 where the stereo pair is swapped; averaged */
    m->alternatives[6] = (tml_alternative){0, 3, 3, 2, 6, -1, -1, -1, false, false, true, true}; /* the centres of {1,2,3} and {9,10} */
    m->distances[4] = (tml_distance_restraint){.lower = 0, .upper = 0.5, .weight = 1, .first_alternative = 6, .alternative_count = 1,
                                               .pair_count = 6};
    m->distances[0] = (tml_distance_restraint){.lower = 0, .upper = 1.8, .weight = 1, .first_alternative = 0, .alternative_count = 2,
                                               .pair_count = 7};
    m->distances[1] = (tml_distance_restraint){.lower = 9, .upper = INFINITY, .weight = 0.5, .first_alternative = 1,
                                               .alternative_count = 1, .pair_count = 1};
    m->distances[2] = (tml_distance_restraint){.lower = 0, .upper = 1, .weight = 1, .first_alternative = 2, .alternative_count = 3,
                                               .pair_count = 3, .combined = true};
    m->distances[3] = (tml_distance_restraint){.lower = 0, .upper = 1, .weight = 2, .first_alternative = 5, .alternative_count = 1,
                                               .pair_count = 2, .average = true};
    m->dihedrals[0] = (tml_dihedral_restraint){.weight = 1, .first_interval = 0, .interval_count = 1};
    m->dihedrals[1] = (tml_dihedral_restraint){.weight = 2, .first_interval = 1, .interval_count = 2};
    m->intervals[0] = (tml_dihedral_interval){{1, 0, 5, 6}, 3.0, 3.1};
    m->intervals[1] = (tml_dihedral_interval){{2, 3, 7, 9}, 1.0, 1.1};
    m->intervals[2] = (tml_dihedral_interval){{2, 3, 7, 9}, 5.0, 5.1};
    m->problem.restraints = (tml_restraints){.distances = m->distances, .distance_count = 5, .alternatives = m->alternatives,
                                             .alternative_count = 7, .group_atoms = m->group_atoms, .group_atom_count = 10,
                                             .dihedrals = m->dihedrals, .dihedral_count = 2, .intervals = m->intervals,
                                             .interval_count = 3, .stereo_count = 1};
}

static void random_positions(double *xyz, uint64_t seed) {
    tml_pcg pcg;
    tml_pcg_seed(&pcg, seed, 7);
    for (int i = 0; i < 3 * ATOMS; i++) xyz[i] = 4.5 * tml_pcg_uniform(&pcg);
}

/* Central differences of the error function against the forces, over many random positions. */
static void check_gradient(const tml_weights *weights, const char *name) {
    static const double STEP = 1e-5;
    model m;
    make_model(&m);
    tml_refiner *refiner;
    tml_scene *scene;
    cr_assert_eq(tml_refiner_new(&m.problem, false, &refiner, NULL), TML_OK);
    cr_assert_eq(tml_scene_new(refiner, &scene, NULL), TML_OK);
    double moved = 0;
    for (uint64_t seed = 1; seed <= 20; seed++) {
        double xyz[3 * ATOMS];
        random_positions(xyz, seed);
        tml_scene_load(scene, xyz);
        cr_assert_eq(tml_scene_list(scene, 1.0), TML_OK);
        tml_energy(scene, weights);
        double force[3 * ATOMS];
        for (int i = 0; i < 3 * ATOMS; i++) force[i] = scene->f[i / 3][i % 3];
        for (int i = 0; i < 3 * ATOMS; i++) {
            scene->x[i / 3][i % 3] = xyz[i] + STEP;
            double high = tml_energy(scene, weights);
            scene->x[i / 3][i % 3] = xyz[i] - STEP;
            double low = tml_energy(scene, weights);
            scene->x[i / 3][i % 3] = xyz[i];
            double slope = (high - low) / (2 * STEP);
            cr_assert_float_eq(-slope, force[i], 1e-4 * (1 + fabs(slope)), "%s, seed %d, coordinate %d: %g against %g", name, (int)seed,
                               i, -slope, force[i]);
            moved += fabs(slope);
        }
    }
    cr_assert_gt(moved, 1.0, "%s never acts", name);
    tml_scene_free(scene);
    tml_refiner_free(refiner);
}

#define GRADIENT(name, ...)                                 \
    Test(gradient, name##_agrees_with_finite_differences) { \
        tml_weights weights = {__VA_ARGS__};                \
        check_gradient(&weights, #name);                    \
    }

GRADIENT(bonds, .bond = 10)
GRADIENT(angles, .angle = 10)
GRADIENT(planar_distances, .planar = 10)
GRADIENT(volumes, .volume = 1)
GRADIENT(planes, .plane = 10)
GRADIENT(distance_sums_and_choices, .restraint = 5, .restraint_bend = 0.5, .restraint_fade = 0.7)
GRADIENT(dihedral_intervals, .dihedral = 5, .dihedral_bend = 0.3)
GRADIENT(backbone_preference, .backbone = 3)
GRADIENT(alike_shapes, .alike = 2)
GRADIENT(symmetric_arrangement, .symmetric = 2, .symmetric_bend = 0.4)
GRADIENT(repulsion, .repulsion = 5, .radius_scale = 1.0)

/* Flat centres need a planar atom with three bonded neighbours in the group. */
Test(gradient, flat_centres_agree_with_finite_differences) {
    model m;
    make_model(&m);
    int32_t first[ATOMS + 1], neighbours[3] = {6, 7, 8};
    for (int i = 0; i <= ATOMS; i++) first[i] = i <= 5 ? 0 : 3;
    m.problem.molecule.neighbour_first = first;
    m.problem.molecule.neighbours = neighbours;
    tml_refiner *refiner;
    tml_scene *scene;
    cr_assert_eq(tml_refiner_new(&m.problem, false, &refiner, NULL), TML_OK);
    cr_assert_eq(refiner->flat_count, 1);
    cr_assert_eq(tml_scene_new(refiner, &scene, NULL), TML_OK);
    double xyz[3 * ATOMS];
    random_positions(xyz, 3);
    tml_scene_load(scene, xyz);
    const tml_weights weights = {.flat = 1};
    double energy = tml_energy(scene, &weights), force = scene->f[6][0];
    scene->x[6][0] += 1e-5;
    double higher = tml_energy(scene, &weights);
    cr_assert_gt(energy, 0);
    cr_assert_float_eq((energy - higher) / 1e-5, force, 1e-2 * (1 + fabs(force)));
    tml_scene_free(scene);
    tml_refiner_free(refiner);
}

Test(neighbours, list_holds_every_touching_pair_that_brute_force_finds) {
    enum { MANY = 400 };
    static tml_atom atoms[MANY];
    static int32_t none[MANY + 1];
    tml_residue residue = {.chain = "", .number = "", .name = "", .atom_count = MANY};
    for (int i = 0; i < MANY; i++) atoms[i] = (tml_atom){.name = "X", .element = (uint8_t)(i % 3 == 0 ? 1 : i % 3 == 1 ? 6 : 8)};
    tml_problem problem = {.molecule = {.atoms = atoms, .atom_count = MANY, .residues = &residue, .residue_count = 1,
                                        .neighbour_first = none, .neighbours = none}};
    tml_refiner *refiner;
    tml_scene *scene;
    cr_assert_eq(tml_refiner_new(&problem, false, &refiner, NULL), TML_OK);
    cr_assert_eq(tml_scene_new(refiner, &scene, NULL), TML_OK);
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 5, 5);
    double xyz[3 * MANY];
    for (int i = 0; i < 3 * MANY; i++) xyz[i] = 20 * tml_pcg_uniform(&pcg);
    tml_scene_load(scene, xyz);
    cr_assert_eq(tml_scene_list(scene, 0.5), TML_OK);
    int brute = 0, listed = 0;
    for (int i = 0; i < MANY; i++)
        for (int j = 0; j < i; j++) {
            double d2 = 0, reach = tml_soft_contact(&problem.molecule, i, j) + 0.5;
            for (int k = 0; k < 3; k++) d2 += (xyz[3 * i + k] - xyz[3 * j + k]) * (xyz[3 * i + k] - xyz[3 * j + k]);
            brute += d2 < reach * reach;
        }
    for (int32_t i = 0; i < scene->near_count; i++) listed += scene->near[i].a < MANY;
    cr_assert_gt(brute, 100);
    cr_assert_eq(listed, brute);
    tml_scene_free(scene);
    tml_refiner_free(refiner);
}

/* A regular tetrahedron of edge 1.5 has the volume 1.5³/(6√2), and the minimiser must find it from a poor start. */
Test(minimise, four_bonded_points_become_a_regular_tetrahedron) {
    tml_atom atoms[4];
    tml_bond bonds[6];
    int32_t first[5] = {0};
    tml_residue residue = {.chain = "", .number = "", .name = "", .atom_count = 4};
    for (int i = 0; i < 4; i++) atoms[i] = (tml_atom){.name = "X"};
    for (int i = 0, k = 0; i < 4; i++)
        for (int j = 0; j < i; j++) bonds[k++] = (tml_bond){j, i, 1.5, 0.02};
    tml_problem problem = {.molecule = {.atoms = atoms, .atom_count = 4, .residues = &residue, .residue_count = 1, .bonds = bonds,
                                        .bond_count = 6, .neighbour_first = first, .neighbours = first}};
    tml_refiner *refiner;
    tml_scene *scene;
    double xyz[12] = {0, 0, 0, 1, 0.1, 0, 0.2, 1.2, 0.1, 0.3, 0.2, 0.4}, energy;
    cr_assert_eq(tml_refiner_new(&problem, false, &refiner, NULL), TML_OK);
    cr_assert_eq(tml_scene_new(refiner, &scene, NULL), TML_OK);
    tml_scene_load(scene, xyz);
    cr_assert_eq(tml_minimise(scene, &TML_FINAL_WEIGHTS, 500, 1e-6, NULL, &energy), TML_OK);
    cr_assert_lt(energy, 1e-9);
    for (int i = 0; i < 4; i++)
        for (int j = 0; j < i; j++) {
            tml_v4 d = scene->x[i] - scene->x[j];
            d *= d;
            cr_assert_float_eq(sqrt(d[0] + d[1] + d[2]), 1.5, 1e-5);
        }
    tml_scene_free(scene);
    tml_refiner_free(refiner);
}
