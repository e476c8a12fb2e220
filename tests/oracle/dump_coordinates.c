/* Prints what the reader of coordinates finds in a file, tab-separated: model, chain, number, residue, name, element, x, y, z for
 * every atom of every model that has it; then link, chain, number, name, twice. */
#include <math.h>
#include <stdio.h>

#include "input/coordinates.h"
#include "molecule/elements.h"

int main(int argc, char **argv) {
    tml_coordinates c;
    tml_error error = {0};
    if (argc != 2) return 2;
    tml_status status = tml_coordinates_read(argv[1], &c, &error);
    if (status != TML_OK) fprintf(stderr, "%s:%ld:%ld: %s\n", error.file, error.line, error.column, error.message);
    for (int32_t m = 0; status == TML_OK && m < c.model_count; m++)
        for (size_t a = 0; a < c.atom_count; a++) {
            const tml_site_residue *in = &c.residues[c.atoms[a].residue];
            const double *xyz = tml_coordinates_at(&c, m, a);
            if (isnan(xyz[0])) continue;
            printf("atom\t%d\t%s\t%s\t%s\t%s\t%s\t%.3f\t%.3f\t%.3f\n", m, in->chain, in->number, in->name, c.atoms[a].name,
                   tml_element_symbol(c.atoms[a].element), xyz[0], xyz[1], xyz[2]);
        }
    for (size_t i = 0; status == TML_OK && i < c.link_count; i++) {
        const tml_site *a = &c.atoms[c.links[i].a], *b = &c.atoms[c.links[i].b];
        printf("link\t%s\t%s\t%s\t%s\t%s\t%s\n", c.residues[a->residue].chain, c.residues[a->residue].number, a->name,
               c.residues[b->residue].chain, c.residues[b->residue].number, b->name);
    }
    tml_coordinates_clear(&c);
    return status == TML_OK ? 0 : 1;
}
