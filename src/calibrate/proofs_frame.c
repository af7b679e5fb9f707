/* K: a layer that comes off through the machine's give. A: the way back. R: laws that are measured.
 */
#include "calibrate/figure.h"
#include "calibrate/laws.h"
#include "calibrate/proofs.h"
#include "physics/approach.h"
#include "physics/film_curve.h"
#include "physics/pulloff.h"
#include "physics/traction.h"

#include <math.h>

/* with: L = k h0^4 / (C v). In units where v, h0 and k h0 are 1: drive's way and layer's way over
 * h0, F / (k h0), F over that of a rigid machine. */
static fw_status peak_of_l(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const double l = proof->with[0], g = 1 / (12 * l);
    const fw_pulloff pulloff = {.law = {fw_law_straight_N, &g},
                                .viscosity_mPa_s = 1,
                                .speed_mm_s = 1,
                                .gap_um = 1,
                                .stiffness_N_mm = 1000,
                                .tolerance = 1e-11};
    fw_pulloff_peak peak = {0};
    FW_TRY(fw_pulloff_solve(&pulloff, &peak, fault));
    computed[0] = peak.seconds * 1000;
    computed[1] = peak.gap_um - 1;
    computed[2] = peak.force_N;
    computed[3] = peak.force_N * l;
    return FW_OK;
}

/* F over sqrt(k C v) / h0; with as above. */
static fw_status share_of_soft_limit(const fw_proof *proof, double *computed, fw_fault *fault)
{
    double peak[4] = {0};
    FW_TRY(peak_of_l(proof, peak, fault));
    computed[0] = peak[2] * sqrt(proof->with[0]);
    return FW_OK;
}

static fw_status peak_of_law(fw_pulloff_law law, double gap_um, double stiffness_N_mm,
                             double tolerance, fw_pulloff_peak *peak, fw_fault *fault)
{
    const fw_pulloff pulloff = {.law = law,
                                .viscosity_mPa_s = FW_LAW_VISCOSITY,
                                .speed_mm_s = FW_LAW_SPEED,
                                .gap_um = gap_um,
                                .stiffness_N_mm = stiffness_N_mm,
                                .tolerance = tolerance};
    return fw_pulloff_solve(&pulloff, peak, fault);
}

/* Stefan's disc of 10 mm at 100 um; with: N/mm. */
static fw_status disc_on_spring(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const double g = fw_law_disc(10);
    fw_pulloff_peak peak = {0};
    FW_TRY(peak_of_law((fw_pulloff_law){fw_law_straight_N, &g}, 100, proof->with[0], 1e-9, &peak,
                       fault));
    computed[0] = peak.force_N;
    return FW_OK;
}

/* Force, time and gap of a disc under one atmosphere; with: radius mm, gap um, N/mm. */
static fw_status capped_on_spring(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const fw_law_disc_capped law = {proof->with[0], FW_LAW_ATMOSPHERE};
    fw_pulloff_peak peak = {0};
    FW_TRY(peak_of_law((fw_pulloff_law){fw_law_disc_capped_N, &law}, proof->with[1], proof->with[2],
                       1e-8, &peak, fault));
    computed[0] = peak.force_N;
    computed[1] = peak.seconds;
    computed[2] = peak.gap_um;
    return FW_OK;
}

static double curve_N(const void *context, double q)
{
    return fw_film_curve_force(context, q);
}

/* The force of the same, by the load curve of a disc of 100 px as a pass makes it; with as above.
 */
static fw_status curve_on_spring(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const fw_film_options options = {0};
    fw_figure figure;
    fw_film_shape shape;
    fw_film_curve curve;
    fw_pulloff_peak peak = {0};
    FW_TRY(fw_figure_round(100, &figure, fault));
    const double px_mm = proof->with[0] / 100;
    fw_status status = fw_figure_shape(&figure, px_mm, px_mm, &shape, fault);
    fw_figure_free(&figure);
    FW_TRY(status);
    status = fw_film_curve_build(&shape, &options, FW_LAW_ATMOSPHERE, NULL, &curve, fault);
    fw_figure_shape_free(&shape);
    FW_TRY(status);
    FW_TRY(peak_of_law((fw_pulloff_law){curve_N, &curve}, proof->with[1], proof->with[2], 0, &peak,
                       fault));
    computed[0] = peak.force_N;
    return FW_OK;
}

