#include "mask/regions.h"

#include "fault/memory.h"

#include <stdlib.h>

static const char holder[] = "regions of a layer";

/* While labelling, label[i] is the parent of run i: itself or an earlier run. */
static uint32_t root_of(uint32_t *parent, uint32_t i)
{
    while (parent[i] != i) {
        parent[i] = parent[parent[i]];
        i = parent[i];
    }
    return i;
}

static void join(uint32_t *parent, uint32_t i, uint32_t j)
{
    const uint32_t a = root_of(parent, i), b = root_of(parent, j);
    if (a < b)
        parent[b] = a;
    else
        parent[a] = b;
}

/* Joins the runs of row y with those of the row before that they touch. gap = 0: they share at
 * least one column; gap = 1: a corner is enough. */
static void join_rows(const fw_runs *set, int32_t y, int32_t gap, uint32_t *parent)
{
    uint32_t i = set->row[y - 1], j = set->row[y];
    while (i < set->row[y] && j < set->row[y + 1]) {
        const fw_run p = set->run[i], q = set->run[j];
        if (p.x0 < q.x1 + gap && q.x0 < p.x1 + gap)
            join(parent, i, j);
        if (p.x1 < q.x1)
            i++;
        else
            j++;
    }
}

/* A parent is an earlier run, so one pass upward turns parents into region numbers, roots in raster
 * order. Returns the number of regions. */
static uint32_t number_runs(uint32_t *label, uint32_t runs)
{
    uint32_t regions = 0;
    for (uint32_t i = 0; i < runs; i++)
        label[i] = label[i] == i ? regions++ : label[label[i]];
    return regions;
}

static fw_region region_of_run(fw_run run, int32_t y)
{
    const int64_t pixels = run.x1 - run.x0;
    return (fw_region){
        .pixels = pixels,
        .sum_x = ((int64_t)run.x0 + run.x1 - 1) * pixels / 2,
        .sum_y = y * pixels,
        .x0 = run.x0,
        .y0 = y,
        .x1 = run.x1,
        .y1 = y + 1,
        .first_x = run.x0,
        .first_y = y,
    };
}

/* Runs arrive in raster order, so neither y0 nor the first pixel can change. */
static void add_run(fw_region *region, fw_run run, int32_t y)
{
    const fw_region more = region_of_run(run, y);
    region->pixels += more.pixels;
    region->sum_x += more.sum_x;
    region->sum_y += more.sum_y;
    region->x0 = run.x0 < region->x0 ? run.x0 : region->x0;
    region->x1 = run.x1 > region->x1 ? run.x1 : region->x1;
    region->y1 = y + 1;
}

static bool box_on_border(const fw_region *region, const fw_runs *set)
{
    return region->x0 == 0 || region->y0 == 0 || region->x1 == set->width ||
           region->y1 == set->height;
}

static void sum_regions(const fw_runs *set, fw_regions *out)
{
    uint32_t seen = 0;
    for (int32_t y = 0; y < set->height; y++) {
        for (uint32_t i = set->row[y]; i < set->row[y + 1]; i++) {
            const uint32_t r = out->label[i];
            if (r < seen)
                add_run(&out->region[r], set->run[i], y);
            else
                out->region[seen++] = region_of_run(set->run[i], y);
        }
    }
    for (uint32_t r = 0; r < out->count; r++)
        out->region[r].on_border = box_on_border(&out->region[r], set);
}

fw_status fw_regions_label(const fw_runs *set, fw_connect connect, fw_regions *out, fw_fault *fault)
{
    out->count = 0;
    FW_TRY(fw_grow((void **)&out->label, &out->label_capacity, set->count, sizeof *out->label,
                   holder, fault));
    for (uint32_t i = 0; i < set->count; i++)
        out->label[i] = i;
    for (int32_t y = 1; y < set->height; y++)
        join_rows(set, y, connect == FW_EIGHT ? 1 : 0, out->label);
    const uint32_t regions = number_runs(out->label, set->count);
    FW_TRY(fw_grow((void **)&out->region, &out->region_capacity, regions, sizeof *out->region,
                   holder, fault));
    out->count = regions;
    sum_regions(set, out);
    return FW_OK;
}

void fw_regions_free(fw_regions *regions)
{
    free(regions->label);
    free(regions->region);
    *regions = (fw_regions){0};
}
