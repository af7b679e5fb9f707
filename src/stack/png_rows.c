#include "stack/png_rows.h"

#include "fault/memory.h"
#include "stack/grey_rows.h"
#include "stack/png_chunks.h"

#include <string.h>

void fw_png_rows_begin(fw_png_rows *rows, const fw_png_format *format, int32_t width,
                       const char *name)
{
    *rows = (fw_png_rows){.width = width,
                          .depth = format->depth,
                          .channels = format->colour_type == FW_PNG_RGB ? 3 : 1,
                          .palette = format->colour_type == FW_PNG_PALETTE,
                          .format = format,
                          .name = name};
    for (int32_t i = 0; i < 256; i++) {
        const uint8_t *entry = format->palette[i];
        const bool grey = entry[0] == entry[1] && entry[1] == entry[2];
        rows->grey_of[i] = i < format->palette_count && grey ? entry[0] : FW_NOT_GREY;
    }
}

/* The first byte from `from` on (below `end`) that breaks an 8-byte pattern repeated from there;
 * eight at a time. A period of 1 or 2 bytes stays in phase since steps are even. */
static size_t bytes_repeat_until(const uint8_t *raw, size_t from, size_t end,
                                 const uint8_t pattern[8])
{
    uint64_t expected, found;
    memcpy(&expected, pattern, 8);
    size_t at = from;
    while (at + 8 <= end) {
        memcpy(&found, raw + at, 8);
        if (found != expected)
            break;
        at += 8;
    }
    for (size_t i = 0; at < end && raw[at] == pattern[i & 7]; i++)
        at++;
    return at;
}

/* Each of the next three gives the first sample after `i` (at most n) that differs from sample i.
 * Depth 8: a sample is a byte. */
static int32_t same_until_8(const uint8_t *raw, int32_t i, int32_t n)
{
    if (i + 1 < n && raw[i + 1] != raw[i])
        return i + 1;
    uint8_t pattern[8];
    memset(pattern, raw[i], sizeof pattern);
    return (int32_t)bytes_repeat_until(raw, (size_t)i, (size_t)n, pattern);
}

/* Depth 16: a sample is two bytes, the high one first. */
static int32_t same_until_16(const uint8_t *raw, int32_t i, int32_t n)
{
    uint8_t pattern[8];
    for (int k = 0; k < 8; k++)
        pattern[k] = raw[2 * (size_t)i + (size_t)(k & 1)];
    return (int32_t)(bytes_repeat_until(raw, 2 * (size_t)i, 2 * (size_t)n, pattern) / 2);
}

static int32_t packed_sample(const uint8_t *raw, int32_t i, int32_t depth)
{
    const int32_t bit = i * depth;
    return (raw[bit / 8] >> (8 - depth - bit % 8)) & ((1 << depth) - 1);
}

/* Depth 1, 2, 4: samples share a byte, the leftmost in the high bits. Whole bytes are skipped. */
static int32_t same_until_packed(const uint8_t *raw, int32_t i, int32_t n, int32_t depth)
{
    const int32_t value = packed_sample(raw, i, depth), in_byte = 8 / depth;
    int32_t at = i + 1;
    while (at < n && at % in_byte != 0) {
        if (packed_sample(raw, at, depth) != value)
            return at;
        at++;
    }
    uint8_t pattern[8];
    memset(pattern, value * (255 / ((1 << depth) - 1)), sizeof pattern);
    if (at < n)
        at = in_byte * (int32_t)bytes_repeat_until(raw, (size_t)(at / in_byte),
                                                   (size_t)(n / in_byte), pattern);
    while (at < n && packed_sample(raw, at, depth) == value)
        at++;
    return at;
}

static int32_t sample_at(const uint8_t *raw, int32_t i, int32_t depth)
{
    if (depth == 8)
        return raw[i];
    if (depth == 16)
        return raw[2 * (size_t)i] << 8 | raw[2 * (size_t)i + 1];
    return packed_sample(raw, i, depth);
}

