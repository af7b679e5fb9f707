#include "passes/prop.h"

#include "passes/sinks.h"
#include "passes/write_stack.h"
#include "report/posts_write.h"
#include "report/report_write.h"

#include <stdlib.h>
#include <string.h>

static const char layers_folder[] = "layers";
static const char refused_folder[] = "refused";

static fw_status check_job(const fw_job *job, fw_fault *fault)
{
    if (!job->has_rules)
        return fw_fault_set(fault, FW_INPUT, "no post rules, job, add a `posts:` section");
    if (!job->has_resin || !job->has_machine)
        return fw_fault_set(fault, FW_INPUT,
                            "prop needs both cards to size posts, job, name a resin and a machine");
    return FW_OK;
}

static fw_status to_bytes(const fw_report *report, fw_bytes *out, fw_fault *fault)
{
    return fw_report_write(report, fw_sink_to_bytes(out), fault);
}

/* What was believed before writing must be what the files say. Neither report carries digests of
 * the written stack yet, so nothing has to be masked. */
static fw_status compare(const fw_report *believed, const fw_report *read, fw_fault *fault)
{
    fw_bytes a = {0}, b = {0};
    fw_status status = to_bytes(believed, &a, fault);
    if (status == FW_OK)
        status = to_bytes(read, &b, fault);
    if (status == FW_OK && (a.size != b.size || memcmp(a.data, b.data, a.size) != 0))
        status = fw_fault_set(fault, FW_MACHINE,
                              "the written stack is judged differently from the planned one, "
                              "read-back, report this with the job and the stack");
    fw_bytes_free(&a);
    fw_bytes_free(&b);
    return status;
}

static fw_status set_digests(const fw_writing *writing, fw_report *report, fw_fault *fault)
{
    uint8_t sha256[FW_SHA256];
    FW_TRY(fw_sha256_of_stack((const uint8_t(*)[FW_SHA256])writing->sha256,
                              writing->raw->layers + writing->fit->lift, sha256, fault));
    fw_sha256_hex(sha256, report->sha256);
    fw_sha256_hex(writing->raw->stack_sha256, report->raw_sha256);
    return FW_OK;
}

static fw_status write_reports(const fw_writing *writing, const fw_report *report, fw_fault *fault)
{
    fw_output *output = writing->output;
    FW_TRY(fw_output_open_file(output, "report.json", fault));
    FW_TRY(fw_report_write(report, fw_sink_to_output(output), fault));
    FW_TRY(fw_output_finish_file(output, fault));
    FW_TRY(fw_output_open_file(output, "posts.json", fault));
    FW_TRY(fw_posts_write(report, fw_sink_to_output(output), fault));
    return fw_output_finish_file(output, fault);
}

static fw_status write_and_judge(fw_writing *writing, fw_report *out, fw_fault *fault)
{
    FW_TRY(fw_output_folder(writing->output, layers_folder, fault));
    FW_TRY(fw_write_stack(writing, fault));
    fw_status status = fw_read_back(writing, out, fault);
    if (status == FW_OK)
        status = compare(&writing->fit->believed, out, fault);
    if (status == FW_OK)
        status = set_digests(writing, out, fault);
    return status;
}

static fw_status publish(const fw_writing *writing, const fw_report *report, fw_fault *fault)
{
    if (report->verdict != FW_PASS)
        FW_TRY(fw_output_rename(writing->output, layers_folder, refused_folder, fault));
    FW_TRY(write_reports(writing, report, fault));
    FW_TRY(fw_output_input_sums(writing->output, writing->raw->stack,
                                (const uint8_t(*)[FW_SHA256])writing->raw->sha256, fault));
    return fw_output_publish(writing->output, fault);
}

static fw_status write_fitted(fw_writing *writing, fw_report *out, fw_fault *fault)
{
    const size_t layers = (size_t)(writing->raw->layers + writing->fit->lift);
    fw_stamp_plan *plan = NULL;
    fw_status status =
        fw_allocate((void **)&writing->sha256, layers, sizeof *writing->sha256, "digests", fault);
    if (status == FW_OK)
        status = fw_allocate((void **)&writing->encoded, layers, sizeof *writing->encoded,
                             "digests", fault);
    if (status == FW_OK)
        status = fw_stamp_plan_make(&writing->fit->posts, &writing->fit->screen,
                                    writing->job->layer_um / 1000, &plan, fault);
    writing->plan = plan;
    if (status == FW_OK)
        status = write_and_judge(writing, out, fault);
    if (status == FW_OK)
        status = publish(writing, out, fault);
    fw_stamp_plan_free(plan);
    free(writing->sha256);
    free(writing->encoded);
    return status;
}

static fw_status prop_into(fw_pass *pass, const fw_stack *stack, const fw_job *job,
                           fw_output *output, fw_report *out, fw_fault *fault)
{
    fw_raw raw = {0};
    fw_fit fit = {0};
    fw_writing writing = {.pass = pass,
                          .raw = &raw,
                          .fit = &fit,
                          .job = job,
                          .output = output,
                          .folder = layers_folder};
    fw_status status =
        fw_raw_read(pass, stack, job->intent_level, fw_output_staging(output), &raw, fault);
    if (status == FW_OK)
        status = fw_fit_posts(pass, &raw, job, &fit, fault);
    if (status == FW_OK)
        status = write_fitted(&writing, out, fault);
    fw_fit_close(&fit);
    fw_raw_close(&raw);
    return status;
}

fw_status fw_prop(fw_pass *pass, const fw_stack *stack, const fw_job *job,
                  const fw_output_rules *rules, fw_report *out, fw_fault *fault)
{
    fw_output *output = NULL;
    *out = (fw_report){0};
    FW_TRY(check_job(job, fault));
    FW_TRY(fw_output_begin(rules, &output, fault));
    const fw_status status = prop_into(pass, stack, job, output, out, fault);
    fw_output_close(output);
    if (status != FW_OK)
        fw_report_free(out);
    return status;
}
