#include "physics/film.h"

#include "physics/film_system.h"

#include <math.h>
#include <stdlib.h>

fw_status fw_film_solve(const fw_film_shape *shape, const fw_film_options *options,
                        fw_film_solution *out, fw_fault *fault)
{
    fw_film_system system;
    *out = (fw_film_solution){0};
    fw_status status = fw_film_system_build(shape, options, &system, fault);
    if (status == FW_OK)
        status = fw_film_system_solve(&system, options->obstacle_mm2, out, fault);
    fw_film_system_free(&system);
    return status;
}

/* Measured on lattices (cells of 1 px, the worst): 290 bytes a cell, 440 at the cap. */
enum { CELL_BYTES = 440 };

/* A run of film touches at most length / block + 2 blocks, shared with the other rows of the block;
 * that a row of blocks may hold several pieces is made up for by counting each row on its own. */
size_t fw_film_work_bytes(const fw_film_shape *shape, const fw_film_options *options)
{
    const int32_t block = options->cell_px > 0     ? options->cell_px
                          : options->chosen_px > 0 ? options->chosen_px
                                                   : fw_film_choose_cell(shape);
    double cells = shape->cavity_count;
    for (uint32_t i = 0; i < shape->film.count; i++)
        cells += ((double)(shape->film.run[i].x1 - shape->film.run[i].x0) / block + 2) / block;
    if (options->cell_px == 0)
        cells = fmin(cells, FW_FILM_MOST_CELLS);
    return (size_t)(cells * CELL_BYTES);
}

void fw_film_solution_free(fw_film_solution *solution)
{
    free(solution->cell);
    free(solution->cavity_u_mm2);
    free(solution->cavity_area_mm2);
    *solution = (fw_film_solution){0};
}

size_t fw_film_solution_bytes(const fw_film_solution *solution)
{
    return sizeof *solution + solution->cell_count * sizeof *solution->cell +
           2 * solution->cavity_count * sizeof(double);
}
