/* One cause in one body is one finding. */
#include "findings/findings.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

static fw_finding one(fw_kind kind, uint64_t group, int32_t layer, double badness)
{
    fw_finding f = {.kind = kind,
                    .severity = FW_WARN,
                    .group = group,
                    .layer = layer,
                    .x_mm = layer,
                    .pixels = 10,
                    .area_mm2 = 0.5,
                    .margin = (double)NAN,
                    .post = -1,
                    .badness = badness};
    return f;
}

static void names_go_round(void **state)
{
    (void)state;
    for (int kind = 0; kind < FW_KIND_COUNT; kind++) {
        assert_int_equal(fw_kind_from_name(fw_kind_name((fw_kind)kind)), kind);
        assert_true(strlen(fw_kind_advice((fw_kind)kind)) > 10);
    }
    assert_int_equal(fw_kind_from_name("no-such-kind"), FW_KIND_COUNT);
}

static void names_differ(void **state)
{
    (void)state;
    for (int a = 0; a < FW_KIND_COUNT; a++)
        for (int b = 0; b < a; b++)
            assert_string_not_equal(fw_kind_name((fw_kind)a), fw_kind_name((fw_kind)b));
    assert_string_equal(fw_kind_name(FW_BLIND_CAVITY), "blind-cavity");
    assert_string_equal(fw_severity_name(FW_NOTE), "note");
    assert_string_equal(fw_severity_name(FW_WARN), "warn");
    assert_string_equal(fw_severity_name(FW_FAIL), "fail");
}

static void equal_causes_join(void **state)
{
    (void)state;
    fw_findings list = {0};
    fw_finding a = one(FW_ONSET, 3, 7, 1), b = one(FW_ONSET, 3, 4, 9), c = one(FW_ONSET, 4, 5, 2);
    b.severity = FW_FAIL;
    b.margin = 1.5;
    assert_int_equal(fw_findings_add(&list, &a, NULL), FW_OK);
    assert_int_equal(fw_findings_add(&list, &c, NULL), FW_OK);
    assert_int_equal(fw_findings_add(&list, &b, NULL), FW_OK);
    assert_int_equal(list.count, 2);
    const fw_finding *joined = &list.item[0];
    assert_int_equal(joined->count, 2);
    assert_int_equal(joined->layer, 4);
    assert_int_equal(joined->last_layer, 7);
    assert_int_equal(joined->worst_layer, 4);
    assert_int_equal(joined->severity, FW_FAIL);
    assert_int_equal(joined->pixels, 20);
    assert_true(joined->area_mm2 == 1.0 && joined->margin == 1.5 && joined->x_mm == 4);
    assert_int_equal(fw_findings_count(&list, FW_FAIL), 1);
    fw_findings_free(&list);
}

/* The worst occurrence gives place, post and message; the first of equally bad ones stays. */
static void the_worst_place_speaks(void **state)
{
    (void)state;
    static const double badness[4] = {2, 5, 5, 1};
    fw_findings list = {0};
    for (int i = 0; i < 4; i++) {
        fw_finding f = one(FW_CLEARANCE, 7, 10 + i, badness[i]);
        f.post = i;
        f.y_mm = -i;
        f.message[0] = (char)('a' + i);
        assert_int_equal(fw_findings_add(&list, &f, NULL), FW_OK);
    }
    const fw_finding *joined = &list.item[0];
    assert_int_equal(list.count, 1);
    assert_int_equal(joined->count, 4);
    assert_int_equal(joined->layer, 10);
    assert_int_equal(joined->last_layer, 13);
    assert_int_equal(joined->worst_layer, 11);
    assert_int_equal(joined->post, 1);
    assert_true(joined->x_mm == 11 && joined->y_mm == -1);
    assert_string_equal(joined->message, "b");
    assert_true(isnan(joined->margin));
    fw_findings_free(&list);
    assert_int_equal(list.count, 0);
    assert_null(list.item);
}

static void the_smallest_margin_stays(void **state)
{
    (void)state;
    static const double margins[4] = {(double)NAN, 1.9, 0.4, (double)NAN};
    fw_findings list = {0};
    for (int i = 0; i < 4; i++) {
        fw_finding f = one(FW_TIP_OVERLOAD, 7, i, 0);
        f.margin = margins[i];
        assert_int_equal(fw_findings_add(&list, &f, NULL), FW_OK);
    }
    assert_true(list.item[0].margin == 0.4);
    fw_findings_free(&list);
}

static uint64_t all_to_one(void *unused, uint64_t group)
{
    (void)unused;
    (void)group;
    return 1;
}

