/* What holds what: onset, adrift, healing, debt at its limit, gaps, border, cavities. */
#include "check/flood.h"
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

static int findings_of(const fw_report *report, fw_kind kind)
{
    int count = 0;
    for (size_t i = 0; i < report->findings.count; i++)
        count += report->findings.item[i].kind == kind;
    return count;
}

/* How late an island may join for each setting: heal_layers 0 forgives nothing. */
static void heal_layers_count(void **state)
{
    (void)state;
    for (int heal = 0; heal <= 3; heal++) {
        for (int late = 1; late <= 4; late++) {
            stage s = with_island(5 + late);
            s.job.heal_layers = heal;
            fw_report report = stage_judge(&s);
            assert_int_equal(finding_of(&report, FW_ONSET)->severity,
                             late <= heal ? FW_NOTE : FW_FAIL);
            assert_int_equal(finding_of(&report, FW_ADRIFT) != NULL, late > heal + 1);
            fw_report_free(&report);
            stage_free(&s);
        }
    }
}

/* A region that only touches the shadow of the layer before begins anew: it must share a pixel. */
static void sharing_one_pixel_is_enough(void **state)
{
    (void)state;
    for (int shared = 0; shared < 2; shared++) {
        stage s = stage_new(40, 20, 6);
        stage_box(&s, 5, 5, 0, 10, 15, 3, 255);
        stage_box(&s, 10 - shared, 5, 3, 15, 6, 6, 255);
        fw_report report = stage_judge(&s);
        assert_int_equal(report.layer[3].onset_px, shared ? 0 : 5);
        assert_int_equal(report.layer[5].adrift_px, shared ? 0 : 5);
        assert_int_equal(findings_of(&report, FW_ONSET), !shared);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* In a layer solid joins through edges: a corner alone does not hold an island. */
static void a_corner_does_not_hold(void **state)
{
    (void)state;
    stage s = stage_new(40, 30, 4);
    stage_box(&s, 5, 5, 0, 15, 15, 4, 255);
    stage_box(&s, 15, 15, 2, 25, 25, 4, 255);
    fw_report report = stage_judge(&s);
    assert_int_equal(report.layer[2].onset_px, 100);
    assert_int_equal(report.layer[3].adrift_px, 100);
    fw_report_free(&report);
    stage_free(&s);
}

/* Islands that grow together later were one cause from the start. */
static void onsets_of_one_body_are_one_finding(void **state)
{
    (void)state;
    for (int join = 0; join < 2; join++) {
        stage s = stage_new(60, 30, 10);
        stage_box(&s, 2, 2, 0, 8, 8, 10, 255);
        stage_box(&s, 15, 5, 3, 25, 15, 10, 255);
        stage_box(&s, 35, 5, 4, 45, 15, 10, 255);
        if (join)
            stage_box(&s, 25, 5, 8, 35, 15, 10, 255);
        fw_report report = stage_judge(&s);
        const fw_finding *onset = finding_of(&report, FW_ONSET);
        assert_int_equal(findings_of(&report, FW_ONSET), join ? 1 : 2);
        assert_int_equal(findings_of(&report, FW_ADRIFT), join ? 1 : 2);
        assert_int_equal(onset->count, join ? 2 : 1);
        assert_int_equal(onset->layer, 3);
        assert_int_equal(onset->last_layer, join ? 4 : 3);
        assert_int_equal(report.part_count, join ? 2 : 3);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* A bridge is reached from both ends: 30 pixels at a reach of 15, not 31. */
static void bridge_at_the_limit(void **state)
{
    (void)state;
    for (int beyond = 0; beyond < 2; beyond++) {
        stage s = stage_new(70, 20, 6);
        stage_box(&s, 5, 5, 0, 15, 15, 6, 255);
        stage_box(&s, 45 + beyond, 5, 0, 55, 15, 6, 255);
        stage_box(&s, 15, 5, 4, 45 + beyond, 15, 6, 255);
        fw_report report = stage_judge(&s);
        assert_int_equal(report.layer[4].overreach_px, beyond ? 10 : 0);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* A slope of 2 pixels a layer at 45 degrees (1 a layer) runs up 1 pixel of debt a layer: it reaches
 * reach / (1 - tan alpha / tan theta) = 2 reach before it needs a post, alpha from the plate. */
static void slope_flatter_than_the_angle(void **state)
{
    (void)state;
    stage s = stage_new(90, 20, 30);
    s.job.resin.reach_mm = 1.55; /* between 15 and 16 pixels, so that round-off does not decide */
    for (int n = 0; n < 30; n++)
        stage_box(&s, 5, 5, n, 15 + 2 * n, 15, n + 1, 255);
    fw_report report = stage_judge(&s);
    /* debt at the edge: 2 pixels in layer 1, one more in each: 16 in layer 15 */
    for (int n = 0; n < 15; n++)
        assert_int_equal(report.layer[n].overreach_px, 0);
    assert_int_equal(report.layer[15].overreach_px, 10);
    assert_int_equal(finding_of(&report, FW_OVERREACH)->layer, 15);
    assert_int_equal(finding_of(&report, FW_OVERREACH)->severity, FW_FAIL);
    fw_report_free(&report);
    stage_free(&s);
}

/* Empty layers before the first and after the last are no gap; posts across one do not bridge it.
 */
static void gaps_are_between(void **state)
{
    (void)state;
    stage s = stage_new(40, 30, 20);
    s.job.has_machine = false;
    stage_post(&s, 2.0, 1.5, 12, true);
    stage_box(&s, 10, 5, 4, 30, 8, 9, 255); /* part, away from the post */
    stage_box(&s, 10, 5, 12, 30, 25, 16,
              255); /* over the post's tip, after 3 layers of post alone */
    fw_report report = stage_judge(&s);
    const fw_finding *gap = finding_of(&report, FW_GAP_LAYER);
    assert_int_equal(findings_of(&report, FW_GAP_LAYER), 1);
    assert_int_equal(gap->layer, 9);
    assert_true(gap->badness == 3);
    fw_report_free(&report);
    stage_free(&s);
}

/* The last column is the border, the last but one is not. */
static void border_is_the_last_pixel(void **state)
{
    (void)state;
    for (int side = 0; side < 4; side++) {
        for (int off = 0; off < 2; off++) {
            stage s = stage_new(30, 20, 2);
            const int x0 = side == 0 ? off : 10, x1 = side == 1 ? 30 - off : 20;
            const int y0 = side == 2 ? off : 5, y1 = side == 3 ? 20 - off : 15;
            stage_box(&s, x0, y0, 0, x1, y1, 2, 255);
            fw_report report = stage_judge(&s);
            assert_int_equal(findings_of(&report, FW_BORDER_SOLID), !off);
            fw_report_free(&report);
            stage_free(&s);
        }
    }
}

/* Onset pixels of a layer by the definition: regions without a pixel over the layer before. */
static int64_t onset_by_flood(const stage *s, int n)
{
    const int size = s->width * s->height;
    uint8_t *mark = flood_marks(s);
    stage one = *s; /* layer n alone */
    one.layers = 1;
    one.grey = s->grey + (size_t)n * (size_t)size;
    for (int i = 0; i < size; i++)
        mark[i] = s->grey[n * size + i] >= 128 && s->grey[(n - 1) * size + i] >= 128;
    flood(&one, true, 4, 0, mark);
    const int count = unmarked(&one, true, 0, mark);
    free(mark);
    return count;
}

/* Random stacks, layer by layer, against a flood from the plate through layers 0 .. n. */
static void random_stacks_against_a_flood(void **state)
{
    (void)state;
    int onsets = 0, adrift = 0;
    for (uint64_t run = 1; run <= 40; run++) {
        stage s = stage_new(13, 11, 7);
        s.job.has_machine = s.job.has_resin = false;
        s.batch = (int32_t)(run % 5) + 1;
        stage_noise(&s, run * 104729, 0.2 + 0.01 * (double)run);
        fw_report report = stage_judge(&s);
        for (int top = 0; top < 7; top++) {
            uint8_t *mark = flood_marks(&s);
            for (int i = 0; i < 13 * 11; i++)
                mark[i] = s.grey[i] >= 128;
            flood(&s, true, 4, top, mark);
            assert_int_equal(report.layer[top].adrift_px, unmarked(&s, true, top, mark));
            assert_int_equal(report.layer[top].onset_px, top > 0 ? onset_by_flood(&s, top) : 0);
            onsets += report.layer[top].onset_px > 0;
            adrift += report.layer[top].adrift_px > 0;
            free(mark);
        }
        fw_report_free(&report);
        stage_free(&s);
    }
    assert_true(onsets > 100 && adrift > 100);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(island_starts_with_nothing),
                                       cmocka_unit_test(healing_has_a_limit),
                                       cmocka_unit_test(heal_layers_count),
                                       cmocka_unit_test(small_onset_is_a_warning),
                                       cmocka_unit_test(sharing_one_pixel_is_enough),
                                       cmocka_unit_test(a_corner_does_not_hold),
                                       cmocka_unit_test(onsets_of_one_body_are_one_finding),
                                       cmocka_unit_test(ledge_at_the_limit),
                                       cmocka_unit_test(bridge_at_the_limit),
                                       cmocka_unit_test(slope_at_the_angle),
                                       cmocka_unit_test(slope_flatter_than_the_angle),
                                       cmocka_unit_test(gap_and_border),
                                       cmocka_unit_test(gaps_are_between),
                                       cmocka_unit_test(border_is_the_last_pixel),
                                       cmocka_unit_test(cup_and_lid),
                                       cmocka_unit_test(vented_cup),
                                       cmocka_unit_test(random_stacks_against_a_flood),
                                       cmocka_unit_test(without_cards_it_is_incomplete)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
