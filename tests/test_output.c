/* Files that appear whole or not at all, what formats hold, paragraphs, the table of limits, and repairs. */
#include <criterion/criterion.h>
#include <dirent.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "output/file.h"
#include "output/output.h"
#include "output/words.h"

static char folder[] = "/tmp/trammel-test-XXXXXX";

static void make_folder(void) {
    cr_assert_not_null(mkdtemp(folder));
}

static void remove_folder(void) {
    DIR *directory = opendir(folder);
    for (struct dirent *entry; directory != NULL && (entry = readdir(directory)) != NULL;) {
        char path[512];
        snprintf(path, sizeof path, "%s/%s", folder, entry->d_name);
        if (entry->d_name[0] != '.' || strncmp(entry->d_name, ".trammel", 8) == 0) unlink(path);
    }
    if (directory != NULL) closedir(directory);
    rmdir(folder);
}

static int entries(void) {
    int count = 0;
    DIR *directory = opendir(folder);
    while (readdir(directory) != NULL) count++;
    closedir(directory);
    return count - 2;
}

static const char *inside(const char *name) {
    static char path[512];
    snprintf(path, sizeof path, "%s/%s", folder, name);
    return path;
}

static const char *content(const char *path) {
    static char text[4096];
    FILE *file = fopen(path, "r");
    cr_assert_not_null(file);
    text[fread(text, 1, sizeof text - 1, file)] = '\0';
    fclose(file);
    return text;
}

TestSuite(output, .init = make_folder, .fini = remove_folder);

Test(output, a_file_is_not_there_before_it_is_complete) {
    tml_file *file;
    tml_error error = {0};
    cr_assert_eq(tml_file_open(inside("a"), false, &file, &error), TML_OK);
    tml_file_print(file, "%d %s\n", 1, "whole");
    cr_expect_neq(access(inside("a"), F_OK), 0);
    cr_assert_eq(tml_file_close(file, &error), TML_OK);
    cr_expect_str_eq(content(inside("a")), "1 whole\n");
    cr_expect_eq(entries(), 1);
}

Test(output, a_file_taken_back_leaves_the_old_one_and_nothing_else) {
    tml_file *file;
    cr_assert_eq(tml_file_open(inside("a"), false, &file, NULL), TML_OK);
    tml_file_print(file, "old");
    cr_assert_eq(tml_file_close(file, NULL), TML_OK);
    chmod(inside("a"), 0640);
    cr_assert_eq(tml_file_open(inside("a"), true, &file, NULL), TML_OK);
    tml_file_print(file, "new");
    tml_file_discard(file);
    cr_expect_str_eq(content(inside("a")), "old");
    cr_expect_eq(entries(), 1);
    cr_assert_eq(tml_file_open(inside("a"), false, &file, NULL), TML_OK);
    tml_file_print(file, "new");
    cr_assert_eq(tml_file_close(file, NULL), TML_OK);
    struct stat now;
    cr_assert_eq(stat(inside("a"), &now), 0);
    cr_expect_eq(now.st_mode & 0777, 0640, "permissions stay");
    cr_expect_str_eq(content(inside("a")), "new");
}

Test(output, a_link_stays_a_link) {
    tml_file *file;
    struct stat now;
    cr_assert_eq(tml_file_open(inside("a"), false, &file, NULL), TML_OK);
    cr_assert_eq(tml_file_close(file, NULL), TML_OK);
    cr_assert_eq(symlink("a", inside("link")), 0);
    cr_assert_eq(tml_file_open(inside("link"), false, &file, NULL), TML_OK);
    tml_file_print(file, "through");
    cr_assert_eq(tml_file_close(file, NULL), TML_OK);
    cr_assert_eq(lstat(inside("link"), &now), 0);
    cr_expect(S_ISLNK(now.st_mode));
    cr_expect_str_eq(content(inside("a")), "through");
}

Test(output, a_full_device_is_told) {
    for (int compressed = 0; compressed < 2; compressed++) {
        tml_file *file;
        tml_error error = {0};
        cr_assert_eq(tml_file_open("/dev/full", compressed, &file, &error), TML_OK);
        for (unsigned i = 0; i < 100000; i++) tml_file_print(file, "%u some text that fills a buffer or two\n", i * i % 8191);
        cr_assert_eq(tml_file_close(file, &error), TML_IO);
        cr_expect_not_null(strstr(error.message, "/dev/full"));
        if (!compressed) cr_expect_not_null(strstr(error.message, "space"), "%s", error.message);
    }
}

Test(output, a_missing_folder_is_told_and_named) {
    tml_file *file;
    tml_error error = {0};
    cr_assert_eq(tml_file_open(inside("no/where"), false, &file, &error), TML_IO);
    cr_expect_null(file);
    cr_expect_not_null(strstr(error.message, "no/where"));
}

