/* Tension and adhesion capacities, margin. Textbook statics (stress = force / area). */
#include "physics/strength.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

/* A round bar of 1 mm at 8 MPa: sigma = 4 F / (pi d^2), so F = 2 pi N. */
static void test_tension_of_a_round_bar(void **state)
{
    (void)state;
    const double pi = 3.14159265358979323846;
    assert_true(fabs(fw_strength_tension_N(8.0, pi / 4.0) - 2.0 * pi) < 1e-14);
}

static void test_adhesion_of_a_foot(void **state)
{
    (void)state;
    assert_true(fabs(fw_strength_adhesion_N(0.5, 7.0) - 3.5) < 1e-15);
}

static void test_margin(void **state)
{
    (void)state;
    assert_true(fw_strength_margin(6.0, 3.0) == 2.0);
    assert_true(fw_strength_margin(0.0, 3.0) == 0.0);
    assert_true(isnan(fw_strength_margin(6.0, 0.0)));
    assert_true(isnan(fw_strength_margin(6.0, -1.0)));
    assert_true(isnan(fw_strength_margin(6.0, (double)NAN)));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_tension_of_a_round_bar),
        cmocka_unit_test(test_adhesion_of_a_foot),
        cmocka_unit_test(test_margin),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
