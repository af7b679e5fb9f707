#include "check/vents.h"

#include "fault/memory.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

static const char holder[] = "vents of cavities";

/* Bodies of centres get ids of their own beside those of sealed voids. */
enum { POOR = 0x40000000 };

/* ---- what the last layers have in common ------------------------------------------------ */

static fw_status common_open(int32_t most, fw_common *out, fw_fault *fault)
{
    out->most = most;
    FW_TRY(fw_allocate((void **)&out->older, (size_t)most, sizeof *out->older, holder, fault));
    return fw_allocate((void **)&out->newer, (size_t)most, sizeof *out->newer, holder, fault);
}

static void common_close(fw_common *common)
{
    for (int32_t i = 0; i < common->most && common->older != NULL; i++)
        fw_runs_free(&common->older[i]);
    for (int32_t i = 0; i < common->most && common->newer != NULL; i++)
        fw_runs_free(&common->newer[i]);
    fw_runs_free(&common->newest);
    free(common->older);
    free(common->newer);
}

/* The newer sets become the older stack, the oldest of them on top (at index 0 of what is left). */
static fw_status turn_over(fw_common *common, fw_fault *fault)
{
    const int32_t count = common->newer_count;
    for (int32_t i = count - 1; i >= 0; i--) {
        fw_runs *into = &common->older[count - 1 - i];
        if (i == count - 1)
            FW_TRY(fw_runs_copy(&common->newer[i], into, fault));
        else
            FW_TRY(fw_runs_intersect(&common->newer[i], into - 1, into, fault));
    }
    common->older_count = count;
    common->newer_count = 0;
    return FW_OK;
}

static fw_status add_newest(fw_common *common, const fw_runs *set, fw_fault *fault)
{
    fw_runs both = {0};
    FW_TRY(fw_runs_copy(set, &common->newer[common->newer_count], fault));
    if (common->newer_count++ == 0)
        return fw_runs_copy(set, &common->newest, fault);
    const fw_status status = fw_runs_intersect(&common->newest, set, &both, fault);
    fw_runs_free(&common->newest);
    common->newest = both;
    return status;
}

/* out = what the last `most` sets have in common; empty while there are fewer. */
static fw_status common_step(fw_common *common, const fw_runs *set, fw_runs *out, fw_fault *fault)
{
    if (common->older_count + common->newer_count == common->most) {
        if (common->older_count == 0)
            FW_TRY(turn_over(common, fault));
        common->older_count--;
    }
    FW_TRY(add_newest(common, set, fault));
    if (common->older_count + common->newer_count < common->most) {
        FW_TRY(fw_runs_begin(out, set->width, set->height, fault));
        fw_runs_finish(out);
        return FW_OK;
    }
    if (common->older_count == 0)
        return fw_runs_copy(&common->newest, out, fault);
    return fw_runs_intersect(&common->older[common->older_count - 1], &common->newest, out, fault);
}

/* ---- where the cylinder goes ------------------------------------------------------------- */

fw_status fw_vents_open(const fw_setup *setup, fw_vents *out, fw_fault *fault)
{
    *out = (fw_vents){.setup = setup};
    if (setup->vent_mm == 0)
        return FW_OK;
    const int32_t layers = (int32_t)ceil(setup->vent_mm / setup->t_mm - 1e-9);
    return common_open(layers > 1 ? layers : 1, &out->common, fault);
}

void fw_vents_close(fw_vents *vents)
{
    common_close(&vents->common);
    for (int i = 0; i < 2; i++) {
        fw_runs_free(&vents->centres[i]);
        fw_regions_free(&vents->regions[i]);
    }
    fw_bodies_free(&vents->bodies);
    *vents = (fw_vents){0};
}

