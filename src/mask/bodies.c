#include "mask/bodies.h"

#include "fault/memory.h"

#include <assert.h>
#include <stdlib.h>

static const char holder[] = "bodies";

uint32_t fw_bodies_root(const fw_bodies *bodies, uint32_t id)
{
    assert(id < bodies->count);
    while (bodies->body[id].parent != id)
        id = bodies->body[id].parent;
    return id;
}

/* The root, and everything on the way now points at it. */
static uint32_t flatten(fw_bodies *bodies, uint32_t id)
{
    const uint32_t root = fw_bodies_root(bodies, id);
    while (bodies->body[id].parent != root) {
        const uint32_t next = bodies->body[id].parent;
        bodies->body[id].parent = root;
        id = next;
    }
    return root;
}

static int32_t least(int32_t a, int32_t b)
{
    return a < b ? a : b;
}

static int32_t most(int32_t a, int32_t b)
{
    return a > b ? a : b;
}

/* The first layer and the first pixel need no care: `into` is the smaller id, so it began earlier.
 */
static void add_sums(fw_body *into, const fw_body *more)
{
    into->grounded = into->grounded || more->grounded;
    into->last_layer = most(into->last_layer, more->last_layer);
    into->x0 = least(into->x0, more->x0);
    into->y0 = least(into->y0, more->y0);
    into->x1 = most(into->x1, more->x1);
    into->y1 = most(into->y1, more->y1);
    into->pixels += more->pixels;
}

static uint32_t unite(fw_bodies *bodies, uint32_t a, uint32_t b)
{
    a = flatten(bodies, a);
    b = flatten(bodies, b);
    if (a == b)
        return a;
    const uint32_t root = a < b ? a : b, gone = a < b ? b : a;
    add_sums(&bodies->body[root], &bodies->body[gone]);
    bodies->body[gone].parent = root;
    return root;
}

static fw_body body_of_region(const fw_region *region, int32_t layer, bool grounded)
{
    return (fw_body){
        .grounded = grounded,
        .first_layer = layer,
        .last_layer = layer,
        .x0 = region->x0,
        .y0 = region->y0,
        .x1 = region->x1,
        .y1 = region->y1,
        .pixels = region->pixels,
        .first_x = region->first_x,
        .first_y = region->first_y,
    };
}

/* All the memory that a step can need: a body for every region that overlaps nothing. */
static fw_status reserve(fw_bodies *bodies, const fw_regions *now, const fw_overlaps *from_before,
                         fw_fault *fault)
{
    uint32_t held = 0;
    for (uint32_t i = 0; from_before != NULL && i < from_before->count; i++)
        held += i == 0 || from_before->item[i].now != from_before->item[i - 1].now;
    FW_TRY(fw_grow((void **)&bodies->body, &bodies->body_capacity,
                   (size_t)bodies->count + (now->count - held), sizeof *bodies->body, holder,
                   fault));
    return fw_grow((void **)&bodies->spare, &bodies->spare_capacity, now->count,
                   sizeof *bodies->spare, holder, fault);
}

/* Unites the bodies that region r overlaps; the overlaps of r begin at *next, which moves on.
 * Returns the body, or UINT32_MAX where there is none. */
static uint32_t body_before(fw_bodies *bodies, uint32_t r, const fw_overlaps *from_before,
                            uint32_t *next)
{
    uint32_t id = UINT32_MAX;
    while (from_before != NULL && *next < from_before->count && from_before->item[*next].now == r) {
        const uint32_t other = bodies->of_region[from_before->item[(*next)++].before];
        id = unite(bodies, id == UINT32_MAX ? other : id, other);
    }
    return id;
}

/* Gives the region to the body `id`, or to a new one where id is UINT32_MAX. Returns the body. */
static uint32_t take_in(fw_bodies *bodies, uint32_t id, const fw_body *piece)
{
    if (id != UINT32_MAX) {
        add_sums(&bodies->body[id], piece);
        return id;
    }
    bodies->body[bodies->count] = *piece;
    bodies->body[bodies->count].parent = bodies->count;
    return bodies->count++;
}

/* Points the old and the new frontier at their roots. No chain of parents is then longer than the
 * number of layers, and those of the newest layer have length 0. */
static void advance_frontier(fw_bodies *bodies, uint32_t regions)
{
    for (uint32_t r = 0; r < bodies->regions; r++)
        (void)flatten(bodies, bodies->of_region[r]);
    for (uint32_t r = 0; r < regions; r++)
        bodies->spare[r] = flatten(bodies, bodies->spare[r]);
    uint32_t *frontier = bodies->spare;
    const size_t capacity = bodies->spare_capacity;
    bodies->spare = bodies->of_region;
    bodies->spare_capacity = bodies->of_region_capacity;
    bodies->of_region = frontier;
    bodies->of_region_capacity = capacity;
    bodies->regions = regions;
}

fw_status fw_bodies_step(fw_bodies *bodies, int32_t layer, const fw_regions *now,
                         const fw_overlaps *from_before, const uint8_t *grounded, fw_fault *fault)
{
    FW_TRY(reserve(bodies, now, from_before, fault));
    uint32_t next = 0;
    for (uint32_t r = 0; r < now->count; r++) {
        const bool held = grounded != NULL && grounded[r] != 0;
        const fw_body piece = body_of_region(&now->region[r], layer, held);
        const uint32_t id = body_before(bodies, r, from_before, &next);
        bodies->spare[r] = take_in(bodies, id, &piece);
    }
    assert(from_before == NULL || next == from_before->count);
    advance_frontier(bodies, now->count);
    return FW_OK;
}

uint32_t fw_bodies_of_region(const fw_bodies *bodies, uint32_t region)
{
    assert(region < bodies->regions);
    return fw_bodies_root(bodies, bodies->of_region[region]);
}

bool fw_bodies_grounded(const fw_bodies *bodies, uint32_t id)
{
    return bodies->body[fw_bodies_root(bodies, id)].grounded;
}

void fw_bodies_ground(fw_bodies *bodies, uint32_t id)
{
    bodies->body[fw_bodies_root(bodies, id)].grounded = true;
}

void fw_bodies_free(fw_bodies *bodies)
{
    free(bodies->body);
    free(bodies->of_region);
    free(bodies->spare);
    *bodies = (fw_bodies){0};
}
