/* Carried distance: how far each pixel of the newest layer is from what holds it, when what holds
 * it is carried from layer to layer and a credit is paid back with every layer.
 *
 *     A_n(x) = min over y in M_n and M_(n-1) of  max(0, A_(n-1)(y) - c_n) + |x - y|
 *     A_n(x) = 0 on sources;  infinite where there is nothing to carry from
 *
 * M_n is the medium (a pixel set), c_n >= 0 the credit of layer n in mm, |x - y| the length in mm
 * of the shortest path from pixel centre to pixel centre inside the union of the pixels of M_n
 * (pixels px_mm by py_mm). Support debt: M = the part, sources = plate and posts, c_n = t_n /
 * tan(theta). Routing: M = free space, sources = plate, c_n = t_n tan(lean).
 *
 * Paths are made of straight steps between pixel centres that see each other. The directions of the
 * steps lie at most 18.5 degrees apart (24 of them on square pixels), so a length is never low and,
 * in the open, at most 1 / cos(9.25 degrees) - 1 = 1.3 % high, plus what rounding each step up to
 * the stored unit adds (under 0.3 % up to a saturation of 191 pixel sides, under 1.7 % at the
 * largest). Steps along a row or a column are exact. Values are whole multiples of
 * fw_carried_unit().
 *
 * Values saturate at saturation_mm. A saturated pixel means "saturation_mm or more" and does not
 * decay by credits: it stays at saturation_mm until a pixel in its plane that knows better reaches
 * it. The front of the known pixels moves by c_n a layer, so in the open the result is the same as
 * without saturation; where the plane no longer leads to a known pixel it is high, never low.
 *
 * Cost of a step: O(height + runs + tiles), plus the fresh pixels that are reached below
 * saturation, the pixels that they shorten, and the edge of the saturated area. Memory: three bits
 * a pixel of the image, and 2 KiB for each tile of 32 x 32 pixels that holds a value strictly
 * between 0 and saturation. Not thread-safe; the result does not depend on any order. */
#ifndef FW_CARRIED_H
#define FW_CARRIED_H

#include "mask/regions.h"
#include "mask/runs.h"

typedef struct fw_carried fw_carried;

/* Makes the field of an empty layer; the caller frees it. width and height in px (at least 1, their
 * product below 2^32), sides and saturation in mm. FW_INPUT where a length is not positive and
 * finite, where one pixel side is more than 8 times the other, or where saturation_mm is over 3000
 * times the smaller side. *out is untouched on failure. */
fw_status fw_carried_new(int32_t width, int32_t height, double px_mm, double py_mm,
                         double saturation_mm, fw_carried **out, fw_fault *fault);
void fw_carried_free(fw_carried *field); /* NULL is allowed */

/* Advances to the next layer: `now` are its pixels, `regions` its 4-connected regions (label by
 * run). Both are borrowed until the next step. `held` [regions->count] says whether the region's
 * body has a path to the plate (NULL: every one has); pixels of other regions are infinite, and so
 * are those of a held region in which nothing is carried and no source lies. `sources` (a subset of
 * now, or NULL) are 0 and hold their region, whatever `held` says. The first call carries from
 * nothing. A pixel of both layers that was infinite counts as fresh. credit_mm >= 0 is what is paid
 * back between the two layers (ignored by the first call).
 * FW_INPUT for a size that differs or a bad credit (nothing changed); FW_MACHINE when out of
 * memory: the field may then only be freed. */
fw_status fw_carried_step(fw_carried *field, const fw_runs *now, const fw_regions *regions,
                          const uint8_t *held, const fw_runs *sources, double credit_mm,
                          fw_fault *fault);

/* Adds sources (a subset of the newest layer, such as a tip's contact) and shortens what they
 * shorten; their regions become held. Equal to having given them to the last step. Errors as for a
 * step. */
fw_status fw_carried_add_sources(fw_carried *field, const fw_runs *sources, fw_fault *fault);

/* mm; at most saturation_mm; INFINITY where not held, outside the newest layer and outside the
 * image. */
double fw_carried_at(const fw_carried *field, int32_t x, int32_t y);

/* The step of the stored values in mm: the smaller pixel side over a power of two. */
double fw_carried_unit(const fw_carried *field);

/* Bytes that the field holds now, for budgets. */
size_t fw_carried_bytes(const fw_carried *field);

typedef struct fw_carried_peak {
    int64_t over_pixels; /* pixels with finite A > limit */
    double worst_mm;     /* the largest of them; 0 where there is none */
    int32_t x, y;        /* where, px; ties: the first in raster order; 0, 0 where there is none */
} fw_carried_peak;

/* Fills per_region[regions->count] for the regions of the newest layer. A saturated pixel is over
 * any limit. limit_mm >= 0 and a value are compared in stored units, the limit rounded down, so
 * that a ledge of exactly the limit is not over. Cost O(height + runs + tiles + pixels in tiles
 * that may hold one over it). */
fw_status fw_carried_over(const fw_carried *field, double limit_mm, fw_carried_peak *per_region,
                          fw_fault *fault);

/* Called with pixels [x0, x1) of row y and their values value_mm[x1 - x0], which live until it
 * returns. Any status but FW_OK ends the visit. */
typedef fw_status fw_carried_visitor(void *context, int32_t y, int32_t x0, int32_t x1,
                                     const double *value_mm, fw_fault *fault);

/* Visits the pixels that fw_carried_over counts, as longest possible runs in raster order. */
fw_status fw_carried_visit(const fw_carried *field, double limit_mm, fw_carried_visitor *visit,
                           void *context, fw_fault *fault);

#endif
