#include "mask/pixel_masks.h"

#include "mask/overlaps.h"

#include <stdlib.h>

static fw_regions regions_of(const pixel_mask *mask, fw_connect connect)
{
    fw_runs set = runs_of(mask);
    fw_regions regions = {0};
    assert_int_equal(fw_regions_label(&set, connect, &regions, NULL), FW_OK);
    fw_runs_free(&set);
    return regions;
}

static void add_pixel(fw_region *region, const pixel_mask *mask, int32_t x, int32_t y)
{
    if (region->pixels == 0)
        *region =
            (fw_region){.x0 = x, .y0 = y, .x1 = x + 1, .y1 = y + 1, .first_x = x, .first_y = y};
    region->pixels++;
    region->sum_x += x;
    region->sum_y += y;
    region->x0 = x < region->x0 ? x : region->x0;
    region->y0 = y < region->y0 ? y : region->y0;
    region->x1 = x >= region->x1 ? x + 1 : region->x1;
    region->y1 = y >= region->y1 ? y + 1 : region->y1;
    if (x == 0 || y == 0 || x == mask->width - 1 || y == mask->height - 1)
        region->on_border = true;
}

static void assert_region(const fw_region *region, const fw_region *expected)
{
    assert_int_equal(region->pixels, expected->pixels);
    assert_int_equal(region->sum_x, expected->sum_x);
    assert_int_equal(region->sum_y, expected->sum_y);
    assert_int_equal(region->x0, expected->x0);
    assert_int_equal(region->y0, expected->y0);
    assert_int_equal(region->x1, expected->x1);
    assert_int_equal(region->y1, expected->y1);
    assert_int_equal(region->first_x, expected->first_x);
    assert_int_equal(region->first_y, expected->first_y);
    assert_int_equal(region->on_border, expected->on_border);
}

static void check_against_flood(const pixel_mask *mask, fw_connect connect, fw_regions *regions)
{
    fw_runs set = runs_of(mask);
    uint32_t label[AREA];
    fw_region expected[AREA] = {0};
    const uint32_t count = flood_all(mask, connect, label);
    assert_int_equal(fw_regions_label(&set, connect, regions, NULL), FW_OK);
    assert_int_equal(regions->count, count);
    for (int32_t y = 0; y < mask->height; y++) {
        for (int32_t x = 0; x < mask->width; x++) {
            if (!lit(mask, x, y))
                continue;
            const uint32_t r = label[y * mask->width + x];
            assert_int_equal(regions->label[fw_runs_find(&set, x, y)], r);
            add_pixel(&expected[r], mask, x, y);
        }
    }
    for (uint32_t r = 0; r < count; r++)
        assert_region(&regions->region[r], &expected[r]);
    fw_runs_free(&set);
}

static void regions_agree_with_flood_fill(void **state)
{
    (void)state;
    uint64_t seed = 21;
    fw_regions regions = {0};
    for (int trial = 0; trial < 500; trial++) {
        const pixel_mask mask = any_mask(&seed);
        check_against_flood(&mask, FW_FOUR, &regions);
        check_against_flood(&mask, FW_EIGHT, &regions);
    }
    fw_regions_free(&regions);
}

static void corners_join_only_eight_connected_regions(void **state)
{
    (void)state;
    const pixel_mask board = drawn("#.#.\n"
                                   ".#.#\n"
                                   "#.#.\n");
    fw_regions four = regions_of(&board, FW_FOUR), eight = regions_of(&board, FW_EIGHT);
    assert_int_equal(four.count, 6);
    assert_int_equal(eight.count, 1);
    assert_int_equal(eight.region[0].pixels, 6);
    fw_regions_free(&four);
    fw_regions_free(&eight);
}

/* Two combs that close late: arms that began as regions of their own end as one. */
static void arms_that_meet_late_are_one_region(void **state)
{
    (void)state;
    const pixel_mask combs = drawn("#.#.#.#\n"
                                   "#.#.#.#\n"
                                   "#.###.#\n"
                                   "#.....#\n"
                                   "#######\n");
    fw_regions regions = regions_of(&combs, FW_FOUR);
    assert_int_equal(regions.count, 2);
    assert_int_equal(regions.region[0].pixels, 15);
    assert_int_equal(regions.region[1].pixels, 7);
    assert_int_equal(regions.region[1].first_x, 2);
    assert_true(regions.region[1].on_border);
    fw_regions_free(&regions);
}

