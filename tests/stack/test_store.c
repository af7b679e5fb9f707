/* Packed layers and the store give back exactly what went in, in memory and from the
 * file; budgets hold. */
#define _GNU_SOURCE

#include "stack/grey_rows.h"
#include "stack/packed.h"
#include "stack/store.h"
#include "workshop.h"

#include <signal.h>
#include <sys/resource.h>

static void check_packing(const fw_greys *layer)
{
    fw_bytes packed = {0};
    fw_greys back = {0};
    assert_int_equal(fw_bytes_append(&packed, "head", 4, "test", NULL), FW_OK);
    assert_int_equal(fw_pack(layer, &packed, NULL), FW_OK);
    assert_memory_equal(packed.data, "head", 4);
    assert_int_equal(fw_unpack(packed.data + 4, packed.size - 4, &back, NULL), FW_OK);
    assert_true(fw_greys_equal(layer, &back));
    fw_greys copy = {0};
    assert_int_equal(fw_greys_copy(layer, &copy, NULL), FW_OK);
    assert_true(fw_greys_equal(layer, &copy));
    fw_greys_free(&copy);
    fw_greys_free(&back);
    fw_bytes_free(&packed);
}

static void test_packing_loses_nothing(void **state)
{
    (void)state;
    static const int32_t full[] = {1, 3, 15, 255, 65535};
    for (int i = 0; i < 2000; i++) {
        fw_greys layer = {0};
        shop_layer(1 + (int32_t)shop_random(i % 10 == 0 ? 60000 : 200),
                   1 + (int32_t)shop_random(i % 10 == 0 ? 3 : 40), full[i % 5], &layer);
        check_packing(&layer);
        fw_greys_free(&layer);
    }
    fw_greys empty = {0};
    assert_int_equal(fw_greys_begin(&empty, 100, 100, 255, NULL), FW_OK);
    fw_greys_finish(&empty);
    check_packing(&empty);
    fw_greys_free(&empty);
}

static void test_rows_that_repeat_cost_nothing(void **state)
{
    (void)state;
    fw_greys layer = {0};
    fw_bytes packed = {0};
    assert_int_equal(fw_greys_begin(&layer, 7680, 4320, 255, NULL), FW_OK);
    for (int32_t y = 1000; y < 3000; y++)
        assert_int_equal(fw_greys_push(&layer, y, 2000, 6000, 255, NULL), FW_OK);
    fw_greys_finish(&layer);
    assert_int_equal(fw_pack(&layer, &packed, NULL), FW_OK);
    assert_true(packed.size < 32);
    fw_bytes_free(&packed);
    fw_greys_free(&layer);
}

/* Broken bytes are a fault or another layer, never a crash; every prefix is a fault. */
static void test_broken_packed_bytes(void **state)
{
    (void)state;
    fw_greys layer = {0}, back = {0};
    fw_bytes packed = {0};
    shop_layer(60, 30, 255, &layer);
    assert_int_equal(fw_pack(&layer, &packed, NULL), FW_OK);
    for (size_t size = 0; size < packed.size; size++) {
        uint8_t *part = malloc(size > 0 ? size : 1);
        memcpy(part, packed.data, size);
        assert_int_equal(fw_unpack(part, size, &back, NULL), FW_MACHINE);
        free(part);
    }
    for (int i = 0; i < 20000; i++) {
        const size_t at = shop_random((uint32_t)packed.size);
        const uint8_t kept = packed.data[at];
        packed.data[at] = (uint8_t)shop_random(256);
        const fw_status status = fw_unpack(packed.data, packed.size, &back, NULL);
        assert_true(status == FW_OK || status == FW_MACHINE);
        packed.data[at] = kept;
    }
    fw_bytes_free(&packed);
    fw_greys_free(&layer);
    fw_greys_free(&back);
}

enum { LAYERS = 40 };

/* Layers of three formats; every fifth repeats the one before. */
static void make_layers(fw_layer *layer)
{
    for (int32_t n = 0; n < LAYERS; n++) {
        layer[n] = (fw_layer){.index = n};
        layer[n].format = (fw_png_format){.depth = 8, .colour_type = 0};
        if (n % 5 == 4) {
            layer[n].same_as_before = true;
            assert_int_equal(fw_greys_copy(&layer[n - 1].greys, &layer[n].greys, NULL), FW_OK);
            assert_int_equal(fw_png_format_copy(&layer[n - 1].format, &layer[n].format, NULL),
                             FW_OK);
            memcpy(layer[n].sha256, layer[n - 1].sha256, FW_SHA256);
            continue;
        }
        shop_layer(100, 50, 255, &layer[n].greys);
        if (n % 3 == 1)
            assert_int_equal(
                fw_bytes_append(&layer[n].format.kept[FW_PNG_AFTER_PIXELS], "x", 1, "t", NULL),
                FW_OK);
        memset(layer[n].sha256, n, FW_SHA256);
    }
}

static void free_layers(fw_layer *layer)
{
    for (int32_t n = 0; n < LAYERS; n++) {
        fw_greys_free(&layer[n].greys);
        fw_png_format_free(&layer[n].format);
    }
}

