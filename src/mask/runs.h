/* A set of pixels of one layer as runs: the shape that all geometry here works on.
 *
 * Row y owns run[row[y]] .. run[row[y + 1] - 1], each run is [x0, x1), runs of a row ascend in x
 * and never touch (x1 of one < x0 of the next), so a set has exactly one form and two sets are
 * equal when their arrays are. Cost of everything here: O(height + runs).
 */
#ifndef FW_RUNS_H
#define FW_RUNS_H

#include "fault/fault.h"

#include <stdint.h>

typedef struct fw_run {
    int32_t x0, x1; /* px, half-open */
} fw_run;

typedef struct fw_runs {
    int32_t width, height; /* px */
    uint32_t *row;         /* [height + 1], row[0] == 0 */
    fw_run *run;           /* [count] */
    uint32_t count;
    size_t row_capacity, run_capacity; /* items allocated; a zeroed struct is a valid empty one */
    int32_t open_row;                  /* while building: rows below this are closed */
} fw_runs;

/* Starts building a set of width x height (reuses the arrays of an earlier one). Then push runs in
 * raster order, then finish. Runs that touch the one before in their row are merged. */
fw_status fw_runs_begin(fw_runs *set, int32_t width, int32_t height, fw_fault *fault);
fw_status fw_runs_push(fw_runs *set, int32_t y, int32_t x0, int32_t x1, fw_fault *fault);
void fw_runs_finish(fw_runs *set);

/* Frees the arrays and leaves a valid empty set. */
void fw_runs_free(fw_runs *set);

/* The invariants above, for tests and asserts. */
bool fw_runs_valid(const fw_runs *set);

int64_t fw_runs_pixels(const fw_runs *set);
bool fw_runs_equal(const fw_runs *a, const fw_runs *b);

/* The first run of row y (inside the image) that ends after x, or row[y + 1]. */
uint32_t fw_runs_seek(const fw_runs *set, int32_t x, int32_t y);

/* The run that holds (x, y), or UINT32_MAX. Coordinates outside the image are allowed. */
uint32_t fw_runs_find(const fw_runs *set, int32_t x, int32_t y);

/* out = not a / a and b / a and not b / a or b. out may not be a or b; sizes must agree. */
fw_status fw_runs_complement(const fw_runs *a, fw_runs *out, fw_fault *fault);
fw_status fw_runs_intersect(const fw_runs *a, const fw_runs *b, fw_runs *out, fw_fault *fault);
fw_status fw_runs_subtract(const fw_runs *a, const fw_runs *b, fw_runs *out, fw_fault *fault);
fw_status fw_runs_unite(const fw_runs *a, const fw_runs *b, fw_runs *out, fw_fault *fault);
fw_status fw_runs_copy(const fw_runs *a, fw_runs *out, fw_fault *fault);

/* Do the two sets share a pixel? Ends at the first. */
bool fw_runs_meet(const fw_runs *a, const fw_runs *b);

/* out = all pixels of a whose centre lies within reach of some pixel centre of a, an ellipse of
 * reach_x by reach_y px (fractions allowed): for clearance. */
fw_status fw_runs_dilate(const fw_runs *a, double reach_x, double reach_y, fw_runs *out,
                         fw_fault *fault);

#endif
