#include "check/gate.h"

#include <math.h>
#include <stdio.h>

typedef struct check_row {
    fw_kind kind;
    fw_check check;
    const char *what;
} check_row;

static const check_row checks[FW_POST_CHECKS] = {
    [FW_POST_TIP] = {FW_TIP_OVERLOAD, FW_CHECK_TIP, "contact"},
    [FW_POST_NECK] = {FW_NECK_OVERLOAD, FW_CHECK_NECK, "neck"},
    [FW_POST_SHAFT] = {FW_SHAFT_OVERLOAD, FW_CHECK_SHAFT, "shaft"},
    [FW_POST_FOOT] = {FW_FOOT_OVERLOAD, FW_CHECK_FOOT, "foot"},
};

static fw_finding of_post(const fw_post *post, fw_kind kind)
{
    return (fw_finding){.kind = kind,
                        .severity = FW_FAIL,
                        .group = (uint64_t)post->id,
                        .layer = post->tip_layer,
                        .x_mm = post->path[0].x,
                        .y_mm = post->path[0].y,
                        .margin = NAN,
                        .post = post->id,
                        .badness = 0};
}

static fw_status note_unroutable(const fw_post *post, fw_report *out, fw_fault *fault)
{
    fw_finding finding = of_post(post, FW_UNROUTABLE);
    (void)snprintf(finding.message, sizeof finding.message,
                   "post %d finds no path to the plate within lean and clearance", post->id);
    return fw_findings_add(&out->findings, &finding, fault);
}

static fw_status note_stub(const fw_post *post, const fw_post_account *account, fw_report *out,
                           fw_fault *fault)
{
    const double contact = account->section.area_mm2[FW_POST_TIP];
    const bool broken = account->seen_layers < post->tip_layer;
    const bool loose = !(contact > 0) || isinf(contact);
    if (!broken && !loose)
        return FW_OK;
    fw_finding finding = of_post(post, FW_STUB);
    if (broken)
        (void)snprintf(finding.message, sizeof finding.message,
                       "post %d shows in %d of its %d layers", post->id, account->seen_layers,
                       post->tip_layer);
    else
        (void)snprintf(finding.message, sizeof finding.message, "post %d ends short of the part",
                       post->id);
    return fw_findings_add(&out->findings, &finding, fault);
}

/* One check of one post. */
typedef struct failed_check {
    int check;
    double area_mm2, load_N, margin;
} failed_check;

static fw_status note_overload(const fw_conclusion *conclusion, const fw_post *post,
                               failed_check failed, fw_report *out, fw_fault *fault)
{
    fw_finding finding = of_post(post, checks[failed.check].kind);
    finding.margin = failed.margin;
    finding.badness = -failed.margin;
    finding.area_mm2 = failed.area_mm2;
    (void)snprintf(finding.message, sizeof finding.message,
                   "the %s of post %d (%.4g mm2) carries %.4g N at margin %.3g, the gate asks %.3g",
                   checks[failed.check].what, post->id, failed.area_mm2, failed.load_N,
                   failed.margin, conclusion->setup->job->rules.margin);
    return fw_findings_add(&out->findings, &finding, fault);
}

static fw_status judge_push(const fw_conclusion *conclusion, size_t index, fw_report *out,
                            fw_fault *fault)
{
    const fw_job *job = conclusion->setup->job;
    const fw_post *post = &conclusion->posts->item[index];
    const fw_post_push *push = &conclusion->share->post[index].push;
    fw_post_result *result = &out->post_result[index];
    const double margin =
        fw_post_push_margin(post, job->resin.modulus_MPa, conclusion->setup->t_mm, push);
    if (margin < result->margin || isnan(result->margin)) {
        result->margin = margin;
        result->governs = isnan(margin) ? result->governs : FW_CHECK_BUCKLING;
    }
    if (!(margin < job->rules.margin))
        return FW_OK;
    fw_finding finding = of_post(post, FW_SHAFT_BUCKLING);
    finding.margin = margin;
    finding.badness = -margin;
    (void)snprintf(finding.message, sizeof finding.message,
                   "post %d is pushed by %.4g N and buckles at %.3g times that, the gate asks %.3g",
                   post->id, fmax(push->free_N, push->braced_N), margin, job->rules.margin);
    return fw_findings_add(&out->findings, &finding, fault);
}

