#include "physics/strength.h"

#include <math.h>

double fw_strength_tension_N(double tensile_MPa, double area_mm2)
{
    return tensile_MPa * area_mm2;
}

double fw_strength_adhesion_N(double adhesion_MPa, double area_mm2)
{
    return adhesion_MPa * area_mm2;
}

double fw_strength_margin(double capacity_N, double demand_N)
{
    if (!(demand_N > 0.0))
        return (double)NAN;
    return capacity_N / demand_N;
}
