#include "passes/survey.h"

#include "passes/stream.h"

fw_status fw_survey(fw_pass *pass, const fw_stack *stack, const fw_job *job, fw_report *out,
                    fw_fault *fault)
{
    const fw_stream stream = {.stack = stack, .job = job, .phase = "surveying"};
    return fw_stream_judge(pass, &stream, out, fault);
}
