/* Decodes a PNG mask row by row straight into grey runs; the picture is never held as pixels. */
#ifndef FW_PNG_READ_H
#define FW_PNG_READ_H

#include "mask/greys.h"
#include "stack/png_format.h"

/* More runs than this in one layer is noise, not a part (48 MB of runs). */
enum { FW_NOISE_RUNS = 4000000 };

/* Decodes the file `bytes`. name is what the fault line calls the file.
 * Accepts grey of 1, 2, 4, 8, 16 bit, palette of 1, 2, 4, 8 bit and RGB of 8, 16 bit where the
 * channels of every pixel are equal, 1 .. 65535 px a side. Bytes after IEND are ignored.
 * FW_INPUT with the reason for anything else: colour (names the first such pixel), transparency
 * (alpha or tRNS), interlaced, animated, truncated, a wrong CRC, chunks out of order, a header that
 * promises more pixels than the file can hold, over 1 MiB of kept chunks, noise.
 * *out and *format are reused (valid structs) and hold nothing to rely on after a failure; the
 * caller frees both in any case. Thread-safe for different out and format. */
fw_status fw_png_decode(const uint8_t *bytes, size_t size, const char *name, fw_greys *out,
                        fw_png_format *format, fw_fault *fault);

/* The same, but stops with FW_OK and *over = true as soon as the layer proves to hold more than
 * run_limit (<= FW_NOISE_RUNS) runs: for a caller that has less memory to give at the moment. */
fw_status fw_png_decode_within(const uint8_t *bytes, size_t size, const char *name,
                               uint32_t run_limit, bool *over, fw_greys *out, fw_png_format *format,
                               fw_fault *fault);

/* The refusal of a layer with over FW_NOISE_RUNS runs. */
fw_status fw_png_noise(const char *name, fw_fault *fault);

#endif
