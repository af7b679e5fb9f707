#include "check/peel.h"

#include "check/clusters.h"
#include "check/frame.h"
#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>

static void free_shape(fw_film_shape *shape)
{
    fw_runs_free(&shape->film);
    fw_runs_free(&shape->sealed);
    free(shape->cavity);
    *shape = (fw_film_shape){0};
}

static void free_shapes(fw_peel *peel)
{
    for (uint32_t c = 0; c < peel->count; c++)
        free_shape(&peel->cluster[c].shape);
}

void fw_peel_free(fw_peel *peel)
{
    free_shapes(peel);
    free(peel->cluster);
    free(peel->of_region);
    free(peel->of_void);
    free(peel->cavity_of);
    *peel = (fw_peel){0};
}

/* Used unsolved: too small to matter, and the bound is on the safe side. A cluster with sealed
 * voids is always solved, since its holes are not in the bound. */
static bool is_negligible(const fw_setup *setup, const fw_cluster *cluster)
{
    return setup->traction.law == FW_TRACTION_NONE && !cluster->sealed &&
           setup->q * cluster->bound_mm4 < setup->unsolved_N;
}

/* Of a cluster without sealed voids: what its rows carry at most, and no more than the liquid
 * holds.
 */
static double bound_N(const fw_setup *setup, const fw_cluster *cluster, double q)
{
    return fmin(q * cluster->bound_mm4, setup->cap_MPa * cluster->area_mm2);
}

static void use_bound(const fw_setup *setup, fw_cluster *cluster)
{
    cluster->q = setup->q;
    cluster->force_N = bound_N(setup, cluster, setup->q);
    cluster->limited_by = FW_BY_BOUND;
}

static fw_status follow_law(const fw_setup *setup, fw_film_memo *memo, fw_cluster *cluster,
                            fw_fault *fault)
{
    const bool table = setup->traction.law == FW_TRACTION_TABLE;
    FW_TRY(
        fw_film_memo_traction(memo, &cluster->shape, &setup->traction, &cluster->solution, fault));
    cluster->q = setup->q;
    cluster->force_N = cluster->solution->integral_mm4;
    cluster->limited_by = table ? FW_BY_TABLE : FW_BY_FILM;
    return FW_OK;
}

static fw_status solve_cluster(const fw_setup *setup, fw_film_memo *memo, fw_cluster *cluster,
                               fw_fault *fault)
{
    if (setup->traction.law != FW_TRACTION_NONE)
        return follow_law(setup, memo, cluster, fault);
    const fw_film_options options = {.obstacle_mm2 = setup->cap_MPa / setup->q};
    FW_TRY(fw_film_memo_solve(memo, &cluster->shape, &options, &cluster->solution, fault));
    cluster->q = setup->q;
    cluster->force_N = setup->q * cluster->solution->integral_mm4;
    cluster->limited_by = cluster->solution->capped ? FW_BY_CAP : FW_BY_FILM;
    return FW_OK;
}

/* Forces add; the layer is at the cap when any of its clusters is, else by film when any is, else
 * by what its clusters have in common. */
static void sum_up(fw_peel *out)
{
    out->force_N = 0;
    out->limited_by = FW_BY_NOTHING;
    out->coarse_px = 0;
    for (uint32_t c = 0; c < out->count; c++) {
        const fw_cluster *cluster = &out->cluster[c];
        const fw_film_solution *solution = cluster->solution;
        out->force_N += cluster->force_N;
        if (solution != NULL && solution->coarse && solution->cell_px > out->coarse_px)
            out->coarse_px = solution->cell_px;
        const bool stronger = cluster->limited_by == FW_BY_CAP ||
                              (cluster->limited_by == FW_BY_FILM && out->limited_by != FW_BY_CAP) ||
                              out->limited_by == FW_BY_NOTHING;
        if (stronger)
            out->limited_by = cluster->limited_by;
    }
}

/* ---- the gap range ------------------------------------------------------------------------ */

/* Below the cap a force is a straight line in q. */
static bool is_straight(const fw_setup *setup, const fw_film_solution *solution, double q)
{
    return !solution->capped && q * solution->peak_u_mm2 <= setup->cap_MPa;
}

/* The force rises with q, lies under the line through the origin (it is concave there) and under
 * cap times area. */
static double cluster_bound(const fw_setup *setup, const fw_cluster *cluster, double q)
{
    const fw_film_solution *solution = cluster->solution;
    if (solution == NULL)
        return bound_N(setup, cluster, q);
    if (is_straight(setup, solution, q))
        return q * solution->integral_mm4;
    const double full = setup->cap_MPa * solution->area_mm2;
    const double above = q > cluster->q ? cluster->force_N * q / cluster->q : cluster->force_N;
    return fmin(full, above);
}

