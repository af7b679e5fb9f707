/* A small stack in memory, drawn with boxes and discs, and a judge run over it. */
#ifndef FW_TEST_STAGE_H
#define FW_TEST_STAGE_H

#include "check/judge.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

/* Pixels of 100 um, layers of 100 um, resin and machine with invented values, reach 1.5 mm, 45
 * degrees. */
typedef struct stage {
    fw_job job;
    int32_t width, height, layers;
    uint8_t *grey; /* [layers][height][width] */
    fw_posts posts;
    int32_t batch;
    bool memo_off;
} stage;

static inline stage stage_new(int32_t width, int32_t height, int32_t layers)
{
    stage s = {.width = width, .height = height, .layers = layers, .batch = 16};
    s.grey = calloc((size_t)width * (size_t)height * (size_t)layers, 1);
    assert_non_null(s.grey);
    s.job = (fw_job){.pixel_um = {100, 100},
                     .layer_um = 100,
                     .intent_level = 0.5,
                     .has_resin = true,
                     .has_machine = true,
                     .has_rules = true,
                     .heal_layers = 1};
    s.job.resin = (fw_resin){.viscosity_mPa_s = 350,
                             .penetration_um = 110,
                             .critical_mJ_cm2 = 9,
                             .exposure_mJ_cm2 = 60,
                             .joint_ratio = 1,
                             .tensile_MPa = 8,
                             .modulus_MPa = 250,
                             .plate_adhesion_MPa = 0.5,
                             .reach_mm = 1.5,
                             .angle_deg = 45,
                             .basis_viscosity = FW_MEASURED,
                             .basis_cure = FW_MEASURED,
                             .basis_green = FW_MEASURED,
                             .basis_support = FW_MEASURED};
    s.job.machine = (fw_machine){.speed_mm_s = 1,
                                 .gap_um = 200,
                                 .gap_range_um = {200, 200},
                                 .cap_kPa = 101.325,
                                 .plate_mm = {64, 40},
                                 .basis_separation = FW_MEASURED,
                                 .basis_frame = FW_MEASURED};
    s.job.rules = (fw_post_rules){.lift_mm = 0,
                                  .tip_mm = {0.3, 0.8},
                                  .neck_mm = 1.0,
                                  .shaft_mm = {0.8, 3},
                                  .foot_mm = 3,
                                  .lean_deg = 30,
                                  .clearance_mm = 0.3,
                                  .bite_mm = 0.1,
                                  .margin = 2};
    return s;
}

/* Fills [x0, x1) x [y0, y1) of layers [n0, n1). */
static inline void stage_box(stage *s, int x0, int y0, int n0, int x1, int y1, int n1, uint8_t grey)
{
    for (int n = n0; n < n1; n++)
        for (int y = y0; y < y1; y++)
            memset(s->grey + ((size_t)n * (size_t)s->height + (size_t)y) * (size_t)s->width +
                       (size_t)x0,
                   grey, (size_t)(x1 - x0));
}

/* Pixels of layers [n0, n1) whose centre lies within r px of (cx, cy). */
static inline void stage_disc(stage *s, double cx, double cy, double r, int n0, int n1,
                              uint8_t grey)
{
    for (int y = 0; y < s->height; y++)
        for (int x = 0; x < s->width; x++)
            if (hypot(x + 0.5 - cx, y + 0.5 - cy) <= r)
                stage_box(s, x, y, n0, x + 1, y + 1, n1, grey);
}

/* A layer as a picture: rows of equal length, '.' dark, anything else as in `lit` full. */
static inline void stage_picture(stage *s, int n, const char *const *rows, const char *lit)
{
    for (int y = 0; y < s->height; y++)
        for (int x = 0; x < s->width; x++)
            stage_box(s, x, y, n, x + 1, y + 1, n + 1, strchr(lit, rows[y][x]) != NULL ? 255 : 0);
}

static inline bool stage_at(const stage *s, int x, int y, int n)
{
    return s->grey[((size_t)n * (size_t)s->height + (size_t)y) * (size_t)s->width + (size_t)x] >=
           128;
}

/* Lights each pixel with the given chance; xorshift64* (Vigna 2016), the same everywhere. */
static inline void stage_noise(stage *s, uint64_t seed, double chance)
{
    const size_t count = (size_t)s->width * (size_t)s->height * (size_t)s->layers;
    for (size_t i = 0; i < count; i++) {
        seed ^= seed >> 12;
        seed ^= seed << 25;
        seed ^= seed >> 27;
        const uint32_t bits = (uint32_t)((seed * UINT64_C(2685821657736338717)) >> 32);
        s->grey[i] = bits < chance * 4294967296.0 ? 255 : 0;
    }
}

static inline fw_setup stage_setup(const stage *s)
{
    return fw_setup_make(&s->job, s->width, s->height, s->layers, 0, 255);
}

static inline fw_greys stage_layer(const stage *s, int32_t n)
{
    fw_greys out = {0};
    assert_int_equal(fw_greys_begin(&out, s->width, s->height, 255, NULL), FW_OK);
    for (int32_t y = 0; y < s->height; y++)
        for (int32_t x = 0; x < s->width; x++)
            assert_int_equal(
                fw_greys_push(
                    &out, y, x, x + 1,
                    s->grey[((size_t)n * (size_t)s->height + (size_t)y) * (size_t)s->width +
                            (size_t)x],
                    NULL),
                FW_OK);
    fw_greys_finish(&out);
    return out;
}

