/* Shares of a load among anchors: published pile groups, beam formulas, statics, and what must be
 * refused. */
#include "physics/group.h"

#include "physics/beam.h"
#include "physics/near.h"
#include "posts/dice.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <string.h>

#include <cmocka.h>

static const double pi = 3.14159265358979323846;
static const double origin[3] = {0.0, 0.0, 0.0};

enum { MANY = 12 };

/* Upright, stiff along z; sideways as given; no resistance to turning. */
static fw_anchor_stiffness pin(double x, double y, double axial, double sideways)
{
    fw_anchor_stiffness a = {.at = {x, y, 0.0}};
    a.k.m[0][0] = a.k.m[1][1] = sideways;
    a.k.m[2][2] = axial;
    return a;
}

typedef struct pile_group {
    int count;
    double at[6][2], k[6];
    double load, load_at[2];
    double want[6];
} pile_group;

static const pile_group groups[] = {
    /* 100 t at (2, 1) ft: 25 +- 16.667 +- 12.5, a worked example of a public thread */
    {4,
     {{3, 2}, {3, -2}, {-3, 2}, {-3, -2}},
     {1, 1, 1, 1},
     100,
     {2, 1},
     {54 + 1 / 6., 29 + 1 / 6., 20 + 5 / 6., -4 - 1 / 6.}},
    /* a published sheet, mm and kN; with the coupling sum x y = 19573, which the sheet leaves out
     */
    {4,
     {{-376, 393}, {376, 437}, {370, -339}, {-336, -385}},
     {1, 1, 1, 1},
     1693,
     {0, 0},
     {405.7534, 384.2240, 441.2332, 461.7894}},
    /* the rest: derived here; the first has sum x y != 0, where F/n + M x / sum x^2 is wrong */
    {5,
     {{0, 0}, {10, 0}, {20, 0}, {0, 10}, {0, 20}},
     {1, 1, 1, 1, 1},
     50,
     {5, 12},
     {-0.714286, 4.714286, 10.142857, 11.714286, 24.142857}},
    {4,
     {{0, 0}, {10, 0}, {10, 10}, {0, 10}},
     {1, 1, 2, 2},
     20,
     {6, 5},
     {13 / 3., 17 / 3., 19 / 3., 11 / 3.}},
    {3, {{0, 0}, {10, 0}, {0, 10}}, {1, 7, 0.01}, 12, {4, 3}, {3.6, 4.8, 3.6}},
    {6,
     {{-3, 0}, {-1, 0}, {1, 0}, {3, 0}, {0, 1}, {0, -1}},
     {1, 1, 1, 1, 1, 1},
     60,
     {1, 0},
     {1, 7, 13, 19, 10, 10}},
};

/* A force F along z at x, y: the wrench at the origin. */
static void force_at(double force, const double at[2], double load[6])
{
    const double w[6] = {0, 0, force, at[1] * force, -at[0] * force, 0};
    memcpy(load, w, sizeof w);
}

/* The axial limit: no anchor resists turning, and how it resists sliding plays no part. */
static void test_pile_groups(void **state)
{
    (void)state;
    const double sideways[] = {1e-3, 1.0, 50.0};
    for (size_t g = 0; g < sizeof groups / sizeof *groups; g++) {
        for (int s = 0; s < 3; s++) {
            const pile_group *p = &groups[g];
            fw_anchor_stiffness anchor[MANY];
            double load[6], force[MANY][6], sum[3] = {0};
            for (int i = 0; i < p->count; i++)
                anchor[i] = pin(p->at[i][0], p->at[i][1], p->k[i], sideways[s]);
            force_at(p->load, p->load_at, load);
            assert_int_equal(fw_group_share(anchor, (size_t)p->count, origin, load, force, NULL),
                             FW_OK);
            for (int i = 0; i < p->count; i++) {
                assert_near(force[i][2], p->want[i], 1e-6);
                sum[0] += force[i][2];
                sum[1] += force[i][2] * p->at[i][0];
                sum[2] += force[i][2] * p->at[i][1];
            }
            assert_near(sum[0], p->load, 1e-12);
            assert_within(sum[1], p->load * p->load_at[0], p->load * 400, 1e-12);
            assert_within(sum[2], p->load * p->load_at[1], p->load * 400, 1e-12);
        }
    }
}

