/* Sizing against a plain search over every micrometre, and margins. */
#include "posts/size.h"

#include "posts/dice.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdlib.h>

#include <cmocka.h>

enum { LEAST = 96 };

static const double layer_mm = 0.05;
static const fw_resin resin = {.tensile_MPa = 8.0, .plate_adhesion_MPa = 0.5};

static fw_screen screen_of(bool two_level)
{
    return (fw_screen){.width = 200,
                       .height = 200,
                       .px_mm = 0.05,
                       .py_mm = 0.04,
                       .full = 255,
                       .brightest = 255,
                       .two_level = two_level};
}

static fw_post_rules small_rules(void)
{
    return (fw_post_rules){.tip_mm = {0.20, 0.60},
                           .shaft_mm = {0.4, 0.9},
                           .foot_mm = 2.0,
                           .neck_mm = 0.5,
                           .margin = 2.0};
}

/* Tip layer 30: face at 1.5 mm, neck from 1.0 mm, leaning below it. */
static fw_post random_post(dice *d)
{
    fw_post post = {
        .routed = true, .tip_layer = 30, .bite_layers = 2, .point_count = 3, .neck_mm = 0.5};
    double x = dice_between(d, 4.0, 5.0), y = dice_between(d, 3.5, 4.5);
    post.path[0] = (fw_point){x, y, 1.5};
    post.path[1] = (fw_point){x + dice_between(d, -0.2, 0.2), y, 1.2};
    post.path[2] = (fw_point){x + dice_between(d, -0.3, 0.3), y + dice_between(d, -0.3, 0.3), 0.0};
    return post;
}

static fw_size_input input_of(const fw_screen *screen, const fw_post_rules *rules, double tip_N,
                              double own_N)
{
    return (fw_size_input){.screen = screen,
                           .layer_mm = layer_mm,
                           .solid_least = LEAST,
                           .resin = &resin,
                           .rules = rules,
                           .demand = {{tip_N, tip_N + own_N, tip_N + 2 * own_N, tip_N + 3 * own_N}},
                           .foot_room_mm = (double)INFINITY};
}

/* ---- the plain version: geometry written out again, every pixel looked at ---- */

static void plain_centre(const fw_post *post, double z, double *x, double *y)
{
    *x = post->path[0].x;
    *y = post->path[0].y;
    for (int i = 0; i + 1 < post->point_count; i++) {
        const fw_point *a = &post->path[i], *b = &post->path[i + 1];
        if (z < a->z && z >= b->z) {
            *x = a->x + (b->x - a->x) * ((a->z - z) / (a->z - b->z));
            *y = a->y + (b->y - a->y) * ((a->z - z) / (a->z - b->z));
        }
    }
}

static bool plain_solid(const fw_screen *screen, const fw_post *post, double z, double diameter,
                        int32_t x, int32_t y)
{
    fw_disc disc = {0.0, 0.0, diameter};
    plain_centre(post, z, &disc.x_mm, &disc.y_mm);
    double coverage = fw_disc_coverage(screen, &disc, x, y);
    if (screen->two_level)
        return coverage >= 0.5;
    return (int32_t)floor(coverage * screen->brightest + 0.5) >= LEAST;
}

static double plain_neck(double tip, double shaft, double depth)
{
    return tip + (shaft - tip) * (depth / 0.5);
}

/* Pixels that are solid at one height, or at both of two heights. */
static double plain_area(const fw_screen *screen, const fw_post *post, double z, double diameter,
                         double z2, double diameter2)
{
    int64_t count = 0;
    for (int32_t y = 50; y < 150; y++) {
        for (int32_t x = 50; x < 130; x++)
            count += plain_solid(screen, post, z, diameter, x, y) &&
                     plain_solid(screen, post, z2, diameter2, x, y);
    }
    return (double)count * (screen->px_mm * screen->py_mm);
}

static bool plain_holds(double strength, double area, double load)
{
    return strength * area / load >= 2.0;
}

static bool plain_tip_holds(const fw_size_input *in, const fw_post *post, double tip)
{
    const fw_screen *screen = in->screen;
    double shaft = fmax(0.4, tip), z = 29.5 * layer_mm, top = plain_neck(tip, shaft, 0.025);
    double contact = plain_area(screen, post, 30.5 * layer_mm, tip, z, top);
    if (!plain_holds(8.0, contact, in->demand.load_N[FW_POST_TIP]))
        return false;
    for (int layer = 20; layer < 30; layer++) {
        z = (layer + 0.5) * layer_mm;
        double d = plain_neck(tip, shaft, 1.5 - z);
        double area = plain_area(screen, post, z, d, z, d);
        if (!plain_holds(8.0, area, in->demand.load_N[FW_POST_NECK]))
            return false;
    }
    return true;
}

