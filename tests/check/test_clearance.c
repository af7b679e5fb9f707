/* Do shafts keep their distance? Every offset in the plane and across layers against the rule
 * itself: too close where hypot(centre distance, gap between the slabs) < clearance.
 */
#include "check/stage.h"

enum { LAYERS = 34, TIP = 32, BREAK = 14, EDGE = 24 };

/* A post of one width up to a part in layer TIP, its tip (and neck of 1 mm) far from what is
 * tested. The shaft's last column is EDGE - 1. */
static stage with_post(void)
{
    stage s = stage_new(44, 30, LAYERS);
    s.job.has_machine = false; /* geometry alone */
    stage_post(&s, 2.0, 1.5, TIP, false);
    fw_post *post = &s.posts.item[0];
    post->tip_mm = post->shaft_mm = post->foot_mm = 0.8;
    stage_box(&s, 16, 11, 0, EDGE, 19, TIP, 255); /* cut to the disc by the judge */
    stage_box(&s, 5, 5, TIP, 40, 25, LAYERS, 255);
    return s;
}

/* Clears the shaft's box in layers [n0, n1). */
static void without_shaft(stage *s, int n0, int n1)
{
    stage_box(s, 16, 11, n0, EDGE, 19, n1, 0);
}

/* The pixels of the box beside the disc are part: take them away. */
static void only_the_disc(stage *s)
{
    for (int y = 11; y < 19; y++)
        for (int x = 16; x < EDGE; x++)
            if (hypot(x + 0.5 - 20, y + 0.5 - 15) > 4)
                stage_box(s, x, y, 0, x + 1, y + 1, TIP, 0);
}

static bool is_close(const stage *s)
{
    fw_report report = stage_judge(s);
    const fw_finding *found = finding_of(&report, FW_CLEARANCE);
    const bool close = found != NULL;
    if (close) {
        assert_int_equal(found->severity, FW_FAIL);
        assert_int_equal(found->post, 0);
    }
    fw_report_free(&report);
    return close;
}

/* The middle rows of the disc (11 .. 19 px, centre at 15) reach column EDGE - 1. */
static void in_the_plane(void **state)
{
    (void)state;
    for (int apart = 1; apart <= 5; apart++) {
        stage s = with_post();
        only_the_disc(&s);
        stage_box(&s, EDGE - 1 + apart, 13, 0, 36, 17, 6, 255);
        assert_int_equal(is_close(&s), apart * 0.1 < 0.3 - 1e-6);
        stage_free(&s);
    }
}

/* The clearance itself decides: one pixel of 100 um, limits just over and just under 0.2 mm. */
static void at_the_limit(void **state)
{
    (void)state;
    static const double clearance_mm[3] = {0.199, 0.2, 0.201};
    for (int i = 0; i < 3; i++) {
        stage s = with_post();
        s.job.rules.clearance_mm = clearance_mm[i];
        only_the_disc(&s);
        stage_box(&s, EDGE + 1, 13, 0, 36, 17, 6, 255); /* centres 0.2 mm apart */
        assert_int_equal(is_close(&s), i == 2);
        stage_free(&s);
    }
}

/* Across layers the slabs' gap counts: neighbours touch (0), the next but one 1 layer, and so on.
 * The shaft is there on one side of layer BREAK only, the block on the other. */
static void across_layers(void **state)
{
    (void)state;
    for (int over = 0; over < 2; over++) {
        for (int layers = 1; layers <= 5; layers++) {
            for (int apart = 1; apart <= 4; apart++) {
                stage s = with_post();
                only_the_disc(&s);
                if (over) { /* shaft below BREAK, block from BREAK - 1 + layers on */
                    without_shaft(&s, BREAK, TIP);
                    stage_box(&s, EDGE - 1 + apart, 13, BREAK - 1 + layers, 36, 17, 22, 255);
                } else { /* shaft from BREAK on, block up to BREAK - layers */
                    without_shaft(&s, 0, BREAK);
                    stage_box(&s, EDGE - 1 + apart, 13, 0, 36, 17, BREAK - layers + 1, 255);
                }
                const double distance = hypot(apart * 0.1, (layers - 1) * 0.1);
                assert_int_equal(is_close(&s), distance < 0.3 - 1e-6);
                stage_free(&s);
            }
        }
    }
}

