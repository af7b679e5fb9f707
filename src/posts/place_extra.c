/* More tips round an overloaded one. */
#include "fault/memory.h"
#include "posts/cover.h"
#include "posts/place_ground.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "placing";

typedef struct area {
    const fw_place_ground *ground;
    int32_t x0, y0, step_x, step_y;
    double x_mm, y_mm; /* of node (0, 0) */
} area;

static fw_stand area_stand(void *context, double x_mm, double y_mm)
{
    const area *a = context;
    const fw_place_ground *g = a->ground;
    fw_tip tip = {fw_place_micrometres(a->x_mm + x_mm), fw_place_micrometres(a->y_mm + y_mm)};
    int32_t x = (int32_t)floor(tip.x_mm / g->screen->px_mm);
    int32_t y = (int32_t)floor(tip.y_mm / g->screen->py_mm);
    if (!fw_place_has(g->fresh, x, y) ||
        (g->possible != NULL && !g->possible(g->context, tip.x_mm, tip.y_mm)))
        return FW_STAND_NOT;
    return fw_place_has(&g->whole, x, y) ? FW_STAND_WHOLE : FW_STAND_EDGE;
}

static fw_place_box box_of(const fw_runs *set)
{
    fw_place_box b = {0};
    for (int32_t y = 0; y < set->height; y++)
        for (uint32_t n = set->row[y]; n < set->row[y + 1]; n++) {
            fw_place_grow_box(&b, set->run[n].x0, y);
            fw_place_grow_box(&b, set->run[n].x1 - 1, y);
        }
    return b;
}

static fw_status open_area(area *a, const fw_place_ground *g, fw_cover_task *task, uint8_t **flags,
                           fw_fault *fault)
{
    enum { MOST_NODES = 10000 };
    fw_place_box b = box_of(g->fresh);
    *a = (area){
        g, b.x0, b.y0, 1, 1, (b.x0 + 0.5) * g->screen->px_mm, (b.y0 + 0.5) * g->screen->py_mm};
    while ((double)(b.x1 - b.x0) / a->step_x * (b.y1 - b.y0) / a->step_y > MOST_NODES) {
        a->step_x++;
        a->step_y++;
    }
    *task = (fw_cover_task){.nx = (b.x1 - b.x0 - 1) / a->step_x + 1,
                            .ny = (b.y1 - b.y0 - 1) / a->step_y + 1,
                            .dx_mm = a->step_x * g->screen->px_mm,
                            .dy_mm = a->step_y * g->screen->py_mm,
                            .radius_mm = g->rules->reach_mm,
                            .stand = area_stand,
                            .context = a};
    FW_TRY(fw_allocate((void **)flags, (size_t)task->nx * (size_t)task->ny, 1, holder, fault));
    for (int32_t j = 0; j < task->ny; j++)
        for (int32_t i = 0; i < task->nx; i++)
            if (fw_place_has(g->fresh, a->x0 + i * a->step_x, a->y0 + j * a->step_y))
                (*flags)[(size_t)j * (size_t)task->nx + (size_t)i] = FW_COVER_IN | FW_COVER_NEED;
    task->flags = *flags;
    return FW_OK;
}

/* Grows all (existing tips first, then new ones) by up to `more`. */
static fw_status share_area(const area *a, const fw_cover_task *task, const fw_tips *existing,
                            size_t more, double pitch_mm, fw_tips *all, fw_fault *fault)
{
    enum { LLOYD_ROUNDS = 12 };
    for (size_t n = 0; n < existing->count; n++) {
        fw_tip tip = {existing->item[n].x_mm - a->x_mm, existing->item[n].y_mm - a->y_mm};
        FW_TRY(fw_tips_push(all, tip, fault));
    }
    bool added = true;
    for (size_t n = 0; n < more && added; n++)
        FW_TRY(fw_cover_farthest(task, all, pitch_mm, &added, fault));
    return fw_cover_spread(task, all, existing->count, pitch_mm, LLOYD_ROUNDS, fault);
}

fw_status fw_place_extra(const fw_place_rules *rules, const fw_runs *runs, const fw_tips *existing,
                         size_t more, double pitch_mm, fw_place_possible possible, void *context,
                         fw_tips *out, fw_fault *fault)
{
    fw_place_ground g = {.rules = rules,
                         .screen = rules->screen,
                         .now = runs,
                         .fresh = runs,
                         .possible = possible,
                         .context = context};
    if (runs->count == 0 || more == 0)
        return FW_OK;
    area a;
    fw_cover_task task;
    uint8_t *flags = NULL;
    fw_tips all = {0};
    fw_status status = fw_place_erode(&g, runs, runs, &g.whole, fault);
    if (status == FW_OK)
        status = open_area(&a, &g, &task, &flags, fault);
    if (status == FW_OK)
        status = share_area(&a, &task, existing, more, pitch_mm, &all, fault);
    for (size_t n = existing->count; status == FW_OK && n < all.count; n++) {
        fw_tip tip = {fw_place_micrometres(a.x_mm + all.item[n].x_mm),
                      fw_place_micrometres(a.y_mm + all.item[n].y_mm)};
        status = fw_tips_push(out, tip, fault);
    }
    fw_tips_free(&all);
    free(flags);
    fw_place_ground_close(&g);
    return status;
}