static void assert_free(const fw_anchor_stiffness *anchor, size_t count, const double at[3],
                        const char *direction)
{
    const double load[6] = {0, 0, 1, 0, 0, 0};
    double force[MANY][6];
    memset(force, 0, sizeof force);
    fw_fault fault = {0};
    assert_int_equal(fw_group_share(anchor, count, at, load, force, &fault), FW_INPUT);
    if (strstr(fault.text, direction) == NULL)
        fail_msg("got \"%s\", want \"%s\"", fault.text, direction);
    for (size_t i = 0; i < count; i++)
        for (int j = 0; j < 6; j++)
            assert_true(isnan(force[i][j]));
}

/* An error, and no numbers, however the free direction lies to the axes. */
static void test_free_bodies(void **state)
{
    (void)state;
    const double away[3] = {57.0, -31.0, 12.0};
    fw_anchor_stiffness a[3] = {{{0}, {{{0}}}}};
    assert_free(a, 0, origin, "slide along x");
    a[0] = pin(0, 0, 1, 0); /* one post, axial only */
    assert_free(a, 1, origin, "slide along x");
    a[0] = pin(3, 4, 1, 1); /* one ball joint */
    assert_free(a, 1, origin, "turn about");
    assert_free(a, 1, away, "turn about");
    const double along[][2] = {{1, 0}, {0, 1}, {1, 1}, {0.3, -0.7}, {1, 1e-9}};
    const double shift[][2] = {{0, 0}, {0, 7.1}, {-3.3, 40.7}};
    for (int l = 0; l < 5; l++) {
        for (int s = 0; s < 3; s++) { /* ball joints on a line */
            for (int i = 0; i < 3; i++)
                a[i] = pin(shift[s][0] + 2.7 * i * along[l][0], shift[s][1] + 2.7 * i * along[l][1],
                           1.0 + i, 1.0);
            assert_free(a, 3, origin, "turn about");
            assert_free(a, 3, away, "turn about");
            for (int i = 0; i < 3; i++) /* axial only */
                a[i].k.m[0][0] = a[i].k.m[1][1] = 0.0;
            assert_free(a, 3, origin, "slide along x");
        }
    }
    for (int i = 0; i < 3; i++) /* on a line but for rounding, seen from that line */
        a[i] = pin(2.7 * i, i == 1 ? 1e-16 : 0.0, 1.0, 1.0);
    assert_free(a, 3, origin, "turn about x");
    a[1].at[1] = 1.0; /* three that are not on a line hold */
    const double load[6] = {0, 0, 1, 0, 0, 0};
    double force[3][6];
    assert_int_equal(fw_group_share(a, 3, origin, load, force, NULL), FW_OK);
    for (int i = 0; i < 3; i++)
        a[i] = pin(i, i * i, 1.0, 0.0); /* axial only, not on a line: free to slide */
    assert_free(a, 3, origin, "slide along x");
    a[0].k.m[0][0] = (double)NAN;
    assert_free(a, 3, origin, "slide along x");
}

static const fw_beam_material green = {.e_MPa = 500.0, .g_MPa = 500.0 / 2.8};

static fw_anchor_stiffness post(const fw_beam_node *node, size_t count)
{
    fw_anchor_stiffness a;
    memcpy(a.at, node[0].at, sizeof a.at);
    assert_int_equal(fw_beam_stiffness(node, count, green, &a.k, NULL), FW_OK);
    return a;
}

/* One leaning cantilever: it takes all, and the tip moves as the handbook's beam, turned. */
static void test_one_leaning_post(void **state)
{
    (void)state;
    double length = 10.0, lean = 0.5, area = pi / 4.0, inertia = pi / 64.0;
    const fw_beam_node node[] = {{{length * sin(lean), 0, length * cos(lean)}, 1}, {{0, 0, 0}, 1}};
    fw_anchor_stiffness a = post(node, 2);
    fw_group group;
    fw_group_begin(&group, a.at);
    fw_group_add(&group, &a);
    assert_int_equal(fw_group_factor(&group, NULL), FW_OK);
    const double load[6] = {0, 0, 2};
    double motion[6], force[1][6];
    assert_int_equal(fw_group_motion(&group, load, motion, NULL), FW_OK);
    double bend = length * length * length / (3.0 * 500.0 * inertia),
           pull = length / (500.0 * area);
    assert_near(motion[2], 2.0 * (pull * pow(cos(lean), 2) + bend * pow(sin(lean), 2)), 1e-10);
    assert_near(motion[0], 2.0 * (pull - bend) * sin(lean) * cos(lean), 1e-10);
    /* pulled up, a post that leans to +x turns its tip toward -x: about -y */
    assert_near(motion[4], -2.0 * sin(lean) * length * length / (2.0 * 500.0 * inertia), 1e-10);
    assert_int_equal(fw_group_solve(&group, &a, 1, load, force, NULL), FW_OK);
    for (int i = 0; i < 6; i++)
        assert_within(force[0][i], load[i], i < 3 ? 2.0 : 20.0, 1e-10);
}

