/* Encoding: decode(encode(x)) == x for every form, chunks kept, same bytes every time; and a cross
 * check of both directions with another PNG program. */
#define _GNU_SOURCE

#include "stack/png_chunks.h"
#include "stack/png_read.h"
#include "stack/png_write.h"
#include "workshop.h"

static const int form[][2] = {{0, 1}, {0, 2}, {0, 4}, {0, 8}, {0, 16}, {3, 1},
                              {3, 2}, {3, 4}, {3, 8}, {2, 8}, {2, 16}};
enum { FORMS = sizeof form / sizeof *form };

/* A palette whose dark entry is not the first one. */
static fw_png_format format_of(int colour_type, int depth)
{
    fw_png_format format = {.depth = (uint8_t)depth, .colour_type = (uint8_t)colour_type};
    if (colour_type == 3) {
        format.palette_count = (uint16_t)(1 << depth);
        for (int i = 0; i < format.palette_count; i++)
            memset(format.palette[i], 255 - i * 255 / (format.palette_count - 1), 3);
    }
    return format;
}

/* The layer with each grey replaced by one that the format can hold. */
static void restrict_greys(const fw_png_format *format, fw_greys *layer)
{
    int32_t levels[256];
    const size_t count = fw_png_levels(format, levels);
    if (count == 0)
        return;
    fw_greys fitted = {0};
    assert_int_equal(fw_greys_begin(&fitted, layer->width, layer->height, layer->full, NULL),
                     FW_OK);
    for (int32_t y = 0; y < layer->height; y++) {
        for (uint32_t i = layer->row[y]; i < layer->row[y + 1]; i++) {
            const fw_grey_run r = layer->run[i];
            const int32_t grey = levels[(size_t)r.grey % count];
            assert_int_equal(fw_greys_push(&fitted, y, r.x0, r.x1, grey, NULL), FW_OK);
        }
    }
    fw_greys_finish(&fitted);
    fw_greys_free(layer);
    *layer = fitted;
}

static void check_round_trip(int colour_type, int depth, int32_t width, int32_t height)
{
    fw_png_format format = format_of(colour_type, depth), back_format = {0};
    fw_greys layer = {0}, back = {0};
    fw_bytes file = {0}, again = {0};
    fw_fault fault = {0};
    shop_layer(width, height, fw_png_full(&format), &layer);
    restrict_greys(&format, &layer);
    assert_int_equal(fw_png_encode(&layer, &format, "a.png", &file, &fault), FW_OK);
    assert_int_equal(fw_png_decode(file.data, file.size, "a.png", &back, &back_format, &fault),
                     FW_OK);
    assert_true(fw_greys_equal(&layer, &back));
    assert_true(fw_png_format_equal(&format, &back_format));
    assert_int_equal(fw_png_encode(&back, &back_format, "b.png", &again, &fault), FW_OK);
    assert_int_equal(file.size, again.size);
    assert_memory_equal(file.data, again.data, file.size);
    fw_bytes_free(&file);
    fw_bytes_free(&again);
    fw_greys_free(&layer);
    fw_greys_free(&back);
    fw_png_format_free(&back_format);
}

static void test_round_trip_of_every_form(void **state)
{
    (void)state;
    for (int f = 0; f < FORMS; f++) {
        for (int i = 0; i < 40; i++)
            check_round_trip(form[f][0], form[f][1], 1 + (int32_t)shop_random(150),
                             1 + (int32_t)shop_random(20));
    }
}

static void append_chunk(fw_bytes *chunks, const char *type, const char *text)
{
    /* the checksum of a chunk is written anew, so any will do here */
    const uint8_t head[4] = {0, 0, 0, (uint8_t)strlen(text)};
    assert_int_equal(fw_bytes_append(chunks, head, 4, "test", NULL), FW_OK);
    assert_int_equal(fw_bytes_append(chunks, type, 4, "test", NULL), FW_OK);
    assert_int_equal(fw_bytes_append(chunks, text, strlen(text), "test", NULL), FW_OK);
    assert_int_equal(fw_bytes_append(chunks, "\0\0\0\0", 4, "test", NULL), FW_OK);
}

/* Names of a file's chunks in order, with a space after each. */
static void list_chunks(const fw_bytes *file, char *names)
{
    *names = '\0';
    for (size_t at = 8; at < file->size;) {
        const uint8_t *b = file->data + at;
        strncat(names, (const char *)b + 4, 4);
        strcat(names, " ");
        at += ((size_t)b[2] << 8 | b[3]) + 12;
    }
}

