/* T: a plate that tilts, in units where 12 eta omega / h0^3 is 12, so that F is 12 times the
 * integral of u. Strips without ends are the difference of two lengths, whose ends are alike. */
#include "calibrate/figure.h"
#include "calibrate/laws.h"
#include "calibrate/proofs.h"
#include "physics/separation.h"

#include <math.h>

enum { LONG = 20 }; /* pixels along a strip are so many times as long as those across */

typedef struct tilting {
    double slope; /* h = h0 (1 + slope x) over a breadth of 1 */
    bool even;    /* speed 1 everywhere in place of x */
} tilting;

static fw_status solve_strip(tilting t, int32_t width, double length, fw_film_solution *out,
                             fw_fault *fault)
{
    const double px_mm = 1.0 / width;
    fw_figure_pull pull = {.px_mm = px_mm,
                           .py_mm = LONG * px_mm,
                           .wider = {0, t.slope / width, 0},
                           .tolerance = 1e-13};
    if (!t.even)
        pull.faster = (fw_film_plane){-1, px_mm, 0};
    const int32_t rows = (int32_t)lround(length * width / LONG);
    fw_figure figure;
    FW_TRY(fw_figure_new(width, rows, &figure, fault));
    fw_figure_box(&figure, 0, 0, width, rows, FW_FIGURE_FILM);
    const fw_status status = fw_figure_solve(&figure, &pull, out, fault);
    fw_figure_free(&figure);
    return status;
}

enum { FORCE, MOMENT, SIDES };

/* Of a unit of length. */
static fw_status endless(tilting t, int32_t width, double out[SIDES], fw_fault *fault)
{
    static const double length[2] = {6.5, 8};
    double sum[2][SIDES];
    for (int i = 0; i < 2; i++) {
        fw_film_solution solution;
        FW_TRY(solve_strip(t, width, length[i], &solution, fault));
        sum[i][FORCE] = 12 * solution.integral_mm4;
        sum[i][MOMENT] = 12 * solution.moment_x_mm5;
        fw_film_solution_free(&solution);
    }
    for (int k = 0; k < SIDES; k++)
        out[k] = (sum[1][k] - sum[0][k]) / (length[1] - length[0]);
    return FW_OK;
}

/* Cells of 1/40 to 1/320; their errors of order 2, 3 and 4 (at a wall the film's give changes
 * within the half cell, so order 3 is there too) are taken out one after the other (Richardson
 * 1911, from memory). */
static fw_status limit_of(tilting t, double out[SIDES], fw_fault *fault)
{
    enum { SIZES = 4 };
    double table[SIZES][SIDES];
    for (int n = 0; n < SIZES; n++)
        FW_TRY(endless(t, 40 << n, table[n], fault));
    for (int order = 2; order <= SIZES; order++) {
        const double f = (double)(1 << order);
        for (int n = 0; n <= SIZES - order; n++) {
            for (int k = 0; k < SIDES; k++)
                table[n][k] = (f * table[n + 1][k] - table[n][k]) / (f - 1);
        }
    }
    out[FORCE] = table[0][FORCE];
    out[MOMENT] = table[0][MOMENT];
    return FW_OK;
}

/* F' and M' (count 1: F' alone); with: slope, 1 for an even speed. */
static fw_status strip(const fw_proof *proof, double *computed, fw_fault *fault)
{
    double found[SIDES] = {0};
    FW_TRY(limit_of((tilting){proof->with[0], proof->with[1] > 0}, found, fault));
    for (int i = 0; i < proof->count; i++)
        computed[i] = found[i];
    return FW_OK;
}

/* 0.5 Pa s over the disc's own area. */
static fw_status slide_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    (void)fault;
    computed[0] = fw_separation_shear_MPa(500, 10, 50) * FW_PI * 100;
    return FW_OK;
}

/* Highest suction of the hinged strip, across 640 px and half way along, where the ends count for
 * exp(-5 pi). */
static fw_status strip_peak(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    fw_film_solution solution;
    FW_TRY(solve_strip((tilting){0}, 640, 10, &solution, fault));
    computed[0] = 12 * solution.peak_u_mm2;
    fw_film_solution_free(&solution);
    return FW_OK;
}

/* A disc of R = 1 on 100 px about a hinge line `at` from the left of the image (the disc begins at
 * 0.02): force, and moment about the hinge. */
static fw_status disc_about(double at, double *force, double *moment, fw_fault *fault)
{
    const fw_figure_pull pull = {
        .px_mm = 0.01, .py_mm = 0.01, .faster = {-at - 1, 0.01, 0}, .tolerance = 1e-12};
    fw_figure figure;
    fw_film_solution solution;
    FW_TRY(fw_figure_round(100, &figure, fault));
    const fw_status status = fw_figure_solve(&figure, &pull, &solution, fault);
    fw_figure_free(&figure);
    *force = 12 * solution.integral_mm4;
    *moment = 12 * (solution.moment_x_mm5 - at * solution.integral_mm4);
    fw_film_solution_free(&solution);
    return status;
}

