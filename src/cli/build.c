/* build.c: `trammel build`: the main job, an ensemble of models. */
#include "ensemble/ensemble.h"

#include <limits.h>
#include <stdio.h>
#include <string.h>

#include "base/clock.h"
#include "cli/command.h"
#include "output/output.h"

static const char HELP[] =
    "usage: trammel build [options] INPUT... -o MODELS\n"
    "\n"
    "Reads the inputs as one problem and writes an ensemble of models that meet its limits, best first. '-' as an input is\n"
    "standard input.\n"
    "\n"
    "  -o, --output FILE        write the models to FILE: .pdb or .cif, .gz after it compresses; '-' with --format\n"
    "      --format pdb|cif     the format where the name of FILE does not tell it\n"
    "      --summary FILE       write a summary as JSON to FILE\n"
    "  -n, --models N           write N models (default 20)\n"
    "      --trials M           make at most M trials (default 5 N)\n"
    "      --seed S             start the random numbers from S (default 1)\n"
    "  -t, --threads T          use T threads (default: all)\n"
    "      --select lowest|first  the N best of at least 1.5 N trials (default), or the first N that pass\n"
    "      --strict             stop at the first finding: limits that contradict each other, restraints that name\n"
    "                           unknown atoms\n"
    "      --effort X           scale the length of the annealing by X, 0.01 to 100 (default 1)\n"
    "      --backbone usual|free  draw phi and psi of proteins gently to their usual regions (default), or not at all\n"
    "      --dimensions 3|4     embed in 3 dimensions (default) or 4\n"
    "      --roots K            metrize the rows of K atoms only (default: all)\n"
    TML_READ_HELP
    "      --progress           tell the progress on standard error even if that is no terminal\n"
    "      --help               print this\n"
    "\n"
    "The same inputs, seed and version give the same models with any number of threads.\n"
    "Exit status: 0 N models passed, 1 fewer did or limits contradict each other, 2 bad input or usage, 3 the machine failed.\n";

typedef struct settings {
    const char *output, *summary;
    tml_format format; /* as asked for, then as found */
    bool compressed, progress;
    tml_read_options read;
    tml_build_options build;
} settings;

static int run_build(const tml_command *self, int argc, char **argv);
const tml_command tml_command_build = {"build", "an ensemble of models that meet the limits", HELP, run_build};

/* The option `got`: false after a message. */
static bool take_option(const tml_command *self, int got, const char *value, settings *set);

enum { FORMAT = TML_OPTION_OWN, SUMMARY, TRIALS, SEED, SELECT, STRICT, EFFORT, BACKBONE, DIMENSIONS, ROOTS, PROGRESS };

static const struct option OPTIONS[] = {{"output", required_argument, NULL, 'o'},
                                        {"format", required_argument, NULL, FORMAT},
                                        {"summary", required_argument, NULL, SUMMARY},
                                        {"models", required_argument, NULL, 'n'},
                                        {"trials", required_argument, NULL, TRIALS},
                                        {"seed", required_argument, NULL, SEED},
                                        {"threads", required_argument, NULL, 't'},
                                        {"select", required_argument, NULL, SELECT},
                                        {"strict", no_argument, NULL, STRICT},
                                        {"effort", required_argument, NULL, EFFORT},
                                        {"backbone", required_argument, NULL, BACKBONE},
                                        {"dimensions", required_argument, NULL, DIMENSIONS},
                                        {"roots", required_argument, NULL, ROOTS},
                                        {"progress", no_argument, NULL, PROGRESS},
                                        TML_READ_OPTIONS,
                                        {"help", no_argument, NULL, TML_OPTION_HELP},
                                        {NULL, 0, NULL, 0}};