/* Two posts that lean against each other under one point: by symmetry it only sinks, so each takes
 * half, by E A / L along and 12 E I / L^3 across its axis, with the moment 6 E I / L^2. */
static void test_trestle(void **state)
{
    (void)state;
    double length = 10.0, lean = 0.4, ea = 500.0 * pi / 4.0, ei = 500.0 * pi / 64.0;
    double x = length * sin(lean), z = length * cos(lean);
    const fw_beam_node left[] = {{{0, 0, z}, 1}, {{-x, 0, 0}, 1}};
    const fw_beam_node right[] = {{{0, 0, z}, 1}, {{x, 0, 0}, 1}};
    const fw_anchor_stiffness a[] = {post(left, 2), post(right, 2)};
    const double load[6] = {0, 0, 6}, at[3] = {1.5, -2.0, 0.3};
    double there[6], force[2][6];
    fw_six_move_wrench(a[0].at, at, load, there);
    assert_int_equal(fw_group_share(a, 2, at, there, force, NULL), FW_OK);
    double along = ea / length, across = 12.0 * ei / pow(length, 3);
    double rise = 3.0 / (along * pow(cos(lean), 2) + across * pow(sin(lean), 2));
    assert_near(force[0][2], 3.0, 1e-9);
    assert_near(force[0][0], rise * (along - across) * sin(lean) * cos(lean), 1e-9);
    assert_near(force[0][4], rise * sin(lean) * 6.0 * ei / (length * length), 1e-8);
    assert_near(force[1][0], -force[0][0], 1e-9);
    assert_near(force[1][4], -force[0][4], 1e-8);
}

static fw_anchor_stiffness random_post(dice *d)
{
    fw_beam_node node[3];
    for (int i = 0; i < 3; i++) {
        node[i].d_mm = dice_between(d, 0.3, 2.0);
        for (int j = 0; j < 2; j++)
            node[i].at[j] =
                i > 0 ? node[i - 1].at[j] + dice_between(d, -2.0, 2.0) : dice_between(d, 0.0, 60.0);
        node[i].at[2] = i > 0 ? node[i - 1].at[2] - dice_between(d, 0.5, 4.0) : 10.0;
    }
    return post(node, 3);
}

static size_t random_group(dice *d, fw_anchor_stiffness anchor[MANY])
{
    size_t count = 1 + (size_t)dice_below(d, MANY);
    for (size_t i = 0; i < count; i++)
        anchor[i] = random_post(d);
    if (count > 1 && dice_below(d, 3) == 0) {
        const fw_patch patch = {.at = {30, 20, 0},
                                .area_mm2 = 50,
                                .ixx_mm4 = 300,
                                .iyy_mm4 = 150,
                                .ixy_mm4 = dice_between(d, -100, 100)};
        assert_int_equal(fw_group_patch(&patch, 1e4, 4e3, &anchor[0], NULL), FW_OK);
    }
    return count;
}

static void random_load(dice *d, double load[6])
{
    for (int i = 0; i < 6; i++)
        load[i] = dice_between(d, -1.0, 1.0) * (i < 3 ? 1.0 : 20.0);
}

/* Forces add up to the load; the point that the group refers to plays no part; two loads at once
 * are the sum of each; what a load a moves along b, b moves along a. */
