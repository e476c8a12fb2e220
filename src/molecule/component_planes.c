#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/best_plane.h"
#include "molecule/component_making.h"

/* Contents: a plane's row - as the dictionary lists them - as trigonal atoms and rings tell */

static tml_status given_planes(tml_component_making *making);
static tml_status planes_of_topology(tml_component_making *making);

tml_status tml_component_make_planes(tml_component_making *making) {
    return making->component->plane_atom_count > 0 ? given_planes(making) : planes_of_topology(making);
}

bool tml_component_add_plane(tml_component_making *making, const char *const *names, size_t count) {
    tml_component *component = making->component;
    size_t length = 0;
    for (size_t i = 0; i < count; i++) length += strlen(names[i]) + 1;
    char *text = tml_alloc(length + 1, 1);
    if (text == NULL) return false;
    char *end = text;
    for (size_t i = 0; i < count; i++) {
        size_t size = strlen(names[i]);
        if (i > 0) *end++ = ' ';
        memcpy(end, names[i], size);
        end += size;
    }
    const char *kept = tml_strings_add(making->pool, text);
    free(text);
    if (kept == NULL ||
        !tml_grow(&component->planes, &component->plane_capacity, component->plane_count + 1, sizeof *component->planes))
        return false;
    component->planes[component->plane_count++] = kept;
    return true;
}

/* A plane of these atoms, as far as they are there; those with two bonds in it are flat. */
static bool add_plane(tml_component_making *making, const int32_t *atoms, size_t count) {
    enum { SMALLEST = 4, ROOM = 64 };
    const char *names[ROOM];
    size_t kept = 0, outside = 0;
    for (size_t i = 0; i < count; i++) {
        if (making->dropped[atoms[i]] || kept == ROOM) continue;
        names[kept++] = making->component->atoms[atoms[i]].name;
        outside += !tml_is_backbone(making, atoms[i]);
    }
    for (size_t i = 0; i < count; i++) {
        int inside = 0;
        for (size_t k = 0; k < count; k++) inside += tml_topology_bond_between(&making->topology, atoms[i], atoms[k]) >= 0;
        if (inside >= 2 && tml_topology_degree(&making->topology, atoms[i]) <= 3) making->flat[atoms[i]] = true;
    }
    if (kept < SMALLEST || outside == 0) return true;
    return tml_component_add_plane(making, names, kept);
}

static bool add_plane_about(tml_component_making *making, int32_t atom);
static bool join(const tml_topology *topology, int32_t atom, bool with_neighbours, int32_t *set, size_t *count, size_t most);

enum { PLANE_MOST = 64 };

/* Do the coordinates contradict a plane? */
static bool is_bent(const tml_component_making *making, const int32_t *atoms, size_t count) {
    static const double OFF = 0.1; /* Å, r.m.s. */
    int32_t index[PLANE_MOST], placed = 0;
    double xyz[3 * PLANE_MOST];
    for (size_t i = 0; i < count; i++) {
        if (making->dropped[atoms[i]] || !tml_all_placed(making, &atoms[i], 1)) continue;
        memcpy(&xyz[3 * placed], tml_placed_at(making, atoms[i]), 3 * sizeof *xyz);
        index[placed] = placed;
        placed++;
    }
    return placed > 3 && tml_off_plane(index, placed, xyz) > OFF;
}

static bool is_trigonal(const tml_component_making *making, int32_t atom);
static bool ring_is_flat(const tml_component_making *making, int32_t ring);

/* What is flat within a plane that does not hold as a whole: its rings with what hangs on them, and its atoms with their
 * neighbours. */
static bool add_parts(tml_component_making *making, const tml_component_plane_atom *plane, size_t count) {
    const tml_topology *topology = &making->topology;
    for (int32_t r = 0; r < topology->ring_count; r++) {
        int32_t set[PLANE_MOST];
        size_t held = 0, size = 0;
        for (int32_t k = topology->ring_first[r]; k < topology->ring_first[r + 1]; k++) {
            for (size_t i = 0; i < count; i++) held += plane[i].atom == topology->ring_atoms[k];
            join(topology, topology->ring_atoms[k], true, set, &size, PLANE_MOST);
        }
        if (held == (size_t)tml_topology_ring_size(topology, r) && ring_is_flat(making, r) && !add_plane(making, set, size))
            return false;
    }
    for (size_t i = 0; i < count; i++)
        if (is_trigonal(making, plane[i].atom) && !add_plane_about(making, plane[i].atom)) return false;
    return true;
}

/* Planes as the dictionary lists them; one that is too large for the tables, or bent in the coordinates, goes by its parts. */
static tml_status given_planes(tml_component_making *making) {
    const tml_component *component = making->component;
    for (size_t first = 0, next; first < component->plane_atom_count; first = next) {
        int32_t atoms[PLANE_MOST];
        size_t count = 0;
        for (next = first;
             next < component->plane_atom_count && component->plane_atoms[next].plane == component->plane_atoms[first].plane;
             next++)
            if (count < PLANE_MOST) atoms[count++] = component->plane_atoms[next].atom;
        bool whole = next - first <= PLANE_MOST && !is_bent(making, atoms, count);
        if (!(whole ? add_plane(making, atoms, count) : add_parts(making, &component->plane_atoms[first], next - first)))
            return tml_no_memory(making->error);
    }
    return TML_OK;
}