/* Pixels of 100 by 50 um: the same distances take twice the rows. */
static void on_flat_pixels(void **state)
{
    (void)state;
    for (int down = 0; down < 2; down++) {
        for (int apart = 1; apart <= 8; apart++) {
            stage s = stage_new(44, 60, LAYERS);
            s.job.has_machine = false;
            s.job.pixel_um[1] = 50;
            stage_post(&s, 2.0, 1.5, TIP, false);
            fw_post *post = &s.posts.item[0];
            post->tip_mm = post->shaft_mm = post->foot_mm = 0.8;
            stage_box(&s, 5, 5, TIP, 40, 55, LAYERS, 255);
            stage_box(&s, 19, 22, 0, 21, 38, TIP, 255); /* the disc's middle columns, whole */
            stage_box(&s, 16, 29, 0, 24, 31, TIP, 255); /* and rows */
            if (down)
                stage_box(&s, 19, 37 + apart, 0, 21, 50, 6, 255);
            else
                stage_box(&s, 23 + apart, 29, 0, 40, 31, 6, 255);
            const double distance = apart * (down ? 0.05 : 0.1);
            assert_int_equal(is_close(&s), distance < 0.3 - 1e-6);
            stage_free(&s);
        }
    }
}

/* The neck grows out of the face that it holds, so nothing within its length is too close. */
static void the_neck_may_come_near(void **state)
{
    (void)state;
    for (int below = 0; below < 2; below++) {
        stage s = with_post();
        only_the_disc(&s);
        /* 1 mm of neck: its lowest layer is TIP - 10 */
        const int lowest = TIP - 10 + 3 - below; /* 0.2 mm of gap below the block, then less */
        stage_box(&s, EDGE + 1, 13, lowest, 36, 17, TIP, 255);
        assert_int_equal(is_close(&s), below);
        stage_free(&s);
    }
}

/* Another post is no part. */
static void posts_may_be_neighbours(void **state)
{
    (void)state;
    stage s = with_post();
    only_the_disc(&s);
    stage_post(&s, 2.9, 1.5, TIP, false); /* 0.1 mm of resin between them */
    fw_post *post = &s.posts.item[1];
    post->tip_mm = post->shaft_mm = post->foot_mm = 0.8;
    stage_disc(&s, 29, 15, 4, 0, TIP, 255);
    assert_false(is_close(&s));
    stage_free(&s);
}

/* Only the one that is too close is named, with the pixels of all layers and the first of them. */
static void names_the_post(void **state)
{
    (void)state;
    stage s = with_post();
    only_the_disc(&s);
    stage_post(&s, 3.6, 1.5, TIP, false);
    fw_post *post = &s.posts.item[1];
    post->tip_mm = post->shaft_mm = post->foot_mm = 0.8;
    stage_disc(&s, 36, 15, 4, 0, TIP, 255);
    stage_box(&s, 40, 14, 8, 41, 16, 10, 255); /* touches the second shaft in layers 8 and 9 */
    fw_report report = stage_judge(&s);
    const fw_finding *found = finding_of(&report, FW_CLEARANCE);
    assert_int_equal(found->post, 1);
    assert_int_equal(found->group, 1);
    assert_in_range(found->layer, 5, 8); /* shafts of earlier layers see the block across the gap */
    assert_true(fabs(found->x_mm - 4.05) < 1e-9);
    int64_t kinds = 0;
    for (size_t i = 0; i < report.findings.count; i++)
        kinds += report.findings.item[i].kind == FW_CLEARANCE;
    assert_int_equal(kinds, 1);
    fw_report_free(&report);
    stage_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(in_the_plane),           cmocka_unit_test(at_the_limit),
        cmocka_unit_test(across_layers),          cmocka_unit_test(on_flat_pixels),
        cmocka_unit_test(the_neck_may_come_near), cmocka_unit_test(posts_may_be_neighbours),
        cmocka_unit_test(names_the_post)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
