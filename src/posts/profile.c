#include "posts/profile.h"

#include <math.h>

double fw_post_foot_height(const fw_post *post)
{
    return fmax((post->foot_mm - post->shaft_mm) / 2.0, 0.0);
}

double fw_post_face(const fw_post *post, double layer_mm)
{
    return post->tip_layer * layer_mm;
}

double fw_post_middle(int32_t layer, double layer_mm)
{
    return (layer + 0.5) * layer_mm;
}

/* Diameter of neck and shaft as if there were no foot. */
static double stem_diameter(const fw_post *post, double depth_mm)
{
    if (depth_mm >= post->neck_mm)
        return post->shaft_mm;
    return post->tip_mm + (post->shaft_mm - post->tip_mm) * (depth_mm / post->neck_mm);
}

/* 45 degrees: the diameter shrinks by 2 for each unit of height; below the plate as at it. */
static double flare_diameter(const fw_post *post, double z_mm)
{
    return post->foot_mm - 2.0 * fmax(z_mm, 0.0);
}

double fw_post_diameter(const fw_post *post, double z_mm, double z_face_mm)
{
    if (z_mm >= z_face_mm)
        return post->tip_mm;
    return fmax(stem_diameter(post, z_face_mm - z_mm), flare_diameter(post, z_mm));
}

fw_zone fw_post_zone(const fw_post *post, double z_mm, double z_face_mm)
{
    if (z_mm >= z_face_mm)
        return FW_ZONE_BITE;
    if (flare_diameter(post, z_mm) > stem_diameter(post, z_face_mm - z_mm))
        return FW_ZONE_FOOT;
    return z_face_mm - z_mm <= post->neck_mm ? FW_ZONE_NECK : FW_ZONE_SHAFT;
}

static void interpolate(const fw_point *upper, const fw_point *lower, double z_mm, double *x_mm,
                        double *y_mm)
{
    double rise = upper->z - lower->z;
    double share = rise > 0.0 ? (upper->z - z_mm) / rise : 0.0;
    *x_mm = upper->x + (lower->x - upper->x) * share;
    *y_mm = upper->y + (lower->y - upper->y) * share;
}

bool fw_post_centre(const fw_post *post, double z_mm, double *x_mm, double *y_mm)
{
    if (post->point_count < 1)
        return false;
    const fw_point *tip = &post->path[0];
    if (z_mm >= tip->z) {
        *x_mm = tip->x;
        *y_mm = tip->y;
        return true;
    }
    for (int32_t i = 1; i < post->point_count; i++) {
        if (z_mm >= post->path[i].z) {
            interpolate(&post->path[i - 1], &post->path[i], z_mm, x_mm, y_mm);
            return true;
        }
    }
    return false;
}

void fw_post_layers(const fw_post *post, int32_t *first, int32_t *end)
{
    *first = 0;
    *end = post->routed ? post->tip_layer + post->bite_layers : 0;
}

bool fw_post_disc(const fw_post *post, int32_t layer, double layer_mm, fw_disc *disc)
{
    int32_t first, end;
    fw_post_layers(post, &first, &end);
    if (layer < first || layer >= end)
        return false;
    double z_mm = fw_post_middle(layer, layer_mm);
    disc->diameter_mm = fw_post_diameter(post, z_mm, fw_post_face(post, layer_mm));
    return fw_post_centre(post, z_mm, &disc->x_mm, &disc->y_mm);
}
