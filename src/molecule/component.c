#include "molecule/component.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/vector.h"
#include "molecule/component_making.h"
#include "molecule/elements.h"

/* Contents: the steps - what the coordinates are worth - atoms - bonds - angles - torsions - centres - charges - rows */

static tml_status make_topology(tml_component_making *making);
static tml_status judge_coordinates(tml_component_making *making);
static tml_status make_atoms(tml_component_making *making);
static bool make_bonds(tml_component_making *making);
static bool make_angles(tml_component_making *making);
static tml_status make_torsions(tml_component_making *making);
static tml_status make_centres(tml_component_making *making);
static bool make_charges(tml_component_making *making);
static tml_status end_rows(tml_component_making *making);

tml_status tml_component_make(tml_component *component, tml_strings *pool, tml_error *error) {
    tml_component_making making = {
        .component = component, .pool = pool, .error = error, .n = -1, .ca = -1, .c = -1, .o = -1, .p = -1, .root = -1};
    making.dropped = tml_alloc(component->atom_count, sizeof *making.dropped);
    making.flat = tml_alloc(component->atom_count, sizeof *making.flat);
    making.doubted = tml_alloc(component->atom_count, sizeof *making.doubted);
    tml_status status =
        making.dropped == NULL || making.flat == NULL || making.doubted == NULL ? tml_no_memory(error) : make_topology(&making);
    if (status == TML_OK) status = judge_coordinates(&making);
    if (status == TML_OK) status = tml_component_join_chain(&making);
    if (status == TML_OK) status = tml_component_make_planes(&making);
    if (status == TML_OK) status = make_atoms(&making);
    if (status == TML_OK && !(make_bonds(&making) && make_angles(&making))) status = tml_no_memory(error);
    if (status == TML_OK) status = make_torsions(&making);
    if (status == TML_OK) status = make_centres(&making);
    if (status == TML_OK && !make_charges(&making)) status = tml_no_memory(error);
    if (status == TML_OK) status = tml_component_add_ends(&making);
    if (status == TML_OK) status = end_rows(&making);
    tml_topology_clear(&making.topology);
    free(making.dropped);
    free(making.flat);
    free(making.doubted);
    component->made = status == TML_OK;
    return status;
}

void tml_component_free(tml_component *component) {
    if (component == NULL) return;
    free(component->atoms);
    free(component->bonds);
    free(component->angles);
    free(component->torsions);
    free(component->centres);
    free(component->plane_atoms);
    free(component->atom_rows);
    free(component->bond_rows);
    free(component->angle_rows);
    free(component->torsion_rows);
    free(component->centre_rows);
    free(component->charge_rows);
    free(component->planes);
    free(component);
}

tml_status tml_component_note(tml_component_making *making, const char *format, ...) {
    tml_component *component = making->component;
    char text[512];
    int used = snprintf(text, sizeof text, "component %.32s: ", component->name);
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(text + used, sizeof text - (size_t)used, format, arguments);
    va_end(arguments);
    if (component->note_count == (int)(sizeof component->notes / sizeof *component->notes)) return TML_OK;
    const char *kept = tml_strings_add(making->pool, text);
    if (kept == NULL) return tml_no_memory(making->error);
    component->notes[component->note_count++] = kept;
    return TML_OK;
}

static tml_status make_topology(tml_component_making *making) {
    const tml_component *component = making->component;
    tml_topology *topology = &making->topology;
    if (!tml_topology_new(topology, (int32_t)component->atom_count, (int32_t)component->bond_count))
        return tml_no_memory(making->error);
    int32_t hydrogens = 0, carbons = 0;
    for (size_t i = 0; i < component->atom_count; i++) {
        topology->elements[i] = component->atoms[i].element;
        topology->charges[i] = component->atoms[i].charge;
        hydrogens += component->atoms[i].element == 1;
        carbons += component->atoms[i].element == 6;
    }
    for (size_t i = 0; i < component->bond_count; i++)
        topology->bonds[i] = (tml_topology_bond){component->bonds[i].a, component->bonds[i].b, component->bonds[i].order, 0};
    if (!tml_topology_finish(topology)) return tml_no_memory(making->error);
    if (hydrogens == 0 && carbons > 1) return tml_component_note(making, "it lists no hydrogens, and is built without any");
    return TML_OK;
}

/* ---- what the coordinates are worth ---- */

