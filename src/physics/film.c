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
