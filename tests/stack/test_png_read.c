/* Decoding: every colour type and depth against the pixels that went in; every refusal; truncated
 * and flipped files. */
#define _GNU_SOURCE

#include "stack/png_read.h"
#include "workshop.h"

#include <zlib.h>

/* Samples with dark, lit and mixed spans, so that the span skipping meets all alignments. */
static uint16_t *random_samples(int32_t width, int32_t height, int channels, uint32_t values)
{
    uint16_t *samples = calloc((size_t)(width * height * channels), sizeof *samples);
    for (int32_t y = 0; y < height; y++) {
        uint16_t *row = samples + (size_t)y * (size_t)(width * channels);
        if (y > 0 && shop_random(3) == 0) {
            memcpy(row, row - width * channels, (size_t)(width * channels) * sizeof *row);
            continue;
        }
        for (int32_t x = 0; x < width;) {
            const uint32_t pick = shop_random(4);
            const uint32_t value = pick == 0 ? 0 : pick == 1 ? values - 1 : shop_random(values);
            int32_t end = x + 1 + (int32_t)shop_random(pick < 2 ? 60 : 3);
            for (; x < end && x < width; x++) {
                for (int c = 0; c < channels; c++)
                    row[x * channels + c] = (uint16_t)value;
            }
        }
    }
    return samples;
}

static void assert_pixels(const fw_greys *layer, const shop_picture *p)
{
    const int channels = shop_channels(p->colour_type);
    assert_int_equal(layer->width, p->width);
    assert_int_equal(layer->height, p->height);
    for (int32_t y = 0; y < p->height; y++) {
        for (int32_t x = 0; x < p->width; x++) {
            int32_t grey = p->samples[(y * p->width + x) * channels];
            if (p->colour_type == 3)
                grey = p->palette[grey].red;
            assert_int_equal(fw_greys_at(layer, x, y), grey);
        }
    }
    for (int32_t y = 0; y < p->height; y++) { /* canonical: no two runs that could be one */
        for (uint32_t i = layer->row[y] + 1; i < layer->row[y + 1]; i++)
            assert_false(layer->run[i].x0 == layer->run[i - 1].x1 &&
                         layer->run[i].grey == layer->run[i - 1].grey);
    }
}

static void check_form(int colour_type, int depth, int32_t width, int32_t height)
{
    shop_picture p = {.width = width, .height = height, .depth = depth, .colour_type = colour_type};
    uint32_t values = 1u << depth;
    if (colour_type == 3) {
        p.palette_count = (int)(values < 7 ? values : 7);
        values = (uint32_t)p.palette_count;
        for (int i = 0; i < p.palette_count; i++) {
            const png_byte grey = (png_byte)(i == 2 ? 255 : 40 * ((i + 4) % 7));
            p.palette[i] = (png_color){grey, grey, grey};
        }
    }
    uint16_t *samples = random_samples(width, height, shop_channels(colour_type), values);
    p.samples = samples;
    fw_bytes file = {0};
    fw_greys layer = {0};
    fw_png_format format = {0};
    fw_fault fault;
    shop_png(&p, &file);
    const fw_status status = fw_png_decode(file.data, file.size, "a.png", &layer, &format, &fault);
    if (status != FW_OK)
        print_message("%s\n", fault.text);
    assert_int_equal(status, FW_OK);
    assert_int_equal(layer.full, colour_type == 3 ? 255 : (1 << depth) - 1);
    assert_int_equal(format.depth, depth);
    assert_int_equal(format.colour_type, colour_type);
    assert_pixels(&layer, &p);
    fw_png_format_free(&format);
    fw_greys_free(&layer);
    fw_bytes_free(&file);
    free(samples);
}

