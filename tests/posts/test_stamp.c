/* Stamping by runs against a plain dense version that looks at every post for every pixel. */
#include "posts/stamp.h"

#include "posts/dice.h"
#include "posts/profile.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

enum { WIDTH = 71, HEIGHT = 53, POSTS = 9, LAYERS = 14 };

static const double layer_mm = 0.05;
static const int32_t palette[] = {0, 40, 97, 160, 210};

typedef enum kind { GREY, TWO_LEVEL, PALETTE } kind;

static fw_screen screen_of(kind k)
{
    fw_screen screen = {.width = WIDTH,
                        .height = HEIGHT,
                        .px_mm = 0.05,
                        .py_mm = 0.03,
                        .full = 255,
                        .brightest = 210,
                        .two_level = k == TWO_LEVEL};
    if (k == PALETTE) {
        screen.levels = palette;
        screen.level_count = sizeof palette / sizeof *palette;
    }
    return screen;
}

/* Posts that overlap, leave the image, end in different layers; every fifth has no route. */
static void random_posts(dice *d, fw_post *post, int32_t count)
{
    for (int32_t i = 0; i < count; i++) {
        double x = dice_between(d, -0.3, WIDTH * 0.05 + 0.3);
        double y = dice_between(d, -0.3, HEIGHT * 0.03 + 0.3);
        int32_t tip_layer = 1 + dice_below(d, LAYERS - 4);
        post[i] = (fw_post){.id = i,
                            .routed = dice_below(d, 5) != 0,
                            .locked = dice_below(d, 2) == 0,
                            .tip_layer = tip_layer,
                            .bite_layers = 1 + dice_below(d, 3),
                            .point_count = 2,
                            .tip_mm = dice_between(d, 0.05, 0.5),
                            .neck_mm = 0.3,
                            .shaft_mm = dice_between(d, 0.3, 0.9),
                            .foot_mm = dice_between(d, 0.5, 1.4)};
        post[i].path[0] = (fw_point){x, y, tip_layer * layer_mm};
        post[i].path[1] = (fw_point){x + dice_between(d, -0.2, 0.2), y, 0.0};
    }
}

static void random_layer(dice *d, kind k, fw_greys *layer)
{
    assert_int_equal(fw_greys_begin(layer, WIDTH, HEIGHT, 255, NULL), FW_OK);
    for (int32_t y = 0; y < HEIGHT; y++) {
        for (int32_t x = 0; x < WIDTH;) {
            int32_t end = x + 1 + dice_below(d, 12);
            end = end < WIDTH ? end : WIDTH;
            int32_t grey = k == TWO_LEVEL ? 210 : palette[dice_below(d, 5)];
            if (dice_below(d, 2) == 0)
                assert_int_equal(fw_greys_push(layer, y, x, end, grey, NULL), FW_OK);
            x = end;
        }
    }
    fw_greys_finish(layer);
}

static double dense_coverage(const fw_screen *screen, const fw_post *post, int32_t layer, int32_t x,
                             int32_t y)
{
    fw_disc disc;
    if (!fw_post_disc(post, layer, layer_mm, &disc))
        return 0.0;
    return fw_disc_coverage(screen, &disc, x, y);
}

static int32_t dense_grey(const fw_screen *screen, const fw_posts *posts, int32_t layer, int32_t x,
                          int32_t y)
{
    double coverage = 0.0;
    for (size_t i = 0; i < posts->count; i++)
        coverage = fmax(coverage, dense_coverage(screen, &posts->item[i], layer, x, y));
    return fw_screen_grey(screen, coverage);
}

/* A set of runs of greys has one form only; this also catches touching runs of one grey. */
static void assert_canonical(const fw_greys *layer)
{
    for (int32_t y = 0; y < layer->height; y++) {
        for (uint32_t i = layer->row[y] + 1; i < layer->row[y + 1]; i++) {
            const fw_grey_run *r = &layer->run[i];
            assert_true(r[-1].x1 < r->x0 || (r[-1].x1 == r->x0 && r[-1].grey != r->grey));
        }
    }
}

