/* main.c: picks the command. Each command has a file of its own; what they share is in command.h. */
#include <stdio.h>
#include <string.h>

#include "cli/command.h"

static const tml_command *const COMMANDS[] = {&tml_command_check, &tml_command_build, &tml_command_assess, &tml_command_bounds,
                                              &tml_command_derive, &tml_command_compare, &tml_command_convert};
enum { COMMAND_COUNT = sizeof COMMANDS / sizeof COMMANDS[0] };

static void print_usage(FILE *out) {
    fputs("usage: trammel COMMAND [options] INPUT...\n"
          "\n"
          "From limits on distances between atoms to an ensemble of models, or to the limits that contradict each other.\n"
          "\n"
          "commands:\n",
          out);
    for (int i = 0; i < COMMAND_COUNT; i++) fprintf(out, "  %-8s %s\n", COMMANDS[i]->name, COMMANDS[i]->purpose);
    fputs("\n'trammel COMMAND --help' tells a command's options; 'trammel --version' tells the version.\n", out);
}

int main(int argc, char **argv) {
    if (argc < 2) {
        print_usage(stderr);
        return TML_EXIT_USAGE;
    }
    const char *word = argv[1];
    if (strcmp(word, "--help") == 0 || strcmp(word, "-h") == 0 || strcmp(word, "help") == 0) {
        print_usage(stdout);
        return tml_cli_finish(TML_EXIT_DONE);
    }
    if (strcmp(word, "--version") == 0) {
        printf("trammel %s\n", tml_version());
        return tml_cli_finish(TML_EXIT_DONE);
    }
    for (int i = 0; i < COMMAND_COUNT; i++)
        if (strcmp(word, COMMANDS[i]->name) == 0) return COMMANDS[i]->run(COMMANDS[i], argc - 1, argv + 1);
    fprintf(stderr, "trammel: '%s' is no command.\n\n", word);
    print_usage(stderr);
    return TML_EXIT_USAGE;
}
