/* Working curve, solid and intended greys, print-through. */
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
            int32_t least = fw_cure_solid_least(&resin, layer_um, fulls[i]);
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
    assert_int_equal(fw_cure_solid_least(&resin, 50.0, 255), 96);
    assert_int_equal(fw_cure_solid_least(&resin, 50.0, 1), 1);
    resin.joint_ratio = 2.7;
    assert_int_equal(fw_cure_solid_least(&resin, 50.0, 255), INT32_MAX);
    resin.exposure_mJ_cm2 = 0.0;
    assert_int_equal(fw_cure_solid_least(&resin, 50.0, 255), INT32_MAX);
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
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
