#include "physics/film_system.h"

#include "fault/memory.h"
#include "physics/film_obstacle.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "fields of the peel film";

/* ---- what comes in ---- */

static fw_status check_sizes(const fw_film_shape *shape, fw_fault *fault)
{
    if (!(shape->px_mm > 0 && shape->py_mm > 0 && isfinite(shape->px_mm) && isfinite(shape->py_mm)))
        return fw_fault_set(fault, FW_INPUT,
                            "pixel size %g x %g mm, peel film, give sizes above zero", shape->px_mm,
                            shape->py_mm);
    bool same =
        shape->sealed.width == shape->film.width && shape->sealed.height == shape->film.height;
    if (shape->sealed.count > 0 && !same)
        return fw_fault_set(fault, FW_INPUT,
                            "cavities of %d x %d px in a film of %d x %d px, peel film, give both "
                            "in one box",
                            shape->sealed.width, shape->sealed.height, shape->film.width,
                            shape->film.height);
    return FW_OK;
}

/* A plane is least and most at corners of the box. */
static fw_status check_gap(const fw_film_shape *shape, fw_fault *fault)
{
    const fw_film_plane gap = shape->wider;
    const double across = gap.per_x_px * shape->film.width,
                 down = gap.per_y_px * shape->film.height;
    const double least = 1 + gap.at + fmin(across, 0) + fmin(down, 0);
    if (least > 0)
        return FW_OK;
    return fw_fault_set(fault, FW_INPUT,
                        "gap closed to %g of its size, peel film, tilt the plate less", least);
}

static fw_status check_cavities(const fw_film_shape *shape, fw_fault *fault)
{
    for (uint32_t i = 0; i < shape->sealed.count; i++) {
        if (shape->cavity[i] >= shape->cavity_count)
            return fw_fault_set(fault, FW_INPUT,
                                "sealed run %u names cavity %u of %u, peel film, number the "
                                "cavities from 0",
                                i, shape->cavity[i], shape->cavity_count);
    }
    return FW_OK;
}

static fw_status check_options(const fw_film_options *options, fw_fault *fault)
{
    if (options->cell_px < 0 || options->cell_px > 4096)
        return fw_fault_set(fault, FW_INPUT,
                            "cells of %d px, peel film, give 1 to 4096 or 0 to choose",
                            options->cell_px);
    if (!(options->work_tolerance >= 0 && options->work_tolerance < 1))
        return fw_fault_set(fault, FW_INPUT,
                            "work tolerance %g, peel film, give a share from 0 up to 1",
                            options->work_tolerance);
    return FW_OK;
}

/* Without a way to an open edge a node has no finite suction. */
static uint32_t reach_open(const fw_film_level *level, uint32_t *queue, bool *reached)
{
    uint32_t count = 0;
    for (uint32_t i = 0; i < level->nodes; i++) {
        reached[i] = level->wall[i] > 0;
        if (reached[i])
            queue[count++] = i;
    }
    for (uint32_t k = 0; k < count; k++) {
        for (uint32_t e = level->row[queue[k]]; e < level->row[queue[k] + 1]; e++) {
            uint32_t j = level->col[e];
            if (!reached[j]) {
                reached[j] = true;
                queue[count++] = j;
            }
        }
    }
    return count;
}

static fw_status check_open(const fw_film_system *system, fw_fault *fault)
{
    const fw_film_level *level = &system->levels->level[0];
    uint32_t *queue = NULL, lost = 0;
    bool *reached = NULL;
    FW_TRY(fw_allocate((void **)&queue, level->nodes, sizeof *queue, holder, fault));
    fw_status status = fw_allocate((void **)&reached, level->nodes, sizeof *reached, holder, fault);
    if (status == FW_OK && reach_open(level, queue, reached) == level->nodes)
        lost = level->nodes;
    while (status == FW_OK && lost < level->nodes && reached[lost])
        lost++;
    free(queue);
    free(reached);
    if (status != FW_OK || lost == level->nodes)
        return status;
    return fw_fault_set(fault, FW_INPUT,
                        "film or cavity without a way to an open edge, peel film near pixel "
                        "(%.0f, %.0f), seal no cavity at the edge of the box",
                        floor(level->x[lost]), floor(level->y[lost] / system->grid.ratio));
}

