#include "mask/pixel_masks.h"

#include "mask/greys.h"

/* Greys 0 .. 3 in patches, so that runs of unlike greys touch; a byte a pixel. */
static pixel_mask random_greys(uint64_t *state)
{
    pixel_mask mask = any_mask(state);
    for (int32_t i = 0; i < mask.width * mask.height; i++) {
        const bool repeat = i > 0 && random_below(state, 2) == 0;
        mask.at[i] = repeat ? mask.at[i - 1] : (uint8_t)random_below(state, 4);
    }
    return mask;
}

static fw_greys greys_of(const pixel_mask *mask)
{
    fw_greys layer = {0};
    assert_int_equal(fw_greys_begin(&layer, mask->width, mask->height, 3, NULL), FW_OK);
    for (int32_t y = 0; y < mask->height; y++) {
        for (int32_t x = 0; x < mask->width; x++)
            assert_int_equal(
                fw_greys_push(&layer, y, x, x + 1, mask->at[y * mask->width + x], NULL), FW_OK);
    }
    fw_greys_finish(&layer);
    return layer;
}

static void equal_greys_merge_and_unlike_ones_do_not(void **state)
{
    (void)state;
    fw_greys layer = {0};
    assert_int_equal(fw_greys_begin(&layer, 12, 3, 255, NULL), FW_OK);
    assert_int_equal(fw_greys_push(&layer, 1, 0, 2, 7, NULL), FW_OK);
    assert_int_equal(fw_greys_push(&layer, 1, 2, 4, 7, NULL), FW_OK);
    assert_int_equal(fw_greys_push(&layer, 1, 4, 5, 8, NULL), FW_OK);
    assert_int_equal(fw_greys_push(&layer, 1, 5, 8, 0, NULL), FW_OK);
    assert_int_equal(fw_greys_push(&layer, 1, 8, 12, 8, NULL), FW_OK);
    assert_int_equal(fw_greys_push(&layer, 2, 0, 1, 8, NULL), FW_OK);
    fw_greys_finish(&layer);
    assert_int_equal(layer.count, 4);
    const uint32_t row[] = {0, 0, 3, 4};
    assert_memory_equal(layer.row, row, sizeof row);
    const fw_grey_run run[] = {{0, 4, 7}, {4, 5, 8}, {8, 12, 8}, {0, 1, 8}};
    assert_memory_equal(layer.run, run, sizeof run);
    fw_greys_free(&layer);
}

static void every_pixel_keeps_its_grey(void **state)
{
    (void)state;
    uint64_t seed = 11;
    for (int trial = 0; trial < 200; trial++) {
        const pixel_mask mask = random_greys(&seed);
        fw_greys layer = greys_of(&mask);
        for (int32_t y = -1; y <= mask.height; y++) {
            for (int32_t x = -1; x <= mask.width; x++)
                assert_int_equal(fw_greys_at(&layer, x, y),
                                 lit(&mask, x, y) ? mask.at[y * mask.width + x] : 0);
        }
        fw_greys_free(&layer);
    }
}

static void thresholds_agree_with_every_pixel(void **state)
{
    (void)state;
    uint64_t seed = 12;
    fw_runs set = {0};
    for (int trial = 0; trial < 200; trial++) {
        const pixel_mask mask = random_greys(&seed);
        fw_greys layer = greys_of(&mask);
        for (int32_t least = 1; least <= 4; least++) {
            pixel_mask expected = mask;
            for (int32_t i = 0; i < mask.width * mask.height; i++)
                expected.at[i] = mask.at[i] >= least;
            fw_runs other = runs_of(&expected);
            assert_int_equal(fw_greys_at_least(&layer, least, &set, NULL), FW_OK);
            assert_true(fw_runs_valid(&set));
            assert_true(fw_runs_equal(&set, &other));
            fw_runs_free(&other);
        }
        fw_greys_free(&layer);
    }
    fw_runs_free(&set);
}

static void equal_needs_the_same_greys(void **state)
{
    (void)state;
    uint64_t seed = 13;
    for (int trial = 0; trial < 100; trial++) {
        pixel_mask mask = random_greys(&seed);
        fw_greys a = greys_of(&mask), b = greys_of(&mask);
        assert_true(fw_greys_equal(&a, &b));
        fw_greys_free(&b);
        mask.at[random_below(&seed, mask.width * mask.height)] ^= 1;
        b = greys_of(&mask);
        assert_false(fw_greys_equal(&a, &b));
        fw_greys_free(&a);
        fw_greys_free(&b);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(equal_greys_merge_and_unlike_ones_do_not),
        cmocka_unit_test(every_pixel_keeps_its_grey),
        cmocka_unit_test(thresholds_agree_with_every_pixel),
        cmocka_unit_test(equal_needs_the_same_greys),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
