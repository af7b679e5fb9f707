/* Rigid shares: statics of every layer, slender posts as the pile formula has them, and moments
 * that a share by nearness cannot see. */
#include "check/lever_share.h"
#include "check/stage.h"

typedef struct tally {
    double sum[6];    /* about the origin */
    double pull_N[8]; /* by post */
    double plate_N, moment_Nmm;
    int taken;
} tally;

static fw_status add_up(void *context, const fw_lever_anchor *anchor, const double force[6],
                        fw_fault *fault)
{
    (void)fault;
    static const double origin[3] = {0};
    tally *t = context;
    double moved[6];
    fw_six_move_wrench(anchor->stiffness.at, origin, force, moved);
    for (int i = 0; i < 6; i++)
        t->sum[i] += moved[i];
    if (anchor->post >= 0)
        t->pull_N[anchor->post] = force[2];
    else
        t->plate_N = force[2];
    t->moment_Nmm = fmax(t->moment_Nmm, hypot(force[3], force[4]));
    t->taken++;
    return FW_OK;
}

/* One layer of part on the anchors of the layers before, handed out alone. */
typedef struct bench {
    fw_setup setup;
    fw_lever lever;
    fw_sheet sheet;
    fw_film_memo *memo;
    fw_budget budget;
} bench;

static void bench_open(bench *b, const stage *s)
{
    *b = (bench){.setup = stage_setup(s)};
    b->budget = (fw_budget){.holder = "memo", .limit = 16u << 20};
    b->lever.setup = &b->setup;
    assert_int_equal(fw_film_memo_create(&b->budget, &b->memo, NULL), FW_OK);
    fw_greys greys = stage_layer(s, s->layers - 1);
    assert_int_equal(fw_sheet_build(&b->sheet, &b->setup, NULL, 0, &greys, NULL), FW_OK);
    fw_greys_free(&greys);
    for (uint32_t v = 0; v < b->sheet.slice.void_regions.count; v++)
        b->sheet.cavity[v] = FW_OPEN;
    b->sheet.openings =
        (fw_openings){&b->sheet.slice.voids, &b->sheet.slice.void_regions, b->sheet.cavity, 0};
    assert_int_equal(fw_peel_solve(&b->setup, &b->sheet.slice, b->sheet.posts_only,
                                   &b->sheet.openings, b->memo, &b->sheet.peel, NULL),
                     FW_OK);
    assert_int_equal(fw_lever_follow(&b->lever, &b->sheet, NULL, NULL), FW_OK);
    b->sheet.layer = s->layers - 1;
}

static tally bench_step(bench *b)
{
    tally t = {.taken = 0};
    const fw_lever_taker taker = {add_up, &t};
    assert_int_equal(fw_lever_step(&b->lever, &b->sheet, &taker, NULL), FW_OK);
    return t;
}

static void bench_close(bench *b)
{
    fw_lever_close(&b->lever);
    fw_sheet_free(&b->sheet);
    fw_film_memo_free(b->memo);
}

/* A disc of 2 mm at (x, y) mm in the last of 120 layers of 100 um. */
static stage pulled_at(double x_mm, double y_mm)
{
    stage s = stage_new(200, 200, 120);
    s.job.max_peel_N = 1e-6;
    stage_disc(&s, x_mm * 10, y_mm * 10, 20, 119, 120, 255);
    return s;
}

static fw_post slender(double x_mm, double y_mm)
{
    return (fw_post){.routed = true,
                     .tip_layer = 119,
                     .point_count = 2,
                     .path = {{x_mm, y_mm, 11.9}, {x_mm, y_mm, 0}},
                     .tip_mm = 0.2,
                     .neck_mm = 0,
                     .shaft_mm = 0.2,
                     .foot_mm = 0.2};
}

/* P_i = F/n + F ex x_i / sum x^2 + F ey y_i / sum y^2 (pile groups, common practice): slender posts
 * carry next to nothing by bending. */