static void test_every_form_gives_its_pixels(void **state)
{
    (void)state;
    static const int form[][2] = {{0, 1}, {0, 2}, {0, 4}, {0, 8}, {0, 16}, {3, 1},
                                  {3, 2}, {3, 4}, {3, 8}, {2, 8}, {2, 16}};
    static const int32_t width[] = {1, 2, 7, 8, 9, 31, 64, 65, 200, 333};
    for (size_t f = 0; f < sizeof form / sizeof *form; f++) {
        for (size_t w = 0; w < sizeof width / sizeof *width; w++)
            check_form(form[f][0], form[f][1], width[w], 1 + (int32_t)shop_random(12));
    }
}

/* Decodes and expects a refusal with these words. */
static void refuse(const fw_bytes *file, const char *words)
{
    fw_greys layer = {0};
    fw_png_format format = {0};
    fw_fault fault = {0};
    const fw_status status =
        fw_png_decode(file->data, file->size, "a.png", &layer, &format, &fault);
    assert_fault(status, &fault, FW_INPUT, words);
    assert_non_null(strstr(fault.text, "a.png"));
    fw_png_format_free(&format);
    fw_greys_free(&layer);
}

static void refuse_picture(const shop_picture *p, const char *words)
{
    fw_bytes file = {0};
    shop_png(p, &file);
    refuse(&file, words);
    fw_bytes_free(&file);
}

static void test_colour_is_refused_with_its_first_pixel(void **state)
{
    (void)state;
    uint16_t rgb[4 * 3 * 3] = {0};
    for (int i = 0; i < 9; i++)
        rgb[i] = 200;
    rgb[(2 * 4 + 1) * 3 + 2] = 77; /* row 2, column 1, blue */
    const shop_picture p = {.width = 4, .height = 3, .depth = 8, .colour_type = 2, .samples = rgb};
    refuse_picture(&p, "red 0, green 0, blue 77 at pixel (1, 2)");
    const shop_picture deep = {
        .width = 4, .height = 3, .depth = 16, .colour_type = 2, .samples = rgb};
    refuse_picture(&deep, "at pixel (1, 2)");
}

static void test_colour_in_a_palette_is_refused_only_where_used(void **state)
{
    (void)state;
    uint16_t index[6] = {0, 0, 1, 0, 0, 0};
    shop_picture p = {.width = 3,
                      .height = 2,
                      .depth = 2,
                      .colour_type = 3,
                      .palette_count = 3,
                      .palette = {{0, 0, 0}, {255, 255, 255}, {9, 8, 7}},
                      .samples = index};
    fw_bytes file = {0};
    fw_greys layer = {0};
    fw_png_format format = {0};
    shop_png(&p, &file);
    assert_int_equal(fw_png_decode(file.data, file.size, "a.png", &layer, &format, NULL), FW_OK);
    int32_t levels[256];
    assert_int_equal(fw_png_levels(&format, levels), 2);
    assert_int_equal(levels[0], 0);
    assert_int_equal(levels[1], 255);
    index[4] = 2;
    refuse_picture(&p, "red 9, green 8, blue 7 at pixel (1, 1)");
    index[4] = 3;
    refuse_picture(&p, "palette entry 3 of 3 at pixel (1, 1)");
    fw_png_format_free(&format);
    fw_greys_free(&layer);
    fw_bytes_free(&file);
}

static void test_what_is_no_mask_is_refused(void **state)
{
    (void)state;
    const uint16_t samples[64] = {0};
    shop_picture p = {.width = 4, .height = 4, .depth = 8, .colour_type = 4, .samples = samples};
    refuse_picture(&p, "alpha");
    p.colour_type = 6;
    refuse_picture(&p, "alpha");
    p.colour_type = 0;
    p.interlaced = true;
    refuse_picture(&p, "interlaced");
    p.interlaced = false;
    p.colour_type = 3;
    p.palette_count = 2;
    p.transparent = 1;
    refuse_picture(&p, "tRNS");
    const fw_bytes text = {(uint8_t *)(uintptr_t) "hello, world", 12, 12};
    refuse(&text, "not a PNG");
    const fw_bytes empty = {(uint8_t *)(uintptr_t) "", 0, 0};
    refuse(&empty, "empty");
}

