/* The reader: same layers at any batch, thread count and budget; repeats are not decoded; the first
 * failure in order is the one reported. */
#define _GNU_SOURCE

#include "stack/grey_rows.h"
#include "stack/layers.h"
#include "workshop.h"

#include <omp.h>

enum { LAYERS = 23 };

static const char *layer_file(int32_t n)
{
    static char name[4][16];
    static int turn;
    turn = (turn + 1) % 4;
    snprintf(name[turn], sizeof name[turn], "%04d.png", (int)n + 3);
    return name[turn];
}

static bool repeats(int32_t n)
{
    return n % 7 == 1 || n % 7 == 2 || n == 16;
}

/* Writes the stack and keeps its layers. */
static void make_stack(fw_greys *layer, int32_t width, int32_t height)
{
    fw_bytes file = {0};
    for (int32_t n = 0; n < LAYERS; n++) {
        if (repeats(n)) {
            assert_int_equal(fw_greys_copy(&layer[n - 1], &layer[n], NULL), FW_OK);
        } else {
            shop_layer(width, height, 255, &layer[n]);
            shop_png_of(&layer[n], &file);
        }
        shop_bytes(layer_file(n), file.data, file.size);
    }
    fw_bytes_free(&file);
}

static void free_stack(fw_greys *layer)
{
    for (int32_t n = 0; n < LAYERS; n++)
        fw_greys_free(&layer[n]);
}

/* Reads the stack in the scratch folder; layers are compared with `layer` unless it is NULL. */
static fw_status read_stack(int32_t batch, fw_budget *files, fw_budget *runs, const fw_greys *layer,
                            int64_t *decodes, fw_fault *fault)
{
    fw_stack *stack;
    fw_reader *reader;
    const fw_reader_limits limits = {batch, files, runs};
    FW_TRY(fw_stack_open(shop, NULL, &stack, fault));
    assert_int_equal(fw_reader_open(stack, &limits, &reader, fault), FW_OK);
    int32_t next = 0, count = 1;
    fw_status status = FW_OK;
    while (status == FW_OK && count > 0) {
        fw_layer *got;
        status = fw_reader_next(reader, &got, &count, fault);
        for (int32_t i = 0; i < count; i++, next++) {
            assert_int_equal(got[i].index, next);
            assert_true(fw_greys_equal(&got[i].greys, &layer[next]));
            assert_int_equal(got[i].same_as_before, repeats(next));
            assert_int_equal(got[i].format.depth, 8);
            uint8_t sha256[FW_SHA256];
            fw_bytes bytes = {0};
            assert_int_equal(fw_stack_read(stack, next, &bytes, NULL), FW_OK);
            assert_int_equal(fw_sha256(bytes.data, bytes.size, sha256, NULL), FW_OK);
            assert_memory_equal(sha256, got[i].sha256, FW_SHA256);
            fw_bytes_free(&bytes);
        }
    }
    if (status == FW_OK)
        assert_int_equal(next, LAYERS);
    *decodes = fw_reader_decodes(reader);
    fw_reader_close(reader);
    fw_stack_close(stack);
    assert_int_equal(files->used, 0);
    assert_int_equal(runs->used, 0);
    return status;
}

static int64_t distinct_layers(void)
{
    int64_t count = 0;
    for (int32_t n = 0; n < LAYERS; n++)
        count += !repeats(n);
    return count;
}

static void test_same_layers_at_any_batch_and_thread_count(void **state)
{
    (void)state;
    static const int32_t batch[] = {0, 1, 2, 5, 16, 100};
    fw_greys layer[LAYERS] = {0};
    make_stack(layer, 120, 40);
    for (int threads = 1; threads <= 8; threads += threads == 1 ? 1 : 3) {
        omp_set_num_threads(threads);
        for (size_t b = 0; b < sizeof batch / sizeof *batch; b++) {
            fw_budget files = {"files", SIZE_MAX, 0, 0}, runs = {"runs", SIZE_MAX, 0, 0};
            int64_t decodes;
            assert_int_equal(read_stack(batch[b], &files, &runs, layer, &decodes, NULL), FW_OK);
            assert_int_equal(decodes, distinct_layers());
            assert_true(files.peak > 0 && runs.peak > 0);
        }
    }
    free_stack(layer);
}

