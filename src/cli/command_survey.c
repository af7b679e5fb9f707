#include "cli/commands.h"
#include "cli/desk.h"
#include "cli/run_help.h"
#include "cli/say.h"

static falsework_status survey(const fw_arguments *arguments, fw_desk *desk, falsework_fault *fault)
{
    falsework_status status = fw_desk_open(arguments, desk, fault);
    const falsework_options options = fw_say_options(arguments, &desk->decodes);
    if (status == FALSEWORK_OK)
        status = falsework_survey(desk->stack, desk->job, &options, &desk->report, fault);
    return status == FALSEWORK_OK ? fw_desk_hand_out(arguments, desk, fault) : status;
}

static int run(const fw_arguments *arguments)
{
    falsework_fault fault = {0};
    fw_desk desk = {0};
    const falsework_status status = survey(arguments, &desk, &fault);
    fw_desk_close(&desk);
    return fw_say_done(status == FALSEWORK_OK ? FALSEWORK_OK : fw_say_fault(&fault));
}

const fw_command fw_command_survey = {
    .name = "survey",
    .one_line = "what the raw stack needs, nothing changed",
    .help = "usage: falsework survey STACK --job JOB.yaml [options]\n"
            "\n"
            "Looks at STACK as it is: what starts unanchored, reaches too far, sucks, pulls.\n"
            "Exits 0 whenever it could look; the verdict stands in the report. A job without\n"
            "resin and machine gives what geometry alone can tell.\n"
            "\n"
            "  --job FILE      the stack's geometry and cards\n"
            "  --out FOLDER    also write a new folder with report.json\n"
            "  --replace       FOLDER may be an earlier output of falsework\n" FW_RUN_HELP,
    .takes = FW_TAKES_JOB | FW_NEEDS_JOB | FW_TAKES_OUT | FW_TAKES_REPLACE | FW_TAKES_RUN,
    .run = run,
};