static void slender_posts_are_piles(void **state)
{
    (void)state;
    static const double at[4][2] = {{7, 6}, {13, 6}, {13, 14}, {7, 14}};
    stage s = pulled_at(11, 11.5);
    bench b;
    bench_open(&b, &s);
    for (int32_t p = 0; p < 4; p++) {
        const fw_post post = slender(at[p][0], at[p][1]);
        assert_int_equal(fw_lever_add_post(&b.lever, &post, p, 0, NULL), FW_OK);
    }
    const tally t = bench_step(&b);
    assert_int_equal(t.taken, 4);
    const double f = b.sheet.peel.force_N;
    for (int p = 0; p < 4; p++) {
        const double x = at[p][0] - 10, y = at[p][1] - 10;
        assert_near(t.pull_N[p], f / 4 + f * 1 * x / 36 + f * 1.5 * y / 64, 0.01);
    }
    bench_close(&b);
    stage_free(&s);
}

/* Forces and moments of all anchors make the load again, whatever they are. */
static void shares_are_in_balance(void **state)
{
    (void)state;
    stage s = pulled_at(12, 9);
    bench b;
    bench_open(&b, &s);
    for (int32_t p = 0; p < 5; p++) {
        fw_post post = slender(6 + 2.1 * p, 5 + 1.7 * (p * 3 % 5));
        post.tip_mm = 0.4;
        post.neck_mm = 1.5;
        post.shaft_mm = 0.8 + 0.2 * p;
        post.foot_mm = 2;
        post.path[1].x += 0.8 * p;
        assert_int_equal(fw_lever_add_post(&b.lever, &post, p, 0, NULL), FW_OK);
    }
    stage plate = stage_new(200, 200, 1);
    stage_box(&plate, 100, 120, 0, 130, 170, 1, 255);
    fw_slice contact = stage_slice(&plate, 0);
    assert_int_equal(fw_lever_add_plate(&b.lever, &contact.intended, 0, 0, NULL), FW_OK);
    const tally t = bench_step(&b);
    const double f = b.sheet.peel.force_N;
    assert_int_equal(t.taken, 6);
    assert_true(fabs(t.sum[0]) < 1e-6 * f && fabs(t.sum[1]) < 1e-6 * f);
    assert_near(t.sum[2], f, 1e-6);
    assert_near(t.sum[3], f * 9, 2e-3); /* y Fz about x; the field's centre to the work tolerance */
    assert_near(t.sum[4], -f * 12, 2e-3);
    assert_true(fabs(t.sum[5]) < 1e-5 * f);
    fw_slice_free(&contact);
    stage_free(&plate);
    bench_close(&b);
    stage_free(&s);
}

/* One post holds what hangs beside it by its moment alone. */
static void one_post_takes_the_moment(void **state)
{
    (void)state;
    stage s = pulled_at(12, 10);
    bench b;
    bench_open(&b, &s);
    const fw_post post = slender(10, 10);
    assert_int_equal(fw_lever_add_post(&b.lever, &post, 0, 0, NULL), FW_OK);
    const tally t = bench_step(&b);
    assert_near(t.pull_N[0], b.sheet.peel.force_N, 1e-9);
    assert_near(t.moment_Nmm, 2 * b.sheet.peel.force_N, 2e-3);
    bench_close(&b);
    stage_free(&s);
}

/* The chain follows the post: its diameters at every break, from tip to plate. */
static void nodes_follow_the_post(void **state)
{
    (void)state;
    const fw_post post = {.routed = true,
                          .tip_layer = 100,
                          .point_count = 3,
                          .path = {{2, 3, 10}, {2, 3, 6}, {5, 3, 0}},
                          .tip_mm = 0.4,
                          .neck_mm = 1.5,
                          .shaft_mm = 1,
                          .foot_mm = 2};
    fw_beam_node node[FW_LEVER_NODES];
    assert_int_equal(fw_lever_nodes(&post, 0.1, node), 5);
    static const double z[] = {10, 8.5, 6, 0.5, 0}, d[] = {0.4, 1, 1, 1, 2};
    for (int i = 0; i < 5; i++) {
        assert_near(node[i].at[2] + 1, z[i] + 1, 1e-12);
        assert_near(node[i].d_mm, d[i], 1e-8);
    }
    assert_near(node[3].at[0], 4.75, 1e-12);
    fw_post none = post;
    none.routed = false;
    assert_int_equal(fw_lever_nodes(&none, 0.1, node), 0);
}

