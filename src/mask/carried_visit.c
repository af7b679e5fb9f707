/* Reading the carried distance: one pixel, peaks by region, and the pixels over a limit. */
#include "fault/memory.h"
#include "mask/carried_field.h"

#include <math.h>
#include <stdlib.h>

static double in_mm(const fw_carried *field, uint32_t units)
{
    return units >= field->saturation ? field->saturation_mm : units * field->unit_mm;
}

double fw_carried_at(const fw_carried *field, int32_t x, int32_t y)
{
    if (x < 0 || x >= field->width || y < 0 || y >= field->height ||
        !fw_bitplane_at(&field->medium, x, y))
        return INFINITY;
    return in_mm(field, fw_carried_units(field, x, y));
}

double fw_carried_unit(const fw_carried *field)
{
    return field->unit_mm;
}

size_t fw_carried_bytes(const fw_carried *field)
{
    const size_t tiles = (size_t)field->tiles_x * (size_t)field->tiles_y;
    size_t bytes = sizeof *field + tiles * (sizeof(fw_tile *) + 7) +
                   3 * field->medium.stride * (size_t)field->height * sizeof(uint32_t);
    for (size_t i = 0; i < tiles; i++)
        bytes += field->tile[i] != NULL ? sizeof(fw_tile) : 0;
    bytes += field->medium_runs.row_capacity * sizeof(uint32_t) +
             field->medium_runs.run_capacity * sizeof(fw_run) + field->finite_capacity;
    for (size_t i = 0; i < field->queue.count; i++)
        bytes += sizeof(fw_bucket) + field->queue.bucket[i].capacity * sizeof(uint64_t);
    return bytes + field->pending.capacity * sizeof(uint32_t);
}

/* A walk over the pixels above a limit; run = index of the run of the newest layer. */
typedef fw_status run_visitor(void *context, uint32_t run, int32_t y, int32_t x0, int32_t x1,
                              const double *value_mm, fw_fault *fault);

typedef struct walk {
    const fw_carried *field;
    uint32_t limit;       /* units: over means more */
    int32_t *next_active; /* [tiles_x + 1] first column >= this one whose tile may be over */
    double *value_mm;     /* [width] of the open stretch, from its first pixel */
    int32_t x0, x1;       /* open stretch; none where x0 == x1 */
    run_visitor *visit;
    void *context;
} walk;

/* A tile whose largest value is paid down to the limit needs no look at its pixels, unless some of
 * them are unknown: those count as over whatever the limit. */
static bool may_be_over(const walk *w, size_t index)
{
    const fw_tile *tile = w->field->tile[index];
    return w->field->unknown_in_tile[index] > 0 ||
           (tile != NULL && tile->base + tile->top - w->field->paid > w->limit);
}

static void find_active(walk *w, int32_t tile_row)
{
    const fw_carried *field = w->field;
    w->next_active[field->tiles_x] = field->tiles_x;
    for (int32_t column = field->tiles_x - 1; column >= 0; column--) {
        const bool active = may_be_over(w, fw_tile_index(field, column, tile_row));
        w->next_active[column] = active ? column : w->next_active[column + 1];
    }
}

static fw_status close_stretch(walk *w, uint32_t run, int32_t y, fw_fault *fault)
{
    const int32_t x0 = w->x0, x1 = w->x1;
    w->x0 = w->x1 = 0;
    return x0 < x1 ? w->visit(w->context, run, y, x0, x1, w->value_mm, fault) : FW_OK;
}

static fw_status walk_pixel(walk *w, uint32_t run, int32_t y, int32_t x, fw_fault *fault)
{
    const uint32_t units = fw_carried_units(w->field, x, y);
    if (units <= w->limit && units < w->field->saturation)
        return FW_OK;
    if (w->x0 == w->x1 || w->x1 != x) {
        FW_TRY(close_stretch(w, run, y, fault));
        w->x0 = x;
    }
    w->value_mm[x - w->x0] = in_mm(w->field, units);
    w->x1 = x + 1;
    return FW_OK;
}

