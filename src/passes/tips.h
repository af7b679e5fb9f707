/* The placing pass: puts tips where a layer reaches too far, while the judge follows the stack. */
#ifndef FW_PASSES_TIPS_H
#define FW_PASSES_TIPS_H

#include "check/ground.h"
#include "posts/disc.h"
#include "posts/place.h"
#include "posts/route.h"

typedef struct fw_tipping {
    const fw_setup *setup; /* set by the pass before the first layer */
    const fw_post_rules *rules;
    const fw_screen *screen; /* on which a pixel counts when the post makes it intended */
    const fw_lattice *lattice;
    const fw_route_rules *route;
    fw_posts *posts;   /* in order of tip layer; tips found in this pass are appended */
    size_t known;      /* posts that were there before this pass */
    size_t next_known; /* the first of them that has not had its layer yet */
    fw_posts *missed;  /* places that need a tip that no path leads to, as posts without a path */
} fw_tipping;

/* A post with its tip at (x, y) on the plate-facing side of a layer, smallest sizes, no path yet.
 */
fw_post fw_tip_post(const fw_post_rules *rules, double layer_mm, int32_t tip_layer, double x_mm,
                    double y_mm);

fw_status fw_posts_append(fw_posts *posts, const fw_post *post, fw_fault *fault);

/* Sorts by (tip_layer, y, x) and renumbers the ids. */
void fw_posts_order(fw_posts *posts);

/* The hook: fw_placer{fw_tips_place, tipping}. */
fw_status fw_tips_place(void *tipping, const fw_newest *newest, fw_fault *fault);

/* True when a smallest post from this place has a way to the plate. context: fw_tips_at. */
typedef struct fw_tips_at {
    const fw_tipping *tipping;
    double face_mm;
} fw_tips_at;
bool fw_tips_possible(void *tips_at, double x_mm, double y_mm);

#endif
