#include "physics/pulloff.h"

#include "physics/bracket.h"
#include "physics/ode.h"
#include "physics/separation.h"

#include <math.h>
#include <stdbool.h>

/* ---- the motion ---- */

/* In units of the gap and of the time in which the drive moves by one gap: X = x / h0,
 * W = 1 - (1 + X)^-2, R = q / q0 with q0 of the rigid machine; W' = 2 R, force = (k h0) (T - X). */
typedef struct motion {
    const fw_pulloff_law *law;
    double q0, rigid_N; /* of the rigid machine */
    double spring_N;    /* k h0 */
    double tolerance;
    /* The point of the law looked at last, and the slope there: the next one lies close by. */
    double pace, force_N, rise_N;
    uint32_t evaluations;
} motion;

/* X of W < 1, and back. */
static double way(double w)
{
    return expm1(-0.5 * log1p(-w));
}

static double way_back(double x)
{
    return -expm1(-2 * log1p(x));
}

static double look(motion *m, double pace)
{
    m->evaluations++;
    return m->law->force_N(m->law->context, pace * m->q0);
}

/* Takes in a point; the secant's slope where the two points are far enough apart to tell. */
static void move_to(motion *m, double pace, double force_N)
{
    const double rise_N = (force_N - m->force_N) / (pace - m->pace);
    if (fabs(pace - m->pace) > 1e-6 * pace && rise_N > 0)
        m->rise_N = rise_N;
    m->pace = pace;
    m->force_N = force_N;
}

/* What the spring still lacks of the film's force at the last point of the law, if W = w + 2 reach
 * R there; and the next R by Newton, with the secant for the law's slope. */
static double lack(const motion *m, double t, double w, double reach, double *next)
{
    const double x = way(w + 2 * reach * m->pace);
    const double off = m->force_N - m->spring_N * (t - x);
    *next = m->pace - off / (m->rise_N + m->spring_N * reach * pow(1 + x, 3));
    return off;
}

enum { MOST_SECANTS = 200 };

/* W' = 2 R with F(q0 R) = (k h0) (T - X(w + 2 reach R)): the left side rises with R, the right
 * falls, and it is 0 at X = T. So R lies in a bracket from the start; steps that leave it, or halve
 * the lack too slowly, go to its middle. The last step is taken without another look at the law. */
static double slope(void *context, double t, double w, double reach)
{
    motion *m = context;
    double low = 0, high = (way_back(t) - w) / (2 * reach), next, last = (double)INFINITY;
    if (!(high > 0))
        return (double)NAN;
    if (!(m->pace > low && m->pace < high))
        move_to(m, high / 2, look(m, high / 2));
    double off = lack(m, t, w, reach, &next);
    for (int i = 0; i < MOST_SECANTS; i++) {
        const bool slow = i > 2 && fabs(off) > last / 2;
        if (!(next > low && next < high) || slow)
            next = low + (high - low) / 2;
        last = fabs(off);
        move_to(m, next, look(m, next));
        off = lack(m, t, w, reach, &next);
        *(off < 0 ? &low : &high) = m->pace;
        if (fabs(off) <= 0.1 * m->tolerance * m->force_N || !(high - low > 1e-15 * high))
            break;
    }
    return 2 * (next > low && next < high ? next : m->pace);
}

/* x' / v reaches 1 less the tolerance. The peak lies ahead at a larger gap, so it is at most F(q0 /
 * (1 + X)^3) now, and since F is concave at most the force now over x' / v: the rest of the way
 * adds less than the tolerance. A very stiff machine comes no nearer to 1 in any time worth
 * following. */
static double as_fast_as_the_drive(void *context, double t, double w, double slope_w)
{
    const motion *m = context;
    (void)t;
    return slope_w / 2 * pow(1 - w, -1.5) - (1 - m->tolerance);
}

/* An error of W as one of X, dX = dW (1 + X)^3 / 2, in the spring's way T - X (the force) and in
 * the gap 1 + X, whichever is less. */
