/* B: columns and beams. P: a rigid body on posts. N: sections in tension. */
#include "calibrate/laws.h"
#include "calibrate/proofs.h"
#include "physics/beam.h"
#include "physics/column.h"
#include "physics/group.h"
#include "physics/strength.h"

#include <math.h>
#include <string.h>

static double inertia(double d_mm)
{
    return FW_PI * pow(d_mm, 4) / 64;
}

/* ---- B: columns ---- */

/* All ends of column.h in their order: d 1 mm, L 10 mm, E 500 MPa; with: 1 for the frustum's way.
 */
static fw_status column_loads(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    for (int i = 0; i < proof->count; i++) {
        const fw_column_ends ends = (fw_column_ends)i;
        computed[i] = proof->with[0] > 0 ? fw_column_frustum_N(ends, 500, 1, 1, 10)
                                         : fw_column_uniform_N(ends, 500, inertia(1), 10);
    }
    return FW_OK;
}

static fw_status column_factors(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    for (int i = 0; i < proof->count; i++)
        computed[i] = fw_column_effective((fw_column_ends)i);
    return FW_OK;
}

/* with: ends, E MPa, I mm4, L mm. */
static fw_status one_column(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    const double *w = proof->with;
    computed[0] = fw_column_uniform_N((fw_column_ends)w[0], w[1], w[2], w[3]);
    return FW_OK;
}

/* Half as thick at the tip, over the uniform one of the base, for the ends that cannot sway. */
static fw_status cone_shares(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    for (int i = 0; i < proof->count; i++) {
        const fw_column_ends ends = (fw_column_ends)i;
        computed[i] = fw_column_frustum_N(ends, 500, 0.5, 1, 10) /
                      fw_column_uniform_N(ends, 500, inertia(1), 10);
    }
    return FW_OK;
}

/* P L^2 / (E I2) of a cone with a free tip. */
static double free_cone(double d1_over_d2)
{
    return fw_column_frustum_N(FW_COLUMN_FIXED_FREE, 1, d1_over_d2, 1, 1) / inertia(1);
}

/* I1 / I2 = 0.1, 0.2, .. 1. */
static fw_status cones_by_inertia(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    for (int i = 0; i < proof->count; i++)
        computed[i] = free_cone(pow(0.1 * (i + 1), 0.25));
    return FW_OK;
}

static fw_status cones_by_diameter(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    static const double shares[] = {0.25, 1.0 / 3, 0.5, 0.75};
    for (int i = 0; i < proof->count; i++)
        computed[i] = free_cone(shares[i]);
    return FW_OK;
}

static fw_status cone_loads(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    (void)fault;
    computed[0] = fw_column_frustum_N(FW_COLUMN_PINNED_PINNED, 500, 0.5, 1, 10);
    computed[1] = fw_column_frustum_N(FW_COLUMN_FIXED_FREE, 500, 0.5, 1, 10);
    return FW_OK;
}

/* ---- B: beams ---- */

/* An upright frustum with a side force of 1 N at its tip: its give there, its highest stress, and
 * where. with: d1, d2, L mm, E MPa. */
typedef struct bent {
    fw_six flexibility;
    fw_beam_section peak;
} bent;

static fw_status bend(const double with[FW_PROOF_GIVEN], bent *out, fw_fault *fault)
{
    const fw_beam_node node[2] = {{{0, 0, with[2]}, with[0]}, {{0, 0, 0}, with[1]}};
    const double load[6] = {1};
    FW_TRY(fw_beam_flexibility(node, 2, fw_beam_isotropic(with[3], 0.4), &out->flexibility, fault));
    return fw_beam_peak(node, 2, load, &out->peak, fault);
}

static fw_status cantilever(const fw_proof *proof, double *computed, fw_fault *fault)
{
    bent found;
    FW_TRY(bend(proof->with, &found, fault));
    computed[0] = found.peak.peak_MPa;
    computed[1] = found.flexibility.m[0][0];
    return FW_OK;
}

static fw_status tapered_give(const fw_proof *proof, double *computed, fw_fault *fault)
{
    bent found;
    FW_TRY(bend(proof->with, &found, fault));
    computed[0] = found.flexibility.m[0][0];
    return FW_OK;
}

static fw_status tapered_peak(const fw_proof *proof, double *computed, fw_fault *fault)
{
    bent found;
    FW_TRY(bend(proof->with, &found, fault));
    computed[0] = found.peak.peak_MPa;
    computed[1] = found.peak.share;
    return FW_OK;
}

static fw_status axial_stiffness(const fw_proof *proof, double *computed, fw_fault *fault)
{
    bent found;
    FW_TRY(bend(proof->with, &found, fault));
    computed[0] = 1 / found.flexibility.m[2][2];
    return FW_OK;
}

/* ---- P: posts ---- */

enum { POSTS = 6 };

