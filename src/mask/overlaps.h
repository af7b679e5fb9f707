/* Which regions of two neighbouring layers share pixels, and how many. */
#ifndef FW_OVERLAPS_H
#define FW_OVERLAPS_H

#include "mask/regions.h"

typedef struct fw_overlap {
    uint32_t before, now; /* region of the layer on the plate side, region of the newer layer */
    int64_t pixels;       /* shared, > 0 */
} fw_overlap;

/* Sorted by (now, before), each pair once. A zeroed struct is a valid empty one. */
typedef struct fw_overlaps {
    fw_overlap *item; /* [count] */
    uint32_t count;
    size_t capacity;   /* items allocated */
    fw_overlap *spare; /* the finder's own, kept between layers */
    uint32_t *slot;    /* the finder's own, kept between layers */
    size_t spare_capacity, slot_capacity;
} fw_overlaps;

/* Finds all overlaps of two sets of the same size (reuses the arrays of an earlier list; free with
 * fw_overlaps_free). Cost: O(height + runs + regions). Fails with FW_MACHINE where there is no
 * memory; the list is then empty. */
fw_status fw_overlaps_find(const fw_runs *before_runs, const fw_regions *before_regions,
                           const fw_runs *now_runs, const fw_regions *now_regions, fw_overlaps *out,
                           fw_fault *fault);

/* Frees the arrays and leaves a valid empty list. */
void fw_overlaps_free(fw_overlaps *overlaps);

#endif
