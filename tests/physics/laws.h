/* Load laws in closed form, for the tests of what moves on them. */
#ifndef FW_TEST_LAWS_H
#define FW_TEST_LAWS_H

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

static const double circle = 3.14159265358979323846;

static inline void assert_close_to(double got, double expected, double relative)
{
    if (!(fabs(got - expected) <= relative * fabs(expected)))
        fail_msg("got %.12g, expected %.12g, off by %.3g, allowed %.3g", got, expected,
                 got / expected - 1, relative);
}

/* F = G q; the context is G. */
static inline double straight(const void *context, double q)
{
    const double *g = context;
    return *g * q;
}

/* Stefan's disc: G = pi R^4 / 8. */
static inline double disc_integral(double radius_mm)
{
    return circle * pow(radius_mm, 4) / 8;
}

/* A disc under a cap. With x = (core radius / R)^2 and Pi = P / (q R^2 / 4) < 1:
 *     Pi = 1 - x + x ln x,  F = P pi R^2 (1 - x)^2 / (2 Pi)
 * (radial complementarity problem, derived here); a straight line for Pi >= 1. */
typedef struct capped_disc_law {
    double radius_mm, cap_MPa;
    uint32_t calls;
} capped_disc_law;

/* y = 1 - x of Pi, by Newton from the left on a function that is convex in x. */
static inline double core_of(double pi_ratio)
{
    double x = 1e-300;
    for (int i = 0; i < 200; i++) {
        const double off = 1 - x + x * log(x) - pi_ratio;
        const double next = x - off / log(x);
        if (!(next > x && next < 1))
            break;
        x = next;
    }
    return x;
}

static inline double capped_disc(const void *context, double q)
{
    capped_disc_law *law = (capped_disc_law *)context; /* the tests' own, counted */
    law->calls++;
    const double r = law->radius_mm, ratio = law->cap_MPa / (q * r * r / 4);
    if (!(ratio < 1))
        return q * disc_integral(r);
    if (ratio < 1e-10) /* the series, where the closed form loses its digits */
        return law->cap_MPa * circle * r * r * (1 - sqrt(2 * ratio) / 3);
    const double rest = 1 - core_of(ratio);
    return law->cap_MPa * circle * r * r * rest * rest / (2 * ratio);
}

#endif
