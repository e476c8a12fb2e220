/* Every allocation may fail. The whole way, from files to files, is walked again and again, and each time another allocation
 * of the library gives NULL: nothing may crash, nothing may leak, and the status must be TML_NO_MEMORY.
 *
 * The linker sends the library's calls of malloc and its kin here (--wrap); jansson's are sent here by its own hook. With SOAK
 * set each allocation fails in turn, otherwise the first ones and a sample of the others.
 */
#include <jansson.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "bounds/bounds.h"
#include "ensemble/ensemble.h"
#include "output/output.h"
#include "output/sheet.h"

/* ---- allocations, counted and kept in a set of pointers ---- */

void *__real_malloc(size_t size);
void *__real_calloc(size_t count, size_t size);
void *__real_realloc(void *old, size_t size);
void *__real_aligned_alloc(size_t alignment, size_t size);
void *__wrap_malloc(size_t size);
void *__wrap_calloc(size_t count, size_t size);
void *__wrap_realloc(void *old, size_t size);
void *__wrap_aligned_alloc(size_t alignment, size_t size);
char *__wrap_strdup(const char *text);
char *__wrap_strndup(const char *text, size_t length);
void __real_free(void *pointer);
void __wrap_free(void *pointer);

enum { SLOTS = 1 << 20 };
static void *const GONE = (void *)1;
static void *live[SLOTS];
static long allocations, fail_at, live_count;

static size_t find(const void *pointer) {
    size_t at = ((uintptr_t)pointer >> 4) * 0x9e3779b97f4a7c15u >> 44;
    while (live[at] != NULL && live[at] != pointer) at = (at + 1) % SLOTS;
    return at;
}

static void *kept(void *pointer) {
    if (pointer == NULL) return NULL;
    live[find(pointer)] = pointer;
    live_count++;
    return pointer;
}

static void forget(const void *pointer) {
    size_t at = find(pointer);
    if (pointer == NULL || live[at] == NULL) return; /* NULL, or memory that the C library gave */
    live[at] = GONE;
    live_count--;
}

static bool fails(void) {
    return ++allocations == fail_at;
}

void *__wrap_malloc(size_t size) {
    return fails() ? NULL : kept(__real_malloc(size));
}

void *__wrap_calloc(size_t count, size_t size) {
    return fails() ? NULL : kept(__real_calloc(count, size));
}

void *__wrap_aligned_alloc(size_t alignment, size_t size) {
    return fails() ? NULL : kept(__real_aligned_alloc(alignment, size));
}

void *__wrap_realloc(void *old, size_t size) {
    if (fails()) return NULL;
    forget(old);
    return kept(__real_realloc(old, size));
}

char *__wrap_strndup(const char *text, size_t length) {
    length = strnlen(text, length);
    char *copy = __wrap_malloc(length + 1);
    if (copy != NULL) memcpy(copy, text, length), copy[length] = '\0';
    return copy;
}

char *__wrap_strdup(const char *text) {
    return __wrap_strndup(text, strlen(text));
}

void __wrap_free(void *pointer) {
    forget(pointer);
    __real_free(pointer);
}

/* ---- the ways ---- */

static char folder[] = "/tmp/trammel-inject-XXXXXX";

static const char *in_folder(const char *name) {
    static char path[256];
    snprintf(path, sizeof path, "%s/%s", folder, name);
    return path;
}

static tml_status check_way(const char *const *paths, size_t count) {
    tml_error error = {0};
    tml_problem *problem = NULL;
    tml_bounds *bounds = NULL;
    tml_use *uses = NULL;
    tml_contradictions found = {0};
    FILE *nowhere = fopen("/dev/null", "w");
    tml_status status = tml_problem_read(paths, count, NULL, &problem, &error);
    if (status == TML_OK) status = tml_bounds_prepare(problem, 1, NULL, &bounds, &found, &error);
    if (status == TML_CONTRADICTED) status = TML_OK;
    if (status == TML_OK) status = tml_restraints_judge(problem, 1, NULL, &uses, &error);
    if (status == TML_OK) status = tml_print_check(nowhere, problem, &found, uses, &error);
    if (status == TML_OK) status = tml_write_check_json(problem, &found, uses, NULL, in_folder("check.json"), &error);
    if (status == TML_OK) status = tml_write_bounds(problem, bounds, in_folder("bounds.gz"), &error);
    fclose(nowhere);
    free(uses);
    tml_contradictions_clear(&found);
    tml_bounds_free(bounds);
    tml_problem_free(problem);
    return status;
}

