/* A layer driven toward the window: Stefan's closed form, and a slow integration of the same motion
 * from other starts. */
#include "physics/approach.h"
#include "physics/laws.h"
#include "physics/separation.h"

/* Stefan's disc: R 10 mm, 0.5 Pa s, 1 mm/s to 100 um. */
static fw_approach disc(double stiffness_N_mm, fw_approach_stop stop)
{
    return (fw_approach){disc_integral(10), 500, 1, 100, 0, stiffness_N_mm, 1e-9, stop};
}

static double force_of(const fw_approach *approach, double *gap_um)
{
    double force = 0, gap = 0;
    fw_fault fault = {0};
    if (fw_approach_solve(approach, &force, &gap, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    if (gap_um != NULL)
        *gap_um = gap;
    return force;
}

/* 10 N from 500 um for 5 s: 15.3427 um. */
static void constant_force(void **state)
{
    (void)state;
    const fw_approach approach = disc(0, FW_APPROACH_DRIVE);
    assert_close_to(fw_approach_gap_um(&approach, 10, 500, 5), 15.3427, 1e-5);
    assert_close_to(fw_approach_gap_um(&approach, 10, 500, 0), 500, 1e-15);
    const double half = fw_approach_gap_um(&approach, 10, 500, 2);
    assert_close_to(fw_approach_gap_um(&approach, 10, half, 3), 15.3427, 1e-5);
}

static void rigid(void **state)
{
    (void)state;
    for (int stop = 0; stop < 2; stop++) {
        fw_approach approach = disc(0, (fw_approach_stop)stop);
        double gap;
        assert_close_to(force_of(&approach, &gap), 23.5619449, 1e-8);
        assert_true(gap == 100);
        approach.stiffness_N_mm = (double)INFINITY;
        assert_close_to(force_of(&approach, NULL), 23.5619449, 1e-8);
        approach.stiffness_N_mm = 1e9;
        const double l = 1e9 * 0.1 / 23.5619449; /* each lag of to / L is 3 / L of the force */
        const double expected = 1 - (stop == FW_APPROACH_DRIVE ? 6 : 3) / l;
        assert_true(fabs(force_of(&approach, NULL) / 23.5619449019 - expected) < 1e-9);
    }
}

/* Fourth order with equal steps in the drive's way from rest at `from`, in um, mm/s and N. */
static double way_rate(const fw_approach *a, double drive_um, double gap_um)
{
    const double force = a->stiffness_N_mm * (gap_um - drive_um) / 1000;
    return -force / (12 * a->viscosity_mPa_s * a->integral_mm4) * pow(gap_um, 3) / a->speed_mm_s;
}

static double slow_force(const fw_approach *a, double from_um, int steps)
{
    double drive = from_um, gap = from_um;
    const double step = (from_um - a->to_um) / steps;
    for (int i = 0; i < steps; i++) {
        const double k1 = way_rate(a, drive, gap);
        const double k2 = way_rate(a, drive - step / 2, gap + step / 2 * k1);
        const double k3 = way_rate(a, drive - step / 2, gap + step / 2 * k2);
        const double k4 = way_rate(a, drive - step, gap + step * k3);
        gap += step / 6 * (k1 + 2 * k2 + 2 * k3 + k4);
        drive -= step;
    }
    return a->stiffness_N_mm * (gap - a->to_um) / 1000;
}

/* From far away, and from farther, by the slow way: the same force. */
static void start_is_forgotten(void **state)
{
    (void)state;
    const double k[] = {10, 100, 1000, 1e4};
    for (int i = 0; i < 4; i++) {
        const fw_approach approach = disc(k[i], FW_APPROACH_DRIVE);
        const double rigid_N = 23.5619449, l = k[i] * 0.1 / rigid_N;
        const double start = 100 * pow(1 + 92 / l, 0.25), force = force_of(&approach, NULL);
        assert_close_to(slow_force(&approach, start, 200000), force, 1e-7);
        assert_close_to(slow_force(&approach, 1.3 * start, 400000), force, 1e-7);
        fw_approach near = approach;
        near.from_um = 2 * start;
        assert_true(force_of(&near, NULL) == force);
        near.from_um = 0.9 * start;
        assert_close_to(force_of(&near, NULL), force, 1e-4);
    }
}

/* From a start that is near the force is less, and is what the slow way says. */
static void near_start(void **state)
{
    (void)state;
    double last = 0;
    for (double from = 110; from < 290; from += 50) {
        fw_approach approach = disc(300, FW_APPROACH_DRIVE);
        approach.from_um = from;
        const double force = force_of(&approach, NULL);
        assert_close_to(force, slow_force(&approach, from, 20000), 1e-7);
        assert_true(force > last && force < 23.5619449);
        last = force;
    }
}

/* Waiting for the layer takes longer and more force than stopping the drive; both rise with
 * stiffness, toward the rigid force. At the stop, force = k (gap - drive). */
static void two_ways_to_stop(void **state)
{
    (void)state;
    double last[2] = {0, 0};
    for (double k = 0.001; k < 2e6; k *= 10) {
        const fw_approach drive = disc(k, FW_APPROACH_DRIVE), layer = disc(k, FW_APPROACH_LAYER);
        double gap[2];
        const double force[2] = {force_of(&drive, &gap[0]), force_of(&layer, &gap[1])};
        assert_close_to(force[0], k * (gap[0] - 100) / 1000, 1e-6);
        assert_close_to(gap[1], 100, 1e-8);
        assert_true(gap[0] > 100 && force[0] < force[1] && force[1] < 23.5619449);
        assert_true(force[0] > last[0] && force[1] > last[1]);
        last[0] = force[0];
        last[1] = force[1];
    }
    /* Soft: the force grows as k v t, 1 / h^2 as k v t^2 / C, so F = sqrt(k C v) / h. */
    const fw_approach soft = disc(1e-6, FW_APPROACH_LAYER);
    assert_close_to(force_of(&soft, NULL), sqrt(1e-6 * 0.1 * 23.5619449), 0.02);
}

static void tolerance_is_kept(void **state)
{
    (void)state;
    for (int stop = 0; stop < 2; stop++)
        for (double k = 0.001; k < 2e6; k *= 10) {
            fw_approach approach = disc(k, (fw_approach_stop)stop);
            approach.tolerance = 1e-11;
            const double exact = force_of(&approach, NULL);
            for (double tolerance = 1e-9; tolerance < 2e-4; tolerance *= 10) {
                approach.tolerance = tolerance;
                assert_close_to(force_of(&approach, NULL), exact, 2 * tolerance);
            }
        }
}

static void empty_and_wrong(void **state)
{
    (void)state;
    double force = -1, gap = -1;
    fw_approach good = disc(100, FW_APPROACH_LAYER);
    good.integral_mm4 = 0;
    assert_int_equal(fw_approach_solve(&good, &force, &gap, NULL), FW_OK);
    assert_true(force == 0 && gap == 100);
    fw_approach bad[7] = {good, good, good, good, good, good, good};
    bad[0].integral_mm4 = -1;
    bad[1].viscosity_mPa_s = 0;
    bad[2].speed_mm_s = (double)NAN;
    bad[3].to_um = 0;
    bad[4].from_um = 100;
    bad[5].stiffness_N_mm = -1;
    bad[6].tolerance = 1;
    for (int i = 0; i < 7; i++) {
        fw_fault fault = {0};
        assert_int_equal(fw_approach_solve(&bad[i], &force, &gap, &fault), FW_INPUT);
        assert_true(fault.text[0] != 0);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(constant_force),     cmocka_unit_test(rigid),
        cmocka_unit_test(start_is_forgotten), cmocka_unit_test(near_start),
        cmocka_unit_test(two_ways_to_stop),   cmocka_unit_test(tolerance_is_kept),
        cmocka_unit_test(empty_and_wrong)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
