#include "report/post_object.h"

static void write_path(fw_json *json, const fw_post *post)
{
    fw_json_array(json, "path_mm");
    for (int32_t i = 0; i < post->point_count; i++) {
        fw_json_array(json, NULL);
        fw_json_length(json, NULL, post->path[i].x);
        fw_json_length(json, NULL, post->path[i].y);
        fw_json_length(json, NULL, post->path[i].z);
        fw_json_end(json);
    }
    fw_json_end(json);
}

static void write_result(fw_json *json, const fw_post_result *result)
{
    fw_json_digits(json, "load_N", result->load_N);
    fw_json_whole(json, "load_layer", result->load_layer);
    fw_json_digits(json, "contact_mm2", result->contact_mm2);
    fw_json_text(json, "governs", fw_check_name(result->governs));
    fw_json_digits(json, "margin", result->margin);
}

static void write_post(fw_json *json, const fw_post *post, const fw_post_result *result,
                       int32_t lift_layers)
{
    fw_json_object(json, NULL);
    fw_json_whole(json, "id", post->id);
    fw_json_flag(json, "locked", post->locked);
    fw_json_flag(json, "routed", post->routed);
    fw_json_whole(json, "tip_layer", post->tip_layer);
    fw_json_whole(json, "raw_tip_layer", post->tip_layer - lift_layers);
    fw_json_whole(json, "bite_layers", post->bite_layers);
    write_path(json, post);
    fw_json_length(json, "tip_mm", post->tip_mm);
    fw_json_length(json, "neck_mm", post->neck_mm);
    fw_json_length(json, "shaft_mm", post->shaft_mm);
    fw_json_length(json, "foot_mm", post->foot_mm);
    write_result(json, result);
    fw_json_end(json);
}

void fw_post_objects(fw_json *json, const fw_report *report)
{
    fw_json_array(json, "posts");
    for (size_t i = 0; i < report->posts.count; i++)
        write_post(json, &report->posts.item[i], &report->post_result[i], report->lift_layers);
    fw_json_end(json);
}
