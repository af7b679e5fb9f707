#include "cli/desk.h"

#include "cli/say.h"

#include <inttypes.h>
#include <stdio.h>

static falsework_status open_job(const fw_arguments *arguments, fw_desk *out,
                                 falsework_fault *fault)
{
    falsework_status status = falsework_job_open(arguments->job, &out->job, fault);
    if (status == FALSEWORK_OK && arguments->resin != NULL)
        status = falsework_job_use_resin(out->job, arguments->resin, fault);
    if (status == FALSEWORK_OK && arguments->machine != NULL)
        status = falsework_job_use_machine(out->job, arguments->machine, fault);
    return status;
}

falsework_status fw_desk_open(const fw_arguments *arguments, fw_desk *out, falsework_fault *fault)
{
    *out = (fw_desk){0};
    falsework_status status = open_job(arguments, out, fault);
    if (status == FALSEWORK_OK)
        status = falsework_stack_open(arguments->stack, out->job, &out->stack, fault);
    if (status == FALSEWORK_OK && arguments->posts != NULL)
        status = falsework_posts_open(arguments->posts, &out->posts, fault);
    if (status == FALSEWORK_OK && arguments->raw != NULL)
        status = falsework_stack_open(arguments->raw, out->job, &out->raw, fault);
    if (status == FALSEWORK_OK && arguments->out != NULL)
        status =
            falsework_out_check(out->stack, out->job, arguments->out, arguments->replace, fault);
    return status;
}

falsework_status fw_desk_print(const fw_arguments *arguments, const fw_desk *desk,
                               falsework_fault *fault)
{
    if (arguments->verbose)
        (void)fprintf(stderr, "decoded %" PRId64 " PNG files\n", desk->decodes);
    return arguments->json ? falsework_report_write_json(desk->report, fw_say_out, NULL, fault)
                           : falsework_report_write_summary(desk->report, fw_say_out, NULL, fault);
}

falsework_status fw_desk_hand_out(const fw_arguments *arguments, const fw_desk *desk,
                                  falsework_fault *fault)
{
    if (arguments->out != NULL) {
        const falsework_status status = falsework_report_publish(
            desk->report, desk->stack, desk->job, arguments->out, arguments->replace, fault);
        if (status != FALSEWORK_OK)
            return status;
    }
    return fw_desk_print(arguments, desk, fault);
}

void fw_desk_close(fw_desk *desk)
{
    falsework_report_close(desk->report);
    falsework_posts_close(desk->posts);
    falsework_stack_close(desk->raw);
    falsework_stack_close(desk->stack);
    falsework_job_close(desk->job);
    *desk = (fw_desk){0};
}
