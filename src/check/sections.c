#include "check/sections.h"

#include "fault/memory.h"
#include "posts/profile.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "sections of posts";

static void shrink(double *area, double to)
{
    *area = fmin(*area, to);
}

static void measure_section(fw_share *share, int32_t layer, int32_t index, double area)
{
    const fw_post *post = &share->posts->item[index];
    const double t = share->setup->t_mm;
    double *areas = share->post[index].section.area_mm2;
    const fw_zone zone = fw_post_zone(post, fw_post_middle(layer, t), fw_post_face(post, t));
    if (layer == 0)
        shrink(&areas[FW_POST_FOOT], area);
    shrink(&areas[zone == FW_ZONE_NECK ? FW_POST_NECK : FW_POST_SHAFT], area);
    if (layer == post->tip_layer - 1)
        shrink(&areas[FW_POST_TIP], area);
    share->post[index].seen_layers++;
}

/* Solid pixels that a post claims in one layer, whoever else does. */
typedef struct claim {
    int32_t post;
    int64_t pixels;
} claim;

typedef struct claims {
    claim *item; /* [count], sorted by post */
    size_t count;
} claims;

static int by_post(const void *left, const void *right)
{
    const claim *a = left, *b = right;
    return (a->post > b->post) - (a->post < b->post);
}

static void join_claims(claims *list)
{
    size_t kept = 0;
    if (list->count > 0)
        qsort(list->item, list->count, sizeof *list->item, by_post);
    for (size_t i = 0; i < list->count; i++) {
        if (kept > 0 && list->item[kept - 1].post == list->item[i].post)
            list->item[kept - 1].pixels += list->item[i].pixels;
        else
            list->item[kept++] = list->item[i];
    }
    list->count = kept;
}

static fw_status list_claims(const fw_sheet *sheet, claims *out, fw_fault *fault)
{
    const fw_member_runs *lost = &sheet->solid_lost;
    FW_TRY(fw_allocate((void **)&out->item, sheet->pieces.count + lost->count, sizeof *out->item,
                       holder, fault));
    for (size_t i = 0; i < sheet->pieces.count; i++)
        out->item[out->count++] = (claim){sheet->pieces.item[i].post, sheet->pieces.item[i].pixels};
    for (uint32_t i = 0; i < lost->count; i++)
        out->item[out->count++] = (claim){lost->run[i].post, lost->run[i].x1 - lost->run[i].x0};
    join_claims(out);
    return FW_OK;
}

static int64_t claimed_by(const claims *list, int32_t post)
{
    const claim wanted = {.post = post};
    const claim *found = bsearch(&wanted, list->item, list->count, sizeof *list->item, by_post);
    return found->pixels; /* who shares a pixel claims it */
}

/* `bearer` carries the part of the load of `other` that lies in what both claim. */
static fw_status note_together(fw_share *share, int32_t layer, int32_t bearer, int32_t other,
                               double part, fw_fault *fault)
{
    const fw_post *post = &share->posts->item[bearer];
    const double t = share->setup->t_mm;
    const fw_zone zone = fw_post_zone(post, fw_post_middle(layer, t), fw_post_face(post, t));
    return fw_together_note(&share->together, bearer, other, zone == FW_ZONE_NECK, part, fault);
}

static fw_status measure_pairs(fw_share *share, const fw_sheet *sheet, const claims *list,
                               fw_fault *fault)
{
    for (size_t i = 0; i < sheet->pairs.count; i++) {
        const fw_member_pair *pair = &sheet->pairs.item[i];
        const double both = (double)pair->pixels;
        FW_TRY(note_together(share, sheet->layer, pair->a, pair->b,
                             both / (double)claimed_by(list, pair->b), fault));
        FW_TRY(note_together(share, sheet->layer, pair->b, pair->a,
                             both / (double)claimed_by(list, pair->a), fault));
    }
    return FW_OK;
}

static fw_status measure_sections(fw_share *share, const fw_sheet *sheet, fw_fault *fault)
{
    const double pixel_mm2 = share->setup->px_mm * share->setup->py_mm;
    claims list = {0};
    fw_status status = list_claims(sheet, &list, fault);
    for (size_t i = 0; i < list.count && status == FW_OK; i++)
        measure_section(share, sheet->layer, list.item[i].post,
                        (double)list.item[i].pixels * pixel_mm2);
    if (status == FW_OK)
        status = measure_pairs(share, sheet, &list, fault);
    free(list.item);
    return status;
}