static fw_status step_bodies(fw_vents *vents, int32_t layer, fw_fault *fault)
{
    const int now = vents->newest, before = 1 - now;
    const fw_regions *regions = &vents->regions[now];
    fw_overlaps overlaps = {0};
    uint8_t *open = NULL;
    FW_TRY(fw_allocate((void **)&open, regions->count, sizeof *open, holder, fault));
    for (uint32_t r = 0; r < regions->count; r++)
        open[r] = regions->region[r].on_border;
    fw_status status = FW_OK;
    if (vents->centres[before].height > 0)
        status = fw_overlaps_find(&vents->centres[before], &vents->regions[before],
                                  &vents->centres[now], regions, &overlaps, fault);
    if (status == FW_OK)
        status = fw_bodies_step(&vents->bodies, layer, regions, &overlaps, open, fault);
    fw_overlaps_free(&overlaps);
    free(open);
    return status;
}

static fw_status step_centres(fw_vents *vents, const fw_sheet *sheet, fw_fault *fault)
{
    vents->newest = 1 - vents->newest;
    fw_runs *centres = &vents->centres[vents->newest];
    FW_TRY(common_step(&vents->common, &sheet->wide, centres, fault));
    FW_TRY(fw_regions_label(centres, FW_EIGHT, &vents->regions[vents->newest], fault));
    return step_bodies(vents, sheet->layer, fault);
}

/* ---- what is cut off by narrow vents ----------------------------------------------------- */

static bool is_cut_off(const fw_vents *vents, uint32_t run)
{
    const uint32_t region = vents->regions[vents->newest].label[run];
    return !fw_bodies_grounded(&vents->bodies, fw_bodies_of_region(&vents->bodies, region));
}

