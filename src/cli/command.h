/* command.h: what the commands share: their table entry, exit statuses, option values, messages, progress and signals.
 *
 * Only this room prints messages and decides exit statuses. Results go to files or standard output, everything else to
 * standard error.
 */
#ifndef TML_COMMAND_H
#define TML_COMMAND_H

#include <getopt.h>

#include "input/problem.h"

/* One command. Its file, named after it, holds the only definition; main.c has the table. */
typedef struct tml_command {
    const char *name;
    const char *purpose; /* one line, for the list of commands */
    const char *help;    /* the whole text of --help, ended by a newline */
    int (*run)(const struct tml_command *self, int argc, char **argv); /* argv[0] is the command's name; gives the exit status */
} tml_command;

extern const tml_command tml_command_convert, tml_command_assess, tml_command_build, tml_command_check, tml_command_bounds, tml_command_derive, tml_command_compare;

enum { TML_EXIT_DONE = 0, TML_EXIT_FINDING = 1, TML_EXIT_USAGE = 2, TML_EXIT_MACHINE = 3 };

/* Long options that have no letter start here in the commands' getopt tables; --help is common to all. */
enum {
    TML_OPTION_HELP = 1000,
    TML_OPTION_STEREO,
    TML_OPTION_ALIKE,
    TML_OPTION_PSEUDO,
    TML_OPTION_TABLE,
    TML_OPTION_COLUMNS,
    TML_OPTION_TABLE_FORM,
    TML_OPTION_OLD_NAMES,
    TML_OPTION_OWN
};

/* How inputs are read: options of every command that reads some. Entries for its getopt table, lines for its help, and their
 * taking: *status is -1 to go on, or the exit status after a message. false where `got` is none of them. The tables that they name
 * are kept in command.c, once for the one command of a run. */
#define TML_READ_OPTIONS                                                                                                \
    {"stereo", required_argument, NULL, TML_OPTION_STEREO}, {"alike", no_argument, NULL, TML_OPTION_ALIKE},             \
        {"pseudo", required_argument, NULL, TML_OPTION_PSEUDO},                                                         \
        {"table", required_argument, NULL, TML_OPTION_TABLE},                                                           \
        {"columns", required_argument, NULL, TML_OPTION_COLUMNS},                                                       \
        {"table-form", required_argument, NULL, TML_OPTION_TABLE_FORM},                                                 \
        {"old-names", required_argument, NULL, TML_OPTION_OLD_NAMES}
#define TML_READ_HELP                                                                                                   \
    "      --stereo open|sum    names with x and y, as HBx: every model takes the assignment of x and y that it violates\n"  \
    "                           least (default), or both members of the pair count, summed\n"                            \
    "      --alike              chains of the same residues take the same shape, as with the sheet's statement\n"       \
    "      --pseudo sum|centre|corrected  pseudo-atoms (QB, MD1) count as the sum over their group (default), or from its\n" \
    "                           centre, with upper limits as they are or widened by the published corrections\n"           \
    "      --table FILE         read restraints from the table FILE, too; it needs --columns\n"                            \
    "      --columns WORDS      what the columns of the table before it hold, in their order, such as \"chain_1\n"         \
    "                           residue_1 atom_1 chain_2 residue_2 atom_2 lower upper id\"; '-' passes over one,\n"        \
    "                           upper@dmax finds one by its heading, chain=A holds for all rows\n"                         \
    "      --table-form WORDS   how it is written: tab, comma, semicolon, bar or blanks; decimal-comma; nm; heading or\n"  \
    "                           no-heading; comment=X\n"                                                                   \
    "      --old-names MAPPING  turn old atom names of the table before it, or of the other inputs where it comes\n"       \
    "                           before all tables, into present ones: hydrogens-1-2, hydrogens-1-2-crossed or a file\n"
bool tml_cli_read_option(const tml_command *command, int got, const char *value, tml_read_options *options, int *status);

enum { TML_CLI_THREADS_MOST = 1024 };

/* --help of a command: prints it; the exit status. */
int tml_cli_help(const tml_command *command);

/* A usage error: "trammel COMMAND: message", then where help is found; always TML_EXIT_USAGE. */
int tml_cli_usage(const tml_command *command, const char *format, ...) __attribute__((format(printf, 2, 3)));

/* After getopt_long returned '?' or ':': says which option is unknown or ambiguous or has a value too few or too many;
 * TML_EXIT_USAGE. The string of letters starts with ':', so that getopt itself stays silent. */
int tml_cli_bad_option(const tml_command *command, int got, char **argv, const struct option *options);

/* Option values: the whole text must be a number within the limits; otherwise a message is printed and false returned. */
bool tml_cli_integer(const tml_command *command, const char *option, const char *text, long long low, long long high,
                     long long *value);
bool tml_cli_seed(const tml_command *command, const char *option, const char *text, uint64_t *value);
bool tml_cli_real(const tml_command *command, const char *option, const char *text, double low, double high, double *value);

/* Print an error as "trammel: file:line:column: message"; the exit status that belongs to it: 2 for bad input, 3 for memory
 * and I/O, 128 + signal after an interruption. A TML_TOO_LARGE is 3; what a format cannot hold is for the caller to turn
 * into 2. */
int tml_cli_failed(const tml_error *error);

/* A remark on standard error: "trammel: …". */
void tml_cli_remark(const char *format, ...) __attribute__((format(printf, 1, 2)));

/* Inputs as the command line gives them: at least one, standard input at most once, tables with their columns. false after a
 * message. */
bool tml_cli_inputs_good(const tml_command *command, char *const *inputs, int count);

/* An output path, before any work: no directory, in a folder that can be written, none of the inputs and tables. *exit_status is set
 * and a message printed where it is not. "-" and NULL are always good. */
bool tml_cli_output_good(const tml_command *command, const char *path, char *const *inputs, int count, int *exit_status);

/* Read inputs into one problem; with `strict`, a restraint that names unknown atoms is an error. The exit status, after a
 * message if that is not TML_EXIT_DONE; *out is then NULL. */
int tml_cli_read(char *const *inputs, int count, const tml_read_options *options, bool strict, tml_problem **out);

/* Watch the work: progress on standard error if it is a terminal or if `progress` is set; stops at SIGINT and SIGTERM. */
tml_watch tml_cli_watch(bool progress);
void tml_cli_progress_end(void); /* clears the progress line before other messages */

/* The last thing of a command: flushes standard output (3 when that fails) and turns an interruption into 128 + signal. */
int tml_cli_finish(int exit_status);

#endif
