#include "report/posts_write.h"

#include "report/json_write.h"
#include "report/post_object.h"

fw_status fw_posts_write(const fw_report *report, fw_sink sink, fw_fault *fault)
{
    fw_json json;
    fw_json_start(&json, sink, fault);
    fw_json_text(&json, "format", "falsework-posts/1");
    fw_json_object(&json, "units");
    fw_json_text(&json, "length", "mm");
    fw_json_text(&json, "area", "mm2");
    fw_json_text(&json, "load", "N");
    fw_json_end(&json);
    fw_json_text(&json, "raw_sha256", report->raw_sha256);
    fw_json_whole(&json, "lift_layers", report->lift_layers);
    fw_post_objects(&json, report);
    return fw_json_close(&json);
}
