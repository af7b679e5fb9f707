/* posts.json: where the posts are, and what they were sized to. */
#ifndef FALSEWORK_POSTS_H
#define FALSEWORK_POSTS_H

#include "falsework/fault.h"

#include <stddef.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct falsework_posts falsework_posts;

/* One post; lengths in mm, layers counted in the supported stack. */
typedef struct falsework_post {
    int32_t id;
    int routed;                       /* 0: no path to the plate was found */
    int32_t tip_layer;                /* first layer of the part over the tip */
    double x_mm, y_mm;                /* of the tip */
    double tip_mm, shaft_mm, foot_mm; /* diameters */
} falsework_post;

/* Reads a posts.json. The caller closes *posts. */
FALSEWORK_API falsework_status falsework_posts_open(const char *path, falsework_posts **posts,
                                                    falsework_fault *fault);
FALSEWORK_API size_t falsework_posts_count(const falsework_posts *posts);

/* index < falsework_posts_count(posts). */
FALSEWORK_API falsework_post falsework_posts_get(const falsework_posts *posts, size_t index);
FALSEWORK_API void falsework_posts_close(falsework_posts *posts); /* NULL is allowed */

#ifdef __cplusplus
}
#endif
#endif
