#include "passes/fit.h"

#include "passes/bites.h"
#include "passes/extras.h"
#include "passes/sizes.h"
#include "passes/tips.h"
#include "physics/cure.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

/* Everything that the rounds work on. */
typedef struct fitting {
    const fw_pass *pass;
    const fw_raw *raw;
    const fw_job *job;
    fw_fit *fit;
    fw_screen contact; /* the screen, where only pixels count that are at least half covered */
    fw_lattice *lattice;
    fw_route_rules route;
    fw_setup setup;
    fw_posts missed;  /* places that no path leads to, of the newest placing pass */
    unsigned *failed; /* [count of placed posts] what the newest sizing could not meet */
    size_t failed_capacity;
    fw_judge *judge; /* of the newest judging round, NULL before it */
    size_t placed;   /* fit->posts.item[0 .. placed) are posts, the rest is `missed` */
} fitting;

static fw_status set_up(fitting *now, fw_fault *fault)
{
    const fw_raw *raw = now->raw;
    const fw_job *job = now->job;
    const int32_t wanted = (int32_t)ceil(job->rules.lift_mm / (job->layer_um / 1000) - 1e-9);
    const int32_t lift = wanted > raw->first_solid ? wanted - raw->first_solid : 0;
    if (lift > INT32_MAX - raw->layers)
        return fw_fault_set(fault, FW_INPUT, "too many layers, lift_mm, lift less");
    now->fit->lift = lift;
    now->setup = fw_setup_make(job, raw->width, raw->height, raw->layers + lift, lift, raw->full);
    now->fit->screen = (fw_screen){.width = raw->width,
                                   .height = raw->height,
                                   .px_mm = now->setup.px_mm,
                                   .py_mm = now->setup.py_mm,
                                   .full = raw->full,
                                   .brightest = raw->brightest,
                                   .two_level = raw->two_level,
                                   .levels = raw->level_count > 0 ? raw->level : NULL,
                                   .level_count = raw->level_count};
    now->contact = now->fit->screen;
    now->contact.two_level = true;
    now->route = (fw_route_rules){.shaft_mm = job->rules.shaft_mm[0],
                                  .foot_mm = job->rules.shaft_mm[0],
                                  .neck_mm = job->rules.neck_mm,
                                  .lean_deg = job->rules.lean_deg,
                                  .post_gap_mm = job->rules.clearance_mm};
    return FW_OK;
}

/* ---- free space ------------------------------------------------------------------------------ */

static fw_status fill_lattice(fitting *now, fw_greys *greys, fw_runs *part, fw_fault *fault)
{
    for (int32_t n = 0; n < now->raw->layers; n++) {
        FW_TRY(fw_store_get(now->raw->store, n, greys, fault));
        FW_TRY(fw_greys_at_least(greys, now->setup.intended_least, part, fault));
        if (part->count > 0)
            FW_TRY(fw_lattice_add_layer(now->lattice, n + now->fit->lift, part, fault));
        FW_TRY(fw_pass_tick(now->pass, "mapping free space", n + 1, now->raw->layers, fault));
    }
    return FW_OK;
}

/* Print-through makes a face grow toward the plate, so more room is kept on that side. */
static fw_status build_lattice(fitting *now, fw_fault *fault)
{
    const fw_job *job = now->job;
    const double grows = fw_cure_print_through_um(&job->resin, job->layer_um) / 1000;
    const double clearance = job->rules.clearance_mm;
    const fw_lattice_shape shape = {
        .width_px = now->raw->width,
        .height_px = now->raw->height,
        .layers = now->setup.layers,
        .px_mm = now->setup.px_mm,
        .py_mm = now->setup.py_mm,
        .layer_mm = now->setup.t_mm,
        .clearance_mm = clearance,
        .clearance_above_mm = fmax(clearance, grows + 2 * now->setup.t_mm),
        .need_mm = fmax(job->rules.shaft_mm[1], job->rules.foot_mm) / 2 + clearance};
    const double began = fw_times_now();
    fw_greys greys = {0};
    fw_runs part = {0};
    fw_status status = fw_lattice_new(&shape, NULL, &now->lattice, fault);
    if (status == FW_OK)
        status = fill_lattice(now, &greys, &part, fault);
    fw_greys_free(&greys);
    fw_runs_free(&part);
    FW_TRY(status);
    FW_TRY(fw_lattice_finish(now->lattice, fault));
    FW_TRY(fw_route_prepare(now->lattice, &now->route, fault));
    fw_times_add(now->pass->times, FW_WORK_LATTICE, began);
    return FW_OK;
}

