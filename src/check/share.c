#include "check/share.h"

#include "check/contacts.h"
#include "check/lever_share.h"
#include "check/sections.h"
#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "loads on posts";

fw_status fw_share_open(const fw_setup *setup, const fw_posts *posts, const fw_stamp_plan *plan,
                        fw_share *out, fw_fault *fault)
{
    *out = (fw_share){.setup = setup, .posts = posts, .plan = plan, .lever = {.setup = setup}};
    if (!setup->loads)
        return FW_OK;
    return fw_tributary_new(setup->width, setup->height, setup->px_mm, setup->py_mm,
                            &out->tributary, fault);
}

void fw_share_close(fw_share *share)
{
    fw_tributary_free(share->tributary);
    for (size_t p = 0; p < share->post_count; p++)
        fw_runs_free(&share->post[p].end);
    free(share->post);
    free(share->plate);
    free(share->group);
    free(share->together.row);
    fw_lever_close(&share->lever);
    free(share->touched);
    free(share->waiting);
    free(share->loads.entry);
    free(share->loads.piece);
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

void fw_share_settle(fw_share *share, int32_t post, fw_layer_row *rows)
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

/* What the layer at hand pulls on the other posts that run into this one. */
static void add_layer_of_others(const fw_share *share, int32_t post, int32_t layer,
                                double load_N[2])
{
    const fw_together *all = &share->together;
    for (size_t i = fw_together_first(all, post); i < all->count && all->row[i].bearer == post;
         i++) {
        const fw_post_account *other = &share->post[all->row[i].other];
        if (other->touched_layer != layer)
            continue;
        load_N[0] += all->row[i].neck * (other->tip_N + other->own_N);
        load_N[1] += all->row[i].shaft * (other->tip_N + other->own_N);
    }
}

static void judge_members(const fw_share *share, int32_t post, int32_t layer, fw_layer_row *row)
{
    const fw_post_account *account = &share->post[post];
    const double below = account->tip_N + account->own_N;
    double load_N[2] = {below, below};
    add_layer_of_others(share, post, layer, load_N);
    for (int zone = 0; zone < 2; zone++) {
        const fw_post_check check = zone == 0 ? FW_POST_NECK : FW_POST_SHAFT;
        row->worst_margin =
            fmin(row->worst_margin, fw_margin_of(&share->setup->job->resin, check,
                                                 account->section.area_mm2[check], load_N[zone]));
    }
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
    judge_members(share, post, layer, &rows[layer]);
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
        account->load_layer =
            account->tip_N > account->lever_N[FW_POST_TIP] ? layer : account->load_layer;
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

void fw_share_push(fw_post_account *account, double push_N)
{
    double *most = account->braced ? &account->push.braced_N : &account->push.free_N;
    *most = fmax(*most, push_N);
}

/* On its way back the layer pushes as it pulled: the film is the same, without a cap. */
static void raise_push(const fw_sheet *sheet, fw_post_account *account)
{
    if (sheet->peel.push_N > 0 && sheet->peel.force_N > 0)
        fw_share_push(account, account->tip_N * sheet->peel.push_N / sheet->peel.force_N);
}

static fw_status book_posts(fw_share *share, const fw_sheet *sheet, fw_layer_row *rows,
                            fw_fault *fault)
{
    const int32_t layer = sheet->layer;
    load_groups(share);
    for (size_t i = 0; i < share->touched_count; i++) {
        fw_post_account *account = &share->post[share->touched[i]];
        raise_demand(account, layer);
        raise_push(sheet, account);
        if (account->group >= 0)
            account->group_N = fmax(account->group_N, share->group[account->group].layer_N);
        if (share->plan != NULL)
            FW_TRY(judge_margin(share, share->touched[i], layer, rows, fault));
    }
    share->touched_count = 0;
    return FW_OK;
}

void fw_share_demand(const fw_share *share, size_t post, fw_post_demand *demand)
{
    const fw_together *all = &share->together;
    const int32_t index = (int32_t)post;
    *demand = share->post[post].demand;
    for (size_t i = fw_together_first(all, index); i < all->count && all->row[i].bearer == index;
         i++) {
        /* The foot's load is the whole load of a post. */
        const double other_N = share->post[all->row[i].other].demand.load_N[FW_POST_FOOT];
        demand->load_N[FW_POST_NECK] += all->row[i].neck * other_N;
        demand->load_N[FW_POST_SHAFT] += all->row[i].shaft * other_N;
    }
    for (int check = 0; check < FW_POST_CHECKS; check++)
        demand->load_N[check] = fmax(demand->load_N[check], share->post[post].lever_N[check]);
}

void fw_share_judged(const fw_share *share, size_t post, fw_post_demand *demand,
                     fw_post_section *section)
{
    const fw_post_account *account = &share->post[post];
    fw_share_demand(share, post, demand);
    *section = account->section;
    if (account->group < 0)
        return;
    /* By rigid share each foot is strained as if it stood alone. */
    const double area = share->group[account->group].area_mm2;
    demand->load_N[FW_POST_FOOT] =
        fmax(account->group_N,
             account->lever_N[FW_POST_FOOT] * area / account->section.area_mm2[FW_POST_FOOT]);
    section->area_mm2[FW_POST_FOOT] = area;
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

void fw_share_new_batch(fw_share *share)
{
    fw_load_memo_forget(&share->loads);
}

fw_status fw_share_step(fw_share *share, fw_sheet *sheet, const fw_sheet *before,
                        fw_layer_row *rows, fw_fault *fault)
{
    FW_TRY(open_accounts(share, fault));
    FW_TRY(fw_lever_follow(&share->lever, sheet, before, fault));
    if (share->plan != NULL)
        FW_TRY(fw_sections_measure(share, sheet, rows, fault));
    if (share->tributary == NULL)
        return FW_OK;
    FW_TRY(fw_contacts_find(share, sheet, before, fault));
    FW_TRY(step_tributary(share, sheet, before, fault));
    taking now = {share, sheet->layer};
    const fw_load_taker taker = {take_anchor, take_post, &now};
    if (share->setup->traction.law != FW_TRACTION_SHEAR) /* no share by nearness sideways */
        FW_TRY(
            fw_loads_hand_out(share->setup, sheet, share->tributary, &share->loads, &taker, fault));
    FW_TRY(book_posts(share, sheet, rows, fault));
    book_plates(share, sheet->layer, rows);
    return fw_lever_share(share, sheet, &rows[sheet->layer], fault);
}

void fw_share_finish(fw_share *share, fw_layer_row *rows)
{
    for (size_t p = 0; p < share->post_count; p++) {
        fw_post_account *account = &share->post[p];
        if (account->contact_known || share->plan == NULL)
            continue;
        account->section.area_mm2[FW_POST_TIP] = 0;
        fw_share_settle(share, (int32_t)p, rows);
    }
}
