/* The lines for a person: what they say, and that they stay lines. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "report/example_report.h"

#include "report/summary.h"

static example full, bare;
static example_text out;

static const char *summary(const fw_report *report)
{
    memset(&out, 0, sizeof out);
    assert_int_equal(fw_report_summary(report, (fw_sink){example_keep, &out}, NULL), FW_OK);
    return out.text;
}

static void says(const char *text, const char *wanted)
{
    if (strstr(text, wanted) == NULL)
        fail_msg("no '%s' in:\n%s", wanted, text);
}

static int make(void **state)
{
    (void)state;
    example_make(&full);
    example_make_bare(&bare);
    return 0;
}

static void tells_the_verdict_first(void **state)
{
    (void)state;
    const char *text = summary(&full.report);
    assert_int_equal(strncmp(text, "verdict: fail\n", 14), 0);
    says(text, "resin: Test resin, lot not given\n");
    says(text, "machine: Test machine\n");
    says(text, "1 groups measured, 2 from the supplier, 3 assumed\n");
    says(text, "not checked: another\n");
    says(text, "posts: 2, 1 without a path to the plate");
    says(text, "peak peel load: 1.235e+06 N in layer 2, limited by cap\n");
    says(text, "over the card's gap range: 1.235e+06 to 100 N\n");
}

static void names_the_smallest_margin(void **state)
{
    (void)state;
    says(summary(&full.report), "smallest margin: 1.235e-05 in layer 2 (the gate asks for 2)");
    full.layer[2].worst_margin = NAN;
    full.layer[1].worst_margin = 2.25;
    says(summary(&full.report),
         "smallest margin: 2, tip of post 0 in layer 2 (the gate asks for 2)");
    says(summary(&bare.report), "smallest margin: none");
}

static void lists_findings_with_advice_once(void **state)
{
    (void)state;
    fw_finding two[2];
    fw_report report = bare.report;
    two[0] = two[1] = full.finding[FW_ADRIFT];
    report.findings = (fw_findings){two, 2, 2};
    const char *text = summary(&report);
    says(text,
         "  warn  adrift in layers 1 to 2 at x 1.235 y 0.000 mm, post 1, 2 times: message 1\n");
    const char *advice = strstr(text, fw_kind_advice(FW_ADRIFT));
    assert_non_null(advice);
    assert_null(strstr(advice + 1, fw_kind_advice(FW_ADRIFT)));
}

static void many_findings_are_cut(void **state)
{
    (void)state;
    static fw_finding many[500];
    fw_report report = bare.report;
    for (size_t i = 0; i < 500; i++)
        many[i] = full.finding[FW_ONSET];
    report.findings = (fw_findings){many, 500, 500};
    says(summary(&report), "  and 480 more, all in report.json\n");
}

static void without_cards_it_says_so(void **state)
{
    (void)state;
    const char *text = summary(&bare.report);
    says(text, "verdict: incomplete\n");
    says(text, "resin: no card\n");
    says(text, "machine: no card\n");
    says(text, "peak peel load: not computed\n");
}

static void a_finding_line_is_cut_at_its_size(void **state)
{
    (void)state;
    char small[16], large[FW_FINDING_LINE];
    assert_ptr_equal(fw_finding_line(&full.finding[FW_ONSET], small, sizeof small), small);
    assert_int_equal(strlen(small), sizeof small - 1);
    fw_finding longest = full.finding[FW_ALTERED_PART];
    longest.layer = INT32_MIN;
    longest.last_layer = INT32_MAX;
    longest.x_mm = longest.y_mm = -999999999999.0;
    longest.post = longest.count = INT64_MAX;
    memset(longest.message, 'm', FW_FINDING_TEXT - 1);
    fw_finding_line(&longest, large, sizeof large);
    assert_int_equal(large[strlen(large) - 1], 'm');
    assert_true(strlen(large) < FW_FINDING_LINE - 1);
}

static void a_failing_sink_ends_the_writing(void **state)
{
    (void)state;
    fw_fault fault = {0};
    memset(&out, 0, sizeof out);
    out.fail_at = 2;
    assert_int_equal(fw_report_summary(&full.report, (fw_sink){example_keep, &out}, &fault),
                     FW_MACHINE);
    assert_int_equal(out.calls, 2);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(tells_the_verdict_first),
        cmocka_unit_test(names_the_smallest_margin),
        cmocka_unit_test(lists_findings_with_advice_once),
        cmocka_unit_test(many_findings_are_cut),
        cmocka_unit_test(without_cards_it_says_so),
        cmocka_unit_test(a_finding_line_is_cut_at_its_size),
        cmocka_unit_test(a_failing_sink_ends_the_writing),
    };
    return cmocka_run_group_tests(tests, make, NULL);
}
