/* What survey, prop and recheck found. Holds no clock, path, host or thread count: equal stacks and
 * jobs give equal reports, byte for byte. */
#ifndef FALSEWORK_REPORT_H
#define FALSEWORK_REPORT_H

#include "falsework/fault.h"

#include <stddef.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct falsework_report falsework_report;

typedef enum falsework_verdict {
    FALSEWORK_PASS,
    FALSEWORK_FAIL,
    FALSEWORK_INCOMPLETE /* a card is missing: only geometry was looked at */
} falsework_verdict;

typedef enum falsework_severity {
    FALSEWORK_NOTE,
    FALSEWORK_WARN,
    FALSEWORK_SEVERE /* the gate refuses it */
} falsework_severity;

/* One finding: one cause in one body, cavity or post. Texts are borrowed from the report. */
typedef struct falsework_finding {
    const char *kind; /* "onset", "tip-overload", ... */
    falsework_severity severity;
    int32_t layer, last_layer; /* in the stack that was looked at */
    int64_t count;             /* occurrences */
    double x_mm, y_mm;         /* worst place */
    double area_mm2;           /* summed over the occurrences */
    double margin;             /* smallest capacity / demand; NAN where there is none */
    int64_t post;              /* id, or -1 */
    const char *message;       /* one line about the worst occurrence */
} falsework_finding;

typedef struct falsework_totals {
    int32_t posts;
    double tip_area_mm2, support_volume_mm3, part_volume_mm3;
    double peak_peel_N;     /* NAN when it was not computed */
    int32_t peak_layer;     /* -1 likewise */
    double smallest_margin; /* over all posts; NAN when nothing is loaded */
} falsework_totals;

FALSEWORK_API falsework_verdict falsework_report_verdict(const falsework_report *report);
FALSEWORK_API falsework_totals falsework_report_totals(const falsework_report *report);
FALSEWORK_API size_t falsework_report_findings(const falsework_report *report);

/* index < falsework_report_findings(report), worst first. */
FALSEWORK_API falsework_finding falsework_report_finding(const falsework_report *report,
                                                         size_t index);

/* Takes text in pieces; anything but FALSEWORK_OK ends the writing and is handed back. */
typedef falsework_status (*falsework_writer)(void *context, const char *bytes, size_t count);

/* report.json ("falsework-report/1"), and a summary for people. */
FALSEWORK_API falsework_status falsework_report_write_json(const falsework_report *report,
                                                           falsework_writer writer, void *context,
                                                           falsework_fault *fault);
FALSEWORK_API falsework_status falsework_report_write_summary(const falsework_report *report,
                                                              falsework_writer writer,
                                                              void *context,
                                                              falsework_fault *fault);

FALSEWORK_API void falsework_report_close(falsework_report *report); /* NULL is allowed */

#ifdef __cplusplus
}
#endif
#endif
