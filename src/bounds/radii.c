#include "bounds/radii.h"

#include <stdlib.h>

#include "base/memory.h"
#include "molecule/elements.h"

enum { CLASS_LIMIT = 200, HYDROGEN = 1, CARBON = 6, NITROGEN = 7, OXYGEN = 8, SULFUR = 16 };

/* What the sum of two radii is shortened by. Soft: contacts at this distance are common in good structures, and repulsion below
 * it is mild. Hard: measured on deposited NMR ensembles, none of whose pairs more than three bonds apart comes nearer. */
static const double SOFT_LESS = 0.45, SOFT_LESS_POLAR = 0.85;
static const double HARD_LESS = 1.05, HARD_LESS_POLAR = 1.35;
/* Sulfur pairs may be a disulfide that nobody declared, metals a site: nothing is known but the bond itself. */
static const double HARD_SULFUR = 1.9, HARD_METAL = 1.6;

static bool is_polar(int element) {
    return element == NITROGEN || element == OXYGEN || element == SULFUR;
}

/* A hydrogen on something other than carbon. */
static bool is_polar_hydrogen(const tml_molecule *molecule, int32_t atom) {
    if (molecule->atoms[atom].element != HYDROGEN) return false;
    for (int32_t k = molecule->neighbour_first[atom]; k < molecule->neighbour_first[atom + 1]; k++)
        if (molecule->atoms[molecule->neighbours[k]].element != CARBON) return true;
    return false;
}

/* May the two share a hydrogen: polar hydrogen and acceptor, or the two heavy atoms on either side of it. */
static bool may_bond(const tml_molecule *molecule, int32_t a, int32_t b) {
    int element_a = molecule->atoms[a].element, element_b = molecule->atoms[b].element;
    return (is_polar_hydrogen(molecule, a) && is_polar(element_b)) || (is_polar_hydrogen(molecule, b) && is_polar(element_a));
}

static double radii(const tml_molecule *molecule, int32_t a, int32_t b) {
    double first = tml_element_vdw_radius(molecule->atoms[a].element), second = tml_element_vdw_radius(molecule->atoms[b].element);
    return first > 0 && second > 0 ? first + second : 0;
}

double tml_hard_floor(const tml_molecule *molecule, int32_t a, int32_t b) {
    int element_a = molecule->atoms[a].element, element_b = molecule->atoms[b].element;
    double sum = radii(molecule, a, b);
    if (sum <= 0) return 0;
    if (tml_element_is_metal(element_a) || tml_element_is_metal(element_b)) return element_a == HYDROGEN || element_b == HYDROGEN ? 1.0 : HARD_METAL;
    if (element_a == SULFUR && element_b == SULFUR) return HARD_SULFUR;
    bool polar = may_bond(molecule, a, b) || (is_polar(element_a) && is_polar(element_b));
    return sum - (polar ? HARD_LESS_POLAR : HARD_LESS);
}

double tml_soft_contact(const tml_molecule *molecule, int32_t a, int32_t b) {
    double sum = radii(molecule, a, b);
    if (sum <= 0) return 0;
    if (tml_element_is_metal(molecule->atoms[a].element) || tml_element_is_metal(molecule->atoms[b].element)) return tml_hard_floor(molecule, a, b);
    return sum - (may_bond(molecule, a, b) ? SOFT_LESS_POLAR : SOFT_LESS);
}

tml_status tml_contacts_make(const tml_molecule *molecule, tml_contacts *out) {
    int32_t example[CLASS_LIMIT], key[CLASS_LIMIT], count = 0;
    *out = (tml_contacts){.class_of = tml_alloc((size_t)molecule->atom_count, 1)};
    if (out->class_of == NULL) return TML_NO_MEMORY;
    for (int32_t i = 0; i < molecule->atom_count; i++) {
        int32_t mine = 2 * molecule->atoms[i].element + is_polar_hydrogen(molecule, i), found = 0;
        while (found < count && key[found] != mine) found++;
        if (found == count) { /* never more than the elements and one: CLASS_LIMIT is not reached */
            key[count] = mine;
            example[count++] = i;
        }
        out->class_of[i] = (uint8_t)found;
    }
    size_t square = (size_t)count * (size_t)count;
    out->class_count = count;
    out->hard = tml_alloc(square, sizeof *out->hard);
    out->soft = tml_alloc(square, sizeof *out->soft);
    out->reach = tml_alloc((size_t)count, sizeof *out->reach);
    if (out->hard == NULL || out->soft == NULL || out->reach == NULL) {
        tml_contacts_clear(out);
        return TML_NO_MEMORY;
    }
    for (int32_t a = 0; a < count; a++)
        for (int32_t b = 0; b < count; b++) {
            float soft = (float)tml_soft_contact(molecule, example[a], example[b]);
            out->soft[a * count + b] = soft;
            out->hard[a * count + b] = (float)tml_hard_floor(molecule, example[a], example[b]);
            if (soft > out->reach[a]) out->reach[a] = soft;
            if (soft > out->longest) out->longest = soft;
        }
    return TML_OK;
}

void tml_contacts_clear(tml_contacts *contacts) {
    free(contacts->class_of);
    free(contacts->hard);
    free(contacts->soft);
    free(contacts->reach);
    *contacts = (tml_contacts){0};
}
