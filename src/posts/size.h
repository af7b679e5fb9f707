/* The smallest diameters with which a post holds its load with the margin asked for, counted on the
 * pixels that will be exposed.
 *
 * A section holds when  load * margin <= strength * (solid pixels) * px * py.  The pixels of a disc
 * at a fixed place only grow with its diameter, so each diameter is found by bisection over whole
 * micrometres, and a larger load never gives a smaller diameter.
 */
#ifndef FW_SIZE_H
#define FW_SIZE_H

#include "physics/cards.h"
#include "posts/buckling.h"
#include "posts/disc.h"
#include "posts/margins.h"
#include "posts/post.h"

typedef struct fw_size_input {
    const fw_screen *screen;
    double layer_mm;
    int32_t solid_least;        /* grey from which a pixel is solid */
    const fw_resin *resin;      /* tensile_MPa, plate_adhesion_MPa, modulus_MPa */
    const fw_post_rules *rules; /* ranges of diameters, margin */
    fw_post_demand demand;
    fw_post_push push;   /* N */
    double foot_room_mm; /* largest foot: pitch to the nearest one less clearance; INFINITY
                            when it stands alone */
    bool grow_only;      /* the post's diameters are lower limits */
} fw_size_input;

/* Bits of fw_size_outcome.missed. */
enum {
    FW_MISSED_TIP = 1 << FW_POST_TIP,
    FW_MISSED_NECK = 1 << FW_POST_NECK,
    FW_MISSED_SHAFT = 1 << FW_POST_SHAFT,
    FW_MISSED_FOOT = 1 << FW_POST_FOOT,
    FW_MISSED_ROOM = 1 << FW_POST_CHECKS, /* the foot is wider than foot_room_mm */
    FW_MISSED_PUSH = 2 << FW_POST_CHECKS, /* it buckles */
};

typedef struct fw_size_outcome {
    unsigned missed; /* what does not hold at the diameters chosen; 0 = all holds */
} fw_size_outcome;

/* Sets tip_mm, shaft_mm and foot_mm of the post (whole um; a locked post keeps its own and is only
 * measured). Reads its path (not routed: as if it stood vertically under its tip), tip_layer,
 * neck_mm. path[0] must be set. The contact is what is solid both in the tip layer and in the
 * layer before it.
 *   tip    smallest for which contact and every neck section hold, within rules->tip_mm, with the
 *          narrowest shaft (so that it does not shrink where a larger load widens the shaft)
 *   shaft  smallest for which every shaft section holds and the post does not buckle, within
 *          rules->shaft_mm, never below tip
 *   foot   smallest for which the plate holds it, never below shaft, at most rules->foot_mm and
 *          foot_room_mm
 * FW_INPUT when a diameter, limit or place is not a number that can be used. */
fw_status fw_size_post(const fw_size_input *input, fw_post *post, fw_size_outcome *outcome,
                       fw_fault *fault);

#endif
