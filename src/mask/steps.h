/* The straight steps from pixel centre to pixel centre of which in-plane paths are made.
 *
 * Between two neighbouring directions u and v any vector is a sum of steps along them (the Farey
 * property: their determinant is 1), and the sum is at most 1 / cos(gamma / 2) longer than the
 * vector, gamma = the angle between u and v in mm. Directions are added (u + v) until no gamma is
 * over 18.5 degrees: 24 steps on square pixels, 1.3 % at most.
 *
 * A step is possible where the straight line between the two centres stays inside the medium: every
 * pixel that it crosses is in it, and where it goes through the corner of four pixels at least one
 * of the two that it only touches is (two pixels that share nothing but a corner are not joined).
 */
#ifndef FW_STEPS_H
#define FW_STEPS_H

#include "fault/fault.h"

#include <stdint.h>

enum { FW_STEP_RADIUS = 31 }; /* px, largest |dx| and |dy| */

typedef struct fw_offset {
    int32_t dx, dy; /* px */
} fw_offset;

typedef struct fw_step {
    int32_t dx, dy;
    uint32_t length;               /* in units, rounded up */
    uint32_t crossed, crossed_end; /* pixels strictly between the ends: crossing[crossed ..) */
    bool
        corner; /* crossing[crossed_end] and the one after it: at least one must be in the medium */
} fw_step;

typedef struct fw_steps {
    fw_step *step; /* [count], the opposite of each is among them */
    size_t count, capacity;
    fw_offset *crossing; /* from the start of the step */
    size_t crossing_count, crossing_capacity;
    int32_t radius_x, radius_y; /* largest |dx|, |dy| */
} fw_steps;

/* Pixels of px by py mm, at most 8 times longer one way than the other; lengths in units of
 * unit_mm. A zeroed struct is a valid empty one. */
fw_status fw_steps_new(fw_steps *steps, double px_mm, double py_mm, double unit_mm,
                       fw_fault *fault);
void fw_steps_free(fw_steps *steps);

#endif