/* One group for each region of layer 0 with posts in it; the pieces come sorted by region. */
static fw_status group_feet(fw_share *share, const fw_sheet *sheet, fw_fault *fault)
{
    for (size_t i = 0; i < sheet->pieces.count; i++) {
        const fw_member_piece *piece = &sheet->pieces.item[i];
        if (i == 0 || piece->region != sheet->pieces.item[i - 1].region) {
            FW_TRY(fw_grow((void **)&share->group, &share->group_capacity, share->group_count + 1,
                           sizeof *share->group, holder, fault));
            share->group[share->group_count++] = (fw_foot_group){0};
        }
        share->group[share->group_count - 1].area_mm2 +=
            (double)piece->pixels * share->setup->px_mm * share->setup->py_mm;
        share->post[piece->post].group = (int32_t)share->group_count - 1;
    }
    return FW_OK;
}

/* The layer in which the tip's end must lie wholly in the part: the first one without bite. */
static int32_t end_layer(const fw_share *share, const fw_post *post)
{
    const int32_t end = post->tip_layer + post->bite_layers;
    return end < share->setup->layers ? end : share->setup->layers - 1;
}

static fw_status measure_contact(fw_share *share, const fw_sheet *sheet, int32_t index,
                                 fw_layer_row *rows, fw_fault *fault)
{
    fw_post_account *account = &share->post[index];
    fw_runs contact = {0};
    if (account->end.height == 0)
        return FW_OK; /* nothing of its last section is solid: it holds nothing */
    const fw_status status =
        fw_runs_intersect(&account->end, fw_slice_solid(&sheet->slice), &contact, fault);
    if (status == FW_OK) {
        shrink(&account->section.area_mm2[FW_POST_TIP],
               (double)fw_runs_pixels(&contact) * share->setup->px_mm * share->setup->py_mm);
        account->contact_known = true;
        fw_share_settle(share, index, rows);
    }
    fw_runs_free(&account->end);
    fw_runs_free(&contact);
    return status;
}

/* From the first layer in which part lies over its end on, a post holds that part, whatever of the
 * bite is still to come. */
static fw_status attach(fw_share *share, const fw_sheet *sheet, int32_t index, fw_fault *fault)
{
    fw_post_account *account = &share->post[index];
    fw_runs over = {0};
    if (account->end.height == 0)
        return FW_OK;
    fw_status status = fw_runs_intersect(&account->end, fw_sheet_part(sheet), &over, fault);
    if (status == FW_OK && over.count > 0) {
        int32_t y = 0;
        while (over.row[y + 1] == 0)
            y++;
        const uint32_t run = fw_runs_find(fw_sheet_part(sheet), over.run[0].x0, y);
        account->part = (int32_t)sheet->part_body[fw_sheet_part_regions(sheet)->label[run]];
        status = fw_lever_add_post(&share->lever, &share->posts->item[index], index,
                                   (uint32_t)account->part, fault);
    }
    fw_runs_free(&over);
    return status;
}

/* The last sections of the posts whose tip layer comes next. */
static fw_status keep_ends(fw_share *share, const fw_sheet *sheet, fw_fault *fault)
{
    for (size_t p = 0; p < share->posts->count && sheet->solid_members.count > 0; p++) {
        if (share->posts->item[p].tip_layer - 1 == sheet->layer)
            FW_TRY(fw_members_of(&sheet->solid_members, (int32_t)p, &share->post[p].end, fault));
    }
    return FW_OK;
}

static fw_status measure_contacts(fw_share *share, const fw_sheet *sheet, fw_layer_row *rows,
                                  fw_fault *fault)
{
    for (size_t p = 0; p < share->posts->count; p++) {
        const fw_post *post = &share->posts->item[p];
        const bool within = post->routed && post->tip_layer < share->setup->layers;
        const bool near = post->tip_layer <= sheet->layer && sheet->layer <= end_layer(share, post);
        if (within && near && share->post[p].part < 0)
            FW_TRY(attach(share, sheet, (int32_t)p, fault));
        if (within && end_layer(share, post) == sheet->layer)
            FW_TRY(measure_contact(share, sheet, (int32_t)p, rows, fault));
    }
    return FW_OK;
}

fw_status fw_sections_measure(fw_share *share, const fw_sheet *sheet, fw_layer_row *rows,
                              fw_fault *fault)
{
    FW_TRY(measure_sections(share, sheet, fault));
    if (sheet->layer == 0)
        FW_TRY(group_feet(share, sheet, fault));
    FW_TRY(keep_ends(share, sheet, fault));
    return measure_contacts(share, sheet, rows, fault);
}
