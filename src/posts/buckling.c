#include "posts/buckling.h"

#include "physics/column.h"
#include "posts/profile.h"

#include <math.h>

static double path_length(const fw_post *post)
{
    double length = 0;
    for (int32_t i = 1; i < post->point_count; i++) {
        const fw_point a = post->path[i - 1], b = post->path[i];
        length +=
            sqrt((a.x - b.x) * (a.x - b.x) + (a.y - b.y) * (a.y - b.y) + (a.z - b.z) * (a.z - b.z));
    }
    return length;
}

double fw_post_buckling_N(const fw_post *post, double modulus_MPa, double layer_mm, bool braced)
{
    if (!post->routed)
        return (double)NAN;
    const double d = post->shaft_mm, inertia = acos(-1.0) / 64 * d * d * d * d;
    const double whole =
        fw_column_uniform_N(braced ? FW_COLUMN_FIXED_PINNED : FW_COLUMN_FIXED_PINNED_SWAY,
                            modulus_MPa, inertia, path_length(post));
    const double neck_mm = fmin(post->neck_mm, fw_post_face(post, layer_mm));
    if (!(neck_mm > 0))
        return whole;
    return fmin(whole, fw_column_frustum_N(FW_COLUMN_FIXED_FIXED_SWAY, modulus_MPa, post->tip_mm, d,
                                           neck_mm));
}

double fw_post_push_margin(const fw_post *post, double modulus_MPa, double layer_mm,
                           const fw_post_push *push)
{
    double margin = (double)NAN; /* fmin ignores it */
    if (push->free_N > 0)
        margin = fw_post_buckling_N(post, modulus_MPa, layer_mm, false) / push->free_N;
    if (push->braced_N > 0)
        margin =
            fmin(margin, fw_post_buckling_N(post, modulus_MPa, layer_mm, true) / push->braced_N);
    return margin;
}