/* Atoms whose bonds are nowhere near what elements allow have no coordinates: zeros, a drawing. Where they are many, none have.
 */
static tml_status judge_coordinates(tml_component_making *making) {
    static const double SHORTEST = 0.75, LONGEST = 1.35; /* of the usual length */
    enum { ONE_IN = 10 };
    tml_component *component = making->component;
    size_t placed = 0, bad = 0, first = 0;
    for (size_t i = 0; i < component->atom_count; i++) placed += !isnan(component->atoms[i].xyz[0]);
    making->placed = placed > 0;
    for (int pass = 0; pass < 2 && placed > 0; pass++) /* find them; then forget them */
        for (size_t i = 0; i < component->bond_count; i++) {
            const int32_t ends[2] = {component->bonds[i].a, component->bonds[i].b};
            double found = tml_distance(tml_placed_at(making, ends[0]), tml_placed_at(making, ends[1])),
                   usual = tml_topology_length(&making->topology, (int32_t)i);
            if (isnan(found) || (found >= SHORTEST * usual && found <= LONGEST * usual)) continue;
            if (pass == 0 && bad++ == 0) first = i;
            for (int k = 0; pass == 1 && k < 2; k++) component->atoms[ends[k]].xyz[0] = NAN;
        }
    if (bad == 0) return TML_OK;
    making->rejected = bad * ONE_IN > component->bond_count;
    making->placed = !making->rejected;
    return tml_component_note(
        making, "%s coordinates are not used: %.32s and %.32s%s are bonded, but stand far from a bond's length apart",
        making->rejected ? "its" : "some", component->atoms[component->bonds[first].a].name,
        component->atoms[component->bonds[first].b].name, bad > 1 ? ", as others," : "");
}

/* Degrees; NAN without coordinates, and where two arms fall on each other. */
static double measured_angle(const tml_component_making *making, int32_t a, int32_t b, int32_t c) {
    static const double LEAST = 25;
    const int32_t atoms[3] = {a, b, c};
    if (!tml_all_placed(making, atoms, 3)) return NAN;
    double angle = tml_angle_of(tml_placed_at(making, a), tml_placed_at(making, b), tml_placed_at(making, c)) * 180 / TML_PI;
    return angle < LEAST ? NAN : angle;
}

/* ---- atoms ---- */

static double length_of(const tml_component_making *making, int32_t bond);

bool tml_component_add_atom(tml_component *component, tml_atom_row row) {
    if (!tml_grow(&component->atom_rows, &component->atom_row_capacity, component->atom_row_count + 1,
                  sizeof *component->atom_rows))
        return false;
    component->atom_rows[component->atom_row_count++] = row;
    return true;
}

typedef struct walk {
    int32_t *parent, *queue, head, tail;
} walk;

/* Breadth first along bonds from what the queue holds: `parent` gets the atom that each was reached from, plus one. */
static void walk_on(const tml_component_making *making, walk *w, bool leaving) {
    const tml_topology *topology = &making->topology;
    for (; w->head < w->tail; w->head++)
        for (int32_t k = topology->first[w->queue[w->head]]; k < topology->first[w->queue[w->head] + 1]; k++) {
            int32_t next = topology->neighbours[k];
            if (w->parent[next] != 0 || making->dropped[next] || (making->component->atoms[next].leaving && !leaving)) continue;
            w->parent[next] = w->queue[w->head] + 1;
            w->queue[w->tail++] = next;
        }
}

/* A tree over each connected part; -1 for its root. Leaving atoms are reached last, so that nothing that stays hangs on them.
 */
static void span(const tml_component_making *making, int32_t *parent, int32_t *queue) {
    walk w = {parent, queue, 0, 0};
    if (making->root >= 0) {
        parent[making->root] = -1;
        queue[w.tail++] = making->root;
        walk_on(making, &w, false);
    }
    for (int pass = 0; pass < 2; pass++) {
        w.head = 0;
        if (pass == 1) walk_on(making, &w, true);
        for (int32_t root = 0; root < making->topology.atom_count; root++) {
            if (parent[root] != 0 || making->dropped[root] || (making->component->atoms[root].leaving && pass == 0)) continue;
            parent[root] = -1;
            queue[w.tail++] = root;
            walk_on(making, &w, pass == 1);
        }
    }
}

