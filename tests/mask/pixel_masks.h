/* Small masks with one byte a pixel, for slow and obvious references, and a fixed random source. */
#ifndef PIXEL_MASKS_H
#define PIXEL_MASKS_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "mask/regions.h"

enum { SIDE = 40, AREA = SIDE * SIDE };

typedef struct pixel_mask {
    int32_t width, height;
    uint8_t at[AREA]; /* [height][width] */
} pixel_mask;

/* splitmix64 (Steele, Lea, Flood 2014, "Fast splittable pseudorandom number generators"). */
static inline uint64_t random_bits(uint64_t *state)
{
    uint64_t z = *state += 0x9e3779b97f4a7c15u;
    z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
    z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
    return z ^ (z >> 31);
}

static inline int32_t random_below(uint64_t *state, int32_t limit)
{
    return (int32_t)(random_bits(state) % (uint64_t)limit);
}

static inline bool lit(const pixel_mask *mask, int32_t x, int32_t y)
{
    return x >= 0 && y >= 0 && x < mask->width && y < mask->height &&
           mask->at[y * mask->width + x] != 0;
}

/* Every pixel by itself, lit with a chance of percent / 100. */
static inline pixel_mask random_mask(uint64_t *state, int32_t width, int32_t height,
                                     int32_t percent)
{
    pixel_mask mask = {.width = width, .height = height};
    for (int32_t i = 0; i < width * height; i++)
        mask.at[i] = random_below(state, 100) < percent;
    return mask;
}

/* Any size, emptiness and fullness included. */
static inline pixel_mask any_mask(uint64_t *state)
{
    const int32_t width = 1 + random_below(state, SIDE), height = 1 + random_below(state, SIDE);
    return random_mask(state, width, height, random_below(state, 101));
}

static inline fw_runs runs_of(const pixel_mask *mask)
{
    fw_runs set = {0};
    assert_int_equal(fw_runs_begin(&set, mask->width, mask->height, NULL), FW_OK);
    for (int32_t y = 0; y < mask->height; y++) {
        for (int32_t x = 0; x < mask->width; x++) {
            if (lit(mask, x, y))
                assert_int_equal(fw_runs_push(&set, y, x, x + 1, NULL), FW_OK);
        }
    }
    fw_runs_finish(&set);
    assert_true(fw_runs_valid(&set));
    return set;
}

/* Rows of '#' and anything else, all of one length, ended by a newline each. */
static inline pixel_mask drawn(const char *picture)
{
    pixel_mask mask = {0};
    for (int32_t x = 0; *picture != '\0'; picture++) {
        if (*picture == '\n') {
            mask.height++;
            x = 0;
            continue;
        }
        mask.at[mask.height == 0 ? x : mask.height * mask.width + x] = *picture == '#';
        x++;
        mask.width = mask.height == 0 ? x : mask.width;
    }
    return mask;
}

#define NOWHERE UINT32_MAX

/* Numbers the lit pixels that are connected with (x, y), one at a time from a stack. */
static inline void flood(const pixel_mask *mask, fw_connect connect, int32_t x, int32_t y,
                         uint32_t number, uint32_t label[static AREA])
{
    int32_t stack[AREA], depth = 0;
    label[y * mask->width + x] = number;
    stack[depth++] = y * mask->width + x;
    while (depth > 0) {
        const int32_t at = stack[--depth];
        for (int32_t step = 0; step < 9; step++) {
            const int32_t dx = step % 3 - 1, dy = step / 3 - 1;
            const int32_t u = at % mask->width + dx, v = at / mask->width + dy;
            if ((connect == FW_FOUR && dx != 0 && dy != 0) || !lit(mask, u, v) ||
                label[v * mask->width + u] != NOWHERE)
                continue;
            label[v * mask->width + u] = number;
            stack[depth++] = v * mask->width + u;
        }
    }
}

/* Labels by flood fill from each pixel in raster order; NOWHERE where dark. Returns the count. */
static inline uint32_t flood_all(const pixel_mask *mask, fw_connect connect,
                                 uint32_t label[static AREA])
{
    uint32_t count = 0;
    for (int32_t i = 0; i < AREA; i++)
        label[i] = NOWHERE;
    for (int32_t y = 0; y < mask->height; y++) {
        for (int32_t x = 0; x < mask->width; x++) {
            if (lit(mask, x, y) && label[y * mask->width + x] == NOWHERE)
                flood(mask, connect, x, y, count++, label);
        }
    }
    return count;
}

#endif
