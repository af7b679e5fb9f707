/* falsework: supports for raw slice stacks. Finds the command and runs it. */
#include "cli/commands.h"
#include "cli/say.h"

#include <stdio.h>
#include <string.h>
#ifdef __GLIBC__
#include <malloc.h>
#endif

static const fw_command *const commands[] = {&fw_command_begin, &fw_command_survey,
                                             &fw_command_prop, &fw_command_recheck,
                                             &fw_command_prove};
enum { COMMANDS = sizeof commands / sizeof *commands };

static int print_help(void)
{
    (void)printf(
        "falsework %s: adds posts to raw slice stacks for bottom-up resin printing, sizes\n"
        "them to the peel load, and rechecks any stack.\n\n",
        falsework_version());
    for (size_t i = 0; i < COMMANDS; i++)
        (void)printf("  falsework %-8s %s\n", commands[i]->name, commands[i]->one_line);
    (void)printf("\nfalsework COMMAND --help tells more. Exit status: 0 done and the gate holds, 1 "
                 "the gate\nrefuses or a check fails, 2 bad usage, job, card or stack, 3 the "
                 "machine failed us.\n");
    return fw_say_done(FALSEWORK_OK);
}

static int print_version(void)
{
    (void)printf("falsework %s\n", falsework_version());
    return fw_say_done(FALSEWORK_OK);
}

static int run_command(const fw_command *command, int count, char **words)
{
    fw_arguments arguments;
    if (!fw_arguments_parse(command, count, words, &arguments))
        return FALSEWORK_INPUT;
    if (!arguments.help)
        return command->run(&arguments);
    (void)fputs(command->help, stdout);
    return fw_say_done(FALSEWORK_OK);
}

/* The C library of GNU keeps freed blocks of up to 32 MiB in a heap for each thread, once blocks of
 * that size came and went. Film solves do, and what memory is bounded to must not depend on
 * threads: so blocks from 4 MiB on always go back. Setting that also makes it give back the end of
 * a heap at every turn, which costs more than a small solve: it may keep 32 MiB a thread. */
static void give_memory_back(void)
{
#ifdef __GLIBC__
    (void)mallopt(M_MMAP_THRESHOLD, 4 << 20);
    (void)mallopt(M_TRIM_THRESHOLD, 32 << 20);
#endif
}

int main(int count, char **words)
{
    give_memory_back();
    fw_say_catch_signals();
    if (count < 2) {
        fw_say("no command, command line, see falsework --help");
        return FALSEWORK_INPUT;
    }
    if (strcmp(words[1], "--help") == 0)
        return print_help();
    if (strcmp(words[1], "--version") == 0)
        return print_version();
    for (size_t i = 0; i < COMMANDS; i++) {
        if (strcmp(words[1], commands[i]->name) == 0)
            return run_command(commands[i], count - 2, words + 2);
    }
    fw_say("unknown command \"%s\", command line, see falsework --help", words[1]);
    return FALSEWORK_INPUT;
}
