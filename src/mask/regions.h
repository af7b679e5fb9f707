/* The connected regions of one set of pixels.
 *
 * Solid is joined through pixel edges (FW_FOUR), void also through corners (FW_EIGHT): with this
 * pair a closed curve of one always parts the other. Cost: O(height + runs), nothing follows
 * pixels.
 */
#ifndef FW_REGIONS_H
#define FW_REGIONS_H

#include "mask/runs.h"

typedef enum fw_connect {
    FW_FOUR,  /* pixels that share an edge */
    FW_EIGHT, /* pixels that share an edge or a corner */
} fw_connect;

typedef struct fw_region {
    int64_t pixels;
    int64_t sum_x, sum_y;     /* px, sums of the pixel indices: centroid = sum / pixels + 1/2 */
    int32_t x0, y0, x1, y1;   /* px, bounding box, half-open */
    int32_t first_x, first_y; /* px, the first pixel in raster order */
    bool on_border;           /* touches the border of the image */
} fw_region;

/* Regions are numbered in raster order of their first pixel. A zeroed struct is a valid empty one.
 */
typedef struct fw_regions {
    uint32_t *label;   /* [count of the runs] region of each run */
    fw_region *region; /* [count] */
    uint32_t count;
    size_t label_capacity, region_capacity; /* items allocated */
} fw_regions;

/* Labels `set` into out (reuses the arrays of an earlier one; free with fw_regions_free). Fails
 * with FW_MACHINE where there is no memory; out is then an empty set of regions. */
fw_status fw_regions_label(const fw_runs *set, fw_connect connect, fw_regions *out,
                           fw_fault *fault);

/* Frees the arrays and leaves a valid empty set. */
void fw_regions_free(fw_regions *regions);

#endif
