/* S: squeeze films and their forces. U: the cell scheme to the last digits. */
#include "calibrate/figure.h"
#include "calibrate/laws.h"
#include "calibrate/proofs.h"
#include "physics/approach.h"
#include "physics/pulloff.h"
#include "physics/separation.h"

#include <math.h>

static double q_at(double gap_um)
{
    return fw_separation_q(FW_LAW_VISCOSITY, FW_LAW_SPEED, gap_um);
}

/* ---- S: closed forms, times the q of the program ---- */

/* with: radius mm, gap um. */
static fw_status disc_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    computed[0] = q_at(proof->with[1]) * fw_law_disc(proof->with[0]);
    return FW_OK;
}

/* Suction in the middle, q R^2 / 4; with as above. */
static fw_status disc_middle_MPa(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    computed[0] = q_at(proof->with[1]) * proof->with[0] * proof->with[0] / 4;
    return FW_OK;
}

/* with: sides mm, gap um. */
static fw_status rectangle_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    computed[0] = q_at(proof->with[2]) * fw_law_rectangle(proof->with[0], proof->with[1]);
    return FW_OK;
}

/* with: radii mm, gap um, 1 where the hole is sealed. */
static fw_status ring_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    const double outer = proof->with[0], inner = proof->with[1];
    computed[0] = q_at(proof->with[2]) * (proof->with[3] > 0 ? fw_law_ring_sealed(outer, inner)
                                                             : fw_law_ring_vented(outer, inner));
    return FW_OK;
}

/* ---- S: masks ---- */

/* with: radius mm, radius px, gap um. */
static fw_status disc_mask_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    fw_figure figure;
    double g = 0;
    FW_TRY(fw_figure_round(proof->with[1], &figure, fault));
    FW_TRY(fw_figure_integral(&figure, proof->with[0] / proof->with[1], &g, fault));
    computed[0] = q_at(proof->with[2]) * g;
    return FW_OK;
}

/* with: sides px, pixel mm, gap um. */
static fw_status rectangle_mask_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    fw_figure figure;
    double g = 0;
    const int32_t width = (int32_t)proof->with[0], height = (int32_t)proof->with[1];
    FW_TRY(fw_figure_new(width, height, &figure, fault));
    fw_figure_box(&figure, 0, 0, width, height, FW_FIGURE_FILM);
    FW_TRY(fw_figure_integral(&figure, proof->with[2], &g, fault));
    computed[0] = q_at(proof->with[3]) * g;
    return FW_OK;
}

/* A disc of 100 px with a hole, r and offset px; G for a radius of 1 mm. */
static fw_status ring_integral(double r, double offset, uint8_t hole, double *g, fw_fault *fault)
{
    fw_figure figure;
    FW_TRY(fw_figure_round(100, &figure, fault));
    fw_figure_disc(&figure, figure.width / 2.0 + offset, figure.height / 2.0, r, hole);
    return fw_figure_integral(&figure, 0.01, g, fault);
}

/* R 10 mm; with: hole r px, gap um, 1 where it is sealed. */
static fw_status ring_mask_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    double g = 0;
    const uint8_t hole = proof->with[2] > 0 ? FW_FIGURE_CAVITY : FW_FIGURE_OPEN;
    FW_TRY(ring_integral(proof->with[0], 0, hole, &g, fault));
    computed[0] = q_at(proof->with[1]) * g * 1e4;
    return FW_OK;
}

/* J = 4 G for R = 1; with: hole r px, offset px, 1 where it is sealed. */
static fw_status ring_mask_J(const fw_proof *proof, double *computed, fw_fault *fault)
{
    double g = 0;
    const uint8_t hole = proof->with[2] > 0 ? FW_FIGURE_CAVITY : FW_FIGURE_OPEN;
    FW_TRY(ring_integral(proof->with[0], proof->with[1], hole, &g, fault));
    computed[0] = 4 * g;
    return FW_OK;
}

static fw_status two_discs(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    fw_figure one, two;
    double alone = 0, both = 0;
    FW_TRY(fw_figure_round(50, &one, fault));
    FW_TRY(fw_figure_integral(&one, 0.2, &alone, fault));
    FW_TRY(fw_figure_new(312, 104, &two, fault));
    fw_figure_disc(&two, 52, 52, 50, FW_FIGURE_FILM);
    fw_figure_disc(&two, 260, 52, 50, FW_FIGURE_FILM);
    FW_TRY(fw_figure_integral(&two, 0.2, &both, fault));
    computed[0] = both / alone;
    return FW_OK;
}