static tml_status make_atoms(tml_component_making *making) {
    tml_component *component = making->component;
    int32_t *parent = tml_alloc(component->atom_count, sizeof *parent),
            *queue = tml_alloc(component->atom_count, sizeof *queue);
    bool room = parent != NULL && queue != NULL;
    if (room) span(making, parent, queue);
    for (size_t i = 0; room && i < component->atom_count; i++) {
        const tml_component_atom *atom = &component->atoms[i];
        if (making->dropped[i]) continue;
        tml_atom_row row = {
            .name = atom->name, .parent = "", .element = atom->element, .optional = atom->leaving ? TML_LEAVING : 0};
        if (parent[i] > 0) {
            row.parent = component->atoms[parent[i] - 1].name;
            row.length = length_of(making, tml_topology_bond_between(&making->topology, (int32_t)i, parent[i] - 1));
        }
        room = tml_component_add_atom(component, row);
    }
    free(parent);
    free(queue);
    return room ? TML_OK : tml_no_memory(making->error);
}

/* ---- bonds ---- */

/* To hydrogen: nuclear; others as the dictionary has it, as its coordinates have it, or as the elements have it. */
static double length_of(const tml_component_making *making, int32_t index) {
    static const double METAL_OFF = 0.03;
    const tml_component_bond *bond = &making->component->bonds[index];
    const tml_topology *topology = &making->topology;
    bool hydrogen = topology->elements[bond->a] == 1 || topology->elements[bond->b] == 1;
    int32_t heavy = topology->elements[bond->a] == 1 ? bond->b : bond->a;
    double usual = tml_topology_length(topology, index);
    if (hydrogen && !isnan(tml_hydrogen_length(topology->elements[heavy], false))) return usual;
    const int32_t ends[2] = {bond->a, bond->b};
    double measured =
        tml_all_placed(making, ends, 2) ? tml_distance(tml_placed_at(making, bond->a), tml_placed_at(making, bond->b)) : NAN;
    bool metal = tml_element_is_metal(topology->elements[bond->a]) || tml_element_is_metal(topology->elements[bond->b]);
    if (metal && fabs(measured - bond->length) > METAL_OFF) return measured; /* its angles are the coordinates', too */
    return !isnan(bond->length) ? bond->length : !isnan(measured) ? measured : usual;
}

static bool is_parent(const tml_component *component, const char *child, const char *parent) {
    for (size_t i = 0; i < component->atom_row_count; i++)
        if (component->atom_rows[i].name == child) return component->atom_rows[i].parent == parent;
    return false;
}

static bool add_bond(tml_component *component, tml_bond_row row) {
    if (!tml_grow(&component->bond_rows, &component->bond_row_capacity, component->bond_row_count + 1,
                  sizeof *component->bond_rows))
        return false;
    component->bond_rows[component->bond_row_count++] = row;
    return true;
}

static bool make_bonds(tml_component_making *making) {
    tml_component *component = making->component;
    for (size_t i = 0; i < component->bond_count; i++) {
        int32_t a = component->bonds[i].a, b = component->bonds[i].b;
        if (making->dropped[a] || making->dropped[b]) continue;
        const char *first = component->atoms[a].name, *second = component->atoms[b].name;
        if (is_parent(component, first, second) || is_parent(component, second, first)) continue;
        if (!add_bond(component, (tml_bond_row){first, second, length_of(making, (int32_t)i), ""})) return false;
    }
    return true;
}

/* ---- angles ---- */

bool tml_component_add_angle(tml_component *component, const char *a, const char *b, const char *c, double degrees) {
    if (!tml_grow(&component->angle_rows, &component->angle_row_capacity, component->angle_row_count + 1,
                  sizeof *component->angle_rows))
        return false;
    component->angle_rows[component->angle_row_count++] = (tml_angle_row){a, b, c, degrees, ""};
    return true;
}

/* The dictionary's value; NAN where it has none. */
static double listed_angle(const tml_component_making *making, int32_t a, int32_t b, int32_t c) {
    const tml_component *component = making->component;
    for (size_t i = 0; i < component->angle_count; i++) {
        const tml_component_angle *angle = &component->angles[i];
        if (angle->b == b && ((angle->a == a && angle->c == c) || (angle->a == c && angle->c == a))) return angle->degrees;
    }
    return NAN;
}

/* As listed, as in the coordinates, or as the elements have it; where what is listed cannot hold together, as in the
 * coordinates or as the elements have it. */
