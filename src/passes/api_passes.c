/* Public passes: survey, prop, recheck. */
#include "falsework/prop.h"
#include "passes/api.h"
#include "passes/prop.h"
#include "passes/recheck.h"
#include "passes/survey.h"

#include <stdlib.h>

/* A report handle that is filled by a pass. */
static fw_status new_report(falsework_report **out, fw_fault *fault)
{
    return fw_allocate((void **)out, 1, sizeof **out, "report", fault);
}

static falsework_status hand_out(fw_status status, const fw_fault *inner, falsework_report *made,
                                 falsework_report **report, falsework_fault *fault)
{
    *report = status == FW_OK ? made : NULL;
    if (status != FW_OK)
        free(made);
    return fw_api_status(status, inner, fault);
}

falsework_status falsework_survey(const falsework_stack *stack, const falsework_job *job,
                                  const falsework_options *options, falsework_report **report,
                                  falsework_fault *fault)
{
    fw_fault inner = {0};
    fw_pass pass = {0};
    falsework_report *made = NULL;
    fw_status status = new_report(&made, &inner);
    if (status == FW_OK)
        status = fw_api_pass(options, &pass, &inner);
    if (status == FW_OK)
        status = fw_survey(&pass, stack->stack, &job->job, &made->report, &inner);
    fw_api_pass_done(options, &pass);
    return hand_out(status, &inner, made, report, fault);
}

falsework_status falsework_prop(const falsework_stack *stack, const falsework_job *job,
                                const char *out, int replace, const falsework_options *options,
                                falsework_report **report, falsework_fault *fault)
{
    fw_fault inner = {0};
    fw_pass pass = {0};
    falsework_report *made = NULL;
    const char *protect[FW_SOURCE_COUNT];
    const fw_output_rules rules = fw_api_output(stack, job, out, replace, protect);
    fw_status status = new_report(&made, &inner);
    if (status == FW_OK)
        status = fw_api_pass(options, &pass, &inner);
    if (status == FW_OK)
        status = fw_prop(&pass, stack->stack, &job->job, &rules, &made->report, &inner);
    fw_api_pass_done(options, &pass);
    return hand_out(status, &inner, made, report, fault);
}

static fw_status check_cards(const fw_job *job, fw_fault *fault)
{
    if (job->has_resin && job->has_machine)
        return FW_OK;
    return fw_fault_set(fault, FW_INPUT,
                        "recheck needs both cards, job, name a resin and a machine");
}

falsework_status falsework_recheck(const falsework_stack *stack, const falsework_job *job,
                                   const falsework_posts *posts, const falsework_stack *raw,
                                   const falsework_options *options, falsework_report **report,
                                   falsework_fault *fault)
{
    fw_fault inner = {0};
    fw_pass pass = {0};
    falsework_report *made = NULL;
    const fw_recheck_input input = {.stack = stack->stack,
                                    .job = &job->job,
                                    .posts = posts != NULL ? &posts->posts : NULL,
                                    .lift = posts != NULL ? posts->lift_layers : 0,
                                    .posts_raw_sha256 = posts != NULL ? posts->raw_sha256 : NULL,
                                    .raw = raw != NULL ? raw->stack : NULL};
    fw_status status = check_cards(&job->job, &inner);
    if (status == FW_OK)
        status = new_report(&made, &inner);
    if (status == FW_OK)
        status = fw_api_pass(options, &pass, &inner);
    if (status == FW_OK)
        status = fw_recheck(&pass, &input, &made->report, &inner);
    fw_api_pass_done(options, &pass);
    return hand_out(status, &inner, made, report, fault);
}