static bool plain_shaft_holds(const fw_size_input *in, const fw_post *post, double shaft)
{
    for (int layer = 0; layer < 20; layer++) {
        double z = (layer + 0.5) * layer_mm;
        double area = plain_area(in->screen, post, z, shaft, z, shaft);
        if (!plain_holds(8.0, area, in->demand.load_N[FW_POST_SHAFT]))
            return false;
    }
    return true;
}

static bool plain_foot_holds(const fw_size_input *in, const fw_post *post, double foot,
                             double shaft)
{
    double d = fmax(shaft, foot - layer_mm), z = layer_mm / 2.0;
    double area = plain_area(in->screen, post, z, d, z, d);
    return plain_holds(0.5, area, in->demand.load_N[FW_POST_FOOT]);
}

/* One micrometre less must fail, the size itself must hold, unless the limit was reached: the whole
 * climb from the lower limit would take minutes, and coverage only grows with the diameter. */
static void check_sized(const fw_size_input *in, const fw_post *post)
{
    const double um = 0.001, near = 1e-9;
    bool tip = plain_tip_holds(in, post, post->tip_mm);
    assert_true(tip || fabs(post->tip_mm - 0.6) < near);
    if (post->tip_mm > 0.2 + near)
        assert_false(plain_tip_holds(in, post, post->tip_mm - um));
    bool shaft = plain_shaft_holds(in, post, post->shaft_mm);
    assert_true(shaft || fabs(post->shaft_mm - 0.9) < near);
    if (post->shaft_mm > fmax(0.4, post->tip_mm) + near)
        assert_false(plain_shaft_holds(in, post, post->shaft_mm - um));
    bool foot = plain_foot_holds(in, post, post->foot_mm, post->shaft_mm);
    assert_true(foot || fabs(post->foot_mm - 2.0) < near);
    if (post->foot_mm > post->shaft_mm + near)
        assert_false(plain_foot_holds(in, post, post->foot_mm - um, post->shaft_mm));
}

static void test_neighbours_in_um(void **state)
{
    (void)state;
    dice d = {11};
    fw_post_rules rules = small_rules();
    for (int round = 0; round < 24; round++) {
        fw_screen screen = screen_of(round % 2 == 0);
        fw_post post = random_post(&d);
        fw_size_input in =
            input_of(&screen, &rules, dice_between(&d, 0.05, 1.1), dice_between(&d, 0.0, 0.3));
        fw_size_outcome outcome;
        assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
        check_sized(&in, &post);
    }
}

/* All micrometres of the tip's range, one post of each kind: the first that holds is the answer. */
static void test_every_um(void **state)
{
    (void)state;
    dice d = {12};
    fw_post_rules rules = small_rules();
    for (int round = 0; round < 2; round++) {
        fw_screen screen = screen_of(round % 2 == 0);
        fw_post post = random_post(&d);
        fw_size_input in = input_of(&screen, &rules, 0.2, 0.01);
        fw_size_outcome outcome;
        assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
        assert_int_equal(outcome.missed, 0);
        int um = 200;
        while (um < 600 && !plain_tip_holds(&in, &post, um / 1000.0))
            um++;
        assert_true(um > 200 && um < 600);
        assert_int_equal(lround(post.tip_mm * 1000.0), um);
    }
}

/* A load that the pixels of a contact hold with the margin to the last bit still fits that tip; the
 * next larger double does not. */
static void test_need_is_exact(void **state)
{
    (void)state;
    dice d = {20};
    fw_post_rules rules = small_rules();
    for (int trial = 0; trial < 40; trial++) {
        fw_screen screen = screen_of(trial % 2 == 0);
        fw_post post = random_post(&d), again;
        fw_size_input in = input_of(&screen, &rules, 0.0, 0.0);
        in.demand.load_N[FW_POST_TIP] = dice_between(&d, 0.2, 0.8);
        fw_size_outcome outcome;
        assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
        double z = 29.5 * layer_mm, shaft = fmax(0.4, post.tip_mm);
        double pixels = plain_area(&screen, &post, 30.5 * layer_mm, post.tip_mm, z,
                                   plain_neck(post.tip_mm, shaft, 0.025)) /
                        (screen.px_mm * screen.py_mm);
        double capacity = 8.0 * (round(pixels) * screen.px_mm * screen.py_mm);
        again = post;
        in.demand.load_N[FW_POST_TIP] = capacity / 2.0;
        assert_int_equal(fw_size_post(&in, &again, &outcome, NULL), FW_OK);
        assert_true(again.tip_mm == post.tip_mm);
        in.demand.load_N[FW_POST_TIP] = nextafter(capacity / 2.0, 1e9);
        assert_int_equal(fw_size_post(&in, &again, &outcome, NULL), FW_OK);
        assert_true(again.tip_mm > post.tip_mm);
    }
}

