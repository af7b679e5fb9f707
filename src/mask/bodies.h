/* Bodies: regions joined through the overlaps of neighbouring layers, followed as layers arrive.
 *
 * While layer n is peeled only layers 0..n exist, so bodies only ever merge: a union-find with
 * additive sums. A region that overlaps one body joins it, one that overlaps several unites them,
 * one that overlaps none starts a body: there are as many bodies as regions without a predecessor.
 *
 * The same code follows solid (4-connected regions; grounded = it has a path to the plate) and void
 * (8-connected regions of the complement; grounded = it is open to the vat, which is everything
 * outside of the image: the caller grounds void regions on the image border; the plate closes layer
 * 0). A void is sealed while layer n is peeled when its body is not grounded after step n.
 *
 * Ids are given in order of (layer, raster order) and the smaller id wins a union, so a body keeps
 * the id and the first pixel of its earliest region, whatever the order of the merges.
 */
#ifndef FW_BODIES_H
#define FW_BODIES_H

#include "mask/overlaps.h"

/* The sums are current at a root only; an id that was united into another keeps what it last had.
 */
typedef struct fw_body {
    uint32_t parent; /* itself at a root, else a smaller id */
    bool grounded;
    int32_t first_layer, last_layer; /* of its newest region so far, inclusive */
    int32_t x0, y0, x1, y1;          /* px, bounding box over all layers, half-open */
    int64_t pixels;                  /* over all layers */
    int32_t first_x, first_y;        /* px, first pixel in raster order of first_layer */
} fw_body;

/* A zeroed struct is valid and empty. */
typedef struct fw_bodies {
    fw_body *body; /* [count] every id ever given, roots and united ones */
    uint32_t count;
    uint32_t *of_region; /* [regions] of the newest layer: an id of its body */
    uint32_t regions;
    uint32_t *spare; /* the next frontier while a step builds it */
    size_t body_capacity, of_region_capacity, spare_capacity;
} fw_bodies;

/* Takes in one layer. Layers come in rising order, each one of them, empty ones too (a gap parts
 * bodies). from_before holds the overlaps of `now` with the layer of the step before (NULL or
 * empty: nothing is shared, as for the first layer). grounded[r] != 0 says that region r is
 * grounded of itself (NULL: none is). Fails with FW_MACHINE where there is no memory; bodies are
 * then as they were before the step. */
fw_status fw_bodies_step(fw_bodies *bodies, int32_t layer, const fw_regions *now,
                         const fw_overlaps *from_before, const uint8_t *grounded, fw_fault *fault);

/* Root of the body that region `region` of the newest layer belongs to. */
uint32_t fw_bodies_of_region(const fw_bodies *bodies, uint32_t region);

/* Root of the body that `id` went into; id < count. Safe to call from several threads at once. */
uint32_t fw_bodies_root(const fw_bodies *bodies, uint32_t id);

/* Whether the body that `id` went into is grounded by the layers so far. */
bool fw_bodies_grounded(const fw_bodies *bodies, uint32_t id);

/* Grounds the body of `id` from now on (a tip is placed on it). */
void fw_bodies_ground(fw_bodies *bodies, uint32_t id);

/* Frees the arrays and leaves a valid empty struct. */
void fw_bodies_free(fw_bodies *bodies);

#endif
