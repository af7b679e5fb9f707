#include "stack/png_format.h"

#include <stdlib.h>
#include <string.h>

enum { COLOUR_PALETTE = 3 };

int32_t fw_png_full(const fw_png_format *format)
{
    return format->colour_type == COLOUR_PALETTE ? 255 : (1 << format->depth) - 1;
}

static bool is_grey(const uint8_t entry[3])
{
    return entry[0] == entry[1] && entry[1] == entry[2];
}

size_t fw_png_levels(const fw_png_format *format, int32_t *levels)
{
    if (format->colour_type != COLOUR_PALETTE)
        return 0;
    bool present[256] = {false};
    for (size_t i = 0; i < format->palette_count; i++) {
        if (is_grey(format->palette[i]))
            present[format->palette[i][0]] = true;
    }
    size_t count = 0;
    for (int32_t grey = 0; grey < 256; grey++) {
        if (present[grey])
            levels[count++] = grey;
    }
    return count;
}

static bool bytes_equal(const fw_bytes *a, const fw_bytes *b)
{
    return a->size == b->size && (a->size == 0 || memcmp(a->data, b->data, a->size) == 0);
}

bool fw_png_format_equal(const fw_png_format *a, const fw_png_format *b)
{
    if (a->depth != b->depth || a->colour_type != b->colour_type ||
        a->palette_count != b->palette_count)
        return false;
    if (memcmp(a->palette, b->palette, a->palette_count * sizeof a->palette[0]) != 0)
        return false;
    for (int place = 0; place < FW_PNG_PLACES; place++) {
        if (!bytes_equal(&a->kept[place], &b->kept[place]))
            return false;
    }
    return true;
}

size_t fw_png_format_size(const fw_png_format *format)
{
    size_t size = sizeof *format;
    for (int place = 0; place < FW_PNG_PLACES; place++)
        size += format->kept[place].capacity;
    return size;
}

fw_status fw_png_format_copy(const fw_png_format *format, fw_png_format *copy, fw_fault *fault)
{
    copy->depth = format->depth;
    copy->colour_type = format->colour_type;
    copy->palette_count = format->palette_count;
    memcpy(copy->palette, format->palette, sizeof copy->palette);
    for (int place = 0; place < FW_PNG_PLACES; place++) {
        const fw_bytes *from = &format->kept[place];
        copy->kept[place].size = 0;
        FW_TRY(fw_bytes_append(&copy->kept[place], from->data, from->size,
                               "kept chunks of a picture", fault));
    }
    return FW_OK;
}

void fw_png_format_free(fw_png_format *format)
{
    for (int place = 0; place < FW_PNG_PLACES; place++)
        fw_bytes_free(&format->kept[place]);
    *format = (fw_png_format){0};
}
