#include <stdio.h>
#include <string.h>

#include "molecule/component_making.h"

/* Contents: kinds - amino acids - the nitrogen's end - the carbon's end - caps - nucleotides - rows of the chain */

static tml_status join_protein(tml_component_making *making);
static void join_cap(tml_component_making *making);
static tml_status join_nucleic(tml_component_making *making);

/* ---- kinds ---- */

/* The archive's types and those of monomer libraries: "L-PEPTIDE LINKING", "peptide", "DNA linking", "RNA". */
static tml_component_kind kind_of(const char *type) {
    static const char *const PEPTIDES[] = {"peptide", "l-peptide", "d-peptide", "m-peptide", "p-peptide"};
    char lower[64];
    size_t length = strlen(type);
    if (length >= sizeof lower) return TML_KIND_SINGLE;
    for (size_t i = 0; i <= length; i++) lower[i] = (char)(type[i] >= 'A' && type[i] <= 'Z' ? type[i] - 'A' + 'a' : type[i]);
    for (size_t i = 0; i < sizeof PEPTIDES / sizeof *PEPTIDES; i++)
        if (strcmp(lower, PEPTIDES[i]) == 0) return TML_KIND_PEPTIDE;
    if (strstr(lower, "peptide") != NULL && (strstr(lower, "linking") != NULL || strstr(lower, "terminus") != NULL))
        return TML_KIND_PEPTIDE;
    if (strcmp(lower, "dna") == 0 || strcmp(lower, "rna") == 0 || strcmp(lower, "dna/rna") == 0) return TML_KIND_NUCLEIC;
    if (strstr(lower, "dna linking") != NULL || strstr(lower, "rna linking") != NULL) return TML_KIND_NUCLEIC;
    return TML_KIND_SINGLE;
}

static int32_t atom_named(const tml_component_making *making, const char *name) {
    const tml_component *component = making->component;
    for (size_t i = 0; i < component->atom_count; i++)
        if (strcmp(component->atoms[i].name, name) == 0) return (int32_t)i;
    return -1;
}

static bool bonded(const tml_component_making *making, int32_t a, int32_t b) {
    return a >= 0 && b >= 0 && tml_topology_bond_between(&making->topology, a, b) >= 0;
}

tml_status tml_component_join_chain(tml_component_making *making) {
    tml_component *component = making->component;
    component->family = tml_lone_family;
    tml_component_kind kind = kind_of(component->type);
    if (kind == TML_KIND_PEPTIDE) {
        int32_t n = atom_named(making, "N"), ca = atom_named(making, "CA"), c = atom_named(making, "C");
        if (!bonded(making, n, ca) || !bonded(making, ca, c))
            return tml_component_note(
                making,
                "its type is %.40s, but N, CA and C are not bonded as in an amino acid; it stands by itself, and `link` "
                "can bond it",
                component->type);
        making->n = n;
        making->ca = ca;
        making->c = c;
        return join_protein(making);
    }
    if (kind == TML_KIND_NUCLEIC) return join_nucleic(making);
    join_cap(making);
    return TML_OK;
}

/* ---- amino acids ---- */

static void free_nitrogen(tml_component_making *making);
static void free_carbon(tml_component_making *making);

static tml_status join_protein(tml_component_making *making) {
    tml_component *component = making->component;
    component->first_ends[0] = component->last_ends[0] = (tml_end_row){"", "", ""};
    component->family = (tml_family){.polymer = TML_POLYMER_PROTEIN,
                                     .tail = "",
                                     .head = "",
                                     .common = tml_protein_family.common,
                                     .first_ends = component->first_ends,
                                     .last_ends = component->last_ends};
    free_nitrogen(making);
    free_carbon(making);
    return TML_OK;
}

/* A carbon with a double bond to oxygen. */
static bool is_acyl(const tml_component_making *making, int32_t atom) {
    const tml_topology *topology = &making->topology;
    for (int32_t k = topology->first[atom]; k < topology->first[atom + 1]; k++) {
        tml_order order = topology->bonds[topology->via[k]].order;
        if (topology->elements[atom] == 6 && topology->elements[topology->neighbours[k]] == 8 &&
            (order == TML_ORDER_DOUBLE || order == TML_ORDER_DELOCALISED))
            return true;
    }
    return false;
}

