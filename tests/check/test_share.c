/* Who carries the load: statics layer by layer, shares with known borders, what counts for whom. */
#include "check/stage.h"

#include "posts/profile.h"

static const double pi = 3.14159265358979323846;

/* Films worth a solve: at 100 um all that is drawn here, posts alone excepted, pulls more than a
 * hundredth of what the smallest tip carries. */
static stage thin_film(int32_t width, int32_t height, int32_t layers)
{
    stage s = stage_new(width, height, layers);
    s.job.machine.gap_um = s.job.machine.gap_range_um[0] = s.job.machine.gap_range_um[1] = 100;
    return s;
}

static double q_of(const stage *s)
{
    return stage_setup(s).q;
}

/* The judge's own order, layer by layer, so that shares can be looked at on the way. */
typedef struct bench {
    const stage *stage;
    fw_setup setup;
    fw_stamp_plan *plan;
    fw_budget budget;
    fw_film_memo *memo;
    fw_ground ground;
    fw_share share;
    fw_findings findings;
    fw_layer_row *row;
    fw_sheet sheet[2];
    int32_t next;
} bench;

static void bench_open(bench *b, const stage *s)
{
    *b = (bench){.stage = s, .setup = stage_setup(s)};
    const fw_screen screen = {.width = s->width,
                              .height = s->height,
                              .px_mm = b->setup.px_mm,
                              .py_mm = b->setup.py_mm,
                              .full = 255,
                              .brightest = 255};
    b->budget = (fw_budget){.holder = "memo", .limit = 16u << 20};
    b->row = calloc((size_t)s->layers, sizeof *b->row);
    assert_non_null(b->row);
    for (int32_t n = 0; n < s->layers; n++)
        b->row[n].worst_margin = (double)NAN;
    assert_int_equal(fw_film_memo_create(&b->budget, &b->memo, NULL), FW_OK);
    assert_int_equal(fw_stamp_plan_make(&s->posts, &screen, b->setup.t_mm, &b->plan, NULL), FW_OK);
    assert_int_equal(fw_ground_open(&b->setup, &b->ground, NULL), FW_OK);
    assert_int_equal(fw_share_open(&b->setup, &s->posts, b->plan, &b->share, NULL), FW_OK);
}

/* Takes the next layer and gives its sheet. */
static fw_sheet *bench_step(bench *b)
{
    fw_sheet *sheet = &b->sheet[b->next % 2];
    const fw_sheet *before = b->next > 0 ? &b->sheet[(b->next + 1) % 2] : NULL;
    fw_greys greys = stage_layer(b->stage, b->next);
    assert_int_equal(fw_sheet_build(sheet, &b->setup, b->plan, b->next, &greys, NULL), FW_OK);
    fw_greys_free(&greys);
    if (before != NULL)
        assert_int_equal(fw_sheet_join(sheet, before, NULL), FW_OK);
    fw_layer_row *row = &b->row[b->next];
    assert_int_equal(fw_ground_step(&b->ground, sheet, before, NULL, row, &b->findings, NULL),
                     FW_OK);
    assert_int_equal(fw_peel_solve(&b->setup, &sheet->slice, sheet->posts_only, &sheet->openings,
                                   b->memo, &sheet->peel, NULL),
                     FW_OK);
    fw_share_new_batch(&b->share);
    assert_int_equal(fw_share_step(&b->share, sheet, before, b->row, NULL), FW_OK);
    b->next++;
    return sheet;
}

static void bench_close(bench *b)
{
    fw_share_close(&b->share);
    fw_ground_close(&b->ground);
    fw_sheet_free(&b->sheet[0]);
    fw_sheet_free(&b->sheet[1]);
    fw_stamp_plan_free(b->plan);
    fw_film_memo_free(b->memo);
    fw_findings_free(&b->findings);
    free(b->row);
}

/* Leaves the tributary share alone. */
static void forget_lever(fw_post_account *account)
{
    for (int check = 0; check < FW_POST_CHECKS; check++)
        account->lever_N[check] = 0;
}

