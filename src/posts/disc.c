#include "posts/disc.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>

static int32_t level_at_most(const fw_screen *screen, int32_t grey)
{
    int32_t level = 0;
    for (size_t i = 0; i < screen->level_count && screen->levels[i] <= grey; i++)
        level = screen->levels[i];
    return level;
}

int32_t fw_screen_grey(const fw_screen *screen, double coverage)
{
    if (screen->two_level)
        return coverage >= 0.5 ? screen->brightest : 0;
    int32_t grey = (int32_t)floor(coverage * screen->brightest + 0.5);
    return screen->levels != NULL ? level_at_most(screen, grey) : grey;
}

/* fmin and fmax are calls, which cost more than all else here; NAN never gets this far. */
static double lesser(double a, double b)
{
    return a < b ? a : b;
}

static double greater(double a, double b)
{
    return a > b ? a : b;
}

/* Half chord of a circle at distance `off` from its centre. */
static double half_chord(double radius, double off)
{
    return off < radius ? sqrt((radius - off) * (radius + off)) : 0.0;
}

/* Integral from 0 to x of sqrt(r^2 - x^2), 0 <= x <= r. */
static double arc_area(double radius, double x)
{
    double share = lesser(x / radius, 1.0);
    return 0.5 * radius * radius * (share * sqrt((1.0 - share) * (1.0 + share)) + asin(share));
}

/* Area of the circle in [x0, x1] x [y0, y1] of the first quadrant, all >= 0:
 *   integral over x of min(y1, h(x)) - y0 where h(x) = sqrt(r^2 - x^2) > y0.
 * Left of half_chord(y1) the column is full, then the arc cuts it, until half_chord(y0). */
static double quadrant_area(double radius, double x0, double x1, double y0, double y1)
{
    if (!(x1 > x0) || !(y1 > y0))
        return 0.0;
    double end = lesser(x1, half_chord(radius, y0));
    if (!(end > x0))
        return 0.0;
    double turn = lesser(greater(half_chord(radius, y1), x0), end);
    if (turn >= end)
        return (end - x0) * (y1 - y0);
    double under_arc = arc_area(radius, end) - arc_area(radius, turn) - (end - turn) * y0;
    return (turn - x0) * (y1 - y0) + greater(under_arc, 0.0);
}

/* One side of the centre line: [y0, y1] with y0 >= 0, x on both sides. */
static double half_area(double radius, double x0, double x1, double y0, double y1)
{
    return quadrant_area(radius, greater(x0, 0.0), greater(x1, 0.0), y0, y1) +
           quadrant_area(radius, greater(-x1, 0.0), greater(-x0, 0.0), y0, y1);
}

double fw_disc_coverage(const fw_screen *screen, const fw_disc *disc, int32_t x, int32_t y)
{
    double radius = disc->diameter_mm / 2.0;
    double x0 = x * screen->px_mm - disc->x_mm, x1 = (x + 1.0) * screen->px_mm - disc->x_mm;
    double y0 = y * screen->py_mm - disc->y_mm, y1 = (y + 1.0) * screen->py_mm - disc->y_mm;
    double area = half_area(radius, x0, x1, greater(y0, 0.0), greater(y1, 0.0)) +
                  half_area(radius, x0, x1, greater(-y1, 0.0), greater(-y0, 0.0));
    return lesser(area / ((x1 - x0) * (y1 - y0)), 1.0);
}

/* A pixel edge that may lie anywhere, cut to 0 .. size before it becomes an integer. */
static int32_t cut(double edge, int32_t size)
{
    return (int32_t)lesser(greater(edge, 0.0), size);
}

static bool drawable(const fw_disc *disc)
{
    return isfinite(disc->x_mm) && isfinite(disc->y_mm) && isfinite(disc->diameter_mm) &&
           disc->diameter_mm > 0.0;
}

void fw_disc_rows(const fw_screen *screen, const fw_disc *disc, int32_t *y0, int32_t *y1)
{
    *y0 = *y1 = 0;
    if (!drawable(disc))
        return;
    double radius = disc->diameter_mm / 2.0;
    int32_t from = cut(floor((disc->y_mm - radius) / screen->py_mm), screen->height);
    int32_t to = cut(ceil((disc->y_mm + radius) / screen->py_mm), screen->height);
    if (from < to) {
        *y0 = from;
        *y1 = to;
    }
}

fw_disc_row fw_disc_row_at(const fw_screen *screen, const fw_disc *disc, int32_t y)
{
    double radius = disc->diameter_mm / 2.0;
    double top = y * screen->py_mm - disc->y_mm, bottom = (y + 1.0) * screen->py_mm - disc->y_mm;
    double near = greater(greater(top, -bottom), 0.0), far = greater(-top, bottom);
    double outer = half_chord(radius, near), inner = half_chord(radius, far);
    int32_t x0 = cut(floor((disc->x_mm - outer) / screen->px_mm), screen->width);
    int32_t x1 = cut(ceil((disc->x_mm + outer) / screen->px_mm), screen->width);
    int32_t core0 = cut(ceil((disc->x_mm - inner) / screen->px_mm), screen->width);
    int32_t core1 = cut(floor((disc->x_mm + inner) / screen->px_mm), screen->width);
    if (!(inner > 0.0) || core1 <= core0)
        core0 = core1 = x0;
    return (fw_disc_row){x0, core0, core1, x1};
}

