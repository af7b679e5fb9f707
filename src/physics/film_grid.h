/* Finite volumes of the film equation, cut from the runs of a cluster.
 *
 * The image is laid out in square blocks of Q x Q pixels. Each 4-connected piece of film within a
 * block is one cell, so a gap that is thinner than a block still parts what it parts. Lengths are
 * in columns: a pixel is 1 by `ratio` = py / px. Fluxes between the cells and to what bounds them:
 *   - face between two cells: open length over the distance of their centroids;
 *   - wall (open to the vat, u = 0) or cavity (u = that of the cavity): length over the distance
 *     along the normal from the centroid to the wall; slanted walls: see film_sides.h;
 *   - source: the area of the cell less (2/3)(1 - 1/Q^2) of the sum of length times distance over
 * its walls, at most two thirds of the area. A cell's unknown is the mean of u over it. In a strip
 *     the mean m and the wall slope g of the exact parabola obey g = m / d + 2 d / 3 for a wall at
 *     distance d, and the last term moves to the source; with the factor (1 - 1/Q^2) a strip w
 * pixels wide gives w^3/12 + w/6 for every Q, as the pixel scheme (Q = 1) does. The matrix is
 * symmetric and an M-matrix. Cost: O(runs + pixels of rim + cells).
 */
#ifndef FW_FILM_GRID_H
#define FW_FILM_GRID_H

#include "physics/film.h"

#define FW_FILM_VAT UINT32_MAX /* target of a link: open to the vat */

/* Face between two cells, a piece of it: the same pair may come again. */
typedef struct fw_film_face {
    uint32_t a, b;
    double length;
} fw_film_face;

/* Side of a cell that is no cell: with outward normal n, at `distance` from the centroid. */
typedef struct fw_film_link {
    uint32_t cell, target; /* target: node of a cavity (cells + body), or FW_FILM_VAT */
    double nx, ny;
    double length, distance;
} fw_film_link;

/* Nodes are the cells, by rows of blocks, then the cavities. */
typedef struct fw_film_grid {
    uint32_t cells, cavities;
    int32_t block; /* Q */
    double ratio;
    fw_film_plane faster, wider; /* per column both ways */
    double *area, *x, *y;        /* [cells + cavities] area and centroid */
    int32_t *block_x, *block_y;  /* [cells + cavities] the block (a cavity: of its centroid) */
    fw_film_face *face;
    fw_film_link *link; /* grouped by cell */
    size_t face_count, link_count;
    size_t node_capacity[5], face_capacity, link_capacity; /* items */
} fw_film_grid;

/* Cuts the shape into *out (zeroed or freed before). *fits tells whether `most` cells were enough;
 * if not, it stopped there, and there is no grid. Frees what it made on failure. */
fw_status fw_film_grid_build(const fw_film_shape *shape, int32_t block, uint32_t most,
                             fw_film_grid *out, bool *fits, fw_fault *fault);
void fw_film_grid_drop_faces(fw_film_grid *grid);
void fw_film_grid_drop_links(fw_film_grid *grid);
/* 1 + plane at (x, y), in columns. */
double fw_film_grid_factor(fw_film_plane plane, double x, double y);
void fw_film_grid_free(fw_film_grid *grid);

#endif