/* An atom and all its neighbours. */
static bool add_plane_about(tml_component_making *making, int32_t atom) {
    const tml_topology *topology = &making->topology;
    int32_t atoms[4] = {atom}, degree = tml_topology_degree(topology, atom);
    if (degree != 3) return true;
    for (int32_t k = 0; k < 3; k++) atoms[1 + k] = topology->neighbours[topology->first[atom] + k];
    return add_plane(making, atoms, 4);
}

/* Trigonal, and so in the coordinates too: nitrogen beside a double bond may be a pyramid. */
static bool is_trigonal(const tml_component_making *making, int32_t atom) {
    static const double FLAT = 0.25; /* of the volume of unit arms; a tetrahedron's is 0.77 */
    const tml_topology *topology = &making->topology;
    if (topology->shapes[atom] != TML_SHAPE_TRIGONAL) return false;
    if (tml_topology_degree(topology, atom) != 3) return true;
    double volume = tml_measured_volume(making, atom, &topology->neighbours[topology->first[atom]]);
    return isnan(volume) || fabs(volume) < FLAT;
}

static bool ring_is_flat(const tml_component_making *making, int32_t ring) {
    enum { SMALLEST = 5, LARGEST = 7 };
    static const double MOST_TURN = 15; /* degrees about its bonds */
    const tml_topology *topology = &making->topology;
    const int32_t *atoms = &topology->ring_atoms[topology->ring_first[ring]];
    int32_t size = tml_topology_ring_size(topology, ring);
    if (size < SMALLEST || size > LARGEST) return false;
    for (int32_t i = 0; i < size; i++)
        if (!is_trigonal(making, atoms[i])) return false;
    for (int32_t i = 0; i < size; i++) {
        const int32_t four[4] = {atoms[i], atoms[(i + 1) % size], atoms[(i + 2) % size], atoms[(i + 3) % size]};
        if (!tml_all_placed(making, four, 4)) continue;
        double turn = tml_dihedral_of(tml_placed_at(making, four[0]), tml_placed_at(making, four[1]),
                                      tml_placed_at(making, four[2]), tml_placed_at(making, four[3]));
        if (fabs(turn) * 180 / TML_PI > MOST_TURN) return false;
    }
    return true;
}

/* An atom and its neighbours into a set without repetition; false where it would grow too large. */
static bool join(const tml_topology *topology, int32_t atom, bool with_neighbours, int32_t *set, size_t *count, size_t most) {
    for (int32_t k = topology->first[atom] - 1; k < (with_neighbours ? topology->first[atom + 1] : topology->first[atom]);
         k++) {
        int32_t next = k < topology->first[atom] ? atom : topology->neighbours[k];
        size_t i = 0;
        while (i < *count && set[i] != next) i++;
        if (i < *count) continue;
        if (*count == most) return false;
        set[(*count)++] = next;
    }
    return true;
}

enum { FUSED_MOST = 48 };

/* A flat ring with what hangs on it and the flat rings that share bonds with it; `taken` marks the rings. */
static bool add_ring_system(tml_component_making *making, int32_t ring, bool *flat, bool *taken) {
    const tml_topology *topology = &making->topology;
    int32_t set[FUSED_MOST];
    size_t count = 0;
    for (int32_t k = topology->ring_first[ring]; k < topology->ring_first[ring + 1]; k++)
        join(topology, topology->ring_atoms[k], true, set, &count, FUSED_MOST);
    taken[ring] = true;
    for (bool grown = true; grown;) {
        grown = false;
        for (int32_t r = 0; r < topology->ring_count; r++) {
            if (taken[r] || !flat[r]) continue;
            size_t shared = 0, before = count;
            for (int32_t k = topology->ring_first[r]; k < topology->ring_first[r + 1]; k++)
                for (size_t i = 0; i < count; i++) shared += set[i] == topology->ring_atoms[k];
            if (shared < 3) continue; /* a shared bond and, as its neighbour, one more atom of the ring at each end of it */
            bool fits = true;
            for (int32_t k = topology->ring_first[r]; k < topology->ring_first[r + 1] && fits; k++)
                fits = join(topology, topology->ring_atoms[k], true, set, &count, FUSED_MOST);
            if (!fits)
                count = before;
            else
                taken[r] = grown = true;
        }
    }
    return add_plane(making, set, count);
}

static tml_status planes_of_topology(tml_component_making *making) {
    const tml_topology *topology = &making->topology;
    bool *flat = tml_alloc((size_t)topology->ring_count, sizeof *flat),
         *taken = tml_alloc((size_t)topology->ring_count, sizeof *taken);
    bool room = flat != NULL && taken != NULL;
    for (int32_t r = 0; room && r < topology->ring_count; r++) flat[r] = ring_is_flat(making, r);
    for (int32_t r = 0; room && r < topology->ring_count; r++)
        if (flat[r] && !taken[r]) room = add_ring_system(making, r, flat, taken);
    for (int32_t i = 0; room && i < topology->bond_count; i++) {
        const tml_topology_bond *bond = &topology->bonds[i];
        if (!tml_topology_is_stiff(topology, i) || !is_trigonal(making, bond->a) || !is_trigonal(making, bond->b)) continue;
        if (bond->ring > 0 && bond->ring <= 7) continue; /* the ring's own plane, or none */
        int32_t set[8];
        size_t count = 0;
        join(topology, bond->a, true, set, &count, 8);
        join(topology, bond->b, true, set, &count, 8);
        room = add_plane(making, set, count);
    }
    for (int32_t i = 0; room && i < topology->atom_count; i++)
        if (is_trigonal(making, i)) {
            making->flat[i] = true;
            room = add_plane_about(making, i);
        }
    free(flat);
    free(taken);
    return room ? TML_OK : tml_no_memory(making->error);
}
