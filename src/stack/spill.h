/* A nameless temporary file for what does not fit in memory. */
#ifndef FW_SPILL_H
#define FW_SPILL_H

#include "fault/fault.h"

#include <stdint.h>

typedef struct fw_spill {
    const char *directory; /* borrowed */
    int file;              /* descriptor, -1 until the first put */
    uint64_t size;
} fw_spill;

/* The file is made at the first put. It never has a name that outlives the call, so it is gone
 * with the process, however that ends. */
void fw_spill_begin(fw_spill *spill, const char *directory);

/* Appends; *offset tells where. FW_MACHINE on a full disk and the like. */
fw_status fw_spill_put(fw_spill *spill, const void *bytes, size_t size, uint64_t *offset,
                       fw_fault *fault);

/* Reads size bytes back. Thread-safe while nobody puts. */
fw_status fw_spill_get(const fw_spill *spill, uint64_t offset, void *bytes, size_t size,
                       fw_fault *fault);
void fw_spill_end(fw_spill *spill);

#endif
