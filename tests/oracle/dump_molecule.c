/* Prints the terms of a molecule as tab-separated rows, for the oracle scripts.
 *
 *   dump_molecule                                                     names of the residues that are built in
 *   dump_molecule [charged|neutral|open] RESIDUE[VARIANT][@cis]…      one chain A numbered from 1; CYS-HG, HIS-HE2, GLY@cis
 *   dump_molecule inputs FILE…                                        what these inputs describe
 *
 * atom index residue name element charge; bond a b length; angle a b c degrees; torsion a b c d kind degrees tolerance;
 * centre c a1 a2 a3 a4 sign fixed; plane within has_xy (atom x y)…; peptide ca1 c o n ca2 cis
 */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/vector.h"
#include "input/problem.h"
#include "molecule/elements.h"
#include "molecule/molecule.h"
#include "molecule/residue_data.h"

static double degrees(double radians) {
    return radians * 180 / TML_PI;
}

static void print(const tml_molecule *m) {
    for (int32_t i = 0; i < m->atom_count; i++)
        printf("atom\t%d\t%d\t%s\t%s\t%s\t%d\n", i, m->atoms[i].residue + 1, m->residues[m->atoms[i].residue].name, m->atoms[i].name,
               tml_element_symbol(m->atoms[i].element), m->atoms[i].charge);
    for (int32_t i = 0; i < m->bond_count; i++) printf("bond\t%d\t%d\t%.6f\n", m->bonds[i].a, m->bonds[i].b, m->bonds[i].length);
    for (int32_t i = 0; i < m->angle_count; i++)
        printf("angle\t%d\t%d\t%d\t%.4f\n", m->angles[i].a, m->angles[i].b, m->angles[i].c, degrees(m->angles[i].angle));
    for (int32_t i = 0; i < m->torsion_count; i++) {
        const tml_torsion *t = &m->torsions[i];
        printf("torsion\t%d\t%d\t%d\t%d\t%d\t%.4f\t%.4f\n", t->a, t->b, t->c, t->d, (int)t->kind, degrees(t->angle), degrees(t->tolerance));
    }
    for (int32_t i = 0; i < m->centre_count; i++) {
        const tml_centre *c = &m->centres[i];
        printf("centre\t%d\t%d\t%d\t%d\t%d\t%d\t%d\n", c->centre, c->arms[0], c->arms[1], c->arms[2], c->arms[3], c->sign, c->fixed);
    }
    for (int32_t i = 0; i < m->plane_count; i++) {
        const tml_plane *p = &m->planes[i];
        printf("plane\t%.3f\t%d", p->within, p->has_xy);
        for (int32_t k = p->first; k < p->first + p->count; k++)
            printf("\t%d\t%.5f\t%.5f", m->plane_atoms[k], m->plane_xy[2 * k], m->plane_xy[2 * k + 1]);
        printf("\n");
    }
    for (int32_t i = 0; i < m->peptide_count; i++) {
        const tml_peptide *p = &m->peptides[i];
        printf("peptide\t%d\t%d\t%d\t%d\t%d\t%d\n", p->ca1, p->c, p->o, p->n, p->ca2, p->cis);
    }
}

static int print_inputs(const char *const *paths, size_t count) {
    tml_problem *problem;
    tml_error error = {0};
    if (tml_problem_read(paths, count, NULL, &problem, &error) != TML_OK) {
        fprintf(stderr, "%s:%ld: %s\n", error.file, error.line, error.message);
        return 2;
    }
    print(&problem->molecule);
    for (size_t i = 0; i < problem->note_count; i++) printf("note\t%s\n", problem->notes[i].text);
    tml_problem_free(problem);
    return 0;
}

int main(int argc, char **argv) {
    if (argc > 2 && strcmp(argv[1], "inputs") == 0) return print_inputs((const char *const *)(argv + 2), (size_t)argc - 2);
    const tml_template *form;
    for (int32_t i = 0; argc == 1 && (form = tml_builtin(i)) != NULL; i++) puts(form->name);
    if (argc == 1) return 0;
    tml_strings *pool = tml_strings_new();
    tml_outline outline = {0};
    outline.residues = calloc((size_t)argc, sizeof *outline.residues);
    tml_outline_ends ends = {.chain = "A"};
    if (pool == NULL || outline.residues == NULL) return 3;
    for (int i = 1; i < argc; i++) {
        static const char *const kinds[] = {"charged", "neutral", "open"};
        bool is_kind = false;
        for (int k = 0; k < 3; k++)
            if (strcmp(argv[i], kinds[k]) == 0) {
                ends.ends = (tml_ends)k;
                outline.ends = &ends;
                outline.ends_count = 1;
                is_kind = true;
            }
        if (is_kind) continue;
        tml_outline_residue *residue = &outline.residues[outline.residue_count++];
        size_t name = strcspn(argv[i], "+-@"), all = strcspn(argv[i], "@");
        char number[16];
        snprintf(number, sizeof number, "%zu", outline.residue_count);
        *residue = (tml_outline_residue){.chain = "A", .number = tml_strings_add(pool, number),
                                         .name = tml_strings_add_part(pool, argv[i], name),
                                         .variant = tml_strings_add_part(pool, argv[i] + name, all - name),
                                         .cis = strcmp(argv[i] + all, "@cis") == 0, .place = {-1, 0, 0}};
        if (residue->number == NULL || residue->name == NULL || residue->variant == NULL) return 3;
    }
    tml_molecule molecule;
    tml_error error = {0};
    tml_status status = tml_molecule_build(&outline, NULL, pool, &molecule, &error);
    if (status == TML_OK) print(&molecule);
    else fprintf(stderr, "%s\n", error.message);
    tml_molecule_clear(&molecule);
    free(outline.residues);
    tml_strings_free(pool);
    return status == TML_OK ? 0 : 2;
}
