/* report.json and posts.json as jansson reads them: every value of the report, rounded as promised.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "report/example_report.h"

#include "report/json_write.h"
#include "report/posts_write.h"
#include "report/report_write.h"

#include <jansson.h>
#include <stdlib.h>

static example full, bare;
static example_text out;

static int make(void **state)
{
    (void)state;
    example_make(&full);
    example_make_bare(&bare);
    return 0;
}

typedef fw_status writer(const fw_report *report, fw_sink sink, fw_fault *fault);

/* Writes into `out` and parses it; the caller gives the tree back with json_decref. */
static json_t *written(writer *write, const fw_report *report)
{
    fw_fault fault = {0};
    json_error_t error;
    memset(&out, 0, sizeof out);
    assert_int_equal(write(report, (fw_sink){example_keep, &out}, &fault), FW_OK);
    json_t *root = json_loadb(out.text, out.used, JSON_REJECT_DUPLICATES, &error);
    if (root == NULL)
        fail_msg("line %d: %s", error.line, error.text);
    return root;
}

static json_t *get(json_t *value, const char *key)
{
    json_t *found = json_object_get(value, key);
    if (found == NULL)
        fail_msg("no key %s", key);
    return found;
}

static void is_number(json_t *value, const char *key, double wanted)
{
    assert_true(json_is_number(get(value, key)));
    assert_true(json_number_value(get(value, key)) == wanted);
}

static void is_text(json_t *value, const char *key, const char *wanted)
{
    assert_string_equal(json_string_value(get(value, key)), wanted);
}

static void is_null(json_t *value, const char *key)
{
    assert_true(json_is_null(get(value, key)));
}

static void head_says_what_was_looked_at(void **state)
{
    (void)state;
    json_t *root = written(fw_report_write, &full.report);
    is_text(root, "format", "falsework-report/1");
    is_text(root, "verdict", "fail");
    json_t *stack = get(root, "stack");
    is_number(stack, "layers", 3);
    is_number(stack, "width_px", 1280);
    is_number(stack, "height_px", 800);
    assert_true(json_number_value(json_array_get(get(stack, "pixel_um"), 1)) == 47.25);
    is_number(stack, "layer_um", 50);
    is_text(stack, "sha256", full.report.sha256);
    is_number(get(root, "raw"), "lift_layers", 1);
    is_number(get(root, "basis"), "assumed", 3);
    is_number(get(root, "basis"), "supplier", 2);
    is_number(get(root, "basis"), "measured", 1);
    is_text(get(root, "resin"), "name", "Test resin");
    is_null(get(root, "resin"), "lot");
    is_number(get(root, "gate"), "margin", 2);
    assert_int_equal(json_array_size(get(root, "not_checked")), 2);
    json_decref(root);
}

static void layers_are_rounded_and_nan_is_null(void **state)
{
    (void)state;
    json_t *root = written(fw_report_write, &full.report);
    json_t *layers = get(root, "layers");
    assert_int_equal(json_array_size(layers), 3);
    json_t *lifted = json_array_get(layers, 0), *one = json_array_get(layers, 1);
    is_null(lifted, "raw_layer");
    is_null(lifted, "peel_N");
    is_null(lifted, "worst_margin");
    is_text(lifted, "limited_by", "none");
    is_number(one, "raw_layer", 0);
    is_number(one, "onset_px", 3);
    is_number(one, "adrift_px", 4);
    is_number(one, "overreach_px", 5);
    is_number(one, "peel_N", 12.3457);
    is_number(one, "blind_cavity_mm2", 0.0625);
    is_text(one, "limited_by", "film");
    json_t *two = json_array_get(layers, 2);
    is_number(two, "solid_px", 9000000000.0);
    is_number(two, "peel_N", 1234570);
    is_number(two, "worst_margin", 1.23457e-5);
    json_decref(root);
}

static void findings_carry_place_and_words(void **state)
{
    (void)state;
    json_t *root = written(fw_report_write, &full.report);
    json_t *findings = get(root, "findings");
    assert_int_equal(json_array_size(findings), FW_KIND_COUNT);
    json_t *onset = json_array_get(findings, FW_ONSET),
           *adrift = json_array_get(findings, FW_ADRIFT);
    is_text(onset, "kind", "onset");
    is_text(onset, "severity", "note");
    is_null(onset, "raw_layer"); /* layer 0 is lift */
    is_null(onset, "margin");
    is_null(onset, "post");
    is_number(onset, "x_mm", 1.235);
    is_number(onset, "y_mm", 0);
    is_number(adrift, "raw_layer", 0);
    is_number(adrift, "margin", 1.5);
    is_number(adrift, "post", 1);
    is_text(json_array_get(findings, FW_STUB), "message",
            "a \"quote\", a \\, a tab\t, ??, broken ?.");
    json_decref(root);
}

