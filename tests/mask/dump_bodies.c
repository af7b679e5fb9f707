/* Follows a raw volume from stdin and prints what it finds, for compare_scipy.py.
 *
 * Input, native byte order: int32 layers, height, width, intended_least, solid_least, then one byte
 * a voxel, x fastest. Output, one line each:
 *   layer N regions R onset P adrift P1 P2 sealed P1 P2    pixels: P1 in the layer, P2 of all
 * layers solid LAYER Y X PIXELS GROUNDED                        bodies by first pixel, at the end
 *   void LAYER Y X PIXELS GROUNDED ENCLOSED
 * Enclosed: neither open to the vat nor reaching the last layer, which is open to the window. */
#include "mask/bodies.h"
#include "mask/slice.h"

#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>

typedef struct header {
    int32_t layers, height, width, intended_least, solid_least;
} header;

/* Solid or void, followed from layer to layer. */
typedef struct follower {
    fw_bodies bodies;
    fw_overlaps overlaps;
} follower;

static void need(bool holds)
{
    if (holds)
        return;
    (void)fprintf(stderr, "dump_bodies: stdin or memory, ended early, give a whole volume\n");
    exit(EXIT_FAILURE);
}

static void read_slice(const header *head, uint8_t *bytes, fw_greys *layer, fw_slice *out)
{
    const size_t width = (size_t)head->width, height = (size_t)head->height;
    need(fread(bytes, 1, width * height, stdin) == width * height);
    need(fw_greys_begin(layer, head->width, head->height, 255, NULL) == FW_OK);
    for (int32_t y = 0; y < head->height; y++) {
        for (int32_t x = 0; x < head->width; x++)
            need(fw_greys_push(layer, y, x, x + 1, bytes[(size_t)y * width + (size_t)x], NULL) ==
                 FW_OK);
    }
    fw_greys_finish(layer);
    need(fw_slice_build(layer, head->intended_least, head->solid_least, out, NULL) == FW_OK);
}

static void step(follower *f, int32_t layer, const fw_regions *now, bool plate)
{
    uint8_t *grounded = calloc((size_t)now->count + 1, 1);
    need(grounded != NULL);
    for (uint32_t r = 0; r < now->count; r++)
        grounded[r] = plate ? layer == 0 : now->region[r].on_border;
    need(fw_bodies_step(&f->bodies, layer, now, layer > 0 ? &f->overlaps : NULL, grounded, NULL) ==
         FW_OK);
    free(grounded);
}

static int64_t onset_pixels(const fw_regions *now, const fw_overlaps *overlaps)
{
    int64_t pixels = 0;
    uint32_t next = 0;
    for (uint32_t r = 0; r < now->count; r++) {
        if (next == overlaps->count || overlaps->item[next].now != r)
            pixels += now->region[r].pixels;
        while (next < overlaps->count && overlaps->item[next].now == r)
            next++;
    }
    return pixels;
}

static void print_not_grounded(const char *name, const follower *f, const fw_regions *now)
{
    int64_t here = 0, all = 0;
    for (uint32_t r = 0; r < now->count; r++) {
        if (!fw_bodies_grounded(&f->bodies, fw_bodies_of_region(&f->bodies, r)))
            here += now->region[r].pixels;
    }
    for (uint32_t id = 0; id < f->bodies.count; id++) {
        if (f->bodies.body[id].parent == id && !f->bodies.body[id].grounded)
            all += f->bodies.body[id].pixels;
    }
    (void)printf(" %s %" PRId64 " %" PRId64, name, here, all);
}

static void print_bodies(const char *name, const fw_bodies *bodies, int32_t layers, bool voids)
{
    for (uint32_t id = 0; id < bodies->count; id++) {
        const fw_body *body = &bodies->body[id];
        if (body->parent != id)
            continue;
        (void)printf("%s %" PRId32 " %" PRId32 " %" PRId32 " %" PRId64 " %d", name,
                     body->first_layer, body->first_y, body->first_x, body->pixels, body->grounded);
        if (voids)
            (void)printf(" %d", !body->grounded && body->last_layer < layers - 1);
        (void)printf("\n");
    }
}

static void overlap(const fw_slice *before, const fw_slice *now, follower *solid, follower *empty)
{
    need(fw_overlaps_find(&before->intended, &before->regions, &now->intended, &now->regions,
                          &solid->overlaps, NULL) == FW_OK);
    need(fw_overlaps_find(&before->voids, &before->void_regions, &now->voids, &now->void_regions,
                          &empty->overlaps, NULL) == FW_OK);
}

static void dump(const header *head, uint8_t *bytes)
{
    fw_slice slice[2] = {0};
    fw_greys greys = {0};
    follower solid = {0}, empty = {0};
    for (int32_t layer = 0; layer < head->layers; layer++) {
        fw_slice *now = &slice[layer % 2];
        read_slice(head, bytes, &greys, now);
        if (layer > 0)
            overlap(&slice[1 - layer % 2], now, &solid, &empty);
        step(&solid, layer, &now->regions, true);
        step(&empty, layer, &now->void_regions, false);
        (void)printf("layer %" PRId32 " regions %" PRIu32 " onset %" PRId64, layer,
                     now->regions.count,
                     layer > 0 ? onset_pixels(&now->regions, &solid.overlaps) : 0);
        print_not_grounded("adrift", &solid, &now->regions);
        print_not_grounded("sealed", &empty, &now->void_regions);
        (void)printf("\n");
    }
    print_bodies("solid", &solid.bodies, head->layers, false);
    print_bodies("void", &empty.bodies, head->layers, true);
    fw_slice_free(&slice[0]);
    fw_slice_free(&slice[1]);
    fw_greys_free(&greys);
    fw_bodies_free(&solid.bodies);
    fw_bodies_free(&empty.bodies);
    fw_overlaps_free(&solid.overlaps);
    fw_overlaps_free(&empty.overlaps);
}

int main(void)
{
    header head;
    need(fread(&head, sizeof head, 1, stdin) == 1);
    need(head.layers > 0 && head.height > 0 && head.width > 0);
    uint8_t *bytes = malloc((size_t)head.width * (size_t)head.height);
    need(bytes != NULL);
    dump(&head, bytes);
    free(bytes);
    return EXIT_SUCCESS;
}
