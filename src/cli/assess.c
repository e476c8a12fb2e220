/* assess.c: `trammel assess`: models that anybody made, measured against restraints and geometry. */
#include <stdio.h>
#include <string.h>

#include "cli/command.h"
#include "ensemble/assess.h"
#include "output/output.h"

static const char HELP[] =
    "usage: trammel assess [options] MODELS INPUT...\n"
    "\n"
    "Measures models (PDB or mmCIF, whoever made them) against the restraints and the molecule of the inputs: violations of each\n"
    "restraint in each model, by size and range; bonds, angles, planes, hands, names of prochiral atoms, peptide bonds, overlaps,\n"
    "backbone torsions; residues that the models agree on. '-' as one of the files is standard input.\n"
    "\n"
    "      --json FILE          write all of it as JSON to FILE, too; '-' writes it to standard output, without the report\n"
    "      --over X             a distance counts as violated beyond X Å (default 0.1)\n"
    "      --over-angle X       a dihedral counts as violated beyond X degrees (default 5)\n"
    "      --strict             a restraint that names unknown atoms is an error\n"
    TML_READ_HELP
    "                           (assess counts both members unless --stereo open is given)\n"
    "      --progress           tell the progress on standard error even if that is no terminal\n"
    "      --help               print this\n"
    "\n"
    "Exit status: 0 no restraint is violated, 1 some are, 2 bad input or usage, 3 the machine failed.\n";

typedef struct settings { const char *json; double over, over_angle; bool strict, progress; tml_read_options read; } settings;

static int run_assess(const tml_command *self, int argc, char **argv);
const tml_command tml_command_assess = {"assess", "given models against restraints and geometry", HELP, run_assess};

/* Returns -1 to go on, or the exit status. */
static int parse(const tml_command *self, int argc, char **argv, settings *set) {
    enum { JSON = TML_OPTION_OWN, OVER, OVER_ANGLE, STRICT, PROGRESS };
    static const struct option OPTIONS[] = {{"json", required_argument, NULL, JSON},
                                            {"over", required_argument, NULL, OVER},
                                            {"over-angle", required_argument, NULL, OVER_ANGLE},
                                            {"strict", no_argument, NULL, STRICT},
                                            {"progress", no_argument, NULL, PROGRESS},
                                            TML_READ_OPTIONS,
                                            {"help", no_argument, NULL, TML_OPTION_HELP},
                                            {NULL, 0, NULL, 0}};
    int status;
    for (;;) {
        int got = getopt_long(argc, argv, ":", OPTIONS, NULL);
        if (got == -1) return -1;
        if (tml_cli_read_option(self, got, optarg, &set->read, &status)) {
            if (status >= 0) return status;
            continue;
        }
        switch (got) {
        case JSON: set->json = optarg; break;
        case OVER:
            if (!tml_cli_real(self, "--over", optarg, 0.0, 1e6, &set->over)) return TML_EXIT_USAGE;
            break;
        case OVER_ANGLE:
            if (!tml_cli_real(self, "--over-angle", optarg, 0.0, 180.0, &set->over_angle)) return TML_EXIT_USAGE;
            break;
        case STRICT: set->strict = true; break;
        case PROGRESS: set->progress = true; break;
        case TML_OPTION_HELP: return tml_cli_help(self);
        default: return tml_cli_bad_option(self, got, argv, OPTIONS);
        }
    }
}

static bool any_over(const tml_assessment *a, double over, double over_angle) {
    const tml_restraints *restraints = &a->problem->restraints;
    for (size_t i = 0; i < (size_t)restraints->distance_count * (size_t)a->model_count; i++)
        if (a->distance[i] > over) return true;
    for (size_t i = 0; i < (size_t)restraints->dihedral_count * (size_t)a->model_count; i++)
        if (a->dihedral[i] > over_angle) return true;
    return false;
}

static int assess_and_report(const settings *set, const tml_problem *problem, const char *models) {
    tml_error error = {0};
    tml_assessment *assessment = NULL;
    int exit_status = TML_EXIT_DONE;
    bool to_stdout = set->json != NULL && strcmp(set->json, "-") == 0;
    tml_status status = tml_assess(problem, models, &assessment, &error);
    if (status == TML_OK && !to_stdout) status = tml_print_assessment(stdout, assessment, set->over, set->over_angle, &error);
    if (status == TML_OK && set->json != NULL) status = tml_write_assessment_json(assessment, set->json, &error);
    if (status != TML_OK)
        exit_status = tml_cli_failed(&error);
    else if (any_over(assessment, set->over, set->over_angle))
        exit_status = TML_EXIT_FINDING;
    tml_assessment_free(assessment);
    return exit_status;
}

static int run_assess(const tml_command *self, int argc, char **argv) {
    settings set = {.over = 0.1, .over_angle = 5, .read = {.sum_stereo_pairs = true}};
    int exit_status = parse(self, argc, argv, &set);
    if (exit_status >= 0) return exit_status;
    char *const *inputs = argv + optind;
    int count = argc - optind;
    if (count == 1 && set.read.table_count == 0) return tml_cli_usage(self, "The models come first, then what they are measured against; '%s' stands alone.", inputs[0]);
    if (!tml_cli_inputs_good(self, inputs, count)) return TML_EXIT_USAGE;
    if (!tml_cli_output_good(self, set.json, inputs, count, &exit_status)) return exit_status;
    tml_watch watch = tml_cli_watch(set.progress);
    (void)watch;
    tml_problem *problem;
    exit_status = tml_cli_read(inputs + 1, count - 1, &set.read, set.strict, &problem);
    if (exit_status == TML_EXIT_DONE) exit_status = assess_and_report(&set, problem, inputs[0]);
    tml_problem_free(problem);
    return tml_cli_finish(exit_status);
}
