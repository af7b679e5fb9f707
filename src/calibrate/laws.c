#include "calibrate/laws.h"

#include <math.h>

double fw_law_disc(double radius_mm)
{
    return FW_PI * pow(radius_mm, 4) / 8;
}

double fw_law_rectangle(double a_mm, double b_mm)
{
    const double a = fmin(a_mm, b_mm), b = fmax(a_mm, b_mm);
    double sum = 0;
    for (int n = 199; n > 0; n -= 2) /* the rest is below 2e-10 of the sum */
        sum += tanh(n * FW_PI * b / (2 * a)) / pow(n, 5);
    return a * a * a * b / 12 * (1 - 192 / pow(FW_PI, 5) * a / b * sum);
}

double fw_law_ring_vented(double outer_mm, double inner_mm)
{
    const double squares = outer_mm * outer_mm - inner_mm * inner_mm;
    return fw_law_ring_sealed(outer_mm, inner_mm) -
           FW_PI / 8 * squares * squares / log(outer_mm / inner_mm);
}

double fw_law_ring_sealed(double outer_mm, double inner_mm)
{
    return fw_law_disc(outer_mm) - fw_law_disc(inner_mm);
}

double fw_law_straight_N(const void *context, double q)
{
    const double *integral_mm4 = context;
    return *integral_mm4 * q;
}

/* Newton from the left on a function that falls and is convex in x. */
double fw_law_core(double pi_ratio)
{
    if (!(pi_ratio < 1))
        return 0;
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

double fw_law_disc_capped_N(const void *context, double q)
{
    const fw_law_disc_capped *law = context;
    const double r = law->radius_mm, most = law->cap_MPa * FW_PI * r * r;
    const double ratio = law->cap_MPa / (q * r * r / 4);
    if (!(ratio < 1))
        return q * fw_law_disc(r);
    if (ratio < 1e-10) /* the series, where the closed form loses its digits */
        return most * (1 - sqrt(2 * ratio) / 3);
    const double rest = 1 - fw_law_core(ratio);
    return most * rest * rest / (2 * ratio);
}
