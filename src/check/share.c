#include "check/share.h"

#include "check/loads.h"
#include "fault/memory.h"
#include "posts/profile.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "loads on posts";

fw_status fw_share_open(const fw_setup *setup, const fw_posts *posts, const fw_stamp_plan *plan,
                        fw_share *out, fw_fault *fault)
{
    *out = (fw_share){.setup = setup, .posts = posts, .plan = plan};
    if (!setup->loads)
        return FW_OK;
    return fw_tributary_new(setup->width, setup->height, setup->px_mm, setup->py_mm,
                            &out->tributary, fault);
}

void fw_share_close(fw_share *share)
{
    fw_tributary_free(share->tributary);
    free(share->post);
    free(share->plate);
    free(share->group);
    free(share->touched);
    free(share->waiting);
    *share = (fw_share){0};
}

/* One account for each post; placing adds posts while layers pass. */
static fw_status open_accounts(fw_share *share, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&share->post, &share->post_capacity, share->posts->count,
                   sizeof *share->post, holder, fault));
    for (; share->post_count < share->posts->count; share->post_count++) {
        fw_post_account *account = &share->post[share->post_count];
        *account =
            (fw_post_account){.load_layer = -1, .touched_layer = -1, .part = -1, .group = -1};
        for (int check = 0; check < FW_POST_CHECKS; check++)
            account->section.area_mm2[check] = INFINITY;
    }
    return FW_OK;
}

/* ---- contacts ---------------------------------------------------------------------------- */

/* Every solid region of layer 0 that is not post alone stands on the plate by itself. */
static fw_status add_plate(fw_share *share, fw_sheet *sheet, uint32_t region, const fw_runs *part,
                           fw_fault *fault)
{
    const fw_runs *solid = fw_slice_solid(&sheet->slice);
    const fw_regions *regions = fw_slice_solid_regions(&sheet->slice);
    fw_runs *contact = NULL;
    FW_TRY(fw_contacts_add(&sheet->contacts, FW_PLATE_ANCHOR + (int32_t)share->plate_count,
                           &contact, fault));
    FW_TRY(fw_runs_begin(contact, solid->width, solid->height, fault));
    const fw_region *r = &regions->region[region];
    for (int32_t y = r->y0; y < r->y1; y++) {
        for (uint32_t i = part->row[y]; i < part->row[y + 1]; i++) {
            const uint32_t in = fw_runs_find(solid, part->run[i].x0, y);
            if (in != UINT32_MAX && regions->label[in] == region)
                FW_TRY(fw_runs_push(contact, y, part->run[i].x0, part->run[i].x1, fault));
        }
    }
    fw_runs_finish(contact);
    FW_TRY(fw_grow((void **)&share->plate, &share->plate_capacity, share->plate_count + 1,
                   sizeof *share->plate, holder, fault));
    const double pixels = (double)r->pixels, mm2 = share->setup->px_mm * share->setup->py_mm;
    const uint32_t in_part = fw_runs_find(fw_sheet_part(sheet), r->first_x, r->first_y);
    share->plate[share->plate_count++] = (fw_plate_account){
        .part = in_part != UINT32_MAX
                    ? sheet->part_body[fw_sheet_part_regions(sheet)->label[in_part]]
                    : UINT32_MAX,
        .area_mm2 = (double)fw_runs_pixels(contact) * mm2,
        .x_mm = fw_setup_x(share->setup, (double)r->sum_x / pixels),
        .y_mm = fw_setup_y(share->setup, (double)r->sum_y / pixels),
        .load_layer = -1};
    return FW_OK;
}

static fw_status add_plates(fw_share *share, fw_sheet *sheet, fw_fault *fault)
{
    const fw_runs *solid = fw_slice_solid(&sheet->slice);
    fw_runs posts = {0}, part = {0};
    fw_status status = FW_OK;
    if (sheet->solid_members.count > 0) {
        status = fw_members_set(&sheet->solid_members, NULL, NULL, &posts, fault);
        if (status == FW_OK)
            status = fw_runs_subtract(solid, &posts, &part, fault);
    }
    const uint32_t count = fw_slice_solid_regions(&sheet->slice)->count;
    for (uint32_t r = 0; r < count && status == FW_OK; r++) {
        if (!sheet->posts_only[r])
            status = add_plate(share, sheet, r, posts.count > 0 ? &part : solid, fault);
    }
    fw_runs_free(&posts);
    fw_runs_free(&part);
    return status;
}

