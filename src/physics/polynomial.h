/* Where a polynomial of low degree is zero or turns, in an interval. */
#ifndef FW_POLYNOMIAL_H
#define FW_POLYNOMIAL_H

enum { FW_POLYNOMIAL_DEGREE = 4, FW_POLYNOMIAL_POINTS = 10 };

/* All real roots in [low, high] of w[0] + w[1] x + ... + w[degree] x^degree and of each of its
 * derivatives, at most 4 + 3 + 2 + 1, in no order; *point holds them, the count is returned.
 * Between neighbouring roots of the derivative a polynomial only rises or falls, so bisection finds
 * each root, to the last digits. Double roots, which rounding can lift off zero, are among the
 * derivative's. degree <= FW_POLYNOMIAL_DEGREE; finite coefficients; leading ones may be 0. */
int fw_polynomial_points(const double *w, int degree, double low, double high,
                         double point[FW_POLYNOMIAL_POINTS]);

#endif
