#include "molecule/making.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/vector.h"
#include "molecule/elements.h"
#include "molecule/topology_geometry.h"

/* Contents: the steps - planes and peptides - angles - centres - what the input adds */

static tml_status make_planes(tml_making *making);
static void mark_trigonal(tml_making *making);
static tml_status make_angles(tml_making *making);
static tml_status make_centres(tml_making *making);
static tml_status add_user_centres(tml_making *making);
static tml_status add_user_planes(tml_making *making);

tml_status tml_make_terms(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    making->planar = tml_alloc((size_t)molecule->atom_count, sizeof *making->planar);
    if (making->planar == NULL) return tml_no_memory(making->error);
    tml_status status = make_planes(making);
    if (status == TML_OK) mark_trigonal(making);
    if (status == TML_OK) status = make_angles(making);
    if (status == TML_OK) status = make_centres(making);
    if (status == TML_OK) status = add_user_centres(making);
    if (status == TML_OK) status = tml_make_torsions(making);
    for (int32_t p = 0; p < molecule->plane_count && status == TML_OK; p++) tml_plane_fill(molecule, p);
    if (status == TML_OK) status = add_user_planes(making);
    return status;
}

/* ---- planes and peptides ---- */

static tml_status add_plane(tml_making *making, int32_t r, const char *names, int32_t first_of_residue);
static tml_status add_peptide(tml_making *making, int32_t r);
static int32_t arm_of_peptide(const tml_molecule *molecule, int32_t end, int32_t other, int32_t oxygen);

static tml_status make_planes(tml_making *making) {
    for (int32_t r = 0; r < making->residue_count; r++) {
        const tml_layout_residue *residue = &making->residues[r];
        if (residue->form == NULL) continue;
        tml_status status = residue->previous < 0 || residue->form->family->polymer != TML_POLYMER_PROTEIN ? TML_OK : add_peptide(making, r);
        int32_t first = making->molecule->plane_count;
        for (const char *const *names = residue->form->planes; *names != NULL && status == TML_OK; names++)
            status = add_plane(making, r, *names, first);
        for (const char *const *names = residue->form->family->common->planes; *names != NULL && status == TML_OK; names++)
            status = add_plane(making, r, *names, first);
        if (status != TML_OK) return status;
    }
    return TML_OK;
}

static tml_status add_peptide(tml_making *making, int32_t r) {
    tml_molecule *molecule = making->molecule;
    const tml_layout_residue *before = &making->residues[making->residues[r].previous];
    if (!tml_grow(&molecule->peptides, &making->peptide_room, (size_t)molecule->peptide_count + 1, sizeof *molecule->peptides))
        return tml_no_memory(making->error);
    tml_peptide *peptide = &molecule->peptides[molecule->peptide_count++];
    *peptide = (tml_peptide){.c = tml_lookup_atom(making, r, "-C", 2),
                             .o = tml_lookup_atom(making, r, "-O", 2),
                             .n = tml_lookup_atom(making, r, "N", 1),
                             .residue1 = making->residues[r].previous,
                             .residue2 = r,
                             .plane = -1,
                             .cis = before->cis,
                             .declared = before->cis || before->trans};
    for (int32_t k = molecule->neighbour_first[peptide->c]; k < molecule->neighbour_first[peptide->c + 1]; k++)
        if (molecule->neighbours[k] == peptide->n) peptide->bond = molecule->neighbour_bonds[k];
    peptide->ca1 = arm_of_peptide(molecule, peptide->c, peptide->n, peptide->o);
    peptide->ca2 = arm_of_peptide(molecule, peptide->n, peptide->c, -1);
    return peptide->ca1 >= 0 && peptide->ca2 >= 0
               ? TML_OK
               : tml_making_fail(making, making->residues[r].place, "%s:%s: its bond to the residue before lacks an atom on either side",
                                 making->residues[r].chain, making->residues[r].number);
}

