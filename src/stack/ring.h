/* The last layers of a pass: the two newest as they are, the older ones packed. */
#ifndef FW_RING_H
#define FW_RING_H

#include "fault/memory.h"
#include "mask/greys.h"

typedef struct fw_ring fw_ring;

/* keep: layers held, 2 or more (W + 1). budget (borrowed) counts the packed and the two open
 * layers. */
fw_status fw_ring_open(int32_t keep, fw_budget *budget, fw_ring **out, fw_fault *fault);

/* Adds a copy of the next layer; the oldest one falls out. FW_MACHINE when the budget is spent. */
fw_status fw_ring_push(fw_ring *ring, const fw_greys *layer, fw_fault *fault);

int32_t fw_ring_count(const fw_ring *ring); /* layers held now, at most keep */

/* The layer `back` pushes before the newest (0 .. count - 1). *layer points into the ring for 0 and
 * 1 (valid until the next push), else to *scratch (reused, the caller's). Thread-safe for different
 * scratch while nobody pushes. */
fw_status fw_ring_get(const fw_ring *ring, int32_t back, fw_greys *scratch, const fw_greys **layer,
                      fw_fault *fault);

void fw_ring_close(fw_ring *ring); /* NULL is allowed */

#endif
