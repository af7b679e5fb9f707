#include "stack/png_write.h"

#include "fault/memory.h"
#include "stack/grey_rows.h"
#include "stack/png_chunks.h"

#include <png.h>
#include <setjmp.h>
#include <stdlib.h>
#include <string.h>

enum { MESSAGE = 128, NO_ENTRY = -1 };

static const char holder[] = "encoding a picture";

/* Everything that must outlive libpng's longjmp. */
typedef struct encoder {
    const fw_greys *layer;
    const fw_png_format *format;
    const char *name;
    uint8_t *raw; /* one row of samples */
    size_t row_bytes;
    int32_t entry_of[256]; /* grey to palette index */
    png_structp png;
    png_infop info;
    fw_bytes *out;
    char message[MESSAGE];
    fw_status status; /* of what went wrong in a callback */
    fw_fault *fault;
} encoder;

static _Noreturn void on_error(png_structp png, png_const_charp message)
{
    encoder *e = png_get_error_ptr(png);
    strncpy(e->message, message, MESSAGE - 1);
    longjmp(png_jmpbuf(png), 1);
}

static void on_warning(png_structp png, png_const_charp message)
{
    (void)png;
    (void)message;
}

static void on_write(png_structp png, png_bytep bytes, size_t size)
{
    encoder *e = png_get_io_ptr(png);
    e->status = fw_bytes_append(e->out, bytes, size, holder, e->fault);
    if (e->status != FW_OK)
        png_error(png, "no memory for the file");
}

static void on_flush(png_structp png)
{
    (void)png;
}

/* The first entry with a grey is the one written, so the bytes are always the same. */
static void invert_palette(encoder *e)
{
    for (int i = 0; i < 256; i++)
        e->entry_of[i] = NO_ENTRY;
    for (int i = e->format->palette_count - 1; i >= 0; i--) {
        const uint8_t *entry = e->format->palette[i];
        if (entry[0] == entry[1] && entry[1] == entry[2])
            e->entry_of[entry[0]] = i;
    }
}

static fw_status check_greys(encoder *e)
{
    if (e->format->colour_type != FW_PNG_PALETTE)
        return FW_OK;
    invert_palette(e);
    bool used[256] = {false};
    int64_t lit = 0;
    for (uint32_t i = 0; i < e->layer->count; i++) {
        used[e->layer->run[i].grey] = true;
        lit += e->layer->run[i].x1 - e->layer->run[i].x0;
    }
    used[0] = lit < (int64_t)e->layer->width * e->layer->height;
    for (int grey = 0; grey < 256; grey++) {
        if (used[grey] && e->entry_of[grey] == NO_ENTRY)
            return fw_fault_set(e->fault, FW_INPUT,
                                "no palette entry for grey %d, %s, export the stack as plain grey",
                                grey, e->name);
    }
    return FW_OK;
}

/* Depth 1, 2, 4: samples share a byte, the leftmost in the high bits. Whole bytes are filled. */
static void fill_packed(uint8_t *raw, int32_t x0, int32_t x1, int32_t value, int32_t depth)
{
    const int32_t in_byte = 8 / depth, mask = (1 << depth) - 1;
    for (int32_t x = x0; x < x1;) {
        if (x % in_byte == 0 && x + in_byte <= x1) {
            const int32_t whole = (x1 - x) / in_byte;
            memset(raw + x / in_byte, value * (255 / mask), (size_t)whole);
            x += whole * in_byte;
            continue;
        }
        const int32_t shift = 8 - depth - x * depth % 8;
        raw[x / in_byte] = (uint8_t)((raw[x / in_byte] & ~(mask << shift)) | value << shift);
        x++;
    }
}

static void fill(encoder *e, int32_t x0, int32_t x1, int32_t value)
{
    const int32_t channels = e->format->colour_type == FW_PNG_RGB ? 3 : 1;
    const size_t from = (size_t)x0 * (size_t)channels, to = (size_t)x1 * (size_t)channels;
    if (e->format->depth == 8) {
        memset(e->raw + from, value, to - from);
    } else if (e->format->depth == 16) {
        for (size_t i = from; i < to; i++) {
            e->raw[2 * i] = (uint8_t)(value >> 8);
            e->raw[2 * i + 1] = (uint8_t)value;
        }
    } else {
        fill_packed(e->raw, x0, x1, value, e->format->depth);
    }
}

static int32_t sample_of(const encoder *e, int32_t grey)
{
    return e->format->colour_type == FW_PNG_PALETTE ? e->entry_of[grey] : grey;
}

