#include "physics/column.h"

#include <math.h>

static const double pi = 3.14159265358979323846;

/* The first root above 0 of tan x = x. */
static const double tangent_root = 4.49340945790906417530788;

/* pi / K: the uniform column's buckling number. */
static double uniform_root(fw_column_ends ends)
{
    switch (ends) {
    case FW_COLUMN_PINNED_PINNED:
    case FW_COLUMN_FIXED_FIXED_SWAY:
        return pi;
    case FW_COLUMN_FIXED_FIXED:
        return 2.0 * pi;
    case FW_COLUMN_FIXED_PINNED:
        return tangent_root;
    case FW_COLUMN_FIXED_FREE:
    case FW_COLUMN_FIXED_PINNED_SWAY:
        return 0.5 * pi;
    }
    return (double)NAN;
}

double fw_column_effective(fw_column_ends ends)
{
    return pi / uniform_root(ends);
}

/* Above 0 below the root: (d2 - d1) sin t + d1 t cos t, which is sin t times a function that only
 * falls on (0, pi), from d2 to minus infinity. */
static double free_tip(double t, double d1, double d2)
{
    return (d2 - d1) * sin(t) + d1 * t * cos(t);
}

/* Above 0 below the root, on [pi, 2 pi): atan(k/x1) - atan(k/x2) is written as one atan, so that it
 * keeps its digits where d1 comes near d2. The left side only grows with t. */
static double fixed_sway(double t, double d1, double d2)
{
    double q = (d2 - d1) / d1 * ((d2 - d1) / d2);
    return pi + atan(t * q / (q + t * t)) - t;
}

/* Halves [low, high] until no double lies between: at most some 60 steps, since low > 0 only at the
 * first step or where the root is near 0. */
static double bisect(double (*f)(double, double, double), double d1, double d2, double low,
                     double high)
{
    for (int step = 0; step < 200; step++) {
        double middle = 0.5 * (low + high);
        if (!(middle > low && middle < high))
            break;
        if (f(middle, d1, d2) > 0.0)
            low = middle;
        else
            high = middle;
    }
    return low;
}

static double frustum_root(fw_column_ends ends, double d1, double d2)
{
    switch (ends) {
    case FW_COLUMN_FIXED_FREE:
    case FW_COLUMN_FIXED_PINNED_SWAY:
        return bisect(free_tip, d1, d2, 0.0, pi);
    case FW_COLUMN_FIXED_FIXED_SWAY:
        return bisect(fixed_sway, d1, d2, pi, 2.0 * pi);
    case FW_COLUMN_PINNED_PINNED:
    case FW_COLUMN_FIXED_FIXED:
    case FW_COLUMN_FIXED_PINNED:
        break;
    }
    return uniform_root(ends);
}

double fw_column_uniform_N(fw_column_ends ends, double e_MPa, double inertia_mm4, double length_mm)
{
    if (!(e_MPa > 0.0 && inertia_mm4 > 0.0 && length_mm > 0.0))
        return (double)NAN;
    double t = uniform_root(ends) / length_mm;
    return t * t * e_MPa * inertia_mm4;
}

double fw_column_frustum_N(fw_column_ends ends, double e_MPa, double d1_mm, double d2_mm,
                           double length_mm)
{
    if (!(e_MPa > 0.0 && d1_mm > 0.0 && d2_mm > 0.0 && length_mm > 0.0))
        return (double)NAN;
    double t = frustum_root(ends, d1_mm, d2_mm) / length_mm;
    double inertia_mm4 = pi / 64.0 * (d1_mm * d1_mm) * (d2_mm * d2_mm);
    return t * t * e_MPa * inertia_mm4;
}
