/* Encodes a layer as PNG bytes, in the format that its file came in. */
#ifndef FW_PNG_WRITE_H
#define FW_PNG_WRITE_H

#include "mask/greys.h"
#include "stack/png_format.h"

/* out (reused, owned by the caller) becomes the file. The same layer and format always give the
 * same bytes (with one version of zlib). layer->full must be fw_png_full(format).
 * FW_INPUT when a palette has no entry for a grey of the layer (see fw_png_levels). name is what
 * the fault line calls the file. Thread-safe for different out. */
fw_status fw_png_encode(const fw_greys *layer, const fw_png_format *format, const char *name,
                        fw_bytes *out, fw_fault *fault);

#endif
