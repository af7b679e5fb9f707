/* One post as an object of JSON: the same in posts.json and in report.json. */
#ifndef FW_REPORT_POST_OBJECT_H
#define FW_REPORT_POST_OBJECT_H

#include "check/report.h"
#include "report/json_write.h"

/* Writes the array "posts" with all posts of the report. */
void fw_post_objects(fw_json *json, const fw_report *report);

#endif
