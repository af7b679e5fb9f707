#include "passes/api.h"

#include <stdio.h>
#include <stdlib.h>

#ifndef FALSEWORK_VERSION
#error "the build defines FALSEWORK_VERSION"
#endif

const char *falsework_version(void)
{
    return FALSEWORK_VERSION;
}

falsework_status fw_api_status(fw_status status, const fw_fault *inner, falsework_fault *fault)
{
    if (status != FW_OK && fault != NULL) {
        fault->status = (falsework_status)status;
        (void)snprintf(fault->text, sizeof fault->text, "%s", inner->text);
    }
    return (falsework_status)status;
}

falsework_options falsework_options_default(void)
{
    const fw_pass_options inner = fw_pass_defaults();
    return (falsework_options){
        .batch = inner.batch, .memo_MiB = inner.memo_MiB, .store_MiB = inner.store_MiB};
}

fw_status fw_api_pass(const falsework_options *options, fw_pass *out, fw_fault *fault)
{
    const falsework_options chosen = options != NULL ? *options : falsework_options_default();
    const fw_pass_options inner = {.threads = chosen.threads,
                                   .batch = chosen.batch,
                                   .memo_MiB = chosen.memo_MiB,
                                   .store_MiB = chosen.store_MiB,
                                   .stop = chosen.stop,
                                   .progress = chosen.progress,
                                   .progress_context = chosen.progress_context};
    return fw_pass_open(&inner, out, fault);
}

void fw_api_pass_done(const falsework_options *options, fw_pass *pass)
{
    if (options != NULL && options->decodes != NULL)
        *options->decodes = pass->decodes;
    for (int work = 0; work < FW_WORK_COUNT && pass->times != NULL; work++) {
        if (options != NULL && options->timing != NULL)
            options->timing(options->timing_context, fw_work_name((fw_work)work),
                            pass->times->seconds[work]);
    }
    fw_pass_close(pass);
}

fw_output_rules fw_api_output(const falsework_stack *stack, const falsework_job *job,
                              const char *out, int replace, const char *protect[FW_SOURCE_COUNT])
{
    size_t count = 0;
    for (int i = 0; i < FW_SOURCE_COUNT; i++) {
        if (job->sources.path[i] != NULL)
            protect[count++] = job->sources.path[i];
    }
    return (fw_output_rules){.path = out,
                             .stack = fw_stack_path(stack->stack),
                             .protect = protect,
                             .protect_count = count,
                             .replace = replace != 0};
}

falsework_status falsework_out_check(const falsework_stack *stack, const falsework_job *job,
                                     const char *out, int replace, falsework_fault *fault)
{
    fw_fault inner = {0};
    const char *protect[FW_SOURCE_COUNT];
    const fw_output_rules rules = fw_api_output(stack, job, out, replace, protect);
    return fw_api_status(fw_output_check(&rules, &inner), &inner, fault);
}