static double angle_of(const tml_component_making *making, int32_t a, int32_t b, int32_t c) {
    double listed = listed_angle(making, a, b, c), measured = measured_angle(making, a, b, c);
    if (!isnan(measured) && (making->doubted[b] || isnan(listed))) return measured;
    double usual = tml_topology_angle(&making->topology, a, b, c);
    return isnan(usual) || (!isnan(listed) && !making->doubted[b]) ? listed : usual;
}

/* The ring's inner angles as listed, less what a flat one has; NAN where some are not listed. */
static double ring_excess(const tml_component_making *making, int32_t ring, bool *flat) {
    const tml_topology *topology = &making->topology;
    const int32_t *atoms = &topology->ring_atoms[topology->ring_first[ring]];
    int32_t size = tml_topology_ring_size(topology, ring);
    double sum = 0;
    *flat = true;
    for (int32_t i = 0; i < size; i++) {
        sum += listed_angle(making, atoms[(i + size - 1) % size], atoms[i], atoms[(i + 1) % size]);
        *flat = *flat && making->flat[atoms[i]];
    }
    return sum - (size - 2) * 180;
}

/* The listed angles between all arms of an atom, if none is a hydrogen (whose angles follow from the others), less the most
 * that so many arms can come to: three arms a full turn, four those of a tetrahedron. NAN where some are not listed. */
static double arms_excess(const tml_component_making *making, int32_t atom) {
    static const double MOST[5] = {NAN, NAN, NAN, 360, 6 * 109.4712};
    const tml_topology *topology = &making->topology;
    int32_t degree = tml_topology_degree(topology, atom);
    double sum = 0;
    if (degree > 4) return NAN;
    for (int32_t i = topology->first[atom]; i < topology->first[atom + 1]; i++) {
        if (topology->elements[topology->neighbours[i]] == 1) return NAN;
        for (int32_t j = i + 1; j < topology->first[atom + 1]; j++)
            sum += listed_angle(making, topology->neighbours[i], atom, topology->neighbours[j]);
    }
    return sum - MOST[degree];
}

/* Listed angles are often of separate fragments, and those of a ring or of one atom then cannot all be met. A ring whose angles
 * come to more than a flat one has, or to less where it is flat, and an atom one of whose angles is far from the coordinates',
 * are doubted. */
static void doubt_angles(tml_component_making *making) {
    static const double RING_OFF = 1.0, FLAT_RING_OFF = 2.0, OFF = 5.0; /* degrees */
    const tml_topology *topology = &making->topology;
    for (int32_t r = 0; r < topology->ring_count; r++) {
        bool flat;
        double excess = ring_excess(making, r, &flat);
        if (isnan(excess) || !(excess > RING_OFF || (flat && excess < -FLAT_RING_OFF))) continue;
        for (int32_t k = topology->ring_first[r]; k < topology->ring_first[r + 1]; k++)
            making->doubted[topology->ring_atoms[k]] = true;
    }
    for (int32_t i = 0; i < topology->atom_count; i++)
        if (arms_excess(making, i) > RING_OFF) making->doubted[i] = true;
    for (size_t i = 0; i < making->component->angle_count; i++) {
        const tml_component_angle *angle = &making->component->angles[i];
        if (topology->elements[angle->a] == 1 || topology->elements[angle->c] == 1) continue;
        double off = fabs(measured_angle(making, angle->a, angle->b, angle->c) - angle->degrees);
        if (off > OFF || topology->shapes[angle->b] == TML_SHAPE_OTHER) making->doubted[angle->b] = true;
    }
}

/* Have all residues of the family an angle of these names? */
static bool has_row(const tml_template *common, const char *a, const char *b, const char *c) {
    for (const tml_angle_row *row = common->angles; row->a != NULL; row++)
        if (strcmp(row->b, b) == 0 &&
            ((strcmp(row->a, a) == 0 && strcmp(row->c, c) == 0) || (strcmp(row->a, c) == 0 && strcmp(row->c, a) == 0)))
            return true;
    return false;
}

static bool bridges_metals(const tml_component_making *making, int32_t atom) {
    const tml_topology *topology = &making->topology;
    int metals = 0;
    for (int32_t k = topology->first[atom]; k < topology->first[atom + 1]; k++)
        metals += tml_element_is_metal(topology->elements[topology->neighbours[k]]);
    return metals > 1;
}

