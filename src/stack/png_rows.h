/* Unfiltered PNG rows to grey runs. */
#ifndef FW_PNG_ROWS_H
#define FW_PNG_ROWS_H

#include "mask/greys.h"
#include "stack/png_format.h"

typedef struct fw_png_rows {
    int32_t width;
    int32_t depth, channels;
    bool palette;
    int32_t grey_of[256]; /* palette index to grey; FW_NOT_GREY for colour and missing entries */
    const fw_png_format *format;
    const char *name;
} fw_png_rows;

enum { FW_NOT_GREY = -1 };

/* format and name are borrowed. */
void fw_png_rows_begin(fw_png_rows *rows, const fw_png_format *format, int32_t width,
                       const char *name);

/* Pushes row y of raw samples, as they stand in the file, to layer. FW_INPUT names the first pixel
 * whose channels differ. Cost: bytes of the row / 8 + runs. */
fw_status fw_png_rows_push(const fw_png_rows *rows, const uint8_t *raw, int32_t y, fw_greys *layer,
                           fw_fault *fault);

#endif
