/* The film equation of one cluster, made once and solved for any obstacle. */
#ifndef FW_FILM_SYSTEM_H
#define FW_FILM_SYSTEM_H

#include "physics/film_levels.h"

typedef struct fw_film_system {
    double px_mm;
    double tolerance; /* relative, of the force */
    bool coarse;      /* see fw_film_solution */
    fw_film_grid grid;
    fw_film_levels *levels;
    double *u, *rest, *step, *direction, *product; /* [nodes] */
    double *trial, *correction;                    /* [nodes] once the obstacle was met */
    bool *held, *was_held;                         /* [nodes] at the obstacle; likewise */
    uint32_t iterations;
} fw_film_system;

/* Checks shape and options (not obstacle_mm2) and builds all grids. Free in any case. */
fw_status fw_film_system_build(const fw_film_shape *shape, const fw_film_options *options,
                               fw_film_system *out, fw_fault *fault);
void fw_film_system_free(fw_film_system *system);

/* The result does not depend on earlier calls. */
fw_status fw_film_system_solve(fw_film_system *system, double obstacle_mm2, fw_film_solution *out,
                               fw_fault *fault);

#endif
