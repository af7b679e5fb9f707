/* posts.json goes out and comes back: the same posts, and the same bytes when written again. */
#define _POSIX_C_SOURCE 200809L
#include "cards/scratch.h"

#include "report/example_report.h"

#include "cards/posts_read.h"
#include "report/posts_write.h"

static example full;
static example_text first, second;

static int clean(void **state)
{
    (void)state;
    scratch_remove((const char *const[]){"posts.json", NULL});
    return 0;
}

static void write_to(example_text *out, const fw_report *report)
{
    memset(out, 0, sizeof *out);
    assert_int_equal(fw_posts_write(report, (fw_sink){example_keep, out}, NULL), FW_OK);
}

static void what_is_written_reads_back(void **state)
{
    (void)state;
    example_make(&full);
    write_to(&first, &full.report);
    fw_report again = full.report;
    fw_fault fault = {0};
    const char *path = scratch_bytes("posts.json", first.text, first.used);
    if (fw_posts_read(path, &again.posts, again.raw_sha256, &again.lift_layers, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    assert_int_equal(again.posts.count, EXAMPLE_POSTS);
    assert_true(again.posts.item[0].path[0].y == 2.001); /* rounded to 1 um on the way */
    assert_true(again.posts.item[0].locked && !again.posts.item[1].routed);
    write_to(&second, &again);
    assert_int_equal(first.used, second.used);
    assert_memory_equal(first.text, second.text, first.used);
    free(again.posts.item);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(what_is_written_reads_back)};
    return cmocka_run_group_tests(tests, scratch_make, clean);
}
