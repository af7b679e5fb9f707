/* The table of handbook checks: it is whole, all of it holds, and it can fail. What the kernels
 * themselves owe is tested in tests/physics. */
#include "calibrate/figure.h"
#include "calibrate/laws.h"
#include "calibrate/proof.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

static fw_proof_result *results; /* of all rows, by three threads */

static int run_all(void **state)
{
    (void)state;
    fw_fault fault = {0};
    results = calloc(fw_proof_count(), sizeof *results);
    if (results == NULL || fw_proof_run_all(3, NULL, results, &fault) != FW_OK) {
        print_error("%s\n", fault.text);
        return 1;
    }
    return 0;
}

static int free_all(void **state)
{
    (void)state;
    free(results);
    return 0;
}

/* ---- the table ---- */

static void every_row_says_what_it_is(void **state)
{
    (void)state;
    for (size_t i = 0; i < fw_proof_count(); i++) {
        const fw_proof *row = fw_proof_at(i);
        assert_true(strlen(row->id) >= 2 && strlen(row->id) <= 6);
        assert_true(strlen(row->what) >= 8 && strlen(row->what) <= 54);
        assert_true(strlen(row->source) >= 7);
        for (const char *c = row->what; *c != '\0'; c++)
            assert_in_range(*c, ' ', '~');
        for (size_t j = 0; j < i; j++)
            assert_string_not_equal(row->id, fw_proof_at(j)->id);
        if (row->kind == FW_PROOF_NOT_COMPUTED) {
            assert_true(row->compute == NULL && row->count == 0);
            continue;
        }
        assert_non_null(row->compute);
        assert_in_range(row->count, 1, FW_PROOF_VALUES);
        assert_true(row->kind == FW_PROOF_ABSOLUTE ? row->tolerance >= 0 : row->tolerance > 0);
        assert_true(row->tolerance <= 0.02);
        for (int v = 0; v < row->count; v++)
            assert_true(isfinite(row->expected[v]) &&
                        (row->expected[v] != 0 || row->kind == FW_PROOF_ABSOLUTE));
    }
}

/* Rows of a topic are "S1", or "S1.1", "S1.2", ... without a gap. */
static int rows_of(const char *topic)
{
    int count = 0;
    const size_t length = strlen(topic);
    for (size_t i = 0; i < fw_proof_count(); i++) {
        const char *id = fw_proof_at(i)->id;
        if (strncmp(id, topic, length) != 0 || (id[length] != '\0' && id[length] != '.'))
            continue;
        count++;
        if (id[length] == '.')
            assert_int_equal(strtol(id + length + 1, NULL, 10), count);
    }
    return count;
}

static void every_topic_is_there(void **state)
{
    (void)state;
    static const char *const topics[] = {
        "S1", "S2", "S3", "S4", "S5", "S6", "S7", "S8", "S9", "S10", "S11", "S12", "U1", "U2",
        "U3", "C1", "C2", "C3", "C4", "C5", "C6", "K1", "K2", "K3",  "K4",  "T1",  "T2", "T3",
        "T4", "T5", "J1", "J2", "J3", "J4", "J5", "B1", "B2", "B3",  "B4",  "P1",  "P2"};
    for (size_t i = 0; i < sizeof topics / sizeof *topics; i++)
        assert_true(rows_of(topics[i]) > 0);
    assert_int_equal(rows_of("K1"), 14);
    assert_int_equal(rows_of("P1"), 6);
}

static void all_pass(void **state)
{
    (void)state;
    int left_out = 0;
    for (size_t i = 0; i < fw_proof_count(); i++) {
        const fw_proof *row = fw_proof_at(i);
        left_out += row->kind == FW_PROOF_NOT_COMPUTED;
        if (row->kind != FW_PROOF_NOT_COMPUTED && !results[i].passed)
            fail_msg("%s: expected %.12g, computed %.12g, error %.3g, allowed %.3g", row->id,
                     row->expected[results[i].worst], results[i].computed[results[i].worst],
                     results[i].error, row->tolerance);
    }
    assert_int_equal(left_out, 2); /* the vent tube and the plate strip */
}

