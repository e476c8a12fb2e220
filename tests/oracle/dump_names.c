/* Prints which atoms names mean in the middle residue of ALA-RESIDUE-ALA: dump_names RESIDUE NAME…
 * First line: all its atoms. Then one line for each name: its atoms, blanks between them. */
#include <stdio.h>

#include "restraint/names.h"

static void print_names(const tml_molecule *molecule, int count, char **names) {
    enum { ROOM = 64, MIDDLE = 1 };
    const tml_residue *residue = &molecule->residues[MIDDLE];
    for (int32_t i = 0; i < residue->atom_count; i++) printf("%s ", molecule->atoms[residue->first_atom + i].name);
    printf("\n");
    for (int k = 0; k < count; k++) {
        int32_t atoms[ROOM];
        tml_name_kind kind;
        int32_t found = tml_names_match(molecule, MIDDLE, names[k], atoms, &kind);
        for (int32_t i = 0; i < found; i++) printf("%s ", molecule->atoms[atoms[i]].name);
        printf("\n");
    }
}

int main(int argc, char **argv) {
    if (argc < 2) return 2;
    const tml_place nowhere = {-1, 0, 0};
    tml_outline_residue residues[3] = {
        {.chain = "A", .number = "1", .name = "ALA", .variant = "", .place = nowhere},
        {.chain = "A", .number = "2", .name = argv[1], .variant = "", .place = nowhere},
        {.chain = "A", .number = "3", .name = "ALA", .variant = "", .place = nowhere},
    };
    tml_outline outline = {.residues = residues, .residue_count = 3};
    tml_strings *pool = tml_strings_new();
    tml_molecule molecule;
    tml_error error = {0};
    if (pool == NULL) return 3;
    tml_status status = tml_molecule_build(&outline, NULL, pool, &molecule, &error);
    if (status == TML_OK)
        print_names(&molecule, argc - 2, argv + 2);
    else
        fprintf(stderr, "%s\n", error.message);
    tml_molecule_clear(&molecule);
    tml_strings_free(pool);
    return status == TML_OK ? 0 : 2;
}