static void nothing_has_no_regions(void **state)
{
    (void)state;
    const fw_runs none = {0};
    fw_regions regions = {0};
    assert_int_equal(fw_regions_label(&none, FW_FOUR, &regions, NULL), FW_OK);
    assert_int_equal(regions.count, 0);
    fw_regions_free(&regions);
    const pixel_mask dark = drawn("...\n...\n");
    regions = regions_of(&dark, FW_EIGHT);
    assert_int_equal(regions.count, 0);
    fw_regions_free(&regions);
}

/* Pixels shared by each pair of regions, counted one by one: [now][before]. */
static int64_t *shared_pixels(const pixel_mask *before, const pixel_mask *now, uint32_t befores,
                              uint32_t nows)
{
    uint32_t a[AREA], b[AREA];
    assert_int_equal(flood_all(before, FW_FOUR, a), befores);
    assert_int_equal(flood_all(now, FW_EIGHT, b), nows);
    int64_t *shared = calloc((size_t)befores * nows + 1, sizeof *shared);
    assert_non_null(shared);
    for (int32_t i = 0; i < now->width * now->height; i++) {
        if (a[i] != NOWHERE && b[i] != NOWHERE)
            shared[b[i] * befores + a[i]]++;
    }
    return shared;
}

static void check_overlaps(const pixel_mask *before, const pixel_mask *now, fw_overlaps *found)
{
    fw_runs before_runs = runs_of(before), now_runs = runs_of(now);
    fw_regions before_regions = regions_of(before, FW_FOUR),
               now_regions = regions_of(now, FW_EIGHT);
    int64_t *shared = shared_pixels(before, now, before_regions.count, now_regions.count);
    assert_int_equal(
        fw_overlaps_find(&before_runs, &before_regions, &now_runs, &now_regions, found, NULL),
        FW_OK);
    uint32_t next = 0;
    for (uint32_t i = 0; i < before_regions.count * now_regions.count; i++) {
        if (shared[i] == 0)
            continue;
        assert_true(next < found->count);
        assert_int_equal(found->item[next].now, i / before_regions.count);
        assert_int_equal(found->item[next].before, i % before_regions.count);
        assert_int_equal(found->item[next].pixels, shared[i]);
        next++;
    }
    assert_int_equal(found->count, next);
    free(shared);
    fw_regions_free(&before_regions);
    fw_regions_free(&now_regions);
    fw_runs_free(&before_runs);
    fw_runs_free(&now_runs);
}

static void overlaps_agree_with_every_pixel(void **state)
{
    (void)state;
    uint64_t seed = 22;
    fw_overlaps found = {0};
    for (int trial = 0; trial < 500; trial++) {
        const pixel_mask a = any_mask(&seed);
        const pixel_mask b = random_mask(&seed, a.width, a.height, random_below(&seed, 101));
        check_overlaps(&a, &b, &found);
    }
    fw_overlaps_free(&found);
}

/* One region that meets two others in turn, row after row: each pair must still come once. */
static void a_pair_that_meets_again_and_again_comes_once(void **state)
{
    (void)state;
    const pixel_mask stripes = drawn("#.#\n#.#\n#.#\n"), full = drawn("###\n###\n###\n");
    fw_overlaps found = {0};
    check_overlaps(&stripes, &full, &found);
    assert_int_equal(found.count, 2);
    check_overlaps(&full, &stripes, &found);
    assert_int_equal(found.count, 2);
    fw_overlaps_free(&found);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(regions_agree_with_flood_fill),
        cmocka_unit_test(corners_join_only_eight_connected_regions),
        cmocka_unit_test(arms_that_meet_late_are_one_region),
        cmocka_unit_test(nothing_has_no_regions),
        cmocka_unit_test(overlaps_agree_with_every_pixel),
        cmocka_unit_test(a_pair_that_meets_again_and_again_comes_once),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
