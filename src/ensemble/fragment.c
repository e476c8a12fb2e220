#include "ensemble/fragment.h"

#include <stdlib.h>

#include "base/memory.h"

/* new_of[i] is the fragment's index of the problem's atom i, -1 where it is left out. */
typedef struct cut { const tml_problem *from; tml_problem *to; int32_t *new_of, *new_residue; } cut;

static bool cut_residues(cut *c, const bool *keep);
static bool cut_terms(cut *c);
static bool cut_planes(cut *c);
static bool cut_neighbours(cut *c);
static bool cut_distances(cut *c);
static bool cut_dihedrals(cut *c);

tml_status tml_fragment_make(const tml_problem *problem, const bool *keep, tml_problem **out, tml_error *error) {
    cut c = {.from = problem, .to = tml_alloc(1, sizeof *c.to)};
    c.new_of = tml_alloc((size_t)problem->molecule.atom_count, sizeof *c.new_of);
    c.new_residue = tml_alloc((size_t)problem->molecule.residue_count, sizeof *c.new_residue);
    bool room = c.to != NULL && c.new_of != NULL && c.new_residue != NULL && cut_residues(&c, keep) && cut_terms(&c) &&
                cut_planes(&c) && cut_neighbours(&c) && cut_distances(&c) && cut_dihedrals(&c);
    free(c.new_of);
    free(c.new_residue);
    *out = room ? c.to : NULL;
    if (room) return TML_OK;
    tml_fragment_free(c.to);
    return tml_no_memory(error);
}

void tml_fragment_free(tml_problem *fragment) {
    if (fragment == NULL) return;
    tml_molecule_clear(&fragment->molecule);
    tml_restraints_clear(&fragment->restraints);
    free(fragment);
}

/* ---- molecule ---- */

static bool cut_residues(cut *c, const bool *keep) {
    const tml_molecule *from = &c->from->molecule;
    tml_molecule *to = &c->to->molecule;
    to->atoms = tml_alloc((size_t)from->atom_count, sizeof *to->atoms);
    to->residues = tml_alloc((size_t)from->residue_count, sizeof *to->residues);
    if (to->atoms == NULL || to->residues == NULL) return false;
    for (int32_t r = 0; r < from->residue_count; r++) {
        tml_residue *residue = &to->residues[to->residue_count];
        *residue = from->residues[r];
        residue->first_atom = to->atom_count;
        for (int32_t i = from->residues[r].first_atom; i < from->residues[r].first_atom + from->residues[r].atom_count; i++) {
            c->new_of[i] = keep[i] ? to->atom_count : -1;
            if (!keep[i]) continue;
            to->atoms[to->atom_count] = from->atoms[i];
            to->atoms[to->atom_count++].residue = to->residue_count;
        }
        residue->atom_count = to->atom_count - residue->first_atom;
        c->new_residue[r] = residue->atom_count > 0 ? to->residue_count++ : -1;
    }
    return true;
}

/* Renumber `count` atoms in place; false if one is left out. An index of -1 stays. */
static bool renumber(const cut *c, int32_t *atoms, int count) {
    for (int k = 0; k < count; k++) {
        if (atoms[k] < 0) continue;
        atoms[k] = c->new_of[atoms[k]];
        if (atoms[k] < 0) return false;
    }
    return true;
}

/* Copy the terms whose atoms, `width` of them at the start of each term, are all kept. */
#define CUT_TERMS(field, count_field, width)                                              \
    do {                                                                                  \
        to->field = tml_alloc((size_t)from->count_field, sizeof *to->field);              \
        if (to->field == NULL) return false;                                              \
        for (int32_t i = 0; i < from->count_field; i++) {                                 \
            to->field[to->count_field] = from->field[i];                                  \
            to->count_field += renumber(c, (int32_t *)&to->field[to->count_field], width); \
        }                                                                                 \
    } while (0)

static bool cut_terms(cut *c) {
    const tml_molecule *from = &c->from->molecule;
    tml_molecule *to = &c->to->molecule;
    CUT_TERMS(bonds, bond_count, 2);
    CUT_TERMS(angles, angle_count, 3);
    CUT_TERMS(torsions, torsion_count, 4);
    CUT_TERMS(centres, centre_count, 5);
    CUT_TERMS(peptides, peptide_count, 5);
    for (int32_t i = 0; i < to->peptide_count; i++) {
        to->peptides[i].residue1 = c->new_residue[to->peptides[i].residue1];
        to->peptides[i].residue2 = c->new_residue[to->peptides[i].residue2];
        to->peptides[i].bond = to->peptides[i].plane = -1;
    }
    return true;
}

