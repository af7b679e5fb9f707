#include "check/voids.h"

#include "fault/memory.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "cavities of the stack";

/* All small cavities are one finding: a porous part would else have thousands. */
static const uint64_t small_group = UINT64_MAX;

/* void regions on the border are open to the vat; the plate closes layer 0. */
static fw_status step_bodies(fw_ground *ground, fw_sheet *sheet, const fw_sheet *before,
                             fw_fault *fault)
{
    const fw_regions *voids = &sheet->slice.void_regions;
    uint8_t *open = NULL;
    FW_TRY(fw_allocate((void **)&open, voids->count, sizeof *open, holder, fault));
    for (uint32_t v = 0; v < voids->count; v++)
        open[v] = voids->region[v].on_border;
    const fw_status status =
        fw_bodies_step(&ground->voids, sheet->layer, voids,
                       before != NULL ? &sheet->void_from_before : NULL, open, fault);
    free(open);
    return status;
}

static fw_status note_blind(fw_ground *ground, const fw_sheet *sheet, uint32_t v, double area,
                            fw_findings *findings, fw_fault *fault)
{
    const fw_setup *setup = ground->setup;
    const fw_region *region = &sheet->slice.void_regions.region[v];
    const bool small = area < FW_SMALL_CAVITY_MM2;
    fw_finding finding = {.kind = FW_BLIND_CAVITY,
                          .severity = small ? FW_NOTE : FW_WARN,
                          .group = small ? small_group : sheet->cavity[v],
                          .layer = sheet->layer,
                          .x_mm = fw_setup_x(setup, (double)region->sum_x / (double)region->pixels),
                          .y_mm = fw_setup_y(setup, (double)region->sum_y / (double)region->pixels),
                          .pixels = region->pixels,
                          .area_mm2 = area,
                          .margin = NAN,
                          .post = -1,
                          .badness = area};
    (void)snprintf(finding.message, sizeof finding.message,
                   small ? "cavities of under %.2g mm2, closed toward the plate"
                         : "%.4g mm2 closed toward the plate and around",
                   small ? FW_SMALL_CAVITY_MM2 : area);
    return fw_findings_add(findings, &finding, fault);
}

/* A sealed void never reaches the border, so both ends of each of its runs have a neighbour. */
static fw_status mark_posts(fw_ground *ground, const fw_sheet *sheet, fw_fault *fault)
{
    const size_t before = ground->touches_capacity;
    FW_TRY(fw_grow((void **)&ground->touches_post, &ground->touches_capacity,
                   (size_t)ground->voids.count + 1, sizeof *ground->touches_post, holder, fault));
    memset(ground->touches_post + before, 0, ground->touches_capacity - before);
    if (sheet->solid_members.count == 0)
        return FW_OK;
    const fw_runs *voids = &sheet->slice.voids;
    for (int32_t y = 0; y < voids->height; y++) {
        for (uint32_t i = voids->row[y]; i < voids->row[y + 1]; i++) {
            const uint32_t body = sheet->cavity[sheet->slice.void_regions.label[i]];
            if (body != FW_OPEN &&
                (fw_members_at(&sheet->solid_members, voids->run[i].x0 - 1, y) >= 0 ||
                 fw_members_at(&sheet->solid_members, voids->run[i].x1, y) >= 0))
                ground->touches_post[body] = 1;
        }
    }
    return FW_OK;
}

fw_status fw_voids_step(fw_ground *ground, fw_sheet *sheet, const fw_sheet *before,
                        fw_layer_row *row, fw_findings *findings, fw_fault *fault)
{
    FW_TRY(step_bodies(ground, sheet, before, fault));
    const fw_regions *voids = &sheet->slice.void_regions;
    int64_t sealed = 0;
    for (uint32_t v = 0; v < voids->count; v++) {
        const uint32_t body = fw_bodies_of_region(&ground->voids, v);
        sheet->cavity[v] = fw_bodies_grounded(&ground->voids, body) ? FW_OPEN : body;
        if (sheet->cavity[v] == FW_OPEN)
            continue;
        sealed += voids->region[v].pixels;
        const double area =
            (double)voids->region[v].pixels * ground->setup->px_mm * ground->setup->py_mm;
        FW_TRY(note_blind(ground, sheet, v, area, findings, fault));
    }
    row->blind_cavity_mm2 = (double)sealed * ground->setup->px_mm * ground->setup->py_mm;
    return mark_posts(ground, sheet, fault);
}

static fw_finding of_body(const fw_setup *setup, const fw_body *body, fw_kind kind, uint64_t group)
{
    const double volume = (double)body->pixels * setup->px_mm * setup->py_mm * setup->t_mm;
    fw_finding finding = {.kind = kind,
                          .severity = FW_WARN,
                          .group = group,
                          .layer = body->first_layer,
                          .x_mm = (body->x0 + body->x1) * setup->px_mm / 2,
                          .y_mm = (body->y0 + body->y1) * setup->py_mm / 2,
                          .pixels = body->pixels,
                          .area_mm2 = (double)body->pixels * setup->px_mm * setup->py_mm,
                          .margin = NAN,
                          .post = -1,
                          .badness = volume};
    (void)snprintf(finding.message, sizeof finding.message,
                   "%.4g mm3 of liquid closed in from layer %d to %d", volume, body->first_layer,
                   body->last_layer);
    return finding;
}

/* Posts stand in the vat, so a void that a post helps to seal was open in the raw stack. */
static void inherit_posts(fw_ground *ground)
{
    for (uint32_t id = 0; id < ground->voids.count; id++) {
        if (ground->touches_post[id])
            ground->touches_post[fw_bodies_root(&ground->voids, id)] = 1;
    }
}

static uint64_t root_void(void *bodies, uint64_t id)
{
    return id == small_group ? id : fw_bodies_root(bodies, (uint32_t)id);
}

/* A void that still reaches the newest layer is open there once the print ends. */
fw_status fw_voids_finish(fw_ground *ground, fw_findings *findings, fw_fault *fault)
{
    const fw_setup *setup = ground->setup;
    inherit_posts(ground);
    for (uint32_t id = 0; id < ground->voids.count; id++) {
        const fw_body *body = &ground->voids.body[id];
        if (body->parent != id || body->grounded || body->last_layer == setup->layers - 1)
            continue;
        const bool small = (double)body->pixels * setup->px_mm * setup->py_mm * setup->t_mm <
                           FW_SMALL_CAVITY_MM2 * setup->t_mm;
        fw_finding finding = of_body(setup, body, FW_ENCLOSED_RESIN, small ? small_group : id);
        finding.severity = small ? FW_NOTE : FW_WARN;
        FW_TRY(fw_findings_add(findings, &finding, fault));
        if (!ground->touches_post[id])
            continue;
        finding = of_body(setup, body, FW_NEW_VOID, id);
        finding.severity = FW_FAIL;
        FW_TRY(fw_findings_add(findings, &finding, fault));
    }
    fw_findings_regroup(findings, FW_BLIND_CAVITY, root_void, &ground->voids);
    return FW_OK;
}
