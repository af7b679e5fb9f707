#include "check/lever.h"

#include "fault/memory.h"
#include "posts/profile.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "levers of the parts";
static const double poisson = 0.4;

void fw_lever_close(fw_lever *lever)
{
    fw_bodies_free(&lever->parts);
    free(lever->anchor);
    free(lever->group);
    free(lever->part_of);
}

/* ---- anchors ----------------------------------------------------------------------------- */

static int by_height(const void *left, const void *right)
{
    const double *a = left, *b = right;
    return (*a < *b) - (*a > *b);
}

/* Heights at which direction or taper change, from tip to plate. */
static size_t breaks_of(const fw_post *post, double face_mm, double *z)
{
    size_t count = 0;
    z[count++] = face_mm;
    z[count++] = 0;
    z[count++] = face_mm - post->neck_mm;
    z[count++] = fw_post_foot_height(post);
    for (int32_t i = 1; i + 1 < post->point_count; i++)
        z[count++] = post->path[i].z;
    qsort(z, count, sizeof *z, by_height);
    return count;
}

size_t fw_lever_nodes(const fw_post *post, double layer_mm, fw_beam_node *node)
{
    double z[FW_LEVER_NODES];
    const double face = fw_post_face(post, layer_mm);
    size_t count = 0;
    if (!post->routed || post->tip_layer < 1)
        return 0;
    const size_t breaks = breaks_of(post, face, z);
    for (size_t i = 0; i < breaks; i++) {
        const bool again = count > 0 && node[count - 1].at[2] - z[i] < 1e-6;
        if (again || z[i] < 0 || z[i] > face)
            continue;
        fw_beam_node *now = &node[count];
        if (fw_post_centre(post, z[i], &now->at[0], &now->at[1])) {
            now->at[2] = z[i];
            now->d_mm = fw_post_diameter(post, fmin(z[i], face - 1e-9), face);
            count++;
        }
    }
    return count;
}

static fw_status add(fw_lever *lever, const fw_lever_anchor *anchor, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&lever->anchor, &lever->anchor_capacity, lever->anchor_count + 1,
                   sizeof *lever->anchor, holder, fault));
    lever->anchor[lever->anchor_count++] = *anchor;
    lever->stale = true;
    return FW_OK;
}

fw_status fw_lever_add_post(fw_lever *lever, const fw_post *post, int32_t index, uint32_t part,
                            fw_fault *fault)
{
    fw_beam_node node[FW_LEVER_NODES];
    fw_lever_anchor anchor = {.post = index, .plate = -1, .part = part, .root = UINT32_MAX};
    const size_t count = fw_lever_nodes(post, lever->setup->t_mm, node);
    if (count < 2)
        return FW_OK;
    const fw_beam_material green = fw_beam_isotropic(lever->setup->job->resin.modulus_MPa, poisson);
    FW_TRY(fw_beam_stiffness(node, count, green, &anchor.stiffness.k, fault));
    for (int i = 0; i < 3; i++)
        anchor.stiffness.at[i] = node[0].at[i];
    return add(lever, &anchor, fault);
}

/* Area, centroid and second moments of a set of pixels in the plane of the plate. */
static fw_patch patch_of(const fw_setup *setup, const fw_runs *contact)
{
    const double px = setup->px_mm, py = setup->py_mm;
    double area = 0, sum_x = 0, sum_y = 0, xx = 0, yy = 0, xy = 0;
    for (int32_t y = 0; y < contact->height; y++) {
        for (uint32_t i = contact->row[y]; i < contact->row[y + 1]; i++) {
            const double l = (contact->run[i].x1 - contact->run[i].x0) * px, a = l * py;
            const double cx = (contact->run[i].x0 + contact->run[i].x1) * px / 2;
            const double cy = (y + 0.5) * py;
            area += a;
            sum_x += a * cx;
            sum_y += a * cy;
            xx += a * (cx * cx + l * l / 12);
            yy += a * (cy * cy + py * py / 12);
            xy += a * cx * cy;
        }
    }
    const double x = sum_x / area, y = sum_y / area;
    return (fw_patch){.at = {x, y, 0},
                      .area_mm2 = area,
                      .ixx_mm4 = yy - area * y * y,
                      .iyy_mm4 = xx - area * x * x,
                      .ixy_mm4 = xy - area * x * y};
}