static fw_status allocate_fields(fw_film_system *system, fw_fault *fault)
{
    size_t n = system->levels->level[0].nodes;
    double **field[] = {&system->u, &system->rest, &system->step, &system->direction,
                        &system->product};
    for (size_t i = 0; i < sizeof field / sizeof *field; i++)
        FW_TRY(fw_allocate((void **)field[i], n, sizeof(double), holder, fault));
    return FW_OK;
}

/* What only a film at its cap needs; few are. */
static fw_status make_room(fw_film_system *system, fw_fault *fault)
{
    size_t n = system->levels->level[0].nodes;
    if (system->trial != NULL)
        return FW_OK;
    FW_TRY(fw_film_levels_may_hold(system->levels, fault));
    FW_TRY(fw_allocate((void **)&system->held, n, sizeof(bool), holder, fault));
    FW_TRY(fw_allocate((void **)&system->was_held, n, sizeof(bool), holder, fault));
    FW_TRY(fw_allocate((void **)&system->correction, n, sizeof(double), holder, fault));
    return fw_allocate((void **)&system->trial, n, sizeof(double), holder, fault);
}

static fw_status cut_grid(const fw_film_shape *shape, const fw_film_options *options,
                          fw_film_system *out, fw_fault *fault)
{
    bool fits = false;
    if (options->cell_px > 0)
        return fw_film_grid_build(shape, options->cell_px, UINT32_MAX, &out->grid, &fits, fault);
    const int32_t chosen = options->chosen_px > 0 ? options->chosen_px : fw_film_choose_cell(shape);
    for (int32_t block = chosen; !fits; block *= 2) {
        FW_TRY(fw_film_grid_build(shape, block, FW_FILM_MOST_CELLS, &out->grid, &fits, fault));
        out->coarse = block > chosen;
    }
    return FW_OK;
}

static fw_status build(const fw_film_shape *shape, const fw_film_options *options,
                       fw_film_system *out, fw_fault *fault)
{
    FW_TRY(check_sizes(shape, fault));
    FW_TRY(check_gap(shape, fault));
    FW_TRY(check_cavities(shape, fault));
    FW_TRY(check_options(options, fault));
    FW_TRY(cut_grid(shape, options, out, fault));
    FW_TRY(fw_allocate((void **)&out->levels, 1, sizeof *out->levels, holder, fault));
    FW_TRY(fw_film_levels_build(&out->grid, out->levels, fault));
    FW_TRY(allocate_fields(out, fault));
    return check_open(out, fault);
}

fw_status fw_film_system_build(const fw_film_shape *shape, const fw_film_options *options,
                               fw_film_system *out, fw_fault *fault)
{
    *out =
        (fw_film_system){.px_mm = shape->px_mm,
                         .tolerance = options->work_tolerance > 0 ? options->work_tolerance : 1e-3};
    return build(shape, options, out, fault);
}

void fw_film_system_free(fw_film_system *system)
{
    if (system->levels != NULL)
        fw_film_levels_free(system->levels);
    free(system->levels);
    fw_film_grid_free(&system->grid);
    free(system->u);
    free(system->rest);
    free(system->step);
    free(system->direction);
    free(system->product);
    free(system->trial);
    free(system->correction);
    free(system->held);
    free(system->was_held);
    *system = (fw_film_system){0};
}

/* ---- what goes out ---- */

static fw_status fill_cells(const fw_film_system *system, fw_film_solution *out, fw_fault *fault)
{
    const fw_film_grid *grid = &system->grid;
    const fw_film_level *node = &system->levels->level[0];
    double unit = system->px_mm * system->px_mm;
    FW_TRY(fw_allocate((void **)&out->cell, grid->cells, sizeof *out->cell, holder, fault));
    FW_TRY(fw_allocate((void **)&out->cavity_u_mm2, grid->cavities, sizeof(double), holder, fault));
    FW_TRY(
        fw_allocate((void **)&out->cavity_area_mm2, grid->cavities, sizeof(double), holder, fault));
    out->cell_count = grid->cells;
    out->cavity_count = grid->cavities;
    for (uint32_t i = 0; i < grid->cells; i++)
        out->cell[i] = (fw_film_cell){(float)node->x[i], (float)(node->y[i] / grid->ratio),
                                      (float)(node->area[i] * unit), (float)(system->u[i] * unit)};
    for (uint32_t k = 0; k < grid->cavities; k++) {
        out->cavity_u_mm2[k] = system->u[grid->cells + k] * unit;
        out->cavity_area_mm2[k] = node->area[grid->cells + k] * unit;
    }
    return FW_OK;
}

