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
    int32_t *block_x, *block_y;    /* [nodes] while the levels are built */
    bool *cavity;                  /* [nodes] is a cavity that has not joined */
    uint32_t *coarse_node;         /* [nodes] of the next level */
    /* The matrix that the cycle uses: the one above, or `cut` with some nodes held. */
    const double *held_conductance, *held_wall, *to_held; /* to_held: NULL = none is held */
    double *inverse;                                      /* 1 / diagonal, 0 = held */
    double *solution, *load, *rest; /* vectors of the cycle; the finest level has only rest */
    /* only after fw_film_levels_may_hold: */
    uint32_t *coarse_entry; /* [row[nodes]] entry of the next level, or FW_FILM_VAT inside a node */
    double *entry_factor, *wall_factor; /* of this level over the sums of the finer one */
    double *cut_conductance, *cut_wall, *cut_to_held;
} fw_film_level;

typedef struct fw_film_levels {
    uint32_t count;
    fw_film_level level[FW_FILM_LEVELS];
    double factor[FW_FILM_DIRECT * FW_FILM_DIRECT]; /* Cholesky factor of the last level */
} fw_film_levels;

/* Builds all levels into *out from what grid holds, which then is gone: level[0] has the nodes. */
fw_status fw_film_levels_build(fw_film_grid *grid, fw_film_levels *out, fw_fault *fault);
void fw_film_levels_free(fw_film_levels *levels);

/* Makes room for held nodes: half as much again as the levels take without. Once is enough. */
fw_status fw_film_levels_may_hold(fw_film_levels *levels, fw_fault *fault);

/* Sets up the levels from `first` on, with the nodes of `first` where held[i] dropped, after
 * fw_film_levels_may_hold; NULL: none is, and no room is needed. */
void fw_film_levels_hold(fw_film_levels *levels, uint32_t first, const bool *held);

/* The entry of row i with column j, which must be there. */
uint32_t fw_film_level_entry(const fw_film_level *level, uint32_t i, uint32_t j);

/* rest = load - A u on one level with its held nodes dropped. */
void fw_film_level_rest(const fw_film_level *level, const double *u, const double *load,
                        double *rest);

/* u = M load, M the W-cycle from level `first`. */
void fw_film_levels_cycle(fw_film_levels *levels, uint32_t first, const double *load, double *u);

#endif
