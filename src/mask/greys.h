/* One decoded layer, without loss: the non-zero pixels as runs of one grey value.
 *
 * A grey is the file's own sample (0 .. full, full = 2^depth - 1; for palette and RGB files the
 * common channel value, 8 bit: full = 255). Rows and runs are laid out as in fw_runs, but
 * neighbouring runs may touch when their greys differ. Everything later (intended, solid, the
 * stamped layer, the file) is derived from this.
 */
#ifndef FW_GREYS_H
#define FW_GREYS_H

#include "mask/runs.h"

typedef struct fw_grey_run {
    int32_t x0, x1; /* px, half-open */
    int32_t grey;   /* 1 .. full */
} fw_grey_run;

typedef struct fw_greys {
    int32_t width, height; /* px */
    int32_t full;          /* grey of a fully lit pixel in this file's format */
    uint32_t *row;         /* [height + 1] */
    fw_grey_run *run;      /* [count] */
    uint32_t count;
    size_t row_capacity, run_capacity;
    int32_t open_row;
} fw_greys;

/* Builds in raster order like fw_runs; a run that touches one of equal grey is merged; grey 0 is
 * skipped. */
fw_status fw_greys_begin(fw_greys *layer, int32_t width, int32_t height, int32_t full,
                         fw_fault *fault);
fw_status fw_greys_push(fw_greys *layer, int32_t y, int32_t x0, int32_t x1, int32_t grey,
                        fw_fault *fault);
void fw_greys_finish(fw_greys *layer);
void fw_greys_free(fw_greys *layer);
bool fw_greys_equal(const fw_greys *a, const fw_greys *b);

/* Pixels whose grey is at least `least` (1 .. full). */
fw_status fw_greys_at_least(const fw_greys *layer, int32_t least, fw_runs *out, fw_fault *fault);

/* Grey of one pixel (0 where dark or outside). */
int32_t fw_greys_at(const fw_greys *layer, int32_t x, int32_t y);

#endif
