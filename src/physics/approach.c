#include "physics/approach.h"

#include "physics/bracket.h"
#include "physics/ode.h"
#include "physics/separation.h"

#include <math.h>
#include <stdbool.h>

/* In units of to_um and of the time in which the drive moves by it: s = start - t, give Y = h - s,
 * Y' = 1 - L Y h^3, and the force is k to Y. */
typedef struct closing {
    double start, l; /* s at rest; L = k to^4 / (C v) */
    fw_approach_stop stop;
} closing;

static double gap_of(const closing *c, double t, double give)
{
    return c->start - t + give;
}

/* s = 1 - L (Y + reach s) h^3, h the gap with that Y. The right side falls with s where Y >= 0 and
 * h >= 0, and s is between where the film lets nothing through and 1. */
static double slope(void *context, double t, double give, double reach)
{
    const closing *c = context;
    const double least = -fmin(give, gap_of(c, t, give)) / reach;
    fw_bracket bracket = {.at = {least, 1}, .value = {-1, (double)INFINITY}, .moved = -1};
    if (!(least < 1))
        return (double)NAN;
    bracket.value[0] = least - 1;
    bracket.value[1] = c->l * (give + reach) * pow(gap_of(c, t, give + reach), 3);
    for (int i = 0; i < 200 && bracket.at[1] - bracket.at[0] > 1e-15; i++) {
        const double s = fw_bracket_next(&bracket), y = give + reach * s;
        fw_bracket_put(&bracket, s, s - 1 + c->l * y * pow(gap_of(c, t, y), 3));
        if (bracket.value[1] == 0)
            break;
    }
    return bracket.at[bracket.moved == 0 ? 0 : 1];
}

static double at_the_stop(void *context, double t, double give, double slope_give)
{
    const closing *c = context;
    (void)slope_give;
    return 1 - (c->stop == FW_APPROACH_DRIVE ? c->start - t : gap_of(c, t, give));
}

static double shorter(void *context, double t, double give)
{
    return fmin(give, gap_of(context, t, give));
}

static fw_status check(const fw_approach *a, double tolerance, fw_fault *fault)
{
    if (!(a->integral_mm4 >= 0 && a->viscosity_mPa_s > 0 && a->speed_mm_s > 0 && a->to_um > 0 &&
          (a->from_um == 0 || a->from_um > a->to_um) && a->stiffness_N_mm >= 0 &&
          tolerance >= 1e-12 && tolerance <= 1e-3))
        return fw_fault_set(fault, FW_INPUT,
                            "integral %g mm4, viscosity %g mPa s, speed %g mm/s, gap %g um from "
                            "%g, stiffness %g N/mm or tolerance %g, approach, give values above "
                            "zero and a start beyond the end",
                            a->integral_mm4, a->viscosity_mPa_s, a->speed_mm_s, a->to_um,
                            a->from_um, a->stiffness_N_mm, tolerance);
    return FW_OK;
}

static const double forgotten = 92; /* 4 ln 1e10 */

fw_status fw_approach_solve(const fw_approach *a, double *force_N, double *gap_um, fw_fault *fault)
{
    const double tolerance = a->tolerance > 0 ? a->tolerance : 1e-6;
    FW_TRY(check(a, tolerance, fault));
    *force_N = fw_separation_q(a->viscosity_mPa_s, a->speed_mm_s, a->to_um) * a->integral_mm4;
    *gap_um = a->to_um;
    if (a->stiffness_N_mm == 0 || isinf(a->stiffness_N_mm) || a->integral_mm4 == 0)
        return FW_OK;
    const double spring_N = a->stiffness_N_mm * a->to_um / 1000;
    closing c = {.l = spring_N / *force_N, .stop = a->stop};
    c.start = pow(1 + forgotten / c.l, 0.25);
    if (a->from_um > 0)
        c.start = fmin(c.start, a->from_um / a->to_um);
    const fw_ode ode = {.slope = slope,
                        .event = at_the_stop,
                        .scale = shorter,
                        .context = &c,
                        .tolerance = tolerance,
                        .first_step = 0.1 * fmin(1 / (c.l * pow(c.start, 3)), c.start)};
    fw_ode_point point = {0, 0, 1};
    FW_TRY(fw_ode_until(&ode, &point, fault));
    *force_N = spring_N * point.y;
    *gap_um = a->to_um * gap_of(&c, point.t, point.y);
    return FW_OK;
}

/* Gaps in um: d(1 / h^2) / dt = 1000 q / (6 eta), q = F / G, see fw_separation_q. */
double fw_approach_gap_um(const fw_approach *approach, double force_N, double from_um,
                          double seconds)
{
    const double q = force_N / approach->integral_mm4;
    const double closed = 1000 * q / (6 * approach->viscosity_mPa_s) * seconds;
    return 1 / sqrt(1 / (from_um * from_um) + closed);
}
