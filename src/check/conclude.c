#include "check/conclude.h"

#include "check/gate.h"
#include "check/speed.h"
#include "fault/memory.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "report";

static void describe(const fw_conclusion *conclusion, fw_report *out)
{
    const fw_setup *setup = conclusion->setup;
    const fw_job *job = setup->job;
    out->layers = setup->layers;
    out->raw_layers = setup->layers - setup->lift;
    out->lift_layers = setup->lift;
    out->width_px = setup->width;
    out->height_px = setup->height;
    out->pixel_um[0] = job->pixel_um[0];
    out->pixel_um[1] = job->pixel_um[1];
    out->layer_um = job->layer_um;
    out->gate_margin = job->rules.margin;
    if (job->has_resin) {
        (void)snprintf(out->resin_name, sizeof out->resin_name, "%s", job->resin.name);
        (void)snprintf(out->resin_lot, sizeof out->resin_lot, "%s", job->resin.lot);
        out->basis[job->resin.basis_viscosity]++;
        out->basis[job->resin.basis_cure]++;
        out->basis[job->resin.basis_green]++;
        out->basis[job->resin.basis_support]++;
    }
    if (job->has_machine) {
        (void)snprintf(out->machine_name, sizeof out->machine_name, "%s", job->machine.name);
        out->basis[job->machine.basis_separation]++;
        out->basis[job->machine.basis_frame]++;
    }
}

static void not_checked(fw_report *out, const char *what)
{
    out->not_checked[out->not_checked_count++] = what;
}

/* What this run, and what this version, cannot say: listed, so that silence is never taken for a
 * pass. */
static void list_not_checked(const fw_conclusion *conclusion, fw_report *out)
{
    const fw_job *job = conclusion->setup->job;
    if (!job->has_resin)
        not_checked(out, "overreach, cured area, strength: the job names no resin card");
    if (!job->has_machine)
        not_checked(out, "peel load: the job names no machine card");
    if (!conclusion->setup->loads)
        not_checked(out, "margins: they need both cards");
    if (conclusion->setup->traction.law == FW_TRACTION_SHEAR)
        not_checked(out, "the pull after the slide, frame compliance, and what shears a post that "
                         "stands alone in its layer");
    else if (conclusion->setup->traction.law == FW_TRACTION_NONE)
        not_checked(out, job->machine.stiffness_N_mm > 0
                             ? "how a film or coating of the window gives: only the machine does"
                             : "frame compliance, and how a film or coating of the window gives: "
                               "the load is that of a rigid machine");
    else
        not_checked(out,
                    "whether the measured separation law holds here: it knows no gap, viscosity "
                    "or speed, and nothing beyond the shapes and areas that it was measured on");
    not_checked(out, "punching of the skin round a tip, necks within the part");
    if (job->machine.approach_mm_s == 0)
        not_checked(out, "the push on the posts on the way back to the window: the machine card "
                         "says nothing of it");
    not_checked(out, "bled features, and the dose of other layers");
}

static void sum_up(const fw_conclusion *conclusion, fw_report *out)
{
    const fw_setup *setup = conclusion->setup;
    const double voxel = setup->px_mm * setup->py_mm * setup->t_mm;
    fw_totals *totals = &out->totals;
    *totals = (fw_totals){.posts = (int32_t)conclusion->posts->count,
                          .support_volume_mm3 = conclusion->support_px * voxel,
                          .part_volume_mm3 = conclusion->part_px * voxel,
                          .peak_peel_N = NAN,
                          .peak_layer = -1,
                          .peak_range_N = {NAN, NAN}};
    if (!setup->loads)
        return;
    for (int end = 0; end < 2; end++) /* a measured law knows no gap */
        totals->peak_range_N[end] =
            setup->traction.law == FW_TRACTION_NONE || setup->traction.law == FW_TRACTION_SHEAR
                ? conclusion->range_N[end]
                : NAN;
    for (int32_t n = 0; n < setup->layers; n++) {
        const fw_layer_row *row = &out->layer[n];
        totals->capped_layers += row->limited_by == FW_BY_CAP;
        totals->bound_layers += row->limited_by == FW_BY_BOUND;
        if (!(row->peel_N <= totals->peak_peel_N)) {
            totals->peak_peel_N = row->peel_N;
            totals->peak_layer = n;
        }
    }
}

