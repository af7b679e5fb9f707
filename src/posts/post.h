/* A post and the rules for posts: plain data, shared by placing, stamping, judging and posts.json.
 *
 * Coordinates in mm: x along columns, y down the rows, z from the plate to the window, all in the
 * supported (lifted) stack. Every horizontal section of a post is a full circle whose diameter
 * depends on z alone:
 *
 *   - z_face .. z_face + bite: tip_mm (inside the part);
 *   - z_face - neck .. z_face: from shaft_mm to tip_mm (linear, widening toward the plate);
 *   - foot height .. end of the neck: shaft_mm;
 *   - 0 .. foot height: from foot_mm to shaft_mm (45 degrees, widening toward the plate);
 *
 * where z_face is the plate-facing side of layer tip_layer. Where a post is too short for all of
 * them the larger diameter wins.
 */
#ifndef FW_POST_H
#define FW_POST_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

enum { FW_POST_POINTS = 16 };

typedef struct fw_point {
    double x, y, z; /* mm */
} fw_point;

typedef struct fw_post {
    int32_t id; /* position in the list of posts, from 0 */
    bool locked;
    bool routed;         /* path is complete to the plate */
    int32_t tip_layer;   /* first layer that holds the part over the tip */
    int32_t bite_layers; /* layers from tip_layer on into which the tip is stamped, >= 0 */
    int32_t point_count; /* 2 .. FW_POST_POINTS when routed */
    fw_point path[FW_POST_POINTS]; /* [point_count], from tip (z = z_face) to foot (z = 0) */
    double tip_mm, neck_mm /* length */, shaft_mm, foot_mm;
} fw_post;

typedef struct fw_post_rules {
    double lift_mm;
    double tip_mm[2];   /* smallest, largest diameter */
    double neck_mm;     /* length */
    double shaft_mm[2]; /* smallest, largest diameter */
    double foot_mm;     /* largest diameter */
    double lean_deg;    /* largest, from the vertical */
    double clearance_mm;
    double bite_mm;
    double margin; /* posts are sized to it; the gate's margin */
} fw_post_rules;

typedef struct fw_posts {
    fw_post *item; /* [count] */
    size_t count, capacity;
} fw_posts;

#endif
