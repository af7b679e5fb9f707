/* Coverage of pixels by discs: exact area, closed forms, hostile places. */
#include "posts/disc.h"

#include "posts/dice.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>

#include <cmocka.h>

static const double pi = 3.14159265358979323846;

static fw_screen screen_of(double px_mm, double py_mm)
{
    return (fw_screen){
        .width = 200, .height = 200, .px_mm = px_mm, .py_mm = py_mm, .full = 255, .brightest = 255};
}

static const double pixels_mm[][2] = {{0.05, 0.05}, {0.05, 0.025}, {0.035, 0.07}, {0.0471, 0.05}};

/* A disc of up to 60 px across somewhere in the middle of the image. */
static fw_disc random_disc(const fw_screen *screen, dice *d)
{
    return (fw_disc){.x_mm = dice_between(d, 70.0, 130.0) * screen->px_mm,
                     .y_mm = dice_between(d, 70.0, 130.0) * screen->py_mm,
                     .diameter_mm =
                         dice_between(d, 0.3, 60.0) * fmin(screen->px_mm, screen->py_mm)};
}

static void test_sum_is_the_area(void **state)
{
    (void)state;
    dice d = {1};
    for (int round = 0; round < 400; round++) {
        fw_screen screen = screen_of(pixels_mm[round % 4][0], pixels_mm[round % 4][1]);
        fw_disc disc = random_disc(&screen, &d);
        double sum = 0.0;
        for (int32_t y = 0; y < screen.height; y++) {
            for (int32_t x = 0; x < screen.width; x++)
                sum += fw_disc_coverage(&screen, &disc, x, y);
        }
        double area = pi / 4.0 * disc.diameter_mm * disc.diameter_mm;
        assert_true(fabs(sum * screen.px_mm * screen.py_mm / area - 1.0) < 1e-12);
    }
}

/* Disc of radius 1.1 round a corner of a pixel of 1 by 0.5: it leaves through (1, v) and (u, 0.5),
 * so two right triangles of v / 2 and u / 4, and the sector between the two points. */
static void test_triangles_and_sector(void **state)
{
    (void)state;
    fw_screen screen = screen_of(1.0, 0.5);
    fw_disc disc = {20.0, 15.0, 2.2};
    const double u = sqrt(1.1 * 1.1 - 0.25), v = sqrt(1.1 * 1.1 - 1.0);
    double sector = 1.1 * 1.1 / 2.0 * (pi / 2.0 - atan(v) - atan(u / 0.5));
    double want = (v / 2.0 + u / 4.0 + sector) / 0.5;
    for (int32_t y = 29; y <= 30; y++) {
        for (int32_t x = 19; x <= 20; x++)
            assert_true(fabs(fw_disc_coverage(&screen, &disc, x, y) - want) < 1e-14);
    }
}

/* Centre on a corner of four pixels and radius of one pixel: a quarter circle in each. Centre in
 * the middle of a pixel that holds it all: pi r^2. Edge of a huge disc: half a pixel. */
static void test_closed_forms(void **state)
{
    (void)state;
    fw_screen screen = screen_of(1.0, 1.0);
    fw_disc corner = {10.0, 10.0, 2.0};
    for (int32_t y = 9; y <= 10; y++) {
        for (int32_t x = 9; x <= 10; x++)
            assert_true(fabs(fw_disc_coverage(&screen, &corner, x, y) - pi / 4.0) < 1e-14);
    }
    assert_true(fw_disc_coverage(&screen, &corner, 11, 10) == 0.0);
    fw_disc inside = {10.5, 10.5, 0.8};
    assert_true(fabs(fw_disc_coverage(&screen, &inside, 10, 10) - pi * 0.16) < 1e-14);
    fw_disc huge = {10.5 + 1e6, 10.5, 2e6};
    assert_true(fabs(fw_disc_coverage(&screen, &huge, 10, 10) - 0.5) < 1e-3);
    screen.py_mm = 0.5;
    fw_disc wide = {10.0, 5.0, 1.0};
    assert_true(fabs(fw_disc_coverage(&screen, &wide, 10, 10) - pi / 8.0) < 1e-14);
}

/* Independent of the closed form: chords of the pixel added up (midpoint rule in x). */
static double coverage_by_chords(const fw_screen *screen, const fw_disc *disc, int32_t x, int32_t y)
{
    enum { CHORDS = 4000 };
    double radius = disc->diameter_mm / 2.0, length = 0.0;
    for (int i = 0; i < CHORDS; i++) {
        double at = (x + (i + 0.5) / CHORDS) * screen->px_mm - disc->x_mm;
        double half = fabs(at) < radius ? sqrt(radius * radius - at * at) : 0.0;
        double top = fmax(y * screen->py_mm, disc->y_mm - half);
        double bottom = fmin((y + 1.0) * screen->py_mm, disc->y_mm + half);
        length += fmax(bottom - top, 0.0);
    }
    return length / CHORDS / screen->py_mm;
}