/* What a layer hands out, in all. */
typedef struct tally {
    double anchors_N, posts_N, nobody_N;
} tally;

static fw_status tally_anchor(void *context, int32_t anchor, double force_N, fw_fault *fault)
{
    (void)fault;
    tally *t = context;
    *(anchor == FW_NO_ANCHOR ? &t->nobody_N : &t->anchors_N) += force_N;
    return FW_OK;
}

static fw_status tally_post(void *context, int32_t post, double force_N, fw_fault *fault)
{
    (void)post;
    (void)fault;
    ((tally *)context)->posts_N += force_N;
    return FW_OK;
}

static tally tally_of(const bench *b, const fw_sheet *sheet)
{
    tally sum = {0};
    fw_load_memo memo = {0};
    const fw_load_taker taker = {tally_anchor, tally_post, &sum};
    assert_int_equal(fw_loads_hand_out(&b->setup, sheet, b->share.tributary, &memo, &taker, NULL),
                     FW_OK);
    free(memo.entry);
    free(memo.piece);
    return sum;
}

/* Sum of all shares = the layer's load (statics); cells keep u in single precision. A table on
 * posts, a block with a blind hole on the plate, an island that floats, a film left to its bound.
 */
static void shares_add_up_to_the_load(void **state)
{
    (void)state;
    stage s = thin_film(120, 70, 26);
    stage_box(&s, 10, 10, 16, 60, 60, 26, 255);
    stage_post(&s, 1.5, 1.5, 16, true);
    stage_post(&s, 5.5, 1.5, 16, true);
    stage_post(&s, 3.5, 5.5, 16, true);
    stage_box(&s, 70, 10, 0, 110, 50, 26, 255);
    stage_box(&s, 80, 20, 4, 100, 40, 26, 0);
    stage_box(&s, 86, 26, 8, 94, 34, 26, 255); /* an island in the hole, held by nothing */
    stage_box(&s, 70, 55, 0, 72, 58, 26, 255); /* a film too small to be solved */
    bench b;
    bench_open(&b, &s);
    for (int32_t n = 0; n < 26; n++) {
        const fw_sheet *sheet = bench_step(&b);
        const tally sum = tally_of(&b, sheet);
        assert_near(sum.anchors_N + sum.posts_N + sum.nobody_N, sheet->peel.force_N, 1e-5);
        assert_int_equal(sum.nobody_N > 0, n >= 8);
        assert_int_equal(sum.posts_N > 0, n < 16);
        assert_true(sum.anchors_N > 0);
    }
    bench_close(&b);
    stage_free(&s);
}

/* A beam of 6 by 1 mm on two posts of the same height: the border of the shares is half way between
 * them, here on a border of the share's cells of 0.2 mm. A strip a wide carries q a^3 / 12 a
 * length, less q 0.2100830 a^4 / 8 at each end (torsion series, Timoshenko and Goodier). */
static const double line = 1 / 12.0, end = 0.2100830 / 8; /* over q, at a = 1 mm */

static void beam_on_two_uneven_posts(void **state)
{
    (void)state;
    stage s = thin_film(80, 30, 24);
    stage_post(&s, 2.0, 1.5, 20, true);
    stage_post(&s, 5.2, 1.5, 20, true);
    stage_box(&s, 10, 10, 20, 70, 20, 24, 255);
    bench on;
    bench_open(&on, &s);
    for (int n = 0; n < s.layers; n++)
        (void)bench_step(&on);
    const double a = on.share.post[0].demand.load_N[FW_POST_TIP],
                 b = on.share.post[1].demand.load_N[FW_POST_TIP];
    assert_near(a / (a + b), (2.6 * line - end) / (6 * line - 2 * end), 0.01);
    assert_near(a + b, q_of(&s) * (6 * line - 2 * end), 0.03); /* 10 pixels across: + 2 / 10^2 */
    bench_close(&on);
    stage_free(&s);
}

