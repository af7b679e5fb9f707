/* Beams: handbook cantilevers, frusta, chains; flexibility against the integral of virtual work,
 * done by another rule; the peak stress against a dense walk along the chain. */
#include "physics/beam.h"

#include "physics/near.h"
#include "posts/dice.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <string.h>

#include <cmocka.h>

static const double pi = 3.14159265358979323846;
static const fw_beam_material green = {.e_MPa = 500.0, .g_MPa = 500.0 / 2.8};

static fw_beam_node node_of(double x, double y, double z, double d)
{
    return (fw_beam_node){.at = {x, y, z}, .d_mm = d};
}

static fw_six flexibility_of(const fw_beam_node *node, size_t count)
{
    fw_six f;
    assert_int_equal(fw_beam_flexibility(node, count, green, &f, NULL), FW_OK);
    return f;
}

static fw_six stiffness_of(const fw_beam_node *node, size_t count)
{
    fw_six k;
    assert_int_equal(fw_beam_stiffness(node, count, green, &k, NULL), FW_OK);
    return k;
}

/* Entry by entry, each against the size of its row and column. */
static void assert_same(const fw_six *got, const fw_six *want, double tolerance)
{
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < 6; j++)
            assert_within(got->m[i][j], want->m[i][j], sqrt(want->m[i][i] * want->m[j][j]),
                          tolerance);
}

/* Round cantilever, d = 1, L = 10, F = 1, E = 500: 101.85916 MPa, 13.581222 mm (handbook). */
static void test_cantilever(void **state)
{
    (void)state;
    const fw_beam_node post[] = {node_of(0, 0, 10, 1), node_of(0, 0, 0, 1)};
    fw_six f = flexibility_of(post, 2);
    assert_near(f.m[0][0], 13.581222, 1e-7);
    assert_near(f.m[1][1], 13.581222, 1e-7);
    const double load[6] = {1.0};
    fw_beam_section peak;
    assert_int_equal(fw_beam_peak(post, 2, load, &peak, NULL), FW_OK);
    assert_near(peak.peak_MPa, 101.85916, 1e-7);
    assert_near(peak.m_Nmm, 10.0, 1e-14);
    assert_true(peak.share == 1.0 && peak.piece == 0 && peak.v_N == 1.0 && peak.n_N == 0.0);
}

/* Tip 1, root 2, L = E = F = 1: 0.84882636 (handbook; derived here too). */
static void test_tapered_cantilever(void **state)
{
    (void)state;
    const fw_beam_node post[] = {node_of(0, 0, 1, 1), node_of(0, 0, 0, 2)};
    fw_six f;
    assert_int_equal(fw_beam_flexibility(post, 2, fw_beam_isotropic(1.0, 0.4), &f, NULL), FW_OK);
    assert_near(f.m[0][0], 0.84882636, 1e-8);
    assert_near(f.m[0][0], 64.0 / (3.0 * pi * 8.0), 1e-14);
    assert_near(f.m[2][2], 4.0 / (pi * 2.0), 1e-14);
}

/* The stress of a cone under a side force is largest where d = 1.5 d1, when the root is thicker. */
static void test_peak_inside_span(void **state)
{
    (void)state;
    const double roots[] = {1.6, 2.0, 3.0, 10.0}, d1 = 1.0, length = 7.0, force = 3.0;
    for (int i = 0; i < 4; i++) {
        double rise = roots[i] - d1;
        const fw_beam_node post[] = {node_of(0, 0, length, d1), node_of(0, 0, 0, roots[i])};
        const double load[6] = {0.0, force};
        fw_beam_section peak;
        assert_int_equal(fw_beam_peak(post, 2, load, &peak, NULL), FW_OK);
        assert_near(peak.peak_MPa, 128.0 * force * length / (27.0 * pi * d1 * d1 * rise), 1e-12);
        assert_near(peak.share, d1 / (2.0 * rise), 1e-7);
        assert_near(peak.d_mm, 1.5 * d1, 1e-7);
        assert_near(peak.at[2], length - length * d1 / (2.0 * rise), 1e-7);
    }
    const fw_beam_node blunt[] = {node_of(0, 0, length, d1), node_of(0, 0, 0, 1.4)};
    const double load[6] = {0.0, force};
    fw_beam_section peak;
    assert_int_equal(fw_beam_peak(blunt, 2, load, &peak, NULL), FW_OK);
    assert_true(peak.share == 1.0);
    assert_near(peak.peak_MPa, 32.0 * force * length / (pi * 1.4 * 1.4 * 1.4), 1e-13);
}