static tml_status build_way(const char *const *paths, size_t count) {
    tml_error error = {0};
    tml_problem *problem = NULL;
    tml_ensemble *ensemble = NULL;
    tml_contradictions found = {0};
    tml_build_options options;
    tml_build_defaults(&options);
    options.models = 2;
    options.trials = 3;
    options.threads = 1;
    options.effort = 0.05;
    FILE *nowhere = fopen("/dev/null", "w");
    tml_status status = tml_problem_read(paths, count, NULL, &problem, &error);
    if (status == TML_OK) status = tml_build(problem, &options, NULL, &ensemble, &found, &error);
    if (status == TML_SHORT || status == TML_CONTRADICTED) status = TML_OK;
    if (status == TML_OK) status = tml_write_models(ensemble, &found, in_folder("m.pdb"), TML_FORMAT_PDB, false, &error);
    if (status == TML_OK) status = tml_write_models(ensemble, &found, in_folder("m.cif.gz"), TML_FORMAT_CIF, true, &error);
    if (status == TML_OK) status = tml_write_build_json(ensemble, &found, in_folder("build.json"), &error);
    if (status == TML_OK) status = tml_print_build(nowhere, ensemble, &found, &error);
    fclose(nowhere);
    tml_ensemble_free(ensemble);
    tml_contradictions_clear(&found);
    tml_problem_free(problem);
    return status;
}

/* The path is the sheet; the table beside it is read with it. */
static tml_status table_way(const char *const *paths, size_t count) {
    const char *const text = "first\tchain\tsecond\tfar\tto\nA:2:HB1\tA\tLYS4\tx\t5\nA:1:HA,A:2:HA\tA\t4\tx\t4\n";
    tml_error error = {0};
    tml_problem *problem = NULL;
    tml_table table = {.path = in_folder("rows.txt"),
                       .columns = "address_1@first chain_2@chain residue_2@second upper@to atom_2=N list='a b'",
                       .form = "tab comment=!",
                       .old_names = "hydrogens-1-2"};
    tml_read_options options = {.tables = &table, .table_count = 1, .old_names = "hydrogens-1-2"};
    FILE *file = fopen(table.path, "w");
    if (file == NULL) return TML_IO;
    fputs(text, file);
    fclose(file);
    tml_status status = tml_problem_read(paths, count, &options, &problem, &error);
    tml_problem_free(problem);
    unlink(table.path);
    return status;
}

static tml_status derive_way(const char *const *paths, size_t count) {
    tml_error error = {0};
    tml_coordinates coordinates;
    tml_derived derived;
    const tml_derive_options options = {.cutoff = 6, .atoms = "all", .error = 0.5, .keep = 1, .seed = 1, .model = -1,
                                        .covalent = true};
    (void)count;
    tml_status status = tml_coordinates_read(paths[0], &coordinates, &error);
    if (status == TML_OK) status = tml_sheet_derive(&coordinates, &options, in_folder("derived.sheet"), NULL, &derived, &error);
    tml_coordinates_clear(&coordinates);
    return status;
}

