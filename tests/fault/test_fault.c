/* One line, whatever a hostile name holds; growth and budgets. */
#include "fault/fault.h"
#include "fault/memory.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

static void stays_one_line(void **state)
{
    (void)state;
    fw_fault fault = {0};
    assert_int_equal(fw_fault_set(&fault, FW_INPUT, "bad name, %s, rename it", "a\nb\033[2Jc\t"),
                     FW_INPUT);
    assert_string_equal(fault.text, "bad name, a?b?[2Jc?, rename it");
    assert_int_equal(fault.status, FW_INPUT);
    assert_int_equal(fw_fault_set(NULL, FW_MACHINE, "nobody listens"), FW_MACHINE);
}

static void is_cut_and_terminated(void **state)
{
    (void)state;
    char name[3 * FW_FAULT_TEXT];
    fw_fault fault = {0};
    memset(name, 'x', sizeof name);
    name[sizeof name - 1] = '\0';
    (void)fw_fault_set(&fault, FW_INPUT, "%s", name);
    assert_int_equal(strlen(fault.text), FW_FAULT_TEXT - 1);
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
    const size_t before = capacity;
    int *const same = array;
    fw_fault fault = {0};
    assert_int_equal(
        fw_grow((void **)&array, &capacity, SIZE_MAX / 2, sizeof *array, "test", &fault),
        FW_MACHINE);
    assert_ptr_equal(array, same);
    assert_int_equal(capacity, before);
    assert_non_null(strstr(fault.text, "test"));
    free(array);
}

static void refuses_a_product_that_overflows(void **state)
{
    (void)state;
    void *out = NULL;
    assert_int_equal(fw_allocate(&out, SIZE_MAX / 4, 8, "test", NULL), FW_MACHINE);
    assert_int_equal(fw_allocate(&out, 0, 8, "test", NULL), FW_OK);
    assert_non_null(out);
    free(out);
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
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(stays_one_line), cmocka_unit_test(is_cut_and_terminated),
        cmocka_unit_test(grows_and_keeps), cmocka_unit_test(refuses_a_product_that_overflows),
        cmocka_unit_test(budget_counts)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
