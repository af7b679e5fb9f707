/* The layer that tips are placed on: inner part of placing. */
#ifndef FW_PLACE_GROUND_H
#define FW_PLACE_GROUND_H

#include "posts/place.h"

typedef struct fw_place_spot {
    uint32_t region;
    int32_t x, y;
    double debt_mm;
} fw_place_spot;

typedef struct fw_place_box {
    int32_t x0, y0, x1, y1; /* px, half-open */
} fw_place_box;

typedef struct fw_place_ground {
    const fw_place_rules *rules;
    const fw_screen *screen;
    fw_carried *field;
    const fw_runs *now, *fresh;
    const fw_regions *regions;
    uint8_t *held;
    fw_place_possible possible;
    void *context;
    fw_tips *out;
    size_t in_field;     /* tips of out whose contacts are sources of the field by now */
    fw_runs whole;       /* of fresh: the whole smallest tip lies on fresh */
    fw_runs inside;      /* of fresh: the whole smallest tip lies on the layer */
    fw_place_spot *over; /* [over_count] pixels over the reach */
    size_t over_count, over_capacity;
    int32_t block_px[2]; /* blocks in which pixels are given up together */
    int32_t blocks[2];
    uint8_t *block; /* [blocks[1]][blocks[0]] */
} fw_place_ground;

/* out = pixels of `of` from whose centre a disc of the tip's radius stays on `base`. */
fw_status fw_place_erode(const fw_place_ground *g, const fw_runs *base, const fw_runs *of,
                         fw_runs *out, fw_fault *fault);

/* Fills whole, inside and the blocks; the rest is set by the caller. Close also after a failure. */
fw_status fw_place_ground_open(fw_place_ground *g, fw_fault *fault);
void fw_place_ground_close(fw_place_ground *g);

/* Does the set hold the pixel? */
bool fw_place_has(const fw_runs *set, int32_t x, int32_t y);

/* Region of a pixel of the layer, UINT32_MAX off it. */
uint32_t fw_place_region_at(const fw_place_ground *g, int32_t x, int32_t y);

/* A length in whole pixels, at least 1. */
int32_t fw_place_step_px(double mm, double pixel_mm);

/* Rounded to 1 um, as tips are kept. */
double fw_place_micrometres(double mm);

/* Widens the box (empty when x1 == x0) to hold the pixel. */
void fw_place_grow_box(fw_place_box *b, int32_t x, int32_t y);

#endif
