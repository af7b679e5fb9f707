/* Shape of a post along z against the closed forms written beside each case. */
#include "posts/profile.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

static const double layer_mm = 0.05;

/* Tip layer 120 of 0.05 mm: face at 6 mm. Neck 4.5 .. 6, foot height (3 - 1) / 2 = 1 mm. */
static fw_post tall_post(void)
{
    fw_post post = {.routed = true,
                    .tip_layer = 120,
                    .bite_layers = 2,
                    .point_count = 3,
                    .tip_mm = 0.4,
                    .neck_mm = 1.5,
                    .shaft_mm = 1.0,
                    .foot_mm = 3.0};
    post.path[0] = (fw_point){2.0, 3.0, 6.0};
    post.path[1] = (fw_point){3.0, 2.0, 4.0};
    post.path[2] = (fw_point){3.0, 2.0, 0.0};
    return post;
}

static void assert_close(double got, double want)
{
    if (!(fabs(got - want) < 1e-12))
        fail_msg("got %.15g, want %.15g", got, want);
}

static void test_diameters_of_each_zone(void **state)
{
    (void)state;
    fw_post post = tall_post();
    assert_close(fw_post_diameter(&post, 6.05, 6.0), 0.4);
    assert_close(fw_post_diameter(&post, 6.0, 6.0), 0.4);
    assert_close(fw_post_diameter(&post, 5.25, 6.0), 0.7);
    assert_close(fw_post_diameter(&post, 4.5, 6.0), 1.0);
    assert_close(fw_post_diameter(&post, 2.0, 6.0), 1.0);
    assert_close(fw_post_diameter(&post, 1.0, 6.0), 1.0);
    assert_close(fw_post_diameter(&post, 0.25, 6.0), 2.5);
    assert_close(fw_post_diameter(&post, 0.0, 6.0), 3.0);
    assert_close(fw_post_diameter(&post, -1.0, 6.0), 3.0);
    assert_close(fw_post_foot_height(&post), 1.0);
    assert_close(fw_post_face(&post, layer_mm), 6.0);
}

/* Volume of the sections = cone frustum + cylinder + cone frustum, pi/12 h (D^2 + D d + d^2).
 * The sections are the midpoint rule, which for a diameter of slope s over a length l is short of
 * it by exactly pi/4 s^2 l layer^2 / 12. */
static void test_volume_of_sections(void **state)
{
    (void)state;
    fw_post post = tall_post();
    const double twelfth = 3.14159265358979323846 / 12.0;
    double want = twelfth * (1.5 * (0.16 + 0.4 + 1.0) + 3.5 * 3.0 + 1.0 * (9.0 + 3.0 + 1.0));
    want -= twelfth / 4.0 * layer_mm * layer_mm * (0.4 * 0.4 * 1.5 + 2.0 * 2.0 * 1.0);
    double volume = 0.0;
    for (int32_t layer = 0; layer < post.tip_layer; layer++) {
        double d = fw_post_diameter(&post, fw_post_middle(layer, layer_mm), 6.0);
        volume += 3.0 * twelfth * d * d * layer_mm;
    }
    assert_true(fabs(volume / want - 1.0) < 1e-12);
}

/* Face at 1 mm: neck and foot overlap, the larger diameter wins. Neck: 0.4 + 0.4 depth, foot: 3 -
 * 2 z; equal where 0.4 + 0.4 (1 - z) = 3 - 2 z, z = 1.375, so the foot wins all the way. */
static void test_short_post(void **state)
{
    (void)state;
    fw_post post = tall_post();
    post.tip_layer = 20;
    assert_close(fw_post_diameter(&post, 0.9, 1.0), 1.2);
    assert_close(fw_post_diameter(&post, 0.1, 1.0), 2.8);
    assert_int_equal(fw_post_zone(&post, 0.9, 1.0), FW_ZONE_FOOT);
    post.foot_mm = 1.2;
    assert_close(fw_post_diameter(&post, 0.5, 1.0), 0.6);
    assert_close(fw_post_diameter(&post, 0.1, 1.0), 1.0);
    assert_int_equal(fw_post_zone(&post, 0.5, 1.0), FW_ZONE_NECK);
}

static void test_zones(void **state)
{
    (void)state;
    fw_post post = tall_post();
    assert_int_equal(fw_post_zone(&post, 6.025, 6.0), FW_ZONE_BITE);
    assert_int_equal(fw_post_zone(&post, 5.975, 6.0), FW_ZONE_NECK);
    assert_int_equal(fw_post_zone(&post, 4.525, 6.0), FW_ZONE_NECK);
    assert_int_equal(fw_post_zone(&post, 4.475, 6.0), FW_ZONE_SHAFT);
    assert_int_equal(fw_post_zone(&post, 1.025, 6.0), FW_ZONE_SHAFT);
    assert_int_equal(fw_post_zone(&post, 0.975, 6.0), FW_ZONE_FOOT);
}

static void test_no_neck_no_foot(void **state)
{
    (void)state;
    fw_post post = tall_post();
    post.neck_mm = 0.0;
    post.foot_mm = 0.5;
    assert_close(fw_post_diameter(&post, 5.999, 6.0), 1.0);
    assert_close(fw_post_diameter(&post, 0.0, 6.0), 1.0);
    assert_close(fw_post_foot_height(&post), 0.0);
}

static void test_centre_follows_the_path(void **state)
{
    (void)state;
    fw_post post = tall_post();
    double x, y;
    assert_true(fw_post_centre(&post, 5.0, &x, &y));
    assert_close(x, 2.5);
    assert_close(y, 2.5);
    assert_true(fw_post_centre(&post, 1.0, &x, &y));
    assert_close(x, 3.0);
    assert_true(fw_post_centre(&post, 0.0, &x, &y));
    assert_true(fw_post_centre(&post, 6.075, &x, &y));
    assert_close(x, 2.0);
    assert_close(y, 3.0);
    assert_false(fw_post_centre(&post, -0.01, &x, &y));
    post.path[2].z = 1.0;
    assert_false(fw_post_centre(&post, 0.5, &x, &y));
    post.point_count = 0;
    assert_false(fw_post_centre(&post, 5.0, &x, &y));
}

static void test_layers(void **state)
{
    (void)state;
    fw_post post = tall_post();
    int32_t first, end;
    fw_post_layers(&post, &first, &end);
    assert_int_equal(first, 0);
    assert_int_equal(end, 122);
    fw_disc disc;
    assert_true(fw_post_disc(&post, 0, layer_mm, &disc));
    assert_close(disc.diameter_mm, 2.95);
    assert_true(fw_post_disc(&post, 121, layer_mm, &disc));
    assert_close(disc.diameter_mm, 0.4);
    assert_false(fw_post_disc(&post, 122, layer_mm, &disc));
    assert_false(fw_post_disc(&post, -1, layer_mm, &disc));
    post.routed = false;
    fw_post_layers(&post, &first, &end);
    assert_int_equal(end, 0);
    assert_false(fw_post_disc(&post, 0, layer_mm, &disc));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_diameters_of_each_zone),
        cmocka_unit_test(test_volume_of_sections),
        cmocka_unit_test(test_short_post),
        cmocka_unit_test(test_zones),
        cmocka_unit_test(test_no_neck_no_foot),
        cmocka_unit_test(test_centre_follows_the_path),
        cmocka_unit_test(test_layers),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
