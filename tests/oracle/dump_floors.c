/* Prints how near atoms may come: dump_floors SHEET writes n rows "residue atom", then n rows of n hard floors in Å, "-" for pairs
 * that up to three bonds hold. For test_floors.py. */
#include <stdio.h>
#include <stdlib.h>

#include "base/memory.h"
#include "bounds/radii.h"
#include "input/problem.h"

/* Mark what a walk of up to `left` bonds meets. */
static void mark(const tml_molecule *m, int32_t atom, int left, char *near) {
    near[atom] = 1;
    for (int32_t k = m->neighbour_first[atom]; left > 0 && k < m->neighbour_first[atom + 1]; k++) mark(m, m->neighbours[k], left - 1, near);
}

int main(int argc, char **argv) {
    const char *paths[] = {argc > 1 ? argv[1] : ""};
    tml_problem *problem = NULL;
    tml_error error = {0};
    if (tml_problem_read(paths, 1, NULL, &problem, &error) != TML_OK) {
        fprintf(stderr, "%s\n", error.message);
        return 2;
    }
    const tml_molecule *m = &problem->molecule;
    for (int32_t i = 0; i < m->atom_count; i++) printf("%s %s\n", m->residues[m->atoms[i].residue].number, m->atoms[i].name);
    for (int32_t i = 0; i < m->atom_count; i++) {
        char *near = tml_alloc((size_t)m->atom_count, 1);
        if (near == NULL) return 3;
        mark(m, i, 3, near);
        for (int32_t j = 0; j < m->atom_count; j++) {
            if (near[j])
                printf("- ");
            else
                printf("%.3f ", tml_hard_floor(m, i, j));
        }
        printf("\n");
        free(near);
    }
    tml_problem_free(problem);
    return 0;
}
