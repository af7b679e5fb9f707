/* Posts as columns: Euler's load for a shaft of 1 mm, 10 mm long, 500 MPa (by the handbook formula,
 * I = pi / 64), and what neck, lean and bracing change. */
#include "posts/buckling.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

static fw_post upright(double height_mm)
{
    return (fw_post){.routed = true,
                     .tip_layer = (int32_t)(height_mm * 10),
                     .point_count = 2,
                     .path = {{5, 5, height_mm}, {5, 5, 0}},
                     .tip_mm = 1,
                     .shaft_mm = 1,
                     .foot_mm = 1};
}

static void close_to(double got, double expected, double relative)
{
    if (!(fabs(got / expected - 1) <= relative))
        fail_msg("got %.9g, expected %.9g", got, expected);
}

static void eulers_loads(void **state)
{
    (void)state;
    const fw_post post = upright(10);
    close_to(fw_post_buckling_N(&post, 500, 0.1, false), 0.605591, 1e-5);
    close_to(fw_post_buckling_N(&post, 500, 0.1, true), 4.955550, 1e-5); /* tan x = x */
    fw_post none = post;
    none.routed = false;
    assert_true(isnan(fw_post_buckling_N(&none, 500, 0.1, true)));
}

/* A long thin neck gives way before a short stout shaft, whatever holds it; leaning makes the way
 * longer.
 */
static void necks_and_leans(void **state)
{
    (void)state;
    fw_post post = upright(6);
    const double plain = fw_post_buckling_N(&post, 250, 0.1, true);
    post.shaft_mm = post.foot_mm = 2;
    post.neck_mm = 5;
    post.tip_mm = 0.2;
    const double braced = fw_post_buckling_N(&post, 250, 0.1, true);
    assert_true(braced < 16 * plain);
    /* More than a uniform neck of its tip, less than one of its base, both fixed with sway: K = 1.
     */
    const double thin = acos(-1.0) * acos(-1.0) * 250 * acos(-1.0) / 64 * pow(0.2, 4) / 25;
    assert_true(braced > thin && braced < thin * 1e4);
    fw_post lean = upright(6);
    lean.path[1].x += 4.5; /* 7.5 mm long */
    close_to(fw_post_buckling_N(&lean, 250, 0.1, true), plain * 36 / 56.25, 1e-9);
}

static void margins(void **state)
{
    (void)state;
    const fw_post post = upright(10);
    const fw_post_push none = {0}, sway = {.free_N = 0.1}, both = {0.1, 4};
    assert_true(isnan(fw_post_push_margin(&post, 500, 0.1, &none)));
    close_to(fw_post_push_margin(&post, 500, 0.1, &sway), 6.05591, 1e-5);
    close_to(fw_post_push_margin(&post, 500, 0.1, &both), 4.955550 / 4, 1e-5);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(eulers_loads),
                                       cmocka_unit_test(necks_and_leans),
                                       cmocka_unit_test(margins)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