static void check_layer(const fw_stamp_plan *plan, const fw_screen *screen, const fw_posts *posts,
                        int32_t layer, const fw_greys *in, fw_greys *out)
{
    bool touched, raised = false;
    assert_int_equal(fw_stamp_layer(plan, layer, in, out, &touched, NULL), FW_OK);
    assert_canonical(out);
    for (int32_t y = 0; y < HEIGHT; y++) {
        for (int32_t x = 0; x < WIDTH; x++) {
            int32_t was = in != NULL ? fw_greys_at(in, x, y) : 0;
            int32_t post = dense_grey(screen, posts, layer, x, y);
            int32_t now = fw_greys_at(out, x, y);
            assert_int_equal(now, was > post ? was : post);
            assert_true(now >= was);
            assert_true(!screen->two_level || now == 0 || now == 210);
            raised = raised || now > was;
        }
    }
    assert_int_equal(touched, raised);
    if (in != NULL && !touched)
        assert_true(fw_greys_equal(in, out));
}

static void check_stack(kind k, uint64_t seed)
{
    dice d = {seed};
    fw_post post[POSTS];
    random_posts(&d, post, POSTS);
    fw_posts posts = {post, POSTS, POSTS};
    fw_screen screen = screen_of(k);
    fw_stamp_plan *plan = NULL;
    assert_int_equal(fw_stamp_plan_make(&posts, &screen, layer_mm, &plan, NULL), FW_OK);
    fw_greys in = {0}, out = {0};
    for (int32_t layer = 0; layer < LAYERS; layer++) {
        random_layer(&d, k, &in);
        check_layer(plan, &screen, &posts, layer, layer % 3 == 0 ? NULL : &in, &out);
    }
    fw_greys_free(&in);
    fw_greys_free(&out);
    fw_stamp_plan_free(plan);
}

static void test_layers_against_dense(void **state)
{
    (void)state;
    for (uint64_t seed = 1; seed <= 8; seed++) {
        check_stack(GREY, seed);
        check_stack(TWO_LEVEL, seed + 100);
        check_stack(PALETTE, seed + 200);
    }
}

static bool dense_belongs(const fw_screen *screen, const fw_post *post, int32_t layer, int32_t x,
                          int32_t y)
{
    double coverage = dense_coverage(screen, post, layer, x, y);
    return screen->two_level ? coverage >= 0.5 : coverage > 0.0;
}

static int32_t dense_member(const fw_screen *screen, const fw_posts *posts, int32_t layer,
                            int32_t x, int32_t y)
{
    for (size_t i = 0; i < posts->count; i++) {
        const fw_post *post = &posts->item[i];
        if (layer < post->tip_layer && dense_belongs(screen, post, layer, x, y))
            return (int32_t)i;
    }
    return -1;
}

static int32_t member_at(const fw_member_runs *members, int32_t x, int32_t y)
{
    for (uint32_t i = members->row[y]; i < members->row[y + 1]; i++) {
        if (members->run[i].x0 <= x && x < members->run[i].x1)
            return members->run[i].post;
    }
    return -1;
}

/* Every pixel of a post is either its own or lost, and never both nor twice. */
static void check_lost(const fw_screen *screen, const fw_posts *posts, int32_t layer,
                       const fw_member_runs *members, const fw_member_runs *lost)
{
    for (int32_t y = 0; y < HEIGHT; y++) {
        for (int32_t x = 0; x < WIDTH; x++) {
            const int32_t owner = member_at(members, x, y);
            for (int32_t p = 0; p < (int32_t)posts->count; p++) {
                int times = 0;
                for (uint32_t i = lost->row[y]; i < lost->row[y + 1]; i++)
                    times += lost->run[i].post == p && lost->run[i].x0 <= x && x < lost->run[i].x1;
                const bool claims = layer < posts->item[p].tip_layer &&
                                    dense_belongs(screen, &posts->item[p], layer, x, y);
                assert_int_equal(times, claims && owner != p);
            }
        }
    }
}

