/* command.c: what the commands share.
 *
 *   messages     help, usage, errors, remarks
 *   options      numbers from the command line
 *   paths        inputs and outputs, before any work
 *   reading      tables and other options, and all inputs into one problem
 *   watching     progress, signals, the end of a run
 */
#include "cli/command.h"

#include <ctype.h>
#include <errno.h>
#include <limits.h>
#include <math.h>
#include <signal.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/clock.h"

/* ---- messages ---- */

/* Names and words of the inputs may hold anything; a terminal shall not act on it. */
static void print_plainly(const char *text, FILE *out) {
    for (const unsigned char *at = (const unsigned char *)text; *at != '\0'; at++)
        fputc(*at < ' ' || *at == 127 ? '?' : *at, out);
}

int tml_cli_help(const tml_command *command) {
    fputs(command->help, stdout);
    return tml_cli_finish(TML_EXIT_DONE);
}

int tml_cli_usage(const tml_command *command, const char *format, ...) {
    char text[2048];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(text, sizeof text, format, arguments);
    va_end(arguments);
    fprintf(stderr, "trammel %s: ", command->name);
    print_plainly(text, stderr);
    fprintf(stderr, "\nTry 'trammel %s --help'.\n", command->name);
    return TML_EXIT_USAGE;
}

int tml_cli_bad_option(const tml_command *command, int got, char **argv, const struct option *options) {
    const struct option *known = options;
    while (known->name != NULL && known->val != optopt) known++;
    if (known->name != NULL && got == ':') return tml_cli_usage(command, "--%s needs a value.", known->name);
    if (known->name != NULL) return tml_cli_usage(command, "--%s takes no value.", known->name);
    if (optopt != 0) return tml_cli_usage(command, "-%c is no option here.", optopt);
    const char *word = argv[optind - 1];
    int length = (int)strcspn(word, "="), matches = 0;
    for (known = options; known->name != NULL; known++) matches += strncmp(known->name, word + 2, (size_t)length - 2) == 0;
    if (matches > 1) return tml_cli_usage(command, "%.*s could be more than one option.", length, word);
    return tml_cli_usage(command, "%.*s is no option here.", length, word);
}

void tml_cli_remark(const char *format, ...) {
    char text[2048];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(text, sizeof text, format, arguments);
    va_end(arguments);
    tml_cli_progress_end();
    fputs("trammel: ", stderr);
    print_plainly(text, stderr);
    fputc('\n', stderr);
}

static int interrupted_by(void);

static int exit_status_of(tml_status status) {
    switch (status) {
    case TML_OK: return TML_EXIT_DONE;
    case TML_CONTRADICTED:
    case TML_SHORT: return TML_EXIT_FINDING;
    case TML_BAD_INPUT: return TML_EXIT_USAGE;
    case TML_TOO_LARGE:
    case TML_NO_MEMORY:
    case TML_IO:
    case TML_INTERRUPTED: break;
    }
    return TML_EXIT_MACHINE;
}

int tml_cli_failed(const tml_error *error) {
    int signal_number = interrupted_by();
    if (signal_number != 0) return 128 + signal_number;
    const char *message = error->message[0] != '\0' ? error->message : "something failed, and no reason was given";
    if (error->file[0] == '\0') {
        tml_cli_remark("%s", message);
    } else if (error->line <= 0) {
        tml_cli_remark("%s: %s", error->file, message);
    } else if (error->column <= 0) {
        tml_cli_remark("%s:%ld: %s", error->file, error->line, message);
    } else {
        tml_cli_remark("%s:%ld:%ld: %s", error->file, error->line, error->column, message);
    }
    return exit_status_of(error->status);
}

/* ---- options ---- */

/* strtol and strtod skip leading blanks; a value with blanks is more often a slip than a wish. */
static bool starts_like_number(const char *text) {
    return *text != '\0' && !isspace((unsigned char)*text);
}

bool tml_cli_integer(const tml_command *command, const char *option, const char *text, long long low, long long high,
                     long long *value) {
    char *end = NULL;
    errno = 0;
    long long read = starts_like_number(text) ? strtoll(text, &end, 10) : 0;
    if (end == NULL || end == text || *end != '\0') {
        tml_cli_usage(command, "%s takes a whole number, not '%s'.", option, text);
        return false;
    }
    if (errno == ERANGE || read < low || read > high) {
        tml_cli_usage(command, "%s takes a number from %lld to %lld, not %s.", option, low, high, text);
        return false;
    }
    *value = read;
    return true;
}

bool tml_cli_seed(const tml_command *command, const char *option, const char *text, uint64_t *value) {
    char *end = NULL;
    errno = 0;
    unsigned long long read = isdigit((unsigned char)*text) ? strtoull(text, &end, 10) : 0;
    if (end == NULL || *end != '\0' || errno == ERANGE) {
        tml_cli_usage(command, "%s takes a whole number from 0 to %llu, not '%s'.", option, ULLONG_MAX, text);
        return false;
    }
    *value = read;
    return true;
}