/* Returns -1 to go on, or the exit status. */
static int parse(const tml_command *self, int argc, char **argv, settings *set) {
    for (;;) {
        int got = getopt_long(argc, argv, ":o:n:t:", OPTIONS, NULL);
        if (got == -1) return -1;
        int status;
        if (got == TML_OPTION_HELP) return tml_cli_help(self);
        if (tml_cli_read_option(self, got, optarg, &set->read, &status)) {
            if (status >= 0) return status;
            continue;
        }
        if (got == '?' || got == ':') return tml_cli_bad_option(self, got, argv, OPTIONS);
        if (!take_option(self, got, optarg, set)) return TML_EXIT_USAGE;
    }
}

static bool take_count(const tml_command *self, const char *name, const char *value, int low, int high, int *count) {
    long long number;
    if (!tml_cli_integer(self, name, value, low, high, &number)) return false;
    *count = (int)number;
    return true;
}

static bool take_format(const tml_command *self, const char *value, tml_format *format) {
    *format = strcmp(value, "pdb") == 0 ? TML_FORMAT_PDB : strcmp(value, "cif") == 0 ? TML_FORMAT_CIF : TML_FORMAT_UNKNOWN;
    if (*format == TML_FORMAT_UNKNOWN) tml_cli_usage(self, "--format takes pdb or cif, not '%s'.", value);
    return *format != TML_FORMAT_UNKNOWN;
}

static bool take_selection(const tml_command *self, const char *value, bool *lowest) {
    *lowest = strcmp(value, "lowest") == 0;
    if (*lowest || strcmp(value, "first") == 0) return true;
    tml_cli_usage(self, "--select takes lowest or first, not '%s'.", value);
    return false;
}

static bool take_backbone(const tml_command *self, const char *value, bool *is_free) {
    *is_free = strcmp(value, "free") == 0;
    if (*is_free || strcmp(value, "usual") == 0) return true;
    tml_cli_usage(self, "--backbone takes usual or free, not '%s'.", value);
    return false;
}

static bool take_option(const tml_command *self, int got, const char *value, settings *set) {
    enum { MODELS_MOST = 9999, TRIALS_MOST = 1000000 };
    tml_build_options *build = &set->build;
    switch (got) {
    case 'o': set->output = value; return true;
    case FORMAT: return take_format(self, value, &set->format);
    case SUMMARY: set->summary = value; return true;
    case 'n': return take_count(self, "--models", value, 1, MODELS_MOST, &build->models);
    case TRIALS: return take_count(self, "--trials", value, 1, TRIALS_MOST, &build->trials);
    case SEED: return tml_cli_seed(self, "--seed", value, &build->seed);
    case 't': return take_count(self, "--threads", value, 1, TML_CLI_THREADS_MOST, &build->threads);
    case SELECT: return take_selection(self, value, &build->select_lowest);
    case STRICT: build->strict = true; return true;
    case EFFORT: return tml_cli_real(self, "--effort", value, 0.01, 100.0, &build->effort);
    case BACKBONE: return take_backbone(self, value, &build->free_backbone);
    case DIMENSIONS: return take_count(self, "--dimensions", value, 3, 4, &build->dimensions);
    case ROOTS: return take_count(self, "--roots", value, 1, INT_MAX, &build->metrize_roots);
    default: set->progress = true; return true; /* PROGRESS, the last in the table */
    }
}

