/* Separation laws that are measured, not derived: the pull of a layer from its outline alone.
 *
 * A tensioned film peels off a layer from its rim inward. Two laws:
 *   film   F = area_MPa A + rim_N_mm L, A the solid area, L the rim open to the vat. The rim's part
 * acts within front_mm of it. A sealed cavity adds cavity_MPa times its area: the film cannot let
 *          liquid in, so this is as much as the liquid holds. Empirical (a linear law in area and
 *          perimeter, fitted to coupons); valid within the areas and shapes of those coupons.
 *   table  F(A) through given points (area of a region with its sealed cavities, force), straight
 * between them, through the origin before the first and on along the last stretch; even over the
 *          region. It says nothing of shape.
 * Neither knows the gap, the viscosity or the speed: they hold for the machine, resin and settings
 * with which they were measured.
 *
 * And one that is derived, since it has the same form:
 *   shear  area_MPa on every solid area, sideways: the film between a layer and a window that
 * slides (Couette flow, fw_separation_shear_MPa). Nothing on cavities: they are too deep.
 *
 * The rim is measured on blocks: within one, the sides of a staircase count as the straight wall
 * across them (sqrt(l_x^2 + l_y^2)), since pixel faces alone are 27 % too long on a disc. Within 2
 * % on discs from 20 px radius on; a corner loses up to 0.6 of a block.
 */
#ifndef FW_TRACTION_H
#define FW_TRACTION_H

#include "physics/cards.h"
#include "physics/film.h"

typedef enum fw_traction_law {
    FW_TRACTION_NONE,
    FW_TRACTION_FILM,
    FW_TRACTION_TABLE,
    FW_TRACTION_SHEAR
} fw_traction_law;

typedef struct fw_traction {
    fw_traction_law law;
    double area_MPa, rim_N_mm, front_mm, cavity_MPa; /* film */
    const fw_points *table;                          /* table: mm2, N; areas ascend from above 0 */
} fw_traction;

/* Fills *out as fw_film_solve does, with u in MPa (that is, for q = 1 in its units): integral_mm4
 * is the force in N. Nothing is capped. Free with fw_film_solution_free. FW_MACHINE: no memory. */
fw_status fw_traction_solve(const fw_film_shape *shape, const fw_traction *traction,
                            fw_film_solution *out, fw_fault *fault);

/* Force in N of a region of area_mm2 by the table. */
double fw_traction_table_N(const fw_points *table, double area_mm2);

#endif
