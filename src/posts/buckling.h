/* The push at which a post buckles.
 *
 * Two columns, and the weaker one counts: the whole path as a uniform column of the shaft's
 * diameter (its length along the path; the flare of the foot only helps), and the neck alone as a
 * cone fixed at both ends that may sway. The foot is fixed to the plate; the tip, being slender,
 * counts as a pin. It cannot move sideways where the part has other anchors (`braced`), else it
 * can: then it holds nothing, and the post stands free (column.h). A perfect column: what is
 * crooked or leans buckles earlier, so the margin matters. */
#ifndef FW_BUCKLING_H
#define FW_BUCKLING_H

#include "posts/post.h"

/* N; NAN where the post has no path or a diameter is 0. */
double fw_post_buckling_N(const fw_post *post, double modulus_MPa, double layer_mm, bool braced);

/* The largest pushes that a post had, N. */
typedef struct fw_post_push {
    double free_N, braced_N;
} fw_post_push;

/* The smaller margin of the two; NAN where nothing pushes. */
double fw_post_push_margin(const fw_post *post, double modulus_MPa, double layer_mm,
                           const fw_post_push *push);

#endif
