/* Writes an invented ensemble in every format, for scripts that read it with other programs' readers.
 *
 *   write_models FOLDER
 *
 * FOLDER gets models.pdb, models.cif, models.pdb.gz, models.cif.gz, summary.json, check.json, report.txt and atoms.tsv, which
 * holds what was meant: model, chain, number, insertion, residue, atom, element, x, y, z, spread. The molecule has two equal
 * chains with a disulfide between them, a chain with insertion codes and negative numbers, and single atoms; its coordinates are
 * random numbers, not a structure.
 */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/pcg.h"
#include "molecule/elements.h"
#include "output/output.h"

enum { MODELS = 3, ROOM = 4096 };

static void add_residue(tml_outline *outline, const char *chain, const char *number, const char *name, const char *variant) {
    if (!tml_grow(&outline->residues, &outline->residue_capacity, outline->residue_count + 1, sizeof *outline->residues)) exit(3);
    outline->residues[outline->residue_count++] =
        (tml_outline_residue){.chain = chain, .number = number, .name = name, .variant = variant, .place = {-1, 0, 0}};
}

static void add_atom(tml_outline *outline, const char *name, const char *symbol) {
    if (!tml_grow(&outline->atoms, &outline->atom_capacity, outline->atom_count + 1, sizeof *outline->atoms)) exit(3);
    outline->atoms[outline->atom_count++] = (tml_outline_atom){
        .chain = "", .number = "", .residue = "", .name = name, .element = tml_element_number(symbol), .place = {-1, 0, 0}};
}

static void describe(tml_outline *outline) {
    static const char *const CHAINS[] = {"A", "B"};
    for (int c = 0; c < 2; c++) {
        add_residue(outline, CHAINS[c], "1", "GLY", "");
        add_residue(outline, CHAINS[c], "2", "CYS", "-HG");
        add_residue(outline, CHAINS[c], "3", "PRO", "");
        add_residue(outline, CHAINS[c], "4", "LYS", "");
    }
    add_residue(outline, "x", "-1", "SER", "");
    add_residue(outline, "x", "1", "ILE", "");
    add_residue(outline, "x", "1A", "TRP", "");
    add_residue(outline, "x", "1200", "HIS", "");
    add_atom(outline, "C1", "C");
    add_atom(outline, "CL2", "Cl");
    add_atom(outline, "ZN", "Zn");
    add_atom(outline, "O5'", "O");
    add_atom(outline, "H\"", "H");
    outline->links = calloc(1, sizeof *outline->links);
    if (outline->links == NULL) exit(3);
    outline->links[0] = (tml_outline_link){{"A", "2", "", "SG", {-1, 0, 0}}, {"B", "2", "", "SG", {-1, 0, 0}}, {-1, 0, 0}};
    outline->link_count = outline->link_capacity = 1;
}

static void invent(tml_problem *problem, tml_model *models, tml_ensemble *ensemble) {
    size_t n = (size_t)problem->molecule.atom_count;
    tml_pcg pcg;
    tml_pcg_seed(&pcg, 1, 1);
    *ensemble = (tml_ensemble){.problem = problem, .models = models, .model_count = MODELS, .trials = 7, .passed = 2, .wanted = 3,
                               .seed = 18446744073709551615u, .threads = 2, .select_lowest = true,
                               .spread = malloc(n * sizeof(double)),
                               .well_defined = calloc((size_t)problem->molecule.residue_count, sizeof(bool))};
    if (ensemble->spread == NULL || ensemble->well_defined == NULL) exit(3);
    ensemble->well_defined[1] = ensemble->well_defined[2] = true;
    for (size_t a = 0; a < n; a++) ensemble->spread[a] = tml_pcg_uniform(&pcg) * 3;
    ensemble->spread[0] = 5000;
    for (int m = 0; m < MODELS; m++) {
        models[m] = (tml_model){.xyz = malloc(3 * n * sizeof(double)), .trial = m + 2, .error = 10.5 * (m + 1), .passed = m < 2,
                                .mirrored = m == 1, .other_error = m == 1 ? 21.5 : 1.0 / 0.0, .both_passed = m == 1, .images_apart = m == 1 ? 9 : 0,
                                .eigenvalues = {9, 8, 7, 1, -2}};
        models[m].measures = (tml_measures){.distance_over_01 = m, .distance_max = 0.2 * m, .backbone_usual = 0.0 / 0.0};
        if (models[m].xyz == NULL) exit(3);
        for (size_t k = 0; k < 3 * n; k++) models[m].xyz[k] = tml_pcg_normal(&pcg) * 100;
        models[m].xyz[4] = -0.0004;
    }
}

