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
                                       cmocka_unit_test(equal_causes_join),
                                       cmocka_unit_test(merged_bodies_join_their_findings),
                                       cmocka_unit_test(order_is_severity_kind_layer_place)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
