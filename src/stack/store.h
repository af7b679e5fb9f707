/* Every decoded layer of a stack, packed without loss: in memory up to a budget, then in an
 * unlinked temporary file, so that a pass need not read and decode the input twice.
 */
#ifndef FW_STORE_H
#define FW_STORE_H

#include "stack/layers.h"

typedef struct fw_store fw_store;

/* budget (borrowed) counts packed layers and formats; what does not fit goes to a nameless file in
 * the folder `directory` (borrowed; made at the first need, gone with the store or the process). A
 * limit of 0 puts every layer in the file. */
fw_status fw_store_open(fw_budget *budget, const char *directory, fw_store **out, fw_fault *fault);

/* Adds the next layer: layer->index must be fw_store_count(store). A layer that is same_as_before
 * costs nothing. FW_MACHINE: no memory, disk full. */
fw_status fw_store_put(fw_store *store, const fw_layer *layer, fw_fault *fault);

/* Rebuilds layer `index` in *out (reused). Any number of threads may get at the same time, while
 * nobody puts. */
fw_status fw_store_get(const fw_store *store, int32_t index, fw_greys *out, fw_fault *fault);

int32_t fw_store_count(const fw_store *store);
const fw_png_format *fw_store_format(const fw_store *store, int32_t index); /* borrowed */
const uint8_t *fw_store_sha256(const fw_store *store, int32_t index);       /* [32], borrowed */

/* Packed bytes so far, in memory and in the file. */
size_t fw_store_bytes(const fw_store *store);
size_t fw_store_bytes_in_file(const fw_store *store);
void fw_store_close(fw_store *store); /* NULL is allowed */

#endif
