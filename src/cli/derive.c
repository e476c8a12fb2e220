/* derive.c: `trammel derive`: a sheet of limits from the coordinates of a model. */
#include <limits.h>
#include <stdio.h>
#include <string.h>

#include "cli/command.h"
#include "input/selection.h"
#include "output/sheet.h"

static const char HELP[] =
    "usage: trammel derive [options] MODELS\n"
    "\n"
    "Reads models (PDB or mmCIF) and writes a sheet with a limit for every pair of the chosen atoms that is nearer than the\n"
    "cutoff in some model: to plan measurements, and to test with limits whose answer is known. '-' is standard input.\n"
    "\n"
    "  -o, --output FILE      write the sheet to FILE; .gz compresses (default: standard output)\n"
    "      --cutoff A         pairs nearer than A (default 5)\n"
    "      --atoms WORDS      which atoms, words joined by commas: all, heavy (default), hydrogens, backbone (N, CA, C, O;\n"
    "                         P, O5', C5', C4', C3', O3' of nucleotides), @ and an element's symbol (@C), or an atom's name, with *\n"
    "                         for anything and % for digits (HB%)\n"
    "      --error E          limits E on either side of the distance (default 0.5)\n"
    "      --error-share F    F times the distance wider on either side (default 0)\n"
    "      --noise S          add normal noise of standard deviation S to each distance (default 0)\n"
    "      --keep P           keep a share P of the pairs, chosen at random (default 1)\n"
    "      --seed S           start the random numbers from S (default 1)\n"
    "      --model K          take model K alone (default: the range over all models)\n"
    "      --covalent yes|no  write the sequence with its chemistry, for the built-in amino acids; or beads, of which nothing is\n"
    "                         assumed (default yes)\n"
    "      --help             print this\n"
    "\n"
    "All lengths are in Å. Waters take no part. With --covalent yes, pairs that bonds and angles fix are not listed.\n"
    "Exit status: 0 done, 2 bad input or usage, 3 the machine failed.\n";

typedef struct settings { const char *output; tml_derive_options derive; } settings;

static int run_derive(const tml_command *self, int argc, char **argv);
const tml_command tml_command_derive = {"derive", "a sheet of limits from the coordinates of models", HELP, run_derive};

enum { CUTOFF = TML_OPTION_OWN, ATOMS, ERROR, SHARE, NOISE, KEEP, SEED, MODEL, COVALENT };

static const struct option OPTIONS[] = {{"output", required_argument, NULL, 'o'},
                                        {"cutoff", required_argument, NULL, CUTOFF},
                                        {"atoms", required_argument, NULL, ATOMS},
                                        {"error", required_argument, NULL, ERROR},
                                        {"error-share", required_argument, NULL, SHARE},
                                        {"noise", required_argument, NULL, NOISE},
                                        {"keep", required_argument, NULL, KEEP},
                                        {"seed", required_argument, NULL, SEED},
                                        {"model", required_argument, NULL, MODEL},
                                        {"covalent", required_argument, NULL, COVALENT},
                                        {"help", no_argument, NULL, TML_OPTION_HELP},
                                        {NULL, 0, NULL, 0}};

static bool take_model(const tml_command *self, const char *value, int32_t *model) {
    long long number;
    if (!tml_cli_integer(self, "--model", value, 1, INT_MAX, &number)) return false;
    *model = (int32_t)(number - 1);
    return true;
}

static bool take_covalent(const tml_command *self, const char *value, bool *covalent) {
    *covalent = strcmp(value, "yes") == 0;
    if (*covalent || strcmp(value, "no") == 0) return true;
    tml_cli_usage(self, "--covalent takes yes or no, not '%s'.", value);
    return false;
}

static bool take_atoms(const tml_command *self, const char *value, const char **atoms) {
    tml_error error = {0};
    *atoms = value;
    if (tml_selection_check(value, &error) == TML_OK) return true;
    tml_cli_usage(self, "--atoms: %s.", error.message);
    return false;
}

/* The option `got`: false after a message. */
static bool take_option(const tml_command *self, int got, const char *value, settings *set) {
    static const double LONGEST = 1e6; /* Å */
    tml_derive_options *derive = &set->derive;
    switch (got) {
    case 'o': set->output = value; return true;
    case CUTOFF: return tml_cli_real(self, "--cutoff", value, 0.0, LONGEST, &derive->cutoff);
    case ATOMS: return take_atoms(self, value, &derive->atoms);
    case ERROR: return tml_cli_real(self, "--error", value, 0.0, LONGEST, &derive->error);
    case SHARE: return tml_cli_real(self, "--error-share", value, 0.0, 1.0, &derive->fraction);
    case NOISE: return tml_cli_real(self, "--noise", value, 0.0, LONGEST, &derive->noise);
    case KEEP: return tml_cli_real(self, "--keep", value, 0.0, 1.0, &derive->keep);
    case SEED: return tml_cli_seed(self, "--seed", value, &derive->seed);
    case MODEL: return take_model(self, value, &derive->model);
    default: return take_covalent(self, value, &derive->covalent); /* COVALENT, the last in the table */
    }
}

/* Returns -1 to go on, or the exit status. */
static int parse(const tml_command *self, int argc, char **argv, settings *set) {
    for (;;) {
        int got = getopt_long(argc, argv, ":o:", OPTIONS, NULL);
        if (got == -1) return -1;
        if (got == TML_OPTION_HELP) return tml_cli_help(self);
        if (got == '?' || got == ':') return tml_cli_bad_option(self, got, argv, OPTIONS);
        if (!take_option(self, got, optarg, set)) return TML_EXIT_USAGE;
    }
}

static int run_derive(const tml_command *self, int argc, char **argv) {
    settings set = {"-", {.cutoff = 5.0, .atoms = "heavy", .error = 0.5, .keep = 1.0, .seed = 1, .model = -1, .covalent = true}};
    int exit_status = parse(self, argc, argv, &set);
    if (exit_status >= 0) return exit_status;
    char *const *inputs = argv + optind;
    int count = argc - optind;
    if (!tml_cli_inputs_good(self, inputs, count)) return TML_EXIT_USAGE;
    if (count > 1) return tml_cli_usage(self, "One file of models is taken, not %d.", count);
    if (!tml_cli_output_good(self, set.output, inputs, count, &exit_status)) return exit_status;
    tml_watch watch = tml_cli_watch(false);
    tml_error error = {0};
    tml_coordinates coordinates;
    tml_derived derived;
    tml_status status = tml_coordinates_read(inputs[0], &coordinates, &error);
    if (status == TML_OK) status = tml_sheet_derive(&coordinates, &set.derive, set.output, watch.stop, &derived, &error);
    tml_coordinates_clear(&coordinates);
    return tml_cli_finish(status == TML_OK ? TML_EXIT_DONE : tml_cli_failed(&error));
}