/* mask, on pixels of 0.1 and 0.2 mm. */
static fw_status twice_the_pixel(const fw_proof *proof, double *computed, fw_fault *fault)
{
    double g[2] = {0};
    for (int i = 0; i < 2; i++) {
        fw_figure figure;
        FW_TRY(fw_figure_rows(proof->mask, &figure, fault));
        FW_TRY(fw_figure_integral(&figure, i == 0 ? 0.1 : 0.2, &g[i], fault));
    }
    computed[0] = g[1] / g[0];
    return FW_OK;
}

/* with: force N, gaps um (the second INFINITY: to the end). Stefan's disc of 10 mm. */
static fw_status seconds_to_open(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    const double g = fw_law_disc(10);
    const fw_pulloff pulloff = {.law = {fw_law_straight_N, &g},
                                .viscosity_mPa_s = FW_LAW_VISCOSITY};
    computed[0] = fw_pulloff_seconds(&pulloff, proof->with[0], proof->with[1], proof->with[2]);
    return FW_OK;
}

/* with: force N, gap um, seconds. Stefan's disc of 10 mm. */
static fw_status gap_after(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    const fw_approach approach = {.integral_mm4 = fw_law_disc(10),
                                  .viscosity_mPa_s = FW_LAW_VISCOSITY};
    computed[0] = fw_approach_gap_um(&approach, proof->with[0], proof->with[1], proof->with[2]);
    return FW_OK;
}

/* ---- U: the cell scheme ---- */

/* The sum of u over the mask, unit pixels. */
static fw_status sum_of_u(const fw_proof *proof, double *computed, fw_fault *fault)
{
    fw_figure figure;
    FW_TRY(fw_figure_rows(proof->mask, &figure, fault));
    return fw_figure_integral(&figure, 1, &computed[0], fault);
}

static fw_status box_sum(int32_t width, int32_t height, double *sum, fw_fault *fault)
{
    fw_figure figure;
    FW_TRY(fw_figure_new(width, height, &figure, fault));
    fw_figure_box(&figure, 0, 0, width, height, FW_FIGURE_FILM);
    return fw_figure_integral(&figure, 1, sum, fault);
}

/* with: edge px. */
static fw_status square_sum(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const int32_t edge = (int32_t)proof->with[0];
    return box_sum(edge, edge, &computed[0], fault);
}

static fw_status u_of_the_cavity(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const fw_figure_pull pull = {.px_mm = 1, .py_mm = 1, .tolerance = 1e-13};
    fw_figure figure;
    fw_film_solution solution;
    FW_TRY(fw_figure_rows(proof->mask, &figure, fault));
    const fw_status status = fw_figure_solve(&figure, &pull, &solution, fault);
    fw_figure_free(&figure);
    if (status == FW_OK && solution.cavity_count == 1)
        computed[0] = solution.cavity_u_mm2[0];
    fw_film_solution_free(&solution);
    return status;
}

/* Strips 1, 3, .. 9 px wide, by pixel of length: the difference of two lengths has no ends. */
static fw_status strip_sums(const fw_proof *proof, double *computed, fw_fault *fault)
{
    for (int i = 0; i < proof->count; i++) {
        double longer = 0, shorter = 0;
        FW_TRY(box_sum(2 * i + 1, 300, &longer, fault));
        FW_TRY(box_sum(2 * i + 1, 200, &shorter, fault));
        computed[i] = (longer - shorter) / 100;
    }
    return FW_OK;
}

static fw_status corner_J(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    fw_figure figure;
    FW_TRY(fw_figure_new(128, 128, &figure, fault));
    fw_figure_box(&figure, 0, 0, 128, 128, FW_FIGURE_FILM);
    fw_figure_box(&figure, 64, 0, 128, 64, FW_FIGURE_OPEN);
    FW_TRY(fw_figure_integral(&figure, 1.0 / 64, &computed[0], fault));
    computed[0] *= 4;
    return FW_OK;
}

/* ---- the rows ---- */

#define STEFAN "Stefan 1874"
#define SERIES "Timoshenko and Goodier 1951, from memory"
#define ANNULUS "annular flow, Bird, Stewart and Lightfoot 1960"
#define SCHEME "elimination in fractions, derived here"
#define HERE "derived here"

