/* convert.c: `trammel convert`: inputs as one sheet, NEF or NMR-STAR file. */
#include <stdio.h>
#include <string.h>

#include "cli/command.h"

static const char HELP[] =
    "usage: trammel convert [options] INPUT... -o FILE\n"
    "\n"
    "Reads the inputs and writes what they say of the molecule and its restraints as one file, names as they were written. What\n"
    "the format cannot hold is told on standard error. '-' as an input is standard input.\n"
    "\n"
    "  -o, --output FILE        write to FILE: .sheet, .nef (NEF 1.1) or .str (NMR-STAR 3.1), .gz after it compresses; '-' with\n"
    "                           --format\n"
    "      --format sheet|nef|nmr-star  the format where the name of FILE does not tell it\n"
    "      --strict             exit status 1 where the format cannot hold something, or restraints name unknown atoms\n"
    TML_READ_HELP
    "      --help               print this\n"
    "\n"
    "Exit status: 0 done, 1 with --strict something is not held, 2 bad input or usage, 3 the machine failed.\n";

typedef struct settings { const char *output; tml_convert_format format; bool strict; tml_read_options read; } settings;

static int run_convert(const tml_command *self, int argc, char **argv);
const tml_command tml_command_convert = {"convert", "inputs as one sheet, NEF or NMR-STAR file", HELP, run_convert};

/* Returns -1 to go on, or the exit status. */
static int parse(const tml_command *self, int argc, char **argv, settings *set) {
    enum { FORMAT = TML_OPTION_OWN, STRICT };
    static const struct { const char *word; tml_convert_format format; } FORMATS[] = {
        {"sheet", TML_CONVERT_SHEET}, {"nef", TML_CONVERT_NEF}, {"nmr-star", TML_CONVERT_NMR_STAR}};
    static const struct option OPTIONS[] = {{"output", required_argument, NULL, 'o'},
                                            {"format", required_argument, NULL, FORMAT},
                                            {"strict", no_argument, NULL, STRICT},
                                            TML_READ_OPTIONS,
                                            {"help", no_argument, NULL, TML_OPTION_HELP},
                                            {NULL, 0, NULL, 0}};
    int status;
    for (;;) {
        int got = getopt_long(argc, argv, ":o:", OPTIONS, NULL);
        if (got == -1) return -1;
        if (tml_cli_read_option(self, got, optarg, &set->read, &status)) {
            if (status >= 0) return status;
            continue;
        }
        switch (got) {
        case 'o': set->output = optarg; break;
        case FORMAT:
            for (size_t i = 0; i < sizeof FORMATS / sizeof *FORMATS; i++)
                if (strcmp(optarg, FORMATS[i].word) == 0) set->format = FORMATS[i].format;
            if (set->format == TML_CONVERT_UNKNOWN) return tml_cli_usage(self, "--format takes sheet, nef or nmr-star, not '%s'.", optarg);
            break;
        case STRICT: set->strict = true; break;
        case TML_OPTION_HELP: return tml_cli_help(self);
        default: return tml_cli_bad_option(self, got, argv, OPTIONS);
        }
    }
}

/* What the inputs hold beyond what is written, and what the format cannot hold; whether there was any of the latter. */
static bool tell_notes(const tml_problem *problem) {
    bool any = problem->restraints.unmapped_count > 0;
    for (size_t i = 0; i < problem->note_count; i++) {
        const char *text = problem->notes[i].text;
        bool lost = strncmp(text, TML_NOT_HELD, strlen(TML_NOT_HELD)) == 0, unused = strstr(text, "not used") != NULL;
        any = any || lost;
        if (lost || unused) tml_cli_remark("%s", text);
    }
    if (problem->restraints.unmapped_count > 0)
        tml_cli_remark("%d restraints name atoms that the molecule lacks; they are written as they are.", problem->restraints.unmapped_count);
    return any;
}

static int run_convert(const tml_command *self, int argc, char **argv) {
    settings set = {0};
    int exit_status = parse(self, argc, argv, &set);
    if (exit_status >= 0) return exit_status;
    char *const *inputs = argv + optind;
    int count = argc - optind;
    if (!tml_cli_inputs_good(self, inputs, count)) return TML_EXIT_USAGE;
    if (set.output == NULL) return tml_cli_usage(self, "No output is named; add -o FILE, with .sheet, .nef or .str at its end.");
    tml_convert_format by_name = tml_convert_format_of(set.output);
    if (set.format == TML_CONVERT_UNKNOWN) set.format = by_name;
    if (set.format == TML_CONVERT_UNKNOWN)
        return tml_cli_usage(self, "'%s' does not tell the format: end it in .sheet, .nef or .str (.gz after it), or add --format.", set.output);
    if (by_name != TML_CONVERT_UNKNOWN && by_name != set.format)
        return tml_cli_usage(self, "--format and the name '%s' tell different formats.", set.output);
    if (!tml_cli_output_good(self, set.output, inputs, count, &exit_status)) return exit_status;
    tml_error error = {0};
    tml_problem *problem;
    tml_status status = tml_convert((const char *const *)inputs, (size_t)count, &set.read, set.format, set.output, &problem, &error);
    if (status != TML_OK) return tml_cli_finish(tml_cli_failed(&error));
    bool lost = tell_notes(problem);
    tml_problem_free(problem);
    return tml_cli_finish(lost && set.strict ? TML_EXIT_FINDING : TML_EXIT_DONE);
}