/* Angles between heavy arms, and with hydrogen where nothing else fixes it: on two arms. The others follow from these (arms.c).
 * About metals and atoms of five and more arms, those of the coordinates. */
static bool make_angles(tml_component_making *making) {
    const tml_topology *topology = &making->topology;
    const tml_component_atom *atoms = making->component->atoms;
    doubt_angles(making);
    for (int32_t b = 0; b < topology->atom_count; b++) {
        if (making->dropped[b] || b == making->p || (b == making->c && *making->component->family.tail != '\0')) continue;
        int32_t degree = tml_topology_degree(topology, b);
        bool open = topology->shapes[b] == TML_SHAPE_OTHER || bridges_metals(making, b);
        for (int32_t i = topology->first[b]; i < topology->first[b + 1]; i++)
            for (int32_t j = i + 1; j < topology->first[b + 1]; j++) {
                int32_t a = topology->neighbours[i], c = topology->neighbours[j];
                if (making->dropped[a] || making->dropped[c]) continue;
                bool hydrogen = topology->elements[a] == 1 || topology->elements[c] == 1;
                if (hydrogen && degree > 2 && !open) continue;
                bool told = !isnan(listed_angle(making, a, b, c)) || !isnan(measured_angle(making, a, b, c));
                if (!told && !open && has_row(making->component->family.common, atoms[a].name, atoms[b].name, atoms[c].name))
                    continue;
                double degrees = open ? measured_angle(making, a, b, c) : angle_of(making, a, b, c);
                if (!isnan(degrees) &&
                    !tml_component_add_angle(making->component, atoms[a].name, atoms[b].name, atoms[c].name, degrees))
                    return false;
            }
    }
    return true;
}

/* ---- torsions ---- */

typedef struct turn {
    int32_t a, d;
    double degrees;
} turn;

static bool known_turn(const tml_component_making *making, int32_t bond, turn *found);

static bool shares_plane(const tml_component_making *making, int32_t b, int32_t c);

/* About bonds within planar groups and double bonds: 0 or 180°. Double bonds of which nobody says which are counted. */
static tml_status make_torsions(tml_component_making *making) {
    tml_component *component = making->component;
    const tml_topology *topology = &making->topology;
    int unknown = 0;
    const char *example[2] = {"", ""};
    for (int32_t i = 0; i < topology->bond_count; i++) {
        int32_t b = topology->bonds[i].a, c = topology->bonds[i].b;
        if (!making->flat[b] || !making->flat[c] || making->dropped[b] || making->dropped[c]) continue;
        if (tml_is_backbone(making, b) && tml_is_backbone(making, c)) continue;
        if (tml_topology_degree(topology, b) < 2 || tml_topology_degree(topology, c) < 2) continue;
        bool stiff = tml_topology_is_stiff(topology, i);
        if (!stiff && !shares_plane(making, b, c)) continue;
        turn found;
        if (known_turn(making, i, &found)) {
            if (!tml_grow(&component->torsion_rows, &component->torsion_row_capacity, component->torsion_row_count + 1,
                          sizeof *component->torsion_rows))
                return tml_no_memory(making->error);
            component->torsion_rows[component->torsion_row_count++] = (tml_torsion_row){component->atoms[found.a].name,
                                                                                        component->atoms[b].name,
                                                                                        component->atoms[c].name,
                                                                                        component->atoms[found.d].name,
                                                                                        found.degrees,
                                                                                        0};
        } else if (stiff && topology->bonds[i].order == TML_ORDER_DOUBLE && unknown++ == 0) {
            example[0] = component->atoms[b].name;
            example[1] = component->atoms[c].name;
        }
    }
    if (unknown == 0) return TML_OK;
    return tml_component_note(making, "it does not say what is cis and what trans about %.32s=%.32s%s; either may come",
                              example[0], example[1], unknown > 1 ? " and others" : "");
}

/* Does a plane that the dictionary lists hold the bond with an arm on either side? */
static bool shares_plane(const tml_component_making *making, int32_t b, int32_t c) {
    const tml_component *component = making->component;
    const tml_topology *topology = &making->topology;
    for (size_t first = 0, next; first < component->plane_atom_count; first = next) {
        bool has_b = false, has_c = false, beside_b = false, beside_c = false;
        for (next = first;
             next < component->plane_atom_count && component->plane_atoms[next].plane == component->plane_atoms[first].plane;
             next++) {
            int32_t atom = component->plane_atoms[next].atom;
            has_b = has_b || atom == b;
            has_c = has_c || atom == c;
            beside_b = beside_b || (atom != c && tml_topology_bond_between(topology, atom, b) >= 0);
            beside_c = beside_c || (atom != b && tml_topology_bond_between(topology, atom, c) >= 0);
        }
        if (has_b && has_c && beside_b && beside_c) return true;
    }
    return false;
}

