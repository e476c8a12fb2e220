/* Prints the restraints of input files, mapped to atoms, as tab-separated rows for the oracle scripts.
 *
 *   dump_restraints FILE… [--table FILE COLUMNS FORM OLD_NAMES]…    where - is no form and no old names
 *
 * atom index chain number residue name
 * distance list id lower upper average range; then for each alternative: alternative combination atoms_a atoms_b
 * dihedral list id; then for each interval: interval a b c d lower upper (degrees)
 * unmapped list id reason; note text
 */
#include <stdio.h>
#include <string.h>

#include "input/problem.h"

static void print_atoms(const tml_restraints *restraints, int32_t first, int32_t count) {
    for (int32_t i = 0; i < count; i++) printf("%s%d", i == 0 ? "\t" : ",", restraints->group_atoms[first + i]);
}

static void print_distance(const tml_restraints *restraints, const tml_distance_restraint *d) {
    printf("distance\t%s\t%s\t%.9g\t%.9g\t%d\t%d\n", d->list, d->id, d->lower, d->upper, d->average, (int)d->range);
    for (int32_t k = d->first_alternative; k < d->first_alternative + d->alternative_count; k++) {
        const tml_alternative *alternative = &restraints->alternatives[k];
        printf("alternative\t%d", alternative->combination);
        print_atoms(restraints, alternative->first_a, alternative->count_a);
        print_atoms(restraints, alternative->first_b, alternative->count_b);
        printf("\n");
    }
}

static void print_dihedral(const tml_restraints *restraints, const tml_dihedral_restraint *d) {
    const double degrees = 180 / 3.14159265358979323846;
    printf("dihedral\t%s\t%s\n", d->list, d->id);
    for (int32_t k = d->first_interval; k < d->first_interval + d->interval_count; k++) {
        const tml_dihedral_interval *interval = &restraints->intervals[k];
        const int32_t *atoms = interval->atoms;
        printf("interval\t%d\t%d\t%d\t%d\t%.6f\t%.6f\n", atoms[0], atoms[1], atoms[2], atoms[3], interval->lower * degrees,
               interval->upper * degrees);
    }
}

static void print(const tml_problem *problem) {
    const tml_molecule *molecule = &problem->molecule;
    const tml_restraints *restraints = &problem->restraints;
    for (int32_t i = 0; i < molecule->atom_count; i++) {
        const tml_residue *residue = &molecule->residues[molecule->atoms[i].residue];
        printf("atom\t%d\t%s\t%s\t%s\t%s\n", i, residue->chain, residue->number, residue->name, molecule->atoms[i].name);
    }
    for (int32_t i = 0; i < restraints->distance_count; i++) print_distance(restraints, &restraints->distances[i]);
    for (int32_t i = 0; i < restraints->dihedral_count; i++) print_dihedral(restraints, &restraints->dihedrals[i]);
    for (int32_t i = 0; i < restraints->unmapped_count; i++)
        printf("unmapped\t%s\t%s\t%s\n", restraints->unmapped[i].list, restraints->unmapped[i].id,
               restraints->unmapped[i].reason);
    for (size_t i = 0; i < problem->note_count; i++) printf("note\t%s\n", problem->notes[i].text);
}

static const char *given(const char *text) {
    return strcmp(text, "-") == 0 ? NULL : text;
}

int main(int argc, char **argv) {
    enum { TABLES_MOST = 16 };
    tml_error error = {0};
    tml_problem *problem = NULL;
    tml_table tables[TABLES_MOST];
    tml_read_options options = {.tables = tables};
    int inputs = 1;
    while (inputs < argc && strcmp(argv[inputs], "--table") != 0) inputs++;
    for (int i = inputs; i + 4 < argc && options.table_count < TABLES_MOST; i += 5)
        tables[options.table_count++] = (tml_table){argv[i + 1], argv[i + 2], given(argv[i + 3]), given(argv[i + 4])};
    tml_status status = tml_problem_read((const char *const *)argv + 1, (size_t)inputs - 1, &options, &problem, &error);
    if (status == TML_OK)
        print(problem);
    else
        fprintf(stderr, "%s:%ld:%ld: %s\n", error.file, error.line, error.column, error.message);
    tml_problem_free(problem);
    return status == TML_OK ? 0 : 2;
}
