/* Any bytes as an input file, all the way to the findings: read, smooth, prove, report; and written as every kind of input. Only small
 * problems are smoothed, so that the fuzzer spends its time on inputs and not on arithmetic. */
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <unistd.h>

#include "bounds/bounds.h"
#include "output/output.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

/* One nameless file for the whole process, rewritten for each input. */
static const char *with_content(const uint8_t *data, size_t size) {
    static char path[64];
    static int file = -1;
    if (file < 0) {
        char name[] = "/tmp/trammel-fuzz-XXXXXX";
        file = mkstemp(name);
        if (file < 0 || unlink(name) != 0) abort();
        snprintf(path, sizeof path, "/proc/self/fd/%d", file);
    }
    if (ftruncate(file, 0) != 0 || pwrite(file, data, size, 0) != (ssize_t)size) abort();
    return path;
}

static void report(const tml_problem *problem) {
    enum { ATOMS_MOST = 150 };
    tml_error error = {0};
    tml_bounds *bounds = NULL;
    tml_contradictions found = {0};
    if (problem->molecule.atom_count > ATOMS_MOST) return;
    tml_status status = tml_bounds_prepare(problem, 1, NULL, &bounds, &found, &error);
    if (status == TML_OK || status == TML_CONTRADICTED) {
        FILE *nowhere = fopen("/dev/null", "w");
        if (nowhere == NULL) abort();
        if (tml_print_check(nowhere, problem, &found, NULL, &error) != TML_OK) abort();
        fclose(nowhere);
        if (tml_write_check_json(problem, &found, NULL, NULL, "/dev/null", &error) != TML_OK) abort();
    } else if (error.message[0] == '\0') {
        abort(); /* a failure without a reason */
    }
    tml_contradictions_clear(&found);
    tml_bounds_free(bounds);
}

/* What can be read can be written as every kind of input. */
static void convert(const char *path) {
    for (tml_convert_format format = TML_CONVERT_SHEET; format <= TML_CONVERT_NMR_STAR; format++) {
        tml_error error = {0};
        tml_problem *problem;
        if (tml_convert(&path, 1, NULL, format, "/dev/null", &problem, &error) != TML_OK) abort();
        tml_problem_free(problem);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    tml_error error = {0};
    tml_problem *problem = NULL;
    const char *path = with_content(data, size);
    tml_status status = tml_problem_read(&path, 1, NULL, &problem, &error);
    if (status == TML_OK) {
        report(problem);
        convert(path);
    } else if (error.message[0] == '\0' || (status != TML_BAD_INPUT && status != TML_TOO_LARGE)) {
        abort();
    }
    tml_problem_free(problem);
    return 0;
}
