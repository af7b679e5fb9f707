/* The part is sacred: what differs from the raw stack, and where a post may. */
#define _GNU_SOURCE

#include "passes/altered.h"

#include "passes/folders.h"

/* A raw block on the plate with a ledge that a post holds. */
static stage raw_part(void)
{
    stage s = stage_new(50, 30, 16);
    stage_box(&s, 5, 5, 0, 15, 25, 16, 255);
    stage_box(&s, 15, 5, 12, 40, 25, 16, 255);
    stage_box(&s, 6, 6, 3, 8, 8, 4, 90); /* a soft spot, below what counts as part */
    return s;
}

/* The same with a post drawn in: what prop would write. */
static stage with_post(void)
{
    stage s = raw_part();
    stage_post(&s, 3.0, 1.5, 12, false);
    stage_stamp(&s, false);
    return s;
}

static stage lifted(const stage *s, int lift)
{
    stage up = stage_new(s->width, s->height, s->layers + lift);
    const size_t layer = (size_t)s->width * (size_t)s->height;
    memcpy(up.grey + layer * (size_t)lift, s->grey, layer * (size_t)s->layers);
    return up;
}

typedef struct outcome {
    fw_status status;
    fw_fault fault;
    bool altered;
    fw_finding finding;
    fw_verdict verdict;
    char raw_sha256[FW_DIGEST_HEX];
} outcome;

/* Rechecks `now` against `raw`. */
static outcome recheck(const stage *now, const stage *raw, const fw_posts *posts, int32_t lift,
                       const char *digest, int32_t batch)
{
    outcome out = {0};
    fw_report report = {0};
    fw_pass pass = {0};
    pass_open(&pass, batch);
    static int turn;
    char name[2][32];
    snprintf(name[0], sizeof name[0], "now%d", turn);
    snprintf(name[1], sizeof name[1], "raw%d", turn++);
    fw_stack *stack = folder_of(now, name[0]), *raw_stack = folder_of(raw, name[1]);
    const fw_recheck_input input = {.stack = stack,
                                    .job = &now->job,
                                    .posts = posts,
                                    .lift = lift,
                                    .posts_raw_sha256 = digest,
                                    .raw = raw_stack};
    out.status = fw_recheck(&pass, &input, &report, &out.fault);
    const fw_finding *found = finding_of(&report, FW_ALTERED_PART);
    out.altered = found != NULL;
    if (found != NULL)
        out.finding = *found;
    out.verdict = report.verdict;
    memcpy(out.raw_sha256, report.raw_sha256, sizeof out.raw_sha256);
    fw_report_free(&report);
    fw_stack_close(stack);
    fw_stack_close(raw_stack);
    fw_pass_close(&pass);
    return out;
}

static void posts_are_forgiven(void **state)
{
    (void)state;
    stage raw = raw_part(), now = with_post();
    const outcome with = recheck(&now, &raw, &now.posts, 0, NULL, 16);
    assert_int_equal(with.status, FW_OK);
    assert_false(with.altered);
    const outcome without = recheck(&now, &raw, NULL, 0, NULL, 16);
    assert_true(without.altered); /* the same pixels without a post to answer for them */
    assert_int_equal(without.finding.severity, FW_FAIL);
    assert_int_equal(without.finding.layer, 0);
    assert_int_equal(without.verdict, FW_FAILED);
    stage_free(&raw);
    stage_free(&now);
}

/* One grey level down in one pixel, in part or in a post, above or below what counts as part. */
static void no_pixel_is_lowered(void **state)
{
    (void)state;
    static const int at[3][3] = {{10, 10, 5}, {6, 7, 3}, {39, 24, 15}};
    for (int i = 0; i < 3; i++) {
        stage raw = raw_part(), now = with_post();
        const int x = at[i][0], y = at[i][1], n = at[i][2];
        uint8_t *pixel = now.grey + ((size_t)n * 30 + (size_t)y) * 50 + (size_t)x;
        *pixel = (uint8_t)(*pixel - 1);
        const outcome out = recheck(&now, &raw, &now.posts, 0, NULL, 16);
        assert_true(out.altered);
        assert_int_equal(out.finding.pixels, 1);
        assert_int_equal(out.finding.layer, n);
        assert_true(fabs(out.finding.x_mm - (x + 0.5) * 0.1) < 1e-9);
        assert_true(fabs(out.finding.y_mm - (y + 0.5) * 0.1) < 1e-9);
        stage_free(&raw);
        stage_free(&now);
    }
}

/* One grey level up where no post is: beside the post, over its bite, in the part. */
static void nothing_is_raised_outside_the_posts(void **state)
{
    (void)state;
    static const int at[4][3] = {{36, 15, 5}, {45, 28, 0}, {30, 28, 13}, {6, 7, 3}};
    for (int i = 0; i < 4; i++) {
        stage raw = raw_part(), now = with_post();
        const int x = at[i][0], y = at[i][1], n = at[i][2];
        uint8_t *pixel = now.grey + ((size_t)n * 30 + (size_t)y) * 50 + (size_t)x;
        *pixel = (uint8_t)(*pixel + 1);
        const outcome out = recheck(&now, &raw, &now.posts, 0, NULL, 16);
        assert_true(out.altered);
        assert_int_equal(out.finding.pixels, 1);
        assert_int_equal(out.finding.layer, n);
        assert_true(fabs(out.finding.x_mm - (x + 0.5) * 0.1) < 1e-9);
        stage_free(&raw);
        stage_free(&now);
    }
}