static void test_random_groups(void **state)
{
    (void)state;
    dice d = {.seed = 11};
    for (int round = 0; round < 300; round++) {
        fw_anchor_stiffness anchor[MANY];
        size_t count = random_group(&d, anchor);
        const double at[3] = {30, 20, 10}, other[3] = {-15, 70, 25};
        double a[6], b[6], both[6], moved[6], motion_a[6], motion_b[6], sum[6] = {0}, ab = 0,
                                                                        ba = 0;
        double force[MANY][6], again[MANY][6], of_b[MANY][6], of_both[MANY][6], most = 0.0;
        random_load(&d, a);
        random_load(&d, b);
        fw_group group;
        fw_group_begin(&group, at);
        for (size_t i = 0; i < count; i++)
            fw_group_add(&group, &anchor[i]);
        assert_int_equal(fw_group_factor(&group, NULL), FW_OK);
        for (int i = 0; i < 6; i++)
            both[i] = a[i] + b[i];
        assert_int_equal(fw_group_solve(&group, anchor, count, a, force, NULL), FW_OK);
        assert_int_equal(fw_group_solve(&group, anchor, count, b, of_b, NULL), FW_OK);
        assert_int_equal(fw_group_solve(&group, anchor, count, both, of_both, NULL), FW_OK);
        fw_six_move_wrench(at, other, a, moved);
        assert_int_equal(fw_group_share(anchor, count, other, moved, again, NULL), FW_OK);
        for (size_t i = 0; i < count; i++)
            for (int j = 0; j < 6; j++)
                most = fmax(most, fmax(fabs(force[i][j]), fabs(of_b[i][j])));
        for (size_t i = 0; i < count; i++) {
            double there[6];
            fw_six_move_wrench(anchor[i].at, at, force[i], there);
            for (int j = 0; j < 6; j++) {
                sum[j] += there[j];
                assert_within(of_both[i][j], force[i][j] + of_b[i][j], most, 1e-9);
                assert_within(again[i][j], force[i][j], most, 1e-8);
            }
        }
        for (int j = 0; j < 6; j++)
            assert_within(sum[j], a[j], most, 1e-9);
        assert_int_equal(fw_group_motion(&group, a, motion_a, NULL), FW_OK);
        assert_int_equal(fw_group_motion(&group, b, motion_b, NULL), FW_OK);
        for (int j = 0; j < 6; j++) {
            ab += a[j] * motion_b[j];
            ba += b[j] * motion_a[j];
        }
        double scale = 0.0;
        for (int j = 0; j < 6; j++)
            scale += fabs(a[j] * motion_b[j]) + fabs(b[j] * motion_a[j]);
        assert_within(ab, ba, scale, 1e-9);
    }
}

/* One force or one moment right at an anchor, where other rows hold nothing but rounding; no load.
 */
static void test_single_components(void **state)
{
    (void)state;
    dice d = {.seed = 14};
    for (int round = 0; round < 100; round++) {
        fw_anchor_stiffness anchor[MANY];
        size_t count = random_group(&d, anchor);
        for (int row = 0; row <= 6; row++) {
            double load[6] = {0}, force[MANY][6];
            if (row < 6)
                load[row] = 1.0;
            assert_int_equal(fw_group_share(anchor, count, anchor[0].at, load, force, NULL), FW_OK);
            assert_true(row < 6 || force[0][2] == 0.0);
        }
    }
}

/* The shares are those of least energy: any other split that still adds up stores more. */
static void test_least_energy(void **state)
{
    (void)state;
    dice d = {.seed = 12};
    for (int round = 0; round < 200; round++) {
        fw_anchor_stiffness anchor[2] = {random_post(&d), random_post(&d)};
        const double at[3] = {30, 20, 10};
        double load[6], force[2][6], change[6], energy[3];
        random_load(&d, load);
        assert_int_equal(fw_group_share(anchor, 2, at, load, force, NULL), FW_OK);
        random_load(&d, change);
        for (int way = 0; way < 3; way++) { /* as found, and a little more or less on the first */
            energy[way] = 0.0;
            for (int i = 0; i < 2; i++) {
                double w[6], extra[6], motion[6];
                fw_six f;
                assert_true(fw_six_invert(&anchor[i].k, &f));
                fw_six_move_wrench(anchor[0].at, anchor[i].at, change, extra);
                for (int j = 0; j < 6; j++)
                    w[j] = force[i][j] + 0.3 *
                                             (way == 0   ? 0
                                              : way == 1 ? 1
                                                         : -1) *
                                             (i == 0 ? extra[j] : -extra[j]);
                fw_six_apply(&f, w, motion);
                for (int j = 0; j < 6; j++)
                    energy[way] += 0.5 * w[j] * motion[j];
            }
        }
        assert_true(energy[0] < energy[1] && energy[0] < energy[2]);
        /* stationary: what more adds and less adds is the same, the energy of the change */
        assert_within(energy[1], energy[2], energy[1], 1e-7);
    }
}