/* Bits are set exactly where the plain version says so, and only at the upper limits. */
static void test_missed_bits(void **state)
{
    (void)state;
    dice d = {13};
    fw_post_rules rules = small_rules();
    unsigned seen = 0;
    for (int round = 0; round < 60; round++) {
        fw_screen screen = screen_of(round % 2 == 0);
        fw_post post = random_post(&d);
        fw_size_input in =
            input_of(&screen, &rules, dice_between(&d, 0.4, 2.4), dice_between(&d, 0.0, 0.3));
        fw_size_outcome outcome;
        assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
        seen |= outcome.missed;
        bool shaft_missed = (outcome.missed & FW_MISSED_SHAFT) != 0;
        bool foot_missed = (outcome.missed & FW_MISSED_FOOT) != 0;
        assert_int_equal(shaft_missed, !plain_shaft_holds(&in, &post, post.shaft_mm));
        assert_int_equal(foot_missed, !plain_foot_holds(&in, &post, post.foot_mm, post.shaft_mm));
        if ((outcome.missed & FW_MISSED_TIP) != 0)
            assert_true(fabs(post.tip_mm - 0.6) < 1e-9);
        if (plain_tip_holds(&in, &post, post.tip_mm))
            assert_int_equal(outcome.missed & (FW_MISSED_TIP | FW_MISSED_NECK), 0);
    }
    assert_int_equal(seen, FW_MISSED_TIP | FW_MISSED_NECK | FW_MISSED_SHAFT | FW_MISSED_FOOT);
}

static void test_monotone_in_load(void **state)
{
    (void)state;
    dice d = {14};
    fw_post_rules rules = small_rules();
    for (int round = 0; round < 6; round++) {
        fw_screen screen = screen_of(round % 2 == 0);
        const fw_post start = random_post(&d);
        fw_post before = start;
        before.tip_mm = before.shaft_mm = before.foot_mm = 0.0;
        for (double load = 0.01; load < 1.8; load *= 1.02) {
            fw_post post = start;
            fw_size_input in = input_of(&screen, &rules, load, 0.02);
            fw_size_outcome outcome;
            assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
            assert_true(post.tip_mm >= before.tip_mm);
            assert_true(post.shaft_mm >= before.shaft_mm);
            assert_true(post.foot_mm >= before.foot_mm);
            assert_true(post.tip_mm <= post.shaft_mm && post.shaft_mm <= post.foot_mm);
            before = post;
        }
    }
}

static void test_grow_only_and_locked(void **state)
{
    (void)state;
    dice d = {15};
    fw_post_rules rules = small_rules();
    fw_screen screen = screen_of(false);
    fw_post post = random_post(&d);
    fw_size_outcome outcome;
    fw_size_input heavy = input_of(&screen, &rules, 0.5, 0.02);
    assert_int_equal(fw_size_post(&heavy, &post, &outcome, NULL), FW_OK);
    const fw_post sized = post;
    fw_size_input light = input_of(&screen, &rules, 0.05, 0.0);
    light.grow_only = true;
    assert_int_equal(fw_size_post(&light, &post, &outcome, NULL), FW_OK);
    assert_true(post.tip_mm == sized.tip_mm && post.shaft_mm == sized.shaft_mm &&
                post.foot_mm == sized.foot_mm);
    light.grow_only = false;
    assert_int_equal(fw_size_post(&light, &post, &outcome, NULL), FW_OK);
    assert_true(post.tip_mm < sized.tip_mm);

    fw_post locked = post;
    locked.locked = true;
    assert_int_equal(fw_size_post(&heavy, &locked, &outcome, NULL), FW_OK);
    assert_true(locked.tip_mm == post.tip_mm && locked.foot_mm == post.foot_mm);
    assert_true((outcome.missed & FW_MISSED_TIP) != 0);
}

static void test_what_cannot_be_met_is_said(void **state)
{
    (void)state;
    dice d = {16};
    fw_post_rules rules = small_rules();
    fw_screen screen = screen_of(false);
    fw_post post = random_post(&d);
    fw_size_outcome outcome;
    fw_size_input in = input_of(&screen, &rules, 50.0, 0.0);
    assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
    assert_int_equal(outcome.missed,
                     FW_MISSED_TIP | FW_MISSED_NECK | FW_MISSED_SHAFT | FW_MISSED_FOOT);

    in = input_of(&screen, &rules, 0.3, 0.0);
    in.foot_room_mm = 0.7;
    assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
    assert_int_equal(outcome.missed, FW_MISSED_FOOT);
    assert_true(fabs(post.foot_mm - 0.7) < 1e-9);
    in.foot_room_mm = -0.1;
    assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
    assert_int_equal(outcome.missed, FW_MISSED_FOOT | FW_MISSED_ROOM);
    assert_true(post.foot_mm == post.shaft_mm);

    in = input_of(&screen, &rules, 0.3, 0.0);
    in.solid_least = INT32_MAX;
    assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
    assert_int_equal(outcome.missed,
                     FW_MISSED_TIP | FW_MISSED_NECK | FW_MISSED_SHAFT | FW_MISSED_FOOT);
}

