#include "cli/commands.h"
#include "cli/desk.h"
#include "cli/run_help.h"
#include "cli/say.h"
#include "falsework/recheck.h"

static falsework_status recheck(const fw_arguments *arguments, fw_desk *desk,
                                falsework_fault *fault)
{
    falsework_status status = fw_desk_open(arguments, desk, fault);
    const falsework_options options = fw_say_options(arguments, &desk->decodes);
    if (status == FALSEWORK_OK)
        status = falsework_recheck(desk->stack, desk->job, desk->posts, desk->raw, &options,
                                   &desk->report, fault);
    return status == FALSEWORK_OK ? fw_desk_hand_out(arguments, desk, fault) : status;
}

static int run(const fw_arguments *arguments)
{
    falsework_fault fault = {0};
    fw_desk desk = {0};
    const falsework_status status = recheck(arguments, &desk, &fault);
    int exit_status = status == FALSEWORK_OK ? FALSEWORK_OK : fw_say_fault(&fault);
    if (status == FALSEWORK_OK && falsework_report_verdict(desk.report) != FALSEWORK_PASS)
        exit_status = FALSEWORK_GATE;
    fw_desk_close(&desk);
    return fw_say_done(exit_status);
}

const fw_command fw_command_recheck = {
    .name = "recheck",
    .one_line = "judge any stack anew, also with another resin or machine",
    .help = "usage: falsework recheck STACK --job JOB.yaml [options]\n"
            "\n"
            "Judges the masks as they are. Exits 0 when the gate holds, 1 when it refuses.\n"
            "\n"
            "  --job FILE      geometry, cards, post rules, gate\n"
            "  --posts FILE    posts.json: judges each post; else all solid counts as part\n"
            "  --raw STACK     the stack before posts: finds alterations of the part\n"
            "  --resin FILE    another resin card than the job's\n"
            "  --machine FILE  another machine card than the job's\n"
            "  --out FOLDER    also write a new folder with report.json\n"
            "  --replace       FOLDER may be an earlier output of falsework\n" FW_RUN_HELP,
    .takes = FW_TAKES_JOB | FW_NEEDS_JOB | FW_TAKES_OUT | FW_TAKES_REPLACE | FW_TAKES_RECHECK |
             FW_TAKES_RUN,
    .run = run,
};