static void put_big_endian(uint8_t *to, uint32_t value)
{
    for (int i = 0; i < 4; i++)
        to[i] = (uint8_t)(value >> (24 - 8 * i));
}

/* Puts the right checksum on the chunk that starts at `at`. */
static void seal_chunk(uint8_t *at)
{
    const uint32_t size =
        (uint32_t)at[0] << 24 | (uint32_t)at[1] << 16 | (uint32_t)at[2] << 8 | (uint32_t)at[3];
    put_big_endian(at + 8 + size, (uint32_t)crc32(0, at + 4, size + 4));
}

static void small_file(fw_bytes *file)
{
    uint16_t samples[9 * 5];
    for (int i = 0; i < 45; i++)
        samples[i] = (uint16_t)(i % 4 == 0 ? 255 : i);
    const shop_picture p = {
        .width = 9, .height = 5, .depth = 8, .samples = samples, .text = (const uint8_t *)"note"};
    shop_png(&p, file);
}

static void test_impossible_headers_are_refused(void **state)
{
    (void)state;
    fw_bytes file = {0};
    small_file(&file);
    uint8_t *header = file.data + 8;
    static const struct {
        uint32_t width, height;
        const char *words;
    } bad[] = {
        {0, 5, "impossible mask size"},     {9, 0, "impossible mask size"},
        {65536, 5, "impossible mask size"}, {0xffffffffu, 0xffffffffu, "impossible mask size"},
        {65535, 65535, "more than its"},    {9, 6, "damaged picture"},
        {9, 4, "damaged picture"},          {10, 5, "damaged picture"}};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        put_big_endian(header + 8, bad[i].width);
        put_big_endian(header + 12, bad[i].height);
        seal_chunk(header);
        refuse(&file, bad[i].words);
    }
    fw_bytes_free(&file);
}

/* Inserts a chunk at byte `at` of a file. */
static void insert_chunk(fw_bytes *file, size_t at, const char *type, size_t size)
{
    uint8_t *chunk = calloc(size + 12, 1);
    put_big_endian(chunk, (uint32_t)size);
    memcpy(chunk + 4, type, 4);
    seal_chunk(chunk);
    fw_bytes longer = {0};
    assert_int_equal(fw_bytes_append(&longer, file->data, at, "test", NULL), FW_OK);
    assert_int_equal(fw_bytes_append(&longer, chunk, size + 12, "test", NULL), FW_OK);
    assert_int_equal(fw_bytes_append(&longer, file->data + at, file->size - at, "test", NULL),
                     FW_OK);
    free(chunk);
    fw_bytes_free(file);
    *file = longer;
}

static void refuse_with_chunk(const char *type, size_t size, const char *words)
{
    fw_bytes file = {0};
    small_file(&file);
    insert_chunk(&file, 33, type, size);
    refuse(&file, words);
    fw_bytes_free(&file);
}

static void test_chunks_out_of_place_are_refused(void **state)
{
    (void)state;
    refuse_with_chunk("acTL", 8, "animation");
    refuse_with_chunk("PLTE", 6, "PLTE");
    refuse_with_chunk("IHDR", 13, "IHDR");
    refuse_with_chunk("ABCD", 3, "ABCD");
    refuse_with_chunk("IEND", 0, "no pixels");
    refuse_with_chunk("IDAT", 4, "apart"); /* the text chunk stands between */
    refuse_with_chunk("zzZz", 2 * 1024 * 1024, "1 MiB");
}

static void test_bytes_after_the_end_are_ignored(void **state)
{
    (void)state;
    fw_bytes file = {0};
    small_file(&file);
    assert_int_equal(fw_bytes_append(&file, "trailing", 8, "test", NULL), FW_OK);
    fw_greys layer = {0};
    fw_png_format format = {0};
    assert_int_equal(fw_png_decode(file.data, file.size, "a.png", &layer, &format, NULL), FW_OK);
    fw_png_format_free(&format);
    fw_greys_free(&layer);
    fw_bytes_free(&file);
}

