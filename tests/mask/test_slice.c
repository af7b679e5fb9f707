#include "mask/pixel_masks.h"

#include "mask/slice.h"

#include <string.h>

/* Digits are greys, '.' is dark; rows end in a newline. Full grey is 9. */
static fw_greys greys_drawn(const char *picture)
{
    const int32_t width = (int32_t)(strchr(picture, '\n') - picture);
    const int32_t height = (int32_t)strlen(picture) / (width + 1);
    fw_greys layer = {0};
    assert_int_equal(fw_greys_begin(&layer, width, height, 9, NULL), FW_OK);
    for (int32_t y = 0; y < height; y++) {
        for (int32_t x = 0; x < width; x++) {
            const char pixel = picture[y * (width + 1) + x];
            assert_int_equal(
                fw_greys_push(&layer, y, x, x + 1, pixel == '.' ? 0 : pixel - '0', NULL), FW_OK);
        }
    }
    fw_greys_finish(&layer);
    return layer;
}

static void assert_picture(const fw_runs *set, const char *picture)
{
    const pixel_mask mask = drawn(picture);
    fw_runs expected = runs_of(&mask);
    assert_true(fw_runs_equal(set, &expected));
    fw_runs_free(&expected);
}

static void build(const char *picture, int32_t intended_least, int32_t solid_least, fw_slice *out)
{
    fw_greys layer = greys_drawn(picture);
    assert_int_equal(fw_slice_build(&layer, intended_least, solid_least, out, NULL), FW_OK);
    fw_greys_free(&layer);
}

static const char ring[] = ".......\n"
                           ".99699.\n"
                           ".9...9.\n"
                           ".99999.\n"
                           ".......\n";

static void solid_of_its_own_where_a_grey_does_not_cure(void **state)
{
    (void)state;
    fw_slice slice = {0};
    build(ring, 5, 7, &slice);
    assert_false(slice.same);
    assert_picture(&slice.intended, ".......\n.#####.\n.#...#.\n.#####.\n.......\n");
    assert_int_equal(slice.regions.count, 1);
    assert_picture(fw_slice_solid(&slice), ".......\n.##.##.\n.#...#.\n.#####.\n.......\n");
    assert_int_equal(fw_slice_solid_regions(&slice)->region[0].pixels, 11);
    assert_picture(&slice.voids, "#######\n#..#..#\n#.###.#\n#.....#\n#######\n");
    assert_int_equal(slice.void_regions.count, 1);
    assert_true(slice.void_regions.region[0].on_border);
    fw_slice_free(&slice);
}

static void one_solid_where_the_thresholds_pick_the_same_pixels(void **state)
{
    (void)state;
    const int32_t solid_least[] = {5, 6};
    for (int i = 0; i < 2; i++) {
        fw_slice slice = {0};
        build(ring, 5, solid_least[i], &slice);
        assert_true(slice.same);
        assert_int_equal(slice.own_solid.count, 0);
        assert_int_equal(slice.own_solid.height, 0);
        assert_int_equal(slice.own_solid_regions.count, 0);
        assert_ptr_equal(fw_slice_solid(&slice), &slice.intended);
        assert_ptr_equal(fw_slice_solid_regions(&slice), &slice.regions);
        assert_int_equal(slice.void_regions.count, 2);
        assert_true(slice.void_regions.region[0].on_border);
        assert_false(slice.void_regions.region[1].on_border);
        assert_int_equal(slice.void_regions.region[1].pixels, 3);
        fw_slice_free(&slice);
    }
}

static void nothing_cures_at_the_largest_threshold(void **state)
{
    (void)state;
    fw_slice slice = {0};
    build(ring, 5, INT32_MAX, &slice);
    assert_false(slice.same);
    assert_int_equal(slice.regions.count, 1);
    assert_int_equal(fw_slice_solid(&slice)->count, 0);
    assert_int_equal(fw_slice_solid_regions(&slice)->count, 0);
    assert_int_equal(fw_runs_pixels(&slice.voids), 7 * 5);
    fw_slice_free(&slice);
}

static void solid_is_four_and_void_eight_connected(void **state)
{
    (void)state;
    fw_slice slice = {0};
    build("9....\n"
          ".9...\n"
          "9.999\n"
          ".99.9\n"
          "..999\n",
          5, 5, &slice);
    assert_int_equal(slice.regions.count, 4);
    assert_int_equal(slice.void_regions.count, 2);
    build("89...\n"
          ".98..\n"
          "9.999\n",
          5, 9, &slice);
    assert_int_equal(slice.regions.count, 2);
    assert_int_equal(fw_slice_solid_regions(&slice)->count, 3);
    fw_slice_free(&slice);
}

/* A slice that held much must give the same as a fresh one, in both orders of same and own. */
static void a_slice_can_be_built_again(void **state)
{
    (void)state;
    const int32_t solid_least[] = {7, 5, INT32_MAX, 5, 7};
    fw_slice again = {0};
    build("9.9.9.9.9\n.8.8.8.8.\n9.9.9.9.9\n", 5, 9, &again);
    for (int i = 0; i < 5; i++) {
        fw_slice fresh = {0};
        build(ring, 5, solid_least[i], &again);
        build(ring, 5, solid_least[i], &fresh);
        assert_int_equal(again.same, fresh.same);
        assert_true(fw_runs_equal(&again.intended, &fresh.intended));
        assert_true(fw_runs_equal(&again.own_solid, &fresh.own_solid));
        assert_true(fw_runs_equal(&again.voids, &fresh.voids));
        assert_int_equal(again.regions.count, fresh.regions.count);
        assert_int_equal(again.own_solid_regions.count, fresh.own_solid_regions.count);
        assert_int_equal(again.void_regions.count, fresh.void_regions.count);
        fw_slice_free(&fresh);
    }
    fw_slice_free(&again);
}

static void a_dark_layer_is_all_void(void **state)
{
    (void)state;
    fw_slice slice = {0};
    build("...\n...\n", 1, 1, &slice);
    assert_int_equal(slice.regions.count, 0);
    assert_int_equal(slice.void_regions.count, 1);
    assert_int_equal(slice.void_regions.region[0].pixels, 6);
    build("99\n99\n", 9, 9, &slice);
    assert_int_equal(slice.regions.count, 1);
    assert_int_equal(slice.void_regions.count, 0);
    fw_slice_free(&slice);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(solid_of_its_own_where_a_grey_does_not_cure),
        cmocka_unit_test(one_solid_where_the_thresholds_pick_the_same_pixels),
        cmocka_unit_test(nothing_cures_at_the_largest_threshold),
        cmocka_unit_test(solid_is_four_and_void_eight_connected),
        cmocka_unit_test(a_slice_can_be_built_again),
        cmocka_unit_test(a_dark_layer_is_all_void),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
