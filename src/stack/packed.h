/* A layer's grey runs in few bytes, without loss: rows equal to the one above cost nothing, other
 * rows a few bits a run edge.
 */
#ifndef FW_PACKED_H
#define FW_PACKED_H

#include "mask/greys.h"
#include "stack/bytes.h"

/* Appends the packed layer to *out. */
fw_status fw_pack(const fw_greys *layer, fw_bytes *out, fw_fault *fault);

/* Rebuilds the layer in *out (reused). Bytes that fw_pack did not make give FW_MACHINE, never a
 * crash. */
fw_status fw_unpack(const uint8_t *bytes, size_t size, fw_greys *out, fw_fault *fault);

#endif