/* k = pi E d1 d2 / (4 L), also upside down; twist of a uniform bar G Ip / L. */
static void test_axial_and_twist(void **state)
{
    (void)state;
    const fw_beam_node cone[] = {node_of(0, 0, 9, 0.4), node_of(0, 0, 0, 1.3)};
    const fw_beam_node bar[] = {node_of(0, 0, 9, 1.3), node_of(0, 0, 0, 1.3)};
    assert_near(stiffness_of(cone, 2).m[2][2], pi * 500.0 * 0.4 * 1.3 / 36.0, 1e-13);
    assert_near(stiffness_of(bar, 2).m[5][5], 500.0 / 2.8 * pi * pow(1.3, 4.0) / 32.0 / 9.0, 1e-13);
    /* cone: integral of 1 / d^4 = L (1/d1^3 - 1/d2^3) / (3 (d2 - d1)) */
    double turn = 32.0 / (pi * 500.0 / 2.8) * 9.0 / 2.7 * (pow(0.4, -3.0) - pow(1.3, -3.0));
    assert_near(stiffness_of(cone, 2).m[5][5], 1.0 / turn, 1e-13);
}

/* Uniform bar along -x from tip to root: 12, 6, 4 E I over L^3, L^2, L, signs included. */
static void test_uniform_stiffness(void **state)
{
    (void)state;
    const fw_beam_node bar[] = {node_of(5, 0, 0, 0.8), node_of(0, 0, 0, 0.8)};
    fw_six k = stiffness_of(bar, 2);
    double ei = 500.0 * pi * pow(0.8, 4.0) / 64.0;
    assert_near(k.m[0][0], 500.0 * pi * 0.16 / 5.0, 1e-12);
    for (int i = 1; i < 3; i++)
        assert_near(k.m[i][i], 12.0 * ei / 125.0, 1e-12);
    for (int i = 4; i < 6; i++)
        assert_near(k.m[i][i], 4.0 * ei / 5.0, 1e-12);
    assert_near(k.m[1][5], -6.0 * ei / 25.0, 1e-12);
    assert_near(k.m[2][4], 6.0 * ei / 25.0, 1e-12);
    assert_true(k.m[1][4] == 0.0 && k.m[2][5] == 0.0 && k.m[0][1] == 0.0);
}

/* A random rotation from a random unit quaternion. */
static void rotation_of(dice *d, double r[3][3])
{
    double q[4], square = 0.0;
    do {
        square = 0.0;
        for (int i = 0; i < 4; i++) {
            q[i] = dice_between(d, -1.0, 1.0);
            square += q[i] * q[i];
        }
    } while (square < 0.1 || square > 1.0);
    for (int i = 0; i < 4; i++)
        q[i] /= sqrt(square);
    for (int i = 0; i < 3; i++) {
        int j = (i + 1) % 3, k = (i + 2) % 3;
        r[i][i] = 1.0 - 2.0 * (q[j] * q[j] + q[k] * q[k]);
        r[i][j] = 2.0 * (q[i] * q[j] - q[k] * q[3]);
        r[j][i] = 2.0 * (q[i] * q[j] + q[k] * q[3]);
    }
}

static void turn(double r[3][3], const double in[3], double out[3])
{
    for (int i = 0; i < 3; i++)
        out[i] = r[i][0] * in[0] + r[i][1] * in[1] + r[i][2] * in[2];
}

/* R A R^T on the four blocks. */
static void turn_six(double r[3][3], const fw_six *in, fw_six *out)
{
    memset(out, 0, sizeof *out);
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < 6; j++)
            for (int k = 0; k < 3; k++)
                for (int l = 0; l < 3; l++)
                    out->m[i][j] += r[i % 3][k] * r[j % 3][l] * in->m[i / 3 * 3 + k][j / 3 * 3 + l];
}