static double give_or_gap(void *context, double t, double w)
{
    (void)context;
    const double x = way(w);
    return 2 * pow(1 - w, 1.5) * fmin(t - x, 1 + x);
}

static double tolerance_of(const fw_pulloff *pulloff)
{
    return pulloff->tolerance > 0 ? pulloff->tolerance : 1e-4;
}

static bool rigid(const fw_pulloff *pulloff)
{
    return pulloff->stiffness_N_mm == 0 || isinf(pulloff->stiffness_N_mm);
}

static fw_status check(const fw_pulloff *pulloff, fw_fault *fault)
{
    const double tolerance = tolerance_of(pulloff);
    if (!(pulloff->viscosity_mPa_s > 0 && pulloff->speed_mm_s > 0 && pulloff->gap_um > 0 &&
          pulloff->stiffness_N_mm >= 0 && tolerance >= 1e-12 && tolerance <= 1e-3))
        return fw_fault_set(fault, FW_INPUT,
                            "viscosity %g mPa s, speed %g mm/s, gap %g um, stiffness %g N/mm or "
                            "tolerance %g, pull-off, give values above zero",
                            pulloff->viscosity_mPa_s, pulloff->speed_mm_s, pulloff->gap_um,
                            pulloff->stiffness_N_mm, tolerance);
    return FW_OK;
}

/* The first step: a tenth of the time in which the spring alone would reach the rigid force, or the
 * soft machine's peak, whichever is sooner. */
static fw_status move(motion *m, fw_ode_point *point, fw_fault *fault)
{
    const double stiff = m->rigid_N / m->spring_N;
    const fw_ode ode = {.slope = slope,
                        .event = as_fast_as_the_drive,
                        .scale = give_or_gap,
                        .context = m,
                        .tolerance = m->tolerance,
                        .first_step = 0.1 * fmin(stiff, sqrt(stiff))};
    *point = (fw_ode_point){0};
    return fw_ode_until(&ode, point, fault);
}

static fw_status begin(const fw_pulloff *pulloff, motion *m, fw_fault *fault)
{
    *m = (motion){
        .law = &pulloff->law,
        .q0 = fw_separation_q(pulloff->viscosity_mPa_s, pulloff->speed_mm_s, pulloff->gap_um),
        .spring_N = pulloff->stiffness_N_mm * pulloff->gap_um / 1000,
        .tolerance = tolerance_of(pulloff)};
    m->rigid_N = look(m, 1);
    move_to(m, 1, m->rigid_N);
    if (!(m->rigid_N >= 0 && isfinite(m->rigid_N)))
        return fw_fault_set(fault, FW_INPUT, "force %g N, load law at q = %g, give a finite one",
                            m->rigid_N, m->q0);
    return FW_OK;
}

fw_status fw_pulloff_solve(const fw_pulloff *pulloff, fw_pulloff_peak *peak, fw_fault *fault)
{
    motion m;
    FW_TRY(check(pulloff, fault));
    FW_TRY(begin(pulloff, &m, fault));
    *peak = (fw_pulloff_peak){m.rigid_N, 0, pulloff->gap_um, m.evaluations};
    if (rigid(pulloff) || m.rigid_N == 0)
        return FW_OK;
    fw_ode_point point;
    FW_TRY(move(&m, &point, fault));
    const double x = way(point.y);
    *peak = (fw_pulloff_peak){.force_N = m.spring_N * (point.t - x),
                              .seconds = point.t * pulloff->gap_um / 1000 / pulloff->speed_mm_s,
                              .gap_um = pulloff->gap_um * (1 + x),
                              .evaluations = m.evaluations};
    return FW_OK;
}

/* ---- the other way round ---- */

