#include "cli/commands.h"
#include "cli/say.h"

#include <errno.h>
#include <stdio.h>
#include <string.h>

static int write_to(const falsework_stack *stack, FILE *file, falsework_fault *fault)
{
    const falsework_status status = falsework_stack_begin(stack, file, fault);
    return status == FALSEWORK_OK ? FALSEWORK_OK : fw_say_fault(fault);
}

/* "x": a job that somebody has filled in is never overwritten. */
static int write_file(const falsework_stack *stack, const char *path, falsework_fault *fault)
{
    FILE *file = fopen(path, "wx");
    if (file == NULL) {
        const bool exists = errno == EEXIST;
        fw_say("%s, %s, name %s", exists ? "it exists" : strerror(errno), path,
               exists ? "a new file" : "a file that can be written");
        return exists ? FALSEWORK_INPUT : FALSEWORK_MACHINE;
    }
    int status = write_to(stack, file, fault);
    if (fclose(file) != 0 && status == FALSEWORK_OK) {
        fw_say("%s, %s, make room or name another place", strerror(errno), path);
        status = FALSEWORK_MACHINE;
    }
    if (status != FALSEWORK_OK)
        (void)remove(path);
    return status;
}

static int run(const fw_arguments *arguments)
{
    falsework_fault fault = {0};
    falsework_stack *stack = NULL;
    if (falsework_stack_open(arguments->stack, NULL, &stack, &fault) != FALSEWORK_OK)
        return fw_say_fault(&fault);
    const int status = arguments->out != NULL ? write_file(stack, arguments->out, &fault)
                                              : write_to(stack, stdout, &fault);
    falsework_stack_close(stack);
    return fw_say_done(status);
}

const fw_command fw_command_begin = {
    .name = "begin",
    .one_line = "a commented job from what the stack shows",
    .help = "usage: falsework begin STACK [--out JOB.yaml]\n"
            "\n"
            "Writes a commented job file for STACK, a folder of PNG masks in number order,\n"
            "to stdout or to a new file. What masks cannot tell (pixel size, layer\n"
            "thickness, the cards of resin and machine) is marked \"set this\".\n"
            "\n"
            "  --out FILE      write there; an existing file is never overwritten\n",
    .takes = FW_TAKES_OUT,
    .run = run,
};
