#include "physics/polynomial.h"

static double value_at(const double *w, int degree, double x)
{
    double sum = w[degree];
    for (int i = degree - 1; i >= 0; i--)
        sum = sum * x + w[i];
    return sum;
}

/* The root between low and high, whose values differ in sign. */
static double bisect(const double *w, int degree, double low, double high)
{
    double sign = value_at(w, degree, low) < 0.0 ? -1.0 : 1.0;
    for (int step = 0; step < 64; step++) {
        double middle = 0.5 * (low + high);
        if (!(middle > low && middle < high))
            break;
        if (sign * value_at(w, degree, middle) > 0.0)
            low = middle;
        else
            high = middle;
    }
    return high;
}

/* Roots of one polynomial between fences[0] <= ... <= fences[count - 1], between which it only
 * rises or falls; in ascending order. */
static int roots_between(const double *w, int degree, const double *fence, int count, double *root)
{
    int roots = 0;
    for (int i = 0; i + 1 < count; i++) {
        double before = value_at(w, degree, fence[i]), after = value_at(w, degree, fence[i + 1]);
        if ((before > 0.0 && after <= 0.0) || (before < 0.0 && after >= 0.0))
            root[roots++] = bisect(w, degree, fence[i], fence[i + 1]);
    }
    return roots;
}

/* From the derivative of degree 1 up: the roots of each are the fences of the next. */
int fw_polynomial_points(const double *w, int degree, double low, double high,
                         double point[FW_POLYNOMIAL_POINTS])
{
    double fence[FW_POLYNOMIAL_DEGREE + 2] = {low, high};
    int points = 0, fences = 2;
    for (int order = degree - 1; order >= 0; order--) {
        double v[FW_POLYNOMIAL_DEGREE + 1];
        for (int i = 0; i <= degree - order; i++) {
            v[i] = w[i + order];
            for (int k = 0; k < order; k++)
                v[i] *= i + order - k;
        }
        double root[FW_POLYNOMIAL_DEGREE + 1];
        int roots = roots_between(v, degree - order, fence, fences, root);
        for (int i = 0; i < roots; i++)
            point[points++] = fence[i + 1] = root[i];
        fence[roots + 1] = high;
        fences = roots + 2;
    }
    return points;
}