static void paint_row(encoder *e, int32_t y)
{
    if (y > 0 && fw_greys_row_repeats(e->layer, y))
        return;
    memset(e->raw, 0, e->row_bytes);
    const int32_t dark = sample_of(e, 0);
    if (dark > 0) /* NO_ENTRY: no pixel is dark */
        fill(e, 0, e->layer->width, dark);
    for (uint32_t i = e->layer->row[y]; i < e->layer->row[y + 1]; i++) {
        const fw_grey_run r = e->layer->run[i];
        fill(e, r.x0, r.x1, sample_of(e, r.grey));
    }
}

/* Kept chunks go out as they came, by type and data; libpng frames them anew. */
static void write_kept(encoder *e, int place)
{
    const fw_bytes *kept = &e->format->kept[place];
    for (size_t at = 0; at < kept->size;) {
        const uint8_t *chunk = kept->data + at;
        const size_t size = (size_t)chunk[0] << 24 | (size_t)chunk[1] << 16 |
                            (size_t)chunk[2] << 8 | (size_t)chunk[3];
        png_write_chunk(e->png, chunk + 4, chunk + 8, size);
        at += size + 12;
    }
}

/* No filter and deflate's level 1: of the settings measured on masks (filters none, up, sub, all by
 * strategies default, filtered, run-length at levels 1 and 6) the least time to write and to read
 * back. The run-length strategy gives files of a third to a half, but takes two to four times as
 * long to read. */
static void set_form(encoder *e)
{
    png_set_write_fn(e->png, e, on_write, on_flush);
    png_set_IHDR(e->png, e->info, (png_uint_32)e->layer->width, (png_uint_32)e->layer->height,
                 e->format->depth, e->format->colour_type, PNG_INTERLACE_NONE,
                 PNG_COMPRESSION_TYPE_DEFAULT, PNG_FILTER_TYPE_DEFAULT);
    if (e->format->colour_type == FW_PNG_PALETTE) {
        png_color palette[256];
        for (int i = 0; i < e->format->palette_count; i++) {
            const uint8_t *entry = e->format->palette[i];
            palette[i] = (png_color){entry[0], entry[1], entry[2]};
        }
        png_set_PLTE(e->png, e->info, palette, e->format->palette_count);
    }
    png_set_filter(e->png, PNG_FILTER_TYPE_BASE, PNG_FILTER_NONE);
    png_set_compression_level(e->png, 1);
}

static fw_status reason(const encoder *e)
{
    if (e->status != FW_OK)
        return e->status;
    return fw_fault_set(e->fault, FW_MACHINE, "cannot encode a picture, %s (%s), report this",
                        e->name, e->message);
}

/* The only frame that libpng jumps back to; it changes no local that is read after the jump. */
static fw_status write_picture(encoder *e)
{
    if (setjmp(png_jmpbuf(e->png)) != 0)
        return reason(e);
    set_form(e);
    png_write_info_before_PLTE(e->png, e->info);
    write_kept(e, FW_PNG_BEFORE_PALETTE);
    png_write_info(e->png, e->info);
    write_kept(e, FW_PNG_BEFORE_PIXELS);
    for (int32_t y = 0; y < e->layer->height; y++) {
        paint_row(e, y);
        png_write_row(e->png, e->raw);
    }
    write_kept(e, FW_PNG_AFTER_PIXELS);
    png_write_end(e->png, NULL);
    return FW_OK;
}

static fw_status encode_rows(encoder *e)
{
    e->png = png_create_write_struct(PNG_LIBPNG_VER_STRING, e, on_error, on_warning);
    if (e->png != NULL)
        e->info = png_create_info_struct(e->png);
    fw_status status = e->info != NULL ? write_picture(e) : fw_fault_memory(e->fault, holder);
    png_destroy_write_struct(&e->png, &e->info);
    return status;
}

fw_status fw_png_encode(const fw_greys *layer, const fw_png_format *format, const char *name,
                        fw_bytes *out, fw_fault *fault)
{
    encoder e = {.layer = layer, .format = format, .name = name, .out = out, .fault = fault};
    out->size = 0;
    FW_TRY(check_greys(&e));
    const size_t channels = format->colour_type == FW_PNG_RGB ? 3 : 1;
    e.row_bytes = ((size_t)layer->width * channels * format->depth + 7) / 8;
    FW_TRY(fw_allocate((void **)&e.raw, e.row_bytes, 1, holder, fault));
    fw_status status = encode_rows(&e);
    free(e.raw);
    return status;
}
