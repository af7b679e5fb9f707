/* Posts that run into one another. Where the sections of two posts overlap, material carries both.
 *
 * Each post is taken to spread its load evenly over its own section, and the stresses of posts that
 * share a place add (superposition; such a field balances every load, so by the static theorem of
 * plasticity a section that holds it does hold). The mean over the section of post a then is
 *     (F_a + sum over b of F_b |a and b| / |b|) / |a|
 * with |.| solid areas of one layer. Two posts on one shaft give (F_a + F_b) / |a|; posts apart
 * give each its own. As loads peak in layers of their own, the largest of each are added, and the
 * largest overlap is taken: on the safe side.
 */
#ifndef FW_CHECK_TOGETHER_H
#define FW_CHECK_TOGETHER_H

#include "fault/fault.h"

#include <stddef.h>
#include <stdint.h>

/* How much of the load of `other` the sections of `bearer` carry at most. */
typedef struct fw_together_row {
    int32_t bearer, other;
    double neck, shaft; /* 0 .. 1, by the zone of the bearer */
} fw_together_row;

/* A zeroed struct is valid and empty; free row with free(). */
typedef struct fw_together {
    fw_together_row *row; /* [count], sorted by (bearer, other) */
    size_t count, capacity;
} fw_together;

/* `part` of the load of `other` is carried by `bearer`, in its neck or in its shaft. */
fw_status fw_together_note(fw_together *together, int32_t bearer, int32_t other, bool neck,
                           double part, fw_fault *fault);

/* The first row of a bearer, or together->count; its rows stand together. */
size_t fw_together_first(const fw_together *together, int32_t bearer);

#endif
