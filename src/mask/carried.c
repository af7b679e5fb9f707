#include "mask/carried.h"

#include "fault/memory.h"
#include "mask/carried_field.h"

#include <math.h>
#include <stdlib.h>

static fw_status check_shape(int32_t width, int32_t height, double px_mm, double py_mm,
                             double saturation_mm, fw_fault *fault)
{
    if (width < 1 || height < 1 || (uint64_t)width * (uint64_t)height > UINT32_MAX)
        return fw_fault_set(fault, FW_INPUT,
                            "a carried distance cannot cover %d x %d pixels, use fewer than 2^32",
                            (int)width, (int)height);
    if (!(px_mm > 0 && py_mm > 0 && saturation_mm > 0) ||
        !(isfinite(px_mm) && isfinite(py_mm) && isfinite(saturation_mm)))
        return fw_fault_set(fault, FW_INPUT,
                            "pixel sides and saturation of a carried distance must be positive, "
                            "got %g x %g mm and %g mm",
                            px_mm, py_mm, saturation_mm);
    if (fmax(px_mm, py_mm) > 8 * fmin(px_mm, py_mm))
        return fw_fault_set(fault, FW_INPUT,
                            "pixels of %g x %g mm are too long for distances, the sides may differ "
                            "8 times at most",
                            px_mm, py_mm);
    if (saturation_mm > 3000 * fmin(px_mm, py_mm))
        return fw_fault_set(fault, FW_INPUT,
                            "a distance of %g mm is over 3000 pixels of %g mm, use a shorter reach",
                            saturation_mm, fmin(px_mm, py_mm));
    return FW_OK;
}

/* The finest power-of-two share of the smaller side in which the saturation still fits. */
static void choose_unit(fw_carried *field, double px_mm, double py_mm, double saturation_mm)
{
    field->unit_mm = fmin(px_mm, py_mm) / 4096;
    while (ceil(saturation_mm / field->unit_mm) > FW_CARRIED_UNITS)
        field->unit_mm *= 2;
    field->saturation = (uint32_t)ceil(saturation_mm / field->unit_mm - 1e-9);
    if (field->saturation == 0)
        field->saturation = 1;
    field->saturation_mm = saturation_mm;
}

static fw_status allocate_planes(fw_carried *field, int32_t width, int32_t height, fw_fault *fault)
{
    fw_bitplane *plane[] = {&field->medium, &field->unknown, &field->woken};
    for (size_t i = 0; i < sizeof plane / sizeof *plane; i++)
        FW_TRY(fw_bitplane_new(plane[i], width, height, FW_CARRIED_HOLDER, fault));
    field->tiles_x = field->medium.columns;
    field->tiles_y = height / FW_TILE + (height % FW_TILE != 0);
    const size_t tiles = (size_t)field->tiles_x * (size_t)field->tiles_y;
    FW_TRY(fw_allocate((void **)&field->tile, tiles, sizeof(fw_tile *), FW_CARRIED_HOLDER, fault));
    FW_TRY(fw_allocate((void **)&field->unknown_in_tile, tiles, sizeof *field->unknown_in_tile,
                       FW_CARRIED_HOLDER, fault));
    FW_TRY(fw_allocate((void **)&field->tile_woken, tiles, sizeof *field->tile_woken,
                       FW_CARRIED_HOLDER, fault));
    FW_TRY(fw_allocate((void **)&field->woken_tile, tiles, sizeof *field->woken_tile,
                       FW_CARRIED_HOLDER, fault));
    return fw_runs_begin(&field->medium_runs, width, height, fault);
}

static fw_status open_queue(fw_carried *field, fw_fault *fault)
{
    fw_queue *queue = &field->queue;
    queue->width = field->saturation;
    for (size_t i = 0; i < field->steps.count; i++) {
        if (field->steps.step[i].length < queue->width)
            queue->width = field->steps.step[i].length;
    }
    const size_t count = field->saturation / queue->width + 1;
    FW_TRY(fw_allocate((void **)&queue->bucket, count, sizeof *queue->bucket, FW_CARRIED_HOLDER,
                       fault));
    queue->count = count;
    return FW_OK;
}

