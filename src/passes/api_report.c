/* Public view of a report. */
#include "passes/api.h"
#include "passes/sinks.h"
#include "report/report_write.h"
#include "report/summary.h"

#include <math.h>
#include <stdlib.h>

falsework_verdict falsework_report_verdict(const falsework_report *report)
{
    return (falsework_verdict)report->report.verdict;
}

falsework_totals falsework_report_totals(const falsework_report *report)
{
    const fw_totals *totals = &report->report.totals;
    falsework_totals out = {.posts = totals->posts,
                            .tip_area_mm2 = totals->tip_area_mm2,
                            .support_volume_mm3 = totals->support_volume_mm3,
                            .part_volume_mm3 = totals->part_volume_mm3,
                            .peak_peel_N = totals->peak_peel_N,
                            .peak_layer = totals->peak_layer,
                            .smallest_margin = NAN};
    for (size_t p = 0; p < report->report.posts.count; p++)
        out.smallest_margin = fmin(out.smallest_margin, report->report.post_result[p].margin);
    return out;
}

size_t falsework_report_findings(const falsework_report *report)
{
    return report->report.findings.count;
}

falsework_finding falsework_report_finding(const falsework_report *report, size_t index)
{
    const fw_finding *finding = &report->report.findings.item[index];
    return (falsework_finding){.kind = fw_kind_name(finding->kind),
                               .severity = (falsework_severity)finding->severity,
                               .layer = finding->layer,
                               .last_layer = finding->last_layer,
                               .count = finding->count,
                               .x_mm = finding->x_mm,
                               .y_mm = finding->y_mm,
                               .area_mm2 = finding->area_mm2,
                               .margin = finding->margin,
                               .post = finding->post,
                               .message = finding->message};
}

typedef struct writing {
    falsework_writer writer;
    void *context;
} writing;

static fw_status pass_on(void *context, const char *bytes, size_t count, fw_fault *fault)
{
    const writing *now = context;
    const falsework_status status = now->writer(now->context, bytes, count);
    if (status == FALSEWORK_OK)
        return FW_OK;
    return fw_fault_set(fault, (fw_status)status,
                        "the report could not be written, output, is it "
                        "closed or full?");
}

falsework_status falsework_report_write_json(const falsework_report *report,
                                             falsework_writer writer, void *context,
                                             falsework_fault *fault)
{
    fw_fault inner = {0};
    writing now = {writer, context};
    const fw_sink sink = {pass_on, &now};
    return fw_api_status(fw_report_write(&report->report, sink, &inner), &inner, fault);
}

falsework_status falsework_report_write_summary(const falsework_report *report,
                                                falsework_writer writer, void *context,
                                                falsework_fault *fault)
{
    fw_fault inner = {0};
    writing now = {writer, context};
    const fw_sink sink = {pass_on, &now};
    return fw_api_status(fw_report_summary(&report->report, sink, &inner), &inner, fault);
}

static fw_status publish(const fw_output_rules *rules, const fw_report *report, fw_fault *fault)
{
    fw_output *output = NULL;
    FW_TRY(fw_output_begin(rules, &output, fault));
    fw_status status = fw_output_open_file(output, "report.json", fault);
    if (status == FW_OK)
        status = fw_report_write(report, fw_sink_to_output(output), fault);
    if (status == FW_OK)
        status = fw_output_finish_file(output, fault);
    if (status == FW_OK)
        status = fw_output_publish(output, fault);
    fw_output_close(output);
    return status;
}

falsework_status falsework_report_publish(const falsework_report *report,
                                          const falsework_stack *stack, const falsework_job *job,
                                          const char *out, int replace, falsework_fault *fault)
{
    fw_fault inner = {0};
    const char *protect[FW_SOURCE_COUNT];
    const fw_output_rules rules = fw_api_output(stack, job, out, replace, protect);
    return fw_api_status(publish(&rules, &report->report, &inner), &inner, fault);
}

void falsework_report_close(falsework_report *report)
{
    if (report == NULL)
        return;
    fw_report_free(&report->report);
    free(report);
}
