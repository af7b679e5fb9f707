/* One bit a pixel of a layer, for questions about single pixels that runs answer too slowly.
 *
 * Rows of 32-bit words, pixel x in bit x % 32 of word x / 32. A word of zeros stands on either side
 * of a row, so that words -1 .. columns and pixels -32 .. width may be read; rows may not be
 * outside. Filled and cleared by runs, so that keeping it up costs what changed. */
#ifndef FW_BITPLANE_H
#define FW_BITPLANE_H

#include "fault/fault.h"

#include <stdint.h>

typedef struct fw_bitplane {
    int32_t width, height; /* px */
    int32_t columns;       /* words in a row, without the two that pad it */
    size_t stride;         /* words from row to row */
    uint32_t *word;        /* [height * stride], owned */
} fw_bitplane;

/* All bits clear. A zeroed struct is a valid empty one. */
fw_status fw_bitplane_new(fw_bitplane *plane, int32_t width, int32_t height, const char *holder,
                          fw_fault *fault);
void fw_bitplane_free(fw_bitplane *plane);

/* True when all pixels [x0, x1) of row y are set; -32 <= x0 < x1 <= width + 32. */
bool fw_bitplane_full(const fw_bitplane *plane, int32_t y, int32_t x0, int32_t x1);

/* Column -1 .. columns of row y. */
static inline uint32_t *fw_bitplane_word(const fw_bitplane *plane, int32_t y, int32_t column)
{
    return plane->word + (size_t)y * plane->stride + (size_t)(column + 1);
}

static inline bool fw_bitplane_at(const fw_bitplane *plane, int32_t x, int32_t y)
{
    return (*fw_bitplane_word(plane, y, x >> 5) >> (x & 31) & 1U) != 0;
}

/* The bits of one word that belong to pixels [x0, x1), where column * 32 is the word's first pixel.
 * At least one must. */
static inline uint32_t fw_bitplane_mask(int32_t column, int32_t x0, int32_t x1)
{
    const int32_t first = column * 32;
    const uint32_t from = x0 > first ? UINT32_MAX << (x0 - first) : UINT32_MAX;
    const uint32_t until = x1 < first + 32 ? UINT32_MAX >> (first + 32 - x1) : UINT32_MAX;
    return from & until;
}

#endif