static fw_status judge_post(const fw_conclusion *conclusion, size_t index, fw_report *out,
                            fw_fault *fault)
{
    const fw_setup *setup = conclusion->setup;
    const fw_post *post = &conclusion->posts->item[index];
    const fw_post_account *account = &conclusion->share->post[index];
    const double contact = account->section.area_mm2[FW_POST_TIP];
    fw_post_result *result = &out->post_result[index];
    fw_post_demand demand;
    fw_post_section section;
    fw_share_judged(conclusion->share, index, &demand, &section);
    *result = (fw_post_result){.load_N = demand.load_N[FW_POST_TIP],
                               .load_layer = account->load_layer,
                               .contact_mm2 = isfinite(contact) ? contact : 0,
                               .margin = NAN};
    if (!post->routed)
        return note_unroutable(post, out, fault);
    FW_TRY(note_stub(post, account, out, fault));
    if (!setup->loads)
        return FW_OK;
    const fw_post_margins margins = fw_margins_of(&setup->job->resin, &demand, &section);
    result->margin = margins.least;
    if (margins.governs < FW_POST_CHECKS)
        result->governs = checks[margins.governs].check;
    for (int check = 0; check < FW_POST_CHECKS; check++) {
        const failed_check failed = {check, section.area_mm2[check], demand.load_N[check],
                                     margins.margin[check]};
        if (failed.margin < setup->job->rules.margin)
            FW_TRY(note_overload(conclusion, post, failed, out, fault));
    }
    return judge_push(conclusion, index, out, fault);
}

fw_status fw_gate_posts(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault)
{
    if (!conclusion->looked_for_posts)
        return FW_OK;
    for (size_t p = 0; p < conclusion->posts->count; p++)
        FW_TRY(judge_post(conclusion, p, out, fault));
    return FW_OK;
}

fw_status fw_gate_plates(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault)
{
    const fw_job *job = conclusion->setup->job;
    for (size_t i = 0; i < conclusion->share->plate_count; i++) {
        const fw_plate_account *plate = &conclusion->share->plate[i];
        const double margin = plate->area_mm2 * job->resin.plate_adhesion_MPa / plate->load_N;
        if (!(margin < job->rules.margin))
            continue;
        fw_finding finding = {.kind = FW_PLATE_OVERLOAD,
                              .severity = FW_FAIL,
                              .group = i,
                              .layer = plate->load_layer,
                              .x_mm = plate->x_mm,
                              .y_mm = plate->y_mm,
                              .area_mm2 = plate->area_mm2,
                              .margin = margin,
                              .post = -1,
                              .badness = -margin};
        (void)snprintf(finding.message, sizeof finding.message,
                       "%.4g mm2 of part on the plate carry %.4g N at margin %.3g, the gate asks "
                       "%.3g",
                       plate->area_mm2, plate->load_N, margin, job->rules.margin);
        FW_TRY(fw_findings_add(&out->findings, &finding, fault));
    }
    return FW_OK;
}

static fw_status note_peak(const fw_report *at, uint64_t group, const char *whose, double limit_N,
                           fw_report *out, fw_fault *fault)
{
    if (!(limit_N > 0) || !(at->totals.peak_peel_N > limit_N))
        return FW_OK;
    fw_finding finding = {.kind = FW_DRIVE_OVERLOAD,
                          .severity = FW_FAIL,
                          .group = group,
                          .layer = at->totals.peak_layer,
                          .margin = limit_N / at->totals.peak_peel_N,
                          .post = -1,
                          .badness = at->totals.peak_peel_N};
    (void)snprintf(finding.message, sizeof finding.message, "peel load %.4g N, %s allows %.4g N",
                   at->totals.peak_peel_N, whose, limit_N);
    return fw_findings_add(&out->findings, &finding, fault);
}

fw_status fw_gate_peel(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault)
{
    const fw_job *job = conclusion->setup->job;
    if (!conclusion->setup->loads)
        return FW_OK;
    FW_TRY(note_peak(out, 0, "the drive", job->machine.drive_limit_N, out, fault));
    return note_peak(out, 1, "the gate", job->max_peel_N, out, fault);
}

fw_status fw_gate_assumed(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault)
{
    if (out->basis[FW_ASSUMED] == 0)
        return FW_OK;
    fw_finding finding = {.kind = FW_ASSUMED_VALUE,
                          .severity = conclusion->setup->job->refuse_assumed ? FW_FAIL : FW_WARN,
                          .margin = NAN,
                          .post = -1};
    (void)snprintf(finding.message, sizeof finding.message,
                   "%d group(s) of card values are assumed, %d from the supplier, %d measured",
                   out->basis[FW_ASSUMED], out->basis[FW_SUPPLIER], out->basis[FW_MEASURED]);
    return fw_findings_add(&out->findings, &finding, fault);
}