/* Stefan's disc driven to a gap by a machine that does not give; with: gap um. */
static fw_status approach_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const fw_approach approach = {.integral_mm4 = fw_law_disc(10),
                                  .viscosity_mPa_s = FW_LAW_VISCOSITY,
                                  .speed_mm_s = FW_LAW_SPEED,
                                  .to_um = proof->with[0]};
    double gap_um = 0;
    return fw_approach_solve(&approach, &computed[0], &gap_um, fault);
}

/* Force of a law that is nothing but 1 N/mm of rim: the outline's length. with: radius px, pixel
 * mm. */
static fw_status rim_mm(const fw_proof *proof, double *computed, fw_fault *fault)
{
    const fw_traction rim = {.law = FW_TRACTION_FILM, .rim_N_mm = 1, .front_mm = 1};
    fw_figure figure;
    fw_film_shape shape;
    fw_film_solution solution = {0};
    FW_TRY(fw_figure_round(proof->with[0], &figure, fault));
    fw_status status = fw_figure_shape(&figure, proof->with[1], proof->with[1], &shape, fault);
    fw_figure_free(&figure);
    FW_TRY(status);
    status = fw_traction_solve(&shape, &rim, &solution, fault);
    fw_figure_shape_free(&shape);
    computed[0] = solution.integral_mm4;
    fw_film_solution_free(&solution);
    return status;
}

/* A table of 10, 20 and 40 mm2 at 5, 15, 30 and 60 mm2. */
static fw_status table_N(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    static const double at[] = {5, 15, 30, 60};
    const fw_points table = {3, {{10, 1}, {20, 1.5}, {40, 3}}};
    for (int i = 0; i < proof->count; i++)
        computed[i] = fw_traction_table_N(&table, at[i]);
    return FW_OK;
}

#define TACK "Francis and Horn 2001, from memory; stiff integration, derived here"
#define CAPPED "stiff integration of the capped disc, derived here"

