/* check.c: `trammel check`: are the inputs consistent, and if not, which limits fight. */
#include <stdio.h>
#include <stdlib.h>

#include "cli/command.h"
#include "output/output.h"

static const char HELP[] =
    "usage: trammel check [options] INPUT...\n"
    "\n"
    "Reads the inputs as one problem, counts its restraints by kind and range, smooths all limits, and lists the restraints\n"
    "that contradict each other, each with the chain of limits that proves it, and those that name unknown atoms. '-' as an\n"
    "input is standard input.\n"
    "\n"
    "      --json FILE     write the findings as JSON to FILE, too; '-' writes them to standard output, without the report\n"
    "      --against FILE  tell, restraint by restraint, where the inputs and FILE differ in atoms and limits; the exit status\n"
    "                      stays what it is\n"
    "  -t, --threads T     use T threads (default: all)\n"
    "      --strict        a restraint that names unknown atoms is an error\n"
    "      --progress      tell the progress on standard error even if that is no terminal\n"
    TML_READ_HELP
    "      --help          print this\n"
    "\n"
    "Exit status: 0 consistent, 1 contradictions, 2 bad input or usage, 3 the machine failed.\n";

typedef struct settings { const char *json, *against; int threads; bool strict, progress; tml_read_options read; } settings;

static int run_check(const tml_command *self, int argc, char **argv);
const tml_command tml_command_check = {"check", "are the limits consistent, and if not, which ones fight", HELP, run_check};

/* Returns -1 to go on, or the exit status. */
static int parse(const tml_command *self, int argc, char **argv, settings *set) {
    enum { JSON = TML_OPTION_OWN, AGAINST, STRICT, PROGRESS };
    static const struct option OPTIONS[] = {{"json", required_argument, NULL, JSON},
                                            {"against", required_argument, NULL, AGAINST},
                                            {"threads", required_argument, NULL, 't'},
                                            {"strict", no_argument, NULL, STRICT},
                                            {"progress", no_argument, NULL, PROGRESS},
                                            TML_READ_OPTIONS,
                                            {"help", no_argument, NULL, TML_OPTION_HELP},
                                            {NULL, 0, NULL, 0}};
    long long number;
    int status;
    for (;;) {
        int got = getopt_long(argc, argv, ":t:", OPTIONS, NULL);
        if (got == -1) return -1;
        if (tml_cli_read_option(self, got, optarg, &set->read, &status)) {
            if (status >= 0) return status;
            continue;
        }
        switch (got) {
        case JSON: set->json = optarg; break;
        case AGAINST: set->against = optarg; break;
        case 't':
            if (!tml_cli_integer(self, "--threads", optarg, 1, TML_CLI_THREADS_MOST, &number)) return TML_EXIT_USAGE;
            set->threads = (int)number;
            break;
        case STRICT: set->strict = true; break;
        case PROGRESS: set->progress = true; break;
        case TML_OPTION_HELP: return tml_cli_help(self);
        default: return tml_cli_bad_option(self, got, argv, OPTIONS);
        }
    }
}

static int smooth_and_report(const settings *set, const tml_problem *problem, const tml_watch *watch) {
    tml_error error = {0};
    tml_bounds *bounds = NULL;
    tml_contradictions found = {0};
    tml_use *uses = NULL;
    tml_problem *other = NULL;
    tml_difference difference = {0};
    tml_read_options alone = set->read; /* tables belong to the inputs, not to what these are held against */
    alone.tables = NULL;
    alone.table_count = 0;
    bool to_stdout = set->json != NULL && set->json[0] == '-' && set->json[1] == '\0';
    tml_status status = tml_bounds_prepare(problem, set->threads, watch, &bounds, &found, &error);
    tml_bounds_free(bounds);
    if (status == TML_OK || status == TML_CONTRADICTED) status = TML_OK;
    if (status == TML_OK) status = tml_restraints_judge(problem, set->threads, watch, &uses, &error);
    if (status == TML_OK && set->against != NULL) status = tml_problem_read(&set->against, 1, &alone, &other, &error);
    if (status == TML_OK && set->against != NULL) status = tml_difference_find(problem, other, &difference, &error);
    if (status == TML_OK && !to_stdout) status = tml_print_check(stdout, problem, &found, uses, &error);
    if (status == TML_OK && !to_stdout && set->against != NULL) status = tml_print_difference(stdout, &difference, &error);
    if (status == TML_OK && set->json != NULL)
        status = tml_write_check_json(problem, &found, uses, set->against == NULL ? NULL : &difference, set->json, &error);
    tml_difference_clear(&difference);
    tml_problem_free(other);
    free(uses);
    int exit_status = found.count > 0 ? TML_EXIT_FINDING : TML_EXIT_DONE;
    if (status != TML_OK) exit_status = tml_cli_failed(&error);
    tml_contradictions_clear(&found);
    return exit_status;
}

static int run_check(const tml_command *self, int argc, char **argv) {
    settings set = {0};
    int exit_status = parse(self, argc, argv, &set);
    if (exit_status >= 0) return exit_status;
    char *const *inputs = argv + optind;
    int count = argc - optind;
    if (!tml_cli_inputs_good(self, inputs, count)) return TML_EXIT_USAGE;
    if (!tml_cli_output_good(self, set.json, inputs, count, &exit_status)) return exit_status;
    tml_watch watch = tml_cli_watch(set.progress);
    tml_problem *problem;
    exit_status = tml_cli_read(inputs, count, &set.read, set.strict, &problem);
    if (exit_status == TML_EXIT_DONE) exit_status = smooth_and_report(&set, problem, &watch);
    tml_problem_free(problem);
    return tml_cli_finish(exit_status);
}
