/* Working curve and its fit, grey response, solid and intended greys, print-through, dose over
 * layers, green strength. */
#include "physics/cure.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

static void assert_relative(double got, double want, double tolerance)
{
    if (!(fabs(got - want) <= tolerance * fabs(want)))
        fail_msg("got %.12g, want %.12g", got, want);
}

static fw_resin resin_of(double penetration_um, double critical, double exposure, double joint)
{
    return (fw_resin){.penetration_um = penetration_um,
                      .critical_mJ_cm2 = critical,
                      .exposure_mJ_cm2 = exposure,
                      .joint_ratio = joint};
}

/* Dp 150 um, Ec 8, E 40: Cd = 150 ln 5. Formula: Jacobs 1992. */
static void test_cure_depth(void **state)
{
    (void)state;
    assert_relative(fw_cure_depth_um(150.0, 8.0, 40.0), 241.415687, 1e-8);
}

/* A textbook's worked example of Jacobs' formula: Dp 0.175 mm, Ec 8, E 30 gives 0.231 mm. */
static void test_cure_depth_worked_example(void **state)
{
    (void)state;
    double depth_mm = fw_cure_depth_um(175.0, 8.0, 30.0) / 1000.0;
    assert_true(fabs(depth_mm - 0.231) < 5e-4);
}

static void test_dose_for_depth(void **state)
{
    (void)state;
    assert_relative(fw_cure_dose(150.0, 8.0, 100.0), 15.5818723, 1e-8);
    assert_relative(fw_cure_depth_um(150.0, 8.0, fw_cure_dose(150.0, 8.0, 73.0)), 73.0, 1e-12);
}

static void test_depth_is_never_negative(void **state)
{
    (void)state;
    assert_true(fw_cure_depth_um(150.0, 8.0, 8.0) == 0.0);
    assert_true(fw_cure_depth_um(150.0, 8.0, 7.999) == 0.0);
    assert_true(fw_cure_depth_um(150.0, 8.0, 0.0) == 0.0);
    assert_true(fw_cure_depth_um(150.0, 8.0, (double)NAN) == 0.0);
}

/* Print-through 380.513728 um for Dp 150, Ec 8, E0 40, t 50 (derived; closed form of the series).
 */
static void test_print_through(void **state)
{
    (void)state;
    fw_resin resin = resin_of(150.0, 8.0, 40.0, 1.0);
    assert_relative(fw_cure_print_through_um(&resin, 50.0), 380.513728, 1e-8);
}

/* The same by adding up layer after layer: at that depth the sum of doses is the critical dose. */
static void test_print_through_equals_sum_of_layers(void **state)
{
    (void)state;
    const double dp[] = {60.0, 110.0, 150.0}, layer_um[] = {10.0, 50.0, 90.0};
    for (int i = 0; i < 3; i++) {
        for (int j = 0; j < 3; j++) {
            fw_resin resin = resin_of(dp[i], 9.0, 38.0, 1.0);
            double depth = layer_um[j] + fw_cure_print_through_um(&resin, layer_um[j]);
            double dose = 0.0;
            for (int n = 0; n < 2000; n++)
                dose += 38.0 * exp(-(depth + n * layer_um[j]) / dp[i]);
            assert_relative(dose, 9.0, 1e-10);
        }
    }
}

static void test_print_through_is_never_negative(void **state)
{
    (void)state;
    fw_resin resin = resin_of(50.0, 9.0, 9.5, 1.0);
    assert_true(fw_cure_print_through_um(&resin, 200.0) == 0.0);
}

static bool cures(const fw_resin *r, double layer_um, int32_t grey, int32_t full)
{
    return r->exposure_mJ_cm2 * ((double)grey / full) * exp(-layer_um / r->penetration_um) >=
           r->joint_ratio * r->critical_mJ_cm2;
}

static void test_solid_least_is_the_smallest_that_cures(void **state)
{
    (void)state;
    const int32_t fulls[] = {1, 3, 15, 255, 65535};
    for (int i = 0; i < 5; i++) {
        for (double layer_um = 10.0; layer_um < 160.0; layer_um += 7.0) {
            fw_resin resin = resin_of(110.0, 9.0, 38.0, 1.1);
            int32_t least = fw_cure_solid_least(&resin, NULL, layer_um, fulls[i]);
            if (least == INT32_MAX) {
                assert_false(cures(&resin, layer_um, fulls[i], fulls[i]));
                continue;
            }
            assert_in_range(least, 1, fulls[i]);
            assert_true(cures(&resin, layer_um, least, fulls[i]));
            assert_true(least == 1 || !cures(&resin, layer_um, least - 1, fulls[i]));
        }
    }
}