static const fw_proof rows[] = {
    FW_CHECK("K1.01", "L 1e-6: way of drive, of layer, F, F over rigid",
             FW_EQUAL(995.51217, 9.0455225, 986.46665, 9.8646665e-4), 1e-6, TACK,
             FW_BY(peak_of_l, 1e-6)),
    FW_CHECK("K1.02", "L 1e-4: the same", FW_EQUAL(98.134331, 3.7315681, 94.402762, 9.4402762e-3),
             1e-6, TACK, FW_BY(peak_of_l, 1e-4)),
    FW_CHECK("K1.03", "L 1e-3: the same", FW_EQUAL(30.455259, 2.2865823, 28.168677, 0.028168677),
             1e-6, TACK, FW_BY(peak_of_l, 1e-3)),
    FW_CHECK("K1.04", "L 0.01: the same", FW_EQUAL(9.2867223, 1.3244546, 7.9622677, 0.079622677),
             1e-6, TACK, FW_BY(peak_of_l, 0.01)),
    FW_CHECK("K1.05", "L 0.1: the same", FW_EQUAL(2.7374996, 0.69919725, 2.0383024, 0.20383024),
             1e-6, TACK, FW_BY(peak_of_l, 0.1)),
    FW_CHECK("K1.06", "L 0.3: the same", FW_EQUAL(1.4973449, 0.49031985, 1.0070251, 0.30210752),
             1e-6, TACK, FW_BY(peak_of_l, 0.3)),
    FW_CHECK("K1.07", "L 1: the same", FW_EQUAL(0.75476626, 0.31530039, 0.43946587, 0.43946587),
             1e-6, TACK, FW_BY(peak_of_l, 1)),
    FW_CHECK("K1.08", "L 3: the same", FW_EQUAL(0.39198065, 0.198217, 0.19376365, 0.58129096), 1e-6,
             TACK, FW_BY(peak_of_l, 3)),
    FW_CHECK("K1.09", "L 10: the same", FW_EQUAL(0.18291638, 0.10974727, 0.073169104, 0.73169104),
             1e-6, TACK, FW_BY(peak_of_l, 10)),
    FW_CHECK("K1.10", "L 30: the same", FW_EQUAL(0.086854971, 0.058770009, 0.028084963, 0.84254888),
             1e-6, TACK, FW_BY(peak_of_l, 30)),
    FW_CHECK("K1.11", "L 100: the same",
             FW_EQUAL(0.036200911, 0.026968205, 0.009232706, 0.92327060), 1e-6, TACK,
             FW_BY(peak_of_l, 100)),
    FW_CHECK("K1.12", "L 1e3: the same",
             FW_EQUAL(0.005817045, 0.0048314003, 9.8564473e-4, 0.98564473), 1e-6, TACK,
             FW_BY(peak_of_l, 1e3)),
    FW_CHECK("K1.13", "L 1e4: the same",
             FW_EQUAL(8.1107017e-4, 7.1128325e-4, 9.9786918e-5, 0.99786918), 1e-6, TACK,
             FW_BY(peak_of_l, 1e4)),
    FW_CHECK("K1.14", "L 1e5: the same",
             FW_EQUAL(1.04138702e-4, 9.41415253e-5, 9.9971763e-6, 0.99971763), 1e-6, TACK,
             FW_BY(peak_of_l, 1e5)),
    FW_CHECK("K2.1", "disc of S1 on 10 N/mm: F, N", FW_EQUAL(3.43777541), 1e-6, TACK,
             FW_BY(disc_on_spring, 10)),
    FW_CHECK("K2.2", "disc of S1 on 100 N/mm: F, N", FW_EQUAL(7.98267015), 1e-6, TACK,
             FW_BY(disc_on_spring, 100)),
    FW_CHECK("K2.3", "disc of S1 on 1000 N/mm: F, N", FW_EQUAL(14.7582174), 1e-6, TACK,
             FW_BY(disc_on_spring, 1000)),
    FW_CHECK("K2.4", "disc of S1 on 10000 N/mm: F, N", FW_EQUAL(20.5044349), 1e-6, TACK,
             FW_BY(disc_on_spring, 10000)),
    FW_CHECK("K3", "soft machine, L 1e-6: F over sqrt(k C v) / h0", FW_EQUAL(0.98646665), 1e-6,
             TACK, FW_BY(share_of_soft_limit, 1e-6)),
    FW_CHECK("K4.1", "R 10 mm, 100 um, 1000 N/mm, one atm: N, s, um",
             FW_EQUAL(14.7582, 0.0316343, 116.876), 1e-4, CAPPED,
             FW_BY(capped_on_spring, 10, 100, 1e3)),
    FW_CHECK("K4.2", "R 10 mm, 50 um, 1000 N/mm, one atm: N, s, um",
             FW_EQUAL(26.388, 0.0342535, 57.8655), 1e-4, CAPPED,
             FW_BY(capped_on_spring, 10, 50, 1e3)),
    FW_CHECK("K4.3", "R 10 mm, 20 um, 100 N/mm, one atm: N, s, um",
             FW_EQUAL(29.398, 0.307868, 33.8919), 1e-4, CAPPED,
             FW_BY(capped_on_spring, 10, 20, 1e2)),
    FW_CHECK("K4.4", "R 20 mm, 50 um, 1000 N/mm, one atm: N, s, um",
             FW_EQUAL(114.70, 0.128662, 63.9613), 1e-4, CAPPED,
             FW_BY(capped_on_spring, 20, 50, 1e3)),
    FW_CHECK("K5.1", "K4.1 by the load curve of a mask, R 100 px: F, N", FW_EQUAL(14.7582), 1e-2,
             CAPPED, FW_BY(curve_on_spring, 10, 100, 1e3)),
    FW_CHECK("K5.2", "K4.2 by the load curve of a mask, R 100 px: F, N", FW_EQUAL(26.388), 1e-2,
             CAPPED, FW_BY(curve_on_spring, 10, 50, 1e3)),
    FW_CHECK("K5.3", "K4.3 by the load curve of a mask, R 100 px: F, N", FW_EQUAL(29.398), 1e-2,
             CAPPED, FW_BY(curve_on_spring, 10, 20, 1e2)),
    FW_CHECK("K5.4", "K4.4 by the load curve of a mask, R 100 px: F, N", FW_EQUAL(114.70), 1e-2,
             CAPPED, FW_BY(curve_on_spring, 20, 50, 1e3)),
    FW_CHECK("A1", "disc of S1 driven to 100 um, rigid machine: F, N", FW_EQUAL(7.5 * FW_PI), 1e-6,
             "Stefan 1874", FW_BY(approach_N, 100)),
    FW_CHECK("R1", "law of 1 N/mm of rim, disc R 100 px of 0.05 mm: N", FW_EQUAL(10 * FW_PI), 2e-2,
             "circumference", FW_BY(rim_mm, 100, 0.05)),
    FW_CHECK("R2", "law of measured forces at 5, 15, 30, 60 mm2: N", FW_EQUAL(0.5, 1.25, 2.25, 4.5),
             1e-12, "straight lines between the points", FW_BY(table_N, 0)),
};

const fw_proof_table fw_proofs_frame = FW_PROOF_ROWS(rows);