static int32_t same_until(const uint8_t *raw, int32_t i, int32_t n, int32_t depth)
{
    if (depth == 8)
        return same_until_8(raw, i, n);
    if (depth == 16)
        return same_until_16(raw, i, n);
    return same_until_packed(raw, i, n, depth);
}

static fw_status refuse_colour(const fw_png_rows *rows, int32_t x, int32_t y, int32_t red,
                               int32_t green, int32_t blue, fw_fault *fault)
{
    return fw_fault_set(fault, FW_INPUT,
                        "a mask with colour, %s has red %d, green %d, blue %d at pixel (%d, %d), "
                        "export grey masks",
                        rows->name, (int)red, (int)green, (int)blue, (int)x, (int)y);
}

static fw_status refuse_index(const fw_png_rows *rows, int32_t index, int32_t x, int32_t y,
                              fw_fault *fault)
{
    if (index >= rows->format->palette_count)
        return fw_fault_set(fault, FW_INPUT,
                            "damaged picture, %s uses palette entry %d of %d at pixel (%d, %d), "
                            "export it again",
                            rows->name, (int)index, (int)rows->format->palette_count, (int)x,
                            (int)y);
    const uint8_t *entry = rows->format->palette[index];
    return refuse_colour(rows, x, y, entry[0], entry[1], entry[2], fault);
}

/* Appends to a row that has room for it (fw_png_rows_push made that), merging with an equal run
 * before it as fw_greys_push does: called for every run of every mask, so without its checks. */
static void append(fw_greys *layer, int32_t y, int32_t x0, int32_t x1, int32_t grey)
{
    fw_grey_run *next = layer->run + layer->count;
    if (layer->count > layer->row[y] && next[-1].x1 == x0 && next[-1].grey == grey) {
        next[-1].x1 = x1;
        return;
    }
    *next = (fw_grey_run){x0, x1, grey};
    layer->count++;
}

static fw_status push_single(const fw_png_rows *rows, const uint8_t *raw, int32_t y,
                             fw_greys *layer, fw_fault *fault)
{
    for (int32_t x = 0; x < rows->width;) {
        const int32_t end = same_until(raw, x, rows->width, rows->depth);
        int32_t grey = sample_at(raw, x, rows->depth);
        if (rows->palette) {
            if (rows->grey_of[grey] == FW_NOT_GREY)
                return refuse_index(rows, grey, x, y, fault);
            grey = rows->grey_of[grey];
        }
        if (grey != 0)
            append(layer, y, x, end, grey);
        x = end;
    }
    return FW_OK;
}

static fw_status push_rgb(const fw_png_rows *rows, const uint8_t *raw, int32_t y, fw_greys *layer,
                          fw_fault *fault)
{
    const int32_t samples = 3 * rows->width;
    for (int32_t x = 0; x < rows->width;) {
        const int32_t red = sample_at(raw, 3 * x, rows->depth);
        const int32_t end = same_until(raw, 3 * x, samples, rows->depth) / 3;
        if (end <= x)
            return refuse_colour(rows, x, y, red, sample_at(raw, 3 * x + 1, rows->depth),
                                 sample_at(raw, 3 * x + 2, rows->depth), fault);
        if (red != 0)
            append(layer, y, x, end, red);
        x = end;
    }
    return FW_OK;
}

fw_status fw_png_rows_push(const fw_png_rows *rows, const uint8_t *raw, int32_t y, fw_greys *layer,
                           fw_fault *fault)
{
    fw_greys_close_before(layer, y);
    FW_TRY(fw_grow((void **)&layer->run, &layer->run_capacity,
                   (size_t)layer->count + (size_t)rows->width, sizeof *layer->run,
                   "greys of a layer", fault));
    return rows->channels == 3 ? push_rgb(rows, raw, y, layer, fault)
                               : push_single(rows, raw, y, layer, fault);
}