/* A beam of 5.2 mm on three posts: the outer two carry the same, the middle one half of the way to
 * either neighbour. */
static void three_posts(void **state)
{
    (void)state;
    stage s = thin_film(70, 30, 24);
    stage_post(&s, 2.0, 1.5, 20, true);
    stage_post(&s, 3.6, 1.5, 20, true);
    stage_post(&s, 5.2, 1.5, 20, true);
    stage_box(&s, 10, 10, 20, 62, 20, 24, 255);
    fw_report report = stage_judge(&s);
    const double a = report.post_result[0].load_N, m = report.post_result[1].load_N,
                 b = report.post_result[2].load_N;
    assert_near(a, b, 1e-3);
    assert_near(m / (a + m + b), 1.6 * line / (5.2 * line - 2 * end), 0.02);
    fw_report_free(&report);
    stage_free(&s);
}

/* Each block on the plate carries itself: load and area of its own, whatever stands beside it. */
static void blocks_carry_themselves(void **state)
{
    (void)state;
    stage s = thin_film(120, 60, 4);
    stage_box(&s, 5, 5, 0, 55, 55, 4, 255);
    stage_box(&s, 60, 5, 0, 90, 35, 4, 255);
    bench b;
    bench_open(&b, &s);
    for (int n = 0; n < 4; n++)
        (void)bench_step(&b);
    assert_int_equal(b.share.plate_count, 2);
    const double q = q_of(&s);
    static const double side[2] = {5, 3};
    for (int i = 0; i < 2; i++) {
        assert_near(b.share.plate[i].area_mm2, side[i] * side[i], 1e-9);
        assert_near(b.share.plate[i].load_N, q * 0.1405770150 / 4 * pow(side[i], 4), 0.01);
    }
    bench_close(&b);
    stage_free(&s);
}

/* While posts stand alone in a layer their own peel loads them from the neck down, never the tip.
 */
static void posts_alone_load_only_themselves(void **state)
{
    (void)state;
    stage s = thin_film(60, 30, 24);
    stage_box(&s, 35, 5, 0, 55, 25, 24, 255); /* its load must not reach the post */
    stage_post(&s, 2.0, 1.5, 20, true);
    stage_box(&s, 10, 10, 20, 25, 20, 24, 255);
    bench b;
    bench_open(&b, &s);
    for (int n = 0; n < 20; n++) {
        const fw_sheet *sheet = bench_step(&b);
        const double own = sheet->peel.force_N - sheet->peel.cluster[1].force_N;
        assert_near(b.share.post[0].own_N,
                    sheet->peel.cluster[0].posts_only ? sheet->peel.cluster[0].force_N
                                                      : sheet->peel.cluster[1].force_N,
                    1e-5);
        assert_true(own > 0);
    }
    assert_true(b.share.post[0].demand.load_N[FW_POST_TIP] == 0);
    assert_true(b.share.post[0].demand.load_N[FW_POST_FOOT] > 0);
    bench_close(&b);
    stage_free(&s);
}

/* A tip high up does not take what has the shorter way to the plate: the block keeps the whole of
 * its own section, the post gets at most its arm. */
static void high_tip_does_not_take_the_block(void **state)
{
    (void)state;
    stage s = thin_film(70, 40, 40);
    stage_box(&s, 5, 5, 0, 35, 35, 40, 255);
    stage_box(&s, 35, 15, 30, 55, 25, 40, 255); /* an arm of 2 mm by 1 mm */
    stage_post(&s, 5.0, 2.0, 30, true);
    bench b;
    bench_open(&b, &s);
    double arm_N = 0;
    for (int n = 0; n < 40; n++) {
        const fw_sheet *sheet = bench_step(&b);
        if (n < 30)
            continue;
        const double block_N = q_of(&s) * 0.1405770150 / 4 * pow(3, 4);
        arm_N = sheet->peel.force_N - block_N;
        assert_true(b.share.post[0].tip_N < arm_N);
        assert_true(b.share.plate[0].load_N > 0.99 * block_N); /* joined to its arm it pulls more */
    }
    bench_close(&b);
    stage_free(&s);
}

