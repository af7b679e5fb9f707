/* The judge as a whole: the same report in any batches, the gate at its limits, the verdict. */
#include "check/stage.h"

#include <omp.h>

static bool same(double a, double b)
{
    return a == b || (isnan(a) && isnan(b));
}

static void assert_same_layers(const fw_report *a, const fw_report *b)
{
    assert_int_equal(a->layers, b->layers);
    for (int32_t n = 0; n < a->layers; n++) {
        const fw_layer_row *p = &a->layer[n], *q = &b->layer[n];
        assert_true(p->layer == q->layer && p->raw_layer == q->raw_layer &&
                    p->solid_px == q->solid_px && p->regions == q->regions);
        assert_true(p->onset_px == q->onset_px && p->adrift_px == q->adrift_px &&
                    p->overreach_px == q->overreach_px);
        assert_true(same(p->peel_N, q->peel_N) && same(p->blind_cavity_mm2, q->blind_cavity_mm2) &&
                    p->limited_by == q->limited_by && same(p->worst_margin, q->worst_margin));
    }
}

static void assert_same_findings(const fw_report *a, const fw_report *b)
{
    assert_int_equal(a->findings.count, b->findings.count);
    for (size_t i = 0; i < a->findings.count; i++) {
        const fw_finding *p = &a->findings.item[i], *q = &b->findings.item[i];
        assert_true(p->kind == q->kind && p->severity == q->severity && p->group == q->group);
        assert_true(p->layer == q->layer && p->last_layer == q->last_layer &&
                    p->worst_layer == q->worst_layer && p->count == q->count);
        assert_true(same(p->x_mm, q->x_mm) && same(p->y_mm, q->y_mm) && p->pixels == q->pixels &&
                    same(p->area_mm2, q->area_mm2));
        assert_true(same(p->margin, q->margin) && p->post == q->post &&
                    same(p->badness, q->badness));
        assert_string_equal(p->message, q->message);
    }
}

static void assert_same_parts(const fw_report *a, const fw_report *b)
{
    assert_int_equal(a->part_count, b->part_count);
    for (size_t i = 0; i < a->part_count; i++) {
        const fw_part_row *p = &a->part[i], *q = &b->part[i];
        assert_true(p->id == q->id && p->first_layer == q->first_layer &&
                    p->last_layer == q->last_layer && p->posts == q->posts);
        assert_true(same(p->volume_mm3, q->volume_mm3) && same(p->worst_margin, q->worst_margin));
        for (int k = 0; k < 4; k++)
            assert_true(p->box_mm[k] == q->box_mm[k]);
    }
}

static void assert_same_posts(const fw_report *a, const fw_report *b)
{
    assert_int_equal(a->posts.count, b->posts.count);
    for (size_t i = 0; i < a->posts.count; i++) {
        const fw_post_result *p = &a->post_result[i], *q = &b->post_result[i];
        assert_true(same(p->load_N, q->load_N) && p->load_layer == q->load_layer &&
                    same(p->contact_mm2, q->contact_mm2) && same(p->margin, q->margin) &&
                    p->governs == q->governs);
    }
}

static void assert_same(const fw_report *a, const fw_report *b)
{
    const fw_totals *p = &a->totals, *q = &b->totals;
    assert_int_equal(a->verdict, b->verdict);
    assert_same_layers(a, b);
    assert_same_findings(a, b);
    assert_same_parts(a, b);
    assert_same_posts(a, b);
    assert_true(p->posts == q->posts && same(p->tip_area_mm2, q->tip_area_mm2) &&
                same(p->support_volume_mm3, q->support_volume_mm3) &&
                same(p->part_volume_mm3, q->part_volume_mm3));
    assert_true(same(p->peak_peel_N, q->peak_peel_N) && p->peak_layer == q->peak_layer &&
                same(p->peak_range_N[0], q->peak_range_N[0]) &&
                same(p->peak_range_N[1], q->peak_range_N[1]));
    assert_true(p->capped_layers == q->capped_layers && p->bound_layers == q->bound_layers);
}

/* A bit of everything: a cup, a table on posts, an island, crumbs, a thin film that reaches
 * the cap, a wide gap range. */
