/* The way back: a layer that is driven toward the window and squeezes the liquid out.
 *
 * The film presses with F = C u / h^3 at closing speed u, C = 12 eta G, G the integral of film.h;
 * pressure has no cap, so this is a straight line whatever the suction does. Between drive and
 * layer stands the machine's spring, k (h - s) = F with s the gap at which a rigid machine would
 * be. The layer is always slower than the drive and the force rises until the drive stops (derived
 * here: where u = v the layer can only lose speed). Same limits of validity as fw_separation_q.
 * Forces N (compression > 0), speeds mm/s, gaps um. Pure, re-entrant.
 */
#ifndef FW_APPROACH_H
#define FW_APPROACH_H

#include "fault/fault.h"

/* When the drive stops. A drive that counts its way stops at to_um and the layer, which lags,
 * sinks on with falling force. To wait for the layer itself is the upper bound: it takes longer. */
typedef enum fw_approach_stop { FW_APPROACH_DRIVE, FW_APPROACH_LAYER } fw_approach_stop;

typedef struct fw_approach {
    double integral_mm4;                       /* G of the layer, >= 0; sums over clusters */
    double viscosity_mPa_s, speed_mm_s, to_um; /* > 0 */
    /* Gap at which the drive starts from rest, > to_um; 0 = far away. From (to^4 + 92 C v /
     * k)^(1/4) on the way in, a wrong force decays by exp(-L/4) with L = k h^4 / (C v) and is down
     * to 1e-10 of itself at to_um; a start from farther away is taken there. */
    double from_um;
    double stiffness_N_mm; /* 0 or INFINITY: rigid */
    double tolerance;      /* relative, of the force, 1e-12 .. 1e-3; 0 = 1e-6 */
    fw_approach_stop stop;
} fw_approach;

/* Force at the stop, which is the largest, and the gap of the layer then. FW_INPUT: a value out of
 * its range. FW_MACHINE: no convergence. */
fw_status fw_approach_solve(const fw_approach *approach, double *force_N, double *gap_um,
                            fw_fault *fault);

/* Gap in um after seconds under a constant force of N: (1 / h1^2 + F t / (6 eta G))^(-1/2)
 * (Stefan 1874). Of approach integral_mm4 (> 0) and viscosity are read. */
double fw_approach_gap_um(const fw_approach *approach, double force_N, double from_um,
                          double seconds);

#endif