/* ---- one round ----------------------------------------------------------------------------------
 */

static fw_status new_judge(const fitting *now, const fw_placer *placer, fw_judge **out,
                           fw_fault *fault)
{
    const fw_judge_input input = {.job = now->job,
                                  .width = now->raw->width,
                                  .height = now->raw->height,
                                  .layers = now->setup.layers,
                                  .lift = now->fit->lift,
                                  .full = now->raw->full,
                                  .posts = &now->fit->posts,
                                  .placer = placer,
                                  .times = now->pass->times,
                                  .memo = now->pass->memo};
    return fw_judge_new(&input, out, fault);
}

static fw_tipping tipping_of(fitting *now)
{
    return (fw_tipping){.setup = &now->setup,
                        .rules = &now->job->rules,
                        .screen = &now->contact,
                        .lattice = now->lattice,
                        .route = &now->route,
                        .posts = &now->fit->posts,
                        .known = now->fit->posts.count,
                        .missed = &now->missed};
}

static fw_status size_posts(fitting *now, const fw_judge *judge, bool grow_only, fw_sizing *sizing,
                            fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&now->failed, &now->failed_capacity, now->placed, sizeof *now->failed,
                   "posts", fault));
    *sizing = (fw_sizing){.judge = judge,
                          .screen = &now->fit->screen,
                          .job = now->job,
                          .posts = &now->fit->posts,
                          .count = now->placed,
                          .grow_only = grow_only,
                          .missed = now->failed};
    return fw_sizes_set(sizing, fault);
}

/* Tips that the last round adds could not be routed any more. */
static bool may_add(const fitting *now)
{
    return now->fit->rounds < FW_FIT_ROUNDS - 1;
}

/* Follows the raw stack, places what is missing, sizes everything, and adds tips where one alone is
 * not enough. *more tells that it did, so that loads must be shared anew. */
static fw_status place_round(fitting *now, bool *more, fw_fault *fault)
{
    fw_tipping tipping = tipping_of(now);
    const fw_placer placer = {fw_tips_place, &tipping};
    fw_judge *judge = NULL;
    fw_sizing sizing;
    size_t added = 0;
    now->missed.count = 0;
    FW_TRY(new_judge(now, &placer, &judge, fault));
    fw_status status =
        fw_feed_judge(now->pass, now->raw, now->fit->lift, NULL, "placing", judge, fault);
    now->placed = now->fit->posts.count;
    if (status == FW_OK)
        status = size_posts(now, judge, now->fit->rounds > 0, &sizing, fault);
    if (status == FW_OK && may_add(now))
        status = fw_extras_add(now->raw, now->fit->lift, &sizing, &tipping, &added, fault);
    fw_judge_free(judge);
    fw_posts_order(&now->fit->posts);
    now->placed = now->fit->posts.count;
    *more = added > 0;
    return status;
}

static fw_status route_all(fitting *now, fw_fault *fault)
{
    const double began = fw_times_now();
    for (size_t i = 0; i < now->placed; i++)
        fw_lattice_drop_post(now->lattice, now->fit->posts.item[i].id);
    for (size_t i = 0; i < now->placed; i++) {
        fw_post *post = &now->fit->posts.item[i];
        FW_TRY(fw_route_post(now->lattice, &now->route, post, fault));
        if (post->routed)
            FW_TRY(fw_lattice_add_post(now->lattice, post, fault));
        FW_TRY(fw_pass_tick(now->pass, "routing", (int32_t)i + 1, (int32_t)now->placed, fault));
    }
    fw_times_add(now->pass->times, FW_WORK_ROUTING, began);
    return FW_OK;
}

static fw_status append_missed(fitting *now, fw_fault *fault)
{
    now->fit->posts.count = now->placed;
    for (size_t i = 0; i < now->missed.count; i++)
        FW_TRY(fw_posts_append(&now->fit->posts, &now->missed.item[i], fault));
    return FW_OK;
}

static fw_status feed_with_posts(const fitting *now, fw_judge *judge, fw_fault *fault)
{
    fw_stamp_plan *plan = NULL;
    FW_TRY(fw_stamp_plan_make(&now->fit->posts, &now->fit->screen, now->setup.t_mm, &plan, fault));
    const fw_status status =
        fw_feed_judge(now->pass, now->raw, now->fit->lift, plan, "judging", judge, fault);
    fw_stamp_plan_free(plan);
    return status;
}