typedef struct posts {
    int count;
    double at[POSTS][2], k[POSTS]; /* stiffness along z */
    double load, load_at[2];       /* along z */
} posts;

/* with[0] of the P rows. */
static const posts groups[] = {
    {4, {{3, 2}, {3, -2}, {-3, 2}, {-3, -2}}, {1, 1, 1, 1}, 100, {2, 1}},
    {4, {{-376, 393}, {376, 437}, {370, -339}, {-336, -385}}, {1, 1, 1, 1}, 1693, {0, 0}},
    {5, {{0, 0}, {10, 0}, {20, 0}, {0, 10}, {0, 20}}, {1, 1, 1, 1, 1}, 50, {5, 12}},
    {4, {{0, 0}, {10, 0}, {10, 10}, {0, 10}}, {1, 1, 2, 2}, 20, {6, 5}},
    {3, {{0, 0}, {10, 0}, {0, 10}}, {1, 7, 0.01}, 12, {4, 3}},
    {6, {{-3, 0}, {-1, 0}, {1, 0}, {3, 0}, {0, 1}, {0, -1}}, {1, 1, 1, 1, 1, 1}, 60, {1, 0}},
    {1, {{0, 0}}, {1}, 10, {2, 0}},
    {3, {{0, 0}, {3, 1}, {6, 2}}, {1, 1, 1}, 10, {2, 2}},
    {0},
};

static fw_status share(const posts *group, double (*force)[6], fw_fault *fault)
{
    static const double origin[3] = {0};
    fw_anchor_stiffness anchor[POSTS];
    memset(anchor, 0, sizeof anchor);
    for (int i = 0; i < group->count; i++) {
        anchor[i].at[0] = group->at[i][0];
        anchor[i].at[1] = group->at[i][1];
        anchor[i].k.m[0][0] = anchor[i].k.m[1][1] = 1; /* it does not slide */
        anchor[i].k.m[2][2] = group->k[i];
    }
    const double f = group->load, *at = group->load_at;
    const double load[6] = {0, 0, f, at[1] * f, -at[0] * f, 0};
    return fw_group_share(anchor, (size_t)group->count, origin, load, force, fault);
}

static fw_status shares_of(const fw_proof *proof, double *computed, fw_fault *fault)
{
    double force[POSTS][6];
    FW_TRY(share(&groups[(int)proof->with[0]], force, fault));
    for (int i = 0; i < proof->count; i++)
        computed[i] = force[i][2];
    return FW_OK;
}

/* 1 where the kernel refuses, and how many numbers it hands out all the same. */
static fw_status refusal(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    double force[POSTS][6];
    memset(force, 0, sizeof force);
    const posts *group = &groups[(int)proof->with[0]];
    computed[0] = share(group, force, NULL) == FW_INPUT;
    computed[1] = 0;
    for (int i = 0; i < group->count; i++) {
        for (int j = 0; j < 6; j++)
            computed[1] += isnan(force[i][j]) ? 0 : 1;
    }
    return FW_OK;
}

/* A round section of 1 mm at 8 MPa, and half of that as a demand. */
static fw_status tension(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    (void)fault;
    computed[0] = fw_strength_tension_N(8, FW_PI / 4);
    computed[1] = fw_strength_margin(computed[0], FW_PI);
    return FW_OK;
}

#define EULER "Euler 1744; Timoshenko and Gere 1961, from memory"
#define CONE "derived here; three decimals of it: Timoshenko and Gere 1961, from memory"
#define BEAM "handbook cantilever, common practice"
#define HERE "derived here"