/* Every proper prefix is refused in one line. Copies are exact, so that reading past the end shows
 * under the address sanitizer. */
static void test_every_prefix_is_refused(void **state)
{
    (void)state;
    fw_bytes file = {0};
    small_file(&file);
    for (size_t size = 0; size < file.size; size++) {
        fw_bytes part = {malloc(size > 0 ? size : 1), size, size};
        memcpy(part.data, file.data, size);
        refuse(&part, size == 0 ? "empty" : "truncated picture");
        fw_bytes_free(&part);
    }
    fw_bytes_free(&file);
}

/* The same with the checksums put right, so that the damage reaches the decoder. */
static void seal_all(fw_bytes *file)
{
    for (size_t at = 8; at + 12 <= file->size;) {
        const uint8_t *b = file->data + at;
        const size_t size = (size_t)b[0] << 24 | (size_t)b[1] << 16 | (size_t)b[2] << 8 | b[3];
        if (size > file->size - at - 12)
            return;
        seal_chunk(file->data + at);
        at += size + 12;
    }
}

static void test_flipped_bits_never_crash(void **state)
{
    (void)state;
    fw_bytes file = {0}, bad = {0};
    fw_greys layer = {0};
    fw_png_format format = {0};
    int refused = 0;
    small_file(&file);
    for (size_t bit = 0; bit < 8 * file.size; bit++) {
        for (int sealed = 0; sealed < 2; sealed++) {
            bad.size = 0;
            assert_int_equal(fw_bytes_append(&bad, file.data, file.size, "test", NULL), FW_OK);
            bad.data[bit / 8] ^= (uint8_t)(1 << bit % 8);
            if (sealed)
                seal_all(&bad);
            fw_fault fault = {0};
            const fw_status status =
                fw_png_decode(bad.data, bad.size, "a.png", &layer, &format, &fault);
            assert_true(status == FW_OK || status == FW_INPUT);
            if (!sealed)
                assert_int_equal(status, FW_INPUT); /* every bit is under a checksum */
            if (status != FW_OK) {
                refused++;
                assert_true(strlen(fault.text) > 10 && strchr(fault.text, '\n') == NULL);
            }
        }
    }
    assert_true(refused > (int)(8 * file.size));
    fw_png_format_free(&format);
    fw_greys_free(&layer);
    fw_bytes_free(&bad);
    fw_bytes_free(&file);
}

static void test_noise_is_refused(void **state)
{
    (void)state;
    const int32_t side = 2100; /* 4.41 million pixels of changing grey */
    uint16_t *samples = calloc((size_t)(side * side), sizeof *samples);
    for (int32_t i = 0; i < side * side; i++)
        samples[i] = (uint16_t)(1 + i % 2);
    const shop_picture p = {.width = side, .height = side, .depth = 8, .samples = samples};
    fw_bytes file = {0};
    shop_png(&p, &file);
    refuse(&file, "noise, not a part");
    fw_greys layer = {0};
    fw_png_format format = {0};
    bool over;
    assert_int_equal(
        fw_png_decode_within(file.data, file.size, "a.png", 1000, &over, &layer, &format, NULL),
        FW_OK);
    assert_true(over);
    fw_png_format_free(&format);
    fw_greys_free(&layer);
    fw_bytes_free(&file);
    free(samples);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_every_form_gives_its_pixels),
        cmocka_unit_test(test_colour_is_refused_with_its_first_pixel),
        cmocka_unit_test(test_colour_in_a_palette_is_refused_only_where_used),
        cmocka_unit_test(test_what_is_no_mask_is_refused),
        cmocka_unit_test(test_impossible_headers_are_refused),
        cmocka_unit_test(test_chunks_out_of_place_are_refused),
        cmocka_unit_test(test_bytes_after_the_end_are_ignored),
        cmocka_unit_test(test_every_prefix_is_refused),
        cmocka_unit_test(test_flipped_bits_never_crash),
        cmocka_unit_test(test_noise_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
