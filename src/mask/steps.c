#include "mask/steps.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "steps of the carried distance";

/* Angle between two directions of a quadrant whose determinant is 1, as its tangent in mm: no
 * trigonometry, so that every machine makes the same list. */
static bool too_wide(fw_offset u, fw_offset v, double px_mm, double py_mm)
{
    static const double widest = 0.3345953195; /* tan(18.5 degrees) */
    const double dot = (double)u.dx * v.dx * px_mm * px_mm + (double)u.dy * v.dy * py_mm * py_mm;
    return px_mm * py_mm > widest * dot;
}

static fw_status add_crossing(fw_steps *steps, int32_t dx, int32_t dy, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&steps->crossing, &steps->crossing_capacity, steps->crossing_count + 1,
                   sizeof *steps->crossing, holder, fault));
    steps->crossing[steps->crossing_count++] = (fw_offset){dx, dy};
    return FW_OK;
}

/* Walks the line from (0, 0) to (a, b), a and b coprime and not negative, and adds the pixels that
 * it crosses, mirrored by sx, sy. The line leaves column i at (2 i + 1) / (2 a) of its length and
 * row j at (2 j + 1) / (2 b): both at once is a corner, which can only be at its middle. */
static fw_status add_crossings(fw_steps *steps, fw_step *step, int32_t sx, int32_t sy,
                               fw_fault *fault)
{
    const int32_t a = step->dx * sx, b = step->dy * sy;
    fw_offset side[2] = {{0, 0}, {0, 0}};
    step->crossed = (uint32_t)steps->crossing_count;
    for (int32_t i = 0, j = 0; i < a || j < b;) {
        const int32_t column_end = (2 * i + 1) * b, row_end = (2 * j + 1) * a;
        if (column_end == row_end) {
            step->corner = true;
            side[0] = (fw_offset){sx * (i + 1), sy * j};
            side[1] = (fw_offset){sx * i, sy * (j + 1)};
        }
        i += column_end <= row_end;
        j += row_end <= column_end;
        if (i < a || j < b)
            FW_TRY(add_crossing(steps, sx * i, sy * j, fault));
    }
    step->crossed_end = (uint32_t)steps->crossing_count;
    for (int k = 0; step->corner && k < 2; k++)
        FW_TRY(add_crossing(steps, side[k].dx, side[k].dy, fault));
    return FW_OK;
}

static int32_t larger(int32_t a, int32_t b)
{
    return a > b ? a : b;
}

static fw_status add_step(fw_steps *steps, fw_offset to, int32_t sx, int32_t sy, double length,
                          fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&steps->step, &steps->capacity, steps->count + 1, sizeof *steps->step,
                   holder, fault));
    /* The slack keeps a whole number of units whole. */
    fw_step step = {.dx = sx * to.dx, .dy = sy * to.dy, .length = (uint32_t)ceil(length - 1e-9)};
    FW_TRY(add_crossings(steps, &step, sx, sy, fault));
    steps->step[steps->count++] = step;
    steps->radius_x = larger(steps->radius_x, to.dx);
    steps->radius_y = larger(steps->radius_y, to.dy);
    return FW_OK;
}

typedef struct pixel_scale {
    double px_mm, py_mm, unit_mm;
} pixel_scale;

/* The step and its mirror images. */
static fw_status add_direction(fw_steps *steps, fw_offset to, pixel_scale scale, fw_fault *fault)
{
    const double x = to.dx * scale.px_mm, y = to.dy * scale.py_mm;
    const double length = sqrt(x * x + y * y) / scale.unit_mm;
    for (int32_t sx = 1; sx >= (to.dx > 0 ? -1 : 1); sx -= 2) {
        for (int32_t sy = 1; sy >= (to.dy > 0 ? -1 : 1); sy -= 2)
            FW_TRY(add_step(steps, to, sx, sy, length, fault));
    }
    return FW_OK;
}

/* Adds what lies strictly between u and v until no gap is too wide. The depth is at most
 * 2 FW_STEP_RADIUS, since each level adds to one of the two numbers. */
static fw_status add_between(fw_steps *steps, fw_offset u, fw_offset v, pixel_scale scale,
                             fw_fault *fault)
{
    if (!too_wide(u, v, scale.px_mm, scale.py_mm))
        return FW_OK;
    const fw_offset middle = {u.dx + v.dx, u.dy + v.dy};
    FW_TRY(add_direction(steps, middle, scale, fault));
    FW_TRY(add_between(steps, u, middle, scale, fault));
    return add_between(steps, middle, v, scale, fault);
}

fw_status fw_steps_new(fw_steps *steps, double px_mm, double py_mm, double unit_mm, fw_fault *fault)
{
    const fw_offset right = {1, 0}, down = {0, 1};
    const pixel_scale scale = {px_mm, py_mm, unit_mm};
    *steps = (fw_steps){0};
    fw_status status = add_direction(steps, right, scale, fault);
    if (status == FW_OK)
        status = add_direction(steps, down, scale, fault);
    if (status == FW_OK)
        status = add_between(steps, right, down, scale, fault);
    if (status != FW_OK)
        fw_steps_free(steps);
    return status;
}

void fw_steps_free(fw_steps *steps)
{
    free(steps->step);
    free(steps->crossing);
    *steps = (fw_steps){0};
}
