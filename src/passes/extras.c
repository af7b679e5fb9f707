#include "passes/extras.h"

#include "physics/strength.h"

#include <math.h>
#include <stdlib.h>

enum {
    OVERLOADED = FW_MISSED_TIP | FW_MISSED_NECK | FW_MISSED_SHAFT | FW_MISSED_FOOT | FW_MISSED_PUSH
};

static double disc_mm2(double diameter_mm)
{
    return acos(-1.0) / 4 * diameter_mm * diameter_mm;
}

/* How many posts of the largest size the load of this one by nearness needs, less itself. Where it
 * is lever action that overloads it, one more at a time: what counts is where the others stand. */
static size_t more_for(const fw_sizing *sizing, size_t index)
{
    const fw_post_rules *rules = &sizing->job->rules;
    const fw_resin *resin = &sizing->job->resin;
    const double *load = fw_judge_share(sizing->judge)->post[index].demand.load_N;
    const double tip = fw_strength_tension_N(resin->tensile_MPa, disc_mm2(rules->tip_mm[1]));
    const double foot = fw_strength_adhesion_N(resin->plate_adhesion_MPa, disc_mm2(rules->foot_mm));
    const double share = fmax(load[FW_POST_TIP] / tip, load[FW_POST_FOOT] / foot) * rules->margin;
    const double more = ceil(share) - 1;
    return more < 1 ? 1 : (size_t)fmin(more, 1000);
}

/* Plate-facing pixels of the post's layer within the reach of its tip. */
static fw_status face_round(const fw_raw *raw, int32_t lift, const fw_tipping *tipping,
                            const fw_post *post, fw_runs *out, fw_fault *fault)
{
    const fw_setup *setup = tipping->setup;
    const fw_disc round = {post->path[0].x, post->path[0].y, 2 * setup->reach_mm + post->tip_mm};
    fw_greys greys[2] = {{0}, {0}};
    fw_runs now = {0}, before = {0}, fresh = {0}, disc = {0};
    fw_status status = fw_raw_layers(raw, lift, NULL, post->tip_layer - 1, 2, greys, NULL, fault);
    if (status == FW_OK)
        status = fw_greys_at_least(&greys[0], setup->intended_least, &before, fault);
    if (status == FW_OK)
        status = fw_greys_at_least(&greys[1], setup->intended_least, &now, fault);
    if (status == FW_OK)
        status = fw_runs_subtract(&now, &before, &fresh, fault);
    if (status == FW_OK)
        status = fw_disc_footprint(tipping->screen, &round, &disc, fault);
    if (status == FW_OK)
        status = fw_runs_intersect(&fresh, &disc, out, fault);
    fw_greys_free(&greys[0]);
    fw_greys_free(&greys[1]);
    fw_runs_free(&now);
    fw_runs_free(&before);
    fw_runs_free(&fresh);
    fw_runs_free(&disc);
    return status;
}

static fw_status tips_of_layer(const fw_posts *posts, int32_t layer, fw_tips *out, fw_fault *fault)
{
    for (size_t i = 0; i < posts->count; i++) {
        if (posts->item[i].tip_layer != layer)
            continue;
        FW_TRY(fw_grow((void **)&out->item, &out->capacity, out->count + 1, sizeof *out->item,
                       "tips", fault));
        out->item[out->count++] = (fw_tip){posts->item[i].path[0].x, posts->item[i].path[0].y};
    }
    return FW_OK;
}

static fw_status add_posts(fw_tipping *tipping, int32_t layer, const fw_tips *tips, fw_fault *fault)
{
    for (size_t i = 0; i < tips->count; i++) {
        const fw_post post = fw_tip_post(tipping->rules, tipping->setup->t_mm, layer,
                                         tips->item[i].x_mm, tips->item[i].y_mm);
        FW_TRY(fw_posts_append(tipping->posts, &post, fault));
    }
    return FW_OK;
}

static fw_status add_round(const fw_raw *raw, int32_t lift, fw_tipping *tipping,
                           const fw_post *post, size_t more, fw_fault *fault)
{
    const fw_place_rules rules = {tipping->screen, tipping->setup->reach_mm,
                                  tipping->rules->tip_mm[0]};
    const double pitch = tipping->rules->shaft_mm[0] + tipping->rules->clearance_mm;
    fw_tips_at at = {tipping, post->tip_layer * tipping->setup->t_mm};
    fw_tips existing = {0}, tips = {0};
    fw_runs area = {0};
    fw_status status = face_round(raw, lift, tipping, post, &area, fault);
    if (status == FW_OK)
        status = tips_of_layer(tipping->posts, post->tip_layer, &existing, fault);
    if (status == FW_OK)
        status = fw_place_extra(&rules, &area, &existing, more, pitch, fw_tips_possible, &at, &tips,
                                fault);
    if (status == FW_OK)
        status = add_posts(tipping, post->tip_layer, &tips, fault);
    fw_tips_free(&existing);
    fw_tips_free(&tips);
    fw_runs_free(&area);
    return status;
}

fw_status fw_extras_add(const fw_raw *raw, int32_t lift, const fw_sizing *sizing,
                        fw_tipping *tipping, size_t *added, fw_fault *fault)
{
    const size_t before = tipping->posts->count;
    for (size_t i = 0; i < sizing->count; i++) {
        const fw_post post = tipping->posts->item[i]; /* a copy: the list grows */
        if ((sizing->missed[i] & OVERLOADED) != 0 && post.tip_layer > 0)
            FW_TRY(add_round(raw, lift, tipping, &post, more_for(sizing, i), fault));
    }
    *added = tipping->posts->count - before;
    return FW_OK;
}
