/* bounds.c: `trammel bounds`: the smoothed limits of all pairs, as a table. */
#include "bounds/bounds.h"

#include <stdio.h>

#include "cli/command.h"
#include "output/output.h"

static const char HELP[] =
    "usage: trammel bounds [options] INPUT...\n"
    "\n"
    "Reads the inputs as one problem and writes the lower and upper limit of every pair of atoms, after smoothing, as a table:\n"
    "a heading line, then atom_1, atom_2, lower and upper, apart by tabs, in Å; '-' stands for no upper limit. '-' as an input\n"
    "is standard input.\n"
    "\n"
    "  -o, --output FILE   write the table to FILE instead of standard output; .gz compresses\n"
    "  -t, --threads T     use T threads (default: all)\n"
    "      --strict        stop, without a table, when limits contradict each other or restraints name unknown atoms\n"
    TML_READ_HELP
    "      --progress      tell the progress on standard error even if that is no terminal\n"
    "      --help          print this\n"
    "\n"
    "Where limits contradict each other, the blamed ones are loosened as far as their proofs need; 'trammel check' lists them.\n"
    "Exit status: 0 done, 1 contradictions, 2 bad input or usage, 3 the machine failed.\n";

typedef struct settings { const char *output; int threads; bool strict, progress; tml_read_options read; } settings;

static int run_bounds(const tml_command *self, int argc, char **argv);
const tml_command tml_command_bounds = {"bounds", "smoothed lower and upper limits of all pairs, as a table", HELP, run_bounds};

/* Returns -1 to go on, or the exit status. */
static int parse(const tml_command *self, int argc, char **argv, settings *set) {
    enum { STRICT = TML_OPTION_OWN, PROGRESS };
    static const struct option OPTIONS[] = {{"output", required_argument, NULL, 'o'},
                                            {"threads", required_argument, NULL, 't'},
                                            {"strict", no_argument, NULL, STRICT},
                                            {"progress", no_argument, NULL, PROGRESS},
                                            TML_READ_OPTIONS,
                                            {"help", no_argument, NULL, TML_OPTION_HELP},
                                            {NULL, 0, NULL, 0}};
    long long number;
    int status;
    for (;;) {
        int got = getopt_long(argc, argv, ":o:t:", OPTIONS, NULL);
        if (got == -1) return -1;
        if (tml_cli_read_option(self, got, optarg, &set->read, &status)) {
            if (status >= 0) return status;
            continue;
        }
        switch (got) {
        case 'o': set->output = optarg; break;
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

static int smooth_and_write(const settings *set, const tml_problem *problem, const tml_watch *watch) {
    tml_error error = {0};
    tml_bounds *bounds = NULL;
    tml_contradictions found = {0};
    int exit_status;
    tml_status status = tml_bounds_prepare(problem, set->threads, watch, &bounds, &found, &error);
    if (status != TML_OK && status != TML_CONTRADICTED) {
        exit_status = tml_cli_failed(&error);
        goto end;
    }
    exit_status = found.count > 0 ? TML_EXIT_FINDING : TML_EXIT_DONE;
    if (found.count > 0)
        tml_cli_remark("The limits contradict each other in %zu place%s; 'trammel check' lists them.%s", found.count,
                       found.count == 1 ? "" : "s", set->strict ? " No table is written." : "");
    if (found.count > 0 && set->strict) goto end;
    if (tml_write_bounds(problem, bounds, set->output, &error) != TML_OK) exit_status = tml_cli_failed(&error);
end:
    tml_contradictions_clear(&found);
    tml_bounds_free(bounds);
    return exit_status;
}

static int run_bounds(const tml_command *self, int argc, char **argv) {
    settings set = {.output = "-"};
    int exit_status = parse(self, argc, argv, &set);
    if (exit_status >= 0) return exit_status;
    char *const *inputs = argv + optind;
    int count = argc - optind;
    if (!tml_cli_inputs_good(self, inputs, count)) return TML_EXIT_USAGE;
    if (!tml_cli_output_good(self, set.output, inputs, count, &exit_status)) return exit_status;
    tml_watch watch = tml_cli_watch(set.progress);
    tml_problem *problem;
    exit_status = tml_cli_read(inputs, count, &set.read, set.strict, &problem);
    if (exit_status == TML_EXIT_DONE) exit_status = smooth_and_write(&set, problem, &watch);
    tml_problem_free(problem);
    return tml_cli_finish(exit_status);
}