static void test_pixel_against_chords(void **state)
{
    (void)state;
    dice d = {2};
    for (int round = 0; round < 300; round++) {
        fw_screen screen = screen_of(pixels_mm[round % 4][0], pixels_mm[round % 4][1]);
        fw_disc disc = random_disc(&screen, &d);
        double turn = dice_between(&d, 0.0, 2.0 * pi);
        double rim_x = disc.x_mm + disc.diameter_mm / 2.0 * cos(turn);
        double rim_y = disc.y_mm + disc.diameter_mm / 2.0 * sin(turn);
        int32_t x = (int32_t)(rim_x / screen.px_mm), y = (int32_t)(rim_y / screen.py_mm);
        double want = coverage_by_chords(&screen, &disc, x, y);
        assert_true(fabs(fw_disc_coverage(&screen, &disc, x, y) - want) < 1e-5);
    }
}

/* What the row calls promise, looked up pixel by pixel. */
static void check_row(const fw_screen *screen, const fw_disc *disc, int32_t y, int32_t least)
{
    int32_t y0, y1;
    fw_disc_rows(screen, disc, &y0, &y1);
    fw_disc_row row = {0};
    fw_run solid = {0}, own = {0};
    if (y0 <= y && y < y1) {
        row = fw_disc_row_at(screen, disc, y);
        solid = fw_disc_row_solid(screen, disc, y, least);
        own = fw_disc_row_footprint(screen, disc, y);
    }
    for (int32_t x = 0; x < screen->width; x++) {
        double coverage = fw_disc_coverage(screen, disc, x, y);
        if (x < row.x0 || x >= row.x1)
            assert_true(coverage < 1e-12);
        if (x >= row.core0 && x < row.core1)
            assert_true(coverage > 1.0 - 1e-12);
        bool is_solid = fw_screen_grey(screen, coverage) >= least;
        assert_int_equal(is_solid, x >= solid.x0 && x < solid.x1);
        bool is_own = screen->two_level ? coverage >= 0.5 : coverage > 0.0;
        assert_true(is_own == (x >= own.x0 && x < own.x1) || coverage < 1e-12);
    }
}

static void test_rows_against_every_pixel(void **state)
{
    (void)state;
    dice d = {3};
    for (int round = 0; round < 60; round++) {
        fw_screen screen = screen_of(pixels_mm[round % 4][0], pixels_mm[round % 4][1]);
        screen.two_level = round % 3 == 0;
        screen.brightest = round % 3 == 1 ? 200 : 255;
        fw_disc disc = random_disc(&screen, &d);
        if (round % 5 == 0)
            disc.x_mm = dice_between(&d, -20.0, 20.0) * screen.px_mm;
        int32_t least = (int32_t)dice_between(&d, 1.0, 220.0);
        for (int32_t y = 0; y < screen.height; y++)
            check_row(&screen, &disc, y, least);
    }
}

static void test_count_and_footprint_agree(void **state)
{
    (void)state;
    dice d = {4};
    fw_runs set = {0}, touched = {0};
    for (int round = 0; round < 60; round++) {
        fw_screen screen = screen_of(pixels_mm[round % 4][0], pixels_mm[round % 4][1]);
        screen.two_level = true;
        fw_disc disc = random_disc(&screen, &d);
        assert_int_equal(fw_disc_footprint(&screen, &disc, &set, NULL), FW_OK);
        assert_true(fw_runs_valid(&set));
        assert_int_equal(fw_runs_pixels(&set), fw_disc_count(&screen, &disc, 255));
        screen.two_level = false;
        assert_int_equal(fw_disc_footprint(&screen, &disc, &touched, NULL), FW_OK);
        assert_true(fw_runs_pixels(&touched) >= fw_runs_pixels(&set));
    }
    fw_runs_free(&set);
    fw_runs_free(&touched);
}

static void test_holds_is_count(void **state)
{
    (void)state;
    dice d = {6};
    for (int round = 0; round < 200; round++) {
        fw_screen screen = screen_of(pixels_mm[round % 4][0], pixels_mm[round % 4][1]);
        screen.two_level = round % 3 == 0;
        fw_disc disc = random_disc(&screen, &d);
        const int32_t leasts[] = {1, 128, 255, 256};
        for (int i = 0; i < 4; i++) {
            int64_t count = fw_disc_count(&screen, &disc, leasts[i]);
            for (int64_t need = count - 9; need <= count + 9; need++)
                assert_int_equal(fw_disc_holds(&screen, &disc, leasts[i], need), count >= need);
        }
    }
}

