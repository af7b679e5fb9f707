#include "stack/grey_rows.h"

#include "fault/memory.h"

#include <assert.h>
#include <string.h>

static const char holder[] = "greys of a layer";

void fw_greys_close_before(fw_greys *layer, int32_t y)
{
    while (layer->open_row < y)
        layer->row[++layer->open_row] = layer->count;
}

fw_status fw_greys_repeat_row(fw_greys *layer, int32_t y, fw_fault *fault)
{
    assert(0 <= y && y < layer->height && layer->open_row <= y);
    fw_greys_close_before(layer, y);
    if (y == 0)
        return FW_OK;
    const uint32_t first = layer->row[y - 1];
    const uint32_t runs = layer->row[y] - first;
    if (runs == 0)
        return FW_OK;
    FW_TRY(fw_grow((void **)&layer->run, &layer->run_capacity, (size_t)layer->count + runs,
                   sizeof *layer->run, holder, fault));
    memcpy(layer->run + layer->count, layer->run + first, runs * sizeof *layer->run);
    layer->count += runs;
    return FW_OK;
}

fw_status fw_greys_copy(const fw_greys *layer, fw_greys *copy, fw_fault *fault)
{
    FW_TRY(fw_greys_begin(copy, layer->width, layer->height, layer->full, fault));
    FW_TRY(fw_grow((void **)&copy->run, &copy->run_capacity, layer->count, sizeof *copy->run,
                   holder, fault));
    if (layer->count > 0)
        memcpy(copy->run, layer->run, layer->count * sizeof *copy->run);
    memcpy(copy->row, layer->row, ((size_t)layer->height + 1) * sizeof *copy->row);
    copy->count = layer->count;
    copy->open_row = layer->height;
    return FW_OK;
}

bool fw_greys_row_repeats(const fw_greys *layer, int32_t y)
{
    const uint32_t here = layer->row[y], runs = layer->row[y + 1] - here;
    if (y == 0)
        return runs == 0;
    const uint32_t above = layer->row[y - 1];
    if (runs != here - above)
        return false;
    return runs == 0 ||
           memcmp(layer->run + here, layer->run + above, runs * sizeof *layer->run) == 0;
}

size_t fw_greys_size(const fw_greys *layer)
{
    return layer->row_capacity * sizeof *layer->row + layer->run_capacity * sizeof *layer->run;
}
