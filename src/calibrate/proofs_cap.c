/* C: films whose suction the liquid cannot hold. */
#include "calibrate/figure.h"
#include "calibrate/laws.h"
#include "calibrate/proofs.h"
#include "physics/pulloff.h"
#include "physics/separation.h"

#include <math.h>

static double q_at(double gap_um)
{
    return fw_separation_q(FW_LAW_VISCOSITY, FW_LAW_SPEED, gap_um);
}

/* with: gap um. A machine that does not give asks the law of the disc of 10 mm for its force. */
static fw_status capped_disc_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const fw_law_disc_capped law = {10, FW_LAW_ATMOSPHERE};
    const fw_pulloff pulloff = {.law = {fw_law_disc_capped_N, &law},
                                .viscosity_mPa_s = FW_LAW_VISCOSITY,
                                .speed_mm_s = FW_LAW_SPEED,
                                .gap_um = proof->with[0]};
    fw_pulloff_peak peak = {0};
    FW_TRY(fw_pulloff_solve(&pulloff, &peak, fault));
    computed[0] = peak.force_N;
    return FW_OK;
}

/* c / R; with: gap um. */
static fw_status core_of_disc(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    computed[0] = sqrt(fw_law_core(FW_LAW_ATMOSPHERE / (q_at(proof->with[0]) * 100 / 4)));
    return FW_OK;
}

/* A disc of r px under a cap: G. */
static fw_status disc_integral(double r, double px_mm, double obstacle_mm2, double *g,
                               fw_fault *fault)
{
    const fw_figure_pull pull = {
        .px_mm = px_mm, .py_mm = px_mm, .obstacle_mm2 = obstacle_mm2, .tolerance = 1e-10};
    fw_figure figure;
    fw_film_solution solution;
    FW_TRY(fw_figure_round(r, &figure, fault));
    const fw_status status = fw_figure_solve(&figure, &pull, &solution, fault);
    *g = solution.integral_mm4;
    fw_film_solution_free(&solution);
    fw_figure_free(&figure);
    return status;
}

/* R 10 mm = 100 px; with: gap um. */
static fw_status disc_mask_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const double q = q_at(proof->with[0]);
    FW_TRY(disc_integral(100, 0.1, FW_LAW_ATMOSPHERE / q, &computed[0], fault));
    computed[0] *= q;
    return FW_OK;
}

/* F / F0, R 50 px; with: the cap as a share of the suction in the middle. */
static fw_status disc_share(const fw_proof *proof, double *computed, fw_fault *fault)
{
    FW_TRY(disc_integral(50, 1, proof->with[0] * 50 * 50 / 4, &computed[0], fault));
    computed[0] /= fw_law_disc(50);
    return FW_OK;
}

/* ---- any mask ---- */

/* A plate of odd outline with a cavity and a slot that is open. */
static fw_status draw_plate(fw_figure *out, fw_fault *fault)
{
    FW_TRY(fw_figure_new(140, 110, out, fault));
    fw_figure_box(out, 5, 8, 100, 100, FW_FIGURE_FILM);
    fw_figure_disc(out, 95, 45, 37, FW_FIGURE_FILM);
    fw_figure_disc(out, 85, 40, 11, FW_FIGURE_CAVITY);
    fw_figure_box(out, 20, 70, 80, 75, FW_FIGURE_OPEN);
    return FW_OK;
}

static fw_status solve_plate(double obstacle_mm2, fw_film_solution *out, fw_fault *fault)
{
    const fw_figure_pull pull = {
        .px_mm = 0.05, .py_mm = 0.07, .obstacle_mm2 = obstacle_mm2, .tolerance = 1e-10};
    fw_figure figure;
    FW_TRY(draw_plate(&figure, fault));
    const fw_status status = fw_figure_solve(&figure, &pull, out, fault);
    fw_figure_free(&figure);
    return status;
}

