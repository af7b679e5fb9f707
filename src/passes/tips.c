#include "passes/tips.h"

#include "fault/memory.h"

#include <stdlib.h>

fw_post fw_tip_post(const fw_post_rules *rules, double layer_mm, int32_t tip_layer, double x_mm,
                    double y_mm)
{
    fw_post post = {.tip_layer = tip_layer,
                    .point_count = 1,
                    .tip_mm = rules->tip_mm[0],
                    .neck_mm = rules->neck_mm,
                    .shaft_mm = rules->shaft_mm[0],
                    .foot_mm = rules->shaft_mm[0]};
    post.path[0] = (fw_point){x_mm, y_mm, tip_layer * layer_mm};
    return post;
}

fw_status fw_posts_append(fw_posts *posts, const fw_post *post, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&posts->item, &posts->capacity, posts->count + 1, sizeof *posts->item,
                   "posts", fault));
    posts->item[posts->count] = *post;
    posts->item[posts->count].id = (int32_t)posts->count;
    posts->count++;
    return FW_OK;
}

static int by_place(const void *left, const void *right)
{
    const fw_post *a = left, *b = right;
    if (a->tip_layer != b->tip_layer)
        return a->tip_layer < b->tip_layer ? -1 : 1;
    if (a->path[0].y != b->path[0].y)
        return a->path[0].y < b->path[0].y ? -1 : 1;
    return (a->path[0].x > b->path[0].x) - (a->path[0].x < b->path[0].x);
}

void fw_posts_order(fw_posts *posts)
{
    if (posts->count > 0)
        qsort(posts->item, posts->count, sizeof *posts->item, by_place);
    for (size_t i = 0; i < posts->count; i++)
        posts->item[i].id = (int32_t)i;
}

bool fw_tips_possible(void *tips_at, double x_mm, double y_mm)
{
    const fw_tips_at *at = tips_at;
    return fw_route_possible(at->tipping->lattice, at->tipping->route, x_mm, y_mm, at->face_mm);
}

static fw_disc disc_of(const fw_post *post)
{
    return (fw_disc){post->path[0].x, post->path[0].y, post->tip_mm};
}

static void hold_regions(fw_sheet *sheet, const fw_runs *set)
{
    for (int32_t y = 0; y < set->height; y++) {
        for (uint32_t i = set->row[y]; i < set->row[y + 1]; i++) {
            const uint32_t run = fw_runs_find(&sheet->slice.intended, set->run[i].x0, y);
            sheet->held[sheet->slice.regions.label[run]] = 1;
        }
    }
}

/* Tips that an earlier round placed in this layer hold it from the start. */
static fw_status hold_by_known(const fw_tipping *tipping, const fw_newest *newest,
                               const fw_disc *tips, size_t count, fw_fault *fault)
{
    fw_sheet *sheet = newest->sheet;
    fw_runs footprints = {0}, within = {0};
    fw_status status = fw_discs_footprint(tipping->screen, tips, count, &footprints, fault);
    if (status == FW_OK)
        status = fw_runs_intersect(&footprints, &sheet->slice.intended, &within, fault);
    if (status == FW_OK && within.count > 0) {
        hold_regions(sheet, &within);
        status = fw_carried_add_sources(newest->field, &within, fault);
    }
    fw_runs_free(&footprints);
    fw_runs_free(&within);
    return status;
}

/* The contact of a post that stands in the list, for the tributary share. */
static fw_status note_post(const fw_tipping *tipping, fw_sheet *sheet, const fw_post *post,
                           fw_fault *fault)
{
    fw_runs footprint = {0}, *contact = NULL;
    const fw_disc disc = disc_of(post);
    fw_status status = fw_disc_footprint(tipping->screen, &disc, &footprint, fault);
    if (status == FW_OK)
        status = fw_contacts_add(&sheet->contacts, post->id, &contact, fault);
    if (status == FW_OK)
        status = fw_runs_intersect(&footprint, fw_slice_solid(&sheet->slice), contact, fault);
    fw_runs_free(&footprint);
    return status;
}

