/* Which anchor carries each place of the newest layer: the one with the shortest way to the plate,
 * by a path through the body that runs within layers and from layer to layer, and on through the
 * anchor itself. (Without the anchor's own length, a tip high up on a tall part would draw the load
 * of all that stands straight on the plate beside it.)
 *
 * The plane is cut into square-ish cells of kx by ky pixels (a side of about 0.2 mm, at least one
 * pixel). A node is (region of the solid, cell in which it has pixels), so that neighbouring
 * regions do not leak into each other. A node's length L_n(r, c) in mm is the smallest of
 *     the anchor's own way to the plate   where a contact pixel of an anchor lies in it, and the
 *                                         distance from the cell's centre to that pixel,
 *     L_(n-1)(r', c) + t_n                for regions r' of the layer before that share a pixel
 *                                         with r in cell c,
 *     L_n(r, c') + |c - c'|               for the 8 cells c' around c that are nodes of the
 *                                         same region; | | = distance of the cell centres.
 * The owner is the anchor at the end of that path; ties go to the smaller anchor id. Exact on this
 * graph. The graph itself errs by at most 8 % in direction (8 neighbours) plus a cell at each end:
 * enough to say who carries, not a length to report. */
#ifndef FW_TRIBUTARY_H
#define FW_TRIBUTARY_H

#include "mask/regions.h"
#include "mask/runs.h"

enum { FW_NO_ANCHOR = -1, FW_MIXED = -2 };

typedef struct fw_tributary fw_tributary;

/* A contact of an anchor with the newest layer: a subset of its solid pixels. anchor >= 0. */
typedef struct fw_anchor_contact {
    int32_t anchor;
    const fw_runs *contact; /* borrowed for the call */
    double start_mm;        /* the anchor's own way from the contact to the plate */
} fw_anchor_contact;

/* Makes the owners of an empty layer; the caller frees it. FW_INPUT for sizes or sides that are not
 * positive and finite. *out is untouched on failure. */
fw_status fw_tributary_new(int32_t width, int32_t height, double px_mm, double py_mm,
                           fw_tributary **out, fw_fault *fault);
void fw_tributary_free(fw_tributary *field); /* NULL is allowed */

/* Advances to the next layer. `solid` and `regions` are borrowed until the next step; `before` and
 * `before_regions` are those of the step before (both NULL at the first call, or to carry
 * nothing). thickness_mm > 0 is the new layer's. anchors [anchor_count] may be NULL if 0.
 * FW_INPUT for a size that differs, a bad thickness or a negative anchor (nothing changed);
 * FW_MACHINE when out of memory: it may then only be freed. */
fw_status fw_tributary_step(fw_tributary *field, const fw_runs *solid, const fw_regions *regions,
                            const fw_runs *before, const fw_regions *before_regions,
                            double thickness_mm, const fw_anchor_contact *anchors,
                            size_t anchor_count, fw_fault *fault);

/* Adds a contact in the newest layer. Equal to having given it to the last step. */
fw_status fw_tributary_add_anchor(fw_tributary *field, fw_anchor_contact anchor, fw_fault *fault);

/* The anchor that carries pixel (x, y) of that region in the newest layer; FW_NO_ANCHOR where none
 * is reached yet or the region has no pixel in that cell. */
int32_t fw_tributary_owner(const fw_tributary *field, uint32_t region, int32_t x, int32_t y);

/* The same for one place after another: quick where the last one lay near. *hint is kept between
 * the calls for one layer; any value will do at first. */
int32_t fw_tributary_owner_near(const fw_tributary *field, uint32_t region, int32_t x, int32_t y,
                                uint32_t *hint);

/* The owner of every cell of the region, FW_NO_ANCHOR where none has one, or FW_MIXED where they
 * differ. Cheap. */
int32_t fw_tributary_sole(const fw_tributary *field, uint32_t region);

/* The length of the path in mm; INFINITY where the owner is FW_NO_ANCHOR. */
double fw_tributary_length(const fw_tributary *field, uint32_t region, int32_t x, int32_t y);

/* A number that stays the same from layer to layer while the region's set of cells and their owners
 * do, and changes when any of them does. It names that content, so equal numbers of two regions or
 * layers mean equal cells and owners; callers may reuse sums. */
uint64_t fw_tributary_version(const fw_tributary *field, uint32_t region);

/* Cell sides in pixels. */
void fw_tributary_cell(const fw_tributary *field, int32_t *kx, int32_t *ky);

#endif