/* ---- the nitrogen's end ---- */

/* The heavy atom on the backbone's nitrogen beside CA; -1 for none, -2 for several. */
static int32_t nitrogen_arm(const tml_component_making *making) {
    const tml_topology *topology = &making->topology;
    int32_t arm = -1;
    for (int32_t k = topology->first[making->n]; k < topology->first[making->n + 1]; k++) {
        int32_t next = topology->neighbours[k];
        if (next == making->ca || topology->elements[next] == 1) continue;
        arm = arm == -1 ? next : -2;
    }
    return arm;
}

/* Its hydrogens give way to those that an amino acid has by its place in the chain. A nitrogen that bears an acyl group (a
 * lactam, a formyl group) is no base and keeps one hydrogen where nothing is before it; one that is full already begins its
 * chain. */
static void free_nitrogen(tml_component_making *making) {
    const tml_topology *topology = &making->topology;
    tml_component *component = making->component;
    int32_t arm = nitrogen_arm(making);
    if (arm == -2) return;
    component->family.head = "N";
    bool acyl = arm >= 0 && is_acyl(making, arm), kept = false;
    for (int32_t k = topology->first[making->n]; k < topology->first[making->n + 1]; k++) {
        int32_t next = topology->neighbours[k];
        if (topology->elements[next] != 1) continue;
        if (acyl && !kept) {
            kept = component->atoms[next].leaving = true;
            continue;
        }
        making->dropped[next] = true;
    }
    if (arm < 0)
        component->first_ends[0] = (tml_end_row){"", "-H,+H1,+H2,+H3", "-H,+H1,+H2"};
    else if (!acyl)
        component->first_ends[0] = (tml_end_row){"", "+H2,+H3", "+H2"};
}

/* ---- the carbon's end ---- */

/* The acid's second oxygen gives way to the chain. A carbon that bears something else ends its chain. */
static void free_carbon(tml_component_making *making) {
    const tml_topology *topology = &making->topology;
    tml_component *component = making->component;
    int32_t oxygen = atom_named(making, "O"), second = -1;
    bool plain = bonded(making, making->c, oxygen) && topology->shapes[making->c] == TML_SHAPE_TRIGONAL &&
                 tml_topology_degree(topology, oxygen) == 1;
    if (!plain) return;
    making->o = oxygen;
    for (int32_t k = topology->first[making->c]; k < topology->first[making->c + 1]; k++) {
        int32_t next = topology->neighbours[k];
        if (next == making->ca || next == oxygen) continue;
        if (topology->elements[next] == 8) {
            bool acid = true;
            for (int32_t i = topology->first[next]; i < topology->first[next + 1]; i++)
                acid = acid && (topology->neighbours[i] == making->c || topology->elements[topology->neighbours[i]] == 1);
            if (!acid) return;
            second = next;
        } else if (topology->elements[next] == 1 && component->atoms[next].leaving) {
            making->dropped[next] = true; /* an aldehyde that stands for the group as it is in a chain */
        } else {
            return;
        }
    }
    component->family.tail = "C";
    component->last_ends[0] = (tml_end_row){"", "+OXT", "+OXT,+HXT"};
    if (second < 0) return;
    making->dropped[second] = true;
    for (int32_t i = topology->first[second]; i < topology->first[second + 1]; i++)
        if (topology->elements[topology->neighbours[i]] == 1) making->dropped[topology->neighbours[i]] = true;
}

/* ---- caps ---- */

/* The atom of a cap that may leave when the chain is bonded to it: one marked so, or the last hydrogen, where its place is
 * taken. */
static void mark_leaving(tml_component_making *making, int32_t atom, int32_t arms) {
    const tml_topology *topology = &making->topology;
    int32_t last = -1;
    if (tml_topology_degree(topology, atom) < arms) return;
    for (int32_t k = topology->first[atom]; k < topology->first[atom + 1]; k++) {
        int32_t next = topology->neighbours[k];
        if (making->component->atoms[next].leaving) return;
        if (topology->elements[next] == 1) last = next;
    }
    if (last >= 0) making->component->atoms[last].leaving = true;
}

