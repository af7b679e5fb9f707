/* Posts drawn into layers: out = max(in, coverage of the posts), at the stack's own brightest grey.
 *
 * Where several posts share a pixel the largest coverage counts. A pixel is never lowered, and a
 * two-level stack stays two-level. Posts that are not routed are not drawn; locked or not makes no
 * difference. Cost of a layer: its runs, its height, and the rows and rims of the posts in it.
 *
 * A plan is not changed by drawing: any number of threads may use one at a time, each with its own
 * outputs.
 */
#ifndef FW_STAMP_H
#define FW_STAMP_H

#include "mask/greys.h"
#include "posts/disc.h"
#include "posts/post.h"

typedef struct fw_stamp_plan fw_stamp_plan;

/* Makes a plan (caller frees it). `posts` and `screen->levels` are borrowed and must neither change
 * nor move while the plan is used. layer_mm > 0. */
fw_status fw_stamp_plan_make(const fw_posts *posts, const fw_screen *screen, double layer_mm,
                             fw_stamp_plan **plan, fw_fault *fault);
void fw_stamp_plan_free(fw_stamp_plan *plan);

/* Number of layers from 0 on that posts are drawn into: the rest stay as they are. */
int32_t fw_stamp_layers(const fw_stamp_plan *plan);

/* out = in with the posts of this layer drawn; in == NULL stands for an empty layer. `in` has the
 * screen's size; out may not be in. *touched tells whether any pixel was raised (if not, out equals
 * in). */
fw_status fw_stamp_layer(const fw_stamp_plan *plan, int32_t layer, const fw_greys *in,
                         fw_greys *out, bool *touched, fw_fault *fault);

/* Pixels of a layer with the post that they belong to. Laid out like fw_greys: neighbouring runs
 * touch where their posts differ. A zeroed struct is a valid empty one. */
typedef struct fw_member_run {
    int32_t x0, x1; /* px, half-open */
    int32_t post;   /* index in the list of posts */
} fw_member_run;

typedef struct fw_member_runs {
    int32_t width, height; /* px */
    uint32_t *row;         /* [height + 1] */
    fw_member_run *run;    /* [count] */
    uint32_t count;
    size_t row_capacity, run_capacity;
    int32_t open_row;
} fw_member_runs;
void fw_member_runs_free(fw_member_runs *members);

/* out = footprints (fw_disc_footprint) of all posts that are still below their tip layer: layer <
 * tip_layer. Where two overlap the smaller index wins; lost = what each of the others thereby lacks
 * of its footprint. The runs of lost may overlap one another (three posts at one place) and ascend
 * in no order within a row. */
fw_status fw_stamp_members(const fw_stamp_plan *plan, int32_t layer, fw_member_runs *out,
                           fw_member_runs *lost, fw_fault *fault);

/* out = the footprint of one post (index) in a layer, with or without the layers of its bite; empty
 * where it is not drawn. */
fw_status fw_stamp_post(const fw_stamp_plan *plan, size_t post, int32_t layer, bool include_bite,
                        fw_runs *out, fw_fault *fault);

#endif
