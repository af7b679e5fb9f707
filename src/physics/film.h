/* Suction in the liquid film between a fresh layer and the window while they are pulled apart.
 *
 * Squeeze film (Stefan 1874, Reynolds 1886): with the gap h, the viscosity eta and the separation
 * speed v the suction s obeys -lap s = q, q = 12 eta v / h^3, s = 0 on every edge open to the vat.
 * Everything here is divided by q: u = s / q in mm2, -lap u = 1, and the force is F = q G with
 * G = integral of u in mm4. A sealed cavity (closed toward the plate) has one pressure, one
 * unknown, and no net flux beyond its own growth: the film that flows into it equals its area, and
 * its pressure counts toward G. Liquid holds no more suction than P, so with the obstacle U = P / q
 *     0 <= u <= U,  -lap u <= 1,  and one of the two is an equality
 * (variational Reynolds condition, Almqvist & Wall 2016; clipping the uncapped field gives too much
 * force: 0.750 in place of 0.661 of the uncapped one for a disc at P = half its centre suction).
 *
 * Discretisation: finite volumes on square blocks of cell_px pixels, one unknown for every
 * connected piece of film in a block and one for every cavity; u = 0 on pixel faces. At 1 px this
 * is the five-point cell scheme with wall coefficient 2. Larger blocks are cut cells: see
 * film_grid.h. Valid for h far below the narrowest width, Newtonian liquid, flat rigid faces.
 *
 * All functions are re-entrant, single-threaded and pure: the result is a function of the
 * arguments alone, bit for bit.
 */
#ifndef FW_FILM_H
#define FW_FILM_H

#include "mask/runs.h"

/* at + x * per_x_px + y * per_y_px, px from the corner of the box: zero where nothing changes. */
typedef struct fw_film_plane {
    double at, per_x_px, per_y_px;
} fw_film_plane;

/* One cluster: the regions that share sealed cavities, in coordinates of its own box. A plate that
 * tilts parts with speed v (1 + faster) from a gap h (1 + wider): then -div((1 + wider)^3 grad u) =
 * 1 + faster, and u may be below zero where the plate approaches. */
typedef struct fw_film_shape {
    double px_mm, py_mm; /* pixel size, > 0 */
    fw_film_plane faster, wider;
    fw_runs film;          /* solid pixels; width and height are the box */
    fw_runs sealed;        /* pixels of sealed cavities, same box, disjoint from film; any other
                              pixel, and all outside the box, is open to the vat (u = 0) */
    uint32_t *cavity;      /* [sealed.count] body of each sealed run, 0 .. cavity_count - 1 */
    uint32_t cavity_count; /* each body has at least one pixel */
} fw_film_shape;

/* One finite volume, a connected piece of film within a block. */
typedef struct fw_film_cell {
    float x_px, y_px; /* centroid of its pixels, px from the box corner */
    float area_mm2;
    float u_mm2;
} fw_film_cell;

/* Memory must stay bounded whatever the image. Crossing struts on cells twice the size that
 * accuracy asks for come out 1 to 6 % high (struts of 5 to 20 px, straight and turned, swept by
 * hand against cells of 1 px), at four times the size up to 20 %. */
enum { FW_FILM_MOST_CELLS = 1 << 20 };

typedef struct fw_film_options {
    int32_t cell_px;     /* edge of the blocks, px, 1 .. 4096; 0 = fw_film_choose_cell, doubled
                            until the film has FW_FILM_MOST_CELLS cells at most */
    int32_t chosen_px;   /* what fw_film_choose_cell says of this shape, if it is known; 0 = not */
    double obstacle_mm2; /* U = P / q, > 0; INFINITY = no cap */
    double work_tolerance; /* relative, of the force, 0 .. 1; 0 = 1e-3 */
} fw_film_options;

typedef struct fw_film_solution {
    double integral_mm4;               /* G, over film and cavities */
    double tangent_mm4;                /* dF/dq at fixed P; equals G below the cap */
    double moment_x_mm5, moment_y_mm5; /* integral of u x and u y, from the corner of the box */
    double area_mm2;                   /* film and cavities */
    double peak_u_mm2;                 /* largest u */
    bool capped;                       /* some cell or cavity sits at the obstacle */
    int32_t cell_px;
    bool coarse; /* cell_px is larger than fw_film_choose_cell, for want of memory */
    uint32_t unknowns, iterations;
    double residual;    /* largest |min(a (U - u), b - A u)| over the largest b */
    fw_film_cell *cell; /* [cell_count] raster order of blocks, row by row of blocks */
    uint32_t cell_count;
    double *cavity_u_mm2, *cavity_area_mm2; /* [cavity_count] */
    uint32_t cavity_count;
} fw_film_solution;

/* Solves one cluster into *out (any earlier content is overwritten, not freed; on failure *out is
 * an empty solution). Free with fw_film_solution_free. FW_INPUT: sizes that disagree, a cavity or
 * a piece of film from which no film leads to an open edge. FW_MACHINE: no memory, or no
 * convergence (the line says the residual). */
fw_status fw_film_solve(const fw_film_shape *shape, const fw_film_options *options,
                        fw_film_solution *out, fw_fault *fault);
void fw_film_solution_free(fw_film_solution *solution);

/* Bytes that solving takes at most, about: films that meet their cap take half as much again as
 * others. For deciding how many may be solved at once. */
size_t fw_film_work_bytes(const fw_film_shape *shape, const fw_film_options *options);

/* Bytes that a solution holds, itself included. */
size_t fw_film_solution_bytes(const fw_film_solution *solution);

/* The edge of the blocks: the largest power of two q, at most 64, for which the runs (rows and
 * columns alike) shorter than 16 q hold under 1 % of the sum of l^3, and the hydraulic diameter
 * 4 area / perimeter is at least 16 q. 1 for an empty film. */
int32_t fw_film_choose_cell(const fw_film_shape *shape);

/* Upper bound of G in mm4 from runs alone, for every cell size: leaving out the flow across the
 * rows can only raise the maximum of 2 int u - int |grad u|^2, and a row of length l alone gives
 * l^3 / 12 (l^3 / 12 + l / 6 in pixels on the grid); columns likewise, the lesser of the two.
 * Sealed cavities count as film. Of a straight pull (faster, wider: zero); a plate that tilts over
 * an even gap pulls no more than that times the largest 1 + faster (maximum principle). */
double fw_film_bound(const fw_film_shape *shape);

#endif
