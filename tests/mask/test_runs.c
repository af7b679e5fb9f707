#include "mask/pixel_masks.h"

#include <math.h>

static void assert_same_pixels(const fw_runs *set, const pixel_mask *expected)
{
    assert_true(fw_runs_valid(set));
    fw_runs other = runs_of(expected);
    assert_true(fw_runs_equal(set, &other));
    fw_runs_free(&other);
}

static void touching_runs_become_one(void **state)
{
    (void)state;
    fw_runs set = {0};
    assert_int_equal(fw_runs_begin(&set, 10, 3, NULL), FW_OK);
    assert_int_equal(fw_runs_push(&set, 1, 2, 4, NULL), FW_OK);
    assert_int_equal(fw_runs_push(&set, 1, 4, 4, NULL), FW_OK);
    assert_int_equal(fw_runs_push(&set, 1, 4, 5, NULL), FW_OK);
    assert_int_equal(fw_runs_push(&set, 1, 6, 10, NULL), FW_OK);
    assert_int_equal(fw_runs_push(&set, 2, 0, 1, NULL), FW_OK);
    fw_runs_finish(&set);
    const pixel_mask expected = drawn("..........\n"
                                      "..###.####\n"
                                      "#.........\n");
    assert_int_equal(set.count, 3);
    assert_same_pixels(&set, &expected);
    fw_runs_free(&set);
}

static void a_set_can_be_built_again(void **state)
{
    (void)state;
    const pixel_mask small = drawn("#.#\n");
    fw_runs set = {0};
    assert_int_equal(fw_runs_begin(&set, 40, 40, NULL), FW_OK);
    for (int32_t y = 0; y < 40; y++)
        assert_int_equal(fw_runs_push(&set, y, 0, 40, NULL), FW_OK);
    fw_runs_finish(&set);
    assert_int_equal(fw_runs_begin(&set, 3, 1, NULL), FW_OK);
    assert_int_equal(fw_runs_push(&set, 0, 0, 1, NULL), FW_OK);
    assert_int_equal(fw_runs_push(&set, 0, 2, 3, NULL), FW_OK);
    fw_runs_finish(&set);
    assert_same_pixels(&set, &small);
    fw_runs_free(&set);
}

static void broken_sets_are_not_valid(void **state)
{
    (void)state;
    const fw_run broken[][2] = {
        {{0, 2}, {2, 4}},  /* touch */
        {{4, 6}, {0, 2}},  /* descend */
        {{3, 3}, {5, 6}},  /* empty */
        {{-1, 2}, {5, 6}}, /* begin outside */
        {{0, 2}, {5, 9}},  /* end outside */
    };
    for (size_t i = 0; i < sizeof broken / sizeof *broken; i++) {
        uint32_t row[] = {0, 2};
        fw_run run[] = {broken[i][0], broken[i][1]};
        const fw_runs set = {.width = 8, .height = 1, .row = row, .run = run, .count = 2};
        assert_false(fw_runs_valid(&set));
    }
    uint32_t falling[] = {0, 2, 1}, not_all[] = {0, 1, 1}, not_zero[] = {1, 1, 2};
    fw_run run[] = {{0, 2}, {3, 4}};
    uint32_t *rows[] = {falling, not_all, not_zero};
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        const fw_runs set = {.width = 8, .height = 2, .row = rows[i], .run = run, .count = 2};
        assert_false(fw_runs_valid(&set));
    }
    assert_true(fw_runs_valid(&(fw_runs){0}));
}

static void find_and_pixels_agree_with_every_pixel(void **state)
{
    (void)state;
    uint64_t seed = 1;
    for (int trial = 0; trial < 200; trial++) {
        const pixel_mask mask = any_mask(&seed);
        fw_runs set = runs_of(&mask);
        int64_t pixels = 0;
        for (int32_t y = -1; y <= mask.height; y++) {
            for (int32_t x = -1; x <= mask.width; x++) {
                const uint32_t run = fw_runs_find(&set, x, y);
                assert_int_equal(run != UINT32_MAX, lit(&mask, x, y));
                if (run != UINT32_MAX)
                    assert_true(set.row[y] <= run && run < set.row[y + 1] && set.run[run].x0 <= x &&
                                x < set.run[run].x1);
                pixels += lit(&mask, x, y);
            }
        }
        assert_int_equal(fw_runs_pixels(&set), pixels);
        fw_runs_free(&set);
    }
}

typedef fw_status (*operation)(const fw_runs *, const fw_runs *, fw_runs *, fw_fault *);

static fw_status complement(const fw_runs *a, const fw_runs *b, fw_runs *out, fw_fault *fault)
{
    (void)b;
    return fw_runs_complement(a, out, fault);
}

static fw_status copy(const fw_runs *a, const fw_runs *b, fw_runs *out, fw_fault *fault)
{
    (void)b;
    return fw_runs_copy(a, out, fault);
}

