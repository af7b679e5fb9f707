/* What the tests of this room share: cmocka, a scratch folder per test, random layers, and PNG
 * files made by libpng's plain writing calls (not by the code under test). Needs _GNU_SOURCE.
 */
#ifndef TESTS_STACK_WORKSHOP_H
#define TESTS_STACK_WORKSHOP_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "mask/greys.h"
#include "stack/bytes.h"

#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <ftw.h>
#include <png.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

enum { SHOP_PATH = 1024 };

static char shop[256]; /* the scratch folder */

static inline int shop_open(void **state)
{
    (void)state;
    const char *above = getenv("TMPDIR");
    snprintf(shop, sizeof shop, "%s/falsework-stack-XXXXXX", above != NULL ? above : "/tmp");
    return mkdtemp(shop) == NULL;
}

static inline int shop_remove_one(const char *path, const struct stat *info, int kind,
                                  struct FTW *at)
{
    (void)info;
    (void)kind;
    (void)at;
    return remove(path);
}

static inline int shop_close(void **state)
{
    (void)state;
    return nftw(shop, shop_remove_one, 16, FTW_DEPTH | FTW_PHYS);
}

#define SHOP_TEST(test) cmocka_unit_test_setup_teardown(test, shop_open, shop_close)

/* A path in the scratch folder, in one of eight buffers by turns. */
static inline const char *shop_path(const char *name)
{
    static char path[8][SHOP_PATH];
    static int turn;
    turn = (turn + 1) % 8;
    snprintf(path[turn], SHOP_PATH, "%s/%s", shop, name);
    return path[turn];
}

static inline void shop_folder(const char *name)
{
    assert_int_equal(mkdir(shop_path(name), 0755), 0);
}

static inline void shop_bytes(const char *name, const void *bytes, size_t size)
{
    FILE *file = fopen(shop_path(name), "wb");
    assert_non_null(file);
    assert_int_equal(fwrite(bytes, 1, size, file), size);
    assert_int_equal(fclose(file), 0);
}

static inline void shop_text(const char *name, const char *text)
{
    shop_bytes(name, text, strlen(text));
}

static inline bool shop_exists(const char *name)
{
    struct stat info;
    return lstat(shop_path(name), &info) == 0;
}

/* Entries of a folder, "." and ".." not counted. */
static inline int shop_count(const char *name)
{
    DIR *folder = opendir(shop_path(name));
    assert_non_null(folder);
    int count = 0;
    const struct dirent *item;
    while ((item = readdir(folder)) != NULL)
        count += strcmp(item->d_name, ".") != 0 && strcmp(item->d_name, "..") != 0;
    closedir(folder);
    return count;
}

/* The fault is one of the right sort and its line holds `words`. */
static inline void assert_fault(fw_status status, const fw_fault *fault, fw_status expected,
                                const char *words)
{
    if (status != expected || strstr(fault->text, words) == NULL)
        print_message("status %d, line \"%s\", wanted %d, \"%s\"\n", (int)status, fault->text,
                      (int)expected, words);
    assert_int_equal(status, expected);
    assert_non_null(strstr(fault->text, words));
    assert_null(strchr(fault->text, '\n'));
}

/* Xorshift64* (Vigna 2016), seeded: the same everywhere. */
static uint64_t shop_seed = 88172645463325252ULL;

static inline uint32_t shop_random(uint32_t below)
{
    shop_seed ^= shop_seed >> 12;
    shop_seed ^= shop_seed << 25;
    shop_seed ^= shop_seed >> 27;
    return (uint32_t)((shop_seed * 2685821657736338717ULL) >> 33) % below;
}

/* A row of runs of any grey, up to `longest` px each. */
static inline void shop_row(fw_greys *layer, int32_t y, uint32_t longest)
{
    for (int32_t x = (int32_t)shop_random(4); x < layer->width;) {
        int32_t end = x + 1 + (int32_t)shop_random(longest);
        end = end < layer->width ? end : layer->width;
        const uint32_t pick = shop_random(3);
        int32_t grey = pick == 0 ? layer->full : 0;
        if (pick == 2)
            grey = (int32_t)shop_random((uint32_t)layer->full + 1);
        assert_int_equal(fw_greys_push(layer, y, x, end, grey, NULL), FW_OK);
        x = end;
    }
}