/* What is held against a bound: with[0] of the rows. */
enum { OF_AREA, OF_FREE, OF_CAP, RESIDUAL, BOUNDS }; /* F / (P A), F / F uncapped, s / P */

/* At a share of its highest suction. */
static fw_status plate_bounds(double share, double out[BOUNDS], fw_fault *fault)
{
    fw_film_solution without, capped;
    FW_TRY(solve_plate(0, &without, fault));
    const double cap = share * without.peak_u_mm2, most = without.integral_mm4;
    fw_film_solution_free(&without);
    FW_TRY(solve_plate(cap, &capped, fault));
    out[OF_AREA] = capped.integral_mm4 / (cap * capped.area_mm2);
    out[OF_FREE] = capped.integral_mm4 / most;
    out[OF_CAP] = capped.peak_u_mm2 / cap;
    out[RESIDUAL] = capped.residual;
    fw_film_solution_free(&capped);
    return FW_OK;
}

static fw_status plate_at_caps(const fw_proof *proof, double *computed, fw_fault *fault)
{
    static const double shares[3] = {0.5, 0.25, 0.1};
    for (int i = 0; i < proof->count; i++) {
        double bounds[BOUNDS] = {0};
        FW_TRY(plate_bounds(shares[i], bounds, fault));
        computed[i] = bounds[(int)proof->with[0]];
    }
    return FW_OK;
}

/* ---- a long strip ---- */

/* Breadth 1 mm on `width` px, long pixels; the cap is a quarter of the suction in its middle. */
static fw_status solve_strip(int32_t width, int32_t length_mm, fw_film_solution *out,
                             fw_fault *fault)
{
    enum { LONG = 10 }; /* a pixel is so many times as long as broad */
    const double px_mm = 1.0 / width;
    const fw_figure_pull pull = {
        .px_mm = px_mm, .py_mm = LONG * px_mm, .obstacle_mm2 = 0.25 / 8, .tolerance = 1e-9};
    fw_figure figure;
    const int32_t rows = length_mm * width / LONG;
    FW_TRY(fw_figure_new(width, rows, &figure, fault));
    fw_figure_box(&figure, 0, 0, width, rows, FW_FIGURE_FILM);
    const fw_status status = fw_figure_solve(&figure, &pull, out, fault);
    fw_figure_free(&figure);
    return status;
}

/* F / F0 by length, the difference of two lengths: it has no ends. */
static fw_status strip_share(int32_t width, double *share, fw_fault *fault)
{
    double g[2] = {0};
    for (int i = 0; i < 2; i++) {
        fw_film_solution solution;
        FW_TRY(solve_strip(width, 5 + 2 * i, &solution, fault));
        g[i] = solution.integral_mm4;
        fw_film_solution_free(&solution);
    }
    *share = (g[1] - g[0]) / 2 * 12;
    return FW_OK;
}

/* Cells of 1/100 and 1/200, the error of order 2 taken out (Richardson 1911, from memory). */
static fw_status strip_limit(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    double coarse = 0, fine = 0;
    FW_TRY(strip_share(100, &coarse, fault));
    FW_TRY(strip_share(200, &fine, fault));
    computed[0] = (4 * fine - coarse) / 3;
    return FW_OK;
}

/* Breadth of the core over that of the strip. Cells at the cap would tell it to one cell alone. But
 * nothing flows in the core, so what comes in at a wall, 2 u of the first cell over its breadth, is
 * the growth of the film between wall and core: its breadth (derived here). */
static fw_status strip_core(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    enum { WIDTH = 200 };
    fw_film_solution solution;
    FW_TRY(solve_strip(WIDTH, 5, &solution, fault));
    const fw_film_cell *row = solution.cell + solution.cell_count / WIDTH / 2 * WIDTH;
    computed[0] = 1 - 2 * WIDTH * ((double)row[0].u_mm2 + (double)row[WIDTH - 1].u_mm2);
    fw_film_solution_free(&solution);
    return FW_OK;
}

