/* Diameters of all posts, from what each of them carried. */
#ifndef FW_PASSES_SIZES_H
#define FW_PASSES_SIZES_H

#include "check/judge.h"
#include "posts/size.h"

typedef struct fw_sizing {
    const fw_judge *judge; /* has seen the stack; its share's posts are `posts`, index by index */
    const fw_screen *screen;
    const fw_job *job;
    fw_posts *posts;
    size_t count; /* the first of them that are sized */
    bool grow_only;
    bool changed;     /* out: some diameter is another than before */
    unsigned *missed; /* out, [count]: what does not hold at the largest sizes (FW_MISSED_...) */
} fw_sizing;

fw_status fw_sizes_set(fw_sizing *sizing, fw_fault *fault);

#endif
