/* One line, whatever a hostile name holds. */
#include "fault/fault.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
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

/* Control characters of ASCII (ECMA-6): 1 .. 31 and 127. All else, UTF-8 too, stays as it is. */
static void only_control_characters_go(void **state)
{
    (void)state;
    for (int c = 1; c < 256; c++) {
        const char name[2] = {(char)c, '\0'};
        const char gone[2] = {'?', '\0'};
        fw_fault fault = {0};
        (void)fw_fault_set(&fault, FW_INPUT, "%s", name);
        assert_string_equal(fault.text, c < 32 || c == 127 ? gone : name);
    }
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

static fw_status passes_up(fw_status below, bool *went_on)
{
    FW_TRY(below);
    *went_on = true;
    return FW_OK;
}

static void a_failure_passes_up_as_it_is(void **state)
{
    (void)state;
    bool went_on = false;
    assert_int_equal(passes_up(FW_STOPPED, &went_on), FW_STOPPED);
    assert_false(went_on);
    assert_int_equal(passes_up(FW_OK, &went_on), FW_OK);
    assert_true(went_on);
}

/* "what, where, what to do" */
static void no_memory_names_its_holder(void **state)
{
    (void)state;
    fw_fault fault = {0};
    assert_int_equal(fw_fault_memory(&fault, "the attic"), FW_MACHINE);
    assert_int_equal(fault.status, FW_MACHINE);
    assert_int_equal(strncmp(fault.text, "out of memory, the attic, ", 26), 0);
    assert_true(strlen(fault.text) > 30);
    assert_int_equal(fw_fault_memory(NULL, "the attic"), FW_MACHINE);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(stays_one_line), cmocka_unit_test(only_control_characters_go),
        cmocka_unit_test(is_cut_and_terminated), cmocka_unit_test(a_failure_passes_up_as_it_is),
        cmocka_unit_test(no_memory_names_its_holder)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