static void test_other_chunks_keep_their_place(void **state)
{
    (void)state;
    fw_png_format format = format_of(3, 8), back = {0};
    append_chunk(&format.kept[FW_PNG_BEFORE_PALETTE], "gAMA", "\1\1\1\1");
    append_chunk(&format.kept[FW_PNG_BEFORE_PALETTE], "prVt", "");
    append_chunk(&format.kept[FW_PNG_BEFORE_PIXELS], "pHYs", "\1\1\1\1\2\2\2\2\1");
    append_chunk(&format.kept[FW_PNG_AFTER_PIXELS], "tEXt", "Comment");
    append_chunk(&format.kept[FW_PNG_AFTER_PIXELS], "tEXt", "Other");
    fw_greys layer = {0};
    fw_bytes file = {0}, again = {0};
    shop_layer(30, 10, 255, &layer);
    assert_int_equal(fw_png_encode(&layer, &format, "a.png", &file, NULL), FW_OK);
    char names[256];
    list_chunks(&file, names);
    assert_string_equal(names, "IHDR gAMA prVt PLTE pHYs IDAT tEXt tEXt IEND ");
    fw_greys_free(&layer);
    assert_int_equal(fw_png_decode(file.data, file.size, "a.png", &layer, &back, NULL), FW_OK);
    assert_int_equal(fw_png_encode(&layer, &back, "a.png", &again, NULL), FW_OK);
    assert_int_equal(file.size, again.size);
    assert_memory_equal(file.data, again.data, file.size);
    assert_false(fw_png_format_equal(&format, &back)); /* those had no checksums */
    fw_png_format_free(&format);
    assert_int_equal(fw_png_format_copy(&back, &format, NULL), FW_OK);
    assert_true(fw_png_format_equal(&format, &back));
    format.kept[FW_PNG_AFTER_PIXELS].data[8] ^= 1;
    assert_false(fw_png_format_equal(&format, &back));
    fw_png_format_free(&format);
    fw_png_format_free(&back);
    fw_greys_free(&layer);
    fw_bytes_free(&file);
    fw_bytes_free(&again);
}

static void test_a_grey_without_palette_entry_is_a_fault(void **state)
{
    (void)state;
    fw_png_format format = format_of(3, 1);
    fw_greys layer = {0};
    fw_bytes file = {0};
    fw_fault fault = {0};
    assert_int_equal(fw_greys_begin(&layer, 5, 1, 255, NULL), FW_OK);
    assert_int_equal(fw_greys_push(&layer, 0, 1, 3, 128, NULL), FW_OK);
    fw_greys_finish(&layer);
    fw_status status = fw_png_encode(&layer, &format, "a.png", &file, &fault);
    assert_fault(status, &fault, FW_INPUT, "no palette entry for grey 128, a.png");
    memset(format.palette[1], 128, 3); /* now dark is missing, and four pixels are dark */
    status = fw_png_encode(&layer, &format, "a.png", &file, &fault);
    assert_fault(status, &fault, FW_INPUT, "no palette entry for grey 0");
    assert_int_equal(fw_greys_begin(&layer, 5, 1, 255, NULL), FW_OK);
    assert_int_equal(fw_greys_push(&layer, 0, 0, 5, 128, NULL), FW_OK);
    fw_greys_finish(&layer);
    assert_int_equal(fw_png_encode(&layer, &format, "a.png", &file, &fault), FW_OK);
    fw_greys_free(&layer);
    fw_bytes_free(&file);
}

/* ---- against python3-png (the pure Python reader and writer), when it is there ---- */

enum { PEER_WIDTH = 37, PEER_HEIGHT = 11 };

/* What png_peer.py puts at (x, y): a sample value, or a palette index. */
static int32_t peer_value(int32_t x, int32_t y, int32_t values)
{
    return (x / 5 + 3 * y + (x % 7 == 0 ? y : 0)) % values;
}

static bool run_peer(const char *action, const char *file, int colour_type, int depth)
{
    static char script[SHOP_PATH], command[3 * SHOP_PATH];
    snprintf(script, sizeof script, "%s", __FILE__);
    strcpy(strrchr(script, '/') + 1, "png_peer.py");
    snprintf(command, sizeof command, "/usr/bin/python3 %s %s %s %d %d", script, action, file,
             colour_type, depth);
    return system(command) == 0;
}

static int32_t peer_grey(int32_t x, int32_t y, int colour_type, int depth)
{
    const int32_t values = 1 << depth, value = peer_value(x, y, values);
    return colour_type == 3 ? 255 - value * 255 / (values - 1) : value;
}

static void check_peer(int colour_type, int depth)
{
    const char *theirs = shop_path("theirs.png"), *ours = shop_path("ours.png");
    assert_true(run_peer("write", theirs, colour_type, depth));
    static uint8_t bytes[65536];
    FILE *file = fopen(theirs, "rb");
    const size_t size = fread(bytes, 1, sizeof bytes, file);
    fclose(file);
    fw_greys layer = {0};
    fw_png_format format = {0};
    fw_bytes out = {0};
    assert_int_equal(fw_png_decode(bytes, size, theirs, &layer, &format, NULL), FW_OK);
    assert_int_equal(layer.width, PEER_WIDTH);
    assert_int_equal(layer.height, PEER_HEIGHT);
    for (int32_t y = 0; y < PEER_HEIGHT; y++) {
        for (int32_t x = 0; x < PEER_WIDTH; x++)
            assert_int_equal(fw_greys_at(&layer, x, y), peer_grey(x, y, colour_type, depth));
    }
    assert_int_equal(fw_png_encode(&layer, &format, ours, &out, NULL), FW_OK);
    shop_bytes("ours.png", out.data, out.size);
    assert_true(run_peer("check", ours, colour_type, depth));
    fw_bytes_free(&out);
    fw_greys_free(&layer);
    fw_png_format_free(&format);
}

static void test_another_program_agrees(void **state)
{
    (void)state;
    if (!run_peer("present", "-", 0, 0))
        skip();
    for (int f = 0; f < FORMS; f++)
        check_peer(form[f][0], form[f][1]);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_round_trip_of_every_form),
        cmocka_unit_test(test_other_chunks_keep_their_place),
        cmocka_unit_test(test_a_grey_without_palette_entry_is_a_fault),
        SHOP_TEST(test_another_program_agrees),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