static void merged_bodies_join_their_findings(void **state)
{
    (void)state;
    fw_findings list = {0};
    for (uint64_t group = 0; group < 5; group++) {
        const fw_finding onset = one(FW_ONSET, group, (int32_t)group, 1);
        const fw_finding other = one(FW_ADRIFT, group, (int32_t)group, 1);
        assert_int_equal(fw_findings_add(&list, &onset, NULL), FW_OK);
        assert_int_equal(fw_findings_add(&list, &other, NULL), FW_OK);
    }
    fw_findings_regroup(&list, FW_ONSET, all_to_one, NULL);
    assert_int_equal(list.count, 6);
    assert_int_equal(list.item[0].count, 5);
    assert_int_equal(list.item[0].last_layer, 4);
    fw_findings_free(&list);
}

static uint64_t halve(void *calls, uint64_t group)
{
    ++*(int *)calls;
    return group / 2;
}

/* Only the asked kind is renamed; what is left keeps its order. */
static void regroup_leaves_other_kinds_alone(void **state)
{
    (void)state;
    fw_findings list = {0};
    int calls = 0;
    for (uint64_t group = 0; group < 6; group++) {
        const fw_finding f = one(group % 3 == 2 ? FW_STUB : FW_BLIND_CAVITY, group, 1, 0);
        assert_int_equal(fw_findings_add(&list, &f, NULL), FW_OK);
    }
    fw_findings_regroup(&list, FW_BLIND_CAVITY, halve, &calls); /* 0 1 3 4 -> 0 0 1 2 */
    static const uint64_t left[5] = {0, 2, 1, 2, 5};
    static const int64_t counts[5] = {2, 1, 1, 1, 1};
    assert_int_equal(calls, 4);
    assert_int_equal(list.count, 5);
    for (int i = 0; i < 5; i++) {
        assert_int_equal(list.item[i].group, left[i]);
        assert_int_equal(list.item[i].count, counts[i]);
    }
    assert_int_equal(list.item[1].kind, FW_STUB);
    assert_int_equal(list.item[3].kind, FW_BLIND_CAVITY);
    fw_findings_free(&list);
}

/* Whatever came first: 24 findings, added in three orders, come out alike. */
static void order_does_not_depend_on_arrival(void **state)
{
    (void)state;
    static const int steps[3] = {1, 5, 23}; /* all prime to 24 */
    fw_findings list[3] = {{0}, {0}, {0}};
    for (int run = 0; run < 3; run++) {
        for (int i = 0; i < 24; i++) {
            const int k = i * steps[run] % 24;
            fw_finding f = one((fw_kind)(k % 3), (uint64_t)k, k / 12, 0);
            f.severity = (fw_severity)(k / 3 % 2);
            f.x_mm = k % 4;
            f.y_mm = k / 6 % 2;
            assert_int_equal(fw_findings_add(&list[run], &f, NULL), FW_OK);
        }
        fw_findings_sort(&list[run]);
    }
    for (int i = 0; i < 24; i++) {
        assert_int_equal(list[0].item[i].group, list[1].item[i].group);
        assert_int_equal(list[0].item[i].group, list[2].item[i].group);
    }
    for (int run = 0; run < 3; run++)
        fw_findings_free(&list[run]);
    fw_findings_sort(&list[0]); /* nothing to sort */
}

static void order_is_severity_kind_layer_place(void **state)
{
    (void)state;
    fw_findings list = {0};
    fw_finding f[5] = {one(FW_STUB, 1, 1, 0), one(FW_ONSET, 2, 9, 0), one(FW_ONSET, 3, 2, 0),
                       one(FW_ONSET, 4, 2, 0), one(FW_CLEARANCE, 5, 0, 0)};
    f[0].severity = FW_FAIL;
    f[4].severity = FW_NOTE;
    f[2].y_mm = 5;
    for (int i = 0; i < 5; i++)
        assert_int_equal(fw_findings_add(&list, &f[i], NULL), FW_OK);
    fw_findings_sort(&list);
    static const uint64_t order[5] = {1, 4, 3, 2, 5};
    for (int i = 0; i < 5; i++)
        assert_int_equal(list.item[i].group, order[i]);
    fw_findings_free(&list);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(names_go_round),
                                       cmocka_unit_test(names_differ),
                                       cmocka_unit_test(equal_causes_join),
                                       cmocka_unit_test(the_worst_place_speaks),
                                       cmocka_unit_test(the_smallest_margin_stays),
                                       cmocka_unit_test(merged_bodies_join_their_findings),
                                       cmocka_unit_test(regroup_leaves_other_kinds_alone),
                                       cmocka_unit_test(order_is_severity_kind_layer_place),
                                       cmocka_unit_test(order_does_not_depend_on_arrival)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
