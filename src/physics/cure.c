#include "physics/cure.h"

#include <math.h>

double fw_cure_depth_um(double penetration_um, double critical_mJ_cm2, double dose_mJ_cm2)
{
    if (!(dose_mJ_cm2 > critical_mJ_cm2))
        return 0.0;
    return penetration_um * log(dose_mJ_cm2 / critical_mJ_cm2);
}

double fw_cure_dose(double penetration_um, double critical_mJ_cm2, double depth_um)
{
    return critical_mJ_cm2 * exp(depth_um / penetration_um);
}

/* The rounded product can lie one grey too low: the test itself decides. Never too high, since for
 * full = 2^depth - 1 the double (g / full) * full is g again. */
int32_t fw_cure_intended_least(double intent_level, int32_t full)
{
    int32_t least = (int32_t)fmin(fmax(ceil(intent_level * full), 1.0), full);
    while (least < full && (double)least / full < intent_level)
        least++;
    return least;
}

int32_t fw_cure_solid_least(const fw_resin *resin, double layer_um, int32_t full)
{
    double need_mJ_cm2 =
        fw_cure_dose(resin->penetration_um, resin->joint_ratio * resin->critical_mJ_cm2, layer_um);
    double share = need_mJ_cm2 / resin->exposure_mJ_cm2;
    if (!(share <= 1.0))
        return INT32_MAX;
    return fw_cure_intended_least(share, full);
}

/* 1 - exp(-t / Dp) as -expm1, which keeps its digits for thin layers. */
double fw_cure_print_through_um(const fw_resin *resin, double layer_um)
{
    double log_dose = log(resin->exposure_mJ_cm2 / resin->critical_mJ_cm2);
    double log_rest = log(-expm1(-layer_um / resin->penetration_um));
    double depth_um = resin->penetration_um * (log_dose - log_rest) - layer_um;
    return fmax(depth_um, 0.0);
}
