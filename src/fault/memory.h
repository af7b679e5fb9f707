/* Checked allocation and budgets: every growing array in the project goes through here. */
#ifndef FW_MEMORY_H
#define FW_MEMORY_H

#include "fault/fault.h"

#include <stddef.h>
#include <stdint.h>

/* Allocates count * size zeroed bytes into *out (caller frees). A product that overflows is the
 * same fault as no memory. count == 0 gives a valid pointer. holder names the owner in the fault
 * line. */
fw_status fw_allocate(void **out, size_t count, size_t size, const char *holder, fw_fault *fault);

/* Makes *array (of *capacity items of `size` bytes, may be NULL and 0) hold at least `need` items,
 * growing by half at a time. New items are not cleared. On failure *array is untouched. */
fw_status fw_grow(void **array, size_t *capacity, size_t need, size_t size, const char *holder,
                  fw_fault *fault);

/* A hard limit on what one holder (file buffers, ring, store, ...) may keep. Not thread-safe. */
typedef struct fw_budget {
    const char *holder; /* borrowed, lives as long as the budget */
    size_t limit;       /* bytes */
    size_t used;        /* bytes */
    size_t peak;        /* bytes, largest `used` so far */
} fw_budget;

/* True when `bytes` more fit. Charging past the limit is the caller's decision, never silent. */
bool fw_budget_fits(const fw_budget *budget, size_t bytes);
void fw_budget_charge(fw_budget *budget, size_t bytes);
void fw_budget_release(fw_budget *budget, size_t bytes);

#endif