static void test_unloaded_is_smallest(void **state)
{
    (void)state;
    dice d = {17};
    fw_post_rules rules = small_rules();
    fw_screen screen = screen_of(true);
    fw_post post = random_post(&d);
    fw_size_outcome outcome;
    fw_size_input in = input_of(&screen, &rules, 0.0, 0.0);
    assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
    assert_true(post.tip_mm == 0.2 && post.shaft_mm == 0.4 && post.foot_mm == 0.4);
    assert_int_equal(outcome.missed, 0);
}

/* Not routed: only path[0] is there. Held as if it stood vertically under its tip. */
static void test_unrouted_stands_under_its_tip(void **state)
{
    (void)state;
    dice d = {18};
    fw_post_rules rules = small_rules();
    fw_screen screen = screen_of(false);
    fw_post post = random_post(&d), straight;
    post.path[1] = (fw_point){post.path[0].x, post.path[0].y, 0.0};
    post.point_count = 2;
    straight = post;
    post.routed = false;
    post.point_count = 1;
    fw_size_outcome outcome;
    fw_size_input in = input_of(&screen, &rules, 0.4, 0.05);
    assert_int_equal(fw_size_post(&in, &post, &outcome, NULL), FW_OK);
    assert_int_equal(fw_size_post(&in, &straight, &outcome, NULL), FW_OK);
    assert_true(post.tip_mm == straight.tip_mm && post.shaft_mm == straight.shaft_mm &&
                post.foot_mm == straight.foot_mm);
}

static void test_unusable_numbers(void **state)
{
    (void)state;
    dice d = {19};
    fw_post_rules rules = small_rules();
    fw_screen screen = screen_of(false);
    fw_post post = random_post(&d);
    fw_size_outcome outcome;
    fw_fault fault = {0};
    fw_size_input in = input_of(&screen, &rules, 0.4, 0.05);
    post.path[0].x = (double)NAN;
    assert_int_equal(fw_size_post(&in, &post, &outcome, &fault), FW_INPUT);
    assert_true(fault.text[0] != '\0');
    post = random_post(&d);
    rules.tip_mm[1] = 1e300;
    assert_int_equal(fw_size_post(&in, &post, &outcome, &fault), FW_INPUT);
}

/* By hand: 8 MPa * 0.1 / 0.2 = 4; 8 * 0.2 / 0.4 = 4; no shaft; 0.5 * 2 / 0.8 = 1.25. */
static void test_margins(void **state)
{
    (void)state;
    fw_post_demand demand = {{0.2, 0.4, 0.5, 0.8}};
    fw_post_section section = {{0.1, 0.2, (double)INFINITY, 2.0}};
    fw_post_margins all = fw_margins_of(&resin, &demand, &section);
    assert_true(fabs(all.margin[FW_POST_TIP] - 4.0) < 1e-14);
    assert_true(isinf(all.margin[FW_POST_SHAFT]));
    assert_true(fabs(all.least - 1.25) < 1e-14);
    assert_int_equal(all.governs, FW_POST_FOOT);
    section.area_mm2[FW_POST_FOOT] = 20.0;
    all = fw_margins_of(&resin, &demand, &section);
    assert_int_equal(all.governs, FW_POST_TIP);
    demand = (fw_post_demand){{0.0, 0.0, 0.0, 0.0}};
    all = fw_margins_of(&resin, &demand, &section);
    assert_true(isnan(all.least) && isnan(all.margin[FW_POST_NECK]));
    assert_int_equal(all.governs, FW_POST_CHECKS);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_neighbours_in_um),
        cmocka_unit_test(test_every_um),
        cmocka_unit_test(test_need_is_exact),
        cmocka_unit_test(test_missed_bits),
        cmocka_unit_test(test_monotone_in_load),
        cmocka_unit_test(test_grow_only_and_locked),
        cmocka_unit_test(test_what_cannot_be_met_is_said),
        cmocka_unit_test(test_unloaded_is_smallest),
        cmocka_unit_test(test_unrouted_stands_under_its_tip),
        cmocka_unit_test(test_unusable_numbers),
        cmocka_unit_test(test_margins),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
