#include "physics/film_curve.h"

#include "physics/film_system.h"

#include <math.h>

/* Where the next point goes, as a multiple of the last q: dense just above q_cap, where the curve
 * bends most (a disc loses a third of its slope within 25 %), then in growing steps. */
static const double growth[FW_FILM_CURVE_POINTS - 1] = {1.25, 1.35, 1.6, 2, 2.5, 3, 4, 4};

static const double agreement = 0.01; /* of P A: chord and tangent to the end of the curve */

/* F = a - b z, z = q^(-1/2): the chord through two points, at q. q1 may be INFINITY. */
static double chord(double q0, double f0, double q1, double f1, double q)
{
    double z0 = 1 / sqrt(q0), z1 = 1 / sqrt(q1), z = 1 / sqrt(q);
    return f0 + (f1 - f0) * (z0 - z) / (z0 - z1);
}

/* The tangent at the last point, as a line in z, reaches z = 0 close to P A. */
static bool reaches_end(const fw_film_curve *curve)
{
    uint32_t last = curve->count - 1;
    double limit = curve->cap_MPa * curve->area_mm2;
    /* dF/dz = -2 q^(3/2) dF/dq, times -z = -q^(-1/2) */
    double end = curve->force_N[last] + 2 * curve->q[last] * curve->tangent_mm4[last];
    return fabs(end - limit) <= agreement * limit;
}

static fw_status add_point(fw_film_system *system, fw_film_curve *curve, double q, fw_fault *fault)
{
    fw_film_solution solution;
    FW_TRY(fw_film_system_solve(system, curve->cap_MPa / q, &solution, fault));
    curve->q[curve->count] = q;
    curve->force_N[curve->count] = q * solution.integral_mm4;
    curve->tangent_mm4[curve->count++] = solution.tangent_mm4;
    fw_film_solution_free(&solution);
    return FW_OK;
}

static void start(const fw_film_solution *uncapped, double cap_MPa, fw_film_curve *out)
{
    out->area_mm2 = uncapped->area_mm2;
    out->integral_mm4 = uncapped->integral_mm4;
    if (!(uncapped->peak_u_mm2 > 0))
        return;
    out->count = 1;
    out->q[0] = cap_MPa / uncapped->peak_u_mm2;
    out->force_N[0] = out->q[0] * uncapped->integral_mm4;
    out->tangent_mm4[0] = uncapped->integral_mm4;
}

static fw_status fill(fw_film_system *system, const fw_film_solution *uncapped, double cap_MPa,
                      fw_film_curve *out, fw_fault *fault)
{
    fw_film_solution own = {0};
    if (uncapped == NULL) {
        FW_TRY(fw_film_system_solve(system, INFINITY, &own, fault));
        uncapped = &own;
    }
    start(uncapped, cap_MPa, out);
    fw_film_solution_free(&own);
    while (out->count > 0 && out->count < FW_FILM_CURVE_POINTS && isfinite(cap_MPa) &&
           !reaches_end(out)) {
        double q = out->q[out->count - 1] * growth[out->count - 1];
        FW_TRY(add_point(system, out, q, fault));
    }
    return FW_OK;
}

fw_status fw_film_curve_build(const fw_film_shape *shape, const fw_film_options *options,
                              double cap_MPa, const fw_film_solution *uncapped, fw_film_curve *out,
                              fw_fault *fault)
{
    fw_film_system system;
    *out = (fw_film_curve){.cap_MPa = cap_MPa};
    if (!(cap_MPa > 0))
        return fw_fault_set(fault, FW_INPUT, "cap %g MPa, load curve, give one above zero",
                            cap_MPa);
    fw_status status = fw_film_system_build(shape, options, &system, fault);
    if (status == FW_OK)
        status = fill(&system, uncapped, cap_MPa, out, fault);
    fw_film_system_free(&system);
    if (status != FW_OK)
        *out = (fw_film_curve){0};
    return status;
}

static double tangent_at(const fw_film_curve *curve, uint32_t i, double q)
{
    return curve->force_N[i] + curve->tangent_mm4[i] * (q - curve->q[i]);
}

double fw_film_curve_force(const fw_film_curve *curve, double q)
{
    if (curve->count == 0)
        return 0;
    if (q <= curve->q[0])
        return q * curve->integral_mm4;
    uint32_t i = 0; /* the last point at or below q */
    while (i + 1 < curve->count && curve->q[i + 1] <= q)
        i++;
    bool last = i + 1 == curve->count;
    double limit = curve->cap_MPa * curve->area_mm2;
    double force =
        last ? chord(curve->q[i], curve->force_N[i], INFINITY, limit, q)
             : chord(curve->q[i], curve->force_N[i], curve->q[i + 1], curve->force_N[i + 1], q);
    if (isinf(q))
        return limit;
    force = fmin(force, tangent_at(curve, i, q));
    return last ? force : fmin(force, tangent_at(curve, i + 1, q));
}