/* Small molecules that close chains: an acyl group by its C (formyl, acetyl …), an amine by its N (methylamide …). Ammonia does
 * so under the archive's name for the amide group only. */
static void join_cap(tml_component_making *making) {
    enum { MOST_HEAVY = 4, ARMS = 3 };
    const tml_topology *topology = &making->topology;
    tml_component *component = making->component;
    int32_t c = atom_named(making, "C"), o = atom_named(making, "O"), n = atom_named(making, "N"), heavy = 0;
    for (int32_t i = 0; i < topology->atom_count; i++) heavy += topology->elements[i] != 1;
    if (heavy > MOST_HEAVY || topology->bond_count != topology->atom_count - 1) return;
    bool acyl = n < 0 && bonded(making, c, o) && is_acyl(making, c) && tml_topology_degree(topology, o) == 1;
    bool amine = n >= 0 && o < 0 && topology->elements[n] == 7 && component->atoms[n].charge == 0;
    int32_t end = acyl ? c : n, hydrogens = 0, heavies = 0;
    for (int32_t k = topology->first[acyl || amine ? end : 0]; (acyl || amine) && k < topology->first[end + 1]; k++) {
        bool is_hydrogen = topology->elements[topology->neighbours[k]] == 1;
        hydrogens += is_hydrogen;
        heavies += !is_hydrogen;
    }
    if (amine)
        amine = hydrogens > 0 && hydrogens + heavies <= ARMS && heavies <= 1 &&
                (hydrogens < ARMS || strcmp(component->name, "NH2") == 0);
    if (acyl) acyl = heavies <= 2 && (hydrogens > 0 || heavies + hydrogens < ARMS);
    if (!acyl && !amine) return;
    mark_leaving(making, end, ARMS);
    component->first_ends[0] = component->last_ends[0] = (tml_end_row){"", "", ""};
    component->family = (tml_family){.polymer = TML_POLYMER_PROTEIN,
                                     .tail = acyl ? "C" : "",
                                     .head = amine ? "N" : "",
                                     .common = tml_lone_family.common,
                                     .first_ends = component->first_ends,
                                     .last_ends = component->last_ends};
}

/* ---- nucleotides ---- */

static int32_t third_oxygen(const tml_component_making *making, int32_t phosphorus);
static tml_status free_phosphate(tml_component_making *making, int32_t phosphorus);

static void drop_hydrogens(tml_component_making *making, int32_t atom) {
    const tml_topology *topology = &making->topology;
    for (int32_t k = topology->first[atom]; k < topology->first[atom + 1]; k++)
        if (topology->elements[topology->neighbours[k]] == 1) making->dropped[topology->neighbours[k]] = true;
}

static tml_status join_nucleic(tml_component_making *making) {
    tml_component *component = making->component;
    int32_t p = atom_named(making, "P"), o5 = atom_named(making, "O5'"), c5 = atom_named(making, "C5'"),
            c3 = atom_named(making, "C3'"), o3 = atom_named(making, "O3'");
    bool begins = bonded(making, p, o5) && bonded(making, o5, c5), ends = bonded(making, c3, o3);
    component->first_ends[0] = component->last_ends[0] = (tml_end_row){"", "", ""};
    if (!bonded(making, o5, c5))
        return tml_component_note(making,
                                  "its type is %.40s, but it has no O5' on C5'; it stands by itself, and `link` can bond it",
                                  component->type);
    for (int32_t k = making->topology.first[ends ? o3 : 0]; ends && k < making->topology.first[o3 + 1]; k++)
        ends = making->topology.neighbours[k] == c3 || making->topology.elements[making->topology.neighbours[k]] == 1;
    making->root = o5;
    component->family = (tml_family){.polymer = TML_POLYMER_NUCLEIC,
                                     .tail = ends ? "O3'" : "",
                                     .head = begins ? "P" : "",
                                     .common = tml_nucleic_family.common,
                                     .first_ends = component->first_ends,
                                     .last_ends = component->last_ends};
    if (ends) {
        drop_hydrogens(making, o3);
        component->last_ends[0] = tml_nucleic_family.last_ends[0];
    }
    return begins ? free_phosphate(making, p) : TML_OK;
}

