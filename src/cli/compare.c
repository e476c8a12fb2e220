/* compare.c: `trammel compare`: how far models agree with each other, and with a reference. */
#include <stdio.h>
#include <string.h>

#include "cli/command.h"
#include "ensemble/compare.h"
#include "input/selection.h"
#include "output/output.h"

static const char HELP[] =
    "usage: trammel compare [options] MODELS [REFERENCE]\n"
    "\n"
    "Superposes models (PDB or mmCIF) on the part of them that holds together, and tells how far they are from each other, from\n"
    "their mean and from a reference; how far each atom and residue strays; which model is nearest to all others (the medoid);\n"
    "and which models are alike. Of a reference with several models its own medoid is taken. '-' is standard input.\n"
    "\n"
    "      --core WHERE    where to superpose: stretches of residues, joined by commas, such as A:8-69,B:8-68 or A (a chain);\n"
    "                      all; spread: the residues whose chosen atoms hold together within 1.5 Å, found by turns of\n"
    "                      superposition (the default); order: those with order parameters of phi and psi of at least 0.9\n"
    "      --atoms WORDS   what to superpose, words joined by commas: backbone (default; N, CA, C of amino acids; P, O5', C5',\n"
    "                      C4', C3', O3' of nucleotides; all heavy atoms where there are neither), heavy, all, hydrogens, @ and\n"
    "                      an element's symbol (@C), or an atom's name, with * for anything and % for digits\n"
    "      --cut A         join clusters up to a mean distance of A (default: where a penalty for wide and for many clusters\n"
    "                      is least)\n"
    "      --json FILE     write the figures as JSON to FILE, too, the distances between all models and the spread of every\n"
    "                      atom among them; '-' writes them to standard output, without the report\n"
    "  -t, --threads T     use T threads (default: all)\n"
    "      --progress      tell the progress on standard error even if that is no terminal\n"
    "      --help          print this\n"
    "\n"
    "Atoms are matched by chain, residue number and name; waters take no part. Chains of the reference with other codes are\n"
    "found by their residues, and alike chains are exchanged where that fits better.\n"
    "Exit status: 0 done, 2 bad input or usage, 3 the machine failed.\n";

typedef struct settings { const char *json; tml_compare_options compare; bool progress; } settings;

static int run_compare(const tml_command *self, int argc, char **argv);
const tml_command tml_command_compare = {"compare", "how far models agree with each other and with a reference", HELP,
                                         run_compare};

/* Words that the library checks; false after a message. */
static bool take_words(const tml_command *self, const char *option, const char *value,
                       tml_status (*check)(const char *, tml_error *), const char **words) {
    tml_error error = {0};
    *words = value;
    if (check(value, &error) == TML_OK) return true;
    tml_cli_usage(self, "%s: %s.", option, error.message);
    return false;
}

/* Returns -1 to go on, or the exit status. */
static int parse(const tml_command *self, int argc, char **argv, settings *set) {
    enum { CORE = TML_OPTION_OWN, ATOMS, CUT, JSON, PROGRESS };
    static const double LONGEST = 1e6; /* Å */
    static const struct option OPTIONS[] = {{"core", required_argument, NULL, CORE},
                                            {"atoms", required_argument, NULL, ATOMS},
                                            {"cut", required_argument, NULL, CUT},
                                            {"json", required_argument, NULL, JSON},
                                            {"threads", required_argument, NULL, 't'},
                                            {"progress", no_argument, NULL, PROGRESS},
                                            {"help", no_argument, NULL, TML_OPTION_HELP},
                                            {NULL, 0, NULL, 0}};
    for (;;) {
        long long number = 0;
        bool good = true;
        int got = getopt_long(argc, argv, ":t:", OPTIONS, NULL);
        if (got == -1) return -1;
        switch (got) {
        case CORE: good = take_words(self, "--core", optarg, tml_core_check, &set->compare.core); break;
        case ATOMS: good = take_words(self, "--atoms", optarg, tml_selection_check, &set->compare.atoms); break;
        case CUT: good = tml_cli_real(self, "--cut", optarg, 0.0, LONGEST, &set->compare.cut); break;
        case JSON: set->json = optarg; break;
        case 't':
            good = tml_cli_integer(self, "--threads", optarg, 1, TML_CLI_THREADS_MOST, &number);
            set->compare.threads = (int)number;
            break;
        case PROGRESS: set->progress = true; break;
        case TML_OPTION_HELP: return tml_cli_help(self);
        default: return tml_cli_bad_option(self, got, argv, OPTIONS);
        }
        if (!good) return TML_EXIT_USAGE;
    }
}

static int run_compare(const tml_command *self, int argc, char **argv) {
    settings set = {0};
    tml_compare_defaults(&set.compare);
    int exit_status = parse(self, argc, argv, &set);
    if (exit_status >= 0) return exit_status;
    char *const *inputs = argv + optind;
    int count = argc - optind;
    if (!tml_cli_inputs_good(self, inputs, count)) return TML_EXIT_USAGE;
    if (count > 2) return tml_cli_usage(self, "One file of models and one reference are taken, not %d files.", count);
    if (!tml_cli_output_good(self, set.json, inputs, count, &exit_status)) return exit_status;
    tml_watch watch = tml_cli_watch(set.progress);
    tml_error error = {0};
    tml_comparison *comparison = NULL;
    bool to_stdout = set.json != NULL && strcmp(set.json, "-") == 0;
    tml_status status = tml_compare(inputs[0], count > 1 ? inputs[1] : NULL, &set.compare, &watch, &comparison, &error);
    tml_cli_progress_end();
    if (status == TML_OK && !to_stdout) status = tml_print_comparison(stdout, comparison, &error);
    if (status == TML_OK && set.json != NULL) status = tml_write_comparison_json(comparison, set.json, &error);
    tml_comparison_free(comparison);
    return tml_cli_finish(status == TML_OK ? TML_EXIT_DONE : tml_cli_failed(&error));
}