/* A table that reaches far out on one side: its far post pulls more than half, and the judge says
 * so where nearness alone would not. */
static void an_arm_loads_by_its_lever(void **state)
{
    (void)state;
    stage s = stage_new(140, 40, 26);
    s.job.max_peel_N = 1e-6;
    s.job.resin.reach_mm = 12;
    stage_post(&s, 2.0, 2.0, 20, true);
    stage_post(&s, 4.0, 2.0, 20, true);
    stage_box(&s, 10, 14, 20, 50, 26, 24, 255);
    stage_box(&s, 10, 14, 24, 130, 26, 26, 255);
    fw_report report = stage_judge(&s);

    /* Of the last layer, an arm of 12 mm, statics of a beam on two pins give the near post a push
     * and the far one (7 - 2) / (4 - 2) = 2.5 times the load. */
    const double whole_N = report.layer[25].peel_N;
    assert_true(report.post_result[1].load_N > 1.5 * whole_N);
    fw_report_free(&report);
    stage_free(&s);
}

/* A window that slides bends the post: the moment at its foot is force times height, and the
 * anchor's own force is the slide's. */
static void a_slide_bends_the_post(void **state)
{
    (void)state;
    stage s = pulled_at(10, 10);
    s.job.machine.mode = FW_MODE_SLIDE;
    s.job.machine.speed_mm_s = 10;
    s.job.machine.slide_deg = 90;
    bench b;
    bench_open(&b, &s);
    const fw_post post = slender(10, 10);
    assert_int_equal(fw_lever_add_post(&b.lever, &post, 0, 0, NULL), FW_OK);
    const tally t = bench_step(&b);
    const double f = b.sheet.peel.force_N;
    assert_near(t.sum[1], f, 1e-9);
    assert_true(fabs(t.sum[0]) < 1e-9 * f && fabs(t.sum[2]) < 1e-9 * f);
    assert_near(fabs(t.sum[3]), f * 12, 1e-6); /* of the window's face, 120 layers of 0.1 mm */
    bench_close(&b);
    stage_free(&s);
}

/* A plate on one tall thin post, pushed on the way back: it buckles where it held the pull. */
static void a_tall_post_buckles(void **state)
{
    (void)state;
    stage s = stage_new(60, 60, 84);
    s.job.resin.reach_mm = 12;
    s.job.resin.tensile_MPa = 100;
    s.job.resin.plate_adhesion_MPa = 50;
    s.job.resin.modulus_MPa = 20;
    stage_post(&s, 3.0, 3.0, 80, true);
    stage_box(&s, 15, 15, 80, 45, 45, 84, 255);
    fw_report pulled = stage_judge(&s);
    assert_null(finding_of(&pulled, FW_SHAFT_BUCKLING));
    s.job.machine.approach_mm_s = 2;
    s.job.machine.approach_to_um = 60;
    fw_report pushed = stage_judge(&s);
    const fw_finding *finding = finding_of(&pushed, FW_SHAFT_BUCKLING);
    assert_non_null(finding);
    assert_int_equal(finding->severity, FW_FAIL);
    assert_int_equal(pushed.post_result[0].governs, FW_CHECK_BUCKLING);
    assert_near(pushed.post_result[0].margin, finding->margin, 1e-12);
    fw_report_free(&pulled);
    fw_report_free(&pushed);
    stage_free(&s);
}

int main(void)
{

    const struct CMUnitTest tests[] = {
        cmocka_unit_test(slender_posts_are_piles),   cmocka_unit_test(shares_are_in_balance),
        cmocka_unit_test(one_post_takes_the_moment), cmocka_unit_test(nodes_follow_the_post),
        cmocka_unit_test(an_arm_loads_by_its_lever), cmocka_unit_test(a_slide_bends_the_post),
        cmocka_unit_test(a_tall_post_buckles)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