/* The oxygen whose place the residue before takes: one that is marked as leaving, or by its name, or the last. */
static int32_t third_oxygen(const tml_component_making *making, int32_t phosphorus) {
    const tml_topology *topology = &making->topology;
    int32_t found = -1, count = 0;
    for (int32_t k = topology->first[phosphorus]; k < topology->first[phosphorus + 1]; k++) {
        int32_t next = topology->neighbours[k], heavy = 0;
        for (int32_t i = topology->first[next]; i < topology->first[next + 1]; i++)
            heavy += topology->elements[topology->neighbours[i]] != 1;
        if (heavy != 1 || topology->elements[next] != 8) continue;
        const tml_component_atom *atom = &making->component->atoms[next];
        count++;
        if (atom->leaving || strcmp(atom->name, "OP3") == 0 || strcmp(atom->name, "O3P") == 0) return next;
        found = next;
    }
    return count == 3 ? found : -1;
}

/* The phosphate as it is in a strand, and gone where the strand begins. */
static tml_status free_phosphate(tml_component_making *making, int32_t phosphorus) {
    const tml_topology *topology = &making->topology;
    tml_component *component = making->component;
    int32_t third = third_oxygen(making, phosphorus);
    char gone[256];
    int used = snprintf(gone, sizeof gone, "-P"), usual = 0;
    for (int32_t k = topology->first[phosphorus]; k < topology->first[phosphorus + 1]; k++) {
        int32_t next = topology->neighbours[k];
        const char *name = component->atoms[next].name;
        bool bridge = strcmp(name, "O5'") == 0;
        usual += bridge || strcmp(name, "OP1") == 0 || strcmp(name, "OP2") == 0;
        if (next == third) making->dropped[next] = true;
        if (topology->elements[next] == 8 && !bridge) drop_hydrogens(making, next);
        if (next != third && !bridge && used < (int)sizeof gone - 40)
            used += snprintf(gone + used, sizeof gone - (size_t)used, ",-%.32s", name);
    }
    snprintf(gone + used, sizeof gone - (size_t)used, ",+HO5'");
    const char *kept = tml_strings_add(making->pool, gone);
    if (kept == NULL) return tml_no_memory(making->error);
    component->first_ends[0] = (tml_end_row){"", kept, kept};
    making->p = usual == 3 ? phosphorus : -1;
    return TML_OK;
}

/* ---- rows of the chain ---- */

static bool add_nitrogen_rows(tml_component_making *making);
static bool add_carbon_rows(tml_component_making *making);
static bool add_cap_rows(tml_component_making *making);
static bool add_own(tml_component_making *making, const char *residue, const char *name);

tml_status tml_component_add_ends(tml_component_making *making) {
    const tml_family *family = &making->component->family;
    bool room = true;
    if (making->ca >= 0 && *family->head != '\0') room = add_nitrogen_rows(making);
    if (room && making->ca >= 0 && *family->tail != '\0') room = add_carbon_rows(making);
    if (room && making->ca < 0 && family->polymer == TML_POLYMER_PROTEIN) room = add_cap_rows(making);
    if (room && family->polymer == TML_POLYMER_NUCLEIC && *family->head != '\0')
        room = add_own(making, "DA", "HO5'") && add_own(making, "DA", "OP3");
    if (room && family->polymer == TML_POLYMER_NUCLEIC && *family->tail != '\0') room = add_own(making, "DA", "HO3'");
    return room ? TML_OK : tml_no_memory(making->error);
}

/* The row of an atom as a built-in residue has it. */
static tml_atom_row built_in(const char *residue, const char *name) {
    const tml_template *form = tml_find_builtin(residue);
    for (const tml_atom_row *row = form == NULL ? NULL : form->atoms; row != NULL && row->name != NULL; row++)
        if (strcmp(row->name, name) == 0) return *row;
    return (tml_atom_row){0};
}

/* A row of the chain's own, unless the component has another atom of that name. */
static bool add_own(tml_component_making *making, const char *residue, const char *name) {
    tml_atom_row row = built_in(residue, name);
    for (size_t i = 0; i < making->component->atom_row_count; i++)
        if (strcmp(making->component->atom_rows[i].name, name) == 0) return true;
    if (row.element == 0) row.element = name[0] == 'H' ? 1 : 8;
    return row.name == NULL || tml_component_add_atom(making->component, row);
}