/* A place without a path is forgotten where the judge finds nothing wrong with it after all: an
 * onset that a held body has reached within the layers that may heal it, a reach that larger tips
 * have met. */
static void forget_healed(fitting *now, const fw_judge *judge)
{
    const fw_layer_row *rows = fw_judge_rows(judge);
    size_t kept = 0;
    for (size_t i = 0; i < now->missed.count; i++) {
        const int32_t layer = now->missed.item[i].tip_layer;
        const int32_t healed = layer + now->job->heal_layers;
        const int32_t last = healed < now->setup.layers ? healed : now->setup.layers - 1;
        if (rows[layer].overreach_px > 0 || rows[last].adrift_px > 0)
            now->missed.item[kept++] = now->missed.item[i];
    }
    now->missed.count = kept;
}

/* Draws the posts in, judges, and lets them grow to what they carry now. */
static fw_status judge_round(fitting *now, bool *changed, bool *more, fw_fault *fault)
{
    fw_sizing sizing = {0};
    size_t added = 0;
    fw_judge_free(now->judge);
    now->judge = NULL;
    FW_TRY(new_judge(now, NULL, &now->judge, fault));
    FW_TRY(feed_with_posts(now, now->judge, fault));
    FW_TRY(size_posts(now, now->judge, true, &sizing, fault));
    now->fit->posts.count = now->placed; /* the missed ones come back after the rounds */
    forget_healed(now, now->judge);
    if (may_add(now)) {
        fw_tipping tipping = tipping_of(now);
        FW_TRY(fw_extras_add(now->raw, now->fit->lift, &sizing, &tipping, &added, fault));
    }
    *changed = sizing.changed;
    *more = added > 0;
    return FW_OK;
}

static fw_status settle(fitting *now, fw_fault *fault)
{
    bool place = true, changed = true;
    fw_fit *fit = now->fit;
    for (fit->rounds = 0; fit->rounds < FW_FIT_ROUNDS && !fit->settled; fit->rounds++) {
        if (place) {
            fit->posts.count = now->placed;
            FW_TRY(place_round(now, &place, fault));
            if (place)
                continue;
        }
        FW_TRY(route_all(now, fault));
        FW_TRY(fw_bites_find(now->pass, now->raw, fit->lift, now->job, &fit->screen, &fit->posts,
                             fault));
        FW_TRY(append_missed(now, fault));
        FW_TRY(judge_round(now, &changed, &place, fault));
        if (place) {
            fw_posts_order(&fit->posts);
            now->placed = fit->posts.count;
        }
        fit->settled = !changed && !place;
    }
    return append_missed(now, fault);
}

/* The report of what was judged last; where posts have changed since, they are judged once more. */
static fw_status conclude(fitting *now, fw_fault *fault)
{
    fw_fit *fit = now->fit;
    if (!fit->settled) {
        const fw_finding unsettled = fw_fit_unsettled(fit);
        fw_judge_free(now->judge);
        now->judge = NULL;
        FW_TRY(new_judge(now, NULL, &now->judge, fault));
        FW_TRY(feed_with_posts(now, now->judge, fault));
        FW_TRY(fw_judge_note(now->judge, &unsettled, fault));
    }
    return fw_judge_finish(now->judge, &fit->believed, fault);
}

fw_status fw_fit_posts(const fw_pass *pass, const fw_raw *raw, const fw_job *job, fw_fit *out,
                       fw_fault *fault)
{
    fitting now = {.pass = pass, .raw = raw, .job = job, .fit = out};
    *out = (fw_fit){0};
    fw_status status = set_up(&now, fault);
    if (status == FW_OK)
        status = build_lattice(&now, fault);
    if (status == FW_OK)
        status = settle(&now, fault);
    if (status == FW_OK)
        status = conclude(&now, fault);
    fw_lattice_free(now.lattice);
    fw_judge_free(now.judge);
    free(now.missed.item);
    free(now.failed);
    return status;
}

void fw_fit_close(fw_fit *fit)
{
    free(fit->posts.item);
    fw_report_free(&fit->believed);
    *fit = (fw_fit){0};
}

fw_finding fw_fit_unsettled(const fw_fit *fit)
{
    fw_finding finding = {.kind = FW_UNSETTLED, .severity = FW_FAIL, .margin = NAN, .post = -1};
    (void)snprintf(finding.message, sizeof finding.message,
                   "loads and sizes did not agree within %d rounds", fit->rounds);
    return finding;
}