/* A leaning post is the upright one, turned. */
static void test_leaning_post(void **state)
{
    (void)state;
    dice d = {.seed = 5};
    for (int round = 0; round < 200; round++) {
        double r[3][3];
        rotation_of(&d, r);
        const fw_beam_node upright[] = {node_of(0, 0, 12, dice_between(&d, 0.2, 2.0)),
                                        node_of(0, 0, 0, dice_between(&d, 0.2, 2.0))};
        fw_beam_node leaning[2] = {upright[0], upright[1]};
        for (int i = 0; i < 2; i++)
            turn(r, upright[i].at, leaning[i].at);
        fw_six f = flexibility_of(upright, 2), k = stiffness_of(upright, 2), want;
        fw_six f_leaning = flexibility_of(leaning, 2), k_leaning = stiffness_of(leaning, 2);
        turn_six(r, &f, &want);
        assert_same(&f_leaning, &want, 1e-13);
        turn_six(r, &k, &want);
        assert_same(&k_leaning, &want, 1e-9);
    }
}

enum { NODES = 6 };

/* A post as they are routed: mostly downward, with bends and sometimes a step in diameter. */
static size_t random_post(dice *d, fw_beam_node node[NODES])
{
    size_t count = 2 + (size_t)dice_below(d, NODES - 1);
    for (size_t i = 0; i < count; i++) {
        node[i].d_mm = dice_between(d, 0.2, 2.0);
        for (int j = 0; j < 3; j++)
            node[i].at[j] = i > 0 ? node[i - 1].at[j] + dice_between(d, -3.0, j < 2 ? 3.0 : 0.0)
                                  : dice_between(d, -20.0, 20.0);
    }
    if (count > 2 && dice_below(d, 3) == 0)
        memcpy(node[1].at, node[0].at, sizeof node[0].at);
    return count;
}

static void random_load(dice *d, double load[6])
{
    for (int i = 0; i < 6; i++)
        load[i] = dice_between(d, -1.0, 1.0) * (i < 3 ? 1.0 : 4.0);
}

/* Cutting a frustum in two changes nothing. */
static void test_two_pieces(void **state)
{
    (void)state;
    dice d = {.seed = 6};
    for (int round = 0; round < 200; round++) {
        fw_beam_node whole[NODES], cut[3];
        random_post(&d, whole);
        double share = dice_between(&d, 0.0, 1.0);
        cut[0] = whole[0];
        cut[2] = whole[2 - 1];
        if (memcmp(whole[0].at, whole[1].at, sizeof whole[0].at) == 0)
            continue;
        for (int j = 0; j < 3; j++)
            cut[1].at[j] = whole[0].at[j] + share * (whole[1].at[j] - whole[0].at[j]);
        cut[1].d_mm = whole[0].d_mm + share * (whole[1].d_mm - whole[0].d_mm);
        fw_six one = flexibility_of(whole, 2), two = flexibility_of(cut, 3);
        assert_same(&two, &one, 1e-12);
    }
}

/* Two unit vectors across a unit vector. */
static void frame_of(const double e[3], double u[3], double v[3])
{
    double helper[3] = {fabs(e[0]) < 0.6, fabs(e[0]) >= 0.6, 0.0}, size = 0.0;
    for (int i = 0; i < 3; i++) {
        int j = (i + 1) % 3, k = (i + 2) % 3;
        u[i] = e[j] * helper[k] - e[k] * helper[j];
        size += u[i] * u[i];
    }
    for (int i = 0; i < 3; i++)
        u[i] /= sqrt(size);
    for (int i = 0; i < 3; i++) {
        int j = (i + 1) % 3, k = (i + 2) % 3;
        v[i] = e[j] * u[k] - e[k] * u[j];
    }
}