/* out = the centres of the newest layer that cannot get out (cut_off), or those that can. */
static fw_status pick_centres(const fw_vents *vents, bool cut_off, fw_runs *out, fw_fault *fault)
{
    const fw_runs *centres = &vents->centres[vents->newest];
    FW_TRY(fw_runs_begin(out, centres->width, centres->height, fault));
    for (int32_t y = 0; y < centres->height; y++) {
        for (uint32_t i = centres->row[y]; i < centres->row[y + 1]; i++) {
            if (is_cut_off(vents, i) == cut_off)
                FW_TRY(fw_runs_push(out, y, centres->run[i].x0, centres->run[i].x1, fault));
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

/* out = the voids that are sealed, or those that are not. */
static fw_status pick_voids(const fw_sheet *sheet, bool sealed, fw_runs *out, fw_fault *fault)
{
    const fw_runs *voids = &sheet->slice.voids;
    FW_TRY(fw_runs_begin(out, voids->width, voids->height, fault));
    for (int32_t y = 0; y < voids->height; y++) {
        for (uint32_t i = voids->row[y]; i < voids->row[y + 1]; i++) {
            const bool open = sheet->cavity[sheet->slice.void_regions.label[i]] == FW_OPEN;
            if (open != sealed)
                FW_TRY(fw_runs_push(out, y, voids->run[i].x0, voids->run[i].x1, fault));
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

/* Does [x0, x1) of row y touch the set, corners included? */
static bool touches(const fw_runs *set, fw_run run, int32_t y)
{
    for (int32_t row = y > 0 ? y - 1 : 0; row <= y + 1 && row < set->height; row++) {
        const uint32_t low = fw_runs_seek(set, run.x0 - 1, row);
        if (low < set->row[row + 1] && set->run[low].x0 <= run.x1)
            return true;
    }
    return false;
}

/* What the cylinder does not reach of a void: corners belong to what they lie in, but a way from
 * there to the vat, however narrow, is open. out = the corners of `inner`. */
static fw_status pick_corners(const fw_runs *left, const fw_runs *inner, const fw_runs *outer,
                              fw_runs *out, fw_fault *fault)
{
    enum { IN_INNER = 1, IN_OUTER = 2 };
    fw_regions regions = {0};
    uint8_t *touched = NULL;
    fw_status status = fw_regions_label(left, FW_EIGHT, &regions, fault);
    if (status == FW_OK)
        status = fw_allocate((void **)&touched, regions.count, 1, holder, fault);
    for (int32_t y = 0; y < left->height && status == FW_OK; y++) {
        for (uint32_t i = left->row[y]; i < left->row[y + 1]; i++) {
            uint8_t *flags = &touched[regions.label[i]];
            *flags |= touches(inner, left->run[i], y) ? IN_INNER : 0;
            *flags |= touches(outer, left->run[i], y) ? IN_OUTER : 0;
        }
    }
    if (status == FW_OK)
        status = fw_runs_begin(out, left->width, left->height, fault);
    for (int32_t y = 0; y < left->height && status == FW_OK; y++) {
        for (uint32_t i = left->row[y]; i < left->row[y + 1] && status == FW_OK; i++) {
            if (touched[regions.label[i]] == IN_INNER)
                status = fw_runs_push(out, y, left->run[i].x0, left->run[i].x1, fault);
        }
    }
    fw_runs_finish(out);
    fw_regions_free(&regions);
    free(touched);
    return status;
}

/* out = what the cylinder reaches from these centres. */
static fw_status reach(const fw_setup *setup, const fw_runs *centres, fw_runs *out, fw_fault *fault)
{
    return fw_runs_dilate(centres, setup->vent_px[0], setup->vent_px[1], out, fault);
}

/* out = `inner`, as far as it is void and not sealed anyway, and its corners. */
static fw_status round_out(const fw_sheet *sheet, const fw_runs *inner, const fw_runs *outer,
                           fw_runs *out, fw_fault *fault)
{
    fw_runs open = {0}, reached = {0}, both = {0}, left = {0}, corners = {0};
    fw_status status = pick_voids(sheet, false, &open, fault);
    if (status == FW_OK)
        status = fw_runs_intersect(inner, &open, &reached, fault);
    if (status == FW_OK)
        status = fw_runs_unite(&reached, outer, &both, fault);
    if (status == FW_OK)
        status = fw_runs_subtract(&open, &both, &left, fault);
    if (status == FW_OK)
        status = pick_corners(&left, &reached, outer, &corners, fault);
    if (status == FW_OK)
        status = fw_runs_unite(&reached, &corners, out, fault);
    fw_runs_free(&open);
    fw_runs_free(&reached);
    fw_runs_free(&both);
    fw_runs_free(&left);
    fw_runs_free(&corners);
    return status;
}

static fw_status find_reached(const fw_vents *vents, const fw_sheet *sheet, const fw_runs *cut_off,
                              fw_runs *out, fw_fault *fault)
{
    fw_runs free_centres = {0}, inner = {0}, outer = {0};
    fw_status status = reach(vents->setup, cut_off, &inner, fault);
    if (status == FW_OK)
        status = pick_centres(vents, false, &free_centres, fault);
    if (status == FW_OK)
        status = reach(vents->setup, &free_centres, &outer, fault);
    if (status == FW_OK)
        status = round_out(sheet, &inner, &outer, out, fault);
    fw_runs_free(&free_centres);
    fw_runs_free(&inner);
    fw_runs_free(&outer);
    return status;
}

/* What is sealed and what is as good as sealed; the two never touch: they lie in different voids.
 */
static fw_status unite(const fw_vents *vents, fw_sheet *sheet, const fw_runs *cut_off,
                       fw_fault *fault)
{
    fw_runs reached = {0}, sealed = {0};
    fw_status status = find_reached(vents, sheet, cut_off, &reached, fault);
    if (status == FW_OK)
        status = pick_voids(sheet, true, &sealed, fault);
    if (status == FW_OK)
        status = fw_runs_unite(&reached, &sealed, &sheet->shut, fault);
    if (status == FW_OK)
        status = fw_regions_label(&sheet->shut, FW_EIGHT, &sheet->shut_regions, fault);
    fw_runs_free(&reached);
    fw_runs_free(&sealed);
    return status;
}

/* Gives the shut regions that a run meets a body: the smallest name wins, and a void that is sealed
 * has a smaller one than any other. */
static void name(fw_sheet *sheet, fw_run run, int32_t y, uint32_t body)
{
    const fw_runs *shut = &sheet->shut;
    uint32_t low = fw_runs_seek(shut, run.x0, y);
    for (; low < shut->row[y + 1] && shut->run[low].x0 < run.x1; low++) {
        uint32_t *is = &sheet->shut_body[sheet->shut_regions.label[low]];
        *is = body < *is ? body : *is;
    }
}

static void name_bodies(const fw_vents *vents, fw_sheet *sheet, const fw_runs *cut_off)
{
    const fw_runs *voids = &sheet->slice.voids, *centres = &vents->centres[vents->newest];
    for (uint32_t r = 0; r < sheet->shut_regions.count; r++)
        sheet->shut_body[r] = FW_OPEN;
    for (int32_t y = 0; y < voids->height; y++) {
        for (uint32_t i = voids->row[y]; i < voids->row[y + 1]; i++) {
            const uint32_t body = sheet->cavity[sheet->slice.void_regions.label[i]];
            if (body != FW_OPEN)
                name(sheet, voids->run[i], y, body);
        }
        for (uint32_t i = cut_off->row[y]; i < cut_off->row[y + 1]; i++) {
            const uint32_t run = fw_runs_find(centres, cut_off->run[i].x0, y);
            const uint32_t region = vents->regions[vents->newest].label[run];
            name(sheet, cut_off->run[i], y, POOR + fw_bodies_of_region(&vents->bodies, region));
        }
    }
}

static fw_status note_poor(const fw_setup *setup, const fw_sheet *sheet, fw_findings *findings,
                           fw_fault *fault)
{
    for (uint32_t r = 0; r < sheet->shut_regions.count; r++) {
        const fw_region *region = &sheet->shut_regions.region[r];
        const double pixels = (double)region->pixels, area = pixels * setup->px_mm * setup->py_mm;
        if (sheet->shut_body[r] < POOR || area < FW_SMALL_CAVITY_MM2)
            continue;
        fw_finding finding = {.kind = FW_POOR_VENT,
                              .severity = FW_WARN,
                              .group = sheet->shut_body[r] - POOR,
                              .layer = sheet->layer,
                              .x_mm = fw_setup_x(setup, (double)region->sum_x / pixels),
                              .y_mm = fw_setup_y(setup, (double)region->sum_y / pixels),
                              .pixels = region->pixels,
                              .area_mm2 = area,
                              .margin = NAN,
                              .post = -1,
                              .badness = area};
        (void)snprintf(
            finding.message, sizeof finding.message,
            "%.4g mm2 open to the vat only through less than %.3g mm: it counts as sealed", area,
            setup->vent_mm);
        FW_TRY(fw_findings_add(findings, &finding, fault));
    }
    return FW_OK;
}

static fw_status shut(const fw_vents *vents, fw_sheet *sheet, const fw_runs *cut_off,
                      fw_findings *findings, fw_fault *fault)
{
    FW_TRY(unite(vents, sheet, cut_off, fault));
    FW_TRY(fw_grow((void **)&sheet->shut_body, &sheet->shut_capacity,
                   (size_t)sheet->shut_regions.count + 1, sizeof *sheet->shut_body, holder, fault));
    name_bodies(vents, sheet, cut_off);
    sheet->openings = (fw_openings){&sheet->shut, &sheet->shut_regions, sheet->shut_body, POOR};
    return note_poor(vents->setup, sheet, findings, fault);
}

fw_status fw_vents_step(fw_vents *vents, fw_sheet *sheet, fw_findings *findings, fw_fault *fault)
{
    sheet->openings =
        (fw_openings){&sheet->slice.voids, &sheet->slice.void_regions, sheet->cavity, 0};
    if (vents->setup->vent_mm == 0)
        return FW_OK;
    fw_runs cut_off = {0};
    FW_TRY(step_centres(vents, sheet, fault));
    fw_status status = pick_centres(vents, true, &cut_off, fault);
    if (status == FW_OK && cut_off.count > 0)
        status = shut(vents, sheet, &cut_off, findings, fault);
    fw_runs_free(&cut_off);
    return status;
}

static uint64_t root_of(void *bodies, uint64_t id)
{
    return fw_bodies_root(bodies, (uint32_t)id);
}

void fw_vents_finish(fw_vents *vents, fw_findings *findings)
{
    fw_findings_regroup(findings, FW_POOR_VENT, root_of, &vents->bodies);
}
