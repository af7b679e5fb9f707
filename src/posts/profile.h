/* A post's shape along z: diameter, centre, zones and layers. All mm. The stack's layers are
 * equally thick; a section of a layer is taken at the layer's middle height. */
#ifndef FW_PROFILE_H
#define FW_PROFILE_H

#include "posts/disc.h"
#include "posts/post.h"

/* Height of the 45 degree flare: (foot_mm - shaft_mm) / 2, not below 0. */
double fw_post_foot_height(const fw_post *post);

/* Plate-facing side of the tip layer: tip_layer * layer_mm. */
double fw_post_face(const fw_post *post, double layer_mm);

/* Diameter at height z (post.h has the shape). z below 0 is as at 0, z above the face is the tip.
 */
double fw_post_diameter(const fw_post *post, double z_mm, double z_face_mm);

/* Centre at height z: on the path between its points; the tip's x, y from the tip upward, as far as
 * the caller asks (the bite's end is known by fw_post_layers). False below the path's last point or
 * when there is no path (then *x_mm, *y_mm are not set). */
bool fw_post_centre(const fw_post *post, double z_mm, double *x_mm, double *y_mm);

/* Which part of a post governs its diameter at z. */
typedef enum fw_zone { FW_ZONE_FOOT, FW_ZONE_SHAFT, FW_ZONE_NECK, FW_ZONE_BITE } fw_zone;
fw_zone fw_post_zone(const fw_post *post, double z_mm, double z_face_mm);

/* Layers that the post is stamped into: [*first, *end) = 0 .. tip_layer + bite_layers. Both 0 when
 * the post is not routed. The sum must fit. */
void fw_post_layers(const fw_post *post, int32_t *first, int32_t *end);

/* Middle height of a layer. */
double fw_post_middle(int32_t layer, double layer_mm);

/* The post's section in a layer. False where the post does not exist: not routed, or a layer
 * outside fw_post_layers. */
bool fw_post_disc(const fw_post *post, int32_t layer, double layer_mm, fw_disc *disc);

#endif
