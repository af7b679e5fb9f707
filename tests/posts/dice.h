/* A small seeded generator, so that random tests are the same everywhere (xorshift64*, Vigna 2016).
 */
#ifndef TESTS_POSTS_DICE_H
#define TESTS_POSTS_DICE_H

#include <stdint.h>

typedef struct dice {
    uint64_t seed; /* not 0 */
} dice;

static inline uint32_t dice_bits(dice *d)
{
    d->seed ^= d->seed >> 12;
    d->seed ^= d->seed << 25;
    d->seed ^= d->seed >> 27;
    return (uint32_t)((d->seed * UINT64_C(2685821657736338717)) >> 32);
}

/* In [low, high). */
static inline double dice_between(dice *d, double low, double high)
{
    return low + (high - low) * (dice_bits(d) / 4294967296.0);
}

/* In [0, count). */
static inline int32_t dice_below(dice *d, int32_t count)
{
    return (int32_t)(dice_bits(d) % (uint32_t)count);
}

#endif