/* Models of two alike chains, compared with themselves, chains exchanged. */
static tml_status compare_way(const char *const *paths, size_t count) {
    static const char *const NAMES[] = {"N", "CA", "C"};
    char reference[256];
    tml_error error = {0};
    tml_comparison *comparison = NULL;
    tml_compare_options options;
    FILE *nowhere = fopen("/dev/null", "w");
    (void)count;
    snprintf(reference, sizeof reference, "%s", in_folder("reference.pdb"));
    for (int of = 0; of < 2; of++) {
        FILE *file = fopen(of == 0 ? paths[0] : reference, "w");
        if (file == NULL) return TML_IO;
        for (int i = 0; i < 3 * 2 * 4 * 3; i++) {
            int model = i / 24, chain = i / 12 % 2, residue = i / 3 % 4;
            double place[3] = {8.0 * chain + i % 3, 3.0 * residue, i * i % 7 + 0.1 * model};
            fprintf(file, "ATOM  %5d  %-3s ALA %c%4d    %8.3f%8.3f%8.3f  1.00  0.00\n%s", i, NAMES[i % 3], 'A' + (chain ^ of), residue + 1, place[0],
                    place[1], place[2], i % 24 == 23 ? "ENDMDL\n" : "");
        }
        fclose(file);
    }
    tml_compare_defaults(&options);
    options.threads = 1;
    tml_status status = tml_compare(paths[0], reference, &options, NULL, &comparison, &error);
    if (status == TML_OK) status = tml_print_comparison(nowhere, comparison, &error);
    if (status == TML_OK) status = tml_write_comparison_json(comparison, in_folder("compare.json"), &error);
    tml_comparison_free(comparison);
    fclose(nowhere);
    return status;
}

/* Models of the sheet's own molecule, some atoms short, assessed with stereo pairs left open. */
static tml_status assess_way(const char *const *paths, size_t count) {
    tml_error error = {0};
    tml_problem *problem = NULL;
    tml_assessment *assessment = NULL;
    char models[256];
    FILE *nowhere = fopen("/dev/null", "w"), *file;
    snprintf(models, sizeof models, "%s", in_folder("given.pdb"));
    file = fopen(models, "w");
    if (file == NULL || nowhere == NULL) return TML_IO;
    for (int i = 0; i < 2 * 8; i++)
        fprintf(file, "%sATOM  %5d  %-3s GLY B%4d    %8.3f%8.3f%8.3f  1.00  0.00\n%s", i % 8 == 0 ? "MODEL        1\n" : "", i,
                (const char *[]){"N", "CA", "C", "O"}[i % 4], i / 4 % 2 + 1, 1.4 * i, i * i % 5 * 1.0, i % 3 * 1.0, i % 8 == 7 ? "ENDMDL\n" : "");
    fclose(file);
    tml_status status = tml_problem_read(paths, count, NULL, &problem, &error);
    if (status == TML_OK) status = tml_assess(problem, models, &assessment, &error);
    if (status == TML_OK) status = tml_print_assessment(nowhere, assessment, 0.1, 5, &error);
    if (status == TML_OK) status = tml_write_assessment_json(assessment, in_folder("assess.json"), &error);
    tml_assessment_free(assessment);
    tml_problem_free(problem);
    fclose(nowhere);
    return status;
}

static tml_status convert_way(const char *const *paths, size_t count) {
    static const tml_convert_format FORMATS[] = {TML_CONVERT_SHEET, TML_CONVERT_NEF, TML_CONVERT_NMR_STAR};
    static const char *const NAMES[] = {"c.sheet", "c.nef", "c.str"};
    static const tml_read_options ALIKE = {.alike_chains = true};
    tml_status status = TML_OK;
    for (int k = 0; k < 3 && status == TML_OK; k++) {
        tml_error error = {0};
        tml_problem *problem = NULL;
        status = tml_convert(paths, count, &ALIKE, FORMATS[k], in_folder(NAMES[k]), &problem, &error);
        tml_problem_free(problem);
        const char *written = NULL; /* and read again: NEF and NMR-STAR have readers of their own */
        char again[256];
        snprintf(again, sizeof again, "%s", in_folder(NAMES[k]));
        written = again;
        problem = NULL;
        if (status == TML_OK) status = tml_problem_read(&written, 1, NULL, &problem, &error);
        tml_problem_free(problem);
    }
    return status;
}