/* Where omega is measured: CA, or what stands for it in a cap: another heavy atom, or else a hydrogen. */
static int32_t arm_of_peptide(const tml_molecule *molecule, int32_t end, int32_t other, int32_t oxygen) {
    int32_t best = -1;
    for (int32_t k = molecule->neighbour_first[end]; k < molecule->neighbour_first[end + 1]; k++) {
        int32_t arm = molecule->neighbours[k];
        if (arm == other || arm == oxygen) continue;
        if (strcmp(molecule->atoms[arm].name, "CA") == 0) return arm;
        if (best < 0 || (molecule->atoms[best].element == 1 && molecule->atoms[arm].element != 1)) best = arm;
    }
    return best;
}

/* Are all of these atoms in an earlier plane of the same residue? */
static bool is_within_earlier(const tml_molecule *molecule, const int32_t *atoms, int32_t count, int32_t first_of_residue) {
    for (int32_t p = first_of_residue; p < molecule->plane_count; p++) {
        const tml_plane *other = &molecule->planes[p];
        int32_t held = 0;
        for (int32_t i = 0; i < count; i++)
            for (int32_t j = 0; j < other->count; j++) held += atoms[i] == molecule->plane_atoms[other->first + j];
        if (held == count) return true;
    }
    return false;
}

/* Room for one more plane of `count` atoms. */
static bool reserve_plane(tml_making *making, size_t count) {
    tml_molecule *molecule = making->molecule;
    size_t need = (size_t)molecule->plane_atom_count + count;
    return tml_grow(&molecule->plane_atoms, &making->plane_atom_room, need, sizeof *molecule->plane_atoms) &&
           tml_grow(&molecule->plane_xy, &making->plane_xy_room, 2 * need, sizeof *molecule->plane_xy) &&
           tml_grow(&molecule->planes, &making->plane_room, (size_t)molecule->plane_count + 1, sizeof *molecule->planes);
}

/* A plane of those of the named atoms that are there, if they are at least four. */
static tml_status add_plane(tml_making *making, int32_t r, const char *names, int32_t first_of_residue) {
    enum { SMALLEST = 4 };
    static const double WITHIN = 0.02; /* Å */
    tml_molecule *molecule = making->molecule;
    int32_t atoms[TML_PLANE_MAX], count = 0;
    for (const char *at = names; *at != '\0' && count < TML_PLANE_MAX; at += strspn(at, " ")) {
        size_t length = strcspn(at, " ");
        int32_t atom = tml_lookup_atom(making, r, at, length);
        if (atom >= 0) atoms[count++] = atom;
        at += length;
    }
    bool of_peptide = *names == '-';
    if (count < SMALLEST || (of_peptide && making->residues[r].previous < 0)) return TML_OK;
    if (is_within_earlier(molecule, atoms, count, first_of_residue)) return TML_OK;
    if (!reserve_plane(making, (size_t)count)) return tml_no_memory(making->error);
    if (of_peptide) molecule->peptides[molecule->peptide_count - 1].plane = molecule->plane_count;
    molecule->planes[molecule->plane_count++] =
        (tml_plane){.first = molecule->plane_atom_count, .count = count, .within = WITHIN};
    for (int32_t i = 0; i < count; i++) {
        molecule->plane_atoms[molecule->plane_atom_count++] = atoms[i];
        int32_t within = 0;
        for (int32_t j = 0; j < count; j++) within += tml_bonded(molecule, atoms[i], atoms[j]);
        if (within >= 2 && tml_degree(molecule, atoms[i]) <= 3) making->planar[atoms[i]] = true;
    }
    return TML_OK;
}

/* What a variant or a link left in no listed plane: a carbon with three neighbours, a nitrogen linked to such a one. A component's
 * planes are all there are: its carbons may have hydrogens that it does not list. */
