#include "stack/png_read.h"

#include "fault/memory.h"
#include "stack/grey_rows.h"
#include "stack/png_chunks.h"
#include "stack/png_rows.h"

#include <png.h>
#include <setjmp.h>
#include <stdlib.h>
#include <string.h>

enum { MESSAGE = 128 };

/* Everything that must outlive libpng's longjmp. */
typedef struct decoder {
    fw_png_scan scan;
    fw_png_rows rows;
    int span;        /* libpng reads span[span] ... */
    size_t at;       /* ... from here on */
    uint8_t *raw[2]; /* the row before and this one, by turns */
    png_structp png;
    png_infop info;
    bool no_memory;
    char message[MESSAGE]; /* libpng's reason */
    const char *name;
    fw_greys *out;
    uint32_t run_limit;
    fw_fault *fault;
} decoder;

static _Noreturn void on_error(png_structp png, png_const_charp message)
{
    decoder *d = png_get_error_ptr(png);
    strncpy(d->message, message, MESSAGE - 1);
    longjmp(png_jmpbuf(png), 1);
}

/* What libpng only warns of, a mask is not refused for; nothing may reach stderr. */
static void on_warning(png_structp png, png_const_charp message)
{
    (void)png;
    (void)message;
}

static png_voidp on_allocate(png_structp png, png_alloc_size_t size)
{
    decoder *d = png_get_mem_ptr(png);
    void *memory = malloc(size);
    if (memory == NULL)
        d->no_memory = true;
    return memory;
}

static void on_free(png_structp png, png_voidp memory)
{
    (void)png;
    free(memory);
}

static void on_read(png_structp png, png_bytep to, size_t size)
{
    decoder *d = png_get_io_ptr(png);
    while (size > 0) {
        if (d->span == FW_PNG_SPANS)
            png_error(png, "not enough pixels");
        const fw_png_span *span = &d->scan.span[d->span];
        size_t part = span->size - d->at;
        if (part > size)
            part = size;
        if (part > 0)
            memcpy(to, span->bytes + d->at, part);
        to += part;
        size -= part;
        d->at += part;
        if (d->at == span->size) {
            d->span++;
            d->at = 0;
        }
    }
}

static fw_status reason(const decoder *d)
{
    if (d->no_memory)
        return fw_fault_memory(d->fault, "decoding a picture");
    return fw_fault_set(d->fault, FW_INPUT, "damaged picture, %s (%s), export it again", d->name,
                        d->message);
}

static fw_status take_row(decoder *d, int32_t y)
{
    const uint8_t *here = d->raw[y & 1], *above = d->raw[~y & 1];
    if (y > 0 && memcmp(here, above, d->scan.row_bytes) == 0)
        return fw_greys_repeat_row(d->out, y, d->fault);
    return fw_png_rows_push(&d->rows, here, y, d->out, d->fault);
}

/* The CRCs were checked by the scan. A benign error (a wrong Adler-32, say) is an error for us. */
static void open_picture(decoder *d)
{
    png_set_read_fn(d->png, d, on_read);
    png_set_user_limits(d->png, 65535, 65535);
    png_set_chunk_cache_max(d->png, 1);
    png_set_chunk_malloc_max(d->png, 1024 * 1024);
    png_set_crc_action(d->png, PNG_CRC_QUIET_USE, PNG_CRC_QUIET_USE);
    png_set_benign_errors(d->png, 0);
    png_read_info(d->png, d->info);
}

/* The only frame that libpng jumps back to; it changes no local that is read after the jump. */
static fw_status read_rows(decoder *d)
{
    if (setjmp(png_jmpbuf(d->png)) != 0)
        return reason(d);
    open_picture(d);
    for (int32_t y = 0; y < d->scan.height; y++) {
        png_read_row(d->png, d->raw[y & 1], NULL);
        FW_TRY(take_row(d, y));
        if (d->out->count > d->run_limit)
            return FW_OK;
    }
    png_read_end(d->png, NULL);
    fw_greys_finish(d->out);
    return FW_OK;
}

static fw_status decode_rows(decoder *d)
{
    d->png = png_create_read_struct_2(PNG_LIBPNG_VER_STRING, d, on_error, on_warning, d,
                                      on_allocate, on_free);
    if (d->png != NULL)
        d->info = png_create_info_struct(d->png);
    fw_status status =
        d->info != NULL ? read_rows(d) : fw_fault_memory(d->fault, "decoding a picture");
    png_destroy_read_struct(&d->png, &d->info, NULL);
    return status;
}

static fw_status allocate_rows(decoder *d)
{
    for (int i = 0; i < 2; i++)
        FW_TRY(
            fw_allocate((void **)&d->raw[i], d->scan.row_bytes, 1, "decoding a picture", d->fault));
    return FW_OK;
}

fw_status fw_png_decode_within(const uint8_t *bytes, size_t size, const char *name,
                               uint32_t run_limit, bool *over, fw_greys *out, fw_png_format *format,
                               fw_fault *fault)
{
    decoder d = {.name = name, .out = out, .run_limit = run_limit, .fault = fault};
    *over = false;
    FW_TRY(fw_png_scan_file(bytes, size, name, &d.scan, format, fault));
    FW_TRY(fw_greys_begin(out, d.scan.width, d.scan.height, fw_png_full(format), fault));
    fw_png_rows_begin(&d.rows, format, d.scan.width, name);
    fw_status status = allocate_rows(&d);
    if (status == FW_OK)
        status = decode_rows(&d);
    free(d.raw[0]);
    free(d.raw[1]);
    *over = status == FW_OK && out->count > run_limit;
    return status;
}

fw_status fw_png_decode(const uint8_t *bytes, size_t size, const char *name, fw_greys *out,
                        fw_png_format *format, fw_fault *fault)
{
    bool over;
    FW_TRY(fw_png_decode_within(bytes, size, name, FW_NOISE_RUNS, &over, out, format, fault));
    if (over)
        return fw_png_noise(name, fault);
    return FW_OK;
}

fw_status fw_png_noise(const char *name, fw_fault *fault)
{
    return fw_fault_set(fault, FW_INPUT,
                        "%s is noise, not a part, over %d runs of one grey in one layer, export "
                        "the mask without dithering",
                        name, FW_NOISE_RUNS);
}
