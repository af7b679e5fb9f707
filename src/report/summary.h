/* What a person reads at the end of a run: plain lines, the verdict first. */
#ifndef FW_REPORT_SUMMARY_H
#define FW_REPORT_SUMMARY_H

#include "check/report.h"
#include "report/sink.h"

#include <stddef.h>

enum { FW_FINDING_LINE = 640 };

/* One finding as one line without newline: "fail  onset at layer 12: message (3 regions, ...)".
 * Cut at size; returns out. */
char *fw_finding_line(const fw_finding *finding, char *out, size_t size);

/* Writes the summary: verdict, what it rests on, findings with advice (once a kind), what was not
 * checked, posts, peak peel load with its layer and what limits it, smallest margin. */
fw_status fw_report_summary(const fw_report *report, fw_sink sink, fw_fault *fault);

#endif
