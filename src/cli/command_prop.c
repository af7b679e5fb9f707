#include "cli/commands.h"
#include "cli/desk.h"
#include "cli/run_help.h"
#include "cli/say.h"
#include "falsework/prop.h"

#include <stdio.h>

static falsework_status prop(const fw_arguments *arguments, fw_desk *desk, falsework_fault *fault)
{
    falsework_status status = fw_desk_open(arguments, desk, fault);
    const falsework_options options = fw_say_options(arguments, &desk->decodes);
    if (status == FALSEWORK_OK)
        status = falsework_prop(desk->stack, desk->job, arguments->out, arguments->replace,
                                &options, &desk->report, fault);
    return status == FALSEWORK_OK ? fw_desk_print(arguments, desk, fault) : status;
}

static int conclude(const fw_arguments *arguments, const fw_desk *desk)
{
    const bool passed = falsework_report_verdict(desk->report) == FALSEWORK_PASS;
    if (!arguments->json)
        (void)printf("written: %s/%s, posts.json, report.json\n", arguments->out,
                     passed ? "layers" : "refused");
    return passed ? FALSEWORK_OK : FALSEWORK_GATE;
}

static int run(const fw_arguments *arguments)
{
    falsework_fault fault = {0};
    fw_desk desk = {0};
    const falsework_status status = prop(arguments, &desk, &fault);
    const int exit_status =
        status == FALSEWORK_OK ? conclude(arguments, &desk) : fw_say_fault(&fault);
    fw_desk_close(&desk);
    return fw_say_done(exit_status);
}

const fw_command fw_command_prop = {
    .name = "prop",
    .one_line = "lift, place, size, route, draw, write, then recheck what was written",
    .help = "usage: falsework prop STACK --job JOB.yaml --out FOLDER [options]\n"
            "\n"
            "Adds posts to a raw stack, sizes each to the peel load that it must carry, writes\n"
            "FOLDER/layers, posts.json, report.json and digests, and judges what was written.\n"
            "STACK is only read, no pixel of it is lowered. Exits 0 when the gate holds, 1 when\n"
            "it refuses (the stack then lies in FOLDER/refused).\n"
            "\n"
            "  --job FILE      geometry, cards, post rules, gate\n"
            "  --out FOLDER    appears whole or not at all\n"
            "  --replace       FOLDER may be an earlier output of falsework\n" FW_RUN_HELP,
    .takes =
        FW_TAKES_JOB | FW_NEEDS_JOB | FW_TAKES_OUT | FW_NEEDS_OUT | FW_TAKES_REPLACE | FW_TAKES_RUN,
    .run = run,
};