/* truth: bit 2a + b says whether a pixel with memberships a and b is in the result. */
static void check_operation(operation apply, unsigned truth, uint64_t seed)
{
    fw_runs out = {0};
    for (int trial = 0; trial < 300; trial++) {
        const pixel_mask a = any_mask(&seed);
        const pixel_mask b = random_mask(&seed, a.width, a.height, random_below(&seed, 101));
        pixel_mask expected = a;
        for (int32_t i = 0; i < a.width * a.height; i++)
            expected.at[i] = (truth >> (2 * a.at[i] + b.at[i])) & 1;
        fw_runs p = runs_of(&a), q = runs_of(&b);
        assert_int_equal(apply(&p, &q, &out, NULL), FW_OK);
        assert_same_pixels(&out, &expected);
        fw_runs_free(&p);
        fw_runs_free(&q);
    }
    fw_runs_free(&out);
}

static void set_operations_agree_with_every_pixel(void **state)
{
    (void)state;
    check_operation(complement, 0x3, 2);
    check_operation(copy, 0xc, 3);
    check_operation(fw_runs_intersect, 0x8, 4);
    check_operation(fw_runs_subtract, 0x4, 5);
    check_operation(fw_runs_unite, 0xe, 6);
}

static void equal_needs_the_same_pixels_and_size(void **state)
{
    (void)state;
    const pixel_mask pictures[] = {drawn("#.#\n"),      drawn("#..\n"),     drawn("#.#.\n"),
                                   drawn("###\n"),      drawn("...\n"),     drawn("#\n.\n#\n"),
                                   drawn("#.#\n...\n"), drawn("...\n#.#\n")};
    const size_t count = sizeof pictures / sizeof *pictures;
    for (size_t i = 0; i < count; i++) {
        for (size_t j = 0; j < count; j++) {
            fw_runs a = runs_of(&pictures[i]), b = runs_of(&pictures[j]);
            assert_int_equal(fw_runs_equal(&a, &b), i == j);
            fw_runs_free(&a);
            fw_runs_free(&b);
        }
    }
}

/* The definition: some pixel of the set has its centre in the ellipse about this pixel's centre. */
static bool within_reach(const pixel_mask *mask, int32_t x, int32_t y, double reach_x,
                         double reach_y)
{
    for (int32_t v = 0; v < mask->height; v++) {
        for (int32_t u = 0; u < mask->width; u++) {
            const double p = reach_x > 0 ? (u - x) / reach_x : (u == x ? 0 : 2);
            const double q = reach_y > 0 ? (v - y) / reach_y : (v == y ? 0 : 2);
            if (lit(mask, u, v) && p * p + q * q <= 1 + 1e-9)
                return true;
        }
    }
    return false;
}

static void check_dilate(const pixel_mask *mask, double reach_x, double reach_y)
{
    pixel_mask expected = *mask;
    for (int32_t y = 0; y < mask->height; y++) {
        for (int32_t x = 0; x < mask->width; x++)
            expected.at[y * mask->width + x] = within_reach(mask, x, y, reach_x, reach_y);
    }
    fw_runs set = runs_of(mask), out = {0};
    assert_int_equal(fw_runs_dilate(&set, reach_x, reach_y, &out, NULL), FW_OK);
    assert_same_pixels(&out, &expected);
    fw_runs_free(&set);
    fw_runs_free(&out);
}

static void dilate_agrees_with_its_definition(void **state)
{
    (void)state;
    const double reach[][2] = {{0, 0}, {1, 1},     {5, 5},     {2.5, 2.5}, {0, 3},
                               {3, 0}, {3.3, 1.7}, {0.4, 0.9}, {1.4, 6.2}};
    uint64_t seed = 7;
    for (size_t i = 0; i < sizeof reach / sizeof *reach; i++) {
        for (int32_t percent = 0; percent <= 4; percent++) {
            const pixel_mask mask = random_mask(&seed, 17, 23, percent);
            check_dilate(&mask, reach[i][0], reach[i][1]);
        }
    }
}

/* A clearance of 0.3 mm on pixels of 0.05 mm is 6 pixels on both axes, although the quotient of the
 * two doubles is one unit in the last place less. */
static void dilate_forgives_rounding_on_both_axes(void **state)
{
    (void)state;
    const double reach = 0.3 / 0.05;
    assert_true(reach < 6 && reach > 6 - 1e-12);
    pixel_mask dot = {.width = 15, .height = 15};
    dot.at[7 * 15 + 7] = 1;
    check_dilate(&dot, reach, reach);
    fw_runs set = runs_of(&dot), out = {0};
    assert_int_equal(fw_runs_dilate(&set, reach, reach, &out, NULL), FW_OK);
    assert_true(fw_runs_find(&out, 7 - 6, 7) != UINT32_MAX);
    assert_true(fw_runs_find(&out, 7, 7 - 6) != UINT32_MAX);
    fw_runs_free(&set);
    fw_runs_free(&out);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(touching_runs_become_one),
        cmocka_unit_test(a_set_can_be_built_again),
        cmocka_unit_test(broken_sets_are_not_valid),
        cmocka_unit_test(find_and_pixels_agree_with_every_pixel),
        cmocka_unit_test(set_operations_agree_with_every_pixel),
        cmocka_unit_test(equal_needs_the_same_pixels_and_size),
        cmocka_unit_test(dilate_agrees_with_its_definition),
        cmocka_unit_test(dilate_forgives_rounding_on_both_axes),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
