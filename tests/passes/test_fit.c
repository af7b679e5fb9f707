/* Posts for small parts: found, sized, routed, settled, judged; and what cannot be done is said. */
#define _GNU_SOURCE

#include "passes/fit.h"

#include "passes/folders.h"

/* A fit and what it points into. */
typedef struct fitted {
    fw_pass pass;
    fw_stack *stack;
    fw_raw raw;
    fw_fit fit;
} fitted;

static void fit_open(fitted *f, const stage *s, int32_t batch)
{
    static int turn;
    char name[32];
    fw_fault fault = {0};
    *f = (fitted){0};
    pass_open(&f->pass, batch);
    snprintf(name, sizeof name, "raw%d", turn++);
    f->stack = folder_of(s, name);
    if (fw_raw_read(&f->pass, f->stack, s->job.intent_level, scratch, &f->raw, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    if (fw_fit_posts(&f->pass, &f->raw, &s->job, &f->fit, &fault) != FW_OK)
        fail_msg("%s", fault.text);
}

static void fit_close(fitted *f)
{
    fw_fit_close(&f->fit);
    fw_raw_close(&f->raw);
    fw_stack_close(f->stack);
    fw_pass_close(&f->pass);
}

/* A block on the plate with an arm of 4 by 2 mm that starts 4 mm up. */
static stage with_arm(void)
{
    stage s = stage_new(90, 50, 50);
    stage_box(&s, 10, 10, 0, 35, 40, 50, 255);
    stage_box(&s, 35, 15, 40, 75, 35, 50, 255);
    return s;
}

/* The lifted stack with the posts of a fit drawn in, as a stage of its own. */
static stage drawn(const stage *s, const fw_fit *fit)
{
    stage up = stage_new(s->width, s->height, s->layers + fit->lift);
    const size_t layer = (size_t)s->width * (size_t)s->height;
    up.job = s->job;
    memcpy(up.grey + layer * (size_t)fit->lift, s->grey, layer * (size_t)s->layers);
    up.posts.item = malloc(fit->posts.count * sizeof *up.posts.item);
    assert_non_null(up.posts.item);
    memcpy(up.posts.item, fit->posts.item, fit->posts.count * sizeof *up.posts.item);
    up.posts.count = fit->posts.count;
    stage_stamp(&up, fit->screen.two_level);
    return up;
}

/* Posts end at the plate, lean no more than allowed, and have the sizes that the job allows. */
static void assert_posts_obey(const fw_fit *fit, const fw_post_rules *rules)
{
    const double steepest = tan(rules->lean_deg * acos(-1.0) / 180);
    for (size_t p = 0; p < fit->posts.count; p++) {
        const fw_post *post = &fit->posts.item[p];
        assert_int_equal(post->id, p);
        assert_true(post->routed);
        assert_true(post->tip_mm >= rules->tip_mm[0] && post->tip_mm <= rules->tip_mm[1]);
        assert_true(post->shaft_mm >= rules->shaft_mm[0] && post->shaft_mm <= rules->shaft_mm[1]);
        assert_true(post->foot_mm <= rules->foot_mm);
        assert_true(fabs(post->path[post->point_count - 1].z) < 1e-9);
        for (int32_t i = 1; i < post->point_count; i++) {
            const fw_point a = post->path[i - 1], b = post->path[i];
            assert_true(b.z < a.z);
            assert_true(hypot(b.x - a.x, b.y - a.y) <= steepest * (a.z - b.z) + 1e-6);
        }
    }
}

static bool held(const stage *s, const fw_fit *fit, int x, int y)
{
    if (x < 35 + 15) /* the block's own reach */
        return true;
    for (size_t p = 0; p < fit->posts.count; p++) {
        const fw_post *post = &fit->posts.item[p];
        const double far =
            hypot((x + 0.5) * 0.1 - post->path[0].x, (y + 0.5) * 0.1 - post->path[0].y);
        if (far <= s->job.resin.reach_mm + post->tip_mm / 2)
            return true;
    }
    return false;
}

static void an_arm_gets_posts(void **state)
{
    (void)state;
    stage s = with_arm();
    fitted f;
    fit_open(&f, &s, 16);
    const fw_report *report = &f.fit.believed;
    assert_true(f.fit.settled);
    assert_int_equal(f.fit.lift, 0);
    assert_in_range(f.fit.rounds, 1, FW_FIT_ROUNDS);
    assert_in_range(f.fit.posts.count, 1, 6); /* 2.5 x 2 mm beyond the block's own reach */
    assert_int_equal(report->verdict, FW_PASS);
    assert_int_equal(fw_findings_count(&report->findings, FW_FAIL), 0);
    assert_int_equal(report->posts.count, f.fit.posts.count);
    assert_posts_obey(&f.fit, &s.job.rules);
    for (size_t p = 0; p < f.fit.posts.count; p++) {
        assert_int_equal(f.fit.posts.item[p].tip_layer, 40);
        assert_int_equal(f.fit.posts.item[p].bite_layers, 1);
        assert_true(report->post_result[p].margin >= s.job.rules.margin);
    }
    for (int y = 15; y < 35; y++)
        for (int x = 35; x < 75; x++)
            assert_true(held(&s, &f.fit, x, y));
    fit_close(&f);
    stage_free(&s);
}

/* What was believed is what a fresh judge says of the drawn layers, to the last bit. */
static void belief_is_what_a_judge_says(void **state)
{
    (void)state;
    stage s = with_arm();
    fitted f;
    fit_open(&f, &s, 16);
    stage up = drawn(&s, &f.fit);
    fw_report report = stage_judge(&up);
    assert_int_equal(report.verdict, f.fit.believed.verdict);
    assert_int_equal(report.findings.count, f.fit.believed.findings.count);
    for (int n = 0; n < s.layers; n++) {
        assert_true(report.layer[n].peel_N == f.fit.believed.layer[n].peel_N);
        assert_true(report.layer[n].worst_margin == f.fit.believed.layer[n].worst_margin);
        assert_int_equal(report.layer[n].solid_px, f.fit.believed.layer[n].solid_px);
    }
    for (size_t p = 0; p < f.fit.posts.count; p++)
        assert_true(report.post_result[p].margin == f.fit.believed.post_result[p].margin);
    fw_report_free(&report);
    stage_free(&up);
    fit_close(&f);
    stage_free(&s);
}

/* A part that rests on the plate in the raw stack hangs on its posts alone once it is lifted. */
static void a_lifted_part_stands_on_posts(void **state)
{
    (void)state;
    stage s = stage_new(70, 60, 12);
    stage_box(&s, 15, 15, 0, 55, 45, 12, 255);
    s.job.rules.lift_mm = 3;
    fitted f;
    fit_open(&f, &s, 16);
    const fw_report *report = &f.fit.believed;
    assert_int_equal(f.fit.lift, 30);
    assert_true(f.fit.settled);
    assert_int_equal(report->verdict, FW_PASS);
    assert_int_equal(report->layers, 42);
    assert_int_equal(report->part_count, 1);
    assert_int_equal(report->part[0].first_layer, 30);
    assert_int_equal(report->part[0].posts, f.fit.posts.count);
    assert_true(f.fit.posts.count > 2);
    assert_posts_obey(&f.fit, &s.job.rules);
    /* nothing else holds it: tips carry the whole load of a layer between them */
    double sum = 0, peak = 0;
    for (size_t p = 0; p < f.fit.posts.count; p++)
        sum += report->post_result[p].load_N;
    for (int n = 30; n < 42; n++)
        peak = fmax(peak, report->layer[n].peel_N);
    assert_true(sum >= peak * (1 - 1e-4));
    fit_close(&f);
    stage_free(&s);
}

/* Empty layers that are there already count for the lift. */
static void a_lift_that_is_there_already(void **state)
{
    (void)state;
    static const double lift_mm[4] = {0, 2, 2.05, 3};
    static const int32_t added[4] = {0, 0, 1, 10};
    for (int i = 0; i < 4; i++) {
        stage s = stage_new(50, 50, 30);
        stage_box(&s, 20, 20, 20, 30, 30, 30, 255);
        s.job.rules.lift_mm = lift_mm[i];
        fitted f;
        fit_open(&f, &s, 16);
        assert_int_equal(f.fit.lift, added[i]);
        fit_close(&f);
        stage_free(&s);
    }
}

/* An arm over a slab that leaves no way past it: the place is kept and named, the gate fails. */
static void an_arm_over_the_part_is_unroutable(void **state)
{
    (void)state;
    stage s = stage_new(90, 50, 40);
    stage_box(&s, 1, 1, 0, 89, 49, 10, 255);
    stage_box(&s, 10, 10, 10, 30, 40, 40, 255);
    stage_box(&s, 30, 15, 20, 75, 35, 40, 255);
    fitted f;
    fit_open(&f, &s, 16);
    const fw_report *report = &f.fit.believed;
    const fw_finding *unroutable = finding_of(report, FW_UNROUTABLE);
    assert_int_equal(report->verdict, FW_FAILED);
    assert_non_null(unroutable);
    assert_int_equal(unroutable->severity, FW_FAIL);
    size_t without = 0, named = 0;
    for (size_t p = 0; p < f.fit.posts.count; p++) {
        const fw_post *post = &f.fit.posts.item[p];
        without += !post->routed;
        if (!post->routed)
            assert_int_equal(post->tip_layer, 20);
    }
    for (size_t i = 0; i < report->findings.count; i++)
        named += report->findings.item[i].kind == FW_UNROUTABLE;
    assert_true(without > 0);
    assert_int_equal(named, without); /* none is dropped */
    assert_non_null(finding_of(report, FW_OVERREACH));
    fit_close(&f);
    stage_free(&s);
}

/* What needs no post gets none. */
static void a_block_needs_nothing(void **state)
{
    (void)state;
    stage s = stage_new(40, 40, 10);
    stage_box(&s, 10, 10, 0, 30, 30, 10, 255);
    fitted f;
    fit_open(&f, &s, 16);
    assert_int_equal(f.fit.posts.count, 0);
    assert_true(f.fit.settled);
    assert_int_equal(f.fit.believed.verdict, FW_PASS);
    fit_close(&f);
    stage_free(&s);
}

/* A weaker resin: margins are kept by larger contacts or more of them. */
static void loads_make_posts_grow(void **state)
{
    (void)state;
    double tips_mm2[2];
    for (int weak = 0; weak < 2; weak++) {
        stage s = with_arm();
        s.job.machine.gap_um = s.job.machine.gap_range_um[0] = s.job.machine.gap_range_um[1] = 100;
        s.job.resin.tensile_MPa = weak ? 0.1 : 8;
        fitted f;
        fit_open(&f, &s, 16);
        assert_true(f.fit.settled);
        assert_int_equal(f.fit.believed.verdict, FW_PASS);
        tips_mm2[weak] = f.fit.believed.totals.tip_area_mm2;
        for (size_t p = 0; p < f.fit.posts.count; p++) { /* by hand: contact x strength / load */
            const fw_post_result *r = &f.fit.believed.post_result[p];
            assert_true(r->contact_mm2 * s.job.resin.tensile_MPa >=
                        s.job.rules.margin * r->load_N * (1 - 1e-12));
        }
        fit_close(&f);
        stage_free(&s);
    }
    assert_true(tips_mm2[1] > tips_mm2[0]);
}

/* What the largest post cannot hold fails the gate, and is not hidden by settling. */
static void a_load_that_nothing_holds_fails(void **state)
{
    (void)state;
    stage s = with_arm();
    s.job.machine.gap_um = s.job.machine.gap_range_um[0] = s.job.machine.gap_range_um[1] = 60;
    s.job.resin.tensile_MPa = 0.001;
    fitted f;
    fit_open(&f, &s, 16);
    assert_int_equal(f.fit.believed.verdict, FW_FAILED);
    assert_non_null(finding_of(&f.fit.believed, FW_TIP_OVERLOAD));
    assert_int_equal(finding_of(&f.fit.believed, FW_UNSETTLED) != NULL, !f.fit.settled);
    fit_close(&f);
    stage_free(&s);
}

static void batches_do_not_matter(void **state)
{
    (void)state;
    static const int32_t batches[3] = {1, 3, 16};
    fw_posts first = {0};
    double margin = 0;
    stage s = with_arm();
    for (int i = 0; i < 3; i++) {
        fitted f;
        fit_open(&f, &s, batches[i]);
        if (i == 0) {
            for (size_t p = 0; p < f.fit.posts.count; p++) {
                first.item = realloc(first.item, (p + 1) * sizeof *first.item);
                assert_non_null(first.item);
                first.item[p] = f.fit.posts.item[p];
            }
            first.count = f.fit.posts.count;
            margin = f.fit.believed.part[0].worst_margin;
        }
        assert_int_equal(f.fit.posts.count, first.count);
        for (size_t p = 0; p < first.count; p++) {
            const fw_post *a = &first.item[p], *b = &f.fit.posts.item[p];
            assert_true(a->tip_mm == b->tip_mm && a->shaft_mm == b->shaft_mm &&
                        a->foot_mm == b->foot_mm && a->bite_layers == b->bite_layers);
            assert_int_equal(a->point_count, b->point_count);
            for (int32_t k = 0; k < a->point_count; k++)
                assert_true(a->path[k].x == b->path[k].x && a->path[k].y == b->path[k].y &&
                            a->path[k].z == b->path[k].z);
        }
        assert_true(f.fit.believed.part[0].worst_margin == margin);
        fit_close(&f);
    }
    free(first.item);
    stage_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {FOLDER_TEST(an_arm_gets_posts),
                                       FOLDER_TEST(belief_is_what_a_judge_says),
                                       FOLDER_TEST(a_lifted_part_stands_on_posts),
                                       FOLDER_TEST(a_lift_that_is_there_already),
                                       FOLDER_TEST(an_arm_over_the_part_is_unroutable),
                                       FOLDER_TEST(a_block_needs_nothing),
                                       FOLDER_TEST(loads_make_posts_grow),
                                       FOLDER_TEST(a_load_that_nothing_holds_fails),
                                       FOLDER_TEST(batches_do_not_matter)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
