#include "report/report_write.h"

#include "report/json_write.h"
#include "report/post_object.h"

#include <math.h>

static void write_stack(fw_json *json, const fw_report *report)
{
    fw_json_object(json, "stack");
    fw_json_whole(json, "layers", report->layers);
    fw_json_whole(json, "width_px", report->width_px);
    fw_json_whole(json, "height_px", report->height_px);
    fw_json_array(json, "pixel_um");
    fw_json_digits(json, NULL, report->pixel_um[0]);
    fw_json_digits(json, NULL, report->pixel_um[1]);
    fw_json_end(json);
    fw_json_digits(json, "layer_um", report->layer_um);
    fw_json_text_or_null(json, "sha256", report->sha256);
    fw_json_end(json);
    fw_json_object(json, "raw");
    fw_json_whole(json, "layers", report->raw_layers);
    fw_json_whole(json, "lift_layers", report->lift_layers);
    fw_json_text_or_null(json, "sha256", report->raw_sha256);
    fw_json_end(json);
}

static void write_grounds(fw_json *json, const fw_report *report)
{
    fw_json_object(json, "basis");
    fw_json_whole(json, "measured", report->basis[FW_MEASURED]);
    fw_json_whole(json, "supplier", report->basis[FW_SUPPLIER]);
    fw_json_whole(json, "assumed", report->basis[FW_ASSUMED]);
    fw_json_end(json);
    fw_json_object(json, "resin");
    fw_json_text_or_null(json, "name", report->resin_name);
    fw_json_text_or_null(json, "lot", report->resin_lot);
    fw_json_end(json);
    fw_json_object(json, "machine");
    fw_json_text_or_null(json, "name", report->machine_name);
    fw_json_end(json);
    fw_json_object(json, "gate");
    fw_json_digits(json, "margin", report->gate_margin);
    fw_json_end(json);
    fw_json_array(json, "not_checked");
    for (size_t i = 0; i < report->not_checked_count; i++)
        fw_json_text(json, NULL, report->not_checked[i]);
    fw_json_end(json);
}

/* A layer's number in the raw stack, null for one that the lift added. */
static void write_raw_layer(fw_json *json, int32_t raw_layer)
{
    if (raw_layer < 0)
        fw_json_null(json, "raw_layer");
    else
        fw_json_whole(json, "raw_layer", raw_layer);
}

static void write_finding(fw_json *json, const fw_finding *finding, int32_t lift_layers)
{
    fw_json_object(json, NULL);
    fw_json_text(json, "kind", fw_kind_name(finding->kind));
    fw_json_text(json, "severity", fw_severity_name(finding->severity));
    fw_json_whole(json, "layer", finding->layer);
    write_raw_layer(json, finding->layer - lift_layers);
    fw_json_whole(json, "count", finding->count);
    fw_json_whole(json, "last_layer", finding->last_layer);
    fw_json_whole(json, "worst_layer", finding->worst_layer);
    fw_json_length(json, "x_mm", finding->x_mm);
    fw_json_length(json, "y_mm", finding->y_mm);
    fw_json_digits(json, "area_mm2", finding->area_mm2);
    fw_json_whole(json, "pixels", finding->pixels);
    fw_json_digits(json, "margin", finding->margin);
    if (finding->post < 0)
        fw_json_null(json, "post");
    else
        fw_json_whole(json, "post", finding->post);
    fw_json_text(json, "message", finding->message);
    fw_json_end(json);
}

static void write_layer(fw_json *json, const fw_layer_row *row)
{
    fw_json_object(json, NULL);
    fw_json_whole(json, "layer", row->layer);
    write_raw_layer(json, row->raw_layer);
    fw_json_whole(json, "solid_px", row->solid_px);
    fw_json_whole(json, "regions", row->regions);
    fw_json_whole(json, "onset_px", row->onset_px);
    fw_json_whole(json, "adrift_px", row->adrift_px);
    fw_json_whole(json, "overreach_px", row->overreach_px);
    fw_json_digits(json, "peel_N", row->peel_N);
    fw_json_digits(json, "blind_cavity_mm2", row->blind_cavity_mm2);
    fw_json_text(json, "limited_by", fw_limit_name(row->limited_by));
    fw_json_digits(json, "worst_margin", row->worst_margin);
    fw_json_digits(json, "speed_cap_mm_s", row->speed_cap_mm_s);
    fw_json_end(json);
}

static void write_part(fw_json *json, const fw_part_row *part)
{
    fw_json_object(json, NULL);
    fw_json_whole(json, "id", part->id);
    fw_json_whole(json, "first_layer", part->first_layer);
    fw_json_whole(json, "last_layer", part->last_layer);
    fw_json_array(json, "box_mm");
    for (int i = 0; i < 4; i++)
        fw_json_length(json, NULL, part->box_mm[i]);
    fw_json_end(json);
    fw_json_digits(json, "volume_mm3", part->volume_mm3);
    fw_json_whole(json, "posts", part->posts);
    fw_json_digits(json, "worst_margin", part->worst_margin);
    fw_json_end(json);
}

static void write_rows(fw_json *json, const fw_report *report)
{
    fw_json_array(json, "findings");
    for (size_t i = 0; i < report->findings.count; i++)
        write_finding(json, &report->findings.item[i], report->lift_layers);
    fw_json_end(json);
    fw_json_array(json, "layers");
    for (int32_t n = 0; n < report->layers; n++)
        write_layer(json, &report->layer[n]);
    fw_json_end(json);
    fw_json_array(json, "parts");
    for (size_t i = 0; i < report->part_count; i++)
        write_part(json, &report->part[i]);
    fw_json_end(json);
}

static void write_totals(fw_json *json, const fw_totals *totals)
{
    fw_json_object(json, "totals");
    fw_json_whole(json, "posts", totals->posts);
    fw_json_digits(json, "tip_area_mm2", totals->tip_area_mm2);
    fw_json_digits(json, "support_volume_mm3", totals->support_volume_mm3);
    fw_json_digits(json, "part_volume_mm3", totals->part_volume_mm3);
    fw_json_digits(json, "peak_peel_N", totals->peak_peel_N);
    if (isfinite(totals->peak_peel_N))
        fw_json_whole(json, "peak_layer", totals->peak_layer);
    else
        fw_json_null(json, "peak_layer");
    fw_json_array(json, "peak_range_N");
    fw_json_digits(json, NULL, totals->peak_range_N[0]);
    fw_json_digits(json, NULL, totals->peak_range_N[1]);
    fw_json_end(json);
    fw_json_whole(json, "capped_layers", totals->capped_layers);
    fw_json_whole(json, "bound_layers", totals->bound_layers);
    fw_json_end(json);
}

fw_status fw_report_write(const fw_report *report, fw_sink sink, fw_fault *fault)
{
    fw_json json;
    fw_json_start(&json, sink, fault);
    fw_json_text(&json, "format", "falsework-report/1");
    fw_json_text(&json, "verdict", fw_verdict_name(report->verdict));
    write_stack(&json, report);
    write_grounds(&json, report);
    write_rows(&json, report);
    fw_post_objects(&json, report);
    write_totals(&json, &report->totals);
    return fw_json_close(&json);
}