/* N, M about two axes across, and T at a place with axis e, for a wrench at the tip. */
static void section_forces(const double tip[3], const double at[3], const double e[3],
                           const double w[6], double out[4])
{
    double u[3], v[3], m[3], r[3] = {tip[0] - at[0], tip[1] - at[1], tip[2] - at[2]};
    frame_of(e, u, v);
    memset(out, 0, 4 * sizeof *out);
    for (int i = 0; i < 3; i++) {
        int j = (i + 1) % 3, k = (i + 2) % 3;
        m[i] = w[i + 3] + r[j] * w[k] - r[k] * w[j];
        out[0] += w[i] * e[i];
    }
    for (int i = 0; i < 3; i++) {
        out[1] += m[i] * u[i];
        out[2] += m[i] * v[i];
        out[3] += m[i] * e[i];
    }
}

/* Virtual work, integral of N n / EA + M m / EI + T t / GIp, by Simpson's rule. */
static void by_virtual_work(const fw_beam_node *node, size_t count, fw_six *f)
{
    enum { PANELS = 2000 };
    memset(f, 0, sizeof *f);
    for (size_t p = 0; p + 1 < count; p++) {
        double e[3] = {0}, length = 0.0;
        for (int i = 0; i < 3; i++)
            length += pow(node[p].at[i] - node[p + 1].at[i], 2.0);
        length = sqrt(length);
        for (int i = 0; i < 3 && length > 0.0; i++)
            e[i] = (node[p].at[i] - node[p + 1].at[i]) / length;
        for (int s = 0; s <= PANELS && length > 0.0; s++) {
            double x = (double)s / PANELS, at[3], force[6][4];
            double d = node[p].d_mm + x * (node[p + 1].d_mm - node[p].d_mm);
            double weight = length / (3.0 * PANELS) * (s % PANELS == 0 ? 1 : s % 2 == 0 ? 2 : 4);
            double ea = 500.0 * pi * d * d / 4.0, ei = 500.0 * pi * d * d * d * d / 64.0;
            double gi = 500.0 / 2.8 * pi * d * d * d * d / 32.0;
            for (int i = 0; i < 3; i++)
                at[i] = node[p].at[i] + x * (node[p + 1].at[i] - node[p].at[i]);
            for (int i = 0; i < 6; i++) {
                double unit[6] = {0};
                unit[i] = 1.0;
                section_forces(node[0].at, at, e, unit, force[i]);
            }
            for (int i = 0; i < 6; i++)
                for (int j = 0; j < 6; j++)
                    f->m[i][j] +=
                        weight * (force[i][0] * force[j][0] / ea +
                                  (force[i][1] * force[j][1] + force[i][2] * force[j][2]) / ei +
                                  force[i][3] * force[j][3] / gi);
        }
    }
}

static void test_virtual_work(void **state)
{
    (void)state;
    dice d = {.seed = 7};
    for (int round = 0; round < 30; round++) {
        fw_beam_node node[NODES];
        size_t count = random_post(&d, node);
        fw_six got = flexibility_of(node, count), want;
        by_virtual_work(node, count, &want);
        assert_same(&got, &want, 1e-8);
    }
}

/* Symmetric, positive definite, the inverse of the flexibility. */
static void test_stiffness_properties(void **state)
{
    (void)state;
    dice d = {.seed = 8};
    for (int round = 0; round < 500; round++) {
        fw_beam_node node[NODES];
        size_t count = random_post(&d, node);
        fw_six f = flexibility_of(node, count), k = stiffness_of(node, count);
        double load[6], motion[6], back[6], work = 0.0;
        random_load(&d, load);
        fw_six_apply(&f, load, motion);
        fw_six_apply(&k, motion, back);
        for (int i = 0; i < 6; i++) {
            assert_within(back[i], load[i], 10.0, 1e-8);
            work += motion[i] * load[i];
            for (int j = 0; j < 6; j++) {
                assert_true(k.m[i][j] == k.m[j][i]);
                assert_within(f.m[i][j], f.m[j][i], sqrt(f.m[i][i] * f.m[j][j]), 1e-13);
            }
        }
        assert_true(work > 0.0);
    }
}

/* A short stub on a cone, of nearly the same thickness where they meet: the peak may be inside the
 * cone, and little above that of the stub. */