static stage of_everything(void)
{
    stage s = stage_new(130, 70, 37);
    s.job.machine.gap_um = 60;
    s.job.machine.gap_range_um[0] = 40;
    s.job.machine.gap_range_um[1] = 150;
    s.job.machine.cap_kPa = 40;
    stage_post(&s, 1.5, 1.5, 20, true);
    stage_post(&s, 5.5, 1.5, 20, true);
    stage_post(&s, 3.5, 5.0, 20, true);
    stage_box(&s, 10, 10, 20, 60, 56, 37, 255);
    stage_box(&s, 70, 5, 0, 125, 60, 37, 255);
    stage_box(&s, 80, 15, 4, 115, 50, 30, 0);
    stage_box(&s, 92, 25, 9, 102, 35, 37, 255);
    for (int n = 3; n < 37; n++)
        for (int i = 0; i < 8; i++)
            stage_box(&s, 62 + i * n % 7, 60 + i % 9, n, 63 + i * n % 7, 62 + i % 9, n + 1, 255);
    return s;
}

static void the_same_in_any_batches(void **state)
{
    (void)state;
    static const int32_t batches[5] = {1, 3, 16, 5, 37};
    stage s = of_everything();
    fw_report first = stage_judge(&s); /* 16 */
    assert_true(first.findings.count > 4 && first.totals.capped_layers > 0);
    for (int i = 0; i < 5; i++) {
        s.batch = batches[i];
        fw_report report = stage_judge(&s);
        assert_same(&first, &report);
        fw_report_free(&report);
    }
    fw_report_free(&first);
    stage_free(&s);
}

static void the_same_on_any_threads(void **state)
{
    (void)state;
    const int before = omp_get_max_threads();
    stage s = of_everything();
    omp_set_num_threads(1);
    fw_report first = stage_judge(&s);
    for (int threads = 2; threads <= 8; threads += 3) {
        omp_set_num_threads(threads);
        fw_report report = stage_judge(&s);
        assert_same(&first, &report);
        fw_report_free(&report);
    }
    omp_set_num_threads(before);
    fw_report_free(&first);
    stage_free(&s);
}

/* Without the memo every film is solved anew, and comes out alike. */
static void the_same_without_a_memo(void **state)
{
    (void)state;
    stage s = of_everything();
    fw_report first = stage_judge(&s);
    s.memo_off = true;
    fw_report report = stage_judge(&s);
    assert_same(&first, &report);
    fw_report_free(&report);
    fw_report_free(&first);
    stage_free(&s);
}

/* ---- the gate ---- */

static stage one_block(void)
{
    stage s = stage_new(60, 60, 3);
    stage_box(&s, 10, 10, 0, 50, 50, 3, 255);
    return s;
}

static double peak_of(const stage *s)
{
    fw_report report = stage_judge(s);
    const double peak = report.totals.peak_peel_N;
    fw_report_free(&report);
    return peak;
}

static bool has(const stage *s, fw_kind kind, fw_verdict verdict)
{
    fw_report report = stage_judge(s);
    const bool found = finding_of(&report, kind) != NULL;
    assert_int_equal(report.verdict, verdict);
    fw_report_free(&report);
    return found;
}

/* Peel load: the limit itself passes, a hair less does not; the gate's and the drive's alike. */
static void peel_at_the_limit(void **state)
{
    (void)state;
    stage s = one_block();
    const double peak = peak_of(&s);
    s.job.max_peel_N = s.job.machine.drive_limit_N = peak;
    assert_false(has(&s, FW_DRIVE_OVERLOAD, FW_PASS));
    s.job.max_peel_N = peak * (1 - 1e-9);
    assert_true(has(&s, FW_DRIVE_OVERLOAD, FW_FAILED));
    s.job.max_peel_N = 0; /* no limit */
    assert_false(has(&s, FW_DRIVE_OVERLOAD, FW_PASS));
    s.job.machine.drive_limit_N = peak * (1 - 1e-9);
    assert_true(has(&s, FW_DRIVE_OVERLOAD, FW_FAILED));
    stage_free(&s);
}

/* Plate: 16 mm2 hold adhesion x 16; the margin asked for passes, a little less does not. The centre
 * of the film's field is as good as its work tolerance, so there is a trace of a lever. */
