#include "molecule/making.h"

#include <math.h>
#include <string.h>

#include "base/vector.h"
#include "molecule/elements.h"

/* Contents: one bond after the other - what is known of a bond - other pairs of outer atoms - cis and trans */

static const double PLANAR_TOLERANCE = 3 * TML_PI / 180;   /* rings and planar groups */
static const double PEPTIDE_TOLERANCE = 20 * TML_PI / 180; /* deposited NMR structures reach it */

/* What is known of rotation about b-c: the torsion a-b-c-d. */
typedef struct reference {
    int32_t a, d;
    tml_torsion_kind kind;
    bool flat;
    double angle, tolerance;
} reference;

static reference know_bond(const tml_making *making, int32_t bond);
static double carry_over(const tml_making *making, const tml_bond *bond, const reference *known, int32_t a, int32_t d);

/* ---- one bond after the other ---- */

tml_status tml_make_torsions(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    molecule->torsion_first = tml_alloc((size_t)molecule->bond_count + 1, sizeof *molecule->torsion_first);
    if (molecule->torsion_first == NULL) return tml_no_memory(making->error);
    for (int32_t i = 0; i < molecule->bond_count; i++) {
        molecule->torsion_first[i] = molecule->torsion_count;
        const tml_bond *bond = &molecule->bonds[i];
        if (tml_is_bare(making, bond->a) || tml_is_bare(making, bond->b)) continue;
        reference known = know_bond(making, i);
        for (int32_t j = molecule->neighbour_first[bond->a]; j < molecule->neighbour_first[bond->a + 1]; j++)
            for (int32_t k = molecule->neighbour_first[bond->b]; k < molecule->neighbour_first[bond->b + 1]; k++) {
                int32_t a = molecule->neighbours[j], d = molecule->neighbours[k];
                if (a == bond->b || d == bond->a || a == d || tml_bonded(molecule, a, d)) continue;
                if (!tml_grow(&molecule->torsions, &making->torsion_room, (size_t)molecule->torsion_count + 1,
                              sizeof *molecule->torsions))
                    return tml_no_memory(making->error);
                tml_torsion *torsion = &molecule->torsions[molecule->torsion_count++];
                *torsion = (tml_torsion){a, bond->a, bond->b, d, known.kind, known.angle, known.tolerance};
                if (known.kind == TML_TORSION_FIXED || known.kind == TML_TORSION_PEPTIDE)
                    torsion->angle = carry_over(making, bond, &known, a, d);
            }
    }
    molecule->torsion_first[molecule->bond_count] = molecule->torsion_count;
    return TML_OK;
}

/* ---- what is known of a bond ---- */

static bool of_peptide(const tml_making *making, int32_t bond, reference *known);
static bool of_row(const tml_making *making, const tml_torsion_row *rows, const tml_bond *bond, reference *known);
static bool of_ring(const tml_making *making, const tml_bond *bond, reference *known);
static bool is_tetrahedral(const tml_making *making, int32_t atom);

static reference know_bond(const tml_making *making, int32_t index) {
    const tml_molecule *molecule = making->molecule;
    const tml_bond *bond = &molecule->bonds[index];
    reference known;
    if (of_peptide(making, index, &known)) return known;
    int32_t r = molecule->atoms[bond->a].residue;
    if (molecule->atoms[bond->b].residue == r && making->bond_kinds[index] == TML_BOND_INNER &&
        (of_row(making, making->residues[r].form->torsions, bond, &known) ||
         of_row(making, making->residues[r].form->family->common->torsions, bond, &known)))
        return known;
    if (making->planar[bond->a] && making->planar[bond->b] && of_ring(making, bond, &known)) return known;
    /* Rotation about S-S prefers 90°, which is no staggering. */
    bool sulphurs = molecule->atoms[bond->a].element == 16 && molecule->atoms[bond->b].element == 16;
    if (is_tetrahedral(making, bond->a) && is_tetrahedral(making, bond->b) && !sulphurs)
        return (reference){.kind = TML_TORSION_STAGGERED, .angle = TML_PI / 3};
    return (reference){.kind = TML_TORSION_FREE};
}