/* ---- walking them ---- */

typedef tml_status way(const char *const *paths, size_t count);
static int passed, failed;

static tml_status walk(way *go, const char *path, long fail) {
    memset(live, 0, sizeof live);
    allocations = 0;
    live_count = 0;
    fail_at = fail;
    return go(&path, 1);
}

static void expect(bool good, const char *what, const char *path, long at, tml_status status) {
    good ? passed++ : failed++;
    if (!good) printf("%s: allocation %ld of %s; status %d, %ld not freed\n", what, at, path, (int)status, live_count);
    fflush(stdout);
}

static void fail_each(way *go, const char *path, long sample) {
    walk(go, path, 0); /* makes the output files: replacing one takes other allocations than making one */
    tml_status status = walk(go, path, 0);
    long total = allocations;
    expect(status == TML_OK && live_count == 0 && total > 0, "without failure", path, total, status);
    if (status != TML_OK) return;
    long step = getenv("SOAK") != NULL || total <= sample ? 1 : total / sample;
    for (long at = 1; at <= total; at += at < sample / 4 ? 1 : step) {
        printf("%s %ld of %ld\r", path, at, total); /* the last one told is the one that crashed */
        fflush(stdout);
        status = walk(go, path, at);
        expect(status == TML_NO_MEMORY && live_count == 0, "failed", path, at, status);
    }
    printf("\n%s: %ld allocations\n", path, total);
}

int main(void) {
    if (mkdtemp(folder) == NULL) return 77;
    json_set_alloc_funcs(__wrap_malloc, __wrap_free);
    fail_each(check_way, "tests/cli/peptide.sheet", 400);
    fail_each(check_way, "tests/cli/contradicted.sheet", 400);
    fail_each(build_way, "tests/cli/five-ring.sheet", 200);
    fail_each(build_way, "tests/cli/peptide.sheet", 60);
    fail_each(check_way, "restraints/quill.sheet", 600);
    fail_each(table_way, "tests/cli/peptide.sheet", 300);
    fail_each(derive_way, "tests/fuzz/corpus/coordinates/peptide.pdb", 300);
    fail_each(derive_way, "tests/fuzz/corpus/coordinates/peptide.cif", 300);
    char models[256];
    snprintf(models, sizeof models, "%s", in_folder("models.pdb"));
    fail_each(compare_way, models, 500);
    static const char PAIR[] = "sheet 1\nsequence A 1 GLY VAL GLY\nsequence B 1 GLY VAL GLY\nsequence C 1 DG DC\natom X bead\n"
                               "list one\nlimit A:1:HAx A:2:HGx% 1.8 5 as 1\nlimit A:1:HAy B:2:HGy% 1.8 5 as 1\n"
                               "list two\nlimit A:1:QA A:3:H,A:3:HA2 - 6 as 1 together p\nlimit C:1:H8 C:2:H6 3 6\n"
                               "dihedral A:1:C A:2:N A:2:CA A:2:C -100 -40 as phi\nchiral A:2:CA A:2:N A:2:C A:2:CB +\n";
    char pair[256];
    snprintf(pair, sizeof pair, "%s", in_folder("pair.sheet"));
    FILE *file = fopen(pair, "w");
    if (file == NULL) return 77;
    fputs(PAIR, file);
    fclose(file);
    fail_each(convert_way, pair, 500);
    fail_each(assess_way, pair, 300);
    fail_each(build_way, pair, 60);
    const char *const names[] = {"pair.sheet", "c.sheet", "c.nef", "c.str", "given.pdb", "assess.json", "derived.sheet", "check.json", "bounds.gz", "m.pdb", "m.cif.gz", "build.json",
                                 "models.pdb", "reference.pdb", "compare.json"};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) unlink(in_folder(names[i]));
    if (rmdir(folder) != 0) expect(false, "partial files are left", folder, 0, TML_OK);
    printf("%d passed, %d failed\n", passed, failed);
    return failed != 0;
}
