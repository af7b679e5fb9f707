/* Speed caps close the circle: judged again at the cap of a layer, that layer's margin is the
 * gate's, or its load the limit. The way there and the way back share no formula. */
#include "check/stage.h"

/* A table on four posts, solved throughout. */
static stage table(void)
{
    stage s = stage_new(120, 70, 26);
    s.job.max_peel_N = 0;
    s.job.machine.drive_limit_N = 0;
    s.job.machine.gap_um = s.job.machine.gap_range_um[0] = s.job.machine.gap_range_um[1] = 100;
    s.job.machine.cap_kPa = 1e6;
    stage_box(&s, 10, 10, 16, 60, 60, 26, 255);
    stage_post(&s, 1.8, 1.8, 16, true);
    stage_post(&s, 5.2, 1.8, 16, true);
    stage_post(&s, 1.8, 5.2, 16, true);
    stage_post(&s, 5.2, 5.2, 16, true);
    return s;
}

static void margins_at_the_cap_are_the_gates(void **state)
{
    (void)state;
    static const double stiffness[] = {0, 200, 5};
    for (size_t i = 0; i < 3; i++) {
        stage s = table();
        s.job.machine.stiffness_N_mm = stiffness[i];
        fw_report first = stage_judge(&s);
        for (int32_t n = 17; n < 26; n += 4) {
            const double cap = first.layer[n].speed_cap_mm_s;
            assert_true(cap > 0);
            if (cap >= 100)
                continue;
            s.job.machine.speed_mm_s = cap;
            fw_report again = stage_judge(&s);
            assert_near(again.layer[n].worst_margin, s.job.rules.margin, 2e-3);
            fw_report_free(&again);
        }
        assert_true(first.layer[20].speed_cap_mm_s < 100);
        fw_report_free(&first);
        stage_free(&s);
    }
}

/* The smaller of drive and gate limits, too. */
static void loads_at_the_cap_are_the_limit(void **state)
{
    (void)state;
    stage s = table();
    fw_report free_of_limits = stage_judge(&s);
    const double limit = 0.1 * free_of_limits.layer[20].peel_N;
    s.job.machine.drive_limit_N = limit;
    s.job.max_peel_N = 2 * limit;
    fw_report first = stage_judge(&s);
    assert_true(first.layer[20].speed_cap_mm_s < free_of_limits.layer[20].speed_cap_mm_s);
    s.job.machine.speed_mm_s = first.layer[20].speed_cap_mm_s;
    fw_report again = stage_judge(&s);
    assert_near(again.layer[20].peel_N, limit, 2e-3);
    fw_report_free(&free_of_limits);
    fw_report_free(&first);
    fw_report_free(&again);
    stage_free(&s);
}

/* At its cap a layer's load tells nothing of a slower one; faster is on the safe side. */
static void layers_at_their_cap(void **state)
{
    (void)state;
    stage s = table();
    s.job.machine.cap_kPa = 5;
    fw_report first = stage_judge(&s);
    const fw_layer_row *row = &first.layer[20];
    assert_int_equal(row->limited_by, FW_BY_CAP);
    assert_true(row->worst_margin > s.job.rules.margin);
    assert_true(row->speed_cap_mm_s > 1);
    s.job.machine.speed_mm_s = row->speed_cap_mm_s;
    fw_report faster = stage_judge(&s);
    assert_true(faster.layer[20].worst_margin >= s.job.rules.margin * (1 - 1e-3));
    s.job.machine.speed_mm_s = 1;
    s.job.machine.drive_limit_N = 0.5 * row->peel_N;
    fw_report slower = stage_judge(&s);
    assert_true(isnan(slower.layer[20].speed_cap_mm_s));
    fw_report_free(&first);
    fw_report_free(&faster);
    fw_report_free(&slower);
    stage_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(margins_at_the_cap_are_the_gates),
                                       cmocka_unit_test(loads_at_the_cap_are_the_limit),
                                       cmocka_unit_test(layers_at_their_cap)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