/* Alone and in order each row gives the same bits. The strips of T take long and are left out. */
static void threads_change_nothing(void **state)
{
    (void)state;
    for (size_t i = 0; i < fw_proof_count(); i++) {
        const fw_proof *row = fw_proof_at(i);
        if (row->kind == FW_PROOF_NOT_COMPUTED || row->id[0] == 'T')
            continue;
        fw_proof_result again;
        assert_int_equal(fw_proof_run(row, &again, NULL), FW_OK);
        assert_memory_equal(again.computed, results[i].computed,
                            (size_t)row->count * sizeof *again.computed);
        assert_true(again.worst == results[i].worst && again.passed);
    }
}

/* ---- it can fail ---- */

/* What would be expected if the computed value missed it by `times` tolerances. */
static double missed_by(const fw_proof *row, double computed, double times)
{
    const double tolerance = times * (row->tolerance > 0 ? row->tolerance : 1e-13);
    switch (row->kind) {
    case FW_PROOF_RELATIVE:
        return computed / (1 + tolerance);
    case FW_PROOF_AT_MOST:
        return computed / (1 + copysign(tolerance, computed));
    default:
        return computed - tolerance;
    }
}

static void a_wrong_expectation_fails(void **state)
{
    (void)state;
    int wrong = 0;
    for (size_t i = 0; i < fw_proof_count(); i++) {
        for (int v = 0; v < fw_proof_at(i)->count; v++) {
            fw_proof row = *fw_proof_at(i);
            fw_proof_result result = results[i];
            row.expected[v] = missed_by(&row, result.computed[v], 3);
            fw_proof_judge(&row, &result);
            assert_false(result.passed);
            assert_int_equal(result.worst, v);
            assert_true(result.error > row.tolerance);
            wrong++;
            row.expected[v] = missed_by(&row, result.computed[v], 0.3);
            fw_proof_judge(&row, &result);
            assert_true(result.passed || row.tolerance == 0);
        }
    }
    assert_true(wrong > 200);
}

static const fw_proof *row_of(const char *id)
{
    for (size_t i = 0; i < fw_proof_count(); i++) {
        if (strcmp(fw_proof_at(i)->id, id) == 0)
            return fw_proof_at(i);
    }
    fail_msg("no row %s", id);
    return NULL;
}

/* The value of clipping the uncapped field in place of the obstacle problem, and another gap. */
static void a_wrong_model_fails(void **state)
{
    (void)state;
    fw_proof clipped = *row_of("C4.1"), nearer = *row_of("S1.4");
    fw_proof_result result;
    clipped.expected[0] = 0.75;
    assert_int_equal(fw_proof_run(&clipped, &result, NULL), FW_OK);
    assert_false(result.passed);
    nearer.with[2] = 99;
    assert_int_equal(fw_proof_run(&nearer, &result, NULL), FW_OK);
    assert_false(result.passed);
    assert_true(fabs(result.computed[0] / 23.56 - pow(100 / 99., 3)) < 0.01);
}

static fw_status refuse(const fw_proof *row, double *computed, fw_fault *fault)
{
    (void)row;
    computed[0] = 1;
    return fw_fault_set(fault, FW_INPUT, "no, here, go away");
}

static fw_status break_down(const fw_proof *row, double *computed, fw_fault *fault)
{
    (void)row;
    computed[0] = 1;
    return fw_fault_set(fault, FW_MACHINE, "no memory, here, get some");
}

static fw_status say_nothing(const fw_proof *row, double *computed, fw_fault *fault)
{
    (void)row;
    (void)fault;
    computed[0] = 1;
    return FW_OK;
}