static const fw_proof rows[] = {
    FW_CHECK("B1.1", "d 1, L 10 mm, E 500 MPa, six ways of holding: P, N",
             FW_EQUAL(2.422365, 9.689461, 4.955550, 0.605591, 2.422365, 0.605591), 1e-6, EULER,
             FW_BY(column_loads, 0)),
    FW_CHECK("B1.2", "the same as a cone of equal ends: P, N",
             FW_EQUAL(2.422365, 9.689461, 4.955550, 0.605591, 2.422365, 0.605591), 1e-6, EULER,
             FW_BY(column_loads, 1)),
    FW_CHECK("B1.3", "effective length over length, six ways", FW_EQUAL(1, 0.5, 0.6991557, 2, 1, 2),
             1e-6, EULER, FW_BY(column_factors, 0)),
    FW_CHECK("B1.4", "bar 10 x 20 mm, 1 m, 200 GPa, hinged: P, N", FW_EQUAL(3289.868), 1e-6,
             "a public examination example; Euler 1744",
             FW_BY(one_column, FW_COLUMN_PINNED_PINNED, 200e3, 20.0 * 1000 / 12, 1000)),
    FW_CHECK("B1.5", "fixed and pinned: P L^2 / (E I)", FW_EQUAL(20.1907286), 1e-6, EULER,
             FW_BY(one_column, FW_COLUMN_FIXED_PINNED, 1, 1, 1)),
    FW_CHECK("B2", "cone d1/d2 0.5, three ways: P over that of the base",
             FW_EQUAL(0.25, 0.25, 0.25), 1e-14, HERE, FW_BY(cone_shares, 0)),
    FW_CHECK("B3.1", "cone, free tip, I1/I2 0.1 .. 1: P L^2 / (E I2)",
             FW_EQUAL(1.203024, 1.505085, 1.710139, 1.869782, 2.002311, 2.116559, 2.217528,
                      2.308356, 2.391150, 2.467401),
             1e-5, CONE, FW_BY(cones_by_inertia, 0)),
    FW_CHECK("B3.2", "the same, d1/d2 1/4, 1/3, 1/2, 3/4",
             FW_EQUAL(0.376887, 0.582133, 1.028965, 1.738767), 1e-5, CONE,
             FW_BY(cones_by_diameter, 0)),
    FW_CHECK("B3.3", "cone 0.5/1, L 10 mm, 500 MPa, pinned; free tip: P, N",
             FW_EQUAL(0.605591, 0.252546), 1e-5, CONE, FW_BY(cone_loads, 0)),
    FW_CHECK("B4.1", "d 1, L 10 mm, 1 N, 500 MPa: stress MPa, give mm",
             FW_EQUAL(101.85916, 13.581222), 1e-7, BEAM, FW_BY(cantilever, 1, 1, 10, 500)),
    FW_CHECK("B4.2", "tapered cantilever d 1 to 2, L = E = F = 1: give", FW_EQUAL(0.84882636), 1e-7,
             BEAM, FW_BY(tapered_give, 1, 2, 1, 1)),
    FW_CHECK("B4.3", "the same: highest stress, and where", FW_EQUAL(128 / (27 * FW_PI), 0.5), 1e-7,
             HERE, FW_BY(tapered_peak, 1, 2, 1, 1)),
    FW_CHECK("B4.4", "frustum d 0.4 to 1.3, L 9 mm, 500 MPa: N/mm",
             FW_EQUAL(FW_PI * 500 * 0.4 * 1.3 / 36), 1e-7, HERE,
             FW_BY(axial_stiffness, 0.4, 1.3, 9, 500)),
    FW_NOT_COMPUTED("B4.5", "plate strip under suction: stress MPa, give mm",
                    "no kernel bends the part: ledges are held by reach alone"),
    FW_CHECK("P1.1", "4 posts, 100 at (2, 1): each takes",
             FW_EQUAL(54 + 1 / 6., 29 + 1 / 6., 20 + 5 / 6., -4 - 1 / 6.), 1e-6,
             "statics; a public worked example rounds it to 54, 29, 21, -4", FW_BY(shares_of, 0)),
    FW_CHECK("P1.2", "4 posts askew, 1693 kN: each takes, kN",
             FW_EQUAL(405.753388, 384.224011, 441.233201, 461.789400), 1e-6,
             "a published pile sheet; its coupling, which it leaves out, " HERE,
             FW_BY(shares_of, 1)),
    FW_CHECK("P1.3", "5 posts on two arms, 50 at (5, 12): each takes",
             FW_EQUAL(-5 / 7., 33 / 7., 71 / 7., 82 / 7., 169 / 7.), 1e-6, HERE,
             FW_BY(shares_of, 2)),
    FW_CHECK("P1.4", "4 posts of two stiffnesses, 20 at (6, 5): each takes",
             FW_EQUAL(13 / 3., 17 / 3., 19 / 3., 11 / 3.), 1e-6, HERE, FW_BY(shares_of, 3)),
    FW_CHECK("P1.5", "3 posts, stiffness of no account: each takes", FW_EQUAL(3.6, 4.8, 3.6), 1e-6,
             "statics", FW_BY(shares_of, 4)),
    FW_CHECK("P1.6", "6 posts on a cross, 60 at (1, 0): each takes", FW_EQUAL(1, 7, 13, 19, 10, 10),
             1e-6, HERE, FW_BY(shares_of, 5)),
    FW_CHECK("P2.1", "one post under a moment: refused; numbers given", FW_WITHIN(1, 0), 0,
             "statics", FW_BY(refusal, 6)),
    FW_CHECK("P2.2", "posts on one line: refused; numbers given", FW_WITHIN(1, 0), 0, "statics",
             FW_BY(refusal, 7)),
    FW_CHECK("P2.3", "no post: refused; numbers given", FW_WITHIN(1, 0), 0, "statics",
             FW_BY(refusal, 8)),
    FW_CHECK("N1", "round section of 1 mm at 8 MPa: N; margin over pi N", FW_EQUAL(2 * FW_PI, 2),
             1e-12, "stress is force over area", FW_BY(tension, 0)),
};

const fw_proof_table fw_proofs_posts = FW_PROOF_ROWS(rows);