static bool listed_turn(const tml_component_making *making, int32_t b, int32_t c, turn *found);
static bool same_arms(const tml_component_making *making, int32_t atom, int32_t other);

/* From the coordinates, the dictionary's torsions, the ring that the bond is in, or because it makes no difference. */
static bool known_turn(const tml_component_making *making, int32_t bond, turn *found) {
    static const double OFF = 35; /* degrees */
    const tml_topology *topology = &making->topology;
    int32_t b = topology->bonds[bond].a, c = topology->bonds[bond].b;
    if (listed_turn(making, b, c, found)) return true;
    int32_t a = -1, d = -1;
    for (int32_t i = topology->first[b]; i < topology->first[b + 1]; i++)
        for (int32_t j = topology->first[c]; j < topology->first[c + 1]; j++) {
            const int32_t four[4] = {topology->neighbours[i], b, c, topology->neighbours[j]};
            if (four[0] == c || four[3] == b || four[0] == four[3] || making->dropped[four[0]] || making->dropped[four[3]])
                continue;
            int32_t ring = tml_topology_ring_of(topology, four[0], b, c);
            if (ring >= 0 && ring == tml_topology_ring_of(topology, b, c, four[3]) &&
                tml_topology_ring_size(topology, ring) <= 7) {
                *found = (turn){four[0], four[3], 0};
                return true;
            }
            if (a < 0) {
                a = four[0];
                d = four[3];
            }
            if (!tml_all_placed(making, four, 4)) continue;
            double angle = fabs(tml_dihedral_of(tml_placed_at(making, four[0]), tml_placed_at(making, b),
                                                tml_placed_at(making, c), tml_placed_at(making, four[3]))) *
                           180 / TML_PI;
            if (angle > OFF && angle < 180 - OFF) continue;
            *found = (turn){four[0], four[3], angle < 90 ? 0 : 180};
            return true;
        }
    if (a < 0 || !(same_arms(making, b, c) || same_arms(making, c, b))) return false;
    *found = (turn){a, d, 180};
    return true;
}

/* A torsion of the dictionary that leaves no doubt: 0 or 180°, within a few degrees. */
static bool listed_turn(const tml_component_making *making, int32_t b, int32_t c, turn *found) {
    static const double OFF = 10, WIDEST = 15;
    const tml_component *component = making->component;
    /* Listed values may stand for one of several minima; the coordinates do not. With bad coordinates they were made from
     * those. */
    if (making->placed || making->rejected) return false;
    for (size_t i = 0; i < component->torsion_count; i++) {
        const tml_component_torsion *torsion = &component->torsions[i];
        bool forwards = torsion->b == b && torsion->c == c, backwards = torsion->b == c && torsion->c == b;
        double angle = fabs(remainder(torsion->degrees, 360));
        if ((!forwards && !backwards) || torsion->spread > WIDEST || (angle > OFF && angle < 180 - OFF)) continue;
        if (making->dropped[torsion->a] || making->dropped[torsion->d]) continue;
        *found = (turn){forwards ? torsion->a : torsion->d, forwards ? torsion->d : torsion->a, angle < 90 ? 0 : 180};
        return true;
    }
    return false;
}

/* Has an atom but one arm beside `other`, or two of a kind? */
static bool same_arms(const tml_component_making *making, int32_t atom, int32_t other) {
    const tml_topology *topology = &making->topology;
    int32_t rank = -1;
    for (int32_t k = topology->first[atom]; k < topology->first[atom + 1]; k++) {
        int32_t next = topology->neighbours[k];
        if (next == other) continue;
        if (rank >= 0 && topology->ranks[next] != rank) return false;
        rank = topology->ranks[next];
    }
    return tml_topology_degree(topology, atom) == 3;
}

/* ---- centres ---- */

static int arms_of(const tml_component_making *making, int32_t atom, int32_t arms[4]);
static const tml_component_centre *listed_centre(const tml_component_making *making, int32_t atom);
static int sign_of(const tml_component_making *making, int32_t atom, int32_t arms[4], int count, bool *asked);
static int sign_by_type(const tml_component_making *making, int32_t arms[4]);

