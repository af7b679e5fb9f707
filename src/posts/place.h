/* Tips for one layer: where posts must hold what the layer adds, by reach alone. */
#ifndef FW_PLACE_H
#define FW_PLACE_H

#include "mask/carried.h"
#include "mask/regions.h"
#include "posts/cover.h"
#include "posts/disc.h"

typedef struct fw_place_rules {
    const fw_screen *screen; /* the image, borrowed */
    double reach_mm;         /* largest debt that a pixel may have */
    double tip_mm;           /* smallest tip diameter */
} fw_place_rules;

/* Why pixels stay farther than reach from all that holds them. */
typedef enum fw_miss_cause {
    FW_MISS_SMALL,   /* a region that nothing holds, in which the smallest tip finds no room */
    FW_MISS_NO_PATH, /* the tip that it needs has no way to the plate (`possible` says no) */
    FW_MISS_NO_FACE, /* no plate-facing pixel is near enough to put a tip on */
} fw_miss_cause;

typedef struct fw_miss {
    fw_miss_cause cause;
    uint32_t region;
    int64_t pixels; /* of the region that exceed the reach */
    int32_t x, y;   /* px, the worst of them (first in raster order) */
    double debt_mm; /* there; INFINITY where nothing holds it */
} fw_miss;

/* At most one a region and cause, ascending in region. A zeroed struct is a valid empty list. */
typedef struct fw_misses {
    fw_miss *item; /* [count] */
    size_t count, capacity;
} fw_misses;
void fw_misses_free(fw_misses *misses);

/* Says whether a post with its tip at this place has a path to the plate. Must answer the same for
 * the same place within one call. NULL = always. */
typedef bool (*fw_place_possible)(void *context, double x_mm, double y_mm);

/* Adds tips to the newest layer of `field` until no pixel of `now` has a larger debt than reach.
 *
 * now: the layer; regions: of `now`; fresh: its pixels that face the plate (now minus the layer
 * before), where alone tips may be put. held[regions->count]: 1 where something already holds the
 * region; set to 1 for regions that get a tip. A region that is not held and has no place on its
 * fresh pixels for a whole smallest tip gets none and is reported as FW_MISS_SMALL: call again in
 * later layers while its body has grown and is still not held.
 *
 * Tips are appended to `out`, their contact pixels (disc footprint within now) to the field's
 * sources; what still exceeds the reach is appended to `missed`. Of two equal places the smaller
 * (y, x) wins, so the result is a pure function of the arguments. On failure `out` and `field` hold
 * a part of the tips. */
fw_status fw_place_layer(const fw_place_rules *rules, fw_carried *field, const fw_runs *now,
                         const fw_regions *regions, uint8_t *held, const fw_runs *fresh,
                         fw_place_possible possible, void *context, fw_tips *out, fw_misses *missed,
                         fw_fault *fault);

/* Appends up to `more` tips inside `runs` (plate-facing pixels round an overloaded tip), so that
 * they share it evenly with the tips that stand there: farthest first, then moved to the middle of
 * the area that is nearest to each (Lloyd), never closer than pitch_mm to one another or to a tip
 * of `existing` (which stay). Fewer, or none, where there is no such place. */
fw_status fw_place_extra(const fw_place_rules *rules, const fw_runs *runs, const fw_tips *existing,
                         size_t more, double pitch_mm, fw_place_possible possible, void *context,
                         fw_tips *out, fw_fault *fault);

#endif
