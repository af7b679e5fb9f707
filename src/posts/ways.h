/* Lengths of the shortest ways over the nodes of a rectangular grid, to the nearest of some points.
 *
 * A way steps between nodes that are `in`, in 24 directions at most 18.5 degrees apart: in the open
 * at most 1.3 % long, never short. Where the whole box between a node and a point is open the
 * length is the straight line's, and costs one look at a table of sums.
 */
#ifndef FW_WAYS_H
#define FW_WAYS_H

#include "fault/fault.h"

#include <stdint.h>

typedef struct fw_tip {
    double x_mm, y_mm;
} fw_tip;

/* A zeroed struct is a valid empty list. */
typedef struct fw_tips {
    fw_tip *item; /* [count] */
    size_t count, capacity;
} fw_tips;
fw_status fw_tips_push(fw_tips *tips, fw_tip tip, fw_fault *fault);
fw_status fw_tips_copy(const fw_tips *from, fw_tips *to, fw_fault *fault);
void fw_tips_free(fw_tips *tips);

enum { FW_WAYS_DIRECTIONS = 24, FW_WAYS_FAR = INT32_MAX };

typedef struct fw_way_step {
    int32_t a, b, length; /* nodes, nodes, units */
} fw_way_step;

typedef struct fw_way_entry {
    int32_t distance, node;
} fw_way_entry;

typedef struct fw_ways {
    int32_t nx, ny; /* nodes */
    size_t nodes;   /* nx ny < 2^31 */
    double dx_mm, dy_mm;
    const uint8_t *flags; /* [ny][nx] a node is in when flags & in, borrowed */
    uint8_t in;
    double unit_mm;     /* of a stored length */
    double range_mm;    /* how far a point looks straight ahead */
    int32_t *distance;  /* [ny][nx] units to the nearest point, FW_WAYS_FAR where there is no way */
    int32_t *label;     /* [ny][nx] which point that is, -1 where there is none */
    int32_t *open;      /* [ny + 1][nx + 1] nodes that are in, left of and before a corner */
    uint8_t *blind;     /* [ny][nx] a point in range does not see it */
    fw_way_entry *heap; /* [heap_count] */
    size_t heap_count, heap_capacity;
    fw_way_step step[FW_WAYS_DIRECTIONS];
} fw_ways;

/* nx, ny, dx_mm, dy_mm, flags, in and range_mm are set by the caller, the rest is zero. On failure
 * nothing is left to close. */
fw_status fw_ways_open(fw_ways *ways, fw_fault *fault);
void fw_ways_close(fw_ways *ways);

/* Fills distance and label for all nodes. Points are in mm from node (0, 0). */
fw_status fw_ways_measure(fw_ways *ways, const fw_tips *points, fw_fault *fault);

/* Adds one point with its label to what was measured. */
fw_status fw_ways_add(fw_ways *ways, const fw_tip *point, int32_t label, fw_fault *fault);

/* Boxes of nodes, inclusive. */
typedef struct fw_way_box {
    int32_t a0, a1, b0, b1;
} fw_way_box;

void fw_ways_forget(fw_ways *ways); /* all nodes: no way */

/* After fw_ways_forget: the lengths to one point alone, complete up to limit units (at most the
 * range). All nodes that were touched lie in *box; the caller sets their distance to FW_WAYS_FAR
 * before the next call. */
fw_status fw_ways_round(fw_ways *ways, const fw_tip *point, int32_t limit, fw_way_box *box,
                        fw_fault *fault);

#endif