static const fw_proof rows[] = {
    FW_CHECK("S1.1", "disc R 10 mm, gap 100 um, closed form: F, N", FW_EQUAL(7.5 * FW_PI), 1e-9,
             STEFAN, FW_BY(disc_N, 10, 100)),
    FW_CHECK("S1.2", "the same: suction in its middle, MPa", FW_EQUAL(0.15), 1e-9, STEFAN,
             FW_BY(disc_middle_MPa, 10, 100)),
    FW_CHECK("S1.3", "the same as a mask, R 50 px: F, N", FW_EQUAL(7.5 * FW_PI), 5e-3, STEFAN,
             FW_BY(disc_mask_N, 10, 50, 100)),
    FW_CHECK("S1.4", "the same as a mask, R 100 px: F, N", FW_EQUAL(7.5 * FW_PI), 5e-3, STEFAN,
             FW_BY(disc_mask_N, 10, 100, 100)),
    FW_CHECK("S2.1", "disc R 10 mm, gap 50 um, closed form: F, N", FW_EQUAL(60 * FW_PI), 1e-9,
             STEFAN, FW_BY(disc_N, 10, 50)),
    FW_CHECK("S2.2", "disc R 10 mm, gap 20 um, closed form: F, N", FW_EQUAL(937.5 * FW_PI), 1e-9,
             STEFAN, FW_BY(disc_N, 10, 20)),
    FW_CHECK("S3.1", "square 20 mm, gap 100 um, series: F, N", FW_EQUAL(33.7384836), 1e-8, SERIES,
             FW_BY(rectangle_N, 20, 20, 100)),
    FW_CHECK("S3.2", "the same as a mask, 64 px: F, N", FW_EQUAL(33.7384836), 1e-3, SERIES,
             FW_BY(rectangle_mask_N, 64, 64, 20.0 / 64, 100)),
    FW_CHECK("S4.1", "strip 20 x 5 mm, gap 100 um, series: F, N", FW_EQUAL(1.05304859), 1e-8,
             SERIES, FW_BY(rectangle_N, 20, 5, 100)),
    FW_CHECK("S4.2", "the same, 80 x 20 px: the cells' own +0.553 %: F, N",
             FW_EQUAL(1.05304859 * 1.00553), 5e-6, SERIES "; cells derived here",
             FW_BY(rectangle_mask_N, 80, 20, 0.25, 100)),
    FW_CHECK("S5", "two far discs, F over that of one", FW_EQUAL(2), 1e-9, "additivity, " HERE,
             FW_BY(two_discs, 0)),
    FW_CHECK("S6.1", "ring 10/5 mm, vented, gap 100 um, closed form: F, N", FW_EQUAL(2.96842900),
             1e-8, ANNULUS, FW_BY(ring_N, 10, 5, 100, 0)),
    FW_CHECK("S6.2", "the same as a mask, R 100 px: F, N", FW_EQUAL(2.96842900), 1e-2, ANNULUS,
             FW_BY(ring_mask_N, 50, 100, 0)),
    FW_CHECK("S7.1", "ring 10/5 mm, sealed, gap 100 um, closed form: F, N", FW_EQUAL(22.0893234),
             1e-8, HERE, FW_BY(ring_N, 10, 5, 100, 1)),
    FW_CHECK("S7.2", "the same as a mask, R 100 px: F, N", FW_EQUAL(22.0893234), 5e-3, HERE,
             FW_BY(ring_mask_N, 50, 100, 1)),
    FW_NOT_COMPUTED("S8", "the same ring, vented through a tube: F, N",
                    "a cavity is sealed or open: what flows through a vent is in no kernel"),
    FW_CHECK("S9.1", "ring R 1, r 0.5, offset 0.3, vented, R 100 px: J", FW_EQUAL(0.29621317), 7e-3,
             "Piercy, Hooper and Winny 1933, from memory", FW_BY(ring_mask_J, 50, 30, 0)),
    FW_CHECK("S9.2", "the same, sealed: J", FW_EQUAL(1.26839271), 7e-3, "collocation, " HERE,
             FW_BY(ring_mask_J, 50, 30, 1)),
    FW_CHECK("S10.1", "10 N open the disc of S1 from 100 to 200 um: s", FW_EQUAL(0.0883573), 1e-6,
             STEFAN, FW_BY(seconds_to_open, 10, 100, 200)),
    FW_CHECK("S10.2", "10 N open it from 100 um to the end: s", FW_EQUAL(0.1178097), 1e-6, STEFAN,
             FW_BY(seconds_to_open, 10, 100, (double)INFINITY)),
    FW_CHECK("S11", "10 N close it from 500 um for 5 s: gap, um", FW_EQUAL(15.3427), 1e-5, STEFAN,
             FW_BY(gap_after, 10, 500, 5)),
    FW_CHECK("S12", "mask with a cavity, pixel twice as large: F over F", FW_EQUAL(16), 1e-12,
             "dimensions, " HERE, FW_BY_MASK(twice_the_pixel, "####/##.#/#oo#/####")),
    FW_CHECK("U1.01", "1 x 1 px: sum of u", FW_EQUAL(1.0 / 8), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "#")),
    FW_CHECK("U1.02", "2 x 1 px: sum of u", FW_EQUAL(1.0 / 3), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "##")),
    FW_CHECK("U1.03", "5 x 1 px: sum of u", FW_EQUAL(249.0 / 232), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "#####")),
    FW_CHECK("U1.04", "5 x 2 px: sum of u", FW_EQUAL(127.0 / 33), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "#####/#####")),
    FW_CHECK("U1.05", "4 x 3 px: sum of u", FW_EQUAL(758.0 / 119), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "####/####/####")),
    FW_CHECK("U1.06", "2 x 2 px: sum of u", FW_EQUAL(1), 1e-12, SCHEME, FW_BY(square_sum, 2)),
    FW_CHECK("U1.07", "3 x 3 px: sum of u", FW_EQUAL(157.0 / 40), 1e-12, SCHEME,
             FW_BY(square_sum, 3)),
    FW_CHECK("U1.08", "4 x 4 px: sum of u", FW_EQUAL(11), 1e-12, SCHEME, FW_BY(square_sum, 4)),
    FW_CHECK("U1.09", "5 x 5 px: sum of u", FW_EQUAL(17519.0 / 696), 1e-12, SCHEME,
             FW_BY(square_sum, 5)),
    FW_CHECK("U1.10", "6 x 6 px: sum of u", FW_EQUAL(653.0 / 13), 1e-12, SCHEME,
             FW_BY(square_sum, 6)),
    FW_CHECK("U1.11", "8 x 8 px: sum of u", FW_EQUAL(2591.0 / 17), 1e-12, SCHEME,
             FW_BY(square_sum, 8)),
    FW_CHECK("U1.12", "16 x 16 px: sum of u", FW_EQUAL(3468573114879.0 / 1483767617), 1e-12, SCHEME,
             FW_BY(square_sum, 16)),
    FW_CHECK("U1.13", "L of 3 px: sum of u", FW_EQUAL(23.0 / 40), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "#./##")),
    FW_CHECK("U1.14", "plus of 5 px: sum of u", FW_EQUAL(31.0 / 24), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, ".#./###/.#.")),
    FW_CHECK("U1.15", "3 x 3 px, middle vented: sum of u", FW_EQUAL(2), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "###/#.#/###")),
    FW_CHECK("U1.16", "3 x 3 px, middle sealed: sum of u", FW_EQUAL(19.0 / 5), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "###/#o#/###")),
    FW_CHECK("U1.17", "the same: u of the cavity", FW_EQUAL(3.0 / 5), 1e-12, SCHEME,
             FW_BY_MASK(u_of_the_cavity, "###/#o#/###")),
    FW_CHECK("U1.18", "5 x 5 px, middle vented: sum of u", FW_EQUAL(14), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "#####/#####/##.##/#####/#####")),
    FW_CHECK("U1.19", "5 x 5 px, middle sealed: sum of u", FW_EQUAL(2179.0 / 87), 1e-12, SCHEME,
             FW_BY_MASK(sum_of_u, "#####/#####/##o##/#####/#####")),
    FW_CHECK("U1.20", "7 x 7 px, hole 3 x 3 vented: sum of u", FW_EQUAL(13122.0 / 601), 1e-12,
             SCHEME,
             FW_BY_MASK(sum_of_u, "#######/#######/##...##/##...##/##...##/#######/#######")),
    FW_CHECK("U1.21", "7 x 7 px, hole 3 x 3 sealed: sum of u", FW_EQUAL(403443.0 / 4657), 1e-12,
             SCHEME,
             FW_BY_MASK(sum_of_u, "#######/#######/##ooo##/##ooo##/##ooo##/#######/#######")),
    FW_CHECK("U2", "strips 1, 3, 5, 7, 9 px wide: sum of u by length",
             FW_EQUAL(1 / 12. + 1 / 6., 27 / 12. + 3 / 6., 125 / 12. + 5 / 6., 343 / 12. + 7 / 6.,
                      729 / 12. + 9 / 6.),
             1e-10, "w^3/12 + w/6, " HERE, FW_BY(strip_sums, 0)),
    FW_CHECK("U3.1", "L of arm 64 px, the cells' own value: J", FW_EQUAL(0.857400), 1e-5,
             "elimination of the cell scheme, " HERE, FW_BY(corner_J, 0)),
    FW_CHECK("U3.2", "the same, exact: J", FW_EQUAL(0.8563032), 2e-3,
             "harmonic fit, " HERE "; equals a finite-element benchmark, from memory",
             FW_BY(corner_J, 0)),
};

const fw_proof_table fw_proofs_film = FW_PROOF_ROWS(rows);
