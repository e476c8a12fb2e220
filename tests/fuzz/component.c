/* Any bytes as a component dictionary: what it describes stands alone, in a chain of amino acids and bonded to a metal. What is built must
 * hold together: indices in range, finite lengths and angles, planes whose coordinates are numbers. */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "input/draft.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

enum { MOST_USED = 3 };

/* GLY X X GLY in chain A, X in chain B, a zinc ion linked to each component's first atom there. */
static tml_status add_residues(tml_draft *draft) {
    static const char *const NUMBERS[] = {"1", "2", "3", "4", "5", "6", "7", "8", "9", "10", "11", "12"};
    tml_outline *outline = &draft->outline;
    size_t used = outline->component_count < MOST_USED ? outline->component_count : MOST_USED, number = 0;
    for (size_t i = 0; i < 2 * used + 2; i++) {
        const char *name = i == 0 || i > 2 * used ? "GLY" : outline->components[(i - 1) / 2]->name;
        if (!tml_grow(&outline->residues, &outline->residue_capacity, outline->residue_count + 1, sizeof *outline->residues)) return TML_NO_MEMORY;
        outline->residues[outline->residue_count++] = (tml_outline_residue){.chain = "A", .number = NUMBERS[number++], .name = name, .variant = ""};
    }
    for (size_t i = 0; i < used; i++) {
        const tml_component *component = outline->components[i];
        if (!tml_grow(&outline->residues, &outline->residue_capacity, outline->residue_count + 1, sizeof *outline->residues) ||
            !tml_grow(&outline->atoms, &outline->atom_capacity, outline->atom_count + 1, sizeof *outline->atoms) ||
            !tml_grow(&outline->links, &outline->link_capacity, outline->link_count + 1, sizeof *outline->links))
            return TML_NO_MEMORY;
        outline->residues[outline->residue_count++] = (tml_outline_residue){.chain = "B", .number = NUMBERS[i], .name = component->name, .variant = ""};
        outline->atoms[outline->atom_count++] = (tml_outline_atom){.chain = "Z", .number = NUMBERS[i], .residue = "ZN", .name = "ZN", .element = 30};
        outline->links[outline->link_count++] =
            (tml_outline_link){.a = {.chain = "B", .number = NUMBERS[i], .residue = "", .atom = component->atoms[0].name},
                               .b = {.chain = "Z", .number = NUMBERS[i], .residue = "", .atom = "ZN"}};
    }
    return TML_OK;
}

static void check_atom(const tml_molecule *m, int32_t atom) {
    if (atom < 0 || atom >= m->atom_count) abort();
}

static void check_molecule(const tml_molecule *m) {
    for (int32_t i = 0; i < m->bond_count; i++) {
        check_atom(m, m->bonds[i].a);
        check_atom(m, m->bonds[i].b);
        if (!(m->bonds[i].length > 0 && m->bonds[i].length < 100)) abort();
    }
    for (int32_t i = 0; i < m->angle_count; i++)
        if (!(m->angles[i].angle >= 0 && m->angles[i].angle < 3.1416)) abort();
    for (int32_t i = 0; i < m->torsion_count; i++)
        if (!isfinite(m->torsions[i].angle) || !(m->torsions[i].tolerance >= 0)) abort();
    for (int32_t i = 0; i < m->centre_count; i++)
        for (int k = 0; k < 3; k++) check_atom(m, m->centres[i].arms[k]);
    for (int32_t i = 0; i < m->plane_count; i++)
        for (int32_t k = m->planes[i].first; k < m->planes[i].first + m->planes[i].count; k++) {
            check_atom(m, m->plane_atoms[k]);
            if (m->planes[i].has_xy && !isfinite(m->plane_xy[2 * k] + m->plane_xy[2 * k + 1])) abort();
        }
    for (int32_t i = 0; i < m->peptide_count; i++) {
        check_atom(m, m->peptides[i].ca1);
        check_atom(m, m->peptides[i].ca2);
        check_atom(m, m->peptides[i].n);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    char *text = malloc(size + 1);
    if (text == NULL) return 0;
    memcpy(text, data, size);
    text[size] = '\0';
    const char *files[] = {"fuzz"};
    tml_problem problem = {.pool = tml_strings_new(), .files = files, .file_count = 1, .title = ""};
    tml_draft draft = {.problem = &problem};
    tml_error error = {0};
    tml_star star = {0};
    tml_status status = problem.pool == NULL ? TML_NO_MEMORY : tml_star_parse(text, size, "fuzz", &star, &error);
    if (status == TML_OK) status = tml_read_components(&draft, &star, 0, &error);
    if (status == TML_OK) status = add_residues(&draft);
    if (status == TML_OK) status = tml_make_components(&draft, &error);
    if (status == TML_OK) status = tml_molecule_build(&draft.outline, files, problem.pool, &problem.molecule, &error);
    if (status == TML_OK) check_molecule(&problem.molecule);
    if (status != TML_OK && error.message[0] == '\0') abort();
    tml_molecule_clear(&problem.molecule);
    tml_outline_clear(&draft.outline);
    tml_rows_clear(&draft.rows);
    tml_star_clear(&star);
    free(problem.notes);
    tml_strings_free(problem.pool);
    free(text);
    return 0;
}
