/* Buckling loads: handbook rows (Euler; Timoshenko & Gere 1961, from memory, and computed values),
 * and every end condition against the differential equation, integrated step by step. */
#include "physics/column.h"

#include "physics/near.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

static const double pi = 3.14159265358979323846;

#define ENDS (FW_COLUMN_FIXED_PINNED_SWAY + 1)

/* d = 1 mm, L = 10 mm, E = 500 MPa. */
static void test_round_post(void **state)
{
    (void)state;
    const double want_N[ENDS] = {
        [FW_COLUMN_PINNED_PINNED] = 2.422365,    [FW_COLUMN_FIXED_FIXED] = 9.689461,
        [FW_COLUMN_FIXED_PINNED] = 4.955550,     [FW_COLUMN_FIXED_FREE] = 0.605591,
        [FW_COLUMN_FIXED_FIXED_SWAY] = 2.422365, [FW_COLUMN_FIXED_PINNED_SWAY] = 0.605591,
    };
    for (fw_column_ends ends = 0; ends < ENDS; ends++) {
        assert_near(fw_column_uniform_N(ends, 500.0, 0.0490873852, 10.0), want_N[ends], 1e-6);
        assert_near(fw_column_frustum_N(ends, 500.0, 1.0, 1.0, 10.0), want_N[ends], 1e-6);
    }
}

static void test_effective_lengths(void **state)
{
    (void)state;
    const double want[ENDS] = {1.0, 0.5, 0.6991557, 2.0, 1.0, 2.0};
    for (fw_column_ends ends = 0; ends < ENDS; ends++)
        assert_near(fw_column_effective(ends), want[ends], 1e-7);
    /* 20.1907286 E I / L^2 */
    assert_near(fw_column_uniform_N(FW_COLUMN_FIXED_PINNED, 1.0, 1.0, 1.0), 20.1907286, 1e-8);
}

/* E = 200 GPa, 10 x 20 mm, 1 m, hinged: a common examination example, P = 3289.868 N. */
static void test_rectangular_bar(void **state)
{
    (void)state;
    double inertia_mm4 = 20.0 * 10.0 * 10.0 * 10.0 / 12.0;
    assert_near(fw_column_uniform_N(FW_COLUMN_PINNED_PINNED, 200e3, inertia_mm4, 1000.0), 3289.868,
                2e-7);
}

static double inertia(double d)
{
    return pi * d * d * d * d / 64.0;
}

/* Half the diameter at the tip: a quarter of the load of a uniform column as thick as the base. */
static void test_cone_without_sway(void **state)
{
    (void)state;
    const fw_column_ends held[] = {FW_COLUMN_PINNED_PINNED, FW_COLUMN_FIXED_FIXED,
                                   FW_COLUMN_FIXED_PINNED};
    for (int i = 0; i < 3; i++) {
        double uniform_N = fw_column_uniform_N(held[i], 500.0, inertia(1.0), 10.0);
        assert_near(fw_column_frustum_N(held[i], 500.0, 0.5, 1.0, 10.0), 0.25 * uniform_N, 1e-14);
        assert_near(fw_column_frustum_N(held[i], 500.0, 1.0, 0.5, 10.0), 0.25 * uniform_N, 1e-14);
    }
    assert_near(fw_column_frustum_N(FW_COLUMN_PINNED_PINNED, 500.0, 0.5, 1.0, 10.0), 0.605591,
                1e-6);
}

/* m = P L^2 / (E I2) of a cone whose tip is free. */
static double free_number(double d1, double d2)
{
    return fw_column_frustum_N(FW_COLUMN_FIXED_FREE, 1.0, d1, d2, 1.0) / inertia(d2);
}

static void test_cone_with_free_tip(void **state)
{
    (void)state;
    const double computed[] = {1.203024, 1.505085, 1.710139, 1.869782, 2.002311,
                               2.116559, 2.217528, 2.308356, 2.391150, 2.467401};
    /* Timoshenko & Gere 1961, table for I ~ x^4, three decimals, from memory */
    const double printed[] = {1.202, 1.505, 1.710, 1.870, 2.002, 2.116, 2.217, 2.308, 2.391};
    for (int i = 0; i < 10; i++) {
        double d1 = pow(0.1 * (i + 1), 0.25);
        assert_near(free_number(d1, 1.0), computed[i], 1e-6);
        if (i < 9)
            assert_within(free_number(d1, 1.0), printed[i], 1.0, 1.1e-3);
    }
    const double by_diameter[][2] = {
        {0.25, 0.376887}, {1.0 / 3.0, 0.582133}, {0.5, 1.028965}, {0.75, 1.738767}};
    for (int i = 0; i < 4; i++)
        assert_near(free_number(by_diameter[i][0], 1.0), by_diameter[i][1], 1.5e-6);
    assert_near(fw_column_frustum_N(FW_COLUMN_FIXED_FREE, 500.0, 0.5, 1.0, 10.0), 0.252546, 1.5e-6);
}