static size_t stub_and_cone(dice *d, fw_beam_node node[NODES])
{
    double thin = dice_between(d, 0.3, 1.0), length = dice_between(d, 2.0, 6.0);
    node[0] = node_of(0, 0, length + dice_between(d, 0.0, 1.0), thin * dice_between(d, 0.85, 1.1));
    node[1] = node_of(0, 0, length, node[0].d_mm);
    node[2] = node_of(0, 0, length, thin);
    node[3] = node_of(dice_between(d, -2.0, 2.0), 0, 0, thin * dice_between(d, 1.5, 4.0));
    return 4;
}

/* No section of a dense walk has more stress than the peak, and the nearest has nearly as much. */
static void test_peak_of_chains(void **state)
{
    (void)state;
    enum { WALK = 2000 };
    dice d = {.seed = 9};
    int inside = 0;
    for (int round = 0; round < 400; round++) {
        fw_beam_node node[NODES];
        size_t count = random_post(&d, node);
        double load[6], most = -(double)INFINITY;
        random_load(&d, load);
        if (round % 2 == 0) {
            count = stub_and_cone(&d, node);
            for (int i = 3; i < 6; i++)
                load[i] *= 0.1;
        }
        fw_beam_section peak;
        assert_int_equal(fw_beam_peak(node, count, load, &peak, NULL), FW_OK);
        for (size_t p = 0; p + 1 < count; p++) {
            if (memcmp(node[p].at, node[p + 1].at, sizeof node[p].at) == 0)
                continue;
            for (int s = 0; s <= WALK; s++)
                most = fmax(most, fw_beam_section_at(node, p, (double)s / WALK, load).peak_MPa);
        }
        assert_true(peak.peak_MPa >= most * (1.0 - 1e-13));
        assert_within(peak.peak_MPa, most, most, 1e-4);
        inside += peak.share > 0.0 && peak.share < 1.0;
    }
    assert_in_range(inside, 40, 400);
}

/* What a section carries, in a chain of two legs with a right angle: down 4, then 3 along x. */
static void test_sections(void **state)
{
    (void)state;
    const fw_beam_node node[] = {node_of(0, 0, 4, 1), node_of(0, 0, 0, 1), node_of(3, 0, 0, 2)};
    const double load[6] = {0, 2, 5, 0, 0, 7}; /* tension 5, side force 2, torque 7 */
    fw_beam_section s = fw_beam_section_at(node, 0, 0.5, load);
    assert_near(s.n_N, 5.0, 1e-15);
    assert_near(s.v_N, 2.0, 1e-15);
    assert_near(s.m_Nmm, 4.0, 1e-15);
    assert_near(s.t_Nmm, 7.0, 1e-15);
    assert_near(s.at[2], 2.0, 1e-15);
    assert_near(s.peak_MPa, (4.0 * 5.0 + 32.0 * 4.0) / pi, 1e-14);
    /* in the lying leg at x = 1.5: lever (-1.5, 0, 4), moment (0 * 5 - 4 * 2, 1.5 * 5, 7 - 1.5 * 2)
     */
    s = fw_beam_section_at(node, 1, 0.5, load);
    assert_true(s.n_N == 0.0);
    assert_near(s.v_N, sqrt(29.0), 1e-15);
    assert_near(s.t_Nmm, 8.0, 1e-15); /* about -x, toward the tip */
    assert_near(s.m_Nmm, sqrt(7.5 * 7.5 + 16.0), 1e-15);
    assert_near(s.d_mm, 1.5, 1e-15);
    /* pushed down: all in compression, least where it is thickest */
    const fw_beam_node straight[] = {node_of(0, 0, 4, 1), node_of(0, 0, 0, 2)};
    const double push[6] = {0, 0, -1};
    fw_beam_section peak;
    assert_int_equal(fw_beam_peak(straight, 2, push, &peak, NULL), FW_OK);
    assert_near(peak.peak_MPa, -1.0 / pi, 1e-15);
    assert_true(peak.share == 1.0);
}

/* A pull next to a moment that is next to nothing, and a step: the thin end governs. */
static void test_peak_of_pull(void **state)
{
    (void)state;
    const fw_beam_node node[] = {node_of(0, 0, 9, 3), node_of(0, 0, 5, 2), node_of(0, 0, 5, 0.5),
                                 node_of(0, 0, 0, 1)};
    const double moments[] = {0.0, 1e-300, 1e-200, 1e-12};
    for (int i = 0; i < 4; i++) {
        const double load[6] = {0, 0, 2, moments[i]};
        fw_beam_section peak;
        assert_int_equal(fw_beam_peak(node, 4, load, &peak, NULL), FW_OK);
        assert_near(peak.peak_MPa, 8.0 / (pi * 0.25), 1e-10);
        assert_true(peak.piece == 2 && peak.share == 0.0);
    }
}

