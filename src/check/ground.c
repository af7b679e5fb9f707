#include "check/ground.h"

#include "check/undercure.h"
#include "check/voids.h"
#include "fault/memory.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "bodies of the stack";

fw_status fw_ground_open(const fw_setup *setup, fw_ground *out, fw_fault *fault)
{
    *out = (fw_ground){.setup = setup, .last_solid = -1};
    FW_TRY(fw_vents_open(setup, &out->vents, fault));
    if (isinf(setup->reach_mm))
        return FW_OK;
    return fw_carried_new(setup->width, setup->height, setup->px_mm, setup->py_mm,
                          4 * setup->reach_mm, &out->field, fault);
}

void fw_ground_close(fw_ground *ground)
{
    fw_bodies_free(&ground->bodies);
    fw_bodies_free(&ground->parts);
    fw_bodies_free(&ground->voids);
    fw_vents_close(&ground->vents);
    fw_carried_free(ground->field);
    free(ground->touches_post);
    free(ground->large);
    free(ground->pending);
    free(ground->peak);
    *ground = (fw_ground){0};
}

/* ---- what fits -------------------------------------------------------------------------- */

/* Cuts one region out into a set of its own box with a dark margin of one pixel. */
static fw_status cut_out(const fw_runs *set, const fw_regions *regions, uint32_t region,
                         fw_runs *out, fw_fault *fault)
{
    const fw_region *r = &regions->region[region];
    FW_TRY(fw_runs_begin(out, r->x1 - r->x0 + 2, r->y1 - r->y0 + 2, fault));
    for (int32_t y = r->y0; y < r->y1; y++) {
        for (uint32_t i = set->row[y]; i < set->row[y + 1]; i++) {
            if (regions->label[i] == region)
                FW_TRY(fw_runs_push(out, y - r->y0 + 1, set->run[i].x0 - r->x0 + 1,
                                    set->run[i].x1 - r->x0 + 1, fault));
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

fw_status fw_ground_holds_tip(const fw_setup *setup, const fw_runs *set, const fw_regions *regions,
                              uint32_t region, bool *holds, fw_fault *fault)
{
    const double radius = setup->smallest_tip_mm / 2;
    const fw_region *r = &regions->region[region];
    const double area = (double)r->pixels * setup->px_mm * setup->py_mm;
    *holds = area >= acos(-1.0) * radius * radius;
    if (!*holds || radius == 0)
        return FW_OK;
    fw_runs alone = {0}, outside = {0}, near_outside = {0};
    fw_status status = cut_out(set, regions, region, &alone, fault);
    if (status == FW_OK)
        status = fw_runs_complement(&alone, &outside, fault);
    if (status == FW_OK)
        status = fw_runs_dilate(&outside, radius / setup->px_mm, radius / setup->py_mm,
                                &near_outside, fault);
    if (status == FW_OK)
        *holds = fw_runs_pixels(&near_outside) < (int64_t)near_outside.width * near_outside.height;
    fw_runs_free(&alone);
    fw_runs_free(&outside);
    fw_runs_free(&near_outside);
    return status;
}

/* Whether some region of the body, up to this one, could hold a tip. Once it is known it stays, so
 * that a large body is measured once and not in every layer. */
static fw_status is_large(fw_ground *ground, const fw_sheet *sheet, uint32_t region, bool *large,
                          fw_fault *fault)
{
    const size_t before = ground->large_capacity;
    const uint32_t body = fw_bodies_of_region(&ground->bodies, region);
    FW_TRY(fw_grow((void **)&ground->large, &ground->large_capacity, ground->bodies.count,
                   sizeof *ground->large, holder, fault));
    memset(ground->large + before, 0, ground->large_capacity - before);
    *large = ground->large[body] != 0;
    if (*large)
        return FW_OK;
    FW_TRY(fw_ground_holds_tip(ground->setup, &sheet->slice.intended, &sheet->slice.regions, region,
                               large, fault));
    ground->large[body] = *large;
    return FW_OK;
}

/* ---- findings --------------------------------------------------------------------------- */

static fw_finding of_region(const fw_setup *setup, fw_kind kind, uint64_t group, int32_t layer,
                            const fw_region *region)
{
    const double pixels = (double)region->pixels;
    return (fw_finding){.kind = kind,
                        .severity = FW_FAIL,
                        .group = group,
                        .layer = layer,
                        .x_mm = fw_setup_x(setup, (double)region->sum_x / pixels),
                        .y_mm = fw_setup_y(setup, (double)region->sum_y / pixels),
                        .pixels = region->pixels,
                        .area_mm2 = pixels * setup->px_mm * setup->py_mm,
                        .margin = NAN,
                        .post = -1,
                        .badness = pixels};
}

static fw_status note_onset(fw_ground *ground, const fw_sheet *sheet, uint32_t region,
                            fw_fault *fault)
{
    bool holds = true;
    const fw_slice *slice = &sheet->slice;
    FW_TRY(is_large(ground, sheet, region, &holds, fault));
    const uint32_t body = fw_bodies_of_region(&ground->bodies, region);
    fw_finding finding =
        of_region(ground->setup, FW_ONSET, body, sheet->layer, &slice->regions.region[region]);
    finding.severity = holds ? FW_FAIL : FW_WARN;
    (void)snprintf(finding.message, sizeof finding.message,
                   "%.4g mm2 start with nothing holding them%s", finding.area_mm2,
                   holds ? "" : ", smaller than the smallest tip");
    FW_TRY(fw_grow((void **)&ground->pending, &ground->pending_capacity, ground->pending_count + 1,
                   sizeof *ground->pending, holder, fault));
    ground->pending[ground->pending_count++] = (fw_pending_onset){sheet->layer, body, finding};
    return FW_OK;
}

/* Decides the onsets that had their chance to join a held body: all from layers up to `through`. */
static fw_status decide_onsets(fw_ground *ground, int32_t through, fw_findings *findings,
                               fw_fault *fault)
{
    size_t done = 0;
    while (done < ground->pending_count && ground->pending[done].layer <= through) {
        fw_pending_onset *onset = &ground->pending[done++];
        if (ground->setup->job->heal_layers > 0 &&
            fw_bodies_grounded(&ground->bodies, onset->body)) {
            onset->finding.severity = FW_NOTE;
            (void)snprintf(onset->finding.message, sizeof onset->finding.message,
                           "%.4g mm2 start with nothing holding them, but join a held body within "
                           "%d layer(s)",
                           onset->finding.area_mm2, ground->setup->job->heal_layers);
        }
        FW_TRY(fw_findings_add(findings, &onset->finding, fault));
    }
    ground->pending_count -= done;
    if (done > 0 && ground->pending_count > 0)
        memmove(ground->pending, ground->pending + done,
                ground->pending_count * sizeof *ground->pending);
    return FW_OK;
}

static bool starts_here(const fw_overlaps *from_before, uint32_t region, uint32_t *cursor)
{
    while (*cursor < from_before->count && from_before->item[*cursor].now < region)
        (*cursor)++;
    return *cursor == from_before->count || from_before->item[*cursor].now != region;
}

static fw_status count_onsets(fw_ground *ground, const fw_sheet *sheet, fw_layer_row *row,
                              fw_fault *fault)
{
    uint32_t cursor = 0;
    for (uint32_t r = 0; r < sheet->slice.regions.count; r++) {
        if (!starts_here(&sheet->from_before, r, &cursor))
            continue;
        row->onset_px += sheet->slice.regions.region[r].pixels;
        FW_TRY(note_onset(ground, sheet, r, fault));
    }
    return FW_OK;
}

/* A body that nothing holds yet is a failure once it is large enough to hold a tip and had its
 * chance to heal; before that its onset says all there is to say. */
static fw_status count_adrift(fw_ground *ground, const fw_sheet *sheet, fw_layer_row *row,
                              fw_findings *findings, fw_fault *fault)
{
    const fw_regions *regions = &sheet->slice.regions;
    for (uint32_t r = 0; r < regions->count; r++) {
        if (sheet->held[r])
            continue;
        row->adrift_px += regions->region[r].pixels;
        const uint32_t body = fw_bodies_of_region(&ground->bodies, r);
        const int32_t age = sheet->layer - ground->bodies.body[body].first_layer;
        bool large = true;
        FW_TRY(is_large(ground, sheet, r, &large, fault));
        if (!large || age <= ground->setup->job->heal_layers)
            continue;
        fw_finding finding =
            of_region(ground->setup, FW_ADRIFT, body, sheet->layer, &regions->region[r]);
        (void)snprintf(finding.message, sizeof finding.message,
                       "%.4g mm2 without a path to the plate", finding.area_mm2);
        FW_TRY(fw_findings_add(findings, &finding, fault));
    }
    return FW_OK;
}

static fw_status count_overreach(fw_ground *ground, const fw_sheet *sheet, fw_layer_row *row,
                                 fw_findings *findings, fw_fault *fault)
{
    const fw_regions *regions = &sheet->slice.regions;
    FW_TRY(fw_grow((void **)&ground->peak, &ground->peak_capacity, (size_t)regions->count + 1,
                   sizeof *ground->peak, holder, fault));
    FW_TRY(fw_carried_over(ground->field, ground->setup->reach_mm, ground->peak, fault));
    for (uint32_t r = 0; r < regions->count; r++) {
        const fw_carried_peak *peak = &ground->peak[r];
        if (peak->over_pixels == 0)
            continue;
        row->overreach_px += peak->over_pixels;
        fw_finding finding =
            of_region(ground->setup, FW_OVERREACH, fw_bodies_of_region(&ground->bodies, r),
                      sheet->layer, &regions->region[r]);
        finding.pixels = peak->over_pixels;
        finding.area_mm2 = (double)peak->over_pixels * ground->setup->px_mm * ground->setup->py_mm;
        finding.x_mm = fw_setup_x(ground->setup, peak->x);
        finding.y_mm = fw_setup_y(ground->setup, peak->y);
        finding.badness = peak->worst_mm;
        (void)snprintf(finding.message, sizeof finding.message,
                       "reaches %.3g mm or more from what holds it, the card allows %.3g mm",
                       peak->worst_mm, ground->setup->reach_mm);
        FW_TRY(fw_findings_add(findings, &finding, fault));
    }
    return FW_OK;
}

static fw_status note_gap(fw_ground *ground, const fw_sheet *sheet, fw_findings *findings,
                          fw_fault *fault)
{
    const int32_t last = ground->last_solid;
    if (fw_sheet_part(sheet)->count == 0) /* posts alone do not bridge a gap in the part */
        return FW_OK;
    ground->last_solid = sheet->layer;
    if (last < 0 || sheet->layer == last + 1)
        return FW_OK;
    fw_finding finding = {.kind = FW_GAP_LAYER,
                          .severity = FW_FAIL,
                          .group = 0,
                          .layer = last + 1,
                          .margin = NAN,
                          .post = -1,
                          .badness = sheet->layer - last - 1};
    (void)snprintf(finding.message, sizeof finding.message,
                   "%d empty layer(s) from layer %d on, between layers with something",
                   sheet->layer - last - 1, last + 1);
    return fw_findings_add(findings, &finding, fault);
}

static fw_status note_border(const fw_setup *setup, const fw_sheet *sheet, fw_findings *findings,
                             fw_fault *fault)
{
    for (uint32_t r = 0; r < sheet->slice.regions.count; r++) {
        const fw_region *region = &sheet->slice.regions.region[r];
        if (!region->on_border)
            continue;
        fw_finding finding = of_region(setup, FW_BORDER_SOLID, 0, sheet->layer, region);
        finding.severity = FW_WARN;
        (void)snprintf(finding.message, sizeof finding.message,
                       "a region of %.4g mm2 touches the border of the image", finding.area_mm2);
        FW_TRY(fw_findings_add(findings, &finding, fault));
    }
    return FW_OK;
}

/* ---- the step ---------------------------------------------------------------------------- */

static void set_held(const fw_ground *ground, fw_sheet *sheet)
{
    for (uint32_t r = 0; r < sheet->slice.regions.count; r++)
        sheet->held[r] =
            fw_bodies_grounded(&ground->bodies, fw_bodies_of_region(&ground->bodies, r));
}

static fw_status step_bodies(fw_ground *ground, fw_sheet *sheet, const fw_sheet *before,
                             fw_fault *fault)
{
    const fw_regions *regions = &sheet->slice.regions;
    if (before == NULL)
        memset(sheet->held, 1, regions->count);
    FW_TRY(fw_bodies_step(&ground->bodies, sheet->layer, regions,
                          before != NULL ? &sheet->from_before : NULL,
                          before == NULL ? sheet->held : NULL, fault));
    set_held(ground, sheet);
    const fw_regions *parts = fw_sheet_part_regions(sheet);
    FW_TRY(fw_bodies_step(&ground->parts, sheet->layer, parts,
                          before != NULL ? &sheet->part_from_before : NULL, NULL, fault));
    for (uint32_t r = 0; r < parts->count; r++)
        sheet->part_body[r] = fw_bodies_of_region(&ground->parts, r);
    return FW_OK;
}

/* Sources of debt: the plate under layer 0, and every post that reaches this layer. */
static fw_status step_debt(fw_ground *ground, fw_sheet *sheet, const fw_sheet *before,
                           fw_fault *fault)
{
    fw_runs posts = {0};
    const fw_runs *sources = before == NULL ? &sheet->slice.intended : NULL;
    fw_status status = FW_OK;
    if (before != NULL && sheet->intended_members.count > 0) {
        status = fw_members_set(&sheet->intended_members, NULL, NULL, &posts, fault);
        sources = &posts;
    }
    if (status == FW_OK)
        status = fw_carried_step(ground->field, &sheet->slice.intended, &sheet->slice.regions,
                                 sheet->held, sources, ground->setup->credit_mm, fault);
    fw_runs_free(&posts);
    return status;
}

static fw_status place_tips(fw_ground *ground, fw_sheet *sheet, const fw_sheet *before,
                            const fw_placer *placer, fw_fault *fault)
{
    const fw_newest newest = {sheet, before, ground->field};
    FW_TRY(placer->place(placer->context, &newest, fault));
    for (uint32_t r = 0; r < sheet->slice.regions.count; r++) {
        if (sheet->held[r])
            fw_bodies_ground(&ground->bodies, fw_bodies_of_region(&ground->bodies, r));
    }
    set_held(ground, sheet); /* a tip under one region holds the whole body */
    return FW_OK;
}

fw_status fw_ground_step(fw_ground *ground, fw_sheet *sheet, const fw_sheet *before,
                         const fw_placer *placer, fw_layer_row *row, fw_findings *findings,
                         fw_fault *fault)
{
    row->solid_px = fw_runs_pixels(fw_slice_solid(&sheet->slice));
    row->regions = (int32_t)sheet->slice.regions.count;
    FW_TRY(step_bodies(ground, sheet, before, fault));
    if (ground->field != NULL)
        FW_TRY(step_debt(ground, sheet, before, fault));
    if (placer != NULL && before != NULL)
        FW_TRY(place_tips(ground, sheet, before, placer, fault));
    if (before != NULL)
        FW_TRY(count_onsets(ground, sheet, row, fault));
    FW_TRY(count_adrift(ground, sheet, row, findings, fault));
    if (ground->field != NULL)
        FW_TRY(count_overreach(ground, sheet, row, findings, fault));
    FW_TRY(decide_onsets(ground, sheet->layer - ground->setup->job->heal_layers, findings, fault));
    FW_TRY(note_gap(ground, sheet, findings, fault));
    FW_TRY(note_border(ground->setup, sheet, findings, fault));
    FW_TRY(fw_undercure_step(ground->setup, sheet, findings, fault));
    FW_TRY(fw_voids_step(ground, sheet, before, row, findings, fault));
    return fw_vents_step(&ground->vents, sheet, findings, fault);
}

static uint64_t root_body(void *bodies, uint64_t id)
{
    return fw_bodies_root(bodies, (uint32_t)id);
}

fw_status fw_ground_finish(fw_ground *ground, fw_findings *findings, fw_fault *fault)
{
    FW_TRY(decide_onsets(ground, INT32_MAX, findings, fault));
    FW_TRY(fw_voids_finish(ground, findings, fault));
    fw_vents_finish(&ground->vents, findings);
    fw_findings_regroup(findings, FW_ONSET, root_body, &ground->bodies);
    fw_findings_regroup(findings, FW_ADRIFT, root_body, &ground->bodies);
    fw_findings_regroup(findings, FW_OVERREACH, root_body, &ground->bodies);
    return FW_OK;
}
