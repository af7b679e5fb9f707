/* The end of a judgement: margins, gate, verdict, totals. */
#ifndef FW_CHECK_CONCLUDE_H
#define FW_CHECK_CONCLUDE_H

#include "check/ground.h"
#include "check/report.h"
#include "check/share.h"

typedef struct fw_conclusion {
    const fw_setup *setup;
    const fw_posts *posts;
    fw_ground *ground;          /* after fw_ground_finish */
    const fw_share *share;      /* after fw_share_finish */
    double support_px, part_px; /* intended pixels of posts and of the part, all layers */
    double range_N[2];          /* peak load at both ends of the gap range */
    bool looked_for_posts;      /* posts were looked for in the pixels */
} fw_conclusion;

/* Fills the rest of *out, whose layer rows and findings are there already: adds the findings that
 * only the end can tell, sorts them, and decides the verdict. */
fw_status fw_conclude(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault);

#endif
