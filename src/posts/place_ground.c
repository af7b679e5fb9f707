#include "posts/place_ground.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "placing";

fw_status fw_place_erode(const fw_place_ground *g, const fw_runs *base, const fw_runs *of,
                         fw_runs *out, fw_fault *fault)
{
    fw_runs not_base = {0}, near = {0};
    double radius = 0.5 * g->rules->tip_mm;
    fw_status status = fw_runs_complement(base, &not_base, fault);
    if (status == FW_OK)
        status = fw_runs_dilate(&not_base, radius / g->screen->px_mm, radius / g->screen->py_mm,
                                &near, fault);
    if (status == FW_OK)
        status = fw_runs_subtract(of, &near, out, fault);
    fw_runs_free(&not_base);
    fw_runs_free(&near);
    return status;
}

int32_t fw_place_step_px(double mm, double pixel_mm)
{
    return (int32_t)fmax(1.0, fmin(1 << 20, floor(mm / pixel_mm + 1e-9)));
}

fw_status fw_place_ground_open(fw_place_ground *g, fw_fault *fault)
{
    FW_TRY(fw_place_erode(g, g->fresh, g->fresh, &g->whole, fault));
    FW_TRY(fw_place_erode(g, g->now, g->fresh, &g->inside, fault));
    double sixth = g->rules->reach_mm / 6.0;
    g->block_px[0] = fw_place_step_px(sixth, g->screen->px_mm);
    g->block_px[1] = fw_place_step_px(sixth, g->screen->py_mm);
    g->blocks[0] = g->now->width / g->block_px[0] + 1;
    g->blocks[1] = g->now->height / g->block_px[1] + 1;
    return fw_allocate((void **)&g->block, (size_t)g->blocks[0] * (size_t)g->blocks[1], 1, holder,
                       fault);
}

void fw_place_ground_close(fw_place_ground *g)
{
    fw_runs_free(&g->whole);
    fw_runs_free(&g->inside);
    free(g->over);
    free(g->block);
}

bool fw_place_has(const fw_runs *set, int32_t x, int32_t y)
{
    return fw_runs_find(set, x, y) != UINT32_MAX;
}

uint32_t fw_place_region_at(const fw_place_ground *g, int32_t x, int32_t y)
{
    uint32_t run = fw_runs_find(g->now, x, y);
    return run == UINT32_MAX ? UINT32_MAX : g->regions->label[run];
}

double fw_place_micrometres(double mm)
{
    return round(mm * 1000.0) / 1000.0;
}

void fw_place_grow_box(fw_place_box *b, int32_t x, int32_t y)
{
    if (b->x1 == 0)
        *b = (fw_place_box){x, y, x + 1, y + 1};
    b->x0 = x < b->x0 ? x : b->x0;
    b->y0 = y < b->y0 ? y : b->y0;
    b->x1 = x >= b->x1 ? x + 1 : b->x1;
    b->y1 = y >= b->y1 ? y + 1 : b->y1;
}
