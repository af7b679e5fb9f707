/* Peel load of layers and who carries it: closed forms, statics, posts. */
#include "check/stage.h"
#include "physics/separation.h"

static const double pi = 3.14159265358979323846;

static double q_of(const stage *s)
{
    return fw_separation_q(s->job.resin.viscosity_mPa_s, s->job.machine.speed_mm_s,
                           s->job.machine.gap_um);
}

/* A square of side a: F = q J / 4, J = 0.1405770150 a^4 (torsion series, Timoshenko and Goodier).
 * At 80 pixels across, cut into blocks, the scheme errs by well under 1 %. */
static void square_block(void **state)
{
    (void)state;
    stage s = stage_new(100, 100, 3);
    stage_box(&s, 10, 10, 0, 90, 90, 3, 255);
    fw_report report = stage_judge(&s);
    const double exact = q_of(&s) * 0.1405770150 / 4 * pow(8, 4);
    for (int n = 0; n < 3; n++)
        assert_true(fabs(report.layer[n].peel_N / exact - 1) < 0.01);
    assert_int_equal(report.layer[1].limited_by, FW_BY_FILM);
    assert_true(fabs(report.totals.peak_peel_N / exact - 1) < 0.01);
    fw_report_free(&report);
    stage_free(&s);
}

/* Two blocks add up; each carries its own load on the plate: margin = adhesion area / load. */
static void islands_add_and_stand_on_the_plate(void **state)
{
    (void)state;
    stage one = stage_new(140, 60, 3), two = stage_new(140, 60, 3);
    stage_box(&one, 5, 5, 0, 55, 55, 3, 255);
    stage_box(&two, 5, 5, 0, 55, 55, 3, 255);
    stage_box(&two, 75, 5, 0, 125, 55, 3, 255);
    fw_report a = stage_judge(&one), b = stage_judge(&two);
    assert_true(fabs(b.layer[2].peel_N / a.layer[2].peel_N - 2) < 1e-9);
    assert_true(fabs(b.layer[2].worst_margin / a.layer[2].worst_margin - 1) < 1e-6);
    assert_true(fabs(a.layer[2].worst_margin / (0.5 * 25 / a.layer[2].peel_N) - 1) < 1e-6);
    fw_report_free(&a);
    fw_report_free(&b);
    stage_free(&one);
    stage_free(&two);
}

/* A ring pulls more when its hole is sealed than when it is vented: 0.9375 against 0.125984 of the
 * full disc at r / R = 0.5 (squeeze film and annular flow); here square and round alike in order.
 */
static void sealed_hole_pulls_more(void **state)
{
    (void)state;
    stage cup = stage_new(70, 70, 4), tube = stage_new(70, 70, 4);
    stage_box(&cup, 5, 5, 0, 65, 65, 4, 255);
    stage_box(&cup, 20, 20, 2, 50, 50, 4, 0);
    stage_box(&tube, 5, 5, 0, 65, 65, 4, 255);
    stage_box(&tube, 20, 20, 0, 50, 50, 4, 0);
    stage_box(&tube, 0, 33, 0, 20, 36, 2, 0); /* a vent on the plate side, under layers 2 and 3 */
    fw_report a = stage_judge(&cup), b = stage_judge(&tube);
    assert_true(a.layer[3].peel_N > 4 * b.layer[3].peel_N);
    assert_true(a.layer[3].peel_N < a.layer[1].peel_N); /* less than the full square */
    fw_report_free(&a);
    fw_report_free(&b);
    stage_free(&cup);
    stage_free(&tube);
}

/* Small holes are filled: F rises by the little that they would have relieved. */
static void small_sealed_hole_is_filled(void **state)
{
    (void)state;
    stage s = stage_new(60, 60, 4);
    stage_box(&s, 5, 5, 0, 55, 55, 4, 255);
    stage_box(&s, 29, 29, 2, 31, 31, 4, 0); /* 0.04 mm2 */
    fw_report report = stage_judge(&s);
    assert_true(fabs(report.layer[3].peel_N / report.layer[1].peel_N - 1) < 1e-9);
    assert_int_equal(finding_of(&report, FW_BLIND_CAVITY)->severity, FW_NOTE);
    fw_report_free(&report);
    stage_free(&s);
}