static bool of_peptide(const tml_making *making, int32_t index, reference *known) {
    const tml_molecule *molecule = making->molecule;
    const tml_atom *end = &molecule->atoms[molecule->bonds[index].a];
    if (making->bond_kinds[index] != TML_BOND_CHAIN || making->residues[end->residue].form->family->polymer != TML_POLYMER_PROTEIN)
        return false;
    int32_t low = 0, high = molecule->peptide_count - 1; /* peptides are in the order of their bonds */
    while (low < high) {
        int32_t middle = low + (high - low) / 2;
        if (molecule->peptides[middle].bond < index)
            low = middle + 1;
        else
            high = middle;
    }
    const tml_peptide *peptide = &molecule->peptides[low];
    *known = (reference){peptide->ca1, peptide->ca2, TML_TORSION_PEPTIDE, true, peptide->cis ? 0 : TML_PI, PEPTIDE_TOLERANCE};
    return true;
}

static bool of_row(const tml_making *making, const tml_torsion_row *rows, const tml_bond *bond, reference *known) {
    const tml_atom *atoms = making->molecule->atoms;
    int32_t r = atoms[bond->a].residue;
    for (; rows->a != NULL; rows++) {
        bool forwards = strcmp(rows->b, atoms[bond->a].name) == 0 && strcmp(rows->c, atoms[bond->b].name) == 0;
        bool backwards = strcmp(rows->c, atoms[bond->a].name) == 0 && strcmp(rows->b, atoms[bond->b].name) == 0;
        if (!forwards && !backwards) continue;
        int32_t a = tml_lookup_atom(making, r, rows->a, strlen(rows->a)),
                d = tml_lookup_atom(making, r, rows->d, strlen(rows->d));
        if (a < 0 || d < 0) continue;
        bool flat = rows->tolerance == 0;
        *known = (reference){forwards ? a : d,
                             forwards ? d : a,
                             TML_TORSION_FIXED,
                             flat,
                             rows->degrees * TML_PI / 180,
                             flat ? PLANAR_TOLERANCE : rows->tolerance * TML_PI / 180};
        return true;
    }
    return false;
}

/* In a planar ring of five or six, the ring's own atoms are cis about each of its bonds. */
static bool of_ring(const tml_making *making, const tml_bond *bond, reference *known) {
    const tml_molecule *molecule = making->molecule;
    const int32_t *first = molecule->neighbour_first, *to = molecule->neighbours;
    for (int32_t i = first[bond->a]; i < first[bond->a + 1]; i++)
        for (int32_t j = first[bond->b]; j < first[bond->b + 1]; j++) {
            int32_t a = to[i], d = to[j];
            if (a == bond->b || d == bond->a || a == d || !making->planar[a] || !making->planar[d]) continue;
            for (int32_t k = first[a]; k < first[a + 1]; k++) {
                int32_t e = to[k];
                if (e == bond->a || e == bond->b || !making->planar[e]) continue;
                bool closes = tml_bonded(molecule, e, d); /* five */
                for (int32_t l = first[e]; l < first[e + 1] && !closes; l++)
                    closes = to[l] != bond->a && to[l] != bond->b && to[l] != a && making->planar[to[l]] &&
                             tml_bonded(molecule, to[l], d);
                if (!closes) continue;
                *known = (reference){a, d, TML_TORSION_FIXED, true, 0, PLANAR_TOLERANCE};
                return true;
            }
        }
    return false;
}

/* sp3: carbon and nitrogen with three or four arms that are not in a plane, oxygen and sulphur with two. */
static bool is_tetrahedral(const tml_making *making, int32_t atom) {
    const tml_molecule *molecule = making->molecule;
    int32_t degree = tml_degree(molecule, atom);
    if (making->planar[atom] || degree > TML_ARMS_MAX || tml_element_is_metal(molecule->atoms[atom].element)) return false;
    return degree >= 3 || (degree == 2 && (molecule->atoms[atom].element == 8 || molecule->atoms[atom].element == 16));
}

/* ---- other pairs of outer atoms ---- */

static double azimuth(const tml_making *making, int32_t centre, int32_t axis, int32_t arm);

