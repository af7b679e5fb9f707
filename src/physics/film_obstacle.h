/* The two solvers of the film equation. Both work on system->u in pixel units. */
#ifndef FW_FILM_OBSTACLE_H
#define FW_FILM_OBSTACLE_H

#include "physics/film_system.h"

/* Conjugate gradients preconditioned by the W-cycle of level `first`, nodes held as set up before:
 * adds to u the solution of A u = rest, and leaves in rest what remains. Each term of the sum that
 * it returns is the fall of the squared energy error (from u = 0 also the rise of source . u); it
 * stops when the last four are below tolerance * (reference + sum): *done; or after `most`. */
double fw_film_conjugate(fw_film_system *system, uint32_t first, double *u, double tolerance,
                         double reference, uint32_t most, bool *done);

/* A u = source without an obstacle. False: not converged. */
bool fw_film_solve_free(fw_film_system *system);

/* The obstacle problem u <= top: minimise u.A u / 2 - source.u. From the coarsest grid on that has
 * its cavities to the finest, each from the result of the one before. On a grid, again and again:
 * one projected Gauss-Seidel sweep each way, which settles who is at the obstacle; conjugate
 * gradients for the others; projection, and halving while the energy rises. Every step lowers the
 * energy and the sweep alone converges, so the whole does (truncated nonsmooth Newton multigrid,
 * Graeser & Kornhuber 2009, from memory). False: not converged. */
bool fw_film_solve_capped(fw_film_system *system, double top);

/* rest = source - A u on one level, no node held. */
void fw_film_full_rest(const fw_film_level *level, const double *u, double *rest);

/* Largest |min(a_i (top - u_i), rest_i)| over the largest source, on the finest level. */
double fw_film_residual(fw_film_system *system, double top);

#endif