static void mark_trigonal(tml_making *making) {
    const tml_molecule *molecule = making->molecule;
    for (int32_t i = 0; i < molecule->atom_count; i++)
        if (!tml_is_bare(making, i) && !making->residues[molecule->atoms[i].residue].own && molecule->atoms[i].element == 6 &&
            tml_degree(molecule, i) == 3)
            making->planar[i] = true;
    for (int32_t i = 0; i < molecule->bond_count; i++) {
        int32_t a = molecule->bonds[i].a, b = molecule->bonds[i].b;
        if (making->bond_kinds[i] != TML_BOND_LINK || tml_is_bare(making, a) || tml_is_bare(making, b)) continue;
        if (molecule->atoms[a].element == 7 && molecule->atoms[b].element == 6 && making->planar[b] &&
            tml_degree(molecule, a) == 3)
            making->planar[a] = true;
        if (molecule->atoms[b].element == 7 && molecule->atoms[a].element == 6 && making->planar[a] &&
            tml_degree(molecule, b) == 3)
            making->planar[b] = true;
    }
}

/* ---- angles ---- */

/* Half-width for bounds: 99 % of the angles of deposited NMR structures lie within it of ours, and so do twice the spreads that
 * Engh & Huber give for most (1.0 to 2.9°, one sigma). */
static const double ANGLE_TOLERANCE = 5 * TML_PI / 180;

static bool is_open(const tml_making *making, int32_t atom);
static tml_status add_known_angles(tml_making *making, int32_t centre);
static tml_status add_angles(tml_making *making, int32_t centre);

static tml_status make_angles(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    molecule->angle_first = tml_alloc((size_t)molecule->atom_count + 1, sizeof *molecule->angle_first);
    if (molecule->angle_first == NULL) return tml_no_memory(making->error);
    for (int32_t i = 0; i < molecule->atom_count; i++) {
        molecule->angle_first[i] = molecule->angle_count;
        int32_t degree = tml_degree(molecule, i);
        tml_status status = TML_OK;
        if (is_open(making, i))
            status = add_known_angles(making, i);
        else if (!tml_is_bare(making, i) && degree >= 2)
            status = add_angles(making, i);
        if (status != TML_OK) return status;
    }
    molecule->angle_first[molecule->atom_count] = molecule->angle_count;
    return TML_OK;
}

/* A metal, or an atom with more arms than a tetrahedron has: no rule tells its angles, only rows do. */
static bool is_open(const tml_making *making, int32_t atom) {
    const tml_molecule *molecule = making->molecule;
    return !tml_is_bare(making, atom) && (tml_degree(molecule, atom) > TML_ARMS_MAX || tml_element_is_metal(molecule->atoms[atom].element));
}

static bool reserve_angles(tml_making *making, size_t count) {
    tml_molecule *molecule = making->molecule;
    return tml_grow(&molecule->angles, &making->angle_room, (size_t)molecule->angle_count + count, sizeof *molecule->angles);
}

static tml_status add_known_angles(tml_making *making, int32_t centre) {
    tml_molecule *molecule = making->molecule;
    for (int32_t i = molecule->neighbour_first[centre]; i < molecule->neighbour_first[centre + 1]; i++)
        for (int32_t j = i + 1; j < molecule->neighbour_first[centre + 1]; j++) {
            int32_t a = molecule->neighbours[i], c = molecule->neighbours[j];
            double angle = tml_lookup_angle(making, a, centre, c);
            if (isnan(angle)) continue;
            if (!reserve_angles(making, 1)) return tml_no_memory(making->error);
            molecule->angles[molecule->angle_count++] = (tml_angle){a, centre, c, angle, ANGLE_TOLERANCE};
        }
    return TML_OK;
}

/* How a two-armed atom sits on a metal is not told by its other bonds. */
static bool is_loose(const tml_making *making, const int32_t *arm, int count, double known) {
    const tml_atom *atoms = making->molecule->atoms;
    return count == 2 && isnan(known) && (tml_element_is_metal(atoms[arm[0]].element) || tml_element_is_metal(atoms[arm[1]].element));
}

