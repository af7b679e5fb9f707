/* The step method and the bracket against exact solutions. */
#include "physics/bracket.h"
#include "physics/laws.h"
#include "physics/ode.h"

/* y' = -rate (y - cos t) - sin t from y = 1: y = cos t whatever the rate; until y falls to 1/2. In
 * the stiff ones each stage is of order 1, so very small tolerances take very many steps. */
static double toward_cosine(void *context, double t, double y, double reach)
{
    const double rate = *(double *)context;
    return (-rate * (y - cos(t)) - sin(t)) / (1 + rate * reach);
}

static double half_way(void *context, double t, double y, double slope)
{
    (void)context, (void)t, (void)slope;
    return 0.5 - y;
}

static double one(void *context, double t, double y)
{
    (void)context, (void)t, (void)y;
    return 1;
}

static fw_ode_point run(double rate, double tolerance, double first_step)
{
    const fw_ode ode = {toward_cosine, half_way, one, &rate, tolerance, first_step};
    fw_ode_point point = {0, 1, 0};
    fw_fault fault = {0};
    if (fw_ode_until(&ode, &point, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    return point;
}

static void stiff_or_not(void **state)
{
    (void)state;
    for (double rate = 0.01; rate < 2e8; rate *= 10)
        for (double tolerance = 1e-4; tolerance > (rate < 1e3 ? 1e-11 : 1e-8); tolerance /= 10) {
            const fw_ode_point point = run(rate, tolerance, 1e-3);
            assert_close_to(point.t, circle / 3, 10 * tolerance);
            assert_close_to(point.y, 0.5, 10 * tolerance);
        }
}

/* y' = 1 / (2 y): y = sqrt(1 + t). With steps that the tolerance leaves alone the error falls 16
 * times where the step is halved: order 4. */
static double root(void *context, double t, double y, double reach)
{
    (void)context, (void)t;
    return (sqrt(y * y + 2 * reach) - y) / (2 * reach);
}

static double after_one_step(void *context, double t, double y, double slope)
{
    (void)y, (void)slope;
    return t - *(double *)context;
}

static double one_step_error(double length)
{
    const fw_ode ode = {root, after_one_step, one, &length, 1e9, length};
    fw_ode_point point = {0, 1, 0.5};
    assert_int_equal(fw_ode_until(&ode, &point, NULL), FW_OK);
    assert_close_to(point.t, length, 1e-15);
    return fabs(point.y - sqrt(1 + length));
}

static void order_of_one_step(void **state)
{
    (void)state;
    const double ratio = one_step_error(0.08) / one_step_error(0.04);
    assert_true(ratio > 26 && ratio < 38); /* 2^5 in one step */
}

/* A first step that is absurd is made shorter; an event that never comes is a fault. */
static void long_first_step(void **state)
{
    (void)state;
    assert_close_to(run(3, 1e-9, 1e6).t, circle / 3, 1e-8);
}

static double nowhere(void *context, double t, double y, double reach)
{
    (void)context, (void)y, (void)reach;
    return t > 1 ? (double)NAN : -1;
}

static void no_state_beyond(void **state)
{
    (void)state;
    const fw_ode ode = {nowhere, half_way, one, NULL, 1e-6, 0.1};
    fw_ode_point point = {0, 2, -1};
    fw_fault fault = {0};
    assert_int_equal(fw_ode_until(&ode, &point, &fault), FW_MACHINE);
    assert_true(fault.text[0] != 0 && point.t <= 1 && point.t > 0.999);
}

/* Zeros of x^n - a, also where the curve is flat at one end. */
static void bracket_closes(void **state)
{
    (void)state;
    for (int n = 1; n <= 15; n += 2)
        for (double a = 1e-3; a < 1; a *= 3) {
            fw_bracket bracket = {.at = {0, 1}, .value = {-a, 1 - a}, .moved = -1};
            int looks = 0;
            double x = 1;
            while (fabs(pow(x, n) - a) > 1e-13 * a && looks++ < 100) {
                x = fw_bracket_next(&bracket);
                assert_true(x > bracket.at[0] && x < bracket.at[1]);
                fw_bracket_put(&bracket, x, pow(x, n) - a);
            }
            assert_true(looks < 20);
            assert_close_to(x, pow(a, 1.0 / n), 1e-12);
        }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(stiff_or_not), cmocka_unit_test(order_of_one_step),
        cmocka_unit_test(long_first_step), cmocka_unit_test(no_state_beyond),
        cmocka_unit_test(bracket_closes)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
