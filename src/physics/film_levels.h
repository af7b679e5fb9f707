/* The grids of the multigrid method: the matrix of the film equation and its coarser likenesses.
 *
 * Row i of the matrix reads (wall_i + sum_j c_ij) u_i - sum_j c_ij u_j = source_i with conductances
 * c_ij = c_ji >= 0 and wall_i >= 0. A coarser level joins the cells of 2 x 2 blocks that touch
 * within the block; a cavity stays one node as long as there are more cells than cavities, then it
 * joins like a cell. Coarse conductances are those of the coarse geometry (length over the new
 * distance), held between one half of and the full sum of the fine ones. The sum is the Galerkin
 * matrix of piecewise constants, so that A_c >= half of it, which keeps the two-grid method with
 * one sweep before and after, and by induction the W-cycle, symmetric and positive definite; the
 * geometric value is what makes it converge at a rate that does not depend on the grid.
 *
 * Nodes that are held (at the obstacle) drop out: their rows and columns are cut and conductances
 * to them become walls, on every level, by fw_film_levels_hold.
 */
#ifndef FW_FILM_LEVELS_H
#define FW_FILM_LEVELS_H

#include "physics/film_grid.h"

enum { FW_FILM_LEVELS = 40, FW_FILM_DIRECT = 48 };

typedef struct fw_film_level {
    uint32_t nodes;
    bool joint;                    /* cavities have joined with cells */
    uint32_t *row, *col;           /* [nodes + 1], [row[nodes]] */
    double *conductance;           /* [row[nodes]] of all nodes free */
    double *wall;                  /* [nodes] */
    double *source, *x, *y, *area; /* [nodes] area-weighted centroids */
    int32_t *block_x, *block_y;
    bool *cavity;           /* [nodes] is a cavity that has not joined */
    uint32_t *coarse_node;  /* [nodes] of the next level */
    uint32_t *coarse_entry; /* [row[nodes]] entry of the next level, or FW_FILM_VAT inside a node */
    double *entry_factor, *wall_factor; /* of this level over the sums of the finer one */
    /* with some nodes held: */
    double *held_conductance, *held_wall, *to_held, *inverse; /* inverse: 1 / diagonal, 0 = held */
    double *solution, *load, *rest;                           /* vectors of the cycle */
} fw_film_level;

typedef struct fw_film_levels {
    uint32_t count;
    fw_film_level level[FW_FILM_LEVELS];
    double factor[FW_FILM_DIRECT * FW_FILM_DIRECT]; /* Cholesky factor of the last level */
} fw_film_levels;

/* Builds all levels into *out. Moves the links of grid to the coarsest level. */
fw_status fw_film_levels_build(fw_film_grid *grid, fw_film_levels *out, fw_fault *fault);
void fw_film_levels_free(fw_film_levels *levels);

/* Sets up the levels from `first` on, with the nodes of `first` where held[i] dropped (NULL: none
 * is). */
void fw_film_levels_hold(fw_film_levels *levels, uint32_t first, const bool *held);

/* rest = load - A u on one level with its held nodes dropped. */
void fw_film_level_rest(const fw_film_level *level, const double *u, const double *load,
                        double *rest);

/* u = M load, M the W-cycle from level `first`. */
void fw_film_levels_cycle(fw_film_levels *levels, uint32_t first, const double *load, double *u);

#endif
