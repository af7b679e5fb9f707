/* The chunks of a PNG file, checked before a decoder sees any of them: lengths against the file's
 * size, CRCs, order, and a header that the compressed bytes can pay for. Only IHDR, PLTE, IDAT and
 * IEND go on to libpng, so no ancillary chunk can make it allocate.
 */
#ifndef FW_PNG_CHUNKS_H
#define FW_PNG_CHUNKS_H

#include "stack/png_format.h"

enum { FW_PNG_GREY = 0, FW_PNG_RGB = 2, FW_PNG_PALETTE = 3 };

/* Part of the file's bytes, borrowed; size 0 = absent. */
typedef struct fw_png_span {
    const uint8_t *bytes;
    size_t size;
} fw_png_span;

/* What libpng gets to see, in file order. */
enum { FW_PNG_SPAN_HEADER, FW_PNG_SPAN_PALETTE, FW_PNG_SPAN_PIXELS, FW_PNG_SPAN_END, FW_PNG_SPANS };

typedef struct fw_png_scan {
    int32_t width, height; /* px, 1 .. 65535 */
    size_t row_bytes;      /* of one unfiltered row */
    fw_png_span span[FW_PNG_SPANS];
} fw_png_scan;

/* Fills scan and format (valid struct, reused). Refusals: see fw_png_decode. */
fw_status fw_png_scan_file(const uint8_t *bytes, size_t size, const char *name, fw_png_scan *scan,
                           fw_png_format *format, fw_fault *fault);

#endif