static bool add_charge_row(tml_component *component, const char *atom, int8_t charge, const char *condition) {
    if (!tml_grow(&component->charge_rows, &component->charge_row_capacity, component->charge_row_count + 1,
                  sizeof *component->charge_rows))
        return false;
    component->charge_rows[component->charge_row_count++] = (tml_charge_row){atom, charge, condition};
    return true;
}

/* As in proline where the nitrogen is in a ring of five with CA; its rows say where the numbers come from. */
static bool add_imino_rows(tml_component_making *making, int32_t arm) {
    tml_component *component = making->component;
    const char *name = component->atoms[arm].name;
    const char *const plane[] = {"-CA", "-C", "-O", "N", "CA", name};
    int32_t ring = tml_topology_ring_of(&making->topology, making->ca, making->n, arm);
    if (!tml_component_add_plane(making, plane, sizeof plane / sizeof *plane)) return false;
    if (!add_charge_row(component, "N", +1, "+H2+H3")) return false;
    if (ring < 0 || tml_topology_ring_size(&making->topology, ring) != 5) return true;
    return tml_component_add_angle(component, "-C", "N", name, 125.0) &&
           tml_component_add_angle(component, "-C", "N", "CA", 122.6) &&
           tml_component_add_angle(component, "-CA", "-C", "N", 116.9) &&
           tml_component_add_angle(component, "-O", "-C", "N", 122.0);
}

static bool add_nitrogen_rows(tml_component_making *making) {
    int32_t arm = nitrogen_arm(making);
    if (arm >= 0 && is_acyl(making, arm)) return true; /* its one hydrogen stays until a bond takes its place */
    if (arm >= 0) return add_imino_rows(making, arm) && add_own(making, "PRO", "H2") && add_own(making, "PRO", "H3");
    static const char *const NAMES[] = {"H", "H1", "H2", "H3"};
    bool room = true;
    for (size_t i = 0; i < sizeof NAMES / sizeof *NAMES && room; i++) room = add_own(making, "ALA", NAMES[i]);
    return room;
}

static bool add_carbon_rows(tml_component_making *making) {
    tml_component *component = making->component;
    for (size_t i = 0; i < component->atom_row_count; i++) {
        tml_atom_row *row = &component->atom_rows[i];
        if (row->name == component->atoms[making->o].name) row->length = built_in("ALA", "O").length;
    }
    return add_own(making, "ALA", "OXT") && add_own(making, "ALA", "HXT");
}

/* Lengths and angles at the new bond as between two amino acids (backbone rows of residue_data.c). */
static bool add_cap_rows(tml_component_making *making) {
    tml_component *component = making->component;
    const tml_topology *topology = &making->topology;
    bool acyl = *component->family.tail != '\0';
    int32_t end = atom_named(making, acyl ? "C" : "N");
    const char *plane[8];
    size_t count = 0;
    if (!acyl)
        for (const char *const *name = (const char *const[]){"-CA", "-C", "-O", NULL}; *name != NULL; name++)
            plane[count++] = *name;
    plane[count++] = component->atoms[end].name;
    for (int32_t k = topology->first[end]; k < topology->first[end + 1]; k++) {
        int32_t next = topology->neighbours[k];
        const char *name = component->atoms[next].name;
        bool oxygen = topology->elements[next] == 8, hydrogen = topology->elements[next] == 1;
        if (!component->atoms[next].leaving && count < sizeof plane / sizeof *plane - 1) plane[count++] = name;
        if (acyl && oxygen && !tml_component_add_angle(component, "O", "C", "+N", 123.0)) return false;
        if (acyl && !oxygen && !hydrogen && !tml_component_add_angle(component, name, "C", "+N", 116.2)) return false;
        if (!acyl && !hydrogen && !tml_component_add_angle(component, "-C", "N", name, 121.7)) return false;
    }
    if (acyl) plane[count++] = "+N";
    return tml_component_add_plane(making, plane, count);
}