static bool cut_planes(cut *c) {
    const tml_molecule *from = &c->from->molecule;
    tml_molecule *to = &c->to->molecule;
    to->planes = tml_alloc((size_t)from->plane_count, sizeof *to->planes);
    to->plane_atoms = tml_alloc((size_t)from->plane_atom_count, sizeof *to->plane_atoms);
    to->plane_xy = tml_alloc((size_t)from->plane_atom_count * 2, sizeof *to->plane_xy);
    if (to->planes == NULL || to->plane_atoms == NULL || to->plane_xy == NULL) return false;
    for (int32_t i = 0; i < from->plane_count; i++) {
        const tml_plane *plane = &from->planes[i];
        int32_t first = to->plane_atom_count, count = 0;
        for (int32_t j = plane->first; j < plane->first + plane->count; j++) {
            if (c->new_of[from->plane_atoms[j]] < 0) continue;
            to->plane_atoms[first + count] = c->new_of[from->plane_atoms[j]];
            for (int k = 0; k < 2; k++) to->plane_xy[2 * (first + count) + k] = from->plane_xy[2 * j + k];
            count++;
        }
        if (count != plane->count) continue;
        to->planes[to->plane_count] = *plane;
        to->planes[to->plane_count++].first = first;
        to->plane_atom_count += count;
    }
    return true;
}

static bool cut_neighbours(cut *c) {
    tml_molecule *to = &c->to->molecule;
    int32_t *fill = tml_alloc((size_t)to->atom_count + 1, sizeof *fill);
    to->neighbour_first = tml_alloc((size_t)to->atom_count + 1, sizeof *to->neighbour_first);
    to->neighbours = tml_alloc((size_t)to->bond_count * 2, sizeof *to->neighbours);
    bool room = fill != NULL && to->neighbour_first != NULL && to->neighbours != NULL;
    for (int32_t i = 0; room && i < to->bond_count; i++) {
        to->neighbour_first[to->bonds[i].a + 1]++;
        to->neighbour_first[to->bonds[i].b + 1]++;
    }
    for (int32_t i = 0; room && i < to->atom_count; i++) {
        to->neighbour_first[i + 1] += to->neighbour_first[i];
        fill[i] = to->neighbour_first[i];
    }
    for (int32_t i = 0; room && i < to->bond_count; i++) {
        to->neighbours[fill[to->bonds[i].a]++] = to->bonds[i].b;
        to->neighbours[fill[to->bonds[i].b]++] = to->bonds[i].a;
    }
    free(fill);
    return room;
}

/* ---- restraints ---- */

static bool cut_distances(cut *c) {
    const tml_restraints *from = &c->from->restraints;
    tml_restraints *to = &c->to->restraints;
    to->distances = tml_alloc((size_t)from->distance_count, sizeof *to->distances);
    to->alternatives = tml_alloc((size_t)from->alternative_count, sizeof *to->alternatives);
    to->group_atoms = tml_alloc((size_t)from->group_atom_count, sizeof *to->group_atoms);
    if (to->distances == NULL || to->alternatives == NULL || to->group_atoms == NULL) return false;
    /* Groups keep their places, so that alternatives need no change; those of atoms left out are not referred to. */
    to->group_atom_count = from->group_atom_count;
    to->stereo_count = from->stereo_count;
    for (int32_t i = 0; i < from->group_atom_count; i++) to->group_atoms[i] = c->new_of[from->group_atoms[i]];
    for (int32_t i = 0; i < from->distance_count; i++) {
        const tml_distance_restraint *restraint = &from->distances[i];
        bool whole = true;
        for (int32_t j = restraint->first_alternative; whole && j < restraint->first_alternative + restraint->alternative_count; j++) {
            const tml_alternative *alternative = &from->alternatives[j];
            for (int32_t k = 0; k < alternative->count_a; k++) whole = whole && to->group_atoms[alternative->first_a + k] >= 0;
            for (int32_t k = 0; k < alternative->count_b; k++) whole = whole && to->group_atoms[alternative->first_b + k] >= 0;
        }
        if (!whole) continue;
        tml_distance_restraint *kept = &to->distances[to->distance_count++];
        *kept = *restraint;
        kept->first_alternative = to->alternative_count;
        for (int32_t j = 0; j < restraint->alternative_count; j++)
            to->alternatives[to->alternative_count++] = from->alternatives[restraint->first_alternative + j];
    }
    return true;
}

static bool cut_dihedrals(cut *c) {
    const tml_restraints *from = &c->from->restraints;
    tml_restraints *to = &c->to->restraints;
    to->dihedrals = tml_alloc((size_t)from->dihedral_count, sizeof *to->dihedrals);
    to->intervals = tml_alloc((size_t)from->interval_count, sizeof *to->intervals);
    if (to->dihedrals == NULL || to->intervals == NULL) return false;
    for (int32_t i = 0; i < from->dihedral_count; i++) {
        const tml_dihedral_restraint *restraint = &from->dihedrals[i];
        int32_t first = to->interval_count;
        bool whole = true;
        for (int32_t j = 0; whole && j < restraint->interval_count; j++) {
            to->intervals[first + j] = from->intervals[restraint->first_interval + j];
            whole = renumber(c, to->intervals[first + j].atoms, 4);
        }
        if (!whole) continue;
        to->dihedrals[to->dihedral_count] = *restraint;
        to->dihedrals[to->dihedral_count++].first_interval = first;
        to->interval_count += restraint->interval_count;
    }
    return true;
}
