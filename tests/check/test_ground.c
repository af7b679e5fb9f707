/* What holds what: onset, adrift, healing, debt at its limit, gaps, border, cavities. */
#include "check/stage.h"

/* A block on the plate with an island beside it that starts in layer 5. */
static stage with_island(int joins_in)
{
    stage s = stage_new(60, 40, 12);
    stage_box(&s, 5, 5, 0, 25, 25, 12, 255);
    stage_box(&s, 30, 5, 5, 40, 25, 12, 255);
    if (joins_in > 0)
        stage_box(&s, 25, 5, joins_in, 30, 25, 12, 255);
    return s;
}

static void island_starts_with_nothing(void **state)
{
    (void)state;
    stage s = with_island(0);
    fw_report report = stage_judge(&s);
    const fw_finding *onset = finding_of(&report, FW_ONSET);
    const fw_finding *adrift = finding_of(&report, FW_ADRIFT);
    assert_int_equal(report.layer[5].onset_px, 200);
    assert_int_equal(report.layer[6].onset_px, 0);
    assert_int_equal(report.layer[11].adrift_px, 200);
    assert_int_equal(onset->severity, FW_FAIL);
    assert_int_equal(onset->layer, 5);
    assert_int_equal(adrift->severity, FW_FAIL);
    assert_int_equal(adrift->layer, 7); /* its first two layers belong to the onset */
    assert_int_equal(report.verdict, FW_FAILED);
    assert_int_equal(report.part_count, 2);
    fw_report_free(&report);
    stage_free(&s);
}

/* heal_layers 1: joining in the next layer is a note, one later a failure. */
static void healing_has_a_limit(void **state)
{
    (void)state;
    for (int late = 0; late < 2; late++) {
        stage s = with_island(6 + late);
        fw_report report = stage_judge(&s);
        assert_int_equal(finding_of(&report, FW_ONSET)->severity, late ? FW_FAIL : FW_NOTE);
        assert_int_equal(report.layer[5].onset_px, 200);
        assert_int_equal(report.layer[5].adrift_px, 200);
        assert_int_equal(report.layer[6].adrift_px, late ? 200 : 0);
        assert_int_equal(report.layer[8].adrift_px, 0);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* Two pixels cannot hold a tip of 0.3 mm. */
static void small_onset_is_a_warning(void **state)
{
    (void)state;
    stage s = stage_new(30, 30, 8);
    stage_box(&s, 2, 2, 0, 12, 12, 8, 255);
    stage_box(&s, 20, 20, 4, 22, 21, 8, 255);
    fw_report report = stage_judge(&s);
    assert_int_equal(finding_of(&report, FW_ONSET)->severity, FW_WARN);
    assert_null(finding_of(&report, FW_ADRIFT));
    assert_int_equal(report.layer[7].adrift_px, 2);
    fw_report_free(&report);
    stage_free(&s);
}

/* A ledge of 15 pixels of 0.1 mm reaches 1.5 mm, which is allowed; 16 do not. */
static void ledge_at_the_limit(void **state)
{
    (void)state;
    for (int beyond = 0; beyond < 2; beyond++) {
        stage s = stage_new(60, 20, 6);
        stage_box(&s, 5, 5, 0, 20, 15, 6, 255);
        stage_box(&s, 20, 5, 4, 35 + beyond, 15, 6, 255);
        fw_report report = stage_judge(&s);
        assert_int_equal(report.layer[4].overreach_px, beyond ? 10 : 0);
        assert_int_equal(finding_of(&report, FW_OVERREACH) != NULL, beyond);
        assert_int_equal(report.layer[5].overreach_px,
                         0); /* a wall pays one pixel back at 45 deg */
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* A wall at the self-supporting angle never runs up a debt. */
static void slope_at_the_angle(void **state)
{
    (void)state;
    stage s = stage_new(80, 20, 40);
    for (int n = 0; n < 40; n++)
        stage_box(&s, 5, 5, n, 20 + n, 15, n + 1, 255);
    fw_report report = stage_judge(&s);
    for (int n = 0; n < 40; n++)
        assert_int_equal(report.layer[n].overreach_px, 0);
    fw_report_free(&report);
    stage_free(&s);
}

static void gap_and_border(void **state)
{
    (void)state;
    stage s = stage_new(30, 30, 10);
    stage_box(&s, 0, 5, 0, 12, 15, 4, 255);
    stage_box(&s, 3, 5, 6, 12, 15, 10, 255);
    fw_report report = stage_judge(&s);
    const fw_finding *gap = finding_of(&report, FW_GAP_LAYER);
    assert_int_equal(gap->layer, 4);
    assert_int_equal(gap->severity, FW_FAIL);
    assert_int_equal(finding_of(&report, FW_BORDER_SOLID)->severity, FW_WARN);
    assert_int_equal(finding_of(&report, FW_BORDER_SOLID)->last_layer, 3);
    fw_report_free(&report);
    stage_free(&s);
}

/* A cup: its hole is closed toward the plate, so it sucks; a lid in layer 8 encloses it. */
static void cup_and_lid(void **state)
{
    (void)state;
    for (int lid = 0; lid < 2; lid++) {
        stage s = stage_new(40, 40, 10);
        stage_box(&s, 5, 5, 0, 35, 35, 10, 255);
        stage_box(&s, 10, 10, 3, 30, 30, lid ? 8 : 10, 0);
        fw_report report = stage_judge(&s);
        assert_true(fabs(report.layer[3].blind_cavity_mm2 - 4.0) < 1e-9);
        assert_true(report.layer[2].blind_cavity_mm2 == 0);
        assert_int_equal(finding_of(&report, FW_BLIND_CAVITY)->count, lid ? 5 : 7);
        const fw_finding *enclosed = finding_of(&report, FW_ENCLOSED_RESIN);
        assert_int_equal(enclosed != NULL, lid);
        if (lid)
            assert_int_equal(enclosed->pixels, 5 * 400);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* The same hole with a slot to the outside in one layer is open to the vat from there on. */
static void vented_cup(void **state)
{
    (void)state;
    stage s = stage_new(40, 40, 10);
    stage_box(&s, 5, 5, 0, 35, 35, 10, 255);
    stage_box(&s, 10, 10, 3, 30, 30, 10, 0);
    stage_box(&s, 0, 18, 5, 10, 22, 6, 0);
    fw_report report = stage_judge(&s);
    assert_true(report.layer[4].blind_cavity_mm2 > 3.9);
    assert_true(report.layer[5].blind_cavity_mm2 == 0);
    assert_true(report.layer[9].blind_cavity_mm2 == 0);
    fw_report_free(&report);
    stage_free(&s);
}

static void without_cards_it_is_incomplete(void **state)
{
    (void)state;
    stage s = with_island(0);
    s.job.has_resin = s.job.has_machine = false;
    fw_report report = stage_judge(&s);
    assert_int_equal(report.verdict, FW_INCOMPLETE);
    assert_int_equal(report.layer[5].onset_px, 200);
    assert_true(isnan(report.layer[5].peel_N));
    fw_report_free(&report);
    stage_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(island_starts_with_nothing),
                                       cmocka_unit_test(healing_has_a_limit),
                                       cmocka_unit_test(small_onset_is_a_warning),
                                       cmocka_unit_test(ledge_at_the_limit),
                                       cmocka_unit_test(slope_at_the_angle),
                                       cmocka_unit_test(gap_and_border),
                                       cmocka_unit_test(cup_and_lid),
                                       cmocka_unit_test(vented_cup),
                                       cmocka_unit_test(without_cards_it_is_incomplete)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