/* The torsion of outer atoms a and d, if that of the reference's is known. About a bond of a planar group every change of an
 * outer atom turns by 180°; elsewhere by as much as the arms of the two centres lie apart around the bond. */
static double carry_over(const tml_making *making, const tml_bond *bond, const reference *known, int32_t a, int32_t d) {
    if (known->flat) return (known->angle != 0) ^ (a != known->a) ^ (d != known->d) ? TML_PI : 0;
    double angle = known->angle;
    if (d != known->d) angle += azimuth(making, bond->b, bond->a, d) - azimuth(making, bond->b, bond->a, known->d);
    /* From b's side the bond runs the other way, which turns the sense around. */
    if (a != known->a) angle += azimuth(making, bond->a, bond->b, a) - azimuth(making, bond->a, bond->b, known->a);
    return remainder(angle, 2 * TML_PI);
}

static const tml_centre *centre_at(const tml_making *making, int32_t atom) {
    const tml_molecule *molecule = making->molecule;
    int32_t low = 0, high = molecule->sorted_centres;
    while (low < high) {
        int32_t middle = low + (high - low) / 2;
        if (molecule->centres[middle].centre < atom)
            low = middle + 1;
        else
            high = middle;
    }
    return low < molecule->sorted_centres && molecule->centres[low].centre == atom ? &molecule->centres[low] : NULL;
}

static double angle_between(const tml_molecule *molecule, int32_t a, int32_t centre, int32_t c) {
    for (int32_t i = molecule->angle_first[centre]; i < molecule->angle_first[centre + 1]; i++) {
        const tml_angle *angle = &molecule->angles[i];
        if ((angle->a == a && angle->c == c) || (angle->a == c && angle->c == a)) return angle->angle;
    }
    return a == c ? 0 : NAN;
}

/* Where an arm of a centre lies around the axis from `axis` to the centre, clockwise looking along it; only differences mean
 * something. */
static double azimuth(const tml_making *making, int32_t centre, int32_t axis, int32_t arm) {
    int32_t arms[TML_ARMS_MAX] = {-1, -1, -1, -1};
    int count = 0;
    const tml_molecule *molecule = making->molecule;
    const tml_centre *known = centre_at(making, centre);
    for (int k = 0; known != NULL && k < TML_ARMS_MAX && known->arms[k] >= 0; k++) arms[count++] = known->arms[k];
    if (known == NULL)
        for (int32_t k = molecule->neighbour_first[centre]; k < molecule->neighbour_first[centre + 1] && count < TML_ARMS_MAX;
             k++)
            arms[count++] = molecule->neighbours[k];
    double angle[TML_ARMS_MAX][TML_ARMS_MAX] = {{0}}, direction[TML_ARMS_MAX][3];
    for (int i = 0; i < count; i++)
        for (int j = 0; j < count; j++) angle[i][j] = angle_between(molecule, arms[i], centre, arms[j]);
    if (!tml_arms_directions(angle, count, direction)) return 0;
    int axis_at = 0, arm_at = 0;
    for (int k = 0; k < count; k++) {
        if (known != NULL && known->sign < 0) direction[k][2] = -direction[k][2];
        if (arms[k] == axis) axis_at = k;
        if (arms[k] == arm) arm_at = k;
    }
    /* A far point beside the axis to measure from: any direction not along the axis does. */
    double beside[3] = {direction[axis_at][1] - 2, direction[axis_at][2] + 3, direction[axis_at][0] + 5}, origin[3] = {0, 0, 0};
    return tml_dihedral_of(beside, direction[axis_at], origin, direction[arm_at]);
}

/* ---- cis and trans ---- */

void tml_molecule_set_peptide(tml_molecule *molecule, int32_t index, bool cis) {
    tml_peptide *peptide = &molecule->peptides[index];
    if (peptide->cis == cis) return;
    peptide->cis = cis;
    for (int32_t i = molecule->torsion_first[peptide->bond]; i < molecule->torsion_first[peptide->bond + 1]; i++)
        molecule->torsions[i].angle = molecule->torsions[i].angle == 0 ? TML_PI : 0;
    if (peptide->plane >= 0) tml_plane_fill(molecule, peptide->plane);
}