/* A rectangle 6 x 4 on springs: pressure F/A + M y / I at its corner, integrated; and its twist. */
static void test_patch(void **state)
{
    (void)state;
    const fw_patch patch = {.at = {1, 2, 0}, .area_mm2 = 24, .ixx_mm4 = 32, .iyy_mm4 = 72};
    fw_anchor_stiffness a;
    assert_int_equal(fw_group_patch(&patch, 100.0, 40.0, &a, NULL), FW_OK);
    const double u[6] = {0.1, 0.2, 0.3, 0.01, 0.02, 0.03};
    double force[6], want[6] = {0};
    fw_six_apply(&a.k, u, force);
    enum { N = 200 }; /* midpoint rule: exact for the linear, (1 - 1/N^2) for the square */
    for (int i = 0; i < N; i++) {
        for (int j = 0; j < N; j++) {
            double x = 6.0 * ((i + 0.5) / N - 0.5), y = 4.0 * ((j + 0.5) / N - 0.5);
            double cell = 24.0 / N / N;
            double fx = 40.0 * cell * (u[0] - u[5] * y), fy = 40.0 * cell * (u[1] + u[5] * x);
            double fz = 100.0 * cell * (u[2] + u[3] * y - u[4] * x);
            const double w[6] = {fx, fy, fz, y * fz, -x * fz, x * fy - y * fx};
            for (int k = 0; k < 6; k++)
                want[k] += w[k];
        }
    }
    for (int k = 0; k < 6; k++)
        assert_near(force[k], want[k], 5e-5);
    /* x -> x + y / 2: Iyy = 72 + 8, Ixy = 16 */
    fw_patch skewed = {.area_mm2 = 24, .ixx_mm4 = 32, .iyy_mm4 = 80, .ixy_mm4 = 16};
    assert_int_equal(fw_group_patch(&skewed, 100.0, 40.0, &a, NULL), FW_OK);
    fw_six_apply(&a.k, u, force);
    /* lift 0.01 y - 0.02 x: moments 100 (0.01 Ixx - 0.02 Ixy), 100 (-0.01 Ixy + 0.02 Iyy) */
    assert_near(force[3], 100.0 * (0.01 * 32 - 0.02 * 16) + 0.0, 1e-12);
    assert_near(force[4], 100.0 * (0.02 * 80 - 0.01 * 16), 1e-12);
    const double bad[] = {0.0, -1.0, (double)NAN, (double)INFINITY};
    fw_fault fault;
    for (int i = 0; i < 4; i++) {
        assert_int_equal(fw_group_patch(&patch, bad[i], 1.0, &a, &fault), FW_INPUT);
        assert_int_equal(fw_group_patch(&patch, 1.0, bad[i], &a, &fault), FW_INPUT);
        fw_patch wrong = patch;
        wrong.area_mm2 = bad[i];
        assert_int_equal(fw_group_patch(&wrong, 1.0, 1.0, &a, &fault), FW_INPUT);
    }
    skewed.ixy_mm4 = 51.0; /* more than sqrt(32 * 80) */
    assert_int_equal(fw_group_patch(&skewed, 1.0, 1.0, &a, &fault), FW_INPUT);
}

/* A group must be factored after the last anchor, and asked about its own anchors. */
static void test_misuse(void **state)
{
    (void)state;
    dice d = {.seed = 13};
    fw_anchor_stiffness a[2] = {random_post(&d), random_post(&d)};
    fw_group group;
    fw_group_begin(&group, origin);
    fw_group_add(&group, &a[0]);
    double force[2][6], motion[6];
    double load[6] = {0, 0, 1, 0, 0, 0};
    fw_fault fault = {0};
    assert_int_equal(fw_group_motion(&group, load, motion, &fault), FW_INPUT);
    assert_int_equal(fw_group_factor(&group, NULL), FW_OK);
    fw_group_add(&group, &a[1]);
    assert_int_equal(fw_group_solve(&group, a, 2, load, force, &fault), FW_INPUT);
    assert_non_null(strstr(fault.text, "factor"));
    assert_int_equal(fw_group_factor(&group, NULL), FW_OK);
    assert_int_equal(fw_group_solve(&group, a, 2, load, force, NULL), FW_OK);
    assert_int_equal(fw_group_solve(&group, a, 1, load, force, &fault), FW_INPUT);
    assert_non_null(strstr(fault.text, "add up"));
    assert_true(isnan(force[0][2]));
    load[1] = (double)NAN;
    assert_int_equal(fw_group_solve(&group, a, 2, load, force, &fault), FW_INPUT);
    load[1] = 0.0;
    a[1].k.m[0][1] += 0.5 * a[1].k.m[0][0]; /* not symmetric: seen, or the shares would be wrong */
    assert_int_equal(fw_group_share(a, 2, origin, load, force, &fault), FW_INPUT);
    assert_true(isnan(force[1][2]));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_pile_groups),      cmocka_unit_test(test_free_bodies),
        cmocka_unit_test(test_one_leaning_post), cmocka_unit_test(test_trestle),
        cmocka_unit_test(test_random_groups),    cmocka_unit_test(test_single_components),
        cmocka_unit_test(test_least_energy),     cmocka_unit_test(test_patch),
        cmocka_unit_test(test_misuse),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
