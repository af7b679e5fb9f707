/* Numbers in files: what is one, what is none, and the same value in every locale. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "cards/decimal.h"
#include "cards/nearest.h"

#include <locale.h>

static void reads_plain_decimals(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        double value;
    } good[] = {{"50", 50},     {"0", 0},      {"-0.5", -0.5},     {"+3", 3},
                {"0.1", 0.1},   {"1e3", 1000}, {"2.5E-3", 0.0025}, {"101.325", 101.325},
                {"1e-400", 0.0}};
    for (size_t i = 0; i < sizeof good / sizeof *good; i++) {
        double value = -1;
        assert_true(fw_decimal(good[i].text, &value));
        assert_true(value == good[i].value);
    }
}

static void refuses_the_rest(void **state)
{
    (void)state;
    static const char *const bad[] = {
        "",      "50um",  "nan",   "NaN",   ".inf",
        "inf",   "0x10",  "1e400", "1e",    "1e+",
        "010",   ".5",    "5.",    "1,5",   " 5",
        "5 ",    "1_000", "--1",   "+",     "-",
        "1.2.3", "0b1",   "1e5x",  "60:30", "11111111111111111111111111111111111111111"};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        double value = 7;
        assert_false(fw_decimal(bad[i], &value));
        assert_true(value == 7);
    }
}

static void whole_numbers_stay_in_their_type(void **state)
{
    (void)state;
    int32_t value = 0;
    assert_true(fw_whole("2147483647", &value));
    assert_int_equal(value, INT32_MAX);
    assert_true(fw_whole("-2147483648", &value));
    assert_int_equal(value, INT32_MIN);
    assert_false(fw_whole("2147483648", &value));
    assert_false(fw_whole("1.0", &value));
    assert_false(fw_whole("1e3", &value));
    assert_false(fw_whole("", &value));
}

/* A host with a decimal comma must not change what a card says. */
static void decimal_comma_changes_nothing(void **state)
{
    (void)state;
    static const char *const comma[] = {"de_DE.UTF-8", "fr_FR.UTF-8", "de_DE.utf8", "fr_FR.utf8"};
    size_t i = 0;
    while (i < sizeof comma / sizeof *comma && setlocale(LC_NUMERIC, comma[i]) == NULL)
        i++;
    if (i == sizeof comma / sizeof *comma)
        skip();
    double value;
    assert_string_equal(localeconv()->decimal_point, ",");
    assert_true(fw_decimal("2.5", &value));
    assert_true(value == 2.5);
    assert_false(fw_decimal("2,5", &value));
    setlocale(LC_NUMERIC, "C");
}

static void nearest_word(void **state)
{
    (void)state;
    static const char *const word[] = {"pixel_um", "layer_um", "names", "lot"};
    assert_int_equal(fw_nearest("layer_mm", word, 4), 1);
    assert_int_equal(fw_nearest("layer_um", word, 4), 1);
    assert_int_equal(fw_nearest("pxel_um", word, 4), 0);
    assert_int_equal(fw_nearest("name", word, 4), 2);
    assert_int_equal(fw_nearest("temperature", word, 4), 4);
    assert_int_equal(fw_nearest("", word, 4), 4);
    assert_int_equal(fw_nearest("xyz", word, 4), 4); /* three edits make any word of three */
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(reads_plain_decimals),
        cmocka_unit_test(refuses_the_rest),
        cmocka_unit_test(whole_numbers_stay_in_their_type),
        cmocka_unit_test(decimal_comma_changes_nothing),
        cmocka_unit_test(nearest_word),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