static void test_hostile_places_draw_nothing(void **state)
{
    (void)state;
    const double nan = (double)NAN, inf = (double)INFINITY;
    const fw_disc discs[] = {
        {nan, 5.0, 1.0},    {5.0, nan, 1.0},     {5.0, 5.0, nan},     {inf, 5.0, 1.0},
        {5.0, -inf, 1.0},   {5.0, 5.0, inf},     {5.0, 5.0, 0.0},     {5.0, 5.0, -1.0},
        {1e300, 5.0, 1.0},  {5.0, -1e300, 1.0},  {-1e18, 1e18, 1.0},  {-3.0, 5.0, 1.0},
        {5.0, 1000.0, 1.0}, {1000.0, 5.0, 1e-9}, {5.0, -1e-3, 1e-12},
    };
    fw_screen screen = screen_of(0.05, 0.05);
    for (size_t i = 0; i < sizeof discs / sizeof *discs; i++)
        assert_int_equal(fw_disc_count(&screen, &discs[i], 1), 0);
    fw_disc everything = {5.0, 5.0, 1e200};
    assert_int_equal(fw_disc_count(&screen, &everything, 255), 200 * 200);
}

static void test_greys(void **state)
{
    (void)state;
    fw_screen screen = screen_of(0.05, 0.05);
    assert_int_equal(fw_screen_grey(&screen, 0.0), 0);
    assert_int_equal(fw_screen_grey(&screen, 1.0), 255);
    assert_int_equal(fw_screen_grey(&screen, 0.5), 128);
    screen.brightest = 200;
    assert_int_equal(fw_screen_grey(&screen, 1.0), 200);
    assert_int_equal(fw_screen_grey(&screen, 0.5), 100);
    screen.brightest = 255;
    const int32_t levels[] = {0, 60, 128, 255};
    screen.levels = levels;
    screen.level_count = 4;
    assert_int_equal(fw_screen_grey(&screen, 0.2), 0);
    assert_int_equal(fw_screen_grey(&screen, 0.4), 60);
    assert_int_equal(fw_screen_grey(&screen, 0.999), 255);
    assert_int_equal(fw_screen_grey(&screen, 0.99), 128);
    screen.two_level = true;
    screen.brightest = 200;
    assert_int_equal(fw_screen_grey(&screen, 0.5), 200);
    assert_int_equal(fw_screen_grey(&screen, 0.4999), 0);
}

/* Mean over sub-pixel places of the solid area of a tip, over its true area. A post that leans
 * visits such places layer by layer: x moves by layer * tan(lean). A single place may be far off (a
 * 6 px disc on a pixel corner has 32 pixels for 28.3), so sizes are found on the pixels. */
static double mean_solid_area(const fw_screen *screen, double diameter_px, double lean_deg,
                              int32_t least)
{
    enum { LAYERS = 997 };
    double step_mm = 0.05 * tan(lean_deg * pi / 180.0), sum = 0.0;
    for (int i = 0; i < LAYERS; i++) {
        double along = i * step_mm * 1.2360679774997896;
        fw_disc disc = {5.0 + fmod(along * 0.8017, screen->px_mm),
                        4.0 + fmod(along * 0.5977, screen->py_mm), diameter_px * screen->px_mm};
        sum += (double)fw_disc_count(screen, &disc, least);
    }
    double area_px = pi / 4.0 * diameter_px * diameter_px * screen->px_mm / screen->py_mm;
    return sum / LAYERS / area_px;
}

static void test_solid_area_of_leaning_tips(void **state)
{
    (void)state;
    const double diameters_px[] = {6.0, 7.3, 9.9, 16.0}, leans_deg[] = {3.0, 11.0, 20.0, 30.0};
    for (int two_level = 0; two_level < 2; two_level++) {
        fw_screen screen = screen_of(0.05, 0.05);
        screen.two_level = two_level == 1;
        for (int i = 0; i < 4; i++) {
            for (int j = 0; j < 4; j++) {
                double share = mean_solid_area(&screen, diameters_px[i], leans_deg[j], 128);
                if (!(fabs(share - 1.0) < 0.03))
                    fail_msg("%g px at %g degrees: %g", diameters_px[i], leans_deg[j], share);
            }
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_sum_is_the_area),
        cmocka_unit_test(test_triangles_and_sector),
        cmocka_unit_test(test_closed_forms),
        cmocka_unit_test(test_pixel_against_chords),
        cmocka_unit_test(test_rows_against_every_pixel),
        cmocka_unit_test(test_count_and_footprint_agree),
        cmocka_unit_test(test_holds_is_count),
        cmocka_unit_test(test_hostile_places_draw_nothing),
        cmocka_unit_test(test_greys),
        cmocka_unit_test(test_solid_area_of_leaning_tips),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