/* A thick film of low viscosity never reaches the cap; a thin one does, and F <= P A. */
static void cap_limits(void **state)
{
    (void)state;
    stage s = stage_new(140, 140, 2);
    stage_box(&s, 10, 10, 0, 130, 130, 2, 255);
    s.job.machine.gap_um = 30;
    s.job.machine.gap_range_um[0] = 20;
    s.job.machine.gap_range_um[1] = 300;
    fw_report report = stage_judge(&s);
    const double most = 0.101325 * 144;
    assert_int_equal(report.layer[1].limited_by, FW_BY_CAP);
    assert_true(report.layer[1].peel_N < most && report.layer[1].peel_N > 0.8 * most);
    assert_int_equal(report.totals.capped_layers, 2);
    assert_true(report.totals.peak_range_N[0] > report.layer[1].peel_N &&
                report.totals.peak_range_N[0] < most);
    /* at 300 um the film is uncapped: q J / 4 */
    const double wide = fw_separation_q(350, 1, 300) * 0.1405770150 / 4 * pow(12, 4);
    assert_true(fabs(report.totals.peak_range_N[1] / wide - 1) < 0.02);
    fw_report_free(&report);
    stage_free(&s);
}

/* A beam on two posts, alike on both sides: each carries half, together all of it. */
static void two_posts_share_a_beam(void **state)
{
    (void)state;
    stage s = stage_new(80, 30, 24);
    stage_post(&s, 2.0, 1.5, 20, true);
    stage_post(&s, 6.0, 1.5, 20, true);
    stage_box(&s, 10, 10, 20, 70, 20, 24, 255);
    fw_report report = stage_judge(&s);
    const double a = report.post_result[0].load_N, b = report.post_result[1].load_N;
    assert_true(fabs(a / b - 1) < 0.02);
    assert_true(fabs((a + b) / report.layer[report.post_result[0].load_layer].peel_N - 1) < 1e-3);
    assert_null(finding_of(&report, FW_STUB));
    assert_null(finding_of(&report, FW_ONSET));
    assert_null(finding_of(&report, FW_ADRIFT));
    /* contact: pixels of a 0.6 mm disc */
    assert_true(fabs(report.post_result[0].contact_mm2 / (pi * 0.09) - 1) < 0.2);
    /* margin of the governing check, by hand: foot pi/4 1.2^2 0.5 MPa, tip pi 0.09 8 MPa */
    assert_true(report.post_result[0].margin > 0);
    fw_report_free(&report);
    stage_free(&s);
}

/* A tip high on a tall block does not take the block's load from the plate. */
static void tall_block_stays_on_the_plate(void **state)
{
    (void)state;
    stage s = stage_new(80, 40, 40);
    stage_box(&s, 5, 5, 0, 35, 35, 40, 255);
    stage_box(&s, 35, 15, 30, 55, 25, 40, 255); /* an arm of 2 mm */
    stage_post(&s, 5.0, 2.0, 30, true);
    fw_report report = stage_judge(&s);
    const double whole = report.layer[39].peel_N;
    assert_true(report.post_result[0].load_N < 0.1 * whole);
    fw_report_free(&report);
    stage_free(&s);
}

static void broken_shaft_is_a_stub(void **state)
{
    (void)state;
    stage s = stage_new(60, 30, 24);
    stage_post(&s, 3.0, 1.5, 20, true);
    stage_box(&s, 20, 10, 20, 40, 20, 24, 255);
    stage_box(&s, 20, 0, 7, 40, 30, 8, 0); /* nothing in layer 7 */
    fw_report report = stage_judge(&s);
    assert_int_equal(finding_of(&report, FW_STUB)->post, 0);
    assert_int_equal(report.verdict, FW_FAILED);
    fw_report_free(&report);
    stage_free(&s);
}

/* 0.3 mm asked: three dark pixels between shaft and wall are 0.4 mm from centre to centre, two are
 * 0.3, one is 0.2. */
