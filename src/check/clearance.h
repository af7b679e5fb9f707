/* Do shafts and feet keep their distance from the part, in three dimensions?
 *
 * The neck is left out: it grows out of the face that it holds. A shaft pixel and a part pixel are
 * too close when the distance of their centres in the plane and the gap between their layers lie
 * inside the clearance. Cost of a layer: its runs times the layers within the clearance; a disc is
 * widened once a layer, and again only where something comes close.
 */
#ifndef FW_CHECK_CLEARANCE_H
#define FW_CHECK_CLEARANCE_H

#include "check/sheet.h"

typedef struct fw_clearance_layer {
    int32_t layer; /* -1: none yet */
    fw_runs part;
    fw_member_runs shafts; /* shafts and feet with their posts; empty when there are none */
    fw_runs wide;          /* all within the clearance of them, in the plane */
} fw_clearance_layer;

typedef struct fw_clearance {
    const fw_setup *setup; /* borrowed */
    const fw_posts *posts; /* borrowed */
    double clearance_mm;
    int32_t window;           /* layers kept: those within the clearance */
    fw_clearance_layer *kept; /* [window], layer n in slot n % window */
} fw_clearance;

fw_status fw_clearance_open(const fw_setup *setup, const fw_posts *posts, fw_clearance *out,
                            fw_fault *fault);

/* Takes the next layer and adds a finding for each post that is too close to the part. */
fw_status fw_clearance_step(fw_clearance *clearance, const fw_sheet *sheet, fw_findings *findings,
                            fw_fault *fault);
void fw_clearance_close(fw_clearance *clearance);

#endif