/* All at once: the debt is settled once. */
static fw_status apply_known(fw_tipping *tipping, const fw_newest *newest, fw_fault *fault)
{
    const fw_post *posts = tipping->posts->item;
    const int32_t layer = newest->sheet->layer;
    while (tipping->next_known < tipping->known && posts[tipping->next_known].tip_layer < layer)
        tipping->next_known++;
    const size_t first = tipping->next_known;
    while (tipping->next_known < tipping->known && posts[tipping->next_known].tip_layer == layer)
        tipping->next_known++;
    const size_t count = tipping->next_known - first;
    fw_disc *tips = NULL;
    if (count == 0)
        return FW_OK;
    FW_TRY(fw_allocate((void **)&tips, count, sizeof *tips, "tips of a layer", fault));
    for (size_t i = 0; i < count; i++)
        tips[i] = disc_of(&posts[first + i]);
    fw_status status = hold_by_known(tipping, newest, tips, count, fault);
    free(tips);
    for (size_t i = 0; i < count && status == FW_OK; i++)
        status = note_post(tipping, newest->sheet, &posts[first + i], fault);
    return status;
}

static fw_status add_posts(fw_tipping *tipping, fw_sheet *sheet, const fw_tips *tips,
                           fw_fault *fault)
{
    for (size_t i = 0; i < tips->count; i++) {
        const fw_post post = fw_tip_post(tipping->rules, tipping->setup->t_mm, sheet->layer,
                                         tips->item[i].x_mm, tips->item[i].y_mm);
        FW_TRY(fw_posts_append(tipping->posts, &post, fault));
        FW_TRY(note_post(tipping, sheet, &tipping->posts->item[tipping->posts->count - 1], fault));
    }
    return FW_OK;
}

/* A place that needs a tip but has no way to the plate is kept as a post without a path: it shows
 * up as unroutable, never silently. What is too small for a tip shows up as an onset, what has no
 * face for one as overreach. */
static fw_status add_missed(fw_tipping *tipping, const fw_sheet *sheet, const fw_misses *misses,
                            fw_fault *fault)
{
    for (size_t i = 0; i < misses->count; i++) {
        const fw_miss *miss = &misses->item[i];
        if (miss->cause != FW_MISS_NO_PATH)
            continue;
        const fw_post post =
            fw_tip_post(tipping->rules, tipping->setup->t_mm, sheet->layer,
                        fw_setup_x(tipping->setup, miss->x), fw_setup_y(tipping->setup, miss->y));
        FW_TRY(fw_posts_append(tipping->missed, &post, fault));
    }
    return FW_OK;
}

static fw_status place_new(fw_tipping *tipping, const fw_newest *newest, const fw_runs *fresh,
                           fw_fault *fault)
{
    fw_sheet *sheet = newest->sheet;
    const fw_place_rules rules = {tipping->screen, tipping->setup->reach_mm,
                                  tipping->rules->tip_mm[0]};
    fw_tips_at at = {tipping, sheet->layer * tipping->setup->t_mm};
    fw_tips tips = {0};
    fw_misses missed = {0};
    fw_status status =
        fw_place_layer(&rules, newest->field, &sheet->slice.intended, &sheet->slice.regions,
                       sheet->held, fresh, fw_tips_possible, &at, &tips, &missed, fault);
    if (status == FW_OK)
        status = add_posts(tipping, sheet, &tips, fault);
    if (status == FW_OK)
        status = add_missed(tipping, sheet, &missed, fault);
    fw_tips_free(&tips);
    fw_misses_free(&missed);
    return status;
}

fw_status fw_tips_place(void *context, const fw_newest *newest, fw_fault *fault)
{
    fw_tipping *tipping = context;
    fw_runs fresh = {0};
    FW_TRY(apply_known(tipping, newest, fault));
    fw_status status = fw_runs_subtract(&newest->sheet->slice.intended,
                                        &newest->before->slice.intended, &fresh, fault);
    if (status == FW_OK && fresh.count > 0)
        status = place_new(tipping, newest, &fresh, fault);
    fw_runs_free(&fresh);
    return status;
}
