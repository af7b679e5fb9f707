#include "report/summary.h"

#include "report/number.h"

#include <inttypes.h>
#include <math.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>

enum { LINE = 1024, SHOWN_FINDINGS = 20 }; /* more would scroll the verdict off the screen */

/* The first failure is kept and what follows is dropped, as in json_write. */
typedef struct printer {
    fw_sink sink;
    fw_fault *fault;
    fw_status status;
} printer;

__attribute__((format(printf, 2, 3))) static void line(printer *p, const char *format, ...)
{
    char text[LINE];
    va_list values;
    va_start(values, format);
    vsnprintf(text, sizeof text - 1, format, values);
    va_end(values);
    size_t length = strlen(text);
    text[length] = '\n';
    if (p->status == FW_OK)
        p->status = p->sink.write(p->sink.context, text, length + 1, p->fault);
}

typedef struct number {
    char text[FW_NUMBER_TEXT];
} number;

/* Four digits are more than any of these figures deserves. */
static number figure(double value)
{
    number n = {"unknown"};
    if (isfinite(value))
        fw_number_digits(n.text, value, 4);
    return n;
}

static number length(double mm)
{
    number n = {"unknown"};
    if (fabs(mm) < 1e12)
        fw_number_thousandths(n.text, mm);
    return n;
}

char *fw_finding_line(const fw_finding *finding, char *out, size_t size)
{
    char layers[64], post[48] = "", times[48] = "";
    if (finding->last_layer > finding->layer)
        snprintf(layers, sizeof layers, "layers %d to %d", finding->layer, finding->last_layer);
    else
        snprintf(layers, sizeof layers, "layer %d", finding->layer);
    if (finding->post >= 0)
        snprintf(post, sizeof post, ", post %" PRId64, finding->post);
    if (finding->count > 1)
        snprintf(times, sizeof times, ", %" PRId64 " times", finding->count);
    snprintf(out, size, "%s  %s in %s at x %s y %s mm%s%s: %s", fw_severity_name(finding->severity),
             fw_kind_name(finding->kind), layers, length(finding->x_mm).text,
             length(finding->y_mm).text, post, times, finding->message);
    return out;
}

static void print_grounds(printer *p, const fw_report *report)
{
    line(p, "stack: %d layers of %d x %d px, %d of them lift", report->layers, report->width_px,
         report->height_px, report->lift_layers);
    if (report->resin_name[0] == '\0')
        line(p, "resin: no card");
    else
        line(p, "resin: %s, lot %s", report->resin_name,
             report->resin_lot[0] == '\0' ? "not given" : report->resin_lot);
    line(p, "machine: %s", report->machine_name[0] == '\0' ? "no card" : report->machine_name);
    line(p, "card values rest on: %d groups measured, %d from the supplier, %d assumed",
         report->basis[FW_MEASURED], report->basis[FW_SUPPLIER], report->basis[FW_ASSUMED]);
    for (size_t i = 0; i < report->not_checked_count; i++)
        line(p, "not checked: %s", report->not_checked[i]);
}

static void print_findings(printer *p, const fw_findings *list)
{
    char text[FW_FINDING_LINE];
    bool advised[FW_KIND_COUNT] = {false};
    line(p, "findings: %" PRId64 " fail, %" PRId64 " warn, %" PRId64 " note",
         fw_findings_count(list, FW_FAIL), fw_findings_count(list, FW_WARN),
         fw_findings_count(list, FW_NOTE));
    for (size_t i = 0; i < list->count && i < SHOWN_FINDINGS; i++) {
        line(p, "  %s", fw_finding_line(&list->item[i], text, sizeof text));
        if (!advised[list->item[i].kind])
            line(p, "        (%s: %s)", fw_kind_name(list->item[i].kind),
                 fw_kind_advice(list->item[i].kind));
        advised[list->item[i].kind] = true;
    }
    if (list->count > SHOWN_FINDINGS)
        line(p, "  and %zu more, all in report.json", list->count - SHOWN_FINDINGS);
}

static void print_posts(printer *p, const fw_report *report)
{
    const fw_totals *totals = &report->totals;
    int unrouted = 0;
    for (size_t i = 0; i < report->posts.count; i++)
        unrouted += !report->posts.item[i].routed;
    line(p, "posts: %d, %d without a path to the plate; tips %s mm2, posts %s mm3, part %s mm3",
         totals->posts, unrouted, figure(totals->tip_area_mm2).text,
         figure(totals->support_volume_mm3).text, figure(totals->part_volume_mm3).text);
}

static void print_peel(printer *p, const fw_report *report)
{
    const fw_totals *totals = &report->totals;
    if (!isfinite(totals->peak_peel_N)) {
        line(p, "peak peel load: not computed");
        return;
    }
    bool known = totals->peak_layer >= 0 && totals->peak_layer < report->layers;
    line(p, "peak peel load: %s N in layer %d, limited by %s", figure(totals->peak_peel_N).text,
         totals->peak_layer,
         fw_limit_name(known ? report->layer[totals->peak_layer].limited_by : FW_BY_NOTHING));
    if (isfinite(totals->peak_range_N[0]))
        line(p, "over the card's gap range: %s to %s N", figure(totals->peak_range_N[0]).text,
             figure(totals->peak_range_N[1]).text);
    line(p, "layers at the cap: %d; layers on the bound, unsolved: %d", totals->capped_layers,
         totals->bound_layers);
}

/* The smallest margin of all; a post is named where it is the one. */
static void print_margin(printer *p, const fw_report *report)
{
    double least = INFINITY;
    int32_t layer = -1;
    size_t post = report->posts.count;
    for (size_t i = 0; i < report->posts.count; i++) {
        if (report->post_result[i].margin < least) {
            least = report->post_result[i].margin;
            post = i;
        }
    }
    for (int32_t n = 0; n < report->layers; n++) {
        if (report->layer[n].worst_margin < least) {
            least = report->layer[n].worst_margin;
            layer = n;
        }
    }
    if (layer >= 0)
        line(p, "smallest margin: %s in layer %d (the gate asks for %s)", figure(least).text, layer,
             figure(report->gate_margin).text);
    else if (post < report->posts.count)
        line(p, "smallest margin: %s, %s of post %d in layer %d (the gate asks for %s)",
             figure(least).text, fw_check_name(report->post_result[post].governs),
             report->posts.item[post].id, report->post_result[post].load_layer,
             figure(report->gate_margin).text);
    else
        line(p, "smallest margin: none, nothing is loaded or no load was computed");
}

fw_status fw_report_summary(const fw_report *report, fw_sink sink, fw_fault *fault)
{
    printer p = {.sink = sink, .fault = fault, .status = FW_OK};
    line(&p, "verdict: %s", fw_verdict_name(report->verdict));
    print_grounds(&p, report);
    print_findings(&p, &report->findings);
    print_posts(&p, report);
    print_peel(&p, report);
    print_margin(&p, report);
    return p.status;
}
