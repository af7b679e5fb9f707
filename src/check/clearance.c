#include "check/clearance.h"

#include "fault/memory.h"
#include "posts/profile.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

static const char holder[] = "clearance window";

fw_status fw_clearance_open(const fw_setup *setup, const fw_posts *posts, fw_clearance *out,
                            fw_fault *fault)
{
    const double clearance = setup->job->rules.clearance_mm;
    *out = (fw_clearance){.setup = setup, .posts = posts, .clearance_mm = clearance};
    out->window = (int32_t)ceil(clearance / setup->t_mm) + 1;
    FW_TRY(fw_allocate((void **)&out->kept, (size_t)out->window, sizeof *out->kept, holder, fault));
    for (int32_t i = 0; i < out->window; i++)
        out->kept[i].layer = -1;
    return FW_OK;
}

void fw_clearance_close(fw_clearance *clearance)
{
    for (int32_t i = 0; i < clearance->window && clearance->kept != NULL; i++) {
        fw_runs_free(&clearance->kept[i].part);
        fw_runs_free(&clearance->kept[i].wide);
        fw_member_runs_free(&clearance->kept[i].shafts);
    }
    free(clearance->kept);
    *clearance = (fw_clearance){0};
}

/* In the plane, how close is too close for layers `apart` apart (the slabs of neighbouring layers
 * touch); negative: never. A hair less than the clearance, so that exactly the clearance passes. */
static double reach_at(const fw_clearance *clearance, int32_t apart)
{
    const double c = clearance->clearance_mm - 1e-6;
    const double gap = apart > 0 ? (apart - 1) * clearance->setup->t_mm : 0;
    return gap < c ? sqrt(c * c - gap * gap) : -1;
}

typedef struct shaft_rule {
    const fw_clearance *clearance;
    int32_t layer;
    int32_t only; /* post, or -1: any */
} shaft_rule;

static bool is_shaft(void *context, int32_t index)
{
    const shaft_rule *rule = context;
    const fw_post *post = &rule->clearance->posts->item[index];
    const double t = rule->clearance->setup->t_mm;
    const double neck = fmax(post->neck_mm, rule->clearance->clearance_mm + t);
    const bool below = fw_post_middle(rule->layer, t) < fw_post_face(post, t) - neck;
    return below && (rule->only < 0 || rule->only == index);
}

static fw_status is_close(const fw_clearance *clearance, const fw_clearance_layer *shafts,
                          const fw_clearance_layer *part, int32_t only, fw_runs *close,
                          fw_fault *fault)
{
    const int32_t apart = abs(shafts->layer - part->layer);
    const double reach = reach_at(clearance, apart);
    shaft_rule rule = {clearance, shafts->layer, only};
    fw_runs set = {0}, wide = {0};
    close->count = 0;
    if (reach < 0)
        return FW_OK;
    fw_status status = fw_members_set(&shafts->shafts, is_shaft, &rule, &set, fault);
    if (status == FW_OK && set.count > 0) {
        status = fw_runs_dilate(&set, reach / clearance->setup->px_mm,
                                reach / clearance->setup->py_mm, &wide, fault);
        if (status == FW_OK)
            status = fw_runs_intersect(&wide, &part->part, close, fault);
    }
    fw_runs_free(&set);
    fw_runs_free(&wide);
    return status;
}

static fw_status note_close(const fw_clearance *clearance, int32_t post, int32_t layer,
                            const fw_runs *close, fw_findings *findings, fw_fault *fault)
{
    int32_t y = 0;
    while (close->row[y + 1] == 0)
        y++;
    const int64_t pixels = fw_runs_pixels(close);
    const fw_setup *setup = clearance->setup;
    fw_finding finding = {.kind = FW_CLEARANCE,
                          .severity = FW_FAIL,
                          .group = (uint64_t)post,
                          .layer = layer,
                          .x_mm = fw_setup_x(setup, close->run[0].x0),
                          .y_mm = fw_setup_y(setup, y),
                          .pixels = pixels,
                          .area_mm2 = (double)pixels * setup->px_mm * setup->py_mm,
                          .margin = NAN,
                          .post = post,
                          .badness = (double)pixels};
    (void)snprintf(finding.message, sizeof finding.message,
                   "post %d runs closer than %.3g mm to the part", post, clearance->clearance_mm);
    return fw_findings_add(findings, &finding, fault);
}

/* Something is too close: which posts? Each on its own, in order. */
static fw_status name_posts(const fw_clearance *clearance, const fw_clearance_layer *shafts,
                            const fw_clearance_layer *part, fw_findings *findings, fw_fault *fault)
{
    fw_runs close = {0};
    fw_status status = FW_OK;
    for (size_t p = 0; p < clearance->posts->count && status == FW_OK; p++) {
        status = is_close(clearance, shafts, part, (int32_t)p, &close, fault);
        if (status == FW_OK && close.count > 0)
            status = note_close(clearance, (int32_t)p, shafts->layer, &close, findings, fault);
    }
    fw_runs_free(&close);
    return status;
}

static fw_status check_pair(const fw_clearance *clearance, const fw_clearance_layer *shafts,
                            const fw_clearance_layer *part, fw_findings *findings, fw_fault *fault)
{
    if (shafts->shafts.count == 0 || part->part.count == 0 ||
        !fw_runs_meet(&shafts->wide, &part->part))
        return FW_OK;
    return name_posts(clearance, shafts, part, findings, fault);
}

/* The shafts and feet of a layer, and all that is too close to them in the plane. */
static fw_status keep_shafts(const fw_clearance *clearance, const fw_sheet *sheet,
                             fw_clearance_layer *slot, fw_fault *fault)
{
    const fw_setup *setup = clearance->setup;
    shaft_rule rule = {clearance, sheet->layer, -1};
    fw_runs set = {0};
    fw_status status = fw_members_set(&sheet->intended_members, is_shaft, &rule, &set, fault);
    if (status == FW_OK && set.count > 0) {
        const double reach = reach_at(clearance, 0);
        status = fw_members_within(&sheet->intended_members, &set, &slot->shafts, fault);
        if (status == FW_OK)
            status = fw_runs_dilate(&set, reach / setup->px_mm, reach / setup->py_mm, &slot->wide,
                                    fault);
    }
    fw_runs_free(&set);
    return status;
}

static fw_status keep(fw_clearance *clearance, const fw_sheet *sheet, fw_fault *fault)
{
    fw_clearance_layer *slot = &clearance->kept[sheet->layer % clearance->window];
    slot->layer = sheet->layer;
    fw_members_clear(&slot->shafts);
    if (sheet->intended_members.count > 0)
        FW_TRY(keep_shafts(clearance, sheet, slot, fault));
    return fw_runs_copy(fw_sheet_part(sheet), &slot->part, fault);
}

fw_status fw_clearance_step(fw_clearance *clearance, const fw_sheet *sheet, fw_findings *findings,
                            fw_fault *fault)
{
    FW_TRY(keep(clearance, sheet, fault));
    const fw_clearance_layer *now = &clearance->kept[sheet->layer % clearance->window];
    for (int32_t apart = 0; apart < clearance->window; apart++) {
        if (apart > sheet->layer)
            break;
        const fw_clearance_layer *then =
            &clearance->kept[(sheet->layer - apart) % clearance->window];
        FW_TRY(check_pair(clearance, now, then, findings, fault));
        if (apart > 0)
            FW_TRY(check_pair(clearance, then, now, findings, fault));
    }
    return FW_OK;
}
