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

/* Notes the contact of a tip with this layer's solid, for the tributary share. */
static fw_status note_contact(fw_sheet *sheet, int32_t post, const fw_runs *footprint,
                              fw_fault *fault)
{
    fw_runs *contact = NULL;
    FW_TRY(fw_contacts_add(&sheet->contacts, post, &contact, fault));
    return fw_runs_intersect(footprint, fw_slice_solid(&sheet->slice), contact, fault);
}

static fw_status footprint_of(const fw_tipping *tipping, const fw_post *post, fw_runs *out,
                              fw_fault *fault)
{
    const fw_disc disc = {post->path[0].x, post->path[0].y, post->tip_mm};
    return fw_disc_footprint(tipping->screen, &disc, out, fault);
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

/* A tip that an earlier round placed in this layer holds it from the start. */
static fw_status apply_known(const fw_tipping *tipping, const fw_newest *newest,
                             const fw_post *post, fw_fault *fault)
{
    fw_sheet *sheet = newest->sheet;
    fw_runs footprint = {0}, within = {0};
    fw_status status = footprint_of(tipping, post, &footprint, fault);
    if (status == FW_OK)
        status = fw_runs_intersect(&footprint, &sheet->slice.intended, &within, fault);
    if (status == FW_OK && within.count > 0) {
        hold_regions(sheet, &within);
        status = fw_carried_add_sources(newest->field, &within, fault);
    }
    if (status == FW_OK)
        status = note_contact(sheet, post->id, &footprint, fault);
    fw_runs_free(&footprint);
    fw_runs_free(&within);
    return status;
}

static fw_status apply_all_known(fw_tipping *tipping, const fw_newest *newest, fw_fault *fault)
{
    for (; tipping->next_known < tipping->known; tipping->next_known++) {
        const fw_post *post = &tipping->posts->item[tipping->next_known];
        if (post->tip_layer > newest->sheet->layer)
            break;
        if (post->tip_layer == newest->sheet->layer)
            FW_TRY(apply_known(tipping, newest, post, fault));
    }
    return FW_OK;
}

static fw_status add_posts(fw_tipping *tipping, fw_sheet *sheet, const fw_tips *tips,
                           fw_fault *fault)
{
    fw_runs footprint = {0};
    fw_status status = FW_OK;
    for (size_t i = 0; i < tips->count && status == FW_OK; i++) {
        const fw_post post = fw_tip_post(tipping->rules, tipping->setup->t_mm, sheet->layer,
                                         tips->item[i].x_mm, tips->item[i].y_mm);
        status = fw_posts_append(tipping->posts, &post, fault);
        if (status == FW_OK)
            status = footprint_of(tipping, &post, &footprint, fault);
        if (status == FW_OK)
            status = note_contact(sheet, (int32_t)tipping->posts->count - 1, &footprint, fault);
    }
    fw_runs_free(&footprint);
    return status;
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
    FW_TRY(apply_all_known(tipping, newest, fault));
    fw_status status = fw_runs_subtract(&newest->sheet->slice.intended,
                                        &newest->before->slice.intended, &fresh, fault);
    if (status == FW_OK && fresh.count > 0)
        status = place_new(tipping, newest, &fresh, fault);
    fw_runs_free(&fresh);
    return status;
}