/* The bite may raise dim pixels inside the part, and only as deep as it goes. */
static void the_bite_is_forgiven_as_deep_as_it_goes(void **state)
{
    (void)state;
    for (int deep = 0; deep < 2; deep++) {
        stage raw = raw_part(), now = raw_part();
        stage_post(&now, 3.0, 1.5, 12, false);
        stage_box(&raw, 29, 14, 12, 31, 16, 16, 100);
        stage_box(&now, 29, 14, 12, 31, 16, 16, 100);
        stage_stamp(&now, false); /* bite_layers 1: layer 12 */
        if (deep)
            stage_box(&now, 29, 14, 13, 31, 16, 14, 255);
        const outcome out = recheck(&now, &raw, &now.posts, 0, NULL, 16);
        assert_int_equal(out.altered, deep);
        if (deep)
            assert_int_equal(out.finding.pixels, 4);
        stage_free(&raw);
        stage_free(&now);
    }
}

/* Layers that the lift added are compared with nothing; raw layer m is layer m + lift. */
static void lifted_stacks(void **state)
{
    (void)state;
    for (int stray = 0; stray < 2; stray++) {
        stage raw = raw_part();
        stage now = lifted(&raw, 5);
        stage_post(&now, 1.0, 1.0, 5, false);
        stage_stamp(&now, false);
        if (stray)
            stage_box(&now, 45, 28, 2, 46, 29, 3, 255);
        const outcome out = recheck(&now, &raw, &now.posts, 5, NULL, 3);
        assert_int_equal(out.status, FW_OK);
        assert_int_equal(out.altered, stray);
        if (stray)
            assert_int_equal(out.finding.layer, 2);
        stage_free(&raw);
        stage_free(&now);
    }
}

/* All layers with a difference are one finding; the worst place is that of the worst layer. */
static void batches_do_not_matter(void **state)
{
    (void)state;
    fw_finding first = {0};
    static const int32_t batches[3] = {1, 3, 16};
    for (int i = 0; i < 3; i++) {
        stage raw = raw_part(), now = with_post();
        stage_box(&now, 20, 0, 2, 22, 1, 3, 255);
        stage_box(&now, 20, 0, 7, 26, 1, 8, 255);
        stage_box(&now, 40, 0, 9, 41, 1, 10, 255);
        const outcome out = recheck(&now, &raw, &now.posts, 0, NULL, batches[i]);
        assert_true(out.altered);
        if (i == 0)
            first = out.finding;
        assert_int_equal(out.finding.count, 3);
        assert_int_equal(out.finding.pixels, 9);
        assert_int_equal(out.finding.layer, 2);
        assert_int_equal(out.finding.last_layer, 9);
        assert_int_equal(out.finding.worst_layer, 7);
        assert_string_equal(out.finding.message, first.message);
        stage_free(&raw);
        stage_free(&now);
    }
}

static void refuses_another_raw_stack(void **state)
{
    (void)state;
    stage raw = raw_part(), now = with_post(), shorter = raw_part();
    stage narrow = stage_new(49, 30, 16);
    stage_box(&narrow, 5, 5, 0, 15, 25, 16, 255);
    shorter.layers = 15;
    outcome out = recheck(&now, &shorter, &now.posts, 0, NULL, 16);
    assert_int_equal(out.status, FW_INPUT);
    assert_non_null(strstr(out.fault.text, "15 layers"));
    out = recheck(&now, &narrow, &now.posts, 0, NULL, 16);
    assert_int_equal(out.status, FW_INPUT);
    assert_non_null(strstr(out.fault.text, "size"));
    const outcome good = recheck(&now, &raw, &now.posts, 0, NULL, 16);
    assert_int_equal(strlen(good.raw_sha256), 64);
    out = recheck(&now, &raw, &now.posts, 0, good.raw_sha256, 16);
    assert_int_equal(out.status, FW_OK);
    char other[FW_DIGEST_HEX];
    memcpy(other, good.raw_sha256, sizeof other);
    other[0] = other[0] == '0' ? '1' : '0';
    out = recheck(&now, &raw, &now.posts, 0, other, 16);
    assert_int_equal(out.status, FW_INPUT);
    assert_non_null(strstr(out.fault.text, "another raw stack"));
    stage_free(&raw);
    stage_free(&now);
    stage_free(&shorter);
    stage_free(&narrow);
}

int main(void)
{
    const struct CMUnitTest tests[] = {FOLDER_TEST(posts_are_forgiven),
                                       FOLDER_TEST(no_pixel_is_lowered),
                                       FOLDER_TEST(nothing_is_raised_outside_the_posts),
                                       FOLDER_TEST(the_bite_is_forgiven_as_deep_as_it_goes),
                                       FOLDER_TEST(lifted_stacks),
                                       FOLDER_TEST(batches_do_not_matter),
                                       FOLDER_TEST(refuses_another_raw_stack)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
