/* Cells of a labelled layer as spans: which regions have pixels in which cells. */
#ifndef FW_TRIBUTARY_NODES_H
#define FW_TRIBUTARY_NODES_H

#include "mask/regions.h"
#include "mask/runs.h"

/* Cells of kx by ky pixels; the last column and row may be cut by the image. */
typedef struct fw_cells {
    int32_t kx, ky;        /* px */
    int32_t columns, rows; /* cells */
} fw_cells;

/* Cells [c0, c1) of one cell row that all have the key. */
typedef struct fw_span {
    uint64_t key; /* a region, or region before << 32 | region now */
    int32_t c0, c1;
    int32_t row;    /* cell row */
    uint32_t first; /* node of cell c0; those of the others follow */
} fw_span;

/* Sorted by (row, key, c0); spans of a row with one key do not touch. A zeroed struct is a valid
 * empty one. */
typedef struct fw_spans {
    uint32_t *row_start; /* [rows + 1] */
    fw_span *span;       /* [count] */
    size_t count, row_capacity, span_capacity;
    uint32_t nodes; /* cells in all spans */
} fw_spans;

/* Key = region; every cell in which the region has a pixel. */
fw_status fw_spans_of_regions(const fw_cells *cells, const fw_runs *solid,
                              const fw_regions *regions, fw_spans *out, fw_fault *fault);

/* Key = region before << 32 | region now; every cell in which the two share a pixel. */
fw_status fw_spans_of_overlaps(const fw_cells *cells, const fw_runs *before,
                               const fw_regions *before_regions, const fw_runs *now,
                               const fw_regions *regions, fw_spans *out, fw_fault *fault);

/* The first span of the row with that key that ends after column c, or UINT32_MAX. */
uint32_t fw_spans_find(const fw_spans *spans, int32_t row, uint64_t key, int32_t c);

void fw_spans_free(fw_spans *spans);

#endif
