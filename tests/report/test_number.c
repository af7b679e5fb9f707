/* Numbers as text: rounding, shortness, and no locale in them. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "report/number.h"

#include <locale.h>

static void thousandths(void **state)
{
    (void)state;
    static const struct {
        double value;
        const char *text;
    } row[] = {{0, "0.000"},
               {1.0004, "1.000"},
               {1.0006, "1.001"},
               {-0.0004, "0.000"},
               {-2.5, "-2.500"},
               {0.0625, "0.063"},
               {12345.6789, "12345.679"},
               {999.9996, "1000.000"},
               {999999999999.0, "999999999999.000"}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        char text[FW_NUMBER_TEXT];
        fw_number_thousandths(text, row[i].value);
        assert_string_equal(text, row[i].text);
    }
}

static void significant_digits(void **state)
{
    (void)state;
    static const struct {
        double value;
        const char *text;
    } row[] = {{0, "0"},
               {-0.0, "0"},
               {5, "5"},
               {1.23456789, "1.23457"},
               {1234567.8, "1.23457e+06"},
               {-0.000012345678, "-1.23457e-05"},
               {0.1, "0.1"}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        char text[FW_NUMBER_TEXT];
        fw_number_digits(text, row[i].value, 6);
        assert_string_equal(text, row[i].text);
    }
}

static void decimal_comma_changes_nothing(void **state)
{
    (void)state;
    static const char *const comma[] = {"de_DE.UTF-8", "fr_FR.UTF-8", "de_DE.utf8", "fr_FR.utf8"};
    size_t i = 0;
    while (i < sizeof comma / sizeof *comma && setlocale(LC_NUMERIC, comma[i]) == NULL)
        i++;
    if (i == sizeof comma / sizeof *comma)
        skip();
    assert_string_equal(localeconv()->decimal_point, ",");
    thousandths(state);
    significant_digits(state);
    setlocale(LC_NUMERIC, "C");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(thousandths),
        cmocka_unit_test(significant_digits),
        cmocka_unit_test(decimal_comma_changes_nothing),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
