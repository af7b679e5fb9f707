/* Intended and not solid: what counts, and how much. Pixels of 100 um; 128 of 255 is intended, and
 * with this exposure and layer 200 is not solid while 255 is (working curve, Jacobs 1992). */
#include "check/stage.h"

static stage weak(void)
{
    stage s = stage_new(60, 60, 4);
    /* Through 100 um of Dp 110: exp(-100/110) = 0.4029 of the dose. Full grey 24 gives 9.67 of the
     * 9 that join; 200 of 255 gives 7.58. */
    s.job.resin.exposure_mJ_cm2 = 24;
    return s;
}

static const fw_finding *judged(const stage *s, fw_report *report)
{
    *report = stage_judge(s);
    return finding_of(report, FW_UNDERCURE);
}

static void full_grey_cures(void **state)
{
    (void)state;
    stage s = weak();
    stage_box(&s, 10, 10, 0, 50, 50, 4, 255);
    fw_report report;
    assert_null(judged(&s, &report));
    fw_report_free(&report);
    /* A grey rim of one pixel is what antialiasing makes. */
    stage_box(&s, 9, 10, 0, 10, 50, 4, 200);
    stage_box(&s, 10, 50, 0, 50, 51, 4, 200);
    assert_null(judged(&s, &report));
    fw_report_free(&report);
    stage_free(&s);
}

/* Two pixels wide, one is beyond the rim: 20 px, 1.6 % of the small region, 0.8 % of the large one.
 */
static void a_wide_rim_is_measured(void **state)
{
    (void)state;
    for (int large = 0; large < 2; large++) {
        stage s = weak();
        const int left = large ? 0 : 20;
        stage_box(&s, left, 10, 0, 50, large ? 60 : 50, 4, 255);
        stage_box(&s, 50, 30, 0, 52, 50, 4, 200);
        fw_report report;
        const fw_finding *finding = judged(&s, &report);
        assert_non_null(finding);
        assert_int_equal(finding->pixels, 4 * 20);
        assert_int_equal(finding->severity, large ? FW_WARN : FW_FAIL);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* A thin bridge of grey between two blocks: it comes apart, however little is missing. */
static void what_comes_apart_fails(void **state)
{
    (void)state;
    stage s = weak();
    stage_box(&s, 5, 5, 0, 28, 55, 4, 255);
    stage_box(&s, 30, 5, 0, 55, 55, 4, 255);
    stage_box(&s, 28, 30, 2, 30, 31, 3, 200);
    fw_report report;
    const fw_finding *finding = judged(&s, &report);
    assert_non_null(finding);
    assert_int_equal(finding->severity, FW_FAIL);
    assert_int_equal(finding->layer, 2);
    assert_non_null(strstr(finding->message, "comes apart"));
    fw_report_free(&report);
    stage_free(&s);
}

static void specks_are_warnings(void **state)
{
    (void)state;
    stage s = weak();
    stage_box(&s, 5, 5, 0, 28, 55, 4, 255);
    stage_box(&s, 40, 40, 1, 42, 42, 2, 200);
    fw_report report;
    const fw_finding *finding = judged(&s, &report);
    assert_non_null(finding);
    assert_int_equal(finding->severity, FW_WARN);
    assert_non_null(strstr(finding->message, "nothing of it does"));
    fw_report_free(&report);
    stage_free(&s);
}

/* A response that lets more light through at that grey cures it. */
static void the_response_counts(void **state)
{
    (void)state;
    stage s = weak();
    stage_box(&s, 5, 5, 0, 28, 55, 4, 255);
    stage_box(&s, 28, 5, 0, 40, 55, 4, 200);
    fw_report report;
    assert_non_null(judged(&s, &report));
    fw_report_free(&report);
    s.job.machine.grey = (fw_points){3, {{0, 0}, {0.7, 0.98}, {1, 1}}};
    assert_null(judged(&s, &report));
    fw_report_free(&report);
    stage_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(full_grey_cures), cmocka_unit_test(a_wide_rim_is_measured),
        cmocka_unit_test(what_comes_apart_fails), cmocka_unit_test(specks_are_warnings),
        cmocka_unit_test(the_response_counts)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