static fw_status rocking_disc(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    double force = 0;
    return disc_about(1.02, &force, &computed[0], fault);
}

static fw_status hinged_disc(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    return disc_about(0.02, &computed[0], &computed[1], fault);
}

static fw_status rocking_square(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    enum { EDGE = 128 };
    const fw_figure_pull pull = {.px_mm = 1.0 / EDGE,
                                 .py_mm = 1.0 / EDGE,
                                 .faster = {-1.5, 1.0 / EDGE, 0},
                                 .tolerance = 1e-12};
    fw_figure figure;
    fw_film_solution solution;
    FW_TRY(fw_figure_new(EDGE, EDGE, &figure, fault));
    fw_figure_box(&figure, 0, 0, EDGE, EDGE, FW_FIGURE_FILM);
    const fw_status status = fw_figure_solve(&figure, &pull, &solution, fault);
    fw_figure_free(&figure);
    computed[0] = 12 * (solution.moment_x_mm5 - 0.5 * solution.integral_mm4);
    fw_film_solution_free(&solution);
    return status;
}

#define WEDGE "Reynolds 1886; quadrature of the wedge, derived here"
#define ROCK "derived here from Reynolds 1886"

static const fw_proof rows[] = {
    FW_CHECK("T1", "window that slides, R 10 mm, 10 mm/s, 50 um: F, N", FW_EQUAL(0.01 * FW_PI),
             1e-9, "Couette; force is shear times area", FW_BY(slide_N, 0)),
    FW_CHECK("T2.1", "strip hinged at its edge, limit of cells: F', M'", FW_EQUAL(0.5, 4.0 / 15),
             1e-5, ROCK, FW_BY(strip, 0, 0)),
    FW_CHECK("T2.2", "the same, 640 cells: highest suction", FW_EQUAL(0.769800), 1e-5, ROCK,
             FW_BY(strip_peak, 0)),
    FW_CHECK("T3.01", "wedge a = 0.1 that turns, limit of cells: F', M'",
             FW_EQUAL(0.424264352026, 0.222510790774), 1e-7, WEDGE, FW_BY(strip, 0.1, 0)),
    FW_CHECK("T3.02", "wedge a = 0.5: the same", FW_EQUAL(0.241118789172, 0.119608064299), 1e-7,
             WEDGE, FW_BY(strip, 0.5, 0)),
    FW_CHECK("T3.03", "wedge a = 1: the same", FW_EQUAL(0.137056388801, 0.0644969443329), 1e-7,
             WEDGE, FW_BY(strip, 1, 0)),
    FW_CHECK("T3.04", "wedge a = 2: the same", FW_EQUAL(0.0580713711231, 0.0253582242049), 1e-7,
             WEDGE, FW_BY(strip, 2, 0)),
    FW_CHECK("T3.05", "wedge a = 5: the same", FW_EQUAL(0.0115395480687, 0.00444945338402), 1e-7,
             WEDGE, FW_BY(strip, 5, 0)),
    FW_CHECK("T3.06", "wedge a = 10: the same", FW_EQUAL(0.00248484087256, 0.000867415337523), 1e-7,
             WEDGE, FW_BY(strip, 10, 0)),
    FW_CHECK("T3.07", "strip drawn straight away, limit of cells: F'", FW_EQUAL(1), 1e-7, WEDGE,
             FW_BY(strip, 0, 1)),
    FW_CHECK("T3.08", "wedge a = 0.5 drawn straight away: F'", FW_EQUAL(0.524650378384), 1e-7,
             WEDGE, FW_BY(strip, 0.5, 1)),
    FW_CHECK("T3.09", "wedge a = 1 drawn straight away: F'", FW_EQUAL(0.317766166719), 1e-7, WEDGE,
             FW_BY(strip, 1, 1)),
    FW_CHECK("T3.10", "wedge a = 2 drawn straight away: F'", FW_EQUAL(0.147918433002), 1e-7, WEDGE,
             FW_BY(strip, 2, 1)),
    FW_CHECK("T4.1", "disc rocking, R 100 px: M", FW_EQUAL(0.39269908), 5e-3, ROCK,
             FW_BY(rocking_disc, 0)),
    FW_CHECK("T4.2", "disc hinged at its rim, R 100 px: F, M", FW_EQUAL(4.71238898, 5.10508806),
             5e-3, ROCK, FW_BY(hinged_disc, 0)),
    FW_CHECK("T5", "square rocking, 128 px: M", FW_EQUAL(0.01160229), 1e-3, "series, derived here",
             FW_BY(rocking_square, 0)),
};

const fw_proof_table fw_proofs_tilt = FW_PROOF_ROWS(rows);
