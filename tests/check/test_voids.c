/* Cavities: what sucks, what stays in the part, what posts close off. */
#include "check/flood.h"
#include "check/stage.h"

static stage block(int layers)
{
    stage s = stage_new(40, 40, layers);
    s.job.has_machine = false; /* geometry alone */
    stage_box(&s, 5, 5, 0, 35, 35, layers, 255);
    return s;
}

static int count_of(const fw_report *report, fw_kind kind)
{
    int count = 0;
    for (size_t i = 0; i < report->findings.count; i++)
        count += report->findings.item[i].kind == kind;
    return count;
}

/* The plate closes layer 0: a hole right through is blind as long as nothing opens its side. */
static void plate_closes_a_hole(void **state)
{
    (void)state;
    for (int vent = 0; vent < 2; vent++) {
        stage s = block(6);
        stage_box(&s, 10, 10, 0, 30, 30, 6, 0);
        if (vent)
            stage_box(&s, 0, 20, 0, 10, 21, 1, 0);
        fw_report report = stage_judge(&s);
        for (int n = 0; n < 6; n++)
            assert_near(report.layer[n].blind_cavity_mm2, vent ? 0 : 4, 1e-9);
        assert_int_equal(count_of(&report, FW_BLIND_CAVITY), !vent);
        assert_null(finding_of(&report, FW_ENCLOSED_RESIN)); /* open at the window in the end */
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* In a layer voids join through corners, from layer to layer only through a shared pixel. */
static void corners_join_in_the_layer_only(void **state)
{
    (void)state;
    for (int same_layer = 0; same_layer < 2; same_layer++) {
        stage s = block(4);
        stage_box(&s, 10, 10, 1, 20, 20, 4, 0);
        if (same_layer) /* a slot to the vat that meets the hole's corner in its own layer */
            stage_box(&s, 20, 20, 1, 40, 22, 2, 0);
        else /* the same slot one layer nearer to the plate, beside the hole's shadow */
            stage_box(&s, 20, 12, 0, 40, 14, 1, 0);
        fw_report report = stage_judge(&s);
        assert_near(report.layer[3].blind_cavity_mm2, same_layer ? 0 : 1, 1e-9);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* Two holes that meet on the plate side are one cavity; a vent on one relieves both from then on.
 */
static void u_tube(void **state)
{
    (void)state;
    stage s = block(8);
    stage_box(&s, 10, 10, 1, 15, 30, 8, 0);
    stage_box(&s, 25, 10, 1, 30, 30, 8, 0);
    stage_box(&s, 15, 10, 1, 25, 14, 2, 0);
    stage_box(&s, 0, 20, 5, 10, 22, 6, 0);
    fw_report report = stage_judge(&s);
    assert_near(report.layer[1].blind_cavity_mm2, 2.4, 1e-9);
    assert_near(report.layer[4].blind_cavity_mm2, 2, 1e-9);
    assert_near(report.layer[5].blind_cavity_mm2, 0, 0);
    assert_near(report.layer[7].blind_cavity_mm2, 0, 0);
    const fw_finding *blind = finding_of(&report, FW_BLIND_CAVITY);
    assert_int_equal(count_of(&report, FW_BLIND_CAVITY), 1);
    assert_int_equal(blind->severity, FW_WARN);
    assert_int_equal(blind->layer, 1);
    assert_int_equal(blind->last_layer, 4);
    assert_int_equal(blind->count, 7); /* one region in layer 1, two in each of three */
    fw_report_free(&report);
    stage_free(&s);
}

/* Cavities that meet only later were named apart; in the end they are one. */
static void cavities_that_merge_are_one_finding(void **state)
{
    (void)state;
    stage s = block(8);
    stage_box(&s, 10, 10, 2, 15, 30, 8, 0);
    stage_box(&s, 25, 10, 3, 30, 30, 8, 0);
    stage_box(&s, 15, 10, 6, 25, 14, 7, 0);
    fw_report report = stage_judge(&s);
    assert_int_equal(count_of(&report, FW_BLIND_CAVITY), 1);
    assert_int_equal(finding_of(&report, FW_BLIND_CAVITY)->layer, 2);
    assert_int_equal(finding_of(&report, FW_BLIND_CAVITY)->last_layer, 7);
    fw_report_free(&report);
    stage_free(&s);
}

/* Small cavities are one note for all; exactly 0.05 mm2 (5 pixels) is not small. */
static void small_cavities_share_a_note(void **state)
{
    (void)state;
    stage s = block(6);
    stage_box(&s, 8, 8, 2, 10, 10, 6, 0);   /* 0.04 mm2 */
    stage_box(&s, 20, 20, 2, 22, 22, 6, 0); /* 0.04 mm2 */
    stage_box(&s, 25, 10, 2, 30, 11, 6, 0); /* 0.05 mm2 */
    fw_report report = stage_judge(&s);
    assert_int_equal(count_of(&report, FW_BLIND_CAVITY), 2);
    int64_t notes = 0, warnings = 0;
    for (size_t i = 0; i < report.findings.count; i++) {
        const fw_finding *f = &report.findings.item[i];
        notes += f->severity == FW_NOTE ? f->count : 0;
        warnings += f->severity == FW_WARN && f->kind == FW_BLIND_CAVITY ? f->count : 0;
    }
    assert_int_equal(notes, 8);
    assert_int_equal(warnings, 4);
    fw_report_free(&report);
    stage_free(&s);
}

/* What is closed again before the end stays in the part: its volume is in the line. */
static void enclosed_resin(void **state)
{
    (void)state;
    stage s = block(10);
    stage_box(&s, 10, 10, 2, 20, 20, 6, 0);
    stage_box(&s, 25, 25, 3, 30, 30, 10, 0); /* open at the window */
    fw_report report = stage_judge(&s);
    const fw_finding *enclosed = finding_of(&report, FW_ENCLOSED_RESIN);
    assert_int_equal(count_of(&report, FW_ENCLOSED_RESIN), 1);
    assert_int_equal(enclosed->severity, FW_WARN);
    assert_int_equal(enclosed->pixels, 400);
    assert_near(enclosed->badness, 0.4, 1e-9); /* mm3 */
    assert_int_equal(enclosed->layer, 2);
    assert_null(finding_of(&report, FW_NEW_VOID));
    fw_report_free(&report);
    stage_free(&s);
}

/* A pocket whose only way out is a slot: a post in the slot closes it off; the same pixels as part
 * are merely enclosed resin; a post that leaves one pixel open closes nothing. */
static void a_post_closes_a_pocket(void **state)
{
    (void)state;
    enum { POST, PART, LEAKS };
    for (int how = POST; how <= LEAKS; how++) {
        stage s = block(14);
        stage_box(&s, 15, 15, 0, 25, 25, 8, 0);
        stage_box(&s, 0, 17, 0, 15, 22, 8, 0); /* the slot, 5 pixels wide */
        if (how != PART) {
            stage_post(&s, 0.95, 1.95, 8, false);
            fw_post *post = &s.posts.item[0];
            post->tip_mm = post->shaft_mm = post->foot_mm = 0.7;
        }
        stage_box(&s, 9, how == LEAKS ? 18 : 17, 0, 10, 22, 8, 255);
        fw_report report = stage_judge(&s);
        assert_int_equal(finding_of(&report, FW_ENCLOSED_RESIN) != NULL, how != LEAKS);
        assert_int_equal(finding_of(&report, FW_NEW_VOID) != NULL, how == POST);
        if (how == POST) {
            assert_int_equal(finding_of(&report, FW_NEW_VOID)->severity, FW_FAIL);
            assert_int_equal(finding_of(&report, FW_NEW_VOID)->pixels, 8 * (100 + 5 * 5));
        }
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* Random stacks: sealed pixels of every layer, and enclosed ones at the end, against a flood from
 * the border through all voids up to that layer. */
static void random_stacks_against_a_flood(void **state)
{
    (void)state;
    int sealed_layers = 0, enclosed_runs = 0;
    for (uint64_t run = 1; run <= 40; run++) {
        stage s = stage_new(13, 11, 7);
        s.job.has_machine = false;
        s.batch = (int32_t)(run % 5) + 1;
        stage_noise(&s, run * 7919, 0.66 + 0.005 * (double)run);
        fw_report report = stage_judge(&s);
        for (int top = 0; top < 7; top++) {
            uint8_t *mark = flood_marks(&s);
            for (int n = 0; n <= top; n++)
                for (int y = 0; y < 11; y++)
                    for (int x = 0; x < 13; x++)
                        if (!stage_at(&s, x, y, n) && (x % 12 == 0 || y % 10 == 0))
                            mark[(n * 11 + y) * 13 + x] = 1;
            flood(&s, false, 8, top, mark);
            const int sealed = unmarked(&s, false, top, mark);
            sealed_layers += sealed > 0;
            assert_true(fabs(report.layer[top].blind_cavity_mm2 - sealed * 0.01) < 1e-9);
            if (top == 6) { /* the last layer is open to the window: what it holds is let out */
                for (int i = 0; i < 13 * 11; i++)
                    mark[6 * 13 * 11 + i] = s.grey[6 * 13 * 11 + i] < 128;
                flood(&s, false, 8, top, mark);
                int64_t left = 0, told = 0;
                for (int n = 0; n < 7; n++)
                    left += unmarked(&s, false, n, mark);
                for (size_t i = 0; i < report.findings.count; i++)
                    told += report.findings.item[i].kind == FW_ENCLOSED_RESIN
                                ? report.findings.item[i].pixels
                                : 0;
                assert_int_equal(told, left);
                enclosed_runs += left > 0;
            }
            free(mark);
        }
        fw_report_free(&report);
        stage_free(&s);
    }
    assert_true(sealed_layers > 100 && enclosed_runs > 20); /* the stacks are worth the trouble */
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(plate_closes_a_hole),
                                       cmocka_unit_test(corners_join_in_the_layer_only),
                                       cmocka_unit_test(u_tube),
                                       cmocka_unit_test(cavities_that_merge_are_one_finding),
                                       cmocka_unit_test(small_cavities_share_a_note),
                                       cmocka_unit_test(enclosed_resin),
                                       cmocka_unit_test(a_post_closes_a_pocket),
                                       cmocka_unit_test(random_stacks_against_a_flood)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
