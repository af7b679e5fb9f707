/* The solids that the demo parts are made of. Each is convex along x, so a line of constant y and z
 * meets it in one interval, which is found in closed form. All lengths in mm, z from the plate. */
#ifndef PART_SOLIDS_H
#define PART_SOLIDS_H

#include "spans.h"

typedef enum part_shape {
    PART_PRISM, /* rounded rectangle, extruded along z, its outline offset linearly with z */
    PART_ROD_X, /* cone or cylinder along x */
    PART_ROD_Y  /* cone or cylinder along y */
} part_shape;

typedef enum part_use { PART_ADD, PART_CUT } part_use;

/* One row of a part's table. Meaning of the numbers by shape:
 *   PART_PRISM  {x, y} centre, {a, b} half sizes, c corner radius (a == b == c is a disc),
 *               {from, to} z range, grow = outward offset per mm of z beyond `from`
 *   PART_ROD_X  {x, y} = centre {y, z}, {a, b} radius at `from` and at `to`, {from, to} x range
 *   PART_ROD_Y  {x, y} = centre {x, z}, {a, b} radius at `from` and at `to`, {from, to} y range
 * Rods leave c and grow at 0. Rows apply in order: a cut takes from what stands before it. */
typedef struct part_solid {
    part_use use;
    part_shape shape;
    double x, y;
    double a, b, c;
    double from, to;
    double grow;
} part_solid;

/* A part: its table and the raster it is meant for. */
typedef struct part_model {
    const char *name;
    const part_solid *solid; /* [count] */
    int count;
    double origin_mm[2]; /* where the table's (0, 0) lies in the image, from its corner */
    int width_px, height_px;
    double pixel_mm, layer_mm;
    int layers;
} part_model;

/* The set of x on the line (y, z) that is inside the part, in the table's own coordinates. */
void part_line(const part_model *model, double y, double z, part_spans *out);

#endif
