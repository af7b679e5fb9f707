/* Writes report.json ("falsework-report/1"). */
#ifndef FW_REPORT_REPORT_WRITE_H
#define FW_REPORT_REPORT_WRITE_H

#include "check/report.h"
#include "report/sink.h"

/* Writes the whole report: the findings in the order of the list (sort them before), then one layer
 * object at a time. Lengths in mm to 1 um, loads, areas, volumes and margins to 6 significant
 * digits, NAN and infinite as null. Equal reports give equal bytes, whatever the locale. */
fw_status fw_report_write(const fw_report *report, fw_sink sink, fw_fault *fault);

#endif