/* 38 exp(-50/110) = 24.12 at the far side: share 9 / 24.12 = 0.3731, of 255 is 95.15. */
static void test_solid_least_by_hand(void **state)
{
    (void)state;
    fw_resin resin = resin_of(110.0, 9.0, 38.0, 1.0);
    assert_int_equal(fw_cure_solid_least(&resin, NULL, 50.0, 255), 96);
    assert_int_equal(fw_cure_solid_least(&resin, NULL, 50.0, 1), 1);
    resin.joint_ratio = 2.7;
    assert_int_equal(fw_cure_solid_least(&resin, NULL, 50.0, 255), INT32_MAX);
    resin.exposure_mJ_cm2 = 0.0;
    assert_int_equal(fw_cure_solid_least(&resin, NULL, 50.0, 255), INT32_MAX);
}

static void test_intended_least_is_exact(void **state)
{
    (void)state;
    const int32_t fulls[] = {1, 3, 15, 255, 65535};
    for (int i = 0; i < 5; i++) {
        const int32_t full = fulls[i];
        for (int32_t grey = 1; grey <= full; grey++) {
            double level = (double)grey / full;
            assert_int_equal(fw_cure_intended_least(level, full), grey);
            int32_t above = fw_cure_intended_least(nextafter(level, 2.0), full);
            assert_int_equal(above, grey < full ? grey + 1 : full);
        }
    }
    assert_int_equal(fw_cure_intended_least(0.5, 255), 128);
    assert_int_equal(fw_cure_intended_least(1e-9, 255), 1);
    assert_int_equal(fw_cure_intended_least(0.5, 65535), 32768);
}

/* Response to the bit where there is none, and between the points of one. */
static void test_response(void **state)
{
    (void)state;
    const fw_points none = {0}, bent = {4, {{0, 0}, {0.25, 0}, {0.5, 0.4}, {1, 1}}};
    for (int grey = 0; grey <= 255; grey++) {
        assert_true(fw_cure_response(NULL, grey / 255.0) == grey / 255.0);
        assert_true(fw_cure_response(&none, grey / 255.0) == grey / 255.0);
    }
    for (int i = 0; i < bent.count; i++)
        assert_true(fw_cure_response(&bent, bent.at[i][0]) == bent.at[i][1]);
    assert_true(fw_cure_response(&bent, 0.125) == 0);
    assert_relative(fw_cure_response(&bent, 0.375), 0.2, 1e-14);
    assert_relative(fw_cure_response(&bent, 0.75), 0.7, 1e-14);
    for (int i = 1; i <= 4096; i++)
        assert_true(fw_cure_response(&bent, i / 4096.0) >=
                    fw_cure_response(&bent, (i - 1) / 4096.0));
}

static void test_what_is_a_response(void **state)
{
    (void)state;
    const fw_points good[] = {{2, {{0, 0}, {1, 1}}},
                              {3, {{0, 0}, {0.5, 0.5}, {1, 1}}},
                              {4, {{0, 0}, {0.3, 0.2}, {0.6, 0.2}, {1, 1}}}};
    const fw_points bad[] = {{0},
                             {1, {{0, 0}}},
                             {FW_CARD_POINTS + 1, {{0, 0}, {1, 1}}},
                             {2, {{0, 0.1}, {1, 1}}},
                             {2, {{0.1, 0}, {1, 1}}},
                             {2, {{0, 0}, {1, 0.9}}},
                             {2, {{0, 0}, {0.9, 1}}},
                             {3, {{0, 0}, {0, 0.5}, {1, 1}}},
                             {3, {{0, 0}, {(double)NAN, 0.5}, {1, 1}}},
                             {3, {{0, 0}, {0.5, (double)NAN}, {1, 1}}},
                             {4, {{0, 0}, {0.3, 0.4}, {0.6, 0.3}, {1, 1}}}};
    for (size_t i = 0; i < sizeof good / sizeof *good; i++)
        assert_true(fw_cure_is_response(&good[i]));
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++)
        assert_false(fw_cure_is_response(&bad[i]));
}