static void clearance_at_its_limit(void **state)
{
    (void)state;
    for (int gap = 1; gap <= 3; gap++) {
        stage s = stage_new(60, 40, 30);
        stage_post(&s, 3.0, 2.0, 26, true);
        stage_box(&s, 20, 10, 26, 40, 30, 30, 255);
        /* the foot is 1.2 mm wide at the plate: its last pixel is column 34 */
        stage_box(&s, 35 + gap, 10, 0, 50, 30, 10, 255);
        fw_report report = stage_judge(&s);
        assert_int_equal(finding_of(&report, FW_CLEARANCE) != NULL, gap < 2);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* The gate: margin, peak, assumed values. */
static void gate_refuses(void **state)
{
    (void)state;
    stage s = stage_new(100, 100, 3);
    stage_box(&s, 10, 10, 0, 90, 90, 3, 255);
    fw_report report = stage_judge(&s);
    assert_int_equal(report.verdict, FW_PASS);
    const double peak = report.totals.peak_peel_N;
    fw_report_free(&report);
    s.job.max_peel_N = peak * 0.99;
    report = stage_judge(&s);
    assert_non_null(finding_of(&report, FW_DRIVE_OVERLOAD));
    assert_int_equal(report.verdict, FW_FAILED);
    fw_report_free(&report);
    s.job.max_peel_N = 0;
    s.job.resin.plate_adhesion_MPa = peak / 64 * 1.9; /* margin 1.9 */
    report = stage_judge(&s);
    assert_true(fabs(finding_of(&report, FW_PLATE_OVERLOAD)->margin - 1.9) < 0.01);
    fw_report_free(&report);
    s.job.resin.plate_adhesion_MPa = 0.5;
    s.job.resin.basis_green = FW_ASSUMED;
    report = stage_judge(&s);
    assert_int_equal(report.verdict, FW_PASS);
    assert_int_equal(finding_of(&report, FW_ASSUMED_VALUE)->severity, FW_WARN);
    fw_report_free(&report);
    s.job.refuse_assumed = true;
    report = stage_judge(&s);
    assert_int_equal(report.verdict, FW_FAILED);
    fw_report_free(&report);
    stage_free(&s);
}

static void batches_do_not_matter(void **state)
{
    (void)state;
    fw_layer_row rows[24];
    double load = 0;
    static const int32_t batches[3] = {1, 5, 16};
    for (int i = 0; i < 3; i++) {
        stage s = stage_new(80, 30, 24);
        stage_post(&s, 2.0, 1.5, 20, true);
        stage_post(&s, 6.0, 1.5, 20, true);
        stage_box(&s, 10, 10, 20, 70, 20, 24, 255);
        s.batch = batches[i];
        fw_report report = stage_judge(&s);
        if (i == 0) {
            memcpy(rows, report.layer, sizeof rows);
            load = report.post_result[1].load_N;
        }
        for (int n = 0; n < 24; n++) {
            assert_true(report.layer[n].peel_N == rows[n].peel_N);
            assert_true(report.layer[n].worst_margin == rows[n].worst_margin ||
                        (isnan(report.layer[n].worst_margin) && isnan(rows[n].worst_margin)));
        }
        assert_true(report.post_result[1].load_N == load);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* Four posts round a hole under a plate: the pocket between them is open in the raw stack. */
static void pocket_closed_by_a_post(void **state)
{
    (void)state;
    stage s = stage_new(40, 40, 12);
    stage_box(&s, 5, 5, 0, 35, 35, 12, 255);
    stage_box(&s, 15, 15, 0, 25, 25, 6, 0); /* a cavity on the plate, closed in layer 6 */
    stage_box(&s, 0, 17, 2, 15, 23, 6, 0);  /* its way out */
    stage_post(&s, 0.8, 2.0, 6, true);      /* a post in front of it */
    stage_box(&s, 0, 17, 2, 15, 23, 6, 0);
    stage_box(&s, 5, 17, 2, 9, 23, 6, 255); /* which plugs the way, as post pixels */
    s.posts.item[0].path[0].x = s.posts.item[0].path[1].x = 0.7;
    s.posts.item[0].shaft_mm = s.posts.item[0].tip_mm = s.posts.item[0].foot_mm = 0.9;
    fw_report report = stage_judge(&s);
    assert_non_null(finding_of(&report, FW_ENCLOSED_RESIN));
    assert_non_null(finding_of(&report, FW_NEW_VOID));
    assert_int_equal(report.verdict, FW_FAILED);
    fw_report_free(&report);
    stage_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(square_block),
                                       cmocka_unit_test(islands_add_and_stand_on_the_plate),
                                       cmocka_unit_test(sealed_hole_pulls_more),
                                       cmocka_unit_test(small_sealed_hole_is_filled),
                                       cmocka_unit_test(cap_limits),
                                       cmocka_unit_test(two_posts_share_a_beam),
                                       cmocka_unit_test(tall_block_stays_on_the_plate),
                                       cmocka_unit_test(broken_shaft_is_a_stub),
                                       cmocka_unit_test(clearance_at_its_limit),
                                       cmocka_unit_test(gate_refuses),
                                       cmocka_unit_test(batches_do_not_matter),
                                       cmocka_unit_test(pocket_closed_by_a_post)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