/* Feet that touch are one: area and load of both; a post further off stays by itself. */
static void grown_together_feet_are_one(void **state)
{
    (void)state;
    stage s = thin_film(100, 30, 24);
    stage_post(&s, 2.0, 1.5, 20, false);
    stage_post(&s, 3.0, 1.5, 20, false);
    stage_post(&s, 7.0, 1.5, 20, false);
    for (int p = 0; p < 3; p++) {
        const double x = s.posts.item[p].path[0].x * 10;
        s.posts.item[p].foot_mm = 1.2;
        stage_disc(&s, x, 15, 6, 0, 1, 255);
        stage_disc(&s, x, 15, 4, 1, 20, 255);
    }
    stage_box(&s, 14, 8, 20, 80, 22, 24, 255);
    bench b;
    bench_open(&b, &s);
    double together_N = 0;
    for (int n = 0; n < 24; n++) {
        (void)bench_step(&b);
        double both_N = 0;
        for (int p = 0; p < 2; p++)
            both_N += b.share.post[p].touched_layer == n
                          ? b.share.post[p].tip_N + b.share.post[p].own_N
                          : 0;
        together_N = fmax(together_N, both_N);
    }
    assert_int_equal(b.share.group_count, 2);
    assert_int_equal(b.share.post[0].group, b.share.post[1].group);
    assert_int_not_equal(b.share.post[0].group, b.share.post[2].group);
    fw_post_demand demand[3];
    fw_post_section section[3];
    for (size_t p = 0; p < 3; p++) {
        forget_lever(&b.share.post[p]);
        fw_share_judged(&b.share, p, &demand[p], &section[p]);
    }
    int64_t pixels = 0;
    for (int y = 0; y < 30; y++)
        for (int x = 0; x < 50; x++)
            pixels += stage_at(&s, x, y, 0);
    assert_near(section[0].area_mm2[FW_POST_FOOT], (double)pixels * 0.01, 1e-9);
    assert_near(section[1].area_mm2[FW_POST_FOOT], (double)pixels * 0.01, 1e-9);
    assert_true(demand[0].load_N[FW_POST_FOOT] == demand[1].load_N[FW_POST_FOOT]);
    assert_near(demand[0].load_N[FW_POST_FOOT], together_N, 1e-9);
    assert_true(b.share.post[0].section.area_mm2[FW_POST_FOOT] < section[0].area_mm2[FW_POST_FOOT]);
    assert_near(section[2].area_mm2[FW_POST_FOOT], pi * 0.36, 0.05);
    assert_near(demand[2].load_N[FW_POST_FOOT], b.share.post[2].demand.load_N[FW_POST_FOOT], 1e-12);
    bench_close(&b);
    stage_free(&s);
}

/* Pixels that are solid both in the post's last layer and in the part's first layer without bite.
 */
static double contact_by_pixels(const stage *part, const fw_post *post)
{
    stage both = stage_new(part->width, part->height, part->layers);
    const fw_setup setup = stage_setup(part);
    int64_t pixels = 0;
    memcpy(both.grey, part->grey,
           (size_t)part->width * (size_t)part->height * (size_t)part->layers);
    both.posts = part->posts;
    stage_stamp(&both, false);
    fw_greys last = stage_layer(&both, post->tip_layer - 1);
    fw_greys over = stage_layer(part, post->tip_layer + post->bite_layers);
    for (int y = 0; y < part->height; y++)
        for (int x = 0; x < part->width; x++)
            pixels += fw_greys_at(&last, x, y) >= setup.solid_least &&
                      fw_greys_at(&over, x, y) >= setup.solid_least;
    fw_greys_free(&last);
    fw_greys_free(&over);
    free(both.grey);
    return (double)pixels * setup.px_mm * setup.py_mm;
}

