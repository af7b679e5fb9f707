/* One stiff ordinary differential equation y' = f(t, y) up to an event.
 *
 * Diagonally implicit Runge-Kutta method of 5 stages and order 4 with an embedded one of order 3,
 * L-stable and stiffly accurate (Hairer and Wanner, Solving Ordinary Differential Equations II,
 * table IV.6.5, from memory; the tests hold its order against exact solutions). The step is
 * controlled by the difference of the two orders. The event is found by taking the last step again
 * with another length, so that what is returned carries the same error as any step.
 */
#ifndef FW_ODE_H
#define FW_ODE_H

#include "fault/fault.h"

typedef struct fw_ode {
    /* The slope s with s = f(t, y + reach s), reach > 0; NAN where there is none: the step is then
     * made shorter. */
    double (*slope)(void *context, double t, double y, double reach);
    /* Below zero on the way, zero or above from the event on. */
    double (*event)(void *context, double t, double y, double slope);
    /* What the error of a step in y is relative to; not above zero where (t, y) is no state. */
    double (*scale)(void *context, double t, double y);
    void *context;
    double tolerance;  /* relative, of each step, and of the event's time since the start */
    double first_step; /* > 0, a guess: made shorter as the error asks */
} fw_ode;

typedef struct fw_ode_point {
    double t, y, slope;
} fw_ode_point;

/* Moves *point from where it stands, its slope given, to the event (nowhere when it is past it).
 * FW_MACHINE when a step shrinks to nothing or 100000 do not reach it; *point is then the last one
 * that was accepted. */
fw_status fw_ode_until(const fw_ode *ode, fw_ode_point *point, fw_fault *fault);

#endif
