#include "posts/tributary_nodes.h"

#include "fault/memory.h"

#include <stdlib.h>

static const char holder[] = "cells of the anchors' shares";

static int by_key_and_start(const void *left, const void *right)
{
    const fw_span *a = left, *b = right;
    if (a->key != b->key)
        return a->key < b->key ? -1 : 1;
    return (a->c0 > b->c0) - (a->c0 < b->c0);
}

static fw_status push(fw_spans *out, uint64_t key, int32_t row, int32_t c0, int32_t c1,
                      fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&out->span, &out->span_capacity, out->count + 1, sizeof *out->span,
                   holder, fault));
    out->span[out->count++] = (fw_span){key, c0, c1, row, 0};
    return FW_OK;
}

/* Sorts what was pushed since `start`, joins what touches and numbers the nodes. */
static void close_row(fw_spans *out, size_t start)
{
    size_t kept = start;
    if (out->count > start)
        qsort(out->span + start, out->count - start, sizeof *out->span, by_key_and_start);
    for (size_t i = start; i < out->count; i++) {
        const fw_span next = out->span[i];
        fw_span *last = kept > start ? &out->span[kept - 1] : NULL;
        if (last != NULL && last->key == next.key && next.c0 <= last->c1)
            last->c1 = next.c1 > last->c1 ? next.c1 : last->c1;
        else
            out->span[kept++] = next;
    }
    out->count = kept;
    for (size_t i = start; i < kept; i++) {
        out->span[i].first = out->nodes;
        out->nodes += (uint32_t)(out->span[i].c1 - out->span[i].c0);
    }
}

typedef struct source {
    const fw_runs *before; /* NULL: regions of now alone */
    const fw_regions *before_regions;
    const fw_runs *now;
    const fw_regions *regions;
} source;

static fw_status push_pixels(const fw_cells *cells, uint64_t key, int32_t y, int32_t x0, int32_t x1,
                             fw_spans *out, fw_fault *fault)
{
    return push(out, key, y / cells->ky, x0 / cells->kx, (x1 - 1) / cells->kx + 1, fault);
}

static fw_status push_row(const fw_cells *cells, const source *from, int32_t y, fw_spans *out,
                          fw_fault *fault)
{
    for (uint32_t i = from->now->row[y]; i < from->now->row[y + 1]; i++) {
        const fw_run run = from->now->run[i];
        FW_TRY(push_pixels(cells, from->regions->label[i], y, run.x0, run.x1, out, fault));
    }
    return FW_OK;
}

static fw_status push_overlaps(const fw_cells *cells, const source *from, int32_t y, fw_spans *out,
                               fw_fault *fault)
{
    uint32_t i = from->before->row[y], j = from->now->row[y];
    while (i < from->before->row[y + 1] && j < from->now->row[y + 1]) {
        const fw_run a = from->before->run[i], b = from->now->run[j];
        const int32_t x0 = a.x0 > b.x0 ? a.x0 : b.x0, x1 = a.x1 < b.x1 ? a.x1 : b.x1;
        const uint64_t key =
            (uint64_t)from->before_regions->label[i] << 32 | from->regions->label[j];
        if (x0 < x1)
            FW_TRY(push_pixels(cells, key, y, x0, x1, out, fault));
        if (a.x1 < b.x1)
            i++;
        else
            j++;
    }
    return FW_OK;
}

static fw_status build(const fw_cells *cells, const source *from, fw_spans *out, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&out->row_start, &out->row_capacity, (size_t)cells->rows + 1,
                   sizeof *out->row_start, holder, fault));
    out->count = 0;
    out->nodes = 0;
    for (int32_t row = 0; row < cells->rows; row++) {
        const size_t start = out->count;
        const int32_t end =
            (int32_t)((int64_t)(row + 1) * cells->ky < from->now->height ? (row + 1) * cells->ky
                                                                         : from->now->height);
        out->row_start[row] = (uint32_t)start;
        for (int32_t y = row * cells->ky; y < end; y++)
            FW_TRY(from->before == NULL ? push_row(cells, from, y, out, fault)
                                        : push_overlaps(cells, from, y, out, fault));
        close_row(out, start);
    }
    out->row_start[cells->rows] = (uint32_t)out->count;
    return FW_OK;
}

fw_status fw_spans_of_regions(const fw_cells *cells, const fw_runs *solid,
                              const fw_regions *regions, fw_spans *out, fw_fault *fault)
{
    const source from = {NULL, NULL, solid, regions};
    return build(cells, &from, out, fault);
}

fw_status fw_spans_of_overlaps(const fw_cells *cells, const fw_runs *before,
                               const fw_regions *before_regions, const fw_runs *now,
                               const fw_regions *regions, fw_spans *out, fw_fault *fault)
{
    const source from = {before, before_regions, now, regions};
    return build(cells, &from, out, fault);
}

uint32_t fw_spans_find(const fw_spans *spans, int32_t row, uint64_t key, int32_t c)
{
    uint32_t low = spans->row_start[row], high = spans->row_start[row + 1];
    const uint32_t end = high;
    while (low < high) {
        const uint32_t middle = low + (high - low) / 2;
        const fw_span *at = &spans->span[middle];
        if (at->key < key || (at->key == key && at->c1 <= c))
            low = middle + 1;
        else
            high = middle;
    }
    return low < end && spans->span[low].key == key ? low : UINT32_MAX;
}

void fw_spans_free(fw_spans *spans)
{
    free(spans->row_start);
    free(spans->span);
    *spans = (fw_spans){0};
}