/* The contact is what is solid over the last section: a tip off the edge counts for what is left.
 */
static void a_tip_at_an_edge_counts_for_less(void **state)
{
    (void)state;
    for (int edge = 26; edge <= 32; edge++) {
        stage s = thin_film(60, 30, 24);
        stage_post(&s, 3.0, 1.5, 20, false);
        stage_box(&s, edge, 8, 20, 50, 22, 24, 255);
        const double expected = contact_by_pixels(&s, &s.posts.item[0]);
        stage_stamp(&s, false);
        fw_report report = stage_judge(&s);
        assert_true(expected > 0);
        assert_near(report.post_result[0].contact_mm2, expected, 1e-9);
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* A post whose part never comes holds nothing. */
static void a_post_under_nothing_holds_nothing(void **state)
{
    (void)state;
    stage s = thin_film(60, 30, 24);
    stage_post(&s, 2.0, 1.5, 20, true);
    stage_box(&s, 30, 8, 0, 50, 22, 24, 255);
    fw_report report = stage_judge(&s);
    assert_true(report.post_result[0].contact_mm2 == 0);
    assert_true(report.post_result[0].load_N == 0);
    assert_int_equal(finding_of(&report, FW_STUB)->post, 0);
    fw_report_free(&report);
    stage_free(&s);
}

/* The contact is measured in the first layer without bite: on a slope the part comes over the tip
 * layer by layer, two columns each. */
static void the_bite_brings_contact(void **state)
{
    (void)state;
    double before = 0;
    for (int32_t bite = 0; bite <= 3; bite++) {
        stage s = thin_film(60, 30, 26);
        stage_post(&s, 3.0, 1.5, 20, false);
        s.posts.item[0].bite_layers = bite;
        for (int n = 20; n < 26; n++)
            stage_box(&s, 32 - 2 * (n - 20), 8, n, 50, 22, n + 1, 255);
        const double expected = contact_by_pixels(&s, &s.posts.item[0]);
        stage_stamp(&s, false);
        fw_report report = stage_judge(&s);
        assert_true(expected > before);
        assert_near(report.post_result[0].contact_mm2, expected, 1e-9);
        before = expected;
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* Nor does one whose tip lies over the last layer: there is nothing over it. */
static void a_post_up_to_the_end_holds_nothing(void **state)
{
    (void)state;
    for (int beyond = 0; beyond < 3; beyond++) {
        stage s = thin_film(60, 30, 24);
        stage_post(&s, 2.0, 1.5, 24 + beyond, false);
        stage_box(&s, 30, 8, 0, 50, 22, 24, 255);
        stage_stamp(&s, false);
        bench b;
        bench_open(&b, &s);
        for (int n = 0; n < 24; n++)
            (void)bench_step(&b);
        fw_share_finish(&b.share, b.row);
        assert_true(b.share.post[0].section.area_mm2[FW_POST_TIP] == 0);
        bench_close(&b);
        fw_report report = stage_judge(&s);
        assert_true(report.post_result[0].contact_mm2 == 0);
        assert_non_null(finding_of(&report, FW_STUB));
        fw_report_free(&report);
        stage_free(&s);
    }
}

/* Solid pixels of a layer in the footprints of one post and of two, counted one by one. */
static void count_footprints(const bench *b, int32_t layer, int64_t alone[2], int64_t *both)
{
    fw_greys greys = stage_layer(b->stage, layer);
    fw_runs foot[2] = {{0}, {0}};
    for (size_t p = 0; p < 2; p++)
        assert_int_equal(fw_stamp_post(b->plan, p, layer, false, &foot[p], NULL), FW_OK);
    alone[0] = alone[1] = *both = 0;
    for (int32_t y = 0; y < b->stage->height; y++)
        for (int32_t x = 0; x < b->stage->width; x++) {
            const bool solid = fw_greys_at(&greys, x, y) >= b->setup.solid_least;
            const bool in[2] = {fw_runs_find(&foot[0], x, y) != UINT32_MAX,
                                fw_runs_find(&foot[1], x, y) != UINT32_MAX};
            alone[0] += solid && in[0];
            alone[1] += solid && in[1];
            *both += solid && in[0] && in[1];
        }
    fw_runs_free(&foot[0]);
    fw_runs_free(&foot[1]);
    fw_greys_free(&greys);
}

/* Shafts that overlap carry each other's load in the share of their sections; at full overlap each
 * carries the sum. Apart: nothing. Neither counts as a stub. */
static void posts_on_one_shaft_carry_the_sum(void **state)
{
    (void)state;
    for (int apart = 0; apart <= 12; apart += 2) {
        stage s = thin_film(90, 30, 24);
        stage_post(&s, 3.0, 1.5, 12, false);
        stage_post(&s, 3.0 + 0.1 * apart, 1.5, 20, false);
        fw_post *second = &s.posts.item[1]; /* leans over to a tip of its own */
        second->point_count = 3;
        second->path[2] = second->path[1];
        second->path[1] = (fw_point){3.0 + 0.1 * apart, 1.5, 0.9};
        second->path[0].x = 4.6;
        stage_box(&s, 24, 8, 12, 34, 22, 14, 255);
        stage_box(&s, 40, 8, 20, 80, 22, 24, 255);
        stage_stamp(&s, true);
        bench b;
        bench_open(&b, &s);
        double part[2] = {0}, least[2] = {INFINITY, INFINITY};
        for (int n = 0; n < 24; n++) {
            (void)bench_step(&b);
            int64_t alone[2], both;
            count_footprints(&b, n, alone, &both);
            for (int p = 0; p < 2; p++) {
                const fw_post *post = &s.posts.item[p];
                if (n >= post->tip_layer || fw_post_zone(post, fw_post_middle(n, 0.1),
                                                         fw_post_face(post, 0.1)) == FW_ZONE_NECK)
                    continue;
                least[p] = fmin(least[p], (double)alone[p] * 0.01);
                if (both > 0)
                    part[p] = fmax(part[p], (double)both / (double)alone[1 - p]);
            }
        }
        fw_share_finish(&b.share, b.row);
        const fw_post_account *account = b.share.post;
        fw_post_demand demand[2];
        for (size_t p = 0; p < 2; p++) {
            forget_lever(&b.share.post[p]);
            fw_share_demand(&b.share, p, &demand[p]);
        }
        assert_true(account[0].demand.load_N[FW_POST_FOOT] > 0);
        assert_true(account[1].demand.load_N[FW_POST_FOOT] > 0);
        assert_int_equal(part[0] > 0, apart <= 10);
        for (int p = 0; p < 2; p++) {
            assert_int_equal(account[p].seen_layers, s.posts.item[p].tip_layer);
            assert_near(account[p].section.area_mm2[FW_POST_SHAFT], least[p], 1e-9);
            assert_near(demand[p].load_N[FW_POST_SHAFT],
                        account[p].demand.load_N[FW_POST_FOOT] +
                            part[p] * account[1 - p].demand.load_N[FW_POST_FOOT],
                        1e-9);
        }
        bench_close(&b);
        stage_free(&s);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(shares_add_up_to_the_load),
                                       cmocka_unit_test(beam_on_two_uneven_posts),
                                       cmocka_unit_test(three_posts),
                                       cmocka_unit_test(blocks_carry_themselves),
                                       cmocka_unit_test(posts_alone_load_only_themselves),
                                       cmocka_unit_test(high_tip_does_not_take_the_block),
                                       cmocka_unit_test(grown_together_feet_are_one),
                                       cmocka_unit_test(a_tip_at_an_edge_counts_for_less),
                                       cmocka_unit_test(the_bite_brings_contact),
                                       cmocka_unit_test(a_post_under_nothing_holds_nothing),
                                       cmocka_unit_test(a_post_up_to_the_end_holds_nothing),
                                       cmocka_unit_test(posts_on_one_shaft_carry_the_sum)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
