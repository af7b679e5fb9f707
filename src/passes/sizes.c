#include "passes/sizes.h"

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

/* Where the judge measured less area than the load wants, the part of the area that is lost (to an
 * edge that the tip reaches over, to feet that have grown together) is made up for by as much more
 * load. */
static void make_up(const fw_sizing *sizing, fw_post_check check, const fw_post_demand *judged,
                    const fw_post_section *section, fw_post_demand *own)
{
    const double margin =
        fw_margin_of(&sizing->job->resin, check, section->area_mm2[check], judged->load_N[check]);
    if (margin > 0 && margin < sizing->job->rules.margin)
        own->load_N[check] *= sizing->job->rules.margin / margin;
}

static fw_post_demand short_demand_of(const fw_sizing *sizing, size_t index)
{
    const fw_share *share = fw_judge_share(sizing->judge);
    fw_post_demand judged, own;
    fw_post_section section;
    fw_share_demand(share, index, &own);
    fw_share_judged(share, index, &judged, &section);
    if (share->post[index].contact_known)
        make_up(sizing, FW_POST_TIP, &judged, &section, &own);
    if (share->post[index].group >= 0)
        make_up(sizing, FW_POST_FOOT, &judged, &section, &own);
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
    fw_size_input input = {.screen = sizing->screen,
                           .layer_mm = setup->t_mm,
                           .solid_least = setup->solid_least,
                           .resin = &sizing->job->resin,
                           .rules = &sizing->job->rules,
                           .push = fw_judge_share(sizing->judge)->post[index].push,
                           .foot_room_mm = foot_room(sizing, index),
                           .grow_only = sizing->grow_only};
    fw_share_demand(fw_judge_share(sizing->judge), index, &input.demand);
    FW_TRY(size_one(input, post, &sizing->missed[index], fault));
    if (same_sizes(&before, post)) { /* grown enough by itself, and yet judged to be short? */
        input.demand = short_demand_of(sizing, index);
        FW_TRY(size_one(input, post, &sizing->missed[index], fault));
    }
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