static void fill_sums(const fw_film_system *system, double top, fw_film_solution *out)
{
    const fw_film_level *node = &system->levels->level[0];
    double area = 0, integral = 0, moment_x = 0, moment_y = 0, peak = 0;
    for (uint32_t i = 0; i < node->nodes; i++) {
        double part = node->area[i] * system->u[i];
        area += node->area[i];
        integral += part;
        moment_x += part * node->x[i];
        moment_y += part * node->y[i];
        peak = system->u[i] > peak ? system->u[i] : peak;
    }
    double px = system->px_mm, px2 = px * px, px4 = px2 * px2;
    out->area_mm2 = area * px2;
    out->integral_mm4 = integral * px4;
    out->moment_x_mm5 = moment_x * px4 * px;
    out->moment_y_mm5 = moment_y * px4 * px;
    out->peak_u_mm2 = peak * px2;
    out->capped = node->nodes > 0 && peak >= top;
    out->cell_px = system->grid.block;
    out->coarse = system->coarse;
    out->unknowns = node->nodes;
}

/* dF/dq at fixed cap: the held nodes stay where they are, the others answer to the source alone,
 * A' w = source', w = 0 where held; the tangent is the integral of w. */
static double tangent(fw_film_system *system, const fw_film_solution *solution)
{
    if (!solution->capped)
        return solution->integral_mm4;
    const fw_film_level *level = &system->levels->level[0];
    double sum = 0, px2 = system->px_mm * system->px_mm;
    bool done;
    memset(system->trial, 0, level->nodes * sizeof *system->trial);
    for (uint32_t i = 0; i < level->nodes; i++)
        system->rest[i] = system->held[i] ? 0 : level->source[i];
    (void)fw_film_conjugate(system, 0, system->trial, system->tolerance, 0, 400, &done);
    for (uint32_t i = 0; i < level->nodes; i++)
        sum += level->area[i] * system->trial[i];
    return sum * px2 * px2;
}

/* Most films stay below their cap: the free solve, four times cheaper, then is the answer. Its u is
 * good to the work tolerance, so close to the cap it is not trusted. */
static bool solve_below(fw_film_system *system, double top)
{
    const double clear = 0.98 * top;
    if (!fw_film_solve_free(system))
        return false;
    for (uint32_t i = 0; i < system->levels->level[0].nodes; i++) {
        if (system->u[i] > clear)
            return false;
    }
    return true;
}

static fw_status solve(fw_film_system *system, double obstacle_mm2, fw_film_solution *out,
                       fw_fault *fault)
{
    double top = obstacle_mm2 / (system->px_mm * system->px_mm);
    system->iterations = 0;
    bool done = isinf(top) ? fw_film_solve_free(system) : solve_below(system, top);
    if (!done && !isinf(top)) {
        FW_TRY(make_room(system, fault));
        done = fw_film_solve_capped(system, top);
    }
    out->residual = fw_film_residual(system, top);
    if (!done)
        return fw_fault_set(fault, FW_MACHINE,
                            "no convergence (residual %.1e after %u steps), peel film of %u "
                            "unknowns, report this shape",
                            out->residual, system->iterations, system->levels->level[0].nodes);
    fill_sums(system, top, out);
    out->tangent_mm4 = tangent(system, out);
    out->iterations = system->iterations;
    return fill_cells(system, out, fault);
}

fw_status fw_film_system_solve(fw_film_system *system, double obstacle_mm2, fw_film_solution *out,
                               fw_fault *fault)
{
    *out = (fw_film_solution){0};
    if (!(obstacle_mm2 > 0))
        return fw_fault_set(fault, FW_INPUT, "obstacle %g mm2, peel film, give one above zero",
                            obstacle_mm2);
    fw_status status = solve(system, obstacle_mm2, out, fault);
    if (status != FW_OK)
        fw_film_solution_free(out);
    return status;
}