/* Distances of the pixels furthest from the patch's centroid, along x and y. */
static void find_rim(const fw_setup *setup, const fw_runs *contact, const fw_patch *patch,
                     double far_mm[2])
{
    const double px = setup->px_mm, py = setup->py_mm;
    far_mm[0] = far_mm[1] = 0;
    for (int32_t y = 0; y < contact->height; y++) {
        for (uint32_t i = contact->row[y]; i < contact->row[y + 1]; i++) {
            const fw_run r = contact->run[i];
            far_mm[0] = fmax(far_mm[0], fmax(patch->at[0] - r.x0 * px, r.x1 * px - patch->at[0]));
            far_mm[1] = fmax(far_mm[1], fmax(patch->at[1] - y * py, (y + 1) * py - patch->at[1]));
        }
    }
}

fw_status fw_lever_add_plate(fw_lever *lever, const fw_runs *contact, int32_t index, uint32_t part,
                             fw_fault *fault)
{
    fw_lever_anchor anchor = {.post = -1, .plate = index, .part = part, .root = UINT32_MAX};
    const double e = lever->setup->job->resin.modulus_MPa, t = lever->setup->t_mm;
    if (fw_runs_pixels(contact) < 2)
        return FW_OK;
    double far_mm[2];
    const fw_patch patch = patch_of(lever->setup, contact);
    find_rim(lever->setup, contact, &patch, far_mm);
    anchor.over_ixx = far_mm[1] / patch.ixx_mm4;
    anchor.over_iyy = far_mm[0] / patch.iyy_mm4;
    FW_TRY(fw_group_patch(&patch, e / t, e / (2 * (1 + poisson)) / t, &anchor.stiffness, fault));
    return add(lever, &anchor, fault);
}

/* ---- bodies ------------------------------------------------------------------------------ */

fw_status fw_lever_follow(fw_lever *lever, const fw_sheet *sheet, const fw_sheet *before,
                          fw_fault *fault)
{
    return fw_bodies_step(&lever->parts, sheet->layer, fw_sheet_part_regions(sheet),
                          before != NULL ? &sheet->part_from_before : NULL, NULL, fault);
}

static int by_root(const void *left, const void *right)
{
    const fw_lever_anchor *a = left, *b = right;
    if (a->root != b->root)
        return a->root < b->root ? -1 : 1;
    if (a->post != b->post)
        return a->post < b->post ? -1 : 1;
    return (a->plate > b->plate) - (a->plate < b->plate);
}

/* The point that a group refers to: the middle of its anchors. */
static fw_status make_group(fw_lever *lever, size_t first, size_t end, fw_fault *fault)
{
    double middle[3] = {0};
    for (size_t i = first; i < end; i++)
        for (int k = 0; k < 3; k++)
            middle[k] += lever->anchor[i].stiffness.at[k] / (double)(end - first);
    FW_TRY(fw_grow((void **)&lever->group, &lever->group_capacity, lever->group_count + 1,
                   sizeof *lever->group, holder, fault));
    fw_lever_group *made = &lever->group[lever->group_count++];
    *made =
        (fw_lever_group){.root = lever->anchor[first].root, .first = first, .count = end - first};
    fw_group_begin(&made->group, middle);
    for (size_t i = first; i < end; i++) {
        lever->anchor[i].fellows = end - first - 1;
        fw_group_add(&made->group, &lever->anchor[i].stiffness);
    }
    return fw_group_factor(&made->group, fault);
}

static fw_status make_groups(fw_lever *lever, fw_fault *fault)
{
    lever->group_count = 0;
    if (lever->anchor_count > 0)
        qsort(lever->anchor, lever->anchor_count, sizeof *lever->anchor, by_root);
    for (size_t first = 0, end; first < lever->anchor_count; first = end) {
        for (end = first;
             end < lever->anchor_count && lever->anchor[end].root == lever->anchor[first].root;)
            end++;
        FW_TRY(make_group(lever, first, end, fault));
    }
    lever->stale = false;
    return FW_OK;
}

/* Groups change where anchors came or bodies merged. */
static fw_status update_groups(fw_lever *lever, fw_fault *fault)
{
    for (size_t i = 0; i < lever->anchor_count; i++) {
        fw_lever_anchor *anchor = &lever->anchor[i];
        const uint32_t root = fw_bodies_root(&lever->parts, anchor->part);
        lever->stale = lever->stale || root != anchor->root;
        anchor->root = root;
    }
    return lever->stale ? make_groups(lever, fault) : FW_OK;
}

static fw_lever_group *group_of(const fw_lever *lever, uint32_t root)
{
    size_t low = 0, high = lever->group_count;
    while (low < high) {
        const size_t middle = low + (high - low) / 2;
        if (lever->group[middle].root < root)
            low = middle + 1;
        else
            high = middle;
    }
    return low < lever->group_count && lever->group[low].root == root ? &lever->group[low] : NULL;
}

