#include "stack/png_chunks.h"

#include <string.h>
#include <zlib.h>

/* Chunk layout: ISO/IEC 15948, 5.3: length (4, big-endian), type (4), data, CRC (4) of type and
 * data. */
enum { SIGNATURE = 8, CHUNK_FRAME = 12, HEADER_DATA = 13 };
enum { SIDE_LIMIT = 65535, KEPT_LIMIT = 1024 * 1024 };

/* One byte of deflate stands for at most 1032 bytes: a match of 258 in 2 bits (RFC 1951, 3.2.5). */
enum { DEFLATE_RATIO = 1032 };

typedef struct walk {
    const uint8_t *bytes;
    size_t size, at;
    const char *name;
    fw_png_scan *scan;
    fw_png_format *format;
    size_t kept; /* bytes of kept chunks */
    fw_fault *fault;
} walk;

typedef struct chunk {
    const uint8_t *start; /* of the whole chunk */
    const uint8_t *data;
    size_t size;  /* of data */
    size_t whole; /* with length, type and CRC */
    char type[5];
} chunk;

static uint32_t big_endian(const uint8_t *b)
{
    return (uint32_t)b[0] << 24 | (uint32_t)b[1] << 16 | (uint32_t)b[2] << 8 | b[3];
}

static bool is(const chunk *c, const char *type)
{
    return memcmp(c->type, type, 4) == 0;
}

static fw_status damaged(walk *w, const char *how)
{
    return fw_fault_set(w->fault, FW_INPUT, "damaged picture, %s %s, export it again", w->name,
                        how);
}

static fw_status truncated(walk *w)
{
    return fw_fault_set(w->fault, FW_INPUT,
                        "truncated picture, %s breaks off after %zu bytes, export it again",
                        w->name, w->size);
}

static bool type_is_letters(const uint8_t *type)
{
    for (int i = 0; i < 4; i++) {
        const int lower = type[i] | 0x20;
        if (lower < 'a' || lower > 'z')
            return false;
    }
    return true;
}

/* Reads the chunk at w->at and steps over it. */
static fw_status next_chunk(walk *w, chunk *c)
{
    const size_t left = w->size - w->at;
    if (left < CHUNK_FRAME)
        return truncated(w);
    c->start = w->bytes + w->at;
    c->data = c->start + 8;
    c->size = big_endian(c->start);
    memcpy(c->type, c->start + 4, 4);
    c->type[4] = '\0';
    if (!type_is_letters(c->start + 4))
        return damaged(w, "holds something that is not a PNG chunk");
    if (c->size > left - CHUNK_FRAME)
        return truncated(w);
    c->whole = c->size + CHUNK_FRAME;
    const uLong crc = crc32_z(0, c->start + 4, c->size + 4);
    if (crc != big_endian(c->data + c->size))
        return fw_fault_set(w->fault, FW_INPUT,
                            "damaged picture, %s has a wrong checksum in its %s chunk, export it "
                            "again",
                            w->name, c->type);
    w->at += c->whole;
    return FW_OK;
}

static bool depth_fits(int colour_type, int depth)
{
    switch (colour_type) {
    case FW_PNG_GREY:
        return depth == 1 || depth == 2 || depth == 4 || depth == 8 || depth == 16;
    case FW_PNG_PALETTE:
        return depth == 1 || depth == 2 || depth == 4 || depth == 8;
    default:
        return depth == 8 || depth == 16;
    }
}

static fw_status refuse(walk *w, const char *what, const char *instead)
{
    return fw_fault_set(w->fault, FW_INPUT, "%s, %s, %s", what, w->name, instead);
}

static fw_status read_form(walk *w, const uint8_t *data)
{
    const int depth = data[8], colour_type = data[9];
    if (colour_type == 4 || colour_type == 6)
        return refuse(w, "a mask with an alpha channel", "export grey without transparency");
    if (colour_type != FW_PNG_GREY && colour_type != FW_PNG_RGB && colour_type != FW_PNG_PALETTE)
        return damaged(w, "names a colour type that PNG does not have");
    if (!depth_fits(colour_type, depth) || data[10] != 0 || data[11] != 0 || data[12] > 1)
        return damaged(w, "has a header that PNG does not allow");
    if (data[12] != 0)
        return refuse(w, "an interlaced mask", "export it without interlacing");
    w->format->depth = (uint8_t)depth;
    w->format->colour_type = (uint8_t)colour_type;
    return FW_OK;
}

static fw_status read_header(walk *w)
{
    chunk c;
    FW_TRY(next_chunk(w, &c));
    if (!is(&c, "IHDR") || c.size != HEADER_DATA)
        return damaged(w, "does not begin with a header");
    const uint32_t width = big_endian(c.data), height = big_endian(c.data + 4);
    if (width < 1 || height < 1 || width > SIDE_LIMIT || height > SIDE_LIMIT)
        return fw_fault_set(
            w->fault, FW_INPUT,
            "impossible mask size, %s says %lu x %lu px, 1 to %d a side can be read", w->name,
            (unsigned long)width, (unsigned long)height, SIDE_LIMIT);
    FW_TRY(read_form(w, c.data));
    const size_t channels = w->format->colour_type == FW_PNG_RGB ? 3 : 1;
    w->scan->width = (int32_t)width;
    w->scan->height = (int32_t)height;
    w->scan->row_bytes = (width * channels * w->format->depth + 7) / 8;
    w->scan->span[FW_PNG_SPAN_HEADER] = (fw_png_span){w->bytes, w->at};
    return FW_OK;
}

