/* Paths for posts: from the tip to the plate through free space, never leaning more than allowed.
 *
 * A path runs on nodes (cell column, slab boundary), all at the tip's own place within their cell
 * column, by moves (dx, dy) cells over k slabs with sqrt(dx^2 + dy^2) <= k tan(lean); a move counts
 * when every cell that it can cross, wherever in its column the tip lies, has enough room. So each
 * move is a straight line that keeps the lean and the clearance, and so is what is straightened
 * from them.
 *
 * Room asked at depth h below the tip: (R + clearance) min(1, h / neck) with R the shaft's radius,
 * and nothing while the slab is within the clearance of the tip's own face (no lattice can tell
 * part beside the neck from the part that the tip holds); in the foot R is the foot's radius there.
 * Discs stay inside the image (in the neck: R min(1, h / neck) from the border).
 */
#ifndef FW_ROUTE_H
#define FW_ROUTE_H

#include "posts/lattice.h"

typedef struct fw_route_rules {
    double shaft_mm;    /* smallest shaft diameter */
    double foot_mm;     /* smallest foot diameter, >= shaft_mm */
    double neck_mm;     /* neck length of the smallest tip */
    double lean_deg;    /* largest lean from the vertical, 0 .. 80 */
    double post_gap_mm; /* gap that is preferred between two posts' surfaces */
} fw_route_rules;

/* Once after fw_lattice_finish, before the other two: finds from which cells the plate can be
 * reached with the smallest shaft (one bit a cell, kept in the lattice). */
fw_status fw_route_prepare(fw_lattice *lattice, const fw_route_rules *rules, fw_fault *fault);

/* True when a smallest post with its tip at (x, y, z_face) has a path, other posts not regarded.
 * Cheap. Where it says true, fw_route_post finds a path for a post of the smallest sizes. */
bool fw_route_possible(const fw_lattice *lattice, const fw_route_rules *rules, double x_mm,
                       double y_mm, double z_face_mm);

/* Routes one post. In: path[0] (x, y of the tip; z is z_face), tip_layer, tip_mm, neck_mm,
 * shaft_mm, foot_mm, id. Out: path, point_count and routed; points are rounded to 1 um, the last
 * has z = 0. First that succeeds: a straight post, then a bent one, each at post_gap_mm from the
 * posts that the lattice keeps; then the same touching but not overlapping them; then the same
 * through them (joined shafts: only where nothing else is left). Shafts and necks count, feet may
 * overlap. A kept post with the same id is not regarded. No path: routed = false, point_count = 1
 * and FW_OK. Calls that only read the lattice may run at the same time. */
fw_status fw_route_post(const fw_lattice *lattice, const fw_route_rules *rules, fw_post *post,
                        fw_fault *fault);

#endif
