/* Free space for the whole stack on cubes, from which posts are routed.
 *
 * A cell stores one number in one byte: the room, a length from the axis of a post to the part,
 * such that every horizontal disc of radius R whose centre lies anywhere in the cell keeps the
 * clearance to the part while room >= R + clearance. With d(dz) the least in-plane distance from
 * the cell to the part at a height dz above (below) the cell's slab,
 *     room = min over 0 <= dz <= h of  d(dz) + clearance (1 - sqrt(1 - (dz / h)^2)),
 * h = clearance_mm below and clearance_above_mm above: an ellipsoid of clearance round the disc's
 * edge and none of it inside the disc. It is the exact condition for a disc of any radius; a sphere
 * round the axis would ask a thick shaft to stay its own radius away from the face that it holds.
 *
 * Distances are taken between the whole cell and sub-cells of a quarter cell (in all three
 * directions) that hold any part, so room is never larger than the truth, and lower by at most
 * about a cell and a half in the plane. Rooms beyond need_mm are stored as need_mm.
 *
 * The lattice is built once from the part's layers; posts that are routed are kept beside it as
 * their exact paths, so that a post can be drawn again when it grows.
 */
#ifndef FW_LATTICE_H
#define FW_LATTICE_H

#include "fault/memory.h"
#include "mask/runs.h"
#include "posts/post.h"

typedef struct fw_lattice fw_lattice;

typedef struct fw_lattice_shape {
    int32_t width_px, height_px, layers; /* > 0, of the lifted stack */
    double px_mm, py_mm, layer_mm;       /* > 0 */
    double clearance_mm;                 /* >= 0, to the sides and toward the plate */
    double clearance_above_mm;           /* >= clearance_mm, toward a plate-facing face */
    double need_mm;                      /* largest radius + clearance that will be asked for */
} fw_lattice_shape;

/* Makes an empty lattice (all free); caller frees it. The cell is 0.25 mm where that needs at most
 * 64 MiB, else 0.5 mm, else doubled until it fits. Charges `budget` (may be NULL; borrowed until
 * fw_lattice_free) with all that it allocates. FW_INPUT for values that are not finite, not
 * positive or absurd (a side over 10 m), FW_MACHINE when the budget or the memory is short. */
fw_status fw_lattice_new(const fw_lattice_shape *shape, fw_budget *budget, fw_lattice **out,
                         fw_fault *fault);
void fw_lattice_free(fw_lattice *lattice);

/* Adds the part in one layer (of the lifted stack). Layers ascend; layers with nothing may be left
 * out. `part` has the shape's width and height. */
fw_status fw_lattice_add_layer(fw_lattice *lattice, int32_t layer, const fw_runs *part,
                               fw_fault *fault);

/* Closes the lattice after its last layer: from here on it can be asked. */
fw_status fw_lattice_finish(fw_lattice *lattice, fw_fault *fault);

/* Keeps a routed post (copied; one that was kept under the same id is replaced) so that later
 * routes stay away from it. */
fw_status fw_lattice_add_post(fw_lattice *lattice, const fw_post *post, fw_fault *fault);

/* Forgets the post with this id, if there is one. */
void fw_lattice_drop_post(fw_lattice *lattice, int32_t id);

/* The grid: cells per axis, edge in mm. Cell (i, j, k) is [i, i + 1) x [j, j + 1) x [k, k + 1)
 * cell_mm. */
typedef struct fw_lattice_grid {
    int32_t nx, ny, nz;
    double cell_mm;
    double width_mm, height_mm; /* of the image */
} fw_lattice_grid;
fw_lattice_grid fw_lattice_grid_of(const fw_lattice *lattice);
const fw_lattice_shape *fw_lattice_shape_of(const fw_lattice *lattice);

/* Room of one cell in mm (see above); 0 outside the image, need_mm above the last layer. */
double fw_lattice_room(const fw_lattice *lattice, int32_t i, int32_t j, int32_t k);

/* For the router: one slab of stored rooms, [ny][nx] bytes; a cell's room is >= need when its byte
 * is >= fw_lattice_level(need). */
const uint8_t *fw_lattice_slab(const fw_lattice *lattice, int32_t k);
int32_t fw_lattice_level(const fw_lattice *lattice, double need_mm);

/* For the router: [nz + 1][ny][fw_lattice_words] zeroed words, one bit a cell column at each slab
 * boundary, bit i % 64 of word i / 64; made by the first call, kept in the lattice. */
fw_status fw_lattice_reach_new(fw_lattice *lattice, uint64_t **bits, fw_fault *fault);
const uint64_t *fw_lattice_reach(const fw_lattice *lattice); /* NULL before that */
int32_t fw_lattice_words(const fw_lattice *lattice);

/* The posts that are kept, in ascending id. */
const fw_posts *fw_lattice_posts(const fw_lattice *lattice);

#endif