/* ---- loads ------------------------------------------------------------------------------- */

/* Which part body each solid region belongs to: rows of part and solid walked together. */
static fw_status find_parts(fw_lever *lever, const fw_sheet *sheet, fw_fault *fault)
{
    const fw_runs *solid = fw_slice_solid(&sheet->slice), *part = fw_sheet_part(sheet);
    const fw_regions *regions = fw_slice_solid_regions(&sheet->slice);
    const uint32_t *of_part = fw_sheet_part_regions(sheet)->label;
    FW_TRY(fw_grow((void **)&lever->part_of, &lever->part_capacity, (size_t)regions->count + 1,
                   sizeof *lever->part_of, holder, fault));
    for (uint32_t r = 0; r < regions->count; r++)
        lever->part_of[r] = UINT32_MAX;
    for (int32_t y = 0; y < solid->height; y++) {
        uint32_t i = solid->row[y], j = part->row[y];
        while (i < solid->row[y + 1] && j < part->row[y + 1]) {
            const fw_run s = solid->run[i], p = part->run[j];
            uint32_t *body = &lever->part_of[regions->label[i]];
            if (s.x0 < p.x1 && p.x0 < s.x1 && *body == UINT32_MAX)
                *body = fw_bodies_of_region(&lever->parts, of_part[j]);
            if (s.x1 < p.x1)
                i++;
            else
                j++;
        }
    }
    return FW_OK;
}

/* Where a cluster's load acts, mm: the centre of its field, of its box where the bound was used. */
static void centre_of(const fw_setup *setup, const fw_cluster *cluster, double at[2])
{
    const fw_film_solution *solution = cluster->solution;
    const bool known = solution != NULL && solution->integral_mm4 > 0;
    at[0] = known ? cluster->x0 * setup->px_mm + solution->moment_x_mm5 / solution->integral_mm4
                  : (cluster->x0 + cluster->x1) * setup->px_mm / 2;
    at[1] = known ? cluster->y0 * setup->py_mm + solution->moment_y_mm5 / solution->integral_mm4
                  : (cluster->y0 + cluster->y1) * setup->py_mm / 2;
}

static void load_group(fw_lever *lever, const fw_sheet *sheet, const fw_cluster *cluster)
{
    const uint32_t part = lever->part_of[cluster->first_region];
    fw_lever_group *group =
        part != UINT32_MAX ? group_of(lever, fw_bodies_root(&lever->parts, part)) : NULL;
    if (group == NULL || cluster->force_N == 0)
        return;
    double at[3], moved[6];
    const double *slide = lever->setup->slide;
    const bool along_z = slide[0] == 0 && slide[1] == 0;
    const double pull[6] = {slide[0] * cluster->force_N, slide[1] * cluster->force_N,
                            along_z ? cluster->force_N : 0};
    centre_of(lever->setup, cluster, at);
    at[2] = (sheet->layer + 1) * lever->setup->t_mm;
    fw_six_move_wrench(at, group->group.at, pull, moved);
    for (int i = 0; i < 6; i++)
        group->load[i] += moved[i];
    group->loaded = true;
}

static fw_status hand_out(const fw_lever *lever, fw_lever_group *group, const fw_lever_taker *taker,
                          fw_fault *fault)
{
    double motion[6], force[6];
    FW_TRY(fw_group_motion(&group->group, group->load, motion, fault));
    for (size_t i = group->first; i < group->first + group->count; i++) {
        fw_group_force(&group->group, &lever->anchor[i].stiffness, motion, force);
        FW_TRY(taker->take(taker->context, &lever->anchor[i], force, fault));
    }
    for (int i = 0; i < 6; i++)
        group->load[i] = 0;
    group->loaded = false;
    return FW_OK;
}

fw_status fw_lever_step(fw_lever *lever, const fw_sheet *sheet, const fw_lever_taker *taker,
                        fw_fault *fault)
{
    FW_TRY(update_groups(lever, fault));
    if (lever->group_count == 0)
        return FW_OK;
    FW_TRY(find_parts(lever, sheet, fault));
    for (uint32_t c = 0; c < sheet->peel.count; c++)
        load_group(lever, sheet, &sheet->peel.cluster[c]);
    for (size_t g = 0; g < lever->group_count; g++) {
        if (lever->group[g].loaded)
            FW_TRY(hand_out(lever, &lever->group[g], taker, fault));
    }
    return FW_OK;
}
