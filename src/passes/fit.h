/* Places, sizes and routes posts until loads and sizes agree: the rounds of prop. */
#ifndef FW_PASSES_FIT_H
#define FW_PASSES_FIT_H

#include "passes/feed.h"
#include "posts/disc.h"

enum { FW_FIT_ROUNDS = 8 };

typedef struct fw_fit {
    fw_posts posts;   /* placed ones first, then places that no path leads to; ids in order */
    fw_screen screen; /* what posts are drawn on; its levels point into the raw stack */
    int32_t lift;     /* layers prepended */
    int32_t rounds;   /* that it took */
    bool settled;     /* loads and sizes agree */
    fw_report
        believed; /* of the stack with the posts drawn in, judged in memory, without digests */
} fw_fit;

/* Finds the posts that the raw stack needs, and judges them. Close with fw_fit_close, also after a
 * failure. */
fw_status fw_fit_posts(const fw_pass *pass, const fw_raw *raw, const fw_job *job, fw_fit *out,
                       fw_fault *fault);
void fw_fit_close(fw_fit *fit);

/* The finding of a fit that did not settle; only where !fit->settled. */
fw_finding fw_fit_unsettled(const fw_fit *fit);

#endif