#define RADIAL "radial problem, derived here; the model: Almqvist and Wall 2016"
#define STRIP "problem of the strip, derived here; the model: Almqvist and Wall 2016"
#define THEORY "complementarity, Almqvist and Wall 2016"

static const fw_proof rows[] = {
    FW_CHECK("C1.1", "disc R 10 mm, 100 um, 101325 Pa, closed form: F, N", FW_EQUAL(19.1908130),
             1e-7, RADIAL, FW_BY(capped_disc_N, 100)),
    FW_CHECK("C1.2", "the same: core radius over R", FW_EQUAL(0.31227017), 1e-7, RADIAL,
             FW_BY(core_of_disc, 100)),
    FW_CHECK("C1.3", "the same as a mask, R 100 px: F, N", FW_EQUAL(19.1908130), 5e-3, RADIAL,
             FW_BY(disc_mask_N, 100)),
    FW_CHECK("C2.1", "gap 50 um, closed form: F, N", FW_EQUAL(27.4642473), 1e-7, RADIAL,
             FW_BY(capped_disc_N, 50)),
    FW_CHECK("C2.2", "gap 20 um, closed form: F, N", FW_EQUAL(30.7289757), 1e-7, RADIAL,
             FW_BY(capped_disc_N, 20)),
    FW_CHECK("C2.3", "gap 50 um: core radius over R", FW_EQUAL(0.78631433), 1e-7, RADIAL,
             FW_BY(core_of_disc, 50)),
    FW_CHECK("C2.4", "gap 20 um: core radius over R", FW_EQUAL(0.94755256), 1e-7, RADIAL,
             FW_BY(core_of_disc, 20)),
    FW_CHECK("C2.5", "gap 50 um as a mask, R 100 px: F, N", FW_EQUAL(27.4642473), 5e-3, RADIAL,
             FW_BY(disc_mask_N, 50)),
    FW_CHECK("C2.6", "gap 20 um as a mask, R 100 px: F, N", FW_EQUAL(30.7289757), 5e-3, RADIAL,
             FW_BY(disc_mask_N, 20)),
    FW_CHECK("C3.1", "plate with cavity and slot, three caps: F over P A", FW_AT_MOST(1, 1, 1),
             1e-12, THEORY, FW_BY(plate_at_caps, OF_AREA)),
    FW_CHECK("C3.2", "the same: F over F without a cap", FW_AT_MOST(1, 1, 1), 1e-12, THEORY,
             FW_BY(plate_at_caps, OF_FREE)),
    FW_CHECK("C3.3", "the same: highest suction over P", FW_AT_MOST(1, 1, 1), 1e-12, THEORY,
             FW_BY(plate_at_caps, OF_CAP)),
    FW_CHECK("C4.1", "disc R 50 px, P half the middle suction: F over F0", FW_EQUAL(0.66149), 3e-3,
             RADIAL, FW_BY(disc_share, 0.5)),
    FW_CHECK("C4.2", "disc R 50 px, P a quarter of it: F over F0", FW_EQUAL(0.38143), 3e-3, RADIAL,
             FW_BY(disc_share, 0.25)),
    FW_CHECK("C4.3", "disc R 50 px, P a tenth of it: F over F0", FW_EQUAL(0.17012), 3e-3, RADIAL,
             FW_BY(disc_share, 0.1)),
    FW_CHECK("C5.1", "strip, P a quarter of it: F over F0, limit of cells", FW_EQUAL(0.3125), 1e-6,
             STRIP, FW_BY(strip_limit, 0)),
    FW_CHECK("C5.2", "the same: breadth of the core, from what flows in", FW_EQUAL(0.5), 1e-6,
             STRIP, FW_BY(strip_core, 0)),
    FW_CHECK("C6", "the plate of C3: residual over the source", FW_WITHIN(0, 0, 0), 1e-9, THEORY,
             FW_BY(plate_at_caps, RESIDUAL)),
};

const fw_proof_table fw_proofs_cap = FW_PROOF_ROWS(rows);