static fw_status walk_run(walk *w, uint32_t run, int32_t y, fw_fault *fault)
{
    const fw_run r = w->field->now->run[run];
    for (int32_t column = w->next_active[r.x0 / FW_TILE]; column * FW_TILE < r.x1;
         column = w->next_active[column + 1]) {
        const int32_t first = column * FW_TILE;
        const int32_t end = r.x1 < first + FW_TILE ? r.x1 : first + FW_TILE;
        for (int32_t x = r.x0 > first ? r.x0 : first; x < end; x++)
            FW_TRY(walk_pixel(w, run, y, x, fault));
    }
    return close_stretch(w, run, y, fault);
}

static fw_status walk_rows(walk *w, fw_fault *fault)
{
    const fw_carried *field = w->field;
    const fw_runs *now = field->now;
    for (int32_t y = 0; y < field->height; y++) {
        if (y % FW_TILE == 0)
            find_active(w, y / FW_TILE);
        if (w->next_active[0] == field->tiles_x)
            continue;
        for (uint32_t run = now->row[y]; run < now->row[y + 1]; run++) {
            if (field->finite[field->regions->label[run]] != 0)
                FW_TRY(walk_run(w, run, y, fault));
        }
    }
    return FW_OK;
}

static fw_status walk_over(const fw_carried *field, double limit_mm, run_visitor *visit,
                           void *context, fw_fault *fault)
{
    if (!(limit_mm >= 0))
        return fw_fault_set(fault, FW_INPUT, "a reach of %g mm makes no sense, use 0 or more",
                            limit_mm);
    if (field->now == NULL)
        return FW_OK;
    walk w = {.field = field, .visit = visit, .context = context};
    /* The slack keeps a limit that is a whole number of units whole. */
    w.limit = (uint32_t)fmin(limit_mm / field->unit_mm + 1e-6, field->saturation);
    fw_status status = fw_allocate((void **)&w.next_active, (size_t)field->tiles_x + 1,
                                   sizeof *w.next_active, FW_CARRIED_HOLDER, fault);
    if (status == FW_OK)
        status = fw_allocate((void **)&w.value_mm, (size_t)field->width, sizeof *w.value_mm,
                             FW_CARRIED_HOLDER, fault);
    if (status == FW_OK)
        status = walk_rows(&w, fault);
    free(w.next_active);
    free(w.value_mm);
    return status;
}

typedef struct peaks {
    const fw_regions *regions;
    fw_carried_peak *peak; /* [regions->count] */
} peaks;

static fw_status add_to_peak(void *context, uint32_t run, int32_t y, int32_t x0, int32_t x1,
                             const double *value_mm, fw_fault *fault)
{
    (void)fault;
    peaks *p = context;
    fw_carried_peak *peak = &p->peak[p->regions->label[run]];
    peak->over_pixels += x1 - x0;
    for (int32_t x = x0; x < x1; x++) {
        if (value_mm[x - x0] > peak->worst_mm) {
            peak->worst_mm = value_mm[x - x0];
            peak->x = x;
            peak->y = y;
        }
    }
    return FW_OK;
}

fw_status fw_carried_over(const fw_carried *field, double limit_mm, fw_carried_peak *per_region,
                          fw_fault *fault)
{
    for (uint32_t r = 0; field->now != NULL && r < field->regions->count; r++)
        per_region[r] = (fw_carried_peak){0};
    peaks p = {field->regions, per_region};
    return walk_over(field, limit_mm, add_to_peak, &p, fault);
}

typedef struct caller {
    fw_carried_visitor *visit;
    void *context;
} caller;

static fw_status pass_on(void *context, uint32_t run, int32_t y, int32_t x0, int32_t x1,
                         const double *value_mm, fw_fault *fault)
{
    (void)run;
    const caller *c = context;
    return c->visit(c->context, y, x0, x1, value_mm, fault);
}

fw_status fw_carried_visit(const fw_carried *field, double limit_mm, fw_carried_visitor *visit,
                           void *context, fw_fault *fault)
{
    caller c = {visit, context};
    return walk_over(field, limit_mm, pass_on, &c, fault);
}