static tml_status make_centres(tml_component_making *making) {
    tml_component *component = making->component;
    const tml_topology *topology = &making->topology;
    int unknown = 0;
    const char *example = "";
    for (int32_t i = 0; i < topology->atom_count; i++) {
        int32_t arms[4], degree = tml_topology_degree(topology, i);
        if (making->dropped[i] || making->flat[i] || topology->shapes[i] == TML_SHAPE_OTHER || degree < 3) continue;
        if (making->ca >= 0 && (i == making->n || i == making->c)) continue;
        int count = arms_of(making, i, arms);
        if (count < 3 || bridges_metals(making, i)) continue;
        bool asked = false;
        int sign = sign_of(making, i, arms, count, &asked);
        if (sign == 0 && asked && i == making->ca) sign = sign_by_type(making, arms);
        if (sign == 0 && asked && unknown++ == 0) example = component->atoms[i].name;
        if (sign == 0 && making->ca >= 0 && degree == 4 && topology->ranks[arms[0]] != topology->ranks[arms[2]])
            continue; /* the rows of all amino acids may know better */
        if (!tml_grow(&component->centre_rows, &component->centre_row_capacity, component->centre_row_count + 1,
                      sizeof *component->centre_rows))
            return tml_no_memory(making->error);
        component->centre_rows[component->centre_row_count++] =
            (tml_centre_row){component->atoms[i].name, component->atoms[arms[0]].name, component->atoms[arms[1]].name,
                             component->atoms[arms[2]].name, (int8_t)sign};
    }
    if (unknown == 0) return TML_OK;
    return tml_component_note(making, "it gives no handedness for %.32s%s; either hand may come", example,
                              unknown > 1 ? " and others" : "");
}

/* Neighbours that are there, those that may leave last. */
static int arms_of(const tml_component_making *making, int32_t atom, int32_t arms[4]) {
    const tml_topology *topology = &making->topology;
    int count = 0;
    for (int pass = 0; pass < 2; pass++)
        for (int32_t k = topology->first[atom]; k < topology->first[atom + 1]; k++) {
            int32_t next = topology->neighbours[k];
            if (!making->dropped[next] && making->component->atoms[next].leaving == (pass == 1) && count < 4)
                arms[count++] = next;
        }
    return count;
}

static const tml_component_centre *listed_centre(const tml_component_making *making, int32_t atom) {
    const tml_component *component = making->component;
    for (size_t i = 0; i < component->centre_count; i++) {
        const tml_component_centre *centre = &component->centres[i];
        if (centre->c != atom) continue;
        bool good = true;
        for (int k = 0; k < 3; k++)
            good = good && !making->dropped[centre->arms[k]] &&
                   tml_topology_bond_between(&making->topology, atom, centre->arms[k]) >= 0;
        if (good) return centre;
    }
    return NULL;
}

/* The hand of three arms, 0 for none that is known; arms change to those that the dictionary lists. `asked`: the graph tells
 * all arms apart, so that a hand should be known. */
static int sign_of(const tml_component_making *making, int32_t atom, int32_t arms[4], int count, bool *asked) {
    static const double SMALLEST = 0.1; /* of the volume of unit arms */
    const tml_topology *topology = &making->topology;
    int equal = 0, most_equal = 1, hydrogens = 0;
    for (int i = 0; i < count; i++) {
        int same = 0;
        for (int k = 0; k < count; k++) same += topology->ranks[arms[k]] == topology->ranks[arms[i]];
        equal += same > 1;
        most_equal = same > most_equal ? same : most_equal;
        hydrogens += topology->elements[arms[i]] == 1;
    }
    bool turns_over = topology->elements[atom] == 8 || (topology->elements[atom] == 7 && (count == 3 || hydrogens > 0));
    *asked = equal == 0 && !turns_over && topology->shapes[atom] == TML_SHAPE_TETRAHEDRAL &&
             (count == 4 || topology->elements[atom] != 6);
    const tml_component_centre *listed = listed_centre(making, atom);
    if (listed != NULL && listed->sign != 0) {
        for (int k = 0; k < 3; k++) arms[k] = listed->arms[k];
        return listed->sign;
    }
    if ((listed != NULL && equal == 0) || most_equal >= 3 || turns_over) return 0;
    double volume = tml_measured_volume(making, atom, arms);
    if (!isnan(volume) && fabs(volume) > SMALLEST) return volume > 0 ? 1 : -1;
    return 0;
}