/* Beside the part (a tip on a slope) a post holds it through the pixels that it shares a region
 * with. */
static fw_status add_beside(fw_sheet *sheet, fw_fault *fault)
{
    int32_t last = -1;
    for (size_t i = 0; i < sheet->pieces.count; i++) {
        const fw_member_piece *piece = &sheet->pieces.item[i];
        if (sheet->posts_only[piece->region] || piece->post == last)
            continue;
        last = piece->post;
        fw_runs *contact = NULL;
        FW_TRY(fw_contacts_add(&sheet->contacts, piece->post, &contact, fault));
        FW_TRY(fw_members_of(&sheet->solid_members, piece->post, contact, fault));
    }
    return FW_OK;
}

/* At its tip layer a post holds what lies on its last section. */
static fw_status add_on_top(fw_sheet *sheet, const fw_sheet *before, int32_t post, fw_fault *fault)
{
    fw_runs section = {0};
    fw_runs *contact = NULL;
    fw_status status = fw_members_of(&before->solid_members, post, &section, fault);
    if (status == FW_OK && section.count > 0) {
        status = fw_contacts_add(&sheet->contacts, post, &contact, fault);
        if (status == FW_OK)
            status = fw_runs_intersect(&section, fw_slice_solid(&sheet->slice), contact, fault);
    }
    fw_runs_free(&section);
    return status;
}

static fw_status find_contacts(fw_share *share, fw_sheet *sheet, const fw_sheet *before,
                               fw_fault *fault)
{
    if (before == NULL)
        return add_plates(share, sheet, fault);
    if (share->plan == NULL)
        return FW_OK; /* the placing hook has noted them */
    FW_TRY(add_beside(sheet, fault));
    if (before->solid_members.count == 0)
        return FW_OK;
    for (size_t p = 0; p < share->posts->count; p++) {
        if (share->posts->item[p].tip_layer == sheet->layer && share->posts->item[p].routed)
            FW_TRY(add_on_top(sheet, before, (int32_t)p, fault));
    }
    return FW_OK;
}

/* ---- what posts are made of --------------------------------------------------------------- */

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

static int by_post(const void *left, const void *right)
{
    const fw_member_piece *a = left, *b = right;
    return (a->post > b->post) - (a->post < b->post);
}