static void write_meant(const tml_ensemble *ensemble, const char *path) {
    const tml_molecule *molecule = &ensemble->problem->molecule;
    FILE *file = fopen(path, "w");
    if (file == NULL) exit(3);
    for (int m = 0; m < MODELS; m++)
        for (int32_t a = 0; a < molecule->atom_count; a++) {
            const tml_atom *atom = &molecule->atoms[a];
            const tml_residue *in = &molecule->residues[atom->residue];
            const double *xyz = &ensemble->models[m].xyz[3 * (size_t)a];
            bool bare = in->chain[0] == '\0';
            fprintf(file, "%d\t%s\t%d\t%c\t%s\t%s\t%s\t%.9f\t%.9f\t%.9f\t%.9f\n", m + 1, bare ? "C" : in->chain,
                    bare ? 1 : in->sequence, in->insertion == '\0' ? ' ' : in->insertion, bare ? "UNL" : in->name, atom->name,
                    tml_element_symbol(atom->element), xyz[0], xyz[1], xyz[2], ensemble->spread[a]);
        }
    if (fclose(file) != 0) exit(3);
}

static const char *in_folder(const char *folder, const char *name) {
    static char path[ROOM];
    snprintf(path, sizeof path, "%s/%s", folder, name);
    return path;
}

int main(int argc, char **argv) {
    if (argc != 2) return 2;
    tml_error error = {0};
    tml_outline outline = {0};
    tml_model models[MODELS] = {0};
    tml_ensemble ensemble = {0};
    tml_note note = {"a note with \xff bytes and a \"quote\"", {0, 3, 1}};
    const char *files[] = {"invented.sheet"};
    tml_problem problem = {.pool = tml_strings_new(), .files = files, .file_count = 1, .title = "Invented; it's \"nothing\" 5 Å wide",
                           .notes = &note, .note_count = 1};
    /* a two-step proof between invented limits of restraint r1, twice in it */
    tml_distance_restraint restraint = {.list = "noe", .id = "r1", .upper = 3, .weight = 1, .pair_count = 64, .place = {0, 5, 1},
                                        .alternative_count = 1};
    tml_alternative alternative = {.count_a = 1, .first_b = 1, .count_b = 1, .pair_count = 64, .combination = -1, .stereo_a = -1, .stereo_b = -1};
    int32_t group[] = {0, 5};
    problem.restraints = (tml_restraints){.distances = &restraint, .distance_count = 1, .alternatives = &alternative,
                                          .alternative_count = 1, .group_atoms = group, .group_atom_count = 2};
    tml_step steps[] = {{0, 5, {0, 5, 9.0, TML_REASON_RADIUS, false, true, -1}},
                        {5, 2, {2, 5, 4.0, TML_REASON_RESTRAINT, true, false, 0}},
                        {2, 0, {0, 2, 4.4, TML_REASON_RESTRAINT, true, false, 0}}};
    tml_contradiction proof = {steps, 3, 0.6, true};
    tml_contradictions found = {&proof, 1, 1};
    describe(&outline);
    tml_status status = tml_molecule_build(&outline, files, problem.pool, &problem.molecule, &error);
    if (status == TML_OK) {
        invent(&problem, models, &ensemble);
        write_meant(&ensemble, in_folder(argv[1], "atoms.tsv"));
        status = tml_write_models(&ensemble, &found, in_folder(argv[1], "models.pdb"), TML_FORMAT_PDB, false, &error);
    }
    if (status == TML_OK) status = tml_write_models(&ensemble, &found, in_folder(argv[1], "models.cif"), TML_FORMAT_CIF, false, &error);
    if (status == TML_OK) status = tml_write_models(&ensemble, &found, in_folder(argv[1], "models.pdb.gz"), TML_FORMAT_PDB, true, &error);
    if (status == TML_OK) status = tml_write_models(&ensemble, &found, in_folder(argv[1], "models.cif.gz"), TML_FORMAT_CIF, true, &error);
    if (status == TML_OK) status = tml_write_build_json(&ensemble, &found, in_folder(argv[1], "summary.json"), &error);
    if (status == TML_OK) status = tml_write_check_json(&problem, &found, NULL, NULL, in_folder(argv[1], "check.json"), &error);
    FILE *report = fopen(in_folder(argv[1], "report.txt"), "w");
    if (report == NULL) return 3;
    if (status == TML_OK) status = tml_print_build(report, &ensemble, &found, &error);
    if (status == TML_OK) status = tml_print_check(report, &problem, &found, NULL, &error);
    fclose(report);
    if (status != TML_OK) fprintf(stderr, "write_models: %s\n", error.message);
    for (int m = 0; m < MODELS; m++) free(models[m].xyz);
    free(ensemble.spread);
    free(ensemble.well_defined);
    tml_molecule_clear(&problem.molecule);
    tml_outline_clear(&outline);
    tml_strings_free(problem.pool);
    return status == TML_OK ? 0 : 3;
}