bool tml_cli_real(const tml_command *command, const char *option, const char *text, double low, double high, double *value) {
    char *end = NULL;
    double read = starts_like_number(text) ? strtod(text, &end) : 0.0;
    if (end == NULL || end == text || *end != '\0' || isnan(read)) {
        tml_cli_usage(command, "%s takes a number, not '%s'.", option, text);
        return false;
    }
    if (!(read >= low && read <= high)) {
        tml_cli_usage(command, "%s takes a number from %g to %g, not %s.", option, low, high, text);
        return false;
    }
    *value = read;
    return true;
}

/* ---- paths ---- */

/* The tables that the command line names. */
enum { TABLES_MOST = 64 };
static tml_table tables[TABLES_MOST];
static size_t table_count;

bool tml_cli_inputs_good(const tml_command *command, char *const *inputs, int count) {
    if (count == 0) {
        tml_cli_usage(command, "No input is named.");
        return false;
    }
    int standard = 0;
    for (int i = 0; i < count; i++) standard += strcmp(inputs[i], "-") == 0;
    for (size_t i = 0; i < table_count; i++) standard += strcmp(tables[i].path, "-") == 0;
    for (size_t i = 0; i < table_count; i++) {
        if (tables[i].columns != NULL) continue;
        tml_cli_usage(command, "The table '%s' needs --columns after it, to say what they hold.", tables[i].path);
        return false;
    }
    if (standard <= 1) return true;
    tml_cli_usage(command, "Standard input, '-', can be read only once.");
    return false;
}

/* The folder of `path` with its last '/', or "." where there is none. NULL without memory. */
static char *folder_of(const char *path) {
    const char *slash = strrchr(path, '/');
    return slash == NULL ? strdup(".") : strndup(path, (size_t)(slash - path) + 1);
}

static int refuse_output(const char *path, const char *reason, int exit_status) {
    tml_cli_remark("%s: %s", path, reason);
    return exit_status;
}

/* Whether a file that is there is also read. */
static bool is_read(const struct stat *file, const char *path) {
    struct stat in;
    return strcmp(path, "-") != 0 && stat(path, &in) == 0 && in.st_dev == file->st_dev && in.st_ino == file->st_ino;
}

static int judge_output(const tml_command *command, const char *path, char *const *inputs, int count) {
    struct stat out;
    bool read = false;
    if (*path == '\0') return tml_cli_usage(command, "The name of an output file is empty.");
    bool exists = stat(path, &out) == 0;
    if (exists && S_ISDIR(out.st_mode)) return refuse_output(path, "this is a folder; name a file in it", TML_EXIT_USAGE);
    for (int i = 0; exists && i < count; i++) read = read || is_read(&out, inputs[i]);
    for (size_t i = 0; exists && i < table_count; i++) read = read || is_read(&out, tables[i].path);
    if (read) return refuse_output(path, "this is one of the inputs; write to another file", TML_EXIT_USAGE);
    if (exists && !S_ISREG(out.st_mode)) {
        if (access(path, W_OK) == 0) return TML_EXIT_DONE;
        return refuse_output(path, strerror(errno), TML_EXIT_MACHINE);
    }
    char *folder = folder_of(path);
    if (folder == NULL) return refuse_output(path, "out of memory", TML_EXIT_MACHINE);
    bool writable = access(folder, W_OK | X_OK) == 0;
    int reason = errno;
    free(folder);
    if (!writable) return refuse_output(path, strerror(reason), TML_EXIT_MACHINE);
    return TML_EXIT_DONE;
}

bool tml_cli_output_good(const tml_command *command, const char *path, char *const *inputs, int count, int *exit_status) {
    if (path == NULL || strcmp(path, "-") == 0) return true;
    int judged = judge_output(command, path, inputs, count);
    if (judged == TML_EXIT_DONE) return true;
    *exit_status = judged;
    return false;
}

/* ---- reading ---- */

/* Set one of a table's texts, or say that it stands there already; -1 to go on, or the exit status. */
static int set_once(const tml_command *command, const char **text, const char *option, const char *value) {
    if (*text != NULL) return tml_cli_usage(command, "%s is given twice for the same inputs.", option);
    *text = value;
    return -1;
}

static int take_stereo(const tml_command *command, const char *value, tml_read_options *options) {
    options->sum_stereo_pairs = strcmp(value, "sum") == 0;
    if (options->sum_stereo_pairs || strcmp(value, "open") == 0) return -1;
    return tml_cli_usage(command, "--stereo takes open or sum, not '%s'.", value);
}

static int take_pseudo(const tml_command *command, const char *value, tml_read_options *options) {
    static const char *const WORDS[] = {"sum", "centre", "corrected"}; /* in the order of tml_pseudo */
    for (size_t i = 0; i < sizeof WORDS / sizeof *WORDS; i++)
        if (strcmp(value, WORDS[i]) == 0) {
            options->pseudo = (tml_pseudo)i;
            return -1;
        }
    return tml_cli_usage(command, "--pseudo takes sum, centre or corrected, not '%s'.", value);
}

