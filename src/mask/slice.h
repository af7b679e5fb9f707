/* Everything about one layer that follows from that layer alone, so that the layers of a batch can
 * be built in parallel, each into its own slot. */
#ifndef FW_SLICE_H
#define FW_SLICE_H

#include "mask/greys.h"
#include "mask/regions.h"

/* A zeroed struct is valid and empty. */
typedef struct fw_slice {
    fw_runs intended;             /* grey >= intended_least: the geometry */
    fw_regions regions;           /* of intended, 4-connected */
    bool same;                    /* solid equals intended: the next two are then empty, 0 x 0 */
    fw_runs own_solid;            /* grey >= solid_least: what cures through the layer */
    fw_regions own_solid_regions; /* of own_solid, 4-connected */
    fw_runs voids;                /* complement of solid */
    fw_regions void_regions;      /* of voids, 8-connected */
} fw_slice;

/* Builds out (reuses the arrays of an earlier slice; free with fw_slice_free) from one decoded
 * layer. The thresholds are greys of the file, 1 .. full; solid_least is INT32_MAX where nothing
 * cures. Keeps nothing of `layer`. Fails with FW_MACHINE where there is no memory; out may then
 * only be rebuilt or freed. */
fw_status fw_slice_build(const fw_greys *layer, int32_t intended_least, int32_t solid_least,
                         fw_slice *out, fw_fault *fault);

/* Solid and its regions, wherever they are kept. Borrowed from the slice. */
const fw_runs *fw_slice_solid(const fw_slice *slice);
const fw_regions *fw_slice_solid_regions(const fw_slice *slice);

/* Frees all arrays and leaves a valid empty slice. */
void fw_slice_free(fw_slice *slice);

#endif
