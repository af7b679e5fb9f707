/* Which solid regions of a layer must be solved together, and their shapes. */
#ifndef FW_CHECK_CLUSTERS_H
#define FW_CHECK_CLUSTERS_H

#include "check/peel.h"

/* Fills out's clusters (boxes, bounds, posts_only, cavities) and the maps of_region, of_void and
 * cavity_of. No shape is built yet. Arguments as in fw_peel_solve. */
fw_status fw_clusters_find(const fw_setup *setup, const fw_slice *slice, const uint8_t *posts_only,
                           const fw_openings *openings, fw_peel *out, fw_fault *fault);

/* Builds the shapes of the clusters for which wanted[cluster] is not 0, in one walk of the layer.
 */
fw_status fw_clusters_shape(const fw_setup *setup, const fw_slice *slice,
                            const fw_openings *openings, const uint8_t *wanted, fw_peel *out,
                            fw_fault *fault);

#endif