/* An amino acid whose dictionary gives no hand for CA: L, but where its type says D. The arms become N, C and the side chain.
 */
static int sign_by_type(const tml_component_making *making, int32_t arms[4]) {
    const tml_topology *topology = &making->topology;
    for (int32_t k = topology->first[making->ca]; k < topology->first[making->ca + 1]; k++) {
        int32_t next = topology->neighbours[k];
        if (next == making->n || next == making->c || topology->elements[next] == 1) continue;
        arms[0] = making->n;
        arms[1] = making->c;
        arms[2] = next;
    }
    bool is_d = strncmp(making->component->type, "D-", 2) == 0 || strncmp(making->component->type, "d-", 2) == 0;
    return arms[0] != making->n ? 0 : is_d ? -1 : 1;
}

/* ---- charges ---- */

static bool add_charge(tml_component *component, const char *atom, int charge) {
    if (!tml_grow(&component->charge_rows, &component->charge_row_capacity, component->charge_row_count + 1,
                  sizeof *component->charge_rows))
        return false;
    component->charge_rows[component->charge_row_count++] = (tml_charge_row){atom, (int8_t)charge, ""};
    return true;
}

/* Where the dictionary has no formal charges: a nitrogen with four arms has one more, an oxygen with one single bond one less,
 * and of two oxygens that share a double bond the last-named bears the charge. */
static int charge_by_valence(const tml_component_making *making, int32_t atom) {
    const tml_topology *topology = &making->topology;
    int32_t first = topology->first[atom], degree = tml_topology_degree(topology, atom);
    if (topology->elements[atom] == 7) return degree == 4;
    if (topology->elements[atom] != 8 || degree != 1) return 0;
    int32_t centre = topology->neighbours[first];
    tml_order order = topology->bonds[topology->via[first]].order;
    if (order == TML_ORDER_SINGLE)
        return topology->elements[centre] == 1 || tml_element_is_metal(topology->elements[centre]) ? 0 : -1;
    if (order != TML_ORDER_DELOCALISED) return 0;
    int others = 0;
    for (int32_t k = topology->first[centre]; k < topology->first[centre + 1]; k++) {
        int32_t next = topology->neighbours[k];
        if (topology->elements[next] != 8 || tml_topology_degree(topology, next) != 1) continue;
        if (next > atom) return 0;
        others += next < atom;
    }
    return others == 0 ? 0 : topology->elements[centre] == 6 || topology->elements[centre] == 7 ? -1 : 0;
}

static bool make_charges(tml_component_making *making) {
    tml_component *component = making->component;
    for (size_t i = 0; i < component->atom_count; i++) {
        int32_t atom = (int32_t)i;
        int charge = component->charges_given ? component->atoms[i].charge : charge_by_valence(making, atom);
        if (charge == 0 || making->dropped[i] || (making->ca >= 0 && (atom == making->n || atom == making->o))) continue;
        if (!add_charge(component, component->atoms[i].name, charge)) return false;
    }
    return true;
}

/* ---- rows ---- */

/* Each list ends with a row without a name: growing zeroes it. */
static tml_status end_rows(tml_component_making *making) {
    tml_component *c = making->component;
    if (!tml_component_add_atom(c, (tml_atom_row){0}) || !add_bond(c, (tml_bond_row){0}) ||
        !tml_component_add_angle(c, NULL, NULL, NULL, 0) ||
        !tml_grow(&c->torsion_rows, &c->torsion_row_capacity, c->torsion_row_count + 1, sizeof *c->torsion_rows) ||
        !tml_grow(&c->centre_rows, &c->centre_row_capacity, c->centre_row_count + 1, sizeof *c->centre_rows) ||
        !add_charge(c, NULL, 0) || !tml_grow(&c->planes, &c->plane_capacity, c->plane_count + 1, sizeof *c->planes))
        return tml_no_memory(making->error);
    c->form = (tml_template){.name = c->name,
                             .family = &c->family,
                             .atoms = c->atom_rows,
                             .bonds = c->bond_rows,
                             .angles = c->angle_rows,
                             .torsions = c->torsion_rows,
                             .centres = c->centre_rows,
                             .charges = c->charge_rows,
                             .planes = c->planes};
    return TML_OK;
}
