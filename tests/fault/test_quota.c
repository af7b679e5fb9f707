/* Threads never hold more than the limit together, and nobody waits for ever. */
#include "fault/quota.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

enum { LIMIT = 100, ROUNDS = 400 };

typedef struct holdings {
    size_t bytes;
    int holders;
    size_t most_together; /* bytes, while more than one holds some */
    int most_holders;
} holdings;

static void hold(fw_quota *quota, holdings *all, size_t bytes)
{
    fw_quota_take(quota, bytes);
#pragma omp critical
    {
        all->bytes += bytes;
        all->holders++;
        if (all->holders > 1 && all->bytes > all->most_together)
            all->most_together = all->bytes;
        if (all->holders > all->most_holders)
            all->most_holders = all->holders;
    }
#pragma omp critical
    {
        all->bytes -= bytes;
        all->holders--;
    }
    fw_quota_give(quota, bytes);
}

static void holds_the_limit(void **state)
{
    (void)state;
    fw_quota *quota = NULL;
    holdings all = {0};
    assert_int_equal(fw_quota_create(LIMIT, &quota, NULL), FW_OK);
#pragma omp parallel for num_threads(4) schedule(dynamic, 1)
    for (int i = 0; i < ROUNDS; i++)
        hold(quota, &all, (size_t)(1 + i * 37 % 60));
    assert_true(all.most_together <= LIMIT);
    assert_int_equal(all.holders, 0);
    fw_quota_free(quota);
}

/* What is larger than the limit goes alone. */
static void the_large_go_alone(void **state)
{
    (void)state;
    fw_quota *quota = NULL;
    holdings all = {0};
    assert_int_equal(fw_quota_create(LIMIT, &quota, NULL), FW_OK);
#pragma omp parallel for num_threads(4) schedule(dynamic, 1)
    for (int i = 0; i < ROUNDS; i++)
        hold(quota, &all, i % 3 == 0 ? SIZE_MAX : 20);
    assert_true(all.most_together <= LIMIT);
    assert_int_equal(all.holders, 0);
    fw_quota_free(quota);
}

/* Small ones do run at once: with one thread inside, the other does not wait for it. */
static void the_small_go_together(void **state)
{
    (void)state;
    fw_quota *quota = NULL;
    int inside = 0, together = 0;
    assert_int_equal(fw_quota_create(LIMIT, &quota, NULL), FW_OK);
#pragma omp parallel num_threads(2)
    {
        fw_quota_take(quota, LIMIT / 2);
#pragma omp atomic
        inside++;
#pragma omp barrier
#pragma omp single
        together = inside;
        fw_quota_give(quota, LIMIT / 2);
    }
    assert_int_equal(together, 2);
    fw_quota_free(quota);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(holds_the_limit),
                                       cmocka_unit_test(the_large_go_alone),
                                       cmocka_unit_test(the_small_go_together)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
