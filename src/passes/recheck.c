#include "passes/recheck.h"

#include "passes/altered.h"
#include "passes/stream.h"

#include <string.h>

fw_status fw_recheck(fw_pass *pass, const fw_recheck_input *input, fw_report *out, fw_fault *fault)
{
    fw_altered *altered = NULL;
    *out = (fw_report){0};
    if (input->raw != NULL)
        FW_TRY(fw_altered_open(pass, input, &altered, fault));
    const fw_stream_watch watch = {fw_altered_look, altered};
    const fw_stream stream = {.stack = input->stack,
                              .job = input->job,
                              .posts = input->posts,
                              .lift = input->lift,
                              .phase = "rechecking",
                              .watch = altered != NULL ? &watch : NULL};
    fw_status status = fw_stream_judge(pass, &stream, out, fault);
    if (status == FW_OK && altered != NULL)
        status = fw_altered_digest(altered, out->raw_sha256, fault);
    if (status == FW_OK && altered != NULL && input->posts_raw_sha256 != NULL &&
        input->posts_raw_sha256[0] != '\0' && strcmp(out->raw_sha256, input->posts_raw_sha256) != 0)
        status =
            fw_fault_set(fault, FW_INPUT,
                         "the posts were made for another raw stack, %s, give the one that prop "
                         "was run on",
                         fw_stack_path(input->raw));
    fw_altered_close(altered);
    if (status != FW_OK)
        fw_report_free(out);
    return status;
}
