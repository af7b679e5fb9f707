/* The command line: one table of options, one parser, for all commands. */
#ifndef FW_CLI_ARGUMENTS_H
#define FW_CLI_ARGUMENTS_H

#include <stdbool.h>
#include <stddef.h>

/* Exit statuses that the command adds to those of the library. */
enum { FW_EXIT_SIGNAL = 128 };

typedef struct fw_arguments {
    const char *stack; /* the one positional argument */
    const char *job, *out, *posts, *raw, *resin, *machine;
    bool replace, json, verbose, help;
    int threads, batch, memo_MiB, store_MiB; /* -1 = not given */
} fw_arguments;

/* Which options a command takes, as bits of fw_option_bit; FW_NEEDS_... must be given. */
enum {
    FW_TAKES_JOB = 1 << 0,
    FW_NEEDS_JOB = 1 << 1,
    FW_TAKES_OUT = 1 << 2,
    FW_NEEDS_OUT = 1 << 3,
    FW_TAKES_REPLACE = 1 << 4,
    FW_TAKES_RECHECK = 1 << 5, /* --posts --raw --resin --machine */
    FW_TAKES_RUN = 1 << 6,     /* --json --threads --batch --memo-mib --store-mib --verbose */
    FW_TAKES_PROVE = 1 << 7,   /* --json --threads, and no stack */
};

typedef struct fw_command {
    const char *name, *one_line;
    const char *help; /* fits a screen of 80 x 24 */
    unsigned takes;
    int (*run)(const fw_arguments *arguments); /* returns the exit status */
} fw_command;

/* Parses what follows the command's name. On failure prints one line to stderr and returns false.
 */
bool fw_arguments_parse(const fw_command *command, int count, char **words, fw_arguments *out);

#endif