fw_status fw_carried_new(int32_t width, int32_t height, double px_mm, double py_mm,
                         double saturation_mm, fw_carried **out, fw_fault *fault)
{
    FW_TRY(check_shape(width, height, px_mm, py_mm, saturation_mm, fault));
    fw_carried *field = NULL;
    FW_TRY(fw_allocate((void **)&field, 1, sizeof *field, FW_CARRIED_HOLDER, fault));
    field->width = width;
    field->height = height;
    choose_unit(field, px_mm, py_mm, saturation_mm);
    fw_status status = fw_steps_new(&field->steps, px_mm, py_mm, field->unit_mm, fault);
    if (status == FW_OK)
        status = open_queue(field, fault);
    if (status == FW_OK)
        status = allocate_planes(field, width, height, fault);
    if (status != FW_OK) {
        fw_carried_free(field);
        return status;
    }
    fw_runs_finish(&field->medium_runs);
    *out = field;
    return FW_OK;
}

void fw_carried_free(fw_carried *field)
{
    if (field == NULL)
        return;
    const size_t tiles = (size_t)field->tiles_x * (size_t)field->tiles_y;
    for (size_t i = 0; field->tile != NULL && i < tiles; i++)
        free(field->tile[i]);
    free(field->tile);
    free(field->unknown_in_tile);
    free(field->tile_woken);
    free(field->woken_tile);
    fw_steps_free(&field->steps);
    fw_bitplane_free(&field->medium);
    fw_bitplane_free(&field->unknown);
    fw_bitplane_free(&field->woken);
    fw_runs_free(&field->medium_runs);
    free(field->finite);
    for (size_t i = 0; i < field->queue.count; i++)
        free(field->queue.bucket[i].key);
    free(field->queue.bucket);
    free(field->pending.index);
    free(field);
}

enum { HAS_KEPT = 1, HAS_SOURCE = 2 };

/* Sets a flag of every region that holds a pixel of a subset of its layer. */
static void flag_regions(const fw_runs *now, const fw_regions *regions, const fw_runs *subset,
                         uint8_t flag, uint8_t *flags)
{
    for (int32_t y = 0; y < now->height; y++) {
        uint32_t i = now->row[y];
        for (uint32_t j = subset->row[y]; j < subset->row[y + 1]; j++) {
            while (i < now->row[y + 1] && now->run[i].x1 <= subset->run[j].x0)
                i++;
            if (i < now->row[y + 1] && now->run[i].x0 <= subset->run[j].x0)
                flags[regions->label[i]] |= flag;
        }
    }
}

static fw_status flag_kept(fw_carried *field, const fw_runs *now, const fw_regions *regions,
                           fw_fault *fault)
{
    if (fw_runs_equal(now, &field->medium_runs)) {
        flag_regions(now, regions, now, HAS_KEPT, field->finite);
        return FW_OK;
    }
    fw_runs kept = {0};
    fw_status status = fw_runs_intersect(now, &field->medium_runs, &kept, fault);
    if (status == FW_OK)
        flag_regions(now, regions, &kept, HAS_KEPT, field->finite);
    fw_runs_free(&kept);
    return status;
}

static fw_status choose_finite(fw_carried *field, const fw_runs *now, const fw_regions *regions,
                               const uint8_t *held, const fw_runs *sources, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&field->finite, &field->finite_capacity, regions->count,
                   sizeof *field->finite, FW_CARRIED_HOLDER, fault));
    for (uint32_t r = 0; r < regions->count; r++)
        field->finite[r] = 0;
    FW_TRY(flag_kept(field, now, regions, fault));
    if (sources != NULL)
        flag_regions(now, regions, sources, HAS_SOURCE, field->finite);
    for (uint32_t r = 0; r < regions->count; r++) {
        const bool carries = (field->finite[r] & HAS_KEPT) != 0 && (held == NULL || held[r] != 0);
        field->finite[r] = carries || (field->finite[r] & HAS_SOURCE) != 0;
    }
    return FW_OK;
}

