/* Checked allocation: growth, products that overflow, budgets. */
#include "fault/memory.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

static void comes_zeroed(void **state)
{
    (void)state;
    uint64_t *out = NULL;
    assert_int_equal(fw_allocate((void **)&out, 500, sizeof *out, "test", NULL), FW_OK);
    for (int i = 0; i < 500; i++)
        assert_true(out[i] == 0);
    free(out);
}

static void refuses_a_product_that_overflows(void **state)
{
    (void)state;
    void *out = &out;
    fw_fault fault = {0};
    assert_int_equal(fw_allocate(&out, SIZE_MAX / 4, 8, "the attic", &fault), FW_MACHINE);
    assert_null(out);
    assert_non_null(strstr(fault.text, "the attic"));
    assert_int_equal(fw_allocate(&out, SIZE_MAX / 8 + 1, 8, "test", NULL), FW_MACHINE);
    assert_int_equal(fw_allocate(&out, SIZE_MAX, SIZE_MAX, "test", NULL), FW_MACHINE);
}

static void nothing_is_a_valid_pointer(void **state)
{
    (void)state;
    void *out = NULL;
    assert_int_equal(fw_allocate(&out, 0, 8, "test", NULL), FW_OK);
    assert_non_null(out);
    free(out);
}

static void grows_and_keeps(void **state)
{
    (void)state;
    int *array = NULL;
    size_t capacity = 0;
    for (int i = 0; i < 1000; i++) {
        assert_int_equal(
            fw_grow((void **)&array, &capacity, (size_t)i + 1, sizeof *array, "test", NULL), FW_OK);
        assert_true(capacity > (size_t)i);
        array[i] = i;
    }
    for (int i = 0; i < 1000; i++)
        assert_int_equal(array[i], i);
    free(array);
}

/* By half at a time: pushing n items one by one moves them log(n / 16) / log(1.5) times. */
static void grows_by_half(void **state)
{
    (void)state;
    char *array = NULL;
    size_t capacity = 0, moves = 0;
    for (size_t need = 1; need <= 1000000; need++) {
        const size_t before = capacity;
        assert_int_equal(fw_grow((void **)&array, &capacity, need, 1, "test", NULL), FW_OK);
        moves += capacity != before;
        assert_true(capacity == before || capacity >= before + before / 2);
        assert_true(capacity <= need + need / 2 + 16);
    }
    assert_in_range(moves, 1, 30); /* log(1e6 / 16) / log(1.5) = 27.2 */
    free(array);
}

static void leaves_all_as_it_was_when_it_cannot(void **state)
{
    (void)state;
    int *array = NULL;
    size_t capacity = 0;
    assert_int_equal(fw_grow((void **)&array, &capacity, 20, sizeof *array, "test", NULL), FW_OK);
    int *const same = array;
    const size_t before = capacity;
    static const size_t needs[] = {SIZE_MAX, SIZE_MAX / 2, SIZE_MAX / sizeof(int) + 1};
    for (size_t i = 0; i < sizeof needs / sizeof needs[0]; i++) {
        fw_fault fault = {0};
        assert_int_equal(
            fw_grow((void **)&array, &capacity, needs[i], sizeof *array, "the attic", &fault),
            FW_MACHINE);
        assert_ptr_equal(array, same);
        assert_int_equal(capacity, before);
        assert_non_null(strstr(fault.text, "the attic"));
    }
    free(array);
}

static void what_fits_is_not_moved(void **state)
{
    (void)state;
    int *array = NULL;
    size_t capacity = 0;
    assert_int_equal(fw_grow((void **)&array, &capacity, 100, sizeof *array, "test", NULL), FW_OK);
    int *const same = array;
    for (size_t need = 0; need <= 100; need++)
        assert_int_equal(fw_grow((void **)&array, &capacity, need, sizeof *array, "test", NULL),
                         FW_OK);
    assert_ptr_equal(array, same);
    assert_int_equal(capacity, 100);
    free(array);
}

static void budget_counts(void **state)
{
    (void)state;
    fw_budget budget = {.holder = "test", .limit = 100};
    assert_true(fw_budget_fits(&budget, 100));
    assert_false(fw_budget_fits(&budget, 101));
    fw_budget_charge(&budget, 60);
    assert_true(fw_budget_fits(&budget, 40));
    assert_false(fw_budget_fits(&budget, 41));
    assert_false(fw_budget_fits(&budget, SIZE_MAX));
    fw_budget_release(&budget, 50);
    assert_int_equal(budget.used, 10);
    assert_int_equal(budget.peak, 60);
    fw_budget_charge(&budget, 20);
    assert_int_equal(budget.peak, 60);
}

/* Charged past its limit, as the peel memo may: nothing fits until enough is given back. */
static void budget_over_its_limit_takes_nothing(void **state)
{
    (void)state;
    fw_budget budget = {.holder = "test", .limit = 100};
    fw_budget_charge(&budget, 150);
    assert_false(fw_budget_fits(&budget, 1));
    assert_false(fw_budget_fits(&budget, 0));
    fw_budget_release(&budget, 51);
    assert_true(fw_budget_fits(&budget, 1));
    assert_false(fw_budget_fits(&budget, 2));
    assert_int_equal(budget.peak, 150);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(comes_zeroed),
                                       cmocka_unit_test(refuses_a_product_that_overflows),
                                       cmocka_unit_test(nothing_is_a_valid_pointer),
                                       cmocka_unit_test(grows_and_keeps),
                                       cmocka_unit_test(grows_by_half),
                                       cmocka_unit_test(leaves_all_as_it_was_when_it_cannot),
                                       cmocka_unit_test(what_fits_is_not_moved),
                                       cmocka_unit_test(budget_counts),
                                       cmocka_unit_test(budget_over_its_limit_takes_nothing)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