static tml_status add_angles(tml_making *making, int32_t centre) {
    tml_molecule *molecule = making->molecule;
    const int32_t *arm = &molecule->neighbours[molecule->neighbour_first[centre]];
    int count = tml_degree(molecule, centre);
    double angle[TML_ARMS_MAX][TML_ARMS_MAX] = {{0}};
    for (int i = 0; i < count; i++)
        for (int j = i + 1; j < count; j++) angle[i][j] = angle[j][i] = tml_lookup_angle(making, arm[i], centre, arm[j]);
    if (is_loose(making, arm, count, angle[0][1])) return TML_OK;
    if (count == 2 && isnan(angle[0][1]) && !making->planar[centre]) {
        const tml_atom *atoms = molecule->atoms;
        double usual = tml_two_armed_angle(atoms[centre].element, atoms[arm[0]].element, atoms[arm[1]].element);
        if (!isnan(usual)) angle[0][1] = angle[1][0] = usual * TML_PI / 180;
    }
    bool open_end = count == 2 && (molecule->atoms[centre].element == 6 || molecule->atoms[centre].element == 7);
    tml_arms_complete(angle, count, making->planar[centre] || open_end);
    if (!reserve_angles(making, (size_t)(count * (count - 1) / 2))) return tml_no_memory(making->error);
    for (int i = 0; i < count; i++)
        for (int j = i + 1; j < count; j++)
            molecule->angles[molecule->angle_count++] = (tml_angle){arm[i], centre, arm[j], angle[i][j], ANGLE_TOLERANCE};
    return TML_OK;
}

/* ---- centres ---- */

static bool from_row(const tml_making *making, const tml_centre_row *rows, int32_t atom, tml_centre *centre);
static void rest_of_arms(const tml_molecule *molecule, tml_centre *centre);

static tml_status make_centres(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    for (int32_t i = 0; i < molecule->atom_count; i++) {
        int32_t degree = tml_degree(molecule, i), r = molecule->atoms[i].residue;
        if (tml_is_bare(making, i) || making->planar[i] || degree < 3 || is_open(making, i)) continue;
        if (!tml_grow(&molecule->centres, &making->centre_room, (size_t)molecule->centre_count + 1, sizeof *molecule->centres))
            return tml_no_memory(making->error);
        const int32_t *arm = &molecule->neighbours[molecule->neighbour_first[i]];
        tml_centre *centre = &molecule->centres[molecule->centre_count++];
        const tml_template *form = making->residues[r].form;
        if (from_row(making, form->centres, i, centre) || from_row(making, form->family->common->centres, i, centre))
            continue;
        *centre = (tml_centre){.centre = i, .arms = {arm[0], arm[1], arm[2], degree == 4 ? arm[3] : -1}, .sign = 1};
    }
    molecule->sorted_centres = molecule->centre_count;
    return TML_OK;
}

/* The first row for this atom whose arms are all there; false where there is none. A sign of 0 is no handedness. */
static bool from_row(const tml_making *making, const tml_centre_row *rows, int32_t atom, tml_centre *centre) {
    const tml_molecule *molecule = making->molecule;
    int32_t r = molecule->atoms[atom].residue;
    for (; rows->c != NULL; rows++) {
        if (strcmp(rows->c, molecule->atoms[atom].name) != 0) continue;
        const char *names[3] = {rows->a1, rows->a2, rows->a3};
        *centre = (tml_centre){
            .centre = atom, .arms = {-1, -1, -1, -1}, .sign = rows->sign == 0 ? 1 : rows->sign, .fixed = rows->sign != 0};
        bool whole = true;
        for (int k = 0; k < 3; k++) {
            centre->arms[k] = tml_lookup_atom(making, r, names[k], strlen(names[k]));
            whole = whole && centre->arms[k] >= 0;
        }
        if (!whole) continue;
        rest_of_arms(molecule, centre);
        return true;
    }
    return false;
}

static void rest_of_arms(const tml_molecule *molecule, tml_centre *centre) {
    int32_t others = 0;
    for (int32_t k = molecule->neighbour_first[centre->centre]; k < molecule->neighbour_first[centre->centre + 1]; k++) {
        int32_t arm = molecule->neighbours[k];
        if (arm == centre->arms[0] || arm == centre->arms[1] || arm == centre->arms[2]) continue;
        centre->arms[3] = arm;
        others++;
    }
    if (others != 1) centre->arms[3] = -1;
}

