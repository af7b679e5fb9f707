#include "stack/ring.h"

#include "stack/bytes.h"
#include "stack/grey_rows.h"
#include "stack/packed.h"

#include <assert.h>
#include <stdlib.h>
#include <string.h>

enum { OPEN = 2 };

static const char holder[] = "ring of layers";

struct fw_ring {
    int32_t keep, count;
    int64_t pushed;      /* layers so far; layer n lives in slot n % keep, or open[n % 2] */
    fw_greys open[OPEN]; /* the newest two */
    fw_bytes *packed;    /* [keep], exact size */
    fw_bytes scratch;
    fw_budget *budget;
    size_t charged;
};

fw_status fw_ring_open(int32_t keep, fw_budget *budget, fw_ring **out, fw_fault *fault)
{
    assert(keep >= OPEN);
    *out = NULL;
    fw_ring *ring;
    FW_TRY(fw_allocate((void **)&ring, 1, sizeof *ring, holder, fault));
    ring->keep = keep;
    ring->budget = budget;
    fw_status status =
        fw_allocate((void **)&ring->packed, (size_t)keep, sizeof *ring->packed, holder, fault);
    if (status == FW_OK)
        *out = ring;
    else
        fw_ring_close(ring);
    return status;
}

static fw_bytes *slot(const fw_ring *ring, int64_t layer)
{
    return &ring->packed[layer % ring->keep];
}

/* Replaces what is charged for one part by its size now; FW_MACHINE beyond the limit. */
static fw_status recharge(fw_ring *ring, size_t before, size_t now, fw_fault *fault)
{
    fw_budget_release(ring->budget, before);
    ring->charged -= before;
    const bool fits = fw_budget_fits(ring->budget, now);
    fw_budget_charge(ring->budget, now);
    ring->charged += now;
    if (fits)
        return FW_OK;
    return fw_fault_set(fault, FW_MACHINE,
                        "the last %d layers need over %zu bytes even when packed, %s, allow more "
                        "memory or cut the stack into smaller parts",
                        (int)ring->keep, ring->budget->limit, holder);
}

/* Packs a layer that leaves the open pair into its slot, at its exact size. */
static fw_status pack_slot(fw_ring *ring, int64_t layer, fw_fault *fault)
{
    ring->scratch.size = 0;
    FW_TRY(fw_pack(&ring->open[layer % OPEN], &ring->scratch, fault));
    fw_bytes *packed = slot(ring, layer);
    FW_TRY(fw_bytes_append(packed, ring->scratch.data, ring->scratch.size, holder, fault));
    return recharge(ring, 0, packed->capacity, fault);
}

static void drop(fw_ring *ring, int64_t layer)
{
    fw_bytes *packed = slot(ring, layer);
    fw_budget_release(ring->budget, packed->capacity);
    ring->charged -= packed->capacity;
    fw_bytes_free(packed);
}

fw_status fw_ring_push(fw_ring *ring, const fw_greys *layer, fw_fault *fault)
{
    const int64_t n = ring->pushed;
    if (ring->count == ring->keep) {
        drop(ring, n);
        ring->count--;
    }
    if (n >= OPEN && ring->keep > OPEN)
        FW_TRY(pack_slot(ring, n - OPEN, fault));
    fw_greys *newest = &ring->open[n % OPEN];
    const size_t before = fw_greys_size(newest);
    fw_status status = fw_greys_copy(layer, newest, fault);
    fw_status charged =
        recharge(ring, before, fw_greys_size(newest), status == FW_OK ? fault : NULL);
    FW_TRY(status);
    ring->pushed++;
    ring->count++;
    return charged;
}

int32_t fw_ring_count(const fw_ring *ring)
{
    return ring->count;
}

fw_status fw_ring_get(const fw_ring *ring, int32_t back, fw_greys *scratch, const fw_greys **layer,
                      fw_fault *fault)
{
    assert(0 <= back && back < ring->count);
    const int64_t n = ring->pushed - 1 - back;
    if (back < OPEN) {
        *layer = &ring->open[n % OPEN];
        return FW_OK;
    }
    *layer = scratch;
    return fw_unpack(slot(ring, n)->data, slot(ring, n)->size, scratch, fault);
}

void fw_ring_close(fw_ring *ring)
{
    if (ring == NULL)
        return;
    fw_budget_release(ring->budget, ring->charged);
    for (int i = 0; i < OPEN; i++)
        fw_greys_free(&ring->open[i]);
    for (int32_t i = 0; ring->packed != NULL && i < ring->keep; i++)
        fw_bytes_free(&ring->packed[i]);
    free(ring->packed);
    fw_bytes_free(&ring->scratch);
    free(ring);
}
