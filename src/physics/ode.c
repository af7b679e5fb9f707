#include "physics/ode.h"

#include "physics/bracket.h"

#include <float.h>
#include <math.h>
#include <stdbool.h>

enum { STAGES = 5, MOST_STEPS = 100000, MOST_LOOKS = 60 };

static const double diagonal = 0.25;
static const double node[STAGES] = {1.0 / 4, 3.0 / 4, 11.0 / 20, 1.0 / 2, 1};
/* Row by row, less the diagonal; the last row, with it, is the solution of order 4. */
static const double weight[STAGES][STAGES - 1] = {{0},
                                                  {1.0 / 2},
                                                  {17.0 / 50, -1.0 / 25},
                                                  {371.0 / 1360, -137.0 / 2720, 15.0 / 544},
                                                  {25.0 / 24, -49.0 / 48, 125.0 / 16, -85.0 / 12}};
/* Order 4 less order 3. */
static const double difference[STAGES] = {-3.0 / 16, -27.0 / 32, 25.0 / 32, 0, 1.0 / 4};

/* Returns the difference of the two orders; NAN where a stage has no slope. */
static double step(const fw_ode *ode, const fw_ode_point *from, double length, fw_ode_point *to)
{
    double slope[STAGES], error = 0;
    *to = *from;
    for (int i = 0; i < STAGES; i++) {
        double rise = 0;
        for (int j = 0; j < i; j++)
            rise += weight[i][j] * slope[j];
        to->t = from->t + node[i] * length;
        const double base = from->y + length * rise;
        slope[i] = ode->slope(ode->context, to->t, base, length * diagonal);
        if (isnan(slope[i]))
            return (double)NAN;
        to->y = base + length * diagonal * slope[i];
        error += slope[i] * difference[i];
    }
    to->slope = slope[STAGES - 1];
    return length * error;
}

/* Error of the step over what is allowed; INFINITY where it led nowhere. */
static double excess(const fw_ode *ode, double error, const fw_ode_point *to)
{
    if (isnan(error))
        return (double)INFINITY;
    const double scale = ode->scale(ode->context, to->t, to->y);
    return scale > 0 ? fabs(error) / (ode->tolerance * scale) : (double)INFINITY;
}

static double next_length(double length, double over)
{
    return length * fmin(fmax(0.9 * pow(over, -0.25), 0.2), 5.0);
}

static double event_at(const fw_ode *ode, const fw_ode_point *point)
{
    return ode->event(ode->context, point->t, point->y, point->slope);
}

/* The event lies within the step from -> to. Leaves it in *to. */
static void close_in(const fw_ode *ode, double start_t, const fw_ode_point *from, fw_ode_point *to)
{
    fw_bracket bracket = {
        .at = {0, to->t - from->t}, .value = {event_at(ode, from), event_at(ode, to)}, .moved = -1};
    double last = bracket.at[1];
    for (int look = 0; look < MOST_LOOKS && bracket.value[1] > 0; look++) {
        const double length = fw_bracket_next(&bracket);
        const bool nowhere = isnan(step(ode, from, length, to));
        fw_bracket_put(&bracket, length, nowhere ? bracket.value[1] : event_at(ode, to));
        if (fabs(length - last) <= ode->tolerance * (to->t - start_t))
            break;
        last = length;
    }
}

static fw_status stuck(double t, fw_fault *fault)
{
    return fw_fault_set(fault, FW_MACHINE,
                        "the motion did not converge, at %g of its own time, report this", t);
}

fw_status fw_ode_until(const fw_ode *ode, fw_ode_point *point, fw_fault *fault)
{
    const double start_t = point->t;
    double length = ode->first_step;
    if (event_at(ode, point) >= 0)
        return FW_OK;
    for (int i = 0; i < MOST_STEPS; i++) {
        fw_ode_point to;
        const double error = step(ode, point, length, &to);
        const double over = excess(ode, error, &to);
        if (over <= 1 && event_at(ode, &to) >= 0) {
            close_in(ode, start_t, point, &to);
            *point = to;
            return FW_OK;
        }
        if (over <= 1)
            *point = to;
        length = next_length(length, over);
        if (!(length > 4 * DBL_EPSILON * fabs(point->t)))
            break;
    }
    return stuck(point->t, fault);
}
