/* Writes posts.json ("falsework-posts/1"), the file that fw_posts_read reads back. */
#ifndef FW_REPORT_POSTS_WRITE_H
#define FW_REPORT_POSTS_WRITE_H

#include "check/report.h"
#include "report/sink.h"

/* Writes report->posts with their results, one post at a time. Lengths in mm to 1 um, areas and
 * loads to 6 significant digits, a margin of NAN as null. Uses posts, post_result, raw_sha256 and
 * lift_layers of the report and nothing else. */
fw_status fw_posts_write(const fw_report *report, fw_sink sink, fw_fault *fault);

#endif