void fw_peel_range_bound(const fw_setup *setup, const fw_peel *peel, double most_N[2])
{
    for (int end = 0; end < 2; end++) {
        most_N[end] = 0;
        for (uint32_t c = 0; c < peel->count; c++)
            most_N[end] += cluster_bound(setup, &peel->cluster[c], setup->q_range[end]);
    }
}

/* A capped film under a plate that tilts has no load curve: it is solved at the asked q. */
static fw_status range_by_solve(const fw_setup *setup, fw_film_memo *memo, fw_cluster *cluster,
                                int end, fw_fault *fault)
{
    const double q = setup->q_range[end];
    const fw_film_options options = {.obstacle_mm2 = setup->cap_MPa / q};
    const fw_film_solution *solution = NULL;
    FW_TRY(fw_film_memo_solve(memo, &cluster->shape, &options, &solution, fault));
    cluster->range_N[end] = q * solution->integral_mm4;
    return FW_OK;
}

static fw_status cluster_range(const fw_setup *setup, fw_film_memo *memo, fw_cluster *cluster,
                               fw_fault *fault)
{
    const fw_film_curve *curve = NULL;
    for (int end = 0; end < 2; end++) {
        const double q = setup->q_range[end];
        cluster->range_N[end] = cluster_bound(setup, cluster, q);
        if (cluster->solution == NULL || is_straight(setup, cluster->solution, q))
            continue;
        if (setup->job->machine.mode == FW_MODE_TILT) {
            FW_TRY(range_by_solve(setup, memo, cluster, end, fault));
            continue;
        }
        const fw_film_options options = {0};
        if (curve == NULL)
            FW_TRY(
                fw_film_memo_curve(memo, &cluster->shape, &options, setup->cap_MPa, &curve, fault));
        cluster->range_N[end] = fw_film_curve_force(curve, q);
    }
    return FW_OK;
}

static fw_status frame_range(const fw_setup *setup, fw_film_memo *memo, fw_peel *peel,
                             fw_fault *fault)
{
    for (int end = 0; end < 2; end++)
        FW_TRY(fw_frame_range(setup, memo, peel, end, &peel->range_N[end], fault));
    return FW_OK;
}

fw_status fw_peel_range(const fw_setup *setup, fw_film_memo *memo, fw_peel *peel, fw_fault *fault)
{
    if (setup->traction.law == FW_TRACTION_NONE && setup->job->machine.stiffness_N_mm > 0)
        return frame_range(setup, memo, peel, fault);
    peel->range_N[0] = peel->range_N[1] = 0;
    for (uint32_t c = 0; c < peel->count; c++) {
        FW_TRY(cluster_range(setup, memo, &peel->cluster[c], fault));
        for (int end = 0; end < 2; end++)
            peel->range_N[end] += peel->cluster[c].range_N[end];
    }
    return FW_OK;
}

/* ---- the layer ---------------------------------------------------------------------------- */

static fw_status solve_all(const fw_setup *setup, const fw_slice *slice,
                           const fw_openings *openings, uint8_t *wanted, fw_film_memo *memo,
                           fw_peel *out, fw_fault *fault)
{
    bool any = false;
    for (uint32_t c = 0; c < out->count; c++) {
        wanted[c] = !is_negligible(setup, &out->cluster[c]);
        any = any || wanted[c];
    }
    if (any)
        FW_TRY(fw_clusters_shape(setup, slice, openings, wanted, out, fault));
    for (uint32_t c = 0; c < out->count; c++) {
        if (wanted[c])
            FW_TRY(solve_cluster(setup, memo, &out->cluster[c], fault));
        else
            use_bound(setup, &out->cluster[c]);
    }
    return FW_OK;
}

fw_status fw_peel_solve(const fw_setup *setup, const fw_slice *slice, const uint8_t *posts_only,
                        const fw_openings *openings, fw_film_memo *memo, fw_peel *out,
                        fw_fault *fault)
{
    uint8_t *wanted = NULL;
    free_shapes(out); /* of the layer that used this slot before */
    FW_TRY(fw_clusters_find(setup, slice, posts_only, openings, out, fault));
    FW_TRY(fw_allocate((void **)&wanted, out->count, sizeof *wanted, "peel clusters", fault));
    fw_status status = solve_all(setup, slice, openings, wanted, memo, out, fault);
    free(wanted);
    sum_up(out);
    out->q = setup->q;
    out->rigid_N = out->force_N;
    if (status == FW_OK)
        status = fw_frame_approach(setup, memo, out, fault);
    if (status == FW_OK)
        status = fw_frame_relax(setup, memo, out, fault);
    sum_up(out);
    if (out->force_N < 0.99 * out->rigid_N && out->limited_by != FW_BY_CAP)
        out->limited_by = FW_BY_FRAME;
    return status;
}