static void parts_and_totals(void **state)
{
    (void)state;
    json_t *root = written(fw_report_write, &full.report);
    json_t *part = json_array_get(get(root, "parts"), 0), *totals = get(root, "totals");
    is_number(part, "volume_mm3", 321.988);
    is_null(part, "worst_margin");
    assert_true(json_number_value(json_array_get(get(part, "box_mm"), 2)) == 12.5);
    is_number(totals, "posts", 2);
    is_number(totals, "peak_layer", 2);
    assert_true(json_number_value(json_array_get(get(totals, "peak_range_N"), 1)) == 100);
    json_decref(root);
    root = written(fw_report_write, &bare.report);
    is_text(root, "verdict", "incomplete");
    is_null(get(root, "totals"), "peak_peel_N");
    is_null(get(root, "totals"), "peak_layer");
    is_null(get(root, "stack"), "sha256");
    is_null(get(root, "machine"), "name");
    json_decref(root);
}

static void check_post(json_t *post)
{
    is_number(post, "id", 0);
    assert_true(json_is_true(get(post, "locked")) && json_is_true(get(post, "routed")));
    is_number(post, "tip_layer", 2);
    is_number(post, "raw_tip_layer", 1);
    json_t *tip = json_array_get(get(post, "path_mm"), 0);
    assert_true(json_number_value(json_array_get(tip, 0)) == 1.0);
    assert_true(json_number_value(json_array_get(tip, 1)) == 2.001);
    is_number(post, "load_N", 1.23457);
    is_number(post, "contact_mm2", 0.123457);
    is_number(post, "margin", 2);
    is_text(post, "governs", "tip");
}

static void posts_stand_in_both_files(void **state)
{
    (void)state;
    json_t *report = written(fw_report_write, &full.report);
    json_t *posts = written(fw_posts_write, &full.report);
    assert_true(json_equal(get(report, "posts"), get(posts, "posts")));
    check_post(json_array_get(get(posts, "posts"), 0));
    is_null(json_array_get(get(posts, "posts"), 1), "margin");
    is_text(posts, "format", "falsework-posts/1");
    is_text(posts, "raw_sha256", full.report.raw_sha256);
    is_number(posts, "lift_layers", 1);
    json_decref(report);
    json_decref(posts);
}

/* The sink fails at each call in turn: the failure comes back and nothing is written after it. */
static void a_failing_sink_ends_the_writing(void **state)
{
    (void)state;
    json_decref(written(fw_report_write, &full.report));
    size_t calls = out.calls;
    assert_true(calls > 1);
    for (size_t at = 1; at <= calls; at++) {
        fw_fault fault = {0};
        memset(&out, 0, sizeof out);
        out.fail_at = at;
        assert_int_equal(fw_report_write(&full.report, (fw_sink){example_keep, &out}, &fault),
                         FW_MACHINE);
        assert_string_equal(fault.text, "sink: full");
        assert_int_equal(out.calls, at);
    }
}

static void equal_reports_give_equal_bytes(void **state)
{
    (void)state;
    static example_text first;
    json_decref(written(fw_report_write, &full.report));
    first = out;
    json_decref(written(fw_report_write, &full.report));
    assert_int_equal(first.used, out.used);
    assert_memory_equal(first.text, out.text, out.used);
}

/* Texts longer than the writer's buffer cross its border unharmed. */
static void long_texts_cross_the_buffer(void **state)
{
    (void)state;
    static char text[3 * FW_JSON_BUFFER];
    memset(text, 'x', sizeof text - 1);
    fw_json json;
    memset(&out, 0, sizeof out);
    fw_json_start(&json, (fw_sink){example_keep, &out}, NULL);
    fw_json_text(&json, "long", text);
    fw_json_array(&json, "empty");
    fw_json_end(&json);
    assert_int_equal(fw_json_close(&json), FW_OK);
    json_t *root = json_loadb(out.text, out.used, 0, NULL);
    is_text(root, "long", text);
    json_decref(root);
}

static void names_and_free(void **state)
{
    (void)state;
    assert_string_equal(fw_limit_name(FW_BY_BOUND), "bound");
    assert_string_equal(fw_limit_name(FW_BY_TABLE), "table");
    assert_string_equal(fw_limit_name(FW_BY_FRAME), "frame");
    assert_string_equal(fw_verdict_name(FW_PASS), "pass");
    assert_string_equal(fw_check_name(FW_CHECK_FOOT), "foot");
    fw_report report = {.layer = malloc(8), .part = malloc(8), .post_result = malloc(8)};
    report.posts.item = malloc(8);
    fw_report_free(&report);
    assert_null(report.layer);
    fw_report_free(&report);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(head_says_what_was_looked_at),
        cmocka_unit_test(layers_are_rounded_and_nan_is_null),
        cmocka_unit_test(findings_carry_place_and_words),
        cmocka_unit_test(parts_and_totals),
        cmocka_unit_test(posts_stand_in_both_files),
        cmocka_unit_test(a_failing_sink_ends_the_writing),
        cmocka_unit_test(equal_reports_give_equal_bytes),
        cmocka_unit_test(long_texts_cross_the_buffer),
        cmocka_unit_test(names_and_free),
    };
    return cmocka_run_group_tests(tests, make, NULL);
}