typedef bool (*accepts)(const fw_screen *screen, double coverage, int32_t least);

static bool is_solid(const fw_screen *screen, double coverage, int32_t least)
{
    return fw_screen_grey(screen, coverage) >= least;
}

static bool belongs(const fw_screen *screen, double coverage, int32_t unused)
{
    (void)unused;
    return screen->two_level ? coverage >= 0.5 : coverage > 0.0;
}

/* Walks in from both ends to the first pixel that is accepted; the core need not be looked at. */
static fw_run accepted_run(const fw_screen *screen, const fw_disc *disc, int32_t y, accepts test,
                           int32_t least)
{
    fw_disc_row row = fw_disc_row_at(screen, disc, y);
    bool has_core = row.core0 < row.core1;
    int32_t left_end = has_core ? row.core0 : row.x1, right_end = has_core ? row.core1 : row.x0;
    int32_t x0 = row.x0, x1 = row.x1;
    if (has_core && !test(screen, 1.0, least))
        return (fw_run){x0, x0};
    while (x0 < left_end && !test(screen, fw_disc_coverage(screen, disc, x0, y), least))
        x0++;
    if (!has_core)
        right_end = x0;
    while (x1 > right_end && !test(screen, fw_disc_coverage(screen, disc, x1 - 1, y), least))
        x1--;
    return (fw_run){x0, x1};
}

fw_run fw_disc_row_solid(const fw_screen *screen, const fw_disc *disc, int32_t y, int32_t least)
{
    return accepted_run(screen, disc, y, is_solid, least);
}

fw_run fw_disc_row_footprint(const fw_screen *screen, const fw_disc *disc, int32_t y)
{
    return accepted_run(screen, disc, y, belongs, 0);
}

int64_t fw_disc_count(const fw_screen *screen, const fw_disc *disc, int32_t least)
{
    int32_t y0, y1;
    fw_disc_rows(screen, disc, &y0, &y1);
    int64_t count = 0;
    for (int32_t y = y0; y < y1; y++) {
        fw_run run = fw_disc_row_solid(screen, disc, y, least);
        count += run.x1 - run.x0;
    }
    return count;
}

bool fw_disc_holds(const fw_screen *screen, const fw_disc *disc, int32_t least, int64_t need)
{
    int32_t y0, y1;
    fw_disc_rows(screen, disc, &y0, &y1);
    int64_t touched = 0, core = 0;
    for (int32_t y = y0; y < y1; y++) {
        fw_disc_row row = fw_disc_row_at(screen, disc, y);
        touched += row.x1 - row.x0;
        core += row.core1 - row.core0;
    }
    if (touched < need)
        return false;
    bool core_counts = fw_screen_grey(screen, 1.0) >= least;
    return (core_counts && core >= need) || fw_disc_count(screen, disc, least) >= need;
}

fw_status fw_disc_footprint(const fw_screen *screen, const fw_disc *disc, fw_runs *out,
                            fw_fault *fault)
{
    FW_TRY(fw_runs_begin(out, screen->width, screen->height, fault));
    int32_t y0, y1;
    fw_disc_rows(screen, disc, &y0, &y1);
    for (int32_t y = y0; y < y1; y++) {
        fw_run run = fw_disc_row_footprint(screen, disc, y);
        FW_TRY(fw_runs_push(out, y, run.x0, run.x1, fault));
    }
    fw_runs_finish(out);
    return FW_OK;
}

typedef struct pile_run {
    int32_t y, x0, x1;
} pile_run;

typedef struct pile {
    pile_run *item; /* [count] */
    size_t count, capacity;
} pile;

static int in_raster_order(const void *left, const void *right)
{
    const pile_run *a = left, *b = right;
    return a->y != b->y ? (a->y < b->y ? -1 : 1) : (a->x0 > b->x0) - (a->x0 < b->x0);
}

static fw_status pile_up(const fw_screen *screen, const fw_disc *disc, pile *out, fw_fault *fault)
{
    int32_t y0, y1;
    fw_disc_rows(screen, disc, &y0, &y1);
    for (int32_t y = y0; y < y1; y++) {
        fw_run run = fw_disc_row_footprint(screen, disc, y);
        FW_TRY(fw_grow((void **)&out->item, &out->capacity, out->count + 1, sizeof *out->item,
                       "discs of a layer", fault));
        out->item[out->count++] = (pile_run){y, run.x0, run.x1};
    }
    return FW_OK;
}

static fw_status level_out(const fw_screen *screen, const pile *from, fw_runs *out, fw_fault *fault)
{
    FW_TRY(fw_runs_begin(out, screen->width, screen->height, fault));
    if (from->count > 0)
        qsort(from->item, from->count, sizeof *from->item, in_raster_order);
    for (size_t i = 0; i < from->count; i++)
        FW_TRY(fw_runs_push(out, from->item[i].y, from->item[i].x0, from->item[i].x1, fault));
    fw_runs_finish(out);
    return FW_OK;
}

fw_status fw_discs_footprint(const fw_screen *screen, const fw_disc *discs, size_t count,
                             fw_runs *out, fw_fault *fault)
{
    pile all = {0};
    fw_status status = FW_OK;
    for (size_t i = 0; i < count && status == FW_OK; i++)
        status = pile_up(screen, &discs[i], &all, fault);
    if (status == FW_OK)
        status = level_out(screen, &all, out, fault);
    free(all.item);
    return status;
}