static void check_members(kind k, uint64_t seed)
{
    dice d = {seed};
    fw_post post[POSTS];
    random_posts(&d, post, POSTS);
    fw_posts posts = {post, POSTS, POSTS};
    fw_screen screen = screen_of(k);
    fw_stamp_plan *plan = NULL;
    assert_int_equal(fw_stamp_plan_make(&posts, &screen, layer_mm, &plan, NULL), FW_OK);
    fw_member_runs members = {0}, lost = {0};
    for (int32_t layer = 0; layer < LAYERS; layer++) {
        assert_int_equal(fw_stamp_members(plan, layer, &members, &lost, NULL), FW_OK);
        assert_int_equal(members.row[HEIGHT], members.count);
        assert_int_equal(lost.row[HEIGHT], lost.count);
        check_lost(&screen, &posts, layer, &members, &lost);
        for (int32_t y = 0; y < HEIGHT; y++) {
            for (int32_t x = 0; x < WIDTH; x++)
                assert_int_equal(member_at(&members, x, y),
                                 dense_member(&screen, &posts, layer, x, y));
            for (uint32_t i = members.row[y] + 1; i < members.row[y + 1]; i++) {
                const fw_member_run *r = &members.run[i];
                assert_true(r[-1].x1 < r->x0 || (r[-1].x1 == r->x0 && r[-1].post != r->post));
            }
        }
    }
    fw_member_runs_free(&members);
    fw_member_runs_free(&lost);
    fw_stamp_plan_free(plan);
}

static void test_members_against_dense(void **state)
{
    (void)state;
    for (uint64_t seed = 31; seed <= 36; seed++) {
        check_members(GREY, seed);
        check_members(TWO_LEVEL, seed);
    }
}

static void test_post_with_and_without_bite(void **state)
{
    (void)state;
    dice d = {77};
    fw_post post[POSTS];
    random_posts(&d, post, POSTS);
    fw_posts posts = {post, POSTS, POSTS};
    fw_screen screen = screen_of(GREY);
    fw_stamp_plan *plan = NULL;
    assert_int_equal(fw_stamp_plan_make(&posts, &screen, layer_mm, &plan, NULL), FW_OK);
    fw_runs with = {0}, without = {0};
    for (int32_t layer = 0; layer < LAYERS; layer++) {
        for (size_t i = 0; i < POSTS; i++) {
            assert_int_equal(fw_stamp_post(plan, i, layer, true, &with, NULL), FW_OK);
            assert_int_equal(fw_stamp_post(plan, i, layer, false, &without, NULL), FW_OK);
            int64_t pixels = 0;
            for (int32_t y = 0; y < HEIGHT; y++) {
                for (int32_t x = 0; x < WIDTH; x++)
                    pixels += dense_belongs(&screen, &post[i], layer, x, y);
            }
            assert_int_equal(fw_runs_pixels(&with), pixels);
            bool below = layer < post[i].tip_layer;
            assert_int_equal(fw_runs_pixels(&without), below ? pixels : 0);
        }
    }
    fw_runs_free(&with);
    fw_runs_free(&without);
    fw_stamp_plan_free(plan);
}

static void test_layer_count(void **state)
{
    (void)state;
    dice d = {5};
    fw_post post[POSTS];
    random_posts(&d, post, POSTS);
    fw_posts posts = {post, POSTS, POSTS};
    fw_screen screen = screen_of(GREY);
    int32_t last = 0;
    for (size_t i = 0; i < POSTS; i++) {
        int32_t end = post[i].routed ? post[i].tip_layer + post[i].bite_layers : 0;
        last = end > last ? end : last;
    }
    fw_stamp_plan *plan = NULL;
    assert_int_equal(fw_stamp_plan_make(&posts, &screen, layer_mm, &plan, NULL), FW_OK);
    assert_int_equal(fw_stamp_layers(plan), last);
    fw_stamp_plan_free(plan);
}

static void test_no_posts(void **state)
{
    (void)state;
    fw_posts posts = {0};
    fw_screen screen = screen_of(GREY);
    fw_stamp_plan *plan = NULL;
    assert_int_equal(fw_stamp_plan_make(&posts, &screen, layer_mm, &plan, NULL), FW_OK);
    assert_int_equal(fw_stamp_layers(plan), 0);
    fw_greys out = {0};
    bool touched = true;
    assert_int_equal(fw_stamp_layer(plan, 0, NULL, &out, &touched, NULL), FW_OK);
    assert_false(touched);
    assert_int_equal(out.count, 0);
    assert_int_equal(out.full, 255);
    fw_greys_free(&out);
    fw_stamp_plan_free(plan);
    fw_stamp_plan_free(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_layers_against_dense),
        cmocka_unit_test(test_members_against_dense),
        cmocka_unit_test(test_post_with_and_without_bite),
        cmocka_unit_test(test_layer_count),
        cmocka_unit_test(test_no_posts),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
