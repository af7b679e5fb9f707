/* Load curve of one cluster: its force as a function of q = 12 eta v / h^3 at a given cap P.
 *
 * Below q_cap = P / (peak of u) the force is the line q G. Above it F is concave in q, bounded by
 * P A, and close to linear in z = q^(-1/2): for a strip F / (P A) = 1 - z sqrt(q_cap) / 3 exactly,
 * and for any shape the deficit at large q is a boundary layer of thickness sqrt(2 P / q). So the
 * capped part is a chain of chords in z through solved points, held under the tangents in q of
 * their ends, and ends at z = 0 in P A. Points are added at growing q until the chord to that end
 * and the tangent agree to 1 %, at most 8 of them.
 */
#ifndef FW_FILM_CURVE_H
#define FW_FILM_CURVE_H

#include "physics/film.h"

enum { FW_FILM_CURVE_POINTS = 9 }; /* the one at q_cap and at most 8 capped ones */

typedef struct fw_film_curve {
    double cap_MPa, area_mm2;
    double integral_mm4;            /* G: slope of the straight part */
    uint32_t count;                 /* 1 .. FW_FILM_CURVE_POINTS; 0 for an empty cluster (F = 0) */
    double q[FW_FILM_CURVE_POINTS]; /* MPa/mm2, ascending; q[0] = q_cap */
    double force_N[FW_FILM_CURVE_POINTS];     /* F at q */
    double tangent_mm4[FW_FILM_CURVE_POINTS]; /* dF/dq at q */
} fw_film_curve;

/* options as for fw_film_solve (obstacle_mm2 is not read). cap_MPa > 0; INFINITY gives the straight
 * line. uncapped: a solution of the same shape and options without a cap, or NULL to solve it here.
 * Fails as fw_film_solve does. */
fw_status fw_film_curve_build(const fw_film_shape *shape, const fw_film_options *options,
                              double cap_MPa, const fw_film_solution *uncapped, fw_film_curve *out,
                              fw_fault *fault);

/* Force in N at q >= 0 (INFINITY gives P A). Rises with q, concave. */
double fw_film_curve_force(const fw_film_curve *curve, double q);

#endif
