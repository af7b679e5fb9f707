#include "check/report.h"

#include <stdlib.h>

const char *fw_limit_name(fw_limit limit)
{
    static const char *const name[] = {"none", "film", "cap", "bound", "table", "frame"};
    return name[limit];
}

const char *fw_verdict_name(fw_verdict verdict)
{
    static const char *const name[] = {"pass", "fail", "incomplete"};
    return name[verdict];
}

const char *fw_check_name(fw_check check)
{
    static const char *const name[] = {"none", "tip", "neck", "shaft", "foot", "buckling"};
    return name[check];
}

void fw_report_free(fw_report *report)
{
    fw_findings_free(&report->findings);
    free(report->layer);
    free(report->part);
    free(report->posts.item);
    free(report->post_result);
    *report = (fw_report){0};
}
