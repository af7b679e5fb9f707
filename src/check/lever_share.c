#include "check/lever_share.h"

#include "posts/profile.h"

#include <math.h>

typedef struct booking {
    fw_share *share;
    fw_layer_row *row;
    double push_per_pull; /* of the layer's two strokes */
} booking;

/* The pull that strains a round section of this area as N and M together do. */
static double equal_pull_N(double pull_N, double moment_Nmm, double area_mm2)
{
    const double d = sqrt(4 * area_mm2 / acos(-1.0));
    return d > 0 ? pull_N + 8 * moment_Nmm / d : pull_N;
}

static void book(const booking *now, int32_t post, fw_post_check check, double pull_N)
{
    fw_post_account *account = &now->share->post[post];
    if (!(pull_N > 0))
        return;
    const double most = fmax(account->lever_N[check], account->demand.load_N[check]);
    if (check == FW_POST_TIP && pull_N > most)
        account->load_layer = now->row->layer;
    account->lever_N[check] = fmax(account->lever_N[check], pull_N);
    now->row->worst_margin =
        fmin(now->row->worst_margin, fw_margin_of(&now->share->setup->job->resin, check,
                                                  account->section.area_mm2[check], pull_N));
}

static void book_foot(const booking *now, int32_t post, const fw_beam_node *node, size_t count,
                      const double force[6])
{
    const fw_beam_section foot = fw_beam_section_at(node, count - 2, 1, force);
    const double area = acos(-1.0) / 4 * foot.d_mm * foot.d_mm;
    book(now, post, FW_POST_FOOT, equal_pull_N(foot.n_N, foot.m_Nmm, area));
}

static fw_status book_members(const booking *now, int32_t index, const double force[6],
                              fw_fault *fault)
{
    const fw_post *post = &now->share->posts->item[index];
    const double t = now->share->setup->t_mm;
    fw_beam_node node[FW_LEVER_NODES];
    fw_beam_section worst;
    const size_t count = fw_lever_nodes(post, t, node);
    FW_TRY(fw_beam_peak(node, count, force, &worst, fault));
    const bool neck = fw_post_zone(post, worst.at[2], fw_post_face(post, t)) != FW_ZONE_SHAFT &&
                      fw_post_face(post, t) - worst.at[2] <= post->neck_mm;
    book(now, index, neck ? FW_POST_NECK : FW_POST_SHAFT,
         worst.peak_MPa * acos(-1.0) / 4 * worst.d_mm * worst.d_mm);
    book_foot(now, index, node, count, force);
    return FW_OK;
}

static fw_status take_post(const booking *now, int32_t index, const double force[6],
                           fw_fault *fault)
{
    fw_post_account *account = &now->share->post[index];
    const double tip_mm = now->share->posts->item[index].tip_mm;
    const double drawn = acos(-1.0) / 4 * tip_mm * tip_mm;
    const double area = account->contact_known ? account->section.area_mm2[FW_POST_TIP] : drawn;
    if (force[2] < 0)
        fw_share_push(account, -force[2]);
    else
        fw_share_push(account, force[2] * now->push_per_pull);
    book(now, index, FW_POST_TIP, equal_pull_N(force[2], hypot(force[3], force[4]), area));
    return book_members(now, index, force, fault);
}

static void take_plate(const booking *now, const fw_lever_anchor *anchor, const double force[6])
{
    fw_plate_account *plate = &now->share->plate[anchor->plate];
    const double bending = fabs(force[3]) * anchor->over_ixx + fabs(force[4]) * anchor->over_iyy;
    const double pull_N = force[2] + plate->area_mm2 * bending;
    if (!(pull_N > 0))
        return;
    const double capacity = plate->area_mm2 * now->share->setup->job->resin.plate_adhesion_MPa;
    now->row->worst_margin = fmin(now->row->worst_margin, capacity / pull_N);
    if (pull_N > plate->load_N) {
        plate->load_N = pull_N;
        plate->load_layer = now->row->layer;
    }
}

static fw_status take(void *context, const fw_lever_anchor *anchor, const double force[6],
                      fw_fault *fault)
{
    const booking *now = context;
    if (anchor->post >= 0)
        now->share->post[anchor->post].braced = anchor->fellows >= 2;
    if (anchor->post >= 0)
        return take_post(now, anchor->post, force, fault);
    take_plate(now, anchor, force);
    return FW_OK;
}

fw_status fw_lever_share(fw_share *share, const fw_sheet *sheet, fw_layer_row *row, fw_fault *fault)
{
    booking now = {share, row, 0};
    if (sheet->peel.force_N > 0)
        now.push_per_pull = sheet->peel.push_N / sheet->peel.force_N;
    const fw_lever_taker taker = {take, &now};
    return fw_lever_step(&share->lever, sheet, &taker, fault);
}
