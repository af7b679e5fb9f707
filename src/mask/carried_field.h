/* The store behind mask/carried.h; only its own files include this.
 *
 * Every value is the difference A = base + value - paid in units: what is stored does not change
 * while credits are paid, so a layer that repeats costs nothing. Three bitplanes say the rest:
 *     medium    the pixel belongs to a region with a finite value somewhere
 *     unknown   (within medium) nothing below saturation has reached it: fresh or saturated
 *     woken     (empty between calls) changed in this call, so its neighbours must look again
 * A pixel of the medium that is not unknown is 0 where its tile is missing or its stored value is 0
 * or paid off. What is stored elsewhere means nothing. */
#ifndef FW_CARRIED_FIELD_H
#define FW_CARRIED_FIELD_H

#include "mask/bitplane.h"
#include "mask/carried.h"
#include "mask/steps.h"

#define FW_CARRIED_HOLDER "carried distance"

enum { FW_TILE = 32, FW_TILE_PIXELS = FW_TILE * FW_TILE };

/* Largest saturation in units: leaves a stored value room to age by 16384 units of credit before
 * its tile must be based anew. */
enum { FW_CARRIED_UNITS = 49151 };

typedef struct fw_tile {
    int64_t base; /* units */
    uint32_t top; /* no stored value is larger */
    uint16_t value[FW_TILE_PIXELS];
} fw_tile;

typedef struct fw_bucket {
    uint64_t *key; /* value in units << 32 | raster index of the pixel */
    size_t count, capacity;
} fw_bucket;

/* Pixels that wait to offer their value. A bucket is as wide as the shortest step, so what it holds
 * cannot shorten each other and may go in any order (Denardo and Fox, Shortest-route methods 1,
 * Oper. Res. 27 (1979) 161). */
typedef struct fw_queue {
    fw_bucket *bucket; /* [count], of values from i * width units on */
    size_t count;
    uint32_t width; /* units */
} fw_queue;

typedef struct fw_pixel_list {
    uint32_t *index; /* raster index */
    size_t count, capacity;
} fw_pixel_list;

struct fw_carried {
    int32_t width, height; /* px */
    double unit_mm, saturation_mm;
    uint32_t saturation; /* units, rounded up */
    fw_steps steps;
    fw_bitplane medium, unknown, woken;
    int32_t tiles_x, tiles_y;
    fw_tile **tile;            /* [tiles_y * tiles_x], NULL where nothing is stored */
    uint16_t *unknown_in_tile; /* [tiles_y * tiles_x] pixels */
    uint8_t *tile_woken;       /* [tiles_y * tiles_x] holds a woken pixel */
    uint32_t *woken_tile;      /* [woken_tiles] these tiles, each once; room for all of them */
    size_t woken_tiles;
    double credits;            /* units, sum of all credits */
    int64_t paid;              /* the same, rounded down once: debts are never low */
    bool started;              /* there was a first step */
    fw_runs medium_runs;       /* the medium again, to find what is kept, fresh and gone */
    const fw_runs *now;        /* newest layer, borrowed */
    const fw_regions *regions; /* borrowed */
    uint8_t *finite;           /* [regions->count] region belongs to the medium */
    size_t finite_capacity;
    fw_queue queue;
    fw_pixel_list pending; /* pixels that must look at their neighbours */
};

static inline size_t fw_tile_index(const fw_carried *field, int32_t column, int32_t row)
{
    return (size_t)row * (size_t)field->tiles_x + (size_t)column;
}

static inline size_t fw_tile_pixel(int32_t x, int32_t y)
{
    return (size_t)(y % FW_TILE * FW_TILE + x % FW_TILE);
}

static inline uint32_t fw_tile_value(const fw_carried *field, const fw_tile *tile, size_t pixel)
{
    const int64_t left = tile->base + tile->value[pixel] - field->paid;
    return tile->value[pixel] > 0 && left > 0 ? (uint32_t)left : 0;
}

/* Value in units of a pixel of the medium. */
static inline uint32_t fw_carried_units(const fw_carried *field, int32_t x, int32_t y)
{
    if (fw_bitplane_at(&field->unknown, x, y))
        return field->saturation;
    const fw_tile *tile = field->tile[fw_tile_index(field, x / FW_TILE, y / FW_TILE)];
    return tile == NULL ? 0 : fw_tile_value(field, tile, fw_tile_pixel(x, y));
}

/* Stores 0 < units < saturation at a pixel of the medium, which is then known. */
fw_status fw_carried_store(fw_carried *field, int32_t x, int32_t y, uint32_t units,
                           fw_fault *fault);

/* Pays credit_units more and drops the tiles in which nothing is left. */
void fw_carried_pay(fw_carried *field, double credit_units);

/* Pixels that enter the medium (unknown and woken), that leave it, and that are sources. */
void fw_carried_enter(fw_carried *field, const fw_runs *fresh);
void fw_carried_leave(fw_carried *field, const fw_runs *gone);
void fw_carried_source(fw_carried *field, const fw_runs *sources);

/* What has changed since the values were a fixed point. */
typedef enum fw_carried_change {
    FW_CHANGED_SOURCES, /* known pixels woke */
    FW_CHANGED_MEDIUM,  /* pixels entered too: they are unknown beside what is known */
    FW_CHANGED_CREDIT,  /* and a payment moved the edge of everything unknown */
} fw_carried_change;

/* Makes the values a fixed point again. Clears what woke. Looks round woken tiles alone, unless
 * credit was paid. */
fw_status fw_carried_settle(fw_carried *field, fw_carried_change change, fw_fault *fault);

#endif
