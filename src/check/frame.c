#include "check/frame.h"

#include "fault/memory.h"
#include "physics/approach.h"
#include "physics/bracket.h"
#include "physics/pulloff.h"

#include <math.h>
#include <stdlib.h>

/* A cluster that is at its cap somewhere up to the largest q asked: its load curve, or, under a
 * plate that tilts, min(slope q, most), which its force never exceeds. */
typedef struct law_piece {
    const fw_film_curve *curve; /* NULL: the two */
    double slope_mm4, most_N;
} law_piece;

/* A layer's load law: a straight part and the pieces. */
typedef struct layer_law {
    double slope_mm4;
    law_piece *piece; /* [count] */
    size_t count;
} layer_law;

static double law_N(const void *context, double q)
{
    const layer_law *law = context;
    double sum = law->slope_mm4 * q;
    for (size_t i = 0; i < law->count; i++) {
        const law_piece *piece = &law->piece[i];
        sum += piece->curve != NULL ? fw_film_curve_force(piece->curve, q)
                                    : fmin(piece->slope_mm4 * q, piece->most_N);
    }
    return sum;
}

static bool stays_straight(const fw_setup *setup, const fw_cluster *cluster, double q)
{
    const fw_film_solution *solution = cluster->solution;
    return solution == NULL || (!solution->capped && q * solution->peak_u_mm2 <= setup->cap_MPa);
}

static fw_status solve_at(fw_film_memo *memo, const fw_cluster *cluster, double obstacle_mm2,
                          const fw_film_solution **out, fw_fault *fault)
{
    const fw_film_options options = {.obstacle_mm2 = obstacle_mm2};
    return fw_film_memo_solve(memo, &cluster->shape, &options, out, fault);
}

static fw_status make_piece(const fw_setup *setup, fw_film_memo *memo, const fw_cluster *cluster,
                            double most_q, law_piece *out, fw_fault *fault)
{
    const fw_film_options options = {0};
    const fw_film_solution *free_film = NULL, *capped = NULL;
    *out = (law_piece){0};
    if (setup->job->machine.mode != FW_MODE_TILT)
        return fw_film_memo_curve(memo, &cluster->shape, &options, setup->cap_MPa, &out->curve,
                                  fault);
    FW_TRY(solve_at(memo, cluster, INFINITY, &free_film, fault));
    FW_TRY(solve_at(memo, cluster, setup->cap_MPa / most_q, &capped, fault));
    out->slope_mm4 = free_film->integral_mm4;
    out->most_N = most_q * capped->integral_mm4;
    return FW_OK;
}

/* Free law->piece in any case. */
static fw_status make_law(const fw_setup *setup, fw_film_memo *memo, const fw_peel *peel,
                          double most_q, layer_law *law, fw_fault *fault)
{
    *law = (layer_law){0};
    FW_TRY(fw_allocate((void **)&law->piece, peel->count, sizeof *law->piece, "load law", fault));
    for (uint32_t c = 0; c < peel->count; c++) {
        const fw_cluster *cluster = &peel->cluster[c];
        if (stays_straight(setup, cluster, most_q))
            law->slope_mm4 +=
                cluster->solution != NULL ? cluster->solution->integral_mm4 : cluster->bound_mm4;
        else
            FW_TRY(make_piece(setup, memo, cluster, most_q, &law->piece[law->count++], fault));
    }
    return FW_OK;
}

static fw_status find_peak(const fw_setup *setup, const layer_law *law, double gap_um,
                           double *force_N, fw_fault *fault)
{
    const fw_machine *machine = &setup->job->machine;
    const fw_pulloff pulloff = {.law = {law_N, law},
                                .viscosity_mPa_s = setup->job->resin.viscosity_mPa_s,
                                .speed_mm_s = machine->speed_mm_s,
                                .gap_um = gap_um,
                                .stiffness_N_mm = machine->stiffness_N_mm};
    fw_pulloff_peak peak;
    FW_TRY(fw_pulloff_solve(&pulloff, &peak, fault));
    *force_N = peak.force_N;
    return FW_OK;
}