/* At and near d1 == d2 all rules run into the uniform column's, from both sides. */
static void test_cone_becomes_uniform(void **state)
{
    (void)state;
    for (fw_column_ends ends = 0; ends < ENDS; ends++) {
        double uniform_N = fw_column_uniform_N(ends, 500.0, inertia(1.0), 10.0);
        assert_near(fw_column_frustum_N(ends, 500.0, 1.0, 1.0, 10.0), uniform_N, 1e-14);
        assert_near(fw_column_frustum_N(ends, 500.0, 1.0 - 1e-9, 1.0, 10.0), uniform_N, 1e-8);
        assert_near(fw_column_frustum_N(ends, 500.0, 1.0 + 1e-9, 1.0, 10.0), uniform_N, 1e-8);
    }
}

/* y, slope, moment E I y'', transverse force; (E I y'')'' + P y'' = 0. */
typedef struct column {
    double d_base, d_tip, load;
    fw_column_ends ends;
} column;

static void slope_of(const column *c, double x, const double s[4], double out[4])
{
    double d = c->d_base + x * (c->d_tip - c->d_base);
    out[0] = s[1];
    out[1] = s[2] / inertia(d);
    out[2] = s[3] - c->load * s[1];
    out[3] = 0.0;
}

/* Classical Runge-Kutta from base (x = 0) to tip (x = 1). */
static void integrate(const column *c, double s[4])
{
    enum { STEPS = 400 };
    const double h = 1.0 / STEPS, at[4] = {0.0, 0.5, 0.5, 1.0}, weight[4] = {1, 2, 2, 1};
    for (int step = 0; step < STEPS; step++) {
        double k[4] = {0}, sum[4] = {0};
        for (int stage = 0; stage < 4; stage++) {
            double trial[4];
            for (int i = 0; i < 4; i++)
                trial[i] = s[i] + h * at[stage] * k[i];
            slope_of(c, (step + at[stage]) * h, trial, k);
            for (int i = 0; i < 4; i++)
                sum[i] += weight[stage] * k[i] / 6.0;
        }
        for (int i = 0; i < 4; i++)
            s[i] += h * sum[i];
    }
}

/* Changes sign at a buckling load: the two conditions at the tip of the two solutions that meet
 * those at the base. */
static double determinant(const column *c)
{
    bool pinned = c->ends == FW_COLUMN_PINNED_PINNED;
    double a[4] = {0}, b[4] = {0};
    a[pinned ? 1 : 2] = 1.0;
    b[3] = 1.0;
    integrate(c, a);
    integrate(c, b);
    static const int zero_at_tip[ENDS][2] = {{0, 2}, {0, 1}, {0, 2}, {2, 3}, {1, 3}, {2, 3}};
    const int *zero = zero_at_tip[c->ends];
    return a[zero[0]] * b[zero[1]] - a[zero[1]] * b[zero[0]];
}

/* The load is a buckling load within 1e-7, and there is none below. */
static void test_differential_equation(void **state)
{
    (void)state;
    const double tips[] = {0.3, 0.5, 0.9, 1.0, 1.4};
    for (fw_column_ends ends = 0; ends < ENDS; ends++) {
        for (int i = 0; i < 5; i++) {
            double load_N = fw_column_frustum_N(ends, 1.0, tips[i], 1.0, 1.0);
            column c = {.d_base = 1.0, .d_tip = tips[i], .ends = ends, .load = 1e-3 * load_N};
            double before = determinant(&c);
            for (int step = 1; step <= 60; step++) {
                c.load = load_N * (step < 60 ? step / 60.0 : 1.0 - 1e-7);
                assert_true(determinant(&c) * before > 0.0);
            }
            c.load = load_N * (1.0 + 1e-7);
            assert_true(determinant(&c) * before < 0.0);
        }
    }
}

static void test_no_column(void **state)
{
    (void)state;
    const double bad[] = {0.0, -1.0, (double)NAN};
    for (int i = 0; i < 3; i++) {
        for (fw_column_ends ends = 0; ends < ENDS; ends++) {
            assert_true(isnan(fw_column_uniform_N(ends, bad[i], 1.0, 1.0)));
            assert_true(isnan(fw_column_uniform_N(ends, 1.0, bad[i], 1.0)));
            assert_true(isnan(fw_column_uniform_N(ends, 1.0, 1.0, bad[i])));
            assert_true(isnan(fw_column_frustum_N(ends, bad[i], 1.0, 1.0, 1.0)));
            assert_true(isnan(fw_column_frustum_N(ends, 1.0, bad[i], 1.0, 1.0)));
            assert_true(isnan(fw_column_frustum_N(ends, 1.0, 1.0, bad[i], 1.0)));
            assert_true(isnan(fw_column_frustum_N(ends, 1.0, 1.0, 1.0, bad[i])));
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_round_post),
        cmocka_unit_test(test_effective_lengths),
        cmocka_unit_test(test_rectangular_bar),
        cmocka_unit_test(test_cone_without_sway),
        cmocka_unit_test(test_cone_with_free_tip),
        cmocka_unit_test(test_cone_becomes_uniform),
        cmocka_unit_test(test_differential_equation),
        cmocka_unit_test(test_no_column),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
