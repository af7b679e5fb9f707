/* J: what light does to a layer, and to those before it. */
#include "calibrate/proofs.h"
#include "physics/cure.h"

#include <math.h>

/* with: Dp, Ec, dose, units of depth over um. */
static fw_status depth(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    const double *w = proof->with;
    computed[0] = fw_cure_depth_um(w[0] * w[3], w[1], w[2]) / w[3];
    return FW_OK;
}

/* with: Dp um, Ec, depth um. */
static fw_status dose(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    computed[0] = fw_cure_dose(proof->with[0], proof->with[1], proof->with[2]);
    return FW_OK;
}

static fw_status depth_of_too_little(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    static const double doses[] = {8, 7.999, 1e-300, 0};
    for (int i = 0; i < proof->count; i++)
        computed[i] = fw_cure_depth_um(150, 8, doses[i]);
    return FW_OK;
}

/* Dp 150 um, Ec 8, E0 40 mJ/cm2, layers of 50 um. */
static const fw_resin resin = {
    .penetration_um = 150, .critical_mJ_cm2 = 8, .exposure_mJ_cm2 = 40, .joint_ratio = 1};

/* After 1, 2, 3, 5, 10 and all layers; with: depth um in its own layer. */
static fw_status doses_after(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    static const double layers[] = {1, 2, 3, 5, 10, (double)INFINITY};
    for (int i = 0; i < proof->count; i++)
        computed[i] = fw_cure_dose_after(&resin, 50, proof->with[0], layers[i]);
    return FW_OK;
}

/* The same by adding up layer after layer, as a pass would; all: 2000 of them. */
static fw_status doses_added(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)fault;
    static const int layers[] = {1, 2, 3, 5, 10, 2000};
    fw_cure_column column = fw_cure_column_begin(&resin, proof->with[0]);
    for (int i = 0, n = 0; i < proof->count; i++) {
        for (; n < layers[i]; n++)
            fw_cure_column_add(&column, 1, exp(-50.0 / 150));
        computed[i] = column.dose_mJ_cm2;
    }
    return FW_OK;
}

static fw_status print_through(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    (void)fault;
    computed[0] = fw_cure_print_through_um(&resin, 50);
    return FW_OK;
}

static fw_status fit(const fw_proof *proof, double *computed, fw_fault *fault)
{
    (void)proof;
    const double at[2][2] = {{20, 100}, {50, 200}};
    return fw_cure_fit(at, &computed[0], &computed[1], fault);
}

#define JACOBS "working curve, Jacobs 1992"
#define HERE "derived here from Jacobs 1992"

static const fw_proof rows[] = {
    FW_CHECK("J1", "Dp 150 um, Ec 8, E 40 mJ/cm2: cure depth, um", FW_EQUAL(241.415687), 1e-8,
             JACOBS, FW_BY(depth, 150, 8, 40, 1)),
    FW_CHECK("J2", "Dp 0.175 mm, Ec 8, E 30 mJ/cm2: cure depth, mm", FW_WITHIN(0.231), 5e-4,
             "a textbook's worked example of Jacobs 1992", FW_BY(depth, 0.175, 8, 30, 1000)),
    FW_CHECK("J3", "the resin of J1: dose for 100 um, mJ/cm2", FW_EQUAL(15.5818723), 1e-8, JACOBS,
             FW_BY(dose, 150, 8, 100)),
    FW_CHECK("J4", "dose at Ec and below: cure depth, um", FW_WITHIN(0, 0, 0, 0), 0,
             "definition of Ec, Jacobs 1992", FW_BY(depth_of_too_little, 0)),
    FW_CHECK("J5.1", "dose at the window side, 1 .. all layers, mJ/cm2",
             FW_EQUAL(40, 68.66125, 89.19794, 114.45700, 136.07514, 141.10906), 1e-7, HERE,
             FW_BY(doses_after, 0)),
    FW_CHECK("J5.2", "dose at the far side, 1 .. all layers, mJ/cm2",
             FW_EQUAL(28.66125, 49.19794, 63.91311, 82.01202, 97.50210, 101.10906), 1e-7, HERE,
             FW_BY(doses_after, 50)),
    FW_CHECK("J5.3", "J5.2 by adding layer after layer, mJ/cm2",
             FW_EQUAL(28.66125, 49.19794, 63.91311, 82.01202, 97.50210, 101.10906), 1e-7, HERE,
             FW_BY(doses_added, 50)),
    FW_CHECK("J5.4", "print-through under endless layers of 50 um: um", FW_EQUAL(380.513728), 1e-7,
             HERE, FW_BY(print_through, 0)),
    FW_CHECK("J6", "fit to (20, 100 um) and (50, 200 um): Dp um, Ec", FW_EQUAL(109.135667, 8), 1e-8,
             HERE, FW_BY(fit, 0)),
};

const fw_proof_table fw_proofs_cure = FW_PROOF_ROWS(rows);