/* The q at which the law gives the force; most_q, the rigid machine's, gives no less. */
static double q_of(const layer_law *law, double force_N, double most_q)
{
    if (law->count == 0)
        return fmin(force_N / law->slope_mm4, most_q);
    const double top = law_N(law, most_q) - force_N;
    if (!(top > 0))
        return most_q;
    fw_bracket bracket = {.at = {0, most_q}, .value = {-force_N, top}, .moved = -1};
    double q = most_q;
    for (int i = 0; i < 100 && bracket.at[1] - bracket.at[0] > 1e-9 * most_q; i++) {
        q = fw_bracket_next(&bracket);
        fw_bracket_put(&bracket, q, law_N(law, q) - force_N);
    }
    return bracket.at[1];
}

static fw_status relax_cluster(const fw_setup *setup, fw_film_memo *memo, double q,
                               fw_cluster *cluster, fw_fault *fault)
{
    if (cluster->solution == NULL) {
        cluster->force_N *= q / cluster->q;
    } else {
        if (cluster->solution->capped)
            FW_TRY(solve_at(memo, cluster, setup->cap_MPa / q, &cluster->solution, fault));
        cluster->force_N = q * cluster->solution->integral_mm4;
        cluster->limited_by = cluster->solution->capped ? FW_BY_CAP : FW_BY_FILM;
    }
    cluster->q = q;
    return FW_OK;
}

static fw_status relax_all(const fw_setup *setup, fw_film_memo *memo, fw_peel *peel,
                           fw_fault *fault)
{
    for (uint32_t c = 0; c < peel->count; c++)
        FW_TRY(relax_cluster(setup, memo, peel->q, &peel->cluster[c], fault));
    return FW_OK;
}

static bool gives(const fw_setup *setup)
{
    return setup->traction.law == FW_TRACTION_NONE && setup->job->machine.stiffness_N_mm > 0;
}

fw_status fw_frame_relax(const fw_setup *setup, fw_film_memo *memo, fw_peel *peel, fw_fault *fault)
{
    layer_law law = {0};
    double force_N = 0;
    if (!gives(setup) || peel->count == 0)
        return FW_OK;
    fw_status status = make_law(setup, memo, peel, setup->q, &law, fault);
    if (status == FW_OK)
        status = find_peak(setup, &law, setup->job->machine.gap_um, &force_N, fault);
    if (status == FW_OK && force_N > 0) {
        peel->q = q_of(&law, force_N, setup->q);
        status = relax_all(setup, memo, peel, fault);
    }
    free(law.piece);
    return status;
}

fw_status fw_frame_range(const fw_setup *setup, fw_film_memo *memo, const fw_peel *peel, int end,
                         double *force_N, fw_fault *fault)
{
    layer_law law = {0};
    fw_status status = make_law(setup, memo, peel, setup->q_range[end], &law, fault);
    if (status == FW_OK)
        status = find_peak(setup, &law, setup->job->machine.gap_range_um[end], force_N, fault);
    free(law.piece);
    return status;
}

/* G of the layer, without a cap. */
static fw_status free_integral(fw_film_memo *memo, const fw_peel *peel, double *sum,
                               fw_fault *fault)
{
    *sum = 0;
    for (uint32_t c = 0; c < peel->count; c++) {
        const fw_cluster *cluster = &peel->cluster[c];
        const fw_film_solution *solution = cluster->solution;
        if (solution != NULL && solution->capped)
            FW_TRY(solve_at(memo, cluster, INFINITY, &solution, fault));
        *sum += solution != NULL ? solution->integral_mm4 : cluster->bound_mm4;
    }
    return FW_OK;
}

fw_status fw_frame_approach(const fw_setup *setup, fw_film_memo *memo, fw_peel *peel,
                            fw_fault *fault)
{
    const fw_machine *machine = &setup->job->machine;
    fw_approach approach = {.viscosity_mPa_s = setup->job->resin.viscosity_mPa_s,
                            .speed_mm_s = machine->approach_mm_s,
                            .to_um = machine->approach_to_um,
                            .stiffness_N_mm = machine->stiffness_N_mm,
                            .stop = FW_APPROACH_DRIVE};
    double gap_um;
    peel->push_N = 0;
    if (machine->approach_mm_s == 0 || setup->traction.law != FW_TRACTION_NONE || peel->count == 0)
        return FW_OK;
    FW_TRY(free_integral(memo, peel, &approach.integral_mm4, fault));
    return fw_approach_solve(&approach, &peel->push_N, &gap_um, fault);
}