static int take_table(const tml_command *command, const char *path, tml_read_options *options) {
    if (options->table_count == TABLES_MOST) return tml_cli_usage(command, "No more than %d tables can be read.", TABLES_MOST);
    tables[options->table_count++] = (tml_table){.path = path};
    table_count = options->table_count;
    options->tables = tables;
    return -1;
}

static int take_columns(const tml_command *command, int got, const char *value, tml_read_options *options) {
    const char *option = got == TML_OPTION_COLUMNS ? "--columns" : "--table-form";
    if (options->table_count == 0) return tml_cli_usage(command, "%s belongs to the --table before it; there is none.", option);
    tml_table *table = &tables[options->table_count - 1];
    return set_once(command, got == TML_OPTION_COLUMNS ? &table->columns : &table->form, option, value);
}

bool tml_cli_read_option(const tml_command *command, int got, const char *value, tml_read_options *options, int *status) {
    const char **old_names = options->table_count > 0 ? &tables[options->table_count - 1].old_names : &options->old_names;
    switch (got) {
    case TML_OPTION_STEREO: *status = take_stereo(command, value, options); return true;
    case TML_OPTION_PSEUDO: *status = take_pseudo(command, value, options); return true;
    case TML_OPTION_ALIKE:
        options->alike_chains = true;
        *status = -1;
        return true;
    case TML_OPTION_TABLE: *status = take_table(command, value, options); return true;
    case TML_OPTION_COLUMNS:
    case TML_OPTION_TABLE_FORM: *status = take_columns(command, got, value, options); return true;
    case TML_OPTION_OLD_NAMES: *status = set_once(command, old_names, "--old-names", value); return true;
    default: return false;
    }
}

int tml_cli_read(char *const *inputs, int count, const tml_read_options *options, bool strict, tml_problem **out) {
    tml_error error = {0};
    tml_problem *problem = NULL;
    *out = NULL;
    if (tml_problem_read((const char *const *)inputs, (size_t)count, options, &problem, &error) != TML_OK) {
        tml_problem_free(problem);
        return tml_cli_failed(&error);
    }
    if (strict && problem->restraints.unmapped_count > 0) {
        const tml_unmapped *first = &problem->restraints.unmapped[0];
        const char *file = first->place.file >= 0 ? problem->files[first->place.file] : "";
        tml_fail_at(&error, TML_BAD_INPUT, file, first->place.line, first->place.column, "%s", first->reason);
        tml_problem_free(problem);
        return tml_cli_failed(&error);
    }
    *out = problem;
    return TML_EXIT_DONE;
}

/* ---- watching ---- */

static volatile int stop_signal; /* 0, or the signal that asked us to stop */

static int interrupted_by(void) {
    return stop_signal;
}

static void on_signal(int number) {
    stop_signal = number;
}

/* A signal that was ignored when we were started, as under nohup, stays ignored. The second one kills at once. */
static void catch_signal(int number) {
    struct sigaction now;
    if (sigaction(number, NULL, &now) != 0 || now.sa_handler == SIG_IGN) return;
    struct sigaction ours = {.sa_handler = on_signal, .sa_flags = (int)SA_RESETHAND};
    sigemptyset(&ours.sa_mask);
    sigaction(number, &ours, NULL);
}

static bool progress_is_line; /* on a terminal the line is overwritten, elsewhere lines follow each other */
static bool progress_shown;
static double progress_last;

static void show_progress(void *context, const char *stage, long done, long total) {
    const double seconds_between = progress_is_line ? 0.1 : 1.0;
    double now = tml_seconds();
    (void)context;
    if (done != total && now - progress_last < seconds_between) return;
    progress_last = now;
    if (progress_is_line) {
        fprintf(stderr, "\r%s: %ld of %ld\033[K", stage, done, total);
        progress_shown = true;
    } else {
        fprintf(stderr, "%s: %ld of %ld\n", stage, done, total);
    }
}

tml_watch tml_cli_watch(bool progress) {
    struct sigaction ignore = {.sa_handler = SIG_IGN};
    sigemptyset(&ignore.sa_mask);
    sigaction(SIGPIPE, &ignore, NULL); /* a closed pipe is an error of writing, told like any other */
    catch_signal(SIGINT);
    catch_signal(SIGTERM);
    progress_is_line = isatty(STDERR_FILENO);
    return (tml_watch){.progress = progress || progress_is_line ? show_progress : NULL, .stop = &stop_signal};
}

void tml_cli_progress_end(void) {
    if (progress_shown) fputs("\r\033[K", stderr);
    progress_shown = false;
}

int tml_cli_finish(int exit_status) {
    tml_cli_progress_end();
    int signal_number = interrupted_by();
    if (signal_number != 0) {
        tml_cli_remark("Stopped by signal %d.", signal_number);
        return 128 + signal_number;
    }
    if (fflush(stdout) == 0 && !ferror(stdout)) return exit_status;
    tml_cli_remark("standard output: %s", errno != 0 ? strerror(errno) : "writing failed");
    return TML_EXIT_MACHINE;
}