static void plate_at_the_margin(void **state)
{
    (void)state;
    stage s = one_block();
    const double peak = peak_of(&s);
    s.job.rules.margin = 2;
    s.job.resin.plate_adhesion_MPa = 2 * peak / 16 * (1 + 2e-3);
    assert_false(has(&s, FW_PLATE_OVERLOAD, FW_PASS));
    s.job.resin.plate_adhesion_MPa = 2 * peak / 16 * (1 - 2e-3);
    assert_true(has(&s, FW_PLATE_OVERLOAD, FW_FAILED));
    stage_free(&s);
}

static stage on_posts(void)
{
    stage s = stage_new(80, 30, 24);
    s.job.resin.reach_mm = 3; /* nothing but the loads is to fail */
    s.job.machine.gap_um = s.job.machine.gap_range_um[0] = s.job.machine.gap_range_um[1] = 100;
    stage_post(&s, 2.0, 1.5, 20, true);
    stage_post(&s, 6.0, 1.5, 20, true);
    stage_box(&s, 10, 10, 20, 70, 20, 24, 255);
    return s;
}

/* The worst margin of the posts becomes the gate: passes; a hair more is asked: fails, and the
 * check that governs is named. Once with weak resin (the contact, or the neck's end at it, which
 * has the same pixels), once with weak adhesion (the foot). */
static void posts_at_the_margin(void **state)
{
    (void)state;
    for (int foot = 0; foot < 2; foot++) {
        stage s = on_posts();
        s.job.resin.tensile_MPa = foot ? 8 : 0.2;
        s.job.resin.plate_adhesion_MPa = foot ? 0.05 : 5;
        fw_report report = stage_judge(&s);
        const double worst = fmin(report.post_result[0].margin, report.post_result[1].margin);
        const bool first = report.post_result[0].margin <= report.post_result[1].margin;
        const fw_check governs = report.post_result[first ? 0 : 1].governs;
        const fw_kind kind = foot                      ? FW_FOOT_OVERLOAD
                             : governs == FW_CHECK_TIP ? FW_TIP_OVERLOAD
                                                       : FW_NECK_OVERLOAD;
        assert_int_equal(governs == FW_CHECK_FOOT, foot);
        assert_int_not_equal(governs, FW_CHECK_SHAFT);
        fw_report_free(&report);
        s.job.rules.margin = worst;
        assert_false(has(&s, kind, FW_PASS));
        s.job.rules.margin = worst * (1 + 1e-9);
        assert_true(has(&s, kind, FW_FAILED));
        stage_free(&s);
    }
}

/* Margins by hand: contact pixels x tensile strength, foot pixels x adhesion, over the loads. */
static void margins_by_hand(void **state)
{
    (void)state;
    stage s = on_posts();
    s.job.resin.plate_adhesion_MPa = 5;
    fw_report report = stage_judge(&s);
    int64_t tip_px = 0;
    for (int y = 0; y < 30; y++)
        for (int x = 10; x < 40; x++)
            tip_px += stage_at(&s, x, y, 19);
    const fw_post_result *r = &report.post_result[0];
    assert_near(r->contact_mm2, (double)tip_px * 0.01, 1e-9);
    assert_true(r->governs == FW_CHECK_TIP || r->governs == FW_CHECK_NECK);
    assert_near(r->margin, (double)tip_px * 0.01 * 8 / r->load_N, 1e-3);
    assert_near(report.totals.tip_area_mm2, 2 * (double)tip_px * 0.01, 1e-9);
    assert_near(report.part[0].worst_margin, fmin(r->margin, report.post_result[1].margin), 1e-12);
    assert_int_equal(report.part[0].posts, 2);
    fw_report_free(&report);
    stage_free(&s);
}