/* Against every grey in turn, with a response that has a flat part and starts late. */
static void test_solid_least_of_a_response(void **state)
{
    (void)state;
    const fw_points bent = {5, {{0, 0}, {0.2, 0}, {0.4, 0.45}, {0.6, 0.45}, {1, 1}}};
    const int32_t fulls[] = {1, 3, 15, 255, 65535};
    for (int i = 0; i < 5; i++) {
        for (double layer_um = 10.0; layer_um < 160.0; layer_um += 7.0) {
            const fw_resin resin = resin_of(110.0, 9.0, 38.0, 1.1);
            const double share = fw_cure_dose(110.0, 1.1 * 9.0, layer_um) / 38.0;
            int32_t expected = 1;
            while (expected <= fulls[i] &&
                   fw_cure_response(&bent, (double)expected / fulls[i]) < share)
                expected++;
            if (expected > fulls[i])
                expected = INT32_MAX;
            assert_int_equal(fw_cure_solid_least(&resin, &bent, layer_um, fulls[i]), expected);
        }
    }
}

/* A grey whose share is just what is needed is solid. */
static void test_solid_least_at_equality(void **state)
{
    (void)state;
    const fw_resin resin =
        resin_of(110.0, 9.0, 18.0, 1.0); /* no thickness: half the dose is needed */
    const fw_points knee = {3, {{0, 0}, {1 / 3.0, 0.5}, {1, 1}}};
    assert_int_equal(fw_cure_solid_least(&resin, &knee, 0, 3), 1);
    assert_int_equal(fw_cure_solid_least(&resin, NULL, 0, 3), 2);
}

/* (20 mJ/cm2, 100 um) and (50, 200): Dp = 100 / ln 2.5 = 109.135667 um, Ec = 8 (derived). */
static void test_fit_of_two_points(void **state)
{
    (void)state;
    const double at[2][2] = {{20, 100}, {50, 200}}, back[2][2] = {{50, 200}, {20, 100}};
    double dp = 0, ec = 0;
    assert_int_equal(fw_cure_fit(at, &dp, &ec, NULL), FW_OK);
    assert_relative(dp, 109.135667, 1e-8);
    assert_relative(ec, 8.0, 1e-14);
    assert_relative(fw_cure_depth_um(dp, ec, 20), 100, 1e-13);
    assert_relative(fw_cure_depth_um(dp, ec, 50), 200, 1e-13);
    assert_int_equal(fw_cure_fit(back, &dp, &ec, NULL), FW_OK);
    assert_relative(dp, 109.135667, 1e-8);
    assert_relative(ec, 8.0, 1e-13);
}

static void test_fit_refuses(void **state)
{
    (void)state;
    const double bad[][2][2] = {{{20, 100}, {20, 200}},
                                {{20, 100}, {50, 100}},
                                {{20, 200}, {50, 100}},
                                {{20, 100}, {20, 100}},
                                {{0, 100}, {50, 200}},
                                {{-20, 100}, {-50, 200}},
                                {{20, 0}, {50, 200}},
                                {{20, (double)NAN}, {50, 200}},
                                {{20, 100}, {(double)INFINITY, 200}}};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        double dp = -1, ec = -1;
        fw_fault fault = {0};
        assert_int_equal(fw_cure_fit(bad[i], &dp, &ec, &fault), FW_INPUT);
        assert_true(dp == -1 && ec == -1 && fault.text[0] != 0);
    }
}

/* Dp 150, Ec 8, E0 40, t 50 (geometric series, derived). */
static void test_dose_after_layers(void **state)
{
    (void)state;
    const fw_resin resin = resin_of(150, 8, 40, 1);
    const double layers[] = {1, 2, 3, 5, 10, (double)INFINITY};
    const double near[] = {40, 68.66125, 89.19794, 114.45700, 136.07514, 141.10906};
    const double far[] = {28.66125, 49.19794, 63.91311, 82.01202, 97.50210, 101.10906};
    assert_relative(exp(-50.0 / 150), 0.7165313106, 1e-9);
    assert_relative(fw_cure_dose_after(&resin, 50, 0, (double)INFINITY) / 40, 3.5277264732, 1e-10);
    for (int i = 0; i < 6; i++) {
        assert_relative(fw_cure_dose_after(&resin, 50, 0, layers[i]), near[i], 1e-7);
        assert_relative(fw_cure_dose_after(&resin, 50, 50, layers[i]), far[i], 1e-7);
    }
    const double edge = 50 + fw_cure_print_through_um(&resin, 50);
    assert_relative(fw_cure_dose_after(&resin, 50, edge, (double)INFINITY), 8, 1e-13);
}

