#include "physics/cure.h"

#include <math.h>
#include <stddef.h>

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

fw_status fw_cure_fit(const double at[2][2], double *penetration_um, double *critical_mJ_cm2,
                      fw_fault *fault)
{
    const double rise_um = at[1][1] - at[0][1], log_rise = log(at[1][0] / at[0][0]);
    const double dp = rise_um / log_rise;
    if (!(at[0][0] > 0 && at[1][0] > 0 && at[0][1] > 0 && at[1][1] > 0 && dp > 0 && isfinite(dp)))
        return fw_fault_set(fault, FW_INPUT,
                            "depths %g um at %g and %g um at %g mJ/cm2, working curve, give two "
                            "doses of which the larger cures deeper",
                            at[0][1], at[0][0], at[1][1], at[1][0]);
    *penetration_um = dp;
    *critical_mJ_cm2 = at[0][0] * exp(-at[0][1] / dp);
    return FW_OK;
}

bool fw_cure_is_response(const fw_points *points)
{
    const int last = points->count - 1;
    if (last < 1 || last >= FW_CARD_POINTS)
        return false;
    for (int i = 0; i < last; i++) /* written so that a NAN is refused */
        if (!(points->at[i + 1][0] > points->at[i][0] && points->at[i + 1][1] >= points->at[i][1]))
            return false;
    return points->at[0][0] == 0 && points->at[0][1] == 0 && points->at[last][0] == 1 &&
           points->at[last][1] == 1;
}

/* Between two pairs, each end to the bit. */
static double between(const double a[2], const double b[2], double at)
{
    const double part = (at - a[0]) / (b[0] - a[0]);
    return (1 - part) * a[1] + part * b[1];
}

double fw_cure_response(const fw_points *response, double grey)
{
    if (response == NULL || response->count == 0)
        return grey;
    int i = 1;
    while (i + 1 < response->count && response->at[i][0] < grey)
        i++;
    return between(response->at[i - 1], response->at[i], grey);
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

/* Bisection over the greys: response of low < share <= response of high. */
static int32_t least_with(const fw_points *response, double share, int32_t full)
{
    int32_t low = 0, high = full;
    while (high - low > 1) {
        const int32_t middle = low + (high - low) / 2;
        *(fw_cure_response(response, (double)middle / full) < share ? &low : &high) = middle;
    }
    return high;
}

int32_t fw_cure_solid_least(const fw_resin *resin, const fw_points *response, double layer_um,
                            int32_t full)
{
    double need_mJ_cm2 =
        fw_cure_dose(resin->penetration_um, resin->joint_ratio * resin->critical_mJ_cm2, layer_um);
    double share = need_mJ_cm2 / resin->exposure_mJ_cm2;
    return share <= 1.0 ? least_with(response, share, full) : INT32_MAX;
}

/* 1 - exp(-t / Dp) as -expm1, which keeps its digits for thin layers. */
double fw_cure_print_through_um(const fw_resin *resin, double layer_um)
{
    double log_dose = log(resin->exposure_mJ_cm2 / resin->critical_mJ_cm2);
    double log_rest = log(-expm1(-layer_um / resin->penetration_um));
    double depth_um = resin->penetration_um * (log_dose - log_rest) - layer_um;
    return fmax(depth_um, 0.0);
}

double fw_cure_dose_after(const fw_resin *resin, double layer_um, double depth_um, double layers)
{
    const double thick = layer_um / resin->penetration_um;
    return resin->exposure_mJ_cm2 * exp(-depth_um / resin->penetration_um) *
           (expm1(-layers * thick) / expm1(-thick));
}

fw_cure_column fw_cure_column_begin(const fw_resin *resin, double depth_um)
{
    return (fw_cure_column){0, resin->exposure_mJ_cm2 * exp(-depth_um / resin->penetration_um)};
}

void fw_cure_column_add(fw_cure_column *column, double share, double through)
{
    column->dose_mJ_cm2 += share * column->light;
    column->light *= through;
}

double fw_cure_green(const fw_points *measured, double critical_mJ_cm2, double dose_mJ_cm2)
{
    const int last = measured->count - 1;
    if (last == 0 || dose_mJ_cm2 >= measured->at[last][0])
        return measured->at[last][1];
    if (!(dose_mJ_cm2 > critical_mJ_cm2))
        return 0;
    int i = 0;
    while (measured->at[i][0] < dose_mJ_cm2)
        i++;
    const double gel[2] = {critical_mJ_cm2, 0}, *below = i > 0 ? measured->at[i - 1] : gel;
    const double from[2] = {log(below[0]), below[1]};
    const double to[2] = {log(measured->at[i][0]), measured->at[i][1]};
    return between(from, to, log(dose_mJ_cm2));
}