static void assumed_values(void **state)
{
    (void)state;
    for (int group = 0; group < 6; group++) {
        for (int refuse = 0; refuse < 2; refuse++) {
            stage s = one_block();
            fw_basis *basis[6] = {&s.job.resin.basis_viscosity,    &s.job.resin.basis_cure,
                                  &s.job.resin.basis_green,        &s.job.resin.basis_support,
                                  &s.job.machine.basis_separation, &s.job.machine.basis_frame};
            assert_false(has(&s, FW_ASSUMED_VALUE, FW_PASS));
            *basis[group] = FW_ASSUMED;
            s.job.refuse_assumed = refuse;
            assert_true(has(&s, FW_ASSUMED_VALUE, refuse ? FW_FAILED : FW_PASS));
            *basis[group] = FW_SUPPLIER;
            assert_false(has(&s, FW_ASSUMED_VALUE, FW_PASS));
            stage_free(&s);
        }
    }
}

/* Either card missing leaves the judgement incomplete, whatever was found, and says so. */
static void without_a_card(void **state)
{
    (void)state;
    for (int missing = 1; missing < 4; missing++) {
        for (int island = 0; island < 2; island++) {
            stage s = one_block();
            s.job.has_resin = (missing & 1) == 0;
            s.job.has_machine = (missing & 2) == 0;
            if (island)
                stage_box(&s, 52, 10, 1, 58, 20, 3, 255);
            fw_report report = stage_judge(&s);
            assert_int_equal(report.verdict, FW_INCOMPLETE);
            assert_true(report.not_checked_count > 2);
            assert_true(isnan(report.totals.peak_peel_N) && isnan(report.layer[1].peel_N));
            assert_int_equal(fw_findings_count(&report.findings, FW_FAIL) > 0, island);
            fw_report_free(&report);
            stage_free(&s);
        }
    }
}

/* Parts, volumes: 40 x 40 px x 3 layers of 0.001 mm3, and posts on their own account. */
static void parts_and_volumes(void **state)
{
    (void)state;
    stage s = on_posts();
    stage_box(&s, 72, 2, 3, 78, 8, 9, 255);
    fw_report report = stage_judge(&s);
    int64_t all = 0, posts = 0;
    for (int n = 0; n < 24; n++)
        for (int y = 0; y < 30; y++)
            for (int x = 0; x < 80; x++) {
                all += stage_at(&s, x, y, n);
                posts += stage_at(&s, x, y, n) && n < 20 && x < 70;
            }
    assert_int_equal(report.part_count, 2);
    assert_near(report.part[0].volume_mm3, 6 * 6 * 6 * 0.001, 1e-9);
    assert_near(report.part[1].volume_mm3, 60 * 10 * 4 * 0.001, 1e-9);
    assert_int_equal(report.part[0].first_layer, 3);
    assert_int_equal(report.part[0].last_layer, 8);
    assert_near(report.part[1].box_mm[0], 1.0, 1e-12);
    assert_near(report.part[1].box_mm[3], 2.0, 1e-12);
    assert_near(report.totals.support_volume_mm3, (double)posts * 0.001, 1e-9);
    assert_near(report.totals.part_volume_mm3, (double)(all - posts) * 0.001, 1e-9);
    fw_report_free(&report);
    stage_free(&s);
}

/* The margin of a part on the plate is its own, also where a foot has grown to it and comes first
 * in raster order. */
static void a_part_keeps_its_margin_beside_a_foot(void **state)
{
    (void)state;
    for (int foot = 0; foot < 2; foot++) {
        stage s = one_block();
        if (foot) {
            stage_post(&s, 3.0, 0.9, 2, false);
            stage_stamp(&s, false);
        }
        fw_report report = stage_judge(&s);
        assert_int_equal(report.part_count, 1);
        assert_near(report.part[0].worst_margin, 0.5 * 16 / report.totals.peak_peel_N, 0.2);
        fw_report_free(&report);
        stage_free(&s);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(the_same_in_any_batches),
                                       cmocka_unit_test(the_same_on_any_threads),
                                       cmocka_unit_test(the_same_without_a_memo),
                                       cmocka_unit_test(peel_at_the_limit),
                                       cmocka_unit_test(plate_at_the_margin),
                                       cmocka_unit_test(posts_at_the_margin),
                                       cmocka_unit_test(margins_by_hand),
                                       cmocka_unit_test(assumed_values),
                                       cmocka_unit_test(without_a_card),
                                       cmocka_unit_test(parts_and_volumes),
                                       cmocka_unit_test(a_part_keeps_its_margin_beside_a_foot)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