/* A layer with long and short runs, rows that repeat, rows that shift, and empty rows. */
static inline void shop_layer(int32_t width, int32_t height, int32_t full, fw_greys *layer)
{
    assert_int_equal(fw_greys_begin(layer, width, height, full, NULL), FW_OK);
    for (int32_t y = 0; y < height; y++) {
        const uint32_t kind = shop_random(5);
        const uint64_t seed = shop_seed;
        if (kind == 1)
            shop_row(layer, y, 3);
        else if (kind > 1)
            shop_row(layer, y, (uint32_t)width);
        if (kind > 2 && y + 1 < height) { /* once more, the same */
            shop_seed = seed;
            shop_row(layer, ++y, (uint32_t)width);
        }
    }
    fw_greys_finish(layer);
}

/* A picture for the writer below. */
typedef struct shop_picture {
    int32_t width, height;
    int depth, colour_type; /* as in IHDR */
    bool interlaced;
    int palette_count;
    png_color palette[256];
    int transparent;         /* number of tRNS entries for a palette, 0 = none */
    const uint16_t *samples; /* [height][width][channels] */
    const uint8_t *text;     /* a chunk "teXt" to put before the pixels, NULL = none */
} shop_picture;

static inline int shop_channels(int colour_type)
{
    return colour_type == 2 ? 3 : colour_type == 4 ? 2 : colour_type == 6 ? 4 : 1;
}

static inline void shop_png_append(png_structp png, png_bytep bytes, size_t size)
{
    assert_int_equal(fw_bytes_append(png_get_io_ptr(png), bytes, size, "test", NULL), FW_OK);
}

static inline void shop_pack_row(const shop_picture *p, int32_t y, uint8_t *raw, size_t size)
{
    const size_t n = (size_t)p->width * (size_t)shop_channels(p->colour_type);
    memset(raw, 0, size);
    for (size_t i = 0; i < n; i++) {
        const unsigned value = p->samples[(size_t)y * n + i];
        if (p->depth == 16) {
            raw[2 * i] = (uint8_t)(value >> 8);
            raw[2 * i + 1] = (uint8_t)value;
        } else {
            const size_t bit = i * (size_t)p->depth;
            raw[bit / 8] |= (uint8_t)(value << (8 - (size_t)p->depth - bit % 8));
        }
    }
}

/* Writes p as a PNG file with libpng's plain calls. */
static inline void shop_png(const shop_picture *p, fw_bytes *out)
{
    out->size = 0;
    png_structp png = png_create_write_struct(PNG_LIBPNG_VER_STRING, NULL, NULL, NULL);
    png_infop info = png_create_info_struct(png);
    png_set_write_fn(png, out, shop_png_append, NULL);
    png_set_IHDR(png, info, (png_uint_32)p->width, (png_uint_32)p->height, p->depth, p->colour_type,
                 p->interlaced ? PNG_INTERLACE_ADAM7 : PNG_INTERLACE_NONE,
                 PNG_COMPRESSION_TYPE_DEFAULT, PNG_FILTER_TYPE_DEFAULT);
    if (p->palette_count > 0)
        png_set_PLTE(png, info, p->palette, p->palette_count);
    if (p->transparent > 0) {
        static png_byte alpha[256];
        png_set_tRNS(png, info, alpha, p->transparent, NULL);
    }
    png_set_check_for_invalid_index(png, 0);
    png_write_info(png, info);
    if (p->text != NULL)
        png_write_chunk(png, (png_const_bytep) "teXt", p->text, strlen((const char *)p->text));
    const size_t size = png_get_rowbytes(png, info);
    uint8_t *raw = malloc(size);
    const int passes = png_set_interlace_handling(png);
    for (int pass = 0; pass < passes; pass++) {
        for (int32_t y = 0; y < p->height; y++) {
            shop_pack_row(p, y, raw, size);
            png_write_row(png, raw);
        }
    }
    png_write_end(png, NULL);
    free(raw);
    png_destroy_write_struct(&png, &info);
}

/* An 8-bit grey file of a layer, by the writer above. */
static inline void shop_png_of(const fw_greys *layer, fw_bytes *out)
{
    uint16_t *samples = calloc((size_t)layer->width * (size_t)layer->height, sizeof *samples);
    for (int32_t y = 0; y < layer->height; y++) {
        for (uint32_t i = layer->row[y]; i < layer->row[y + 1]; i++) {
            for (int32_t x = layer->run[i].x0; x < layer->run[i].x1; x++)
                samples[y * layer->width + x] = (uint16_t)layer->run[i].grey;
        }
    }
    const shop_picture p = {
        .width = layer->width, .height = layer->height, .depth = 8, .samples = samples};
    shop_png(&p, out);
    free(samples);
}

#endif