/* ---- what the input adds ---- */

static tml_status find_made(tml_making *making, const tml_address *address, int32_t *made) {
    int32_t found;
    tml_status status = tml_find_layout_atom(making, address, &found);
    if (status == TML_OK) *made = making->atoms[found].made;
    return status;
}

/* A stated handedness takes the place of the table's. */
static tml_status add_user_centres(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    const tml_outline *outline = making->outline;
    if (outline->chiral_count == 0) return TML_OK;
    int32_t *centre_of = tml_alloc((size_t)molecule->atom_count, sizeof *centre_of); /* one more than the index; 0 for none */
    if (centre_of == NULL) return tml_no_memory(making->error);
    for (int32_t i = 0; i < molecule->centre_count; i++) centre_of[molecule->centres[i].centre] = i + 1;
    tml_status status = TML_OK;
    for (size_t i = 0; i < outline->chiral_count && status == TML_OK; i++) {
        const tml_outline_chiral *given = &outline->chirals[i];
        tml_centre centre = {.arms = {-1, -1, -1, -1}, .sign = given->sign < 0 ? -1 : 1, .fixed = true};
        status = find_made(making, &given->centre, &centre.centre);
        for (int k = 0; k < 3 && status == TML_OK; k++) status = find_made(making, &given->arm[k], &centre.arms[k]);
        if (status != TML_OK) break;
        for (int k = 0; k < 3 && status == TML_OK; k++)
            if (centre.arms[k] == centre.centre || centre.arms[k] == centre.arms[(k + 1) % 3])
                status = tml_making_fail(making, given->place, "a centre and its three arms must be four different atoms");
        if (status != TML_OK) break;
        rest_of_arms(molecule, &centre);
        if (centre_of[centre.centre] == 0) {
            if (!tml_grow(&molecule->centres, &making->centre_room, (size_t)molecule->centre_count + 1,
                          sizeof *molecule->centres)) {
                status = tml_no_memory(making->error);
                break;
            }
            centre_of[centre.centre] = ++molecule->centre_count;
        }
        molecule->centres[centre_of[centre.centre] - 1] = centre;
    }
    free(centre_of);
    return status;
}

static tml_status add_user_plane(tml_making *making, const tml_outline_plane *given, size_t *seen, size_t stamp);

static tml_status add_user_planes(tml_making *making) {
    tml_molecule *molecule = making->molecule;
    const tml_outline *outline = making->outline;
    size_t *seen = tml_alloc((size_t)molecule->atom_count, sizeof *seen); /* the last plane that named an atom, from 1 */
    if (seen == NULL) return tml_no_memory(making->error);
    tml_status status = TML_OK;
    for (size_t i = 0; i < outline->plane_count && status == TML_OK; i++)
        status = add_user_plane(making, &outline->planes[i], seen, i + 1);
    free(seen);
    return status;
}

static tml_status add_user_plane(tml_making *making, const tml_outline_plane *given, size_t *seen, size_t stamp) {
    tml_molecule *molecule = making->molecule;
    tml_plane plane = {.first = molecule->plane_atom_count, .within = given->within};
    if (given->atom_count > (size_t)(INT32_MAX / 4 - molecule->plane_atom_count))
        return tml_fail(making->error, TML_TOO_LARGE, "too many atoms in planes");
    if (!reserve_plane(making, given->atom_count)) return tml_no_memory(making->error);
    for (size_t k = 0; k < given->atom_count; k++) {
        int32_t atom;
        tml_status status = find_made(making, &given->atoms[k], &atom);
        if (status != TML_OK) return status;
        if (seen[atom] == stamp)
            return tml_making_fail(making, given->atoms[k].place, "the plane names %s twice", given->atoms[k].atom);
        seen[atom] = stamp;
        molecule->plane_atoms[plane.first + plane.count++] = atom;
    }
    molecule->plane_atom_count += plane.count;
    molecule->planes[molecule->plane_count++] = plane;
    return TML_OK;
}
