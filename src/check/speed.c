#include "check/speed.h"

#include "physics/pulloff.h"

#include <math.h>

/* The load that the layer may have: NAN where nothing limits it. */
static double allowed_N(const fw_job *job, const fw_layer_row *row)
{
    double most = NAN; /* fmin ignores it */
    if (isfinite(row->worst_margin))
        most = row->peel_N * row->worst_margin / job->rules.margin;
    if (job->machine.drive_limit_N > 0)
        most = fmin(most, job->machine.drive_limit_N);
    if (job->max_peel_N > 0)
        most = fmin(most, job->max_peel_N);
    return most;
}

static double straight_N(const void *context, double q)
{
    return *(const double *)context * q;
}

/* slope_mm4: the layer's load over its q. */
static fw_status fastest(const fw_job *job, double slope_mm4, double most_N, double *out,
                         fw_fault *fault)
{
    const fw_pulloff pulloff = {.law = {straight_N, &slope_mm4},
                                .viscosity_mPa_s = job->resin.viscosity_mPa_s,
                                .speed_mm_s = FW_SPEED_MOST,
                                .gap_um = job->machine.gap_um,
                                .stiffness_N_mm = job->machine.stiffness_N_mm};
    return fw_pulloff_fastest(&pulloff, most_N, out, fault);
}

fw_status fw_speed_caps(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault)
{
    const fw_setup *setup = conclusion->setup;
    const fw_job *job = setup->job;
    for (int32_t n = 0; n < out->layers; n++) {
        fw_layer_row *row = &out->layer[n];
        row->speed_cap_mm_s = NAN;
        const bool shear = setup->traction.law == FW_TRACTION_SHEAR;
        const bool known = setup->traction.law == FW_TRACTION_NONE || shear;
        if (!setup->loads || !known || !(row->peel_N > 0))
            continue;
        const double most_N = allowed_N(job, row);
        if (shear && !isnan(most_N)) {
            row->speed_cap_mm_s =
                fmin(FW_SPEED_MOST, job->machine.speed_mm_s * most_N / row->peel_N);
            continue;
        }
        const bool slower_at_the_cap = row->limited_by == FW_BY_CAP && most_N < row->peel_N;
        if (isnan(most_N) || slower_at_the_cap)
            continue;
        FW_TRY(fastest(job, row->peel_N / row->peel_q, most_N, &row->speed_cap_mm_s, fault));
    }
    return FW_OK;
}