static void test_small_budgets_cut_the_batch(void **state)
{
    (void)state;
    fw_greys layer[LAYERS] = {0};
    make_stack(layer, 120, 40);
    fw_budget files = {"files", SIZE_MAX, 0, 0}, runs = {"runs", SIZE_MAX, 0, 0};
    int64_t decodes;
    assert_int_equal(read_stack(16, &files, &runs, layer, &decodes, NULL), FW_OK);
    const size_t all_files = files.peak, all_runs = runs.peak;
    files = (fw_budget){"files", all_files / 4, 0, 0};
    assert_int_equal(read_stack(16, &files, &runs, layer, &decodes, NULL), FW_OK);
    assert_true(files.peak <= all_files / 4);
    assert_int_equal(decodes, distinct_layers());
    /* a third of the runs: some layers outgrow their share and are decoded again */
    runs = (fw_budget){"runs", all_runs / 3, 0, 0};
    assert_int_equal(read_stack(16, &files, &runs, layer, &decodes, NULL), FW_OK);
    /* beside the shares stand the row tables, and room for one row more of runs */
    assert_true(runs.peak <= all_runs / 3 + 17 * (41 * 4 + 120 * 12));
    assert_true(decodes >= distinct_layers());
    runs = (fw_budget){"runs", 1, 0, 0}; /* one at a time, whatever it takes */
    assert_int_equal(read_stack(16, &files, &runs, layer, &decodes, NULL), FW_OK);
    fw_fault fault = {0};
    files = (fw_budget){"files", 10, 0, 0};
    fw_status status = read_stack(16, &files, &runs, layer, &decodes, &fault);
    assert_fault(status, &fault, FW_MACHINE, "mask file too large");
    free_stack(layer);
}

/* Whatever the batch and threads, of several bad layers the first is named. */
static void expect_first(const fw_greys *layer, fw_status expected, const char *words)
{
    static const int32_t batch[] = {1, 3, 16};
    for (int threads = 1; threads <= 4; threads += 3) {
        omp_set_num_threads(threads);
        for (size_t b = 0; b < sizeof batch / sizeof *batch; b++) {
            fw_budget files = {"files", SIZE_MAX, 0, 0}, runs = {"runs", SIZE_MAX, 0, 0};
            fw_fault fault = {0};
            int64_t decodes;
            fw_status status = read_stack(batch[b], &files, &runs, layer, &decodes, &fault);
            assert_fault(status, &fault, expected, words);
        }
    }
}

static void test_the_first_failure_is_reported(void **state)
{
    (void)state;
    fw_greys layer[LAYERS] = {0}, other = {0};
    fw_bytes file = {0};
    make_stack(layer, 120, 40);
    assert_int_equal(unlink(shop_path(layer_file(20))), 0); /* cannot be read */
    assert_int_equal(symlink("nowhere", shop_path(layer_file(20))), 0);
    expect_first(layer, FW_INPUT, layer_file(20));
    shop_text(layer_file(19), "no picture");
    expect_first(layer, FW_INPUT, "not a PNG");
    shop_layer(121, 40, 255, &other);
    shop_png_of(&other, &file);
    shop_bytes(layer_file(13), file.data, file.size);
    expect_first(layer, FW_INPUT, layer_file(13));
    expect_first(layer, FW_INPUT, "masks of different size");
    shop_bytes(layer_file(12), file.data, file.size / 2);
    expect_first(layer, FW_INPUT, "truncated picture");
    expect_first(layer, FW_INPUT, layer_file(12));
    fw_bytes_free(&file);
    fw_greys_free(&other);
    free_stack(layer);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        SHOP_TEST(test_same_layers_at_any_batch_and_thread_count),
        SHOP_TEST(test_small_budgets_cut_the_batch),
        SHOP_TEST(test_the_first_failure_is_reported),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
