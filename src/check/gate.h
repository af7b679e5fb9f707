/* The gate: which margins and loads the job refuses. Adds findings, decides nothing else. */
#ifndef FW_CHECK_GATE_H
#define FW_CHECK_GATE_H

#include "check/conclude.h"

/* Posts: unroutable, stub, and every check whose margin is below the gate's. Fills
 * out->post_result, which has room for every post. */
fw_status fw_gate_posts(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault);

/* The part's own contacts with the plate. */
fw_status fw_gate_plates(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault);

/* Peak peel load against the gate's and the drive's limit; out->totals holds the peak. */
fw_status fw_gate_peel(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault);

/* Card values that nobody measured; out->basis holds the counts. */
fw_status fw_gate_assumed(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault);

#endif
