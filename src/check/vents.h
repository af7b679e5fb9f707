/* Vents that are too narrow to count. A cylinder of vent_mm across and vent_mm high is moved
 * through the void, one layer at a time: where it cannot get out to the vat, liquid cannot follow
 * the growing cavity fast enough either, and what it can reach sucks as if it were sealed (a hole
 * of 50 um relieves less than 1 % of a cavity's load, by the flow through tube and film, and it
 * cures shut).
 *
 * wide(n)    pixels of layer n whose disc of vent_mm meets no solid of the part (outside the image
 * is the vat; posts close nothing: liquid passes between them) centres(n) = wide(n - k + 1) ..
 * wide(n) in common, k = vent_mm over the layer thickness, rounded up Regions of centres, joined
 * where they share a pixel with those of the layer before, are the bodies that the cylinder moves
 * in; one that touches the image border is open. Widths are right to one pixel (too wide: the safe
 * side is the other one, so choose vent_mm accordingly). In the first vent_mm of a cavity no
 * cylinder fits, and only what is fully sealed counts. */
#ifndef FW_CHECK_VENTS_H
#define FW_CHECK_VENTS_H

#include "check/sheet.h"
#include "findings/findings.h"
#include "mask/bodies.h"

/* What k sets have in common, as the newest comes and the oldest goes: two stacks, so that each set
 * is intersected three times whatever k is. */
typedef struct fw_common {
    int32_t most;   /* k */
    fw_runs *older; /* [older_count] older[i]: the sets i .. of the older stack in common */
    fw_runs *newer; /* [newer_count] as they came */
    int32_t older_count, newer_count;
    fw_runs newest; /* the newer ones in common */
} fw_common;

typedef struct fw_vents {
    const fw_setup *setup; /* borrowed */
    fw_common common;
    fw_runs centres[2]; /* of the newest layer and the one before */
    fw_regions regions[2];
    int newest;       /* which of the two */
    fw_bodies bodies; /* grounded = open to the vat */
} fw_vents;

/* Does nothing, ever, where the job's vent_mm is 0. */
fw_status fw_vents_open(const fw_setup *setup, fw_vents *out, fw_fault *fault);

/* Takes the next layer, after sheet->cavity is known: sets sheet->openings, adds findings. */
fw_status fw_vents_step(fw_vents *vents, fw_sheet *sheet, fw_findings *findings, fw_fault *fault);

/* After the last layer. */
void fw_vents_finish(fw_vents *vents, fw_findings *findings);
void fw_vents_close(fw_vents *vents);

#endif