/* Gets all layers, in parallel and out of order. */
static int wrong_layers(const fw_store *store, const fw_layer *layer)
{
    int wrong = 0;
#pragma omp parallel for schedule(dynamic) num_threads(4) reduction(+ : wrong)
    for (int32_t i = 0; i < 4 * LAYERS; i++) {
        const int32_t n = i * 7 % LAYERS;
        fw_greys got = {0};
        wrong +=
            fw_store_get(store, n, &got, NULL) != FW_OK || !fw_greys_equal(&got, &layer[n].greys);
        fw_greys_free(&got);
    }
    return wrong;
}

static void check_store(size_t limit, bool in_file)
{
    static fw_layer layer[LAYERS];
    fw_budget budget = {"store", limit, 0, 0};
    fw_store *store;
    make_layers(layer);
    assert_int_equal(fw_store_open(&budget, shop, &store, NULL), FW_OK);
    for (int32_t n = 0; n < LAYERS; n++) {
        const size_t before = fw_store_bytes(store);
        assert_int_equal(fw_store_put(store, &layer[n], NULL), FW_OK);
        assert_int_equal(fw_store_bytes(store) == before, layer[n].same_as_before);
    }
    assert_int_equal(fw_store_count(store), LAYERS);
    assert_int_equal(fw_store_bytes_in_file(store) > 0, in_file);
    assert_int_equal(shop_count("."), 0); /* the file has no name */
    assert_int_equal(wrong_layers(store, layer), 0);
    for (int32_t n = 0; n < LAYERS; n++) {
        assert_true(fw_png_format_equal(fw_store_format(store, n), &layer[n].format));
        assert_memory_equal(fw_store_sha256(store, n), layer[n].sha256, FW_SHA256);
    }
    assert_ptr_equal(fw_store_format(store, 0), fw_store_format(store, 2));
    fw_store_close(store);
    assert_int_equal(budget.used, 0);
    free_layers(layer);
}

static void test_store_in_memory_and_in_file(void **state)
{
    (void)state;
    check_store(SIZE_MAX, false);
    check_store(20000, true);
    check_store(0, true);
}

static void test_store_without_a_place_for_its_file(void **state)
{
    (void)state;
    fw_layer layer = {.format = {.depth = 8}};
    fw_budget budget = {"store", 0, 0, 0};
    fw_store *store;
    fw_fault fault = {0};
    shop_layer(100, 50, 255, &layer.greys);
    assert_int_equal(fw_store_open(&budget, "/nonexistent", &store, NULL), FW_OK);
    fw_status status = fw_store_put(store, &layer, &fault);
    assert_fault(status, &fault, FW_INPUT, "/nonexistent");
    fw_store_close(store);
    fw_greys_free(&layer.greys);
}

/* A limit on the size of files stands for a full disk. */
static void test_store_on_a_full_disk(void **state)
{
    (void)state;
    struct rlimit kept, small = {100, RLIM_INFINITY};
    getrlimit(RLIMIT_FSIZE, &kept);
    small.rlim_max = kept.rlim_max;
    signal(SIGXFSZ, SIG_IGN);
    fw_layer layer = {.format = {.depth = 8}};
    fw_budget budget = {"store", 0, 0, 0};
    fw_store *store;
    fw_fault fault = {0};
    shop_layer(200, 100, 255, &layer.greys);
    assert_int_equal(fw_store_open(&budget, shop, &store, NULL), FW_OK);
    setrlimit(RLIMIT_FSIZE, &small);
    fw_status status = fw_store_put(store, &layer, &fault);
    setrlimit(RLIMIT_FSIZE, &kept);
    assert_fault(status, &fault, FW_MACHINE, "the disk is full");
    fw_store_close(store);
    fw_greys_free(&layer.greys);
}

static void test_metadata_that_always_differs_is_bounded(void **state)
{
    (void)state;
    static uint8_t text[1024 * 1024];
    fw_layer layer = {.format = {.depth = 8}};
    fw_budget budget = {"store", SIZE_MAX, 0, 0};
    fw_store *store;
    fw_fault fault = {0};
    fw_status status = FW_OK;
    shop_layer(10, 10, 255, &layer.greys);
    assert_int_equal(fw_bytes_append(&layer.format.kept[0], text, sizeof text, "test", NULL),
                     FW_OK);
    assert_int_equal(fw_store_open(&budget, shop, &store, NULL), FW_OK);
    for (layer.index = 0; layer.index < 100 && status == FW_OK; layer.index++) {
        layer.format.kept[0].data[0] = (uint8_t)layer.index;
        status = fw_store_put(store, &layer, &fault);
    }
    assert_fault(status, &fault, FW_INPUT, "texts and profiles");
    assert_true(budget.peak < 40 * 1024 * 1024);
    fw_store_close(store);
    fw_png_format_free(&layer.format);
    fw_greys_free(&layer.greys);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_packing_loses_nothing),
        cmocka_unit_test(test_rows_that_repeat_cost_nothing),
        cmocka_unit_test(test_broken_packed_bytes),
        SHOP_TEST(test_store_in_memory_and_in_file),
        SHOP_TEST(test_store_without_a_place_for_its_file),
        SHOP_TEST(test_store_on_a_full_disk),
        SHOP_TEST(test_metadata_that_always_differs_is_bounded),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