/* Layer by layer in print order, and in closed form. */
static void test_streamed_dose_of_equal_layers(void **state)
{
    (void)state;
    const fw_resin resin = resin_of(150, 8, 40, 1);
    const double through = exp(-50.0 / 150);
    for (double depth = 0; depth < 400; depth += 37) {
        fw_cure_column column = fw_cure_column_begin(&resin, depth);
        for (int n = 1; n <= 300; n++) {
            fw_cure_column_add(&column, 1, through);
            const double expected = fw_cure_dose_after(&resin, 50, depth, n);
            assert_relative(column.dose_mJ_cm2, expected, 1e-13);
        }
    }
}

/* Unequal shares against the sum written out: which layer weighs how much. */
static void test_streamed_dose_of_unequal_layers(void **state)
{
    (void)state;
    const fw_resin resin = resin_of(90, 8, 40, 1);
    const double share[] = {1, 0, 0, 0.25, 0.5, 1, 0, 0.125}, depth = 30, t = 40;
    enum { N = 8 };
    fw_cure_column column = fw_cure_column_begin(&resin, depth);
    double sum = 0;
    for (int n = 0; n < N; n++) {
        fw_cure_column_add(&column, share[n], exp(-t / 90));
        sum += share[n] * 40 * exp(-(depth + n * t) / 90);
        assert_relative(column.dose_mJ_cm2, sum, 1e-14);
    }
}

/* Two points: linear in ln E between, the upper one above, down to nothing at the gel point. */
static void test_green_follows_the_dose(void **state)
{
    (void)state;
    const fw_points at = {2, {{16, 4}, {64, 12}}};
    assert_relative(fw_cure_green(&at, 8, 16), 4, 1e-15);
    assert_relative(fw_cure_green(&at, 8, 64), 12, 1e-15);
    assert_relative(fw_cure_green(&at, 8, 32), 8, 1e-14);
    assert_relative(fw_cure_green(&at, 8, 8 * sqrt(2)), 2, 1e-14);
    assert_true(fw_cure_green(&at, 8, 65) == 12 && fw_cure_green(&at, 8, 1e9) == 12);
    assert_true(fw_cure_green(&at, 8, 8) == 0 && fw_cure_green(&at, 8, 7) == 0);
    assert_true(fw_cure_green(&at, 8, 0) == 0 && fw_cure_green(&at, 8, (double)NAN) == 0);
    for (double dose = 1; dose < 100; dose *= 1.01)
        assert_true(fw_cure_green(&at, 8, 1.01 * dose) >= fw_cure_green(&at, 8, dose));
}

static void test_green_of_one_point(void **state)
{
    (void)state;
    const fw_points at = {1, {{38, 8}}};
    const double doses[] = {1, 9, 38, 500};
    for (int i = 0; i < 4; i++)
        assert_true(fw_cure_green(&at, 9, doses[i]) == 8);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_cure_depth),
        cmocka_unit_test(test_cure_depth_worked_example),
        cmocka_unit_test(test_dose_for_depth),
        cmocka_unit_test(test_depth_is_never_negative),
        cmocka_unit_test(test_print_through),
        cmocka_unit_test(test_print_through_equals_sum_of_layers),
        cmocka_unit_test(test_print_through_is_never_negative),
        cmocka_unit_test(test_solid_least_is_the_smallest_that_cures),
        cmocka_unit_test(test_solid_least_by_hand),
        cmocka_unit_test(test_intended_least_is_exact),
        cmocka_unit_test(test_response),
        cmocka_unit_test(test_what_is_a_response),
        cmocka_unit_test(test_solid_least_of_a_response),
        cmocka_unit_test(test_solid_least_at_equality),
        cmocka_unit_test(test_fit_of_two_points),
        cmocka_unit_test(test_fit_refuses),
        cmocka_unit_test(test_dose_after_layers),
        cmocka_unit_test(test_streamed_dose_of_equal_layers),
        cmocka_unit_test(test_streamed_dose_of_unequal_layers),
        cmocka_unit_test(test_green_follows_the_dose),
        cmocka_unit_test(test_green_of_one_point),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