Test(output, long_texts_are_written_whole) {
    tml_file *file;
    static char text[3000];
    memset(text, 'x', sizeof text - 1);
    cr_assert_eq(tml_file_open(inside("a"), false, &file, NULL), TML_OK);
    tml_file_print(file, "%s", text);
    cr_assert_eq(tml_file_close(file, NULL), TML_OK);
    cr_expect_str_eq(content(inside("a")), text);
}

Test(output, paragraphs_break_at_blanks_and_count_characters_not_bytes) {
    tml_file *file;
    cr_assert_eq(tml_file_open(inside("a"), false, &file, NULL), TML_OK);
    tml_file_paragraph(file, 10, "- ", "  ", "%s", "ÅÅÅ ÅÅÅÅ bb");
    tml_file_paragraph(file, 6, "", "", "abcdefghij\x1b[2m\xff");
    cr_assert_eq(tml_file_close(file, NULL), TML_OK);
    cr_expect_str_eq(content(inside("a")), "- ÅÅÅ ÅÅÅÅ\n  bb\nabcdef\nghij?[\n2m?\n");
}

Test(output, the_suffix_tells_the_format) {
    bool compressed;
    cr_expect_eq(tml_format_of("a.pdb", &compressed), TML_FORMAT_PDB);
    cr_expect_not(compressed);
    cr_expect_eq(tml_format_of("x/a.cif.gz", &compressed), TML_FORMAT_CIF);
    cr_expect(compressed);
    cr_expect_eq(tml_format_of(".pdb", &compressed), TML_FORMAT_UNKNOWN);
    cr_expect_eq(tml_format_of("pdb", &compressed), TML_FORMAT_UNKNOWN);
    cr_expect_eq(tml_format_of("-", &compressed), TML_FORMAT_UNKNOWN);
}

/* One chain of `count` residues of one atom each. */
static tml_molecule row(int32_t count, const char *chain, const char *name, const char *atom, int32_t first) {
    tml_molecule molecule = {.atom_count = count, .residue_count = count, .chain_count = 1};
    molecule.atoms = calloc((size_t)count, sizeof *molecule.atoms);
    molecule.residues = calloc((size_t)count, sizeof *molecule.residues);
    molecule.chains = calloc(1, sizeof *molecule.chains);
    molecule.chains[0] = (tml_chain){.code = chain, .residue_count = count};
    for (int32_t i = 0; i < count; i++) {
        char *number = calloc(1, 16);
        snprintf(number, 16, "%d", first + i);
        molecule.atoms[i] = (tml_atom){.name = atom, .residue = i, .element = 6};
        molecule.residues[i] = (tml_residue){.chain = chain, .number = number, .name = name, .sequence = first + i, .insertion = ' ',
                                             .first_atom = i, .atom_count = 1};
    }
    return molecule;
}

static void clear(tml_molecule *molecule) {
    for (int32_t i = 0; i < molecule->residue_count; i++) free((char *)molecule->residues[i].number);
    free(molecule->atoms);
    free(molecule->residues);
    free(molecule->chains);
}

/* Limits of the columns: Atomic Coordinate Entry Format Description 3.3 (wwPDB 2012). */
Test(output, what_the_pdb_format_cannot_hold_is_refused_with_advice) {
    static const struct { int32_t count, first, models; const char *chain, *name, *atom; bool fits; } CASES[] = {
        {1, 1, 1, "A", "LIG", "C1", true},     {9999, 1, 1, "A", "LIG", "C1", true},    {10000, 0, 1, "A", "LIG", "C1", false},
        {1, -999, 1, "A", "LIG", "C1", true},  {1, -1000, 1, "A", "LIG", "C1", false},  {1, 9999, 1, "A", "LIG", "C1", true},
        {1, 10000, 1, "A", "LIG", "C1", false}, {1, 1, 1, "AA", "LIG", "C1", false},    {1, 1, 1, "A", "LIGA", "C1", false},
        {1, 1, 1, "A", "LIG", "C1234", false}, {1, 1, 1, "A", "LIG", "C123", true},     {1, 1, 10000, "A", "LIG", "C1", false},
        {1, 1, 9999, "A", "LIG", "C1", true},  {1, 1, 1, "\xc3\x85", "LIG", "C1", false}};
    for (size_t i = 0; i < sizeof CASES / sizeof CASES[0]; i++) {
        tml_error error = {0};
        tml_molecule molecule = row(CASES[i].count, CASES[i].chain, CASES[i].name, CASES[i].atom, CASES[i].first);
        tml_status status = tml_format_fits(&molecule, CASES[i].models, TML_FORMAT_PDB, &error);
        cr_expect_eq(status, CASES[i].fits ? TML_OK : TML_TOO_LARGE, "case %zu: %s", i, error.message);
        if (!CASES[i].fits) cr_expect_not_null(strstr(error.message, "mmCIF"));
        cr_expect_eq(tml_format_fits(&molecule, CASES[i].models, TML_FORMAT_CIF, &error), TML_OK);
        clear(&molecule);
    }
}