static fw_status read_palette(walk *w, const chunk *c)
{
    fw_png_format *format = w->format;
    const size_t entries = c->size / 3;
    if (format->palette_count > 0 || c->size % 3 != 0 || entries < 1 ||
        entries > (size_t)1 << format->depth)
        return damaged(w, "has a palette that PNG does not allow");
    format->palette_count = (uint16_t)entries;
    memcpy(format->palette, c->data, c->size);
    w->scan->span[FW_PNG_SPAN_PALETTE] = (fw_png_span){c->start, c->whole};
    return FW_OK;
}

static fw_status read_pixels(walk *w, const chunk *c)
{
    fw_png_span *pixels = &w->scan->span[FW_PNG_SPAN_PIXELS];
    if (pixels->size == 0)
        pixels->bytes = c->start;
    if (pixels->bytes + pixels->size != c->start)
        return damaged(w, "has its IDAT chunks apart from each other");
    if (w->format->colour_type == FW_PNG_PALETTE && w->format->palette_count == 0)
        return damaged(w, "has no palette before its pixels");
    pixels->size += c->whole;
    return FW_OK;
}

static fw_status keep(walk *w, const chunk *c)
{
    if (is(c, "tRNS"))
        return refuse(w, "a mask with transparency (tRNS)", "export grey without transparency");
    if (is(c, "acTL"))
        return refuse(w, "an animation", "export one plain picture a layer");
    w->kept += c->whole;
    if (w->kept > KEPT_LIMIT)
        return refuse(w, "over 1 MiB of text or colour profile in one mask", "export it without");
    int place = FW_PNG_BEFORE_PALETTE;
    if (w->scan->span[FW_PNG_SPAN_PIXELS].size > 0)
        place = FW_PNG_AFTER_PIXELS;
    else if (w->format->palette_count > 0)
        place = FW_PNG_BEFORE_PIXELS;
    return fw_bytes_append(&w->format->kept[place], c->start, c->whole, "kept chunks of a picture",
                           w->fault);
}

/* A lower-case first letter marks a chunk that a reader need not know (ISO/IEC 15948, 5.4). A
 * palette in an RGB file is a mere suggestion and kept like those. */
static bool may_be_kept(const walk *w, const chunk *c)
{
    return (c->type[0] & 0x20) != 0 || (is(c, "PLTE") && w->format->colour_type == FW_PNG_RGB);
}

static fw_status take_chunk(walk *w, const chunk *c)
{
    if (is(c, "IDAT"))
        return read_pixels(w, c);
    if (may_be_kept(w, c))
        return keep(w, c);
    const bool pixels_came = w->scan->span[FW_PNG_SPAN_PIXELS].size > 0;
    if (is(c, "PLTE") && w->format->colour_type == FW_PNG_PALETTE && !pixels_came)
        return read_palette(w, c);
    return fw_fault_set(w->fault, FW_INPUT,
                        "damaged picture, %s has a %s chunk where none may be, export it again",
                        w->name, c->type);
}

static fw_status read_chunks(walk *w)
{
    for (;;) {
        chunk c;
        FW_TRY(next_chunk(w, &c));
        if (is(&c, "IEND")) {
            w->scan->span[FW_PNG_SPAN_END] = (fw_png_span){c.start, c.whole};
            return c.size == 0 ? FW_OK : damaged(w, "has an end chunk with data");
        }
        FW_TRY(take_chunk(w, &c));
    }
}

static fw_status check_promise(walk *w)
{
    const fw_png_scan *scan = w->scan;
    const uint64_t raw = ((uint64_t)scan->row_bytes + 1) * (uint64_t)scan->height;
    const uint64_t compressed = scan->span[FW_PNG_SPAN_PIXELS].size;
    if (compressed == 0)
        return damaged(w, "has no pixels");
    if (raw > compressed * DEFLATE_RATIO)
        return fw_fault_set(w->fault, FW_INPUT,
                            "damaged picture, %s promises %d x %d px, more than its %zu bytes can "
                            "hold, export it again",
                            w->name, (int)scan->width, (int)scan->height, w->size);
    return FW_OK;
}

fw_status fw_png_scan_file(const uint8_t *bytes, size_t size, const char *name, fw_png_scan *scan,
                           fw_png_format *format, fw_fault *fault)
{
    static const uint8_t signature[SIGNATURE] = {0x89, 'P', 'N', 'G', '\r', '\n', 0x1a, '\n'};
    *scan = (fw_png_scan){0};
    format->palette_count = 0;
    for (int place = 0; place < FW_PNG_PLACES; place++)
        format->kept[place].size = 0;
    walk w = {bytes, size, SIGNATURE, name, scan, format, 0, fault};
    if (size == 0)
        return refuse(&w, "an empty file", "export it again");
    const size_t compare = size < SIGNATURE ? size : SIGNATURE;
    if (memcmp(bytes, signature, compare) != 0)
        return refuse(&w, "not a PNG picture", "a stack is made of PNG masks");
    if (size < SIGNATURE)
        return truncated(&w);
    FW_TRY(read_header(&w));
    FW_TRY(read_chunks(&w));
    return check_promise(&w);
}
