#include "ensemble/order.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/vector.h"

/* Sites of a residue's backbone, or -1. */
typedef struct backbone {
    int32_t n, ca, c;
} backbone;

static double order_of(const tml_coordinates *of, int32_t a, int32_t b, int32_t c, int32_t d);
static bool linked(const tml_coordinates *of, const backbone *all, size_t residue);

tml_status tml_order_parameters(const tml_coordinates *coordinates, tml_torsion_order *out, tml_error *error) {
    const size_t count = coordinates->residue_count;
    backbone *all = tml_alloc(count, sizeof *all);
    if (all == NULL) return tml_no_memory(error);
    for (size_t r = 0; r < count; r++) all[r] = (backbone){-1, -1, -1};
    for (size_t a = 0; a < coordinates->atom_count; a++) {
        const tml_site *site = &coordinates->atoms[a];
        backbone *of = &all[site->residue];
        if (strcmp(site->name, "N") == 0) of->n = (int32_t)a;
        if (strcmp(site->name, "CA") == 0) of->ca = (int32_t)a;
        if (strcmp(site->name, "C") == 0) of->c = (int32_t)a;
    }
    for (size_t r = 0; r < count; r++) {
        bool after = linked(coordinates, all, r), before = r + 1 < count && linked(coordinates, all, r + 1);
        out[r].phi = after ? order_of(coordinates, all[r - 1].c, all[r].n, all[r].ca, all[r].c) : NAN;
        out[r].psi = before ? order_of(coordinates, all[r].n, all[r].ca, all[r].c, all[r + 1].n) : NAN;
    }
    free(all);
    return TML_OK;
}

/* Whether a peptide bond leads to the residue from the one before it, in the first model that has both atoms. */
static bool linked(const tml_coordinates *of, const backbone *all, size_t residue) {
    static const double LONGEST = 2.0; /* Å; the bond has 1.33, the next-nearest contact 2.4 */
    if (residue == 0 || all[residue - 1].c < 0 || all[residue].n < 0) return false;
    if (strcmp(of->residues[residue - 1].chain, of->residues[residue].chain) != 0) return false;
    for (int32_t m = 0; m < of->model_count; m++) {
        double length = tml_distance(tml_coordinates_at(of, m, (size_t)all[residue - 1].c),
                                     tml_coordinates_at(of, m, (size_t)all[residue].n));
        if (!isnan(length)) return length < LONGEST;
    }
    return false;
}

/* Over the models that have all four atoms. */
static double order_of(const tml_coordinates *of, int32_t a, int32_t b, int32_t c, int32_t d) {
    double x = 0, y = 0;
    int32_t count = 0;
    if (a < 0 || b < 0 || c < 0 || d < 0) return NAN;
    for (int32_t m = 0; m < of->model_count; m++) {
        double angle = tml_dihedral_of(tml_coordinates_at(of, m, (size_t)a), tml_coordinates_at(of, m, (size_t)b),
                                       tml_coordinates_at(of, m, (size_t)c), tml_coordinates_at(of, m, (size_t)d));
        if (isnan(angle)) continue;
        x += cos(angle);
        y += sin(angle);
        count++;
    }
    return count == 0 ? NAN : sqrt(x * x + y * y) / count;
}