static void no_number_fails(void **state)
{
    (void)state;
    fw_proof row = {.id = "X1", .what = "nothing", .count = 1, .expected = {1}, .tolerance = 1};
    fw_proof_result result;
    fw_fault fault = {0};
    row.compute = refuse;
    assert_int_equal(fw_proof_run(&row, &result, &fault), FW_OK);
    assert_true(!result.passed && isnan(result.computed[0]) && isnan(result.error));
    row.compute = break_down;
    assert_int_equal(fw_proof_run(&row, &result, &fault), FW_MACHINE);
    assert_string_equal(fault.text, "no memory, here, get some");
    row.compute = say_nothing;
    row.count = 3; /* the second is missing */
    row.expected[1] = row.expected[2] = 1;
    assert_int_equal(fw_proof_run(&row, &result, &fault), FW_OK);
    assert_true(!result.passed && result.worst == 1);
    row.count = 1;
    assert_int_equal(fw_proof_run(&row, &result, &fault), FW_OK);
    assert_true(result.passed);
}

static void stops_when_asked(void **state)
{
    (void)state;
    const volatile sig_atomic_t stop = 1;
    fw_proof_result *none = calloc(fw_proof_count(), sizeof *none);
    fw_fault fault = {0};
    assert_non_null(none);
    assert_int_equal(fw_proof_run_all(2, &stop, none, &fault), FW_STOPPED);
    assert_int_equal(fault.status, FW_STOPPED);
    free(none);
}

/* ---- what stands beside the kernels ---- */

static void masks_are_drawn_as_meant(void **state)
{
    (void)state;
    fw_figure figure;
    fw_film_shape shape;
    assert_int_equal(fw_figure_rows("#.o/##o", &figure, NULL), FW_OK);
    assert_true(figure.width == 3 && figure.height == 2);
    assert_int_equal(fw_figure_shape(&figure, 1, 2, &shape, NULL), FW_OK);
    assert_true(fw_runs_valid(&shape.film) && fw_runs_valid(&shape.sealed));
    assert_true(fw_runs_pixels(&shape.film) == 3 && fw_runs_pixels(&shape.sealed) == 2);
    assert_true(fw_runs_find(&shape.film, 1, 1) != UINT32_MAX && shape.cavity_count == 1);
    fw_figure_shape_free(&shape);
    fw_figure_free(&figure);
    assert_int_equal(fw_figure_round(100, &figure, NULL), FW_OK);
    assert_int_equal(fw_figure_shape(&figure, 1, 1, &shape, NULL), FW_OK);
    assert_true(shape.cavity_count == 0);
    assert_true(fabs((double)fw_runs_pixels(&shape.film) / (FW_PI * 1e4) - 1) < 2e-3);
    fw_figure_shape_free(&shape);
    fw_figure_free(&figure);
}

/* Pi of the core that is found; straight below the cap, even where the two meet; no more than P A.
 */
static void capped_law_is_whole(void **state)
{
    (void)state;
    for (double ratio = 1e-9; ratio < 1; ratio *= 1.7) {
        const double x = fw_law_core(ratio);
        assert_true(x > 0 && x < 1 && fabs(1 - x + x * log(x) - ratio) < 1e-12);
    }
    assert_true(fw_law_core(1) == 0 && fw_law_core(7) == 0);
    const fw_law_disc_capped law = {10, 0.1};
    const double q = 0.1 / 25, straight = fw_law_disc(10) * q; /* Pi = 1 */
    assert_true(fabs(fw_law_disc_capped_N(&law, q * 0.999999) / straight - 1) < 2e-6);
    assert_true(fabs(fw_law_disc_capped_N(&law, q * 1.000001) / straight - 1) < 2e-6);
    double last = 0;
    for (double z = q; z < 1e15 * q; z *= 3) {
        const double force = fw_law_disc_capped_N(&law, z);
        assert_true(force > last && force < 0.1 * FW_PI * 100);
        last = force;
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_row_says_what_it_is),
        cmocka_unit_test(every_topic_is_there),
        cmocka_unit_test(all_pass),
        cmocka_unit_test(threads_change_nothing),
        cmocka_unit_test(a_wrong_expectation_fails),
        cmocka_unit_test(a_wrong_model_fails),
        cmocka_unit_test(no_number_fails),
        cmocka_unit_test(stops_when_asked),
        cmocka_unit_test(masks_are_drawn_as_meant),
        cmocka_unit_test(capped_law_is_whole),
    };
    return cmocka_run_group_tests(tests, run_all, free_all);
}
