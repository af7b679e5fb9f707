/* What has to be remembered of a PNG file, besides its pixels, to write a changed layer back in the
 * form that it came in.
 */
#ifndef FW_PNG_FORMAT_H
#define FW_PNG_FORMAT_H

#include "stack/bytes.h"

/* Where a kept chunk stands: the PNG standard (ISO/IEC 15948, 5.6) orders some chunks against PLTE
 * and IDAT. Without a palette everything before IDAT stands in FW_PNG_BEFORE_PALETTE. */
enum { FW_PNG_BEFORE_PALETTE, FW_PNG_BEFORE_PIXELS, FW_PNG_AFTER_PIXELS, FW_PNG_PLACES };

/* A zeroed struct is valid and empty; copies are deep. */
typedef struct fw_png_format {
    uint8_t depth;                /* bits a sample: 1, 2, 4, 8, 16 */
    uint8_t colour_type;          /* as in IHDR: 0 grey, 2 RGB, 3 palette */
    uint16_t palette_count;       /* entries, 0 unless palette */
    uint8_t palette[256][3];      /* red, green, blue */
    fw_bytes kept[FW_PNG_PLACES]; /* whole chunks (length, type, data, CRC) other than IHDR, PLTE,
                                     IDAT and IEND, in file order; owned */
} fw_png_format;

/* The grey of a fully lit pixel: 2^depth - 1, 255 for palette files. */
int32_t fw_png_full(const fw_png_format *format);

/* The sorted distinct greys that a file of this format can hold, where it is restricted to fewer
 * than 0 .. full: palette files. Returns how many, 0 = not restricted. levels [256]. Palette
 * entries whose channels differ do not count. */
size_t fw_png_levels(const fw_png_format *format, int32_t *levels);

bool fw_png_format_equal(const fw_png_format *a, const fw_png_format *b);
size_t fw_png_format_size(const fw_png_format *format); /* bytes of memory, for budgets */

/* copy (a valid struct, reused) becomes equal to format. */
fw_status fw_png_format_copy(const fw_png_format *format, fw_png_format *copy, fw_fault *fault);
void fw_png_format_free(fw_png_format *format);

#endif