static fw_status copy_posts(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault)
{
    const size_t count = conclusion->posts->count;
    FW_TRY(fw_grow((void **)&out->posts.item, &out->posts.capacity, count, sizeof(fw_post), holder,
                   fault));
    if (count > 0)
        memcpy(out->posts.item, conclusion->posts->item, count * sizeof(fw_post));
    out->posts.count = count;
    return fw_allocate((void **)&out->post_result, count, sizeof *out->post_result, holder, fault);
}

static void sum_tips(fw_report *out)
{
    for (size_t p = 0; p < out->posts.count; p++)
        out->totals.tip_area_mm2 += out->post_result[p].contact_mm2;
}

/* ---- parts ------------------------------------------------------------------------------- */

static fw_part_row part_of(const fw_setup *setup, const fw_body *body, int32_t id)
{
    return (fw_part_row){.id = id,
                         .first_layer = body->first_layer,
                         .last_layer = body->last_layer,
                         .box_mm = {body->x0 * setup->px_mm, body->y0 * setup->py_mm,
                                    body->x1 * setup->px_mm, body->y1 * setup->py_mm},
                         .volume_mm3 =
                             (double)body->pixels * setup->px_mm * setup->py_mm * setup->t_mm,
                         .worst_margin = NAN};
}

static void add_anchors(const fw_conclusion *conclusion, const int32_t *row_of, fw_report *out)
{
    const fw_bodies *parts = &conclusion->ground->parts;
    const fw_share *share = conclusion->share;
    for (size_t p = 0; p < out->posts.count && p < share->post_count; p++) {
        if (share->post[p].part < 0)
            continue;
        fw_part_row *row = &out->part[row_of[fw_bodies_root(parts, (uint32_t)share->post[p].part)]];
        row->posts++;
        row->worst_margin = fmin(row->worst_margin, out->post_result[p].margin);
    }
    for (size_t i = 0; i < share->plate_count; i++) {
        const fw_plate_account *plate = &share->plate[i];
        if (plate->part == UINT32_MAX || plate->load_N == 0)
            continue;
        fw_part_row *row = &out->part[row_of[fw_bodies_root(parts, plate->part)]];
        row->worst_margin = fmin(
            row->worst_margin,
            plate->area_mm2 * conclusion->setup->job->resin.plate_adhesion_MPa / plate->load_N);
    }
}

static fw_status list_parts(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault)
{
    const fw_bodies *parts = &conclusion->ground->parts;
    int32_t *row_of = NULL;
    FW_TRY(fw_allocate((void **)&row_of, parts->count, sizeof *row_of, holder, fault));
    size_t capacity = 0;
    fw_status status = FW_OK;
    for (uint32_t id = 0; id < parts->count && status == FW_OK; id++) {
        if (parts->body[id].parent != id)
            continue;
        status = fw_grow((void **)&out->part, &capacity, out->part_count + 1, sizeof *out->part,
                         holder, fault);
        if (status != FW_OK)
            break;
        row_of[id] = (int32_t)out->part_count;
        out->part[out->part_count] =
            part_of(conclusion->setup, &parts->body[id], (int32_t)out->part_count);
        out->part_count++;
    }
    if (status == FW_OK)
        add_anchors(conclusion, row_of, out);
    free(row_of);
    return status;
}

/* ---- verdict ----------------------------------------------------------------------------- */

static fw_verdict decide(const fw_conclusion *conclusion, const fw_report *out)
{
    if (!conclusion->setup->loads)
        return FW_INCOMPLETE;
    return fw_findings_count(&out->findings, FW_FAIL) > 0 ? FW_FAILED : FW_PASS;
}

fw_status fw_conclude(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault)
{
    describe(conclusion, out);
    list_not_checked(conclusion, out);
    sum_up(conclusion, out);
    FW_TRY(copy_posts(conclusion, out, fault));
    FW_TRY(fw_gate_posts(conclusion, out, fault));
    FW_TRY(fw_gate_plates(conclusion, out, fault));
    FW_TRY(fw_gate_peel(conclusion, out, fault));
    FW_TRY(fw_gate_assumed(conclusion, out, fault));
    sum_tips(out);
    FW_TRY(fw_speed_caps(conclusion, out, fault));
    FW_TRY(list_parts(conclusion, out, fault));
    fw_findings_sort(&out->findings);
    out->verdict = decide(conclusion, out);
    return FW_OK;
}
