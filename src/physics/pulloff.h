/* A layer that is drawn off the window through a machine that gives.
 *
 * The drive moves at v from rest; frame, plate and posts between drive and layer are one spring of
 * stiffness k, and the layer lags behind. With x = how far the layer has moved, h = h0 + x:
 *
 *     k (v t - x) = F(q),  q = 12 eta x' / h^3
 *
 * (probe tack with machine stiffness, Francis and Horn 2001 from memory; flat plates derived here).
 * F is the layer's own load law (film.h, film_curve.h). The force rises until the layer is as fast
 * as the drive, x' = v, and falls from then on: at x' = v the layer always gains speed, so there is
 * one peak. It lies below F(12 eta v / h0^3), the force of a rigid machine, and nears it for stiff
 * ones; for F = C x' / h^3 and L = k h0^4 / (C v) -> 0 it nears sqrt(k C v) / h0.
 *
 * Method: W = 1 - (h0 / h)^2 turns the motion into W' = 2 (v / h0) q / q0, which is a parabola in
 * time as long as the layer has hardly moved. Steps are implicit (ode.h): a stiff machine relaxes,
 * and near the cap q follows the force steeply. Each stage asks for the one q at which film and
 * spring agree, so the law is never inverted as such and a capped one is never asked for too much.
 *
 * A single spring: a window that bends, or a film that peels from its rim, is something else. After
 * the peak nothing is claimed. Forces N, speeds mm/s, gaps um, viscosity mPa s, stiffness N/mm.
 * All functions are pure and re-entrant if the law is.
 */
#ifndef FW_PULLOFF_H
#define FW_PULLOFF_H

#include "fault/fault.h"

#include <stdint.h>

/* The layer's force in N as a function of q in MPa/mm2 (fw_separation_q): 0 at 0, rising, concave
 * (so continuous). A law with a cap stays below it however large q is. */
typedef struct fw_pulloff_law {
    double (*force_N)(const void *context, double q); /* q > 0, finite */
    const void *context;                              /* borrowed */
} fw_pulloff_law;

typedef struct fw_pulloff {
    fw_pulloff_law law;
    double viscosity_mPa_s, speed_mm_s, gap_um; /* > 0; of the drive; at rest */
    double stiffness_N_mm;                      /* 0 or INFINITY: rigid */
    double tolerance; /* relative, of the force, 1e-12 .. 1e-3; 0 = 1e-4 */
} fw_pulloff;

/* The peak is flat, and is called reached where x' is the tolerance short of v. So its time may be
 * short by tolerance * h / (3 v) and more where the machine is stiff (for L = 1e5 and 1e-5 by 3 %);
 * the force is not, it misses less than the tolerance. */
typedef struct fw_pulloff_peak {
    double force_N;
    double seconds; /* since the drive moved */
    double gap_um;
    uint32_t evaluations; /* of the law */
} fw_pulloff_peak;

/* The largest force on the way. A law that is 0 gives 0 at rest. FW_INPUT: a value out of its
 * range, or a law that is no number at the rigid machine's q. FW_MACHINE: no convergence. */
fw_status fw_pulloff_solve(const fw_pulloff *pulloff, fw_pulloff_peak *peak, fw_fault *fault);

/* The highest drive speed, speed_mm_s at most, whose peak force stays within limit_N; 0 for a limit
 * that is not above 0. Its peak is within 4 tolerances of the limit, never above it. Fails as
 * fw_pulloff_solve does. */
fw_status fw_pulloff_fastest(const fw_pulloff *pulloff, double limit_N, double *speed_mm_s,
                             fw_fault *fault);

/* Seconds in which a constant force of N opens the film from one gap to a larger one (INFINITY:
 * finite time, Stefan 1874): t = 6 eta / q (1 / h1^2 - 1 / h2^2), q the law's at that force. 0
 * where the law stays below the force, INFINITY for no force. Of pulloff only law and viscosity are
 * read.
 */
double fw_pulloff_seconds(const fw_pulloff *pulloff, double force_N, double from_um, double to_um);

#endif