static fw_status pick_finite(const fw_carried *field, fw_runs *out, fw_fault *fault)
{
    const fw_runs *now = field->now;
    FW_TRY(fw_runs_begin(out, now->width, now->height, fault));
    for (int32_t y = 0; y < now->height; y++) {
        for (uint32_t i = now->row[y]; i < now->row[y + 1]; i++) {
            if (field->finite[field->regions->label[i]] != 0)
                FW_TRY(fw_runs_push(out, y, now->run[i].x0, now->run[i].x1, fault));
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

/* Makes the finite regions the medium: what is new enters, what is no longer in it leaves. */
static fw_status change_medium(fw_carried *field, fw_runs *medium, fw_runs *change, fw_fault *fault)
{
    FW_TRY(pick_finite(field, medium, fault));
    FW_TRY(fw_runs_subtract(&field->medium_runs, medium, change, fault));
    fw_carried_leave(field, change);
    FW_TRY(fw_runs_subtract(medium, &field->medium_runs, change, fault));
    fw_carried_enter(field, change);
    const fw_runs before = field->medium_runs;
    field->medium_runs = *medium;
    *medium = before;
    return FW_OK;
}

static bool all_finite(const fw_carried *field)
{
    for (uint32_t r = 0; r < field->regions->count; r++) {
        if (field->finite[r] == 0)
            return false;
    }
    return true;
}

static fw_status follow_finite(fw_carried *field, fw_fault *fault)
{
    if (fw_runs_equal(field->now, &field->medium_runs) && all_finite(field))
        return FW_OK; /* the layer repeats: the usual case */
    fw_runs medium = {0}, change = {0};
    fw_status status = change_medium(field, &medium, &change, fault);
    fw_runs_free(&medium);
    fw_runs_free(&change);
    return status;
}

static fw_status check_size(const fw_carried *field, const fw_runs *set, fw_fault *fault)
{
    if (set == NULL || (set->width == field->width && set->height == field->height))
        return FW_OK;
    return fw_fault_set(fault, FW_INPUT,
                        "a layer of %d x %d pixels follows layers of %d x %d, use one size",
                        (int)set->width, (int)set->height, (int)field->width, (int)field->height);
}

fw_status fw_carried_step(fw_carried *field, const fw_runs *now, const fw_regions *regions,
                          const uint8_t *held, const fw_runs *sources, double credit_mm,
                          fw_fault *fault)
{
    FW_TRY(check_size(field, now, fault));
    FW_TRY(check_size(field, sources, fault));
    if (!(credit_mm >= 0) || !isfinite(credit_mm))
        return fw_fault_set(fault, FW_INPUT,
                            "a credit of %g mm a layer makes no sense, use 0 or more", credit_mm);
    FW_TRY(choose_finite(field, now, regions, held, sources, fault));
    field->now = now;
    field->regions = regions;
    if (field->started) /* more than all would only grow the sum */
        fw_carried_pay(field, fmin(credit_mm / field->unit_mm, field->saturation));
    field->started = true;
    FW_TRY(follow_finite(field, fault));
    if (sources != NULL)
        fw_carried_source(field, sources);
    return fw_carried_settle(field, FW_CHANGED_CREDIT, fault);
}

/* Makes the regions that hold a source finite; true in *grown where one was not. */
static fw_status hold_regions(fw_carried *field, const fw_runs *sources, bool *grown,
                              fw_fault *fault)
{
    uint8_t *flags = NULL;
    const uint32_t count = field->regions->count;
    FW_TRY(fw_allocate((void **)&flags, count, sizeof *flags, FW_CARRIED_HOLDER, fault));
    flag_regions(field->now, field->regions, sources, HAS_SOURCE, flags);
    *grown = false;
    for (uint32_t r = 0; r < count; r++) {
        *grown = *grown || (flags[r] != 0 && field->finite[r] == 0);
        field->finite[r] = field->finite[r] != 0 || flags[r] != 0;
    }
    free(flags);
    return *grown ? follow_finite(field, fault) : FW_OK;
}

fw_status fw_carried_add_sources(fw_carried *field, const fw_runs *sources, fw_fault *fault)
{
    FW_TRY(check_size(field, sources, fault));
    if (field->now == NULL)
        return FW_OK;
    bool grown = false;
    FW_TRY(hold_regions(field, sources, &grown, fault));
    fw_carried_source(field, sources);
    return fw_carried_settle(field, grown ? FW_CHANGED_MEDIUM : FW_CHANGED_SOURCES, fault);
}
