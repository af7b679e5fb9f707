#include "passes/sizes.h"

#include "physics/strength.h"

#include <math.h>

static double pitch(const fw_post *a, const fw_post *b)
{
    const fw_point p = a->path[a->point_count - 1], q = b->path[b->point_count - 1];
    return hypot(p.x - q.x, p.y - q.y);
}

/* Feet keep the clearance between them, so that they seal no pocket of resin: half of the pitch is
 * a post's own, and what its neighbour leaves of the other half. */
static double foot_room(const fw_sizing *sizing, size_t index)
{
    const fw_post *post = &sizing->posts->item[index];
    double room = INFINITY;
    if (!post->routed)
        return room;
    for (size_t i = 0; i < sizing->posts->count; i++) {
        const fw_post *other = &sizing->posts->item[i];
        if (i == index || !other->routed)
            continue;
        const double between = pitch(post, other) - sizing->job->rules.clearance_mm;
        room = fmin(room, fmax(between, 2 * between - other->foot_mm));
    }
    return room;
}

/* Feet that have grown together lose area to each other: where the group falls short, each of them
 * is sized for as much more than its own load. */
static fw_post_demand demand_of(const fw_sizing *sizing, size_t index)
{
    const fw_resin *resin = &sizing->job->resin;
    const fw_share *share = fw_judge_share(sizing->judge);
    fw_post_demand judged, own;
    fw_post_section section;
    fw_share_demand(share, index, &own);
    fw_share_judged(share, index, &judged, &section);
    const double holds =
        fw_strength_adhesion_N(resin->plate_adhesion_MPa, section.area_mm2[FW_POST_FOOT]);
    const double wanted = judged.load_N[FW_POST_FOOT] * sizing->job->rules.margin;
    if (share->post[index].group >= 0 && wanted > holds)
        own.load_N[FW_POST_FOOT] *= wanted / holds;
    return own;
}

static bool same_sizes(const fw_post *a, const fw_post *b)
{
    return a->tip_mm == b->tip_mm && a->shaft_mm == b->shaft_mm && a->foot_mm == b->foot_mm;
}

/* Where feet kept apart cannot hold, they may grow together: the judge takes such feet as one. */
static fw_status size_one(fw_size_input input, fw_post *post, unsigned *missed, fw_fault *fault)
{
    fw_size_outcome outcome = {0};
    const fw_post before = *post;
    FW_TRY(fw_size_post(&input, post, &outcome, fault));
    if ((outcome.missed & (FW_MISSED_FOOT | FW_MISSED_ROOM)) != 0) {
        *post = before;
        input.foot_room_mm = INFINITY;
        FW_TRY(fw_size_post(&input, post, &outcome, fault));
    }
    *missed = outcome.missed;
    return FW_OK;
}

static fw_status set_one(fw_sizing *sizing, size_t index, fw_fault *fault)
{
    const fw_setup *setup = fw_judge_setup(sizing->judge);
    fw_post *post = &sizing->posts->item[index];
    const fw_post before = *post;
    const fw_size_input input = {.screen = sizing->screen,
                                 .layer_mm = setup->t_mm,
                                 .solid_least = setup->solid_least,
                                 .resin = &sizing->job->resin,
                                 .rules = &sizing->job->rules,
                                 .demand = demand_of(sizing, index),
                                 .foot_room_mm = foot_room(sizing, index),
                                 .grow_only = sizing->grow_only};
    FW_TRY(size_one(input, post, &sizing->missed[index], fault));
    sizing->changed = sizing->changed || !same_sizes(&before, post);
    return FW_OK;
}

fw_status fw_sizes_set(fw_sizing *sizing, fw_fault *fault)
{
    sizing->changed = false;
    for (size_t i = 0; i < sizing->count; i++)
        FW_TRY(set_one(sizing, i, fault));
    return FW_OK;
}
