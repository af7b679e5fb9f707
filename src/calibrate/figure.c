#include "calibrate/figure.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "mask of a check";

fw_status fw_figure_new(int32_t width, int32_t height, fw_figure *out, fw_fault *fault)
{
    *out = (fw_figure){.width = width, .height = height};
    return fw_allocate((void **)&out->pixel, (size_t)width * (size_t)height, 1, holder, fault);
}

void fw_figure_free(fw_figure *figure)
{
    free(figure->pixel);
    *figure = (fw_figure){0};
}

static uint8_t *at(const fw_figure *figure, int32_t x, int32_t y)
{
    return &figure->pixel[(size_t)y * (size_t)figure->width + (size_t)x];
}

fw_status fw_figure_rows(const char *rows, fw_figure *out, fw_fault *fault)
{
    const int32_t width = (int32_t)strcspn(rows, "/");
    const int32_t height = (int32_t)((strlen(rows) + 1) / ((size_t)width + 1));
    FW_TRY(fw_figure_new(width, height, out, fault));
    for (int32_t y = 0; y < height; y++) {
        for (int32_t x = 0; x < width; x++) {
            const char c = rows[y * (width + 1) + x];
            *at(out, x, y) = c == '#'   ? FW_FIGURE_FILM
                             : c == 'o' ? FW_FIGURE_CAVITY
                                        : FW_FIGURE_OPEN;
        }
    }
    return FW_OK;
}

void fw_figure_box(fw_figure *figure, int32_t x0, int32_t y0, int32_t x1, int32_t y1, uint8_t what)
{
    for (int32_t y = y0; y < y1; y++)
        memset(at(figure, x0, y), what, (size_t)(x1 - x0));
}

void fw_figure_disc(fw_figure *figure, double x, double y, double r, uint8_t what)
{
    for (int32_t row = 0; row < figure->height; row++) {
        for (int32_t column = 0; column < figure->width; column++) {
            if (hypot(column + 0.5 - x, row + 0.5 - y) <= r)
                *at(figure, column, row) = what;
        }
    }
}

fw_status fw_figure_round(double r, fw_figure *out, fw_fault *fault)
{
    const int32_t size = 2 * (int32_t)ceil(r) + 4;
    FW_TRY(fw_figure_new(size, size, out, fault));
    fw_figure_disc(out, size / 2.0, size / 2.0, r, FW_FIGURE_FILM);
    return FW_OK;
}

static fw_status push_row(const fw_figure *figure, int32_t y, fw_film_shape *out, fw_fault *fault)
{
    for (int32_t x = 0, end; x < figure->width; x = end) {
        const uint8_t what = *at(figure, x, y);
        for (end = x + 1; end < figure->width && *at(figure, end, y) == what;)
            end++;
        if (what == FW_FIGURE_FILM)
            FW_TRY(fw_runs_push(&out->film, y, x, end, fault));
        if (what == FW_FIGURE_CAVITY)
            FW_TRY(fw_runs_push(&out->sealed, y, x, end, fault));
    }
    return FW_OK;
}

static fw_status fill_shape(const fw_figure *figure, fw_film_shape *out, fw_fault *fault)
{
    FW_TRY(fw_runs_begin(&out->film, figure->width, figure->height, fault));
    FW_TRY(fw_runs_begin(&out->sealed, figure->width, figure->height, fault));
    for (int32_t y = 0; y < figure->height; y++)
        FW_TRY(push_row(figure, y, out, fault));
    fw_runs_finish(&out->film);
    fw_runs_finish(&out->sealed);
    out->cavity_count = out->sealed.count > 0;
    return fw_allocate((void **)&out->cavity, out->sealed.count, sizeof *out->cavity, holder,
                       fault);
}

fw_status fw_figure_shape(const fw_figure *figure, double px_mm, double py_mm, fw_film_shape *out,
                          fw_fault *fault)
{
    *out = (fw_film_shape){.px_mm = px_mm, .py_mm = py_mm};
    const fw_status status = fill_shape(figure, out, fault);
    if (status != FW_OK)
        fw_figure_shape_free(out);
    return status;
}

void fw_figure_shape_free(fw_film_shape *shape)
{
    fw_runs_free(&shape->film);
    fw_runs_free(&shape->sealed);
    free(shape->cavity);
    *shape = (fw_film_shape){0};
}

fw_status fw_figure_solve(const fw_figure *figure, const fw_figure_pull *pull,
                          fw_film_solution *out, fw_fault *fault)
{
    fw_film_shape shape;
    *out = (fw_film_solution){0};
    FW_TRY(fw_figure_shape(figure, pull->px_mm, pull->py_mm, &shape, fault));
    shape.faster = pull->faster;
    shape.wider = pull->wider;
    const fw_film_options options = {.cell_px = 1,
                                     .obstacle_mm2 = pull->obstacle_mm2 > 0 ? pull->obstacle_mm2
                                                                            : (double)INFINITY,
                                     .work_tolerance = pull->tolerance};
    const fw_status status = fw_film_solve(&shape, &options, out, fault);
    fw_figure_shape_free(&shape);
    return status;
}

fw_status fw_figure_integral(fw_figure *figure, double px_mm, double *integral_mm4, fw_fault *fault)
{
    const fw_figure_pull pull = {.px_mm = px_mm, .py_mm = px_mm, .tolerance = 1e-13};
    fw_film_solution solution;
    const fw_status status = fw_figure_solve(figure, &pull, &solution, fault);
    *integral_mm4 = solution.integral_mm4;
    fw_film_solution_free(&solution);
    fw_figure_free(figure);
    return status;
}