Test(output, coordinates_beyond_the_columns_of_the_pdb_format_are_refused) {
    tml_molecule molecule = row(1, "A", "LIG", "C1", 1);
    tml_problem problem = {.molecule = molecule};
    int32_t none[2] = {0};
    problem.molecule.neighbour_first = none;
    static const struct { double x; bool fits; } CASES[] = {{9999.9994, true}, {9999.9996, false}, {-999.9994, true}, {-999.9996, false}};
    for (size_t i = 0; i < sizeof CASES / sizeof CASES[0]; i++) {
        tml_error error = {0};
        double xyz[3] = {CASES[i].x, 0, 0};
        tml_model model = {.xyz = xyz, .trial = 1, .passed = true};
        tml_ensemble ensemble = {.problem = &problem, .models = &model, .model_count = 1, .trials = 1, .passed = 1};
        tml_status status = tml_write_models(&ensemble, NULL, inside("m.pdb"), TML_FORMAT_PDB, false, &error);
        cr_expect_eq(status, CASES[i].fits ? TML_OK : TML_TOO_LARGE, "%f: %s", CASES[i].x, error.message);
        cr_expect_eq(entries(), CASES[i].fits ? 1 : 0);
        unlink(inside("m.pdb"));
        cr_expect_eq(tml_write_models(&ensemble, NULL, inside("m.cif"), TML_FORMAT_CIF, false, &error), TML_OK);
        unlink(inside("m.cif"));
        xyz[1] = NAN;
        cr_expect_eq(tml_write_models(&ensemble, NULL, inside("m.cif"), TML_FORMAT_CIF, false, &error), TML_TOO_LARGE);
        cr_expect_eq(entries(), 0);
    }
    clear(&molecule);
}

Test(output, the_rule_of_selection_claims_no_more_than_was_so) {
    const struct { int model_count, passed; const char *words; } CASES[] = {
        {4, 5, "those with the lowest error among the passed"}, {4, 4, "those with the lowest error among the passed"},
        {4, 3, "all 3 that passed were chosen and, being too few, those with the lowest error of the others"},
        {4, 0, "none of which passed, those with the lowest error were chosen"}};
    for (size_t i = 0; i < sizeof CASES / sizeof CASES[0]; i++) {
        char text[512];
        tml_ensemble ensemble = {.model_count = CASES[i].model_count, .passed = CASES[i].passed, .trials = 20, .select_lowest = true};
        tml_say_selection(&ensemble, text, sizeof text);
        cr_expect_not_null(strstr(text, CASES[i].words), "%s", text);
        cr_expect_not_null(strstr(text, "20 trials"), "%s", text);
        ensemble.select_lowest = false;
        tml_say_selection(&ensemble, text, sizeof text);
        cr_expect_not_null(strstr(text, "first"), "%s", text);
        cr_expect_null(strstr(text, "lowest"), "%s", text);
    }
}

Test(output, the_least_repair_counts_levers_and_repeats) {
    /* an upper limit on a sum over 64 pairs moves the pair's bound by 64^(1/6) = 2 */
    tml_distance_restraint distances[] = {{.id = "wide", .pair_count = 64}, {.id = "low", .pair_count = 64}};
    tml_problem problem = {.restraints = {.distances = distances, .distance_count = 2}};
    tml_step steps[] = {{0, 1, {0, 1, 9, TML_REASON_RESTRAINT, false, false, 1}},
                        {1, 2, {1, 2, 4, TML_REASON_RESTRAINT, true, false, 0}},
                        {2, 0, {0, 2, 4, TML_REASON_BOND, true, false, -1}}};
    tml_contradiction proof = {steps, 3, 1.0, false};
    tml_repair repair;
    cr_assert(tml_repair_of(&problem, &proof, &repair));
    cr_expect_eq(repair.restraint, 0);
    cr_expect(repair.upper);
    cr_expect_float_eq(repair.loosen, 0.5, 1e-12);
    distances[0].average = true; /* then it does not, and the lower limit comes first in the chain */
    cr_assert(tml_repair_of(&problem, &proof, &repair));
    cr_expect_eq(repair.restraint, 1);
    cr_expect_float_eq(repair.loosen, 1.0, 1e-12);
    proof.step_count = 0;
    cr_expect_not(tml_repair_of(&problem, &proof, &repair));
}