/* A vertical post of the smallest size under (x, y) mm, and its pixels: full where its disc covers
 * the pixel's centre. */
static inline void stage_post(stage *s, double x_mm, double y_mm, int32_t tip_layer, bool draw)
{
    s->posts.item = realloc(s->posts.item, (s->posts.count + 1) * sizeof *s->posts.item);
    assert_non_null(s->posts.item);
    fw_post post = {.id = (int32_t)s->posts.count,
                    .routed = true,
                    .tip_layer = tip_layer,
                    .bite_layers = 1,
                    .point_count = 2,
                    .path = {{x_mm, y_mm, tip_layer * 0.1}, {x_mm, y_mm, 0}},
                    .tip_mm = 0.6,
                    .neck_mm = 1.0,
                    .shaft_mm = 0.8,
                    .foot_mm = 1.2};
    s->posts.item[s->posts.count++] = post;
    for (int32_t n = 0; draw && n < tip_layer; n++) {
        const double z = (n + 0.5) * 0.1, up = tip_layer * 0.1 - z;
        double d = up < 1.0 ? 0.6 + 0.2 * up : 0.8;
        if (z < 0.2)
            d = 1.2 - 2 * z;
        for (int y = 0; y < s->height; y++)
            for (int x = 0; x < s->width; x++)
                if (hypot((x + 0.5) * 0.1 - x_mm, (y + 0.5) * 0.1 - y_mm) <= d / 2)
                    stage_box(s, x, y, n, x + 1, y + 1, n + 1, 255);
    }
}

/* Draws all posts as they would be written, rims in grey where the stack has more than two levels.
 */
static inline void stage_stamp(stage *s, bool two_level)
{
    const fw_setup setup = stage_setup(s);
    const fw_screen screen = {.width = s->width,
                              .height = s->height,
                              .px_mm = setup.px_mm,
                              .py_mm = setup.py_mm,
                              .full = 255,
                              .brightest = 255,
                              .two_level = two_level};
    fw_stamp_plan *plan = NULL;
    assert_int_equal(fw_stamp_plan_make(&s->posts, &screen, setup.t_mm, &plan, NULL), FW_OK);
    for (int32_t n = 0; n < s->layers; n++) {
        fw_greys in = stage_layer(s, n), out = {0};
        bool touched = false;
        assert_int_equal(fw_stamp_layer(plan, n, &in, &out, &touched, NULL), FW_OK);
        for (int32_t y = 0; y < s->height; y++)
            for (int32_t x = 0; x < s->width; x++)
                stage_box(s, x, y, n, x + 1, y + 1, n + 1, (uint8_t)fw_greys_at(&out, x, y));
        fw_greys_free(&in);
        fw_greys_free(&out);
    }
    fw_stamp_plan_free(plan);
}

/* A layer cut into runs and regions, as the judge sees it. */
static inline fw_slice stage_slice(const stage *s, int32_t n)
{
    const fw_setup setup = stage_setup(s);
    fw_greys greys = stage_layer(s, n);
    fw_slice slice = {0};
    assert_int_equal(fw_slice_build(&greys, setup.intended_least, setup.solid_least, &slice, NULL),
                     FW_OK);
    fw_greys_free(&greys);
    return slice;
}

static inline fw_report stage_judge(const stage *s)
{
    fw_fault fault = {0};
    fw_budget budget = {.holder = "memo", .limit = s->memo_off ? 0 : 16u << 20};
    fw_film_memo *memo = NULL;
    fw_judge *judge = NULL;
    fw_report report = {0};
    assert_int_equal(fw_film_memo_create(&budget, &memo, NULL), FW_OK);
    const fw_judge_input input = {.job = &s->job,
                                  .width = s->width,
                                  .height = s->height,
                                  .layers = s->layers,
                                  .full = 255,
                                  .posts = s->posts.count > 0 ? &s->posts : NULL,
                                  .memo = memo};
    assert_int_equal(fw_judge_new(&input, &judge, &fault), FW_OK);
    for (int32_t first = 0; first < s->layers; first += s->batch) {
        fw_greys layer[64];
        const fw_greys *order[64];
        const int32_t count = s->layers - first < s->batch ? s->layers - first : s->batch;
        for (int32_t i = 0; i < count; i++) {
            layer[i] = stage_layer(s, first + i);
            order[i] = &layer[i];
        }
        if (fw_judge_layers(judge, order, count, &fault) != FW_OK)
            fail_msg("%s", fault.text);
        for (int32_t i = 0; i < count; i++)
            fw_greys_free(&layer[i]);
    }
    assert_int_equal(fw_judge_finish(judge, &report, &fault), FW_OK);
    fw_judge_free(judge);
    fw_film_memo_free(memo);
    return report;
}

static inline void stage_free(stage *s)
{
    free(s->grey);
    free(s->posts.item);
}

static inline void assert_near(double got, double expected, double relative)
{
    if (!(fabs(got - expected) <= relative * fabs(expected)))
        fail_msg("got %.10g, expected %.10g, off by %.3g, allowed %.3g", got, expected,
                 got / expected - 1, relative);
}

/* The finding of a kind, or NULL. */
static inline const fw_finding *finding_of(const fw_report *report, fw_kind kind)
{
    for (size_t i = 0; i < report->findings.count; i++)
        if (report->findings.item[i].kind == kind)
            return &report->findings.item[i];
    return NULL;
}

#endif
