#include "mask/greys.h"

#include "fault/memory.h"

#include <assert.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "greys of a layer";

fw_status fw_greys_begin(fw_greys *layer, int32_t width, int32_t height, int32_t full,
                         fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&layer->row, &layer->row_capacity, (size_t)height + 1,
                   sizeof *layer->row, holder, fault));
    layer->width = width;
    layer->height = height;
    layer->full = full;
    layer->count = 0;
    layer->open_row = 0;
    layer->row[0] = 0;
    return FW_OK;
}

static void close_rows_before(fw_greys *layer, int32_t y)
{
    while (layer->open_row < y)
        layer->row[++layer->open_row] = layer->count;
}

fw_status fw_greys_push(fw_greys *layer, int32_t y, int32_t x0, int32_t x1, int32_t grey,
                        fw_fault *fault)
{
    assert(y >= layer->open_row && y < layer->height && 0 <= x0 && x1 <= layer->width);
    if (x0 >= x1 || grey == 0)
        return FW_OK;
    close_rows_before(layer, y);
    if (layer->count > layer->row[y]) {
        fw_grey_run *last = &layer->run[layer->count - 1];
        if (last->x1 == x0 && last->grey == grey) {
            last->x1 = x1;
            return FW_OK;
        }
    }
    FW_TRY(fw_grow((void **)&layer->run, &layer->run_capacity, (size_t)layer->count + 1,
                   sizeof *layer->run, holder, fault));
    layer->run[layer->count++] = (fw_grey_run){x0, x1, grey};
    return FW_OK;
}

void fw_greys_finish(fw_greys *layer)
{
    close_rows_before(layer, layer->height);
}

void fw_greys_free(fw_greys *layer)
{
    free(layer->row);
    free(layer->run);
    *layer = (fw_greys){0};
}

bool fw_greys_equal(const fw_greys *a, const fw_greys *b)
{
    if (a->width != b->width || a->height != b->height || a->full != b->full ||
        a->count != b->count)
        return false;
    if (a->count == 0)
        return true;
    return memcmp(a->row, b->row, ((size_t)a->height + 1) * sizeof *a->row) == 0 &&
           memcmp(a->run, b->run, a->count * sizeof *a->run) == 0;
}

fw_status fw_greys_at_least(const fw_greys *layer, int32_t least, fw_runs *out, fw_fault *fault)
{
    FW_TRY(fw_runs_begin(out, layer->width, layer->height, fault));
    for (int32_t y = 0; y < layer->height; y++) {
        for (uint32_t i = layer->row[y]; i < layer->row[y + 1]; i++) {
            const fw_grey_run r = layer->run[i];
            if (r.grey >= least)
                FW_TRY(fw_runs_push(out, y, r.x0, r.x1, fault));
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

int32_t fw_greys_at(const fw_greys *layer, int32_t x, int32_t y)
{
    if (y < 0 || y >= layer->height)
        return 0;
    uint32_t low = layer->row[y], high = layer->row[y + 1];
    while (low < high) {
        uint32_t middle = low + (high - low) / 2;
        if (layer->run[middle].x1 <= x)
            low = middle + 1;
        else
            high = middle;
    }
    bool inside = low < layer->row[y + 1] && layer->run[low].x0 <= x;
    return inside ? layer->run[low].grey : 0;
}