/* The smallest q of a force, to the last digits; INFINITY where no q gives as much. */
static double q_of_force(const fw_pulloff_law *law, double force_N)
{
    fw_bracket bracket = {
        .at = {0, 1}, .value = {-force_N, law->force_N(law->context, 1) - force_N}, .moved = -1};
    while (bracket.value[1] < 0 && bracket.at[1] < 1e60) {
        bracket.at[0] = bracket.at[1];
        bracket.value[0] = bracket.value[1];
        bracket.at[1] *= 16;
        bracket.value[1] = law->force_N(law->context, bracket.at[1]) - force_N;
    }
    if (bracket.value[1] < 0)
        return (double)INFINITY;
    for (int i = 0; i < MOST_SECANTS && bracket.value[1] > 0; i++) {
        const double q = fw_bracket_next(&bracket);
        fw_bracket_put(&bracket, q, law->force_N(law->context, q) - force_N);
        if (!(bracket.at[1] - bracket.at[0] > 1e-15 * bracket.at[1]))
            break;
    }
    return bracket.at[1];
}

/* ln(peak / aim) at a speed, the aim half of what is allowed under the limit. */
static fw_status log_over(const fw_pulloff *pulloff, double speed_mm_s, double aim_N, double *over,
                          fw_fault *fault)
{
    fw_pulloff at = *pulloff;
    at.speed_mm_s = speed_mm_s;
    fw_pulloff_peak peak;
    FW_TRY(fw_pulloff_solve(&at, &peak, fault));
    *over = log(peak.force_N / aim_N);
    return FW_OK;
}

/* Between two speeds, the slower one within the limit. */
static fw_status close_in(const fw_pulloff *pulloff, double aim_N, fw_bracket *bracket,
                          double *speed_mm_s, fw_fault *fault)
{
    const double window = 2 * tolerance_of(pulloff);
    double over = bracket->value[0];
    *speed_mm_s = exp(bracket->at[0]);
    while (over < -window && bracket->at[1] - bracket->at[0] > window) {
        const double at = fw_bracket_next(bracket);
        double here;
        FW_TRY(log_over(pulloff, exp(at), aim_N, &here, fault));
        fw_bracket_put(bracket, at, here);
        if (here <= window / 2) { /* within the limit, and nearer to it than what came before */
            over = here;
            *speed_mm_s = exp(at);
        }
    }
    return FW_OK;
}

/* The rigid machine's speed at the limit is never too fast. */
fw_status fw_pulloff_fastest(const fw_pulloff *pulloff, double limit_N, double *speed_mm_s,
                             fw_fault *fault)
{
    FW_TRY(check(pulloff, fault));
    const double tolerance = tolerance_of(pulloff), most = pulloff->speed_mm_s;
    *speed_mm_s = 0;
    if (!(limit_N > 0))
        return FW_OK;
    fw_pulloff_peak peak;
    FW_TRY(fw_pulloff_solve(pulloff, &peak, fault));
    if (peak.force_N <= limit_N) {
        *speed_mm_s = most;
        return FW_OK;
    }
    const double aim_N = limit_N * (1 - 2 * tolerance);
    const double safe = q_of_force(&pulloff->law, aim_N) /
                        fw_separation_q(pulloff->viscosity_mPa_s, 1, pulloff->gap_um);
    fw_bracket bracket = {.at = {log(fmin(safe, most)), log(most)},
                          .value = {0, log(peak.force_N / aim_N)},
                          .moved = -1};
    *speed_mm_s = fmin(safe, most);
    if (rigid(pulloff))
        return FW_OK;
    FW_TRY(log_over(pulloff, *speed_mm_s, aim_N, &bracket.value[0], fault));
    return close_in(pulloff, aim_N, &bracket, speed_mm_s, fault);
}

/* Gaps in um: 6 eta / (q h^2) is in 1e-3 s, see fw_separation_q. */
double fw_pulloff_seconds(const fw_pulloff *pulloff, double force_N, double from_um, double to_um)
{
    if (!(force_N > 0))
        return (double)INFINITY;
    const double q = q_of_force(&pulloff->law, force_N);
    const double opened = 1 / (from_um * from_um) - 1 / (to_um * to_um);
    return 6 * pulloff->viscosity_mPa_s / (1000 * q) * opened;
}