/* Whether options agree with each other and outputs can be written: TML_EXIT_DONE, or the exit status after a message. */
static int settle(const tml_command *self, settings *set, char *const *inputs, int count) {
    int exit_status;
    if (!tml_cli_inputs_good(self, inputs, count)) return TML_EXIT_USAGE;
    if (set->output == NULL) return tml_cli_usage(self, "No output is named; add -o FILE, with .pdb or .cif at its end.");
    tml_format by_name = tml_format_of(set->output, &set->compressed);
    if (set->format == TML_FORMAT_UNKNOWN) set->format = by_name;
    if (set->format == TML_FORMAT_UNKNOWN && strcmp(set->output, "-") == 0)
        return tml_cli_usage(self, "Standard output needs --format pdb or --format cif.");
    if (set->format == TML_FORMAT_UNKNOWN)
        return tml_cli_usage(self, "'%s' does not tell the format: end it in .pdb or .cif (.gz after it), or add --format.",
                             set->output);
    if (by_name != TML_FORMAT_UNKNOWN && by_name != set->format)
        return tml_cli_usage(self, "--format and the name '%s' tell different formats.", set->output);
    if (set->summary != NULL && strcmp(set->summary, set->output) == 0)
        return tml_cli_usage(self, "Models and summary cannot both go to '%s'.", set->output);
    if (set->build.trials != 0 && set->build.trials < set->build.models)
        return tml_cli_usage(self, "%d trials cannot give %d models; ask for fewer with --models.", set->build.trials,
                             set->build.models);
    if (!tml_cli_output_good(self, set->output, inputs, count, &exit_status)) return exit_status;
    if (!tml_cli_output_good(self, set->summary, inputs, count, &exit_status)) return exit_status;
    return TML_EXIT_DONE;
}

/* Write what was asked for; the report goes to standard output unless that is taken. */
static tml_status write_all(const settings *set, tml_ensemble *ensemble, const tml_contradictions *found, double started,
                            tml_error *error) {
    double before = tml_seconds();
    tml_status status = tml_write_models(ensemble, found, set->output, set->format, set->compressed, error);
    if (status != TML_OK) return status;
    ensemble->timing.write = tml_seconds() - before;
    ensemble->timing.total = tml_seconds() - started;
    if (set->summary != NULL) status = tml_write_build_json(ensemble, found, set->summary, error);
    if (status != TML_OK) return status;
    bool taken = strcmp(set->output, "-") == 0 || (set->summary != NULL && strcmp(set->summary, "-") == 0);
    return taken ? TML_OK : tml_print_build(stdout, ensemble, found, error);
}

static int build_and_write(const settings *set, tml_problem *problem, const tml_watch *watch, double started) {
    tml_error error = {0};
    tml_ensemble *ensemble = NULL;
    tml_contradictions found = {0};
    int exit_status;
    double read = tml_seconds() - started;
    if (tml_format_fits(&problem->molecule, set->build.models, set->format, &error) != TML_OK) {
        tml_cli_failed(&error);
        return TML_EXIT_USAGE;
    }
    tml_status status = tml_build(problem, &set->build, watch, &ensemble, &found, &error);
    if (status == TML_CONTRADICTED && ensemble == NULL) {
        tml_cli_remark("The limits contradict each other in %zu place%s; 'trammel check' lists them. Nothing is written.",
                       found.count, found.count == 1 ? "" : "s");
        exit_status = TML_EXIT_FINDING;
    } else if (status != TML_OK && status != TML_SHORT && status != TML_CONTRADICTED) {
        exit_status = tml_cli_failed(&error);
    } else {
        exit_status = status == TML_OK ? TML_EXIT_DONE : TML_EXIT_FINDING;
        ensemble->timing.read = read;
        if (write_all(set, ensemble, &found, started, &error) != TML_OK) exit_status = tml_cli_failed(&error);
    }
    tml_ensemble_free(ensemble);
    tml_contradictions_clear(&found);
    return exit_status;
}

static int run_build(const tml_command *self, int argc, char **argv) {
    double started = tml_seconds();
    settings set = {0};
    tml_build_defaults(&set.build);
    int exit_status = parse(self, argc, argv, &set);
    if (exit_status >= 0) return exit_status;
    char *const *inputs = argv + optind;
    int count = argc - optind;
    exit_status = settle(self, &set, inputs, count);
    if (exit_status != TML_EXIT_DONE) return exit_status;
    tml_watch watch = tml_cli_watch(set.progress);
    tml_problem *problem;
    exit_status = tml_cli_read(inputs, count, &set.read, set.build.strict, &problem);
    if (exit_status == TML_EXIT_DONE) exit_status = build_and_write(&set, problem, &watch, started);
    tml_problem_free(problem);
    return tml_cli_finish(exit_status);
}