/* Of equal sections the one nearest the tip. */
static void test_peak_of_equals(void **state)
{
    (void)state;
    const fw_beam_node node[] = {node_of(0, 0, 9, 1), node_of(0, 0, 5, 1), node_of(0, 0, 0, 1)};
    const double load[6] = {0, 0, 2};
    fw_beam_section peak;
    assert_int_equal(fw_beam_peak(node, 3, load, &peak, NULL), FW_OK);
    assert_true(peak.piece == 0 && peak.share == 0.0);
    assert_near(peak.peak_MPa, 8.0 / pi, 1e-15);
}

static void assert_refused(const fw_beam_node *node, size_t count, fw_beam_material material)
{
    fw_six f;
    fw_fault fault = {0};
    assert_int_equal(fw_beam_flexibility(node, count, material, &f, &fault), FW_INPUT);
    assert_true(fault.status == FW_INPUT && strlen(fault.text) > 20);
    assert_int_equal(fw_beam_stiffness(node, count, material, &f, &fault), FW_INPUT);
}

static void assert_no_chain(const fw_beam_node *node, size_t count)
{
    const double load[6] = {1.0};
    fw_beam_section peak;
    assert_refused(node, count, green);
    assert_int_equal(fw_beam_peak(node, count, load, &peak, NULL), FW_INPUT);
}

static void test_no_beam(void **state)
{
    (void)state;
    fw_beam_node node[] = {node_of(0, 0, 4, 1), node_of(0, 0, 0, 1)};
    assert_no_chain(node, 0);
    assert_no_chain(node, 1);
    const double bad[] = {0.0, -1.0, (double)NAN, (double)INFINITY};
    for (int i = 0; i < 4; i++) {
        node[1].d_mm = bad[i];
        assert_no_chain(node, 2);
        node[1].d_mm = 1.0;
        assert_refused(node, 2, (fw_beam_material){.e_MPa = bad[i], .g_MPa = 1.0});
        assert_refused(node, 2, (fw_beam_material){.e_MPa = 1.0, .g_MPa = bad[i]});
    }
    for (int j = 0; j < 3; j++) {
        node[0].at[j] = (double)NAN;
        assert_no_chain(node, 2);
        node[0].at[j] = 0.0;
    }
    assert_no_chain(node, 2); /* both at one place */
    node[0].at[0] = 10.0;
    const double load[6] = {(double)NAN};
    fw_beam_section peak;
    assert_int_equal(fw_beam_peak(node, 2, load, &peak, NULL), FW_INPUT);
}

/* Leaning threads of a kilometre: bending and pulling lie too many digits apart to be inverted. */
static void test_too_slender(void **state)
{
    (void)state;
    const fw_beam_node node[] = {node_of(1e6, 0, 1e6, 1), node_of(0, 0, 0, 1)};
    fw_six k;
    fw_fault fault = {0};
    assert_int_equal(fw_beam_stiffness(node, 2, green, &k, &fault), FW_INPUT);
    assert_non_null(strstr(fault.text, "slender"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_cantilever),
        cmocka_unit_test(test_tapered_cantilever),
        cmocka_unit_test(test_peak_inside_span),
        cmocka_unit_test(test_axial_and_twist),
        cmocka_unit_test(test_uniform_stiffness),
        cmocka_unit_test(test_leaning_post),
        cmocka_unit_test(test_two_pieces),
        cmocka_unit_test(test_virtual_work),
        cmocka_unit_test(test_stiffness_properties),
        cmocka_unit_test(test_peak_of_chains),
        cmocka_unit_test(test_sections),
        cmocka_unit_test(test_peak_of_pull),
        cmocka_unit_test(test_peak_of_equals),
        cmocka_unit_test(test_no_beam),
        cmocka_unit_test(test_too_slender),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