/* Sums the pieces of each post over its regions. */
static fw_status measure_sections(fw_share *share, const fw_sheet *sheet, fw_fault *fault)
{
    const size_t count = sheet->pieces.count;
    fw_member_piece *piece = NULL;
    FW_TRY(fw_allocate((void **)&piece, count, sizeof *piece, holder, fault));
    for (size_t i = 0; i < count; i++)
        piece[i] = sheet->pieces.item[i];
    if (count > 0)
        qsort(piece, count, sizeof *piece, by_post);
    for (size_t i = 0; i < count;) {
        const int32_t post = piece[i].post;
        int64_t pixels = 0;
        for (; i < count && piece[i].post == post; i++)
            pixels += piece[i].pixels;
        measure_section(share, sheet->layer, post,
                        (double)pixels * share->setup->px_mm * share->setup->py_mm);
    }
    free(piece);
    return FW_OK;
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

static void settle_waiting(fw_share *share, int32_t post, fw_layer_row *rows)
{
    size_t kept = 0;
    const double capacity =
        share->post[post].section.area_mm2[FW_POST_TIP] * share->setup->job->resin.tensile_MPa;
    for (size_t i = 0; i < share->waiting_count; i++) {
        const fw_waiting one = share->waiting[i];
        if (one.post == post)
            rows[one.layer].worst_margin =
                fmin(rows[one.layer].worst_margin, capacity / one.load_N);
        else
            share->waiting[kept++] = one;
    }
    share->waiting_count = kept;
}

static fw_status measure_contact(fw_share *share, const fw_sheet *sheet, int32_t index,
                                 fw_layer_row *rows, fw_fault *fault)
{
    const fw_post *post = &share->posts->item[index];
    fw_post_account *account = &share->post[index];
    fw_runs footprint = {0}, contact = {0};
    fw_status status =
        fw_stamp_post(share->plan, (size_t)index, post->tip_layer - 1, false, &footprint, fault);
    if (status == FW_OK)
        status = fw_runs_intersect(&footprint, fw_slice_solid(&sheet->slice), &contact, fault);
    if (status == FW_OK) {
        shrink(&account->section.area_mm2[FW_POST_TIP],
               (double)fw_runs_pixels(&contact) * share->setup->px_mm * share->setup->py_mm);
        account->contact_known = true;
        settle_waiting(share, index, rows);
    }
    if (status == FW_OK && contact.count > 0) {
        int32_t y = 0;
        while (contact.row[y + 1] == 0)
            y++;
        const uint32_t run = fw_runs_find(fw_sheet_part(sheet), contact.run[0].x0, y);
        if (run != UINT32_MAX)
            account->part = (int32_t)sheet->part_body[fw_sheet_part_regions(sheet)->label[run]];
    }
    fw_runs_free(&footprint);
    fw_runs_free(&contact);
    return status;
}

static fw_status measure_contacts(fw_share *share, const fw_sheet *sheet, fw_layer_row *rows,
                                  fw_fault *fault)
{
    for (size_t p = 0; p < share->posts->count; p++) {
        const fw_post *post = &share->posts->item[p];
        if (post->routed && end_layer(share, post) == sheet->layer)
            FW_TRY(measure_contact(share, sheet, (int32_t)p, rows, fault));
    }
    return FW_OK;
}

/* ---- loads ---------------------------------------------------------------------------------- */

typedef struct taking {
    fw_share *share;
    int32_t layer;
} taking;

static fw_status touch(taking *now, int32_t post, fw_post_account **out, fw_fault *fault)
{
    fw_share *share = now->share;
    fw_post_account *account = &share->post[post];
    *out = account;
    if (account->touched_layer == now->layer)
        return FW_OK;
    FW_TRY(fw_grow((void **)&share->touched, &share->touched_capacity, share->touched_count + 1,
                   sizeof *share->touched, holder, fault));
    share->touched[share->touched_count++] = post;
    account->touched_layer = now->layer;
    account->tip_N = account->own_N = 0;
    return FW_OK;
}

static fw_status take_anchor(void *context, int32_t anchor, double force_N, fw_fault *fault)
{
    taking *now = context;
    if (anchor == FW_NO_ANCHOR)
        return FW_OK; /* adrift: a finding of its own */
    if (anchor >= FW_PLATE_ANCHOR) {
        now->share->plate[anchor - FW_PLATE_ANCHOR].layer_N += force_N;
        return FW_OK;
    }
    fw_post_account *account = NULL;
    FW_TRY(touch(now, anchor, &account, fault));
    account->tip_N += force_N;
    return FW_OK;
}

static fw_status take_post(void *context, int32_t post, double force_N, fw_fault *fault)
{
    fw_post_account *account = NULL;
    FW_TRY(touch(context, post, &account, fault));
    account->own_N += force_N;
    return FW_OK;
}

static fw_status judge_margin(fw_share *share, int32_t post, int32_t layer, fw_layer_row *rows,
                              fw_fault *fault)
{
    const fw_post_account *account = &share->post[post];
    const fw_resin *resin = &share->setup->job->resin;
    if (account->group >= 0) {
        const fw_foot_group *group = &share->group[account->group];
        rows[layer].worst_margin = fmin(
            rows[layer].worst_margin, group->area_mm2 * resin->plate_adhesion_MPa / group->layer_N);
    }
    if (account->tip_N == 0)
        return FW_OK;
    if (account->contact_known) {
        const double tip = account->section.area_mm2[FW_POST_TIP] * resin->tensile_MPa;
        rows[layer].worst_margin = fmin(rows[layer].worst_margin, tip / account->tip_N);
        return FW_OK;
    }
    FW_TRY(fw_grow((void **)&share->waiting, &share->waiting_capacity, share->waiting_count + 1,
                   sizeof *share->waiting, holder, fault));
    share->waiting[share->waiting_count++] = (fw_waiting){post, layer, account->tip_N};
    return FW_OK;
}

static void raise_demand(fw_post_account *account, int32_t layer)
{
    double *load = account->demand.load_N;
    if (account->tip_N > load[FW_POST_TIP]) {
        load[FW_POST_TIP] = account->tip_N;
        account->load_layer = layer;
    }
    const double below = account->tip_N + account->own_N;
    for (int check = FW_POST_NECK; check < FW_POST_CHECKS; check++)
        load[check] = fmax(load[check], below);
}

/* What the layer pulls on each group of feet; clears the ones that it touches first. */
static void load_groups(fw_share *share)
{
    for (int clear = 1; clear >= 0; clear--) {
        for (size_t i = 0; i < share->touched_count; i++) {
            const fw_post_account *account = &share->post[share->touched[i]];
            if (account->group < 0)
                continue;
            fw_foot_group *group = &share->group[account->group];
            group->layer_N = clear ? 0 : group->layer_N + account->tip_N + account->own_N;
        }
    }
}

static fw_status book_posts(fw_share *share, int32_t layer, fw_layer_row *rows, fw_fault *fault)
{
    load_groups(share);
    for (size_t i = 0; i < share->touched_count; i++) {
        fw_post_account *account = &share->post[share->touched[i]];
        raise_demand(account, layer);
        if (account->group >= 0)
            account->group_N = fmax(account->group_N, share->group[account->group].layer_N);
        if (share->plan != NULL)
            FW_TRY(judge_margin(share, share->touched[i], layer, rows, fault));
    }
    share->touched_count = 0;
    return FW_OK;
}

void fw_share_judged(const fw_share *share, size_t post, fw_post_demand *demand,
                     fw_post_section *section)
{
    const fw_post_account *account = &share->post[post];
    *demand = account->demand;
    *section = account->section;
    if (account->group < 0)
        return;
    demand->load_N[FW_POST_FOOT] = account->group_N;
    section->area_mm2[FW_POST_FOOT] = share->group[account->group].area_mm2;
}

static void book_plates(fw_share *share, int32_t layer, fw_layer_row *rows)
{
    for (size_t i = 0; i < share->plate_count; i++) {
        fw_plate_account *plate = &share->plate[i];
        if (plate->layer_N == 0)
            continue;
        const double capacity = plate->area_mm2 * share->setup->job->resin.plate_adhesion_MPa;
        rows[layer].worst_margin = fmin(rows[layer].worst_margin, capacity / plate->layer_N);
        if (plate->layer_N > plate->load_N) {
            plate->load_N = plate->layer_N;
            plate->load_layer = layer;
        }
        plate->layer_N = 0;
    }
}

static fw_status step_tributary(fw_share *share, fw_sheet *sheet, const fw_sheet *before,
                                fw_fault *fault)
{
    const size_t count = sheet->contacts.count;
    fw_anchor_contact *anchor = NULL;
    FW_TRY(fw_allocate((void **)&anchor, count, sizeof *anchor, holder, fault));
    const double height = sheet->layer * share->setup->t_mm; /* so long is a post from here */
    for (size_t i = 0; i < count; i++)
        anchor[i] = (fw_anchor_contact){sheet->contacts.item[i].anchor,
                                        &sheet->contacts.item[i].runs, height};
    const fw_status status = fw_tributary_step(
        share->tributary, fw_slice_solid(&sheet->slice), fw_slice_solid_regions(&sheet->slice),
        before != NULL ? fw_slice_solid(&before->slice) : NULL,
        before != NULL ? fw_slice_solid_regions(&before->slice) : NULL, share->setup->t_mm, anchor,
        count, fault);
    free(anchor);
    return status;
}

fw_status fw_share_step(fw_share *share, fw_sheet *sheet, const fw_sheet *before,
                        fw_layer_row *rows, fw_fault *fault)
{
    FW_TRY(open_accounts(share, fault));
    if (share->plan != NULL) {
        FW_TRY(measure_sections(share, sheet, fault));
        if (before == NULL)
            FW_TRY(group_feet(share, sheet, fault));
        FW_TRY(measure_contacts(share, sheet, rows, fault));
    }
    if (share->tributary == NULL)
        return FW_OK;
    FW_TRY(find_contacts(share, sheet, before, fault));
    FW_TRY(step_tributary(share, sheet, before, fault));
    taking now = {share, sheet->layer};
    const fw_load_taker taker = {take_anchor, take_post, &now};
    FW_TRY(fw_loads_hand_out(share->setup, sheet, share->tributary, &taker, fault));
    FW_TRY(book_posts(share, sheet->layer, rows, fault));
    book_plates(share, sheet->layer, rows);
    return FW_OK;
}

void fw_share_finish(fw_share *share, fw_layer_row *rows)
{
    for (size_t p = 0; p < share->post_count; p++) {
        fw_post_account *account = &share->post[p];
        if (account->contact_known || share->plan == NULL)
            continue;
        account->section.area_mm2[FW_POST_TIP] = 0;
        settle_waiting(share, (int32_t)p, rows);
    }
}
