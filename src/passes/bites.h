/* How deep each tip goes into the part, read from the masks over it. */
#ifndef FW_PASSES_BITES_H
#define FW_PASSES_BITES_H

#include "passes/feed.h"
#include "posts/disc.h"

/* Sets bite_layers of every post that is not locked: the fewest layers, at least bite_mm and at
 * most 0.5 mm, after which the part covers the tip's whole disc (on a slope the disc must sink in
 * as far as the face rises across it), else those after which it covers most; never through the
 * part. */
fw_status fw_bites_find(const fw_pass *pass, const fw_raw *raw, int32_t lift, const fw_job *job,
                        const fw_screen *screen, fw_posts *posts, fw_fault *fault);

#endif
