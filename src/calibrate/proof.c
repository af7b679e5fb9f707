#include "calibrate/proof.h"

#include "calibrate/proofs.h"
#include "fault/memory.h"

#include <math.h>
#include <omp.h>
#include <stdlib.h>

const fw_proof_table *const fw_proof_tables[FW_PROOF_TABLES] = {&fw_proofs_film,  &fw_proofs_cap,
                                                                &fw_proofs_frame, &fw_proofs_tilt,
                                                                &fw_proofs_cure,  &fw_proofs_posts};

size_t fw_proof_count(void)
{
    size_t count = 0;
    for (int t = 0; t < FW_PROOF_TABLES; t++)
        count += fw_proof_tables[t]->count;
    return count;
}

const fw_proof *fw_proof_at(size_t index)
{
    int t = 0;
    for (; index >= fw_proof_tables[t]->count; t++)
        index -= fw_proof_tables[t]->count;
    return &fw_proof_tables[t]->row[index];
}

static double error_of(const fw_proof *proof, double expected, double computed)
{
    const double off = computed - expected;
    switch (proof->kind) {
    case FW_PROOF_RELATIVE:
        return fabs(off) / fabs(expected);
    case FW_PROOF_AT_MOST:
        return off / fabs(expected);
    default:
        return fabs(off);
    }
}

void fw_proof_judge(const fw_proof *proof, fw_proof_result *result)
{
    result->worst = 0;
    result->error = (double)NAN;
    result->passed = false;
    for (int i = 0; i < proof->count; i++) {
        const double error = error_of(proof, proof->expected[i], result->computed[i]);
        if (i > 0 && error <= result->error)
            continue;
        result->worst = i;
        result->error = error;
        if (isnan(error)) /* nothing is worse */
            return;
    }
    result->passed = proof->count > 0 && result->error <= proof->tolerance;
}

fw_status fw_proof_run(const fw_proof *proof, fw_proof_result *result, fw_fault *fault)
{
    for (int i = 0; i < FW_PROOF_VALUES; i++)
        result->computed[i] = (double)NAN;
    fw_fault inner = {0};
    const fw_status status =
        proof->compute != NULL ? proof->compute(proof, result->computed, &inner) : FW_INPUT;
    if (status == FW_MACHINE)
        return fw_fault_set(fault, status, "%s", inner.text);
    for (int i = 0; i < FW_PROOF_VALUES && status != FW_OK; i++)
        result->computed[i] = (double)NAN;
    fw_proof_judge(proof, result);
    return FW_OK;
}

/* The first row that did not come to its end decides. */
static fw_status first_fault(const fw_fault *inner, size_t count, fw_fault *fault)
{
    for (size_t i = 0; i < count; i++) {
        if (inner[i].status != FW_OK)
            return fw_fault_set(fault, inner[i].status, "%s", inner[i].text);
    }
    return FW_OK;
}

fw_status fw_proof_run_all(int threads, const volatile sig_atomic_t *stop, fw_proof_result *result,
                           fw_fault *fault)
{
    const size_t count = fw_proof_count();
    fw_fault *inner = NULL;
    FW_TRY(fw_allocate((void **)&inner, count, sizeof *inner, "handbook checks", fault));
    const int hands = threads > 0 ? threads : omp_get_num_procs();
#pragma omp parallel for schedule(dynamic, 1) num_threads(hands)
    for (size_t i = 0; i < count; i++) {
        if (stop != NULL && *stop != 0)
            (void)fw_fault_set(&inner[i], FW_STOPPED, "stopped, handbook checks, run it again");
        else
            (void)fw_proof_run(fw_proof_at(i), &result[i], &inner[i]);
    }
    const fw_status status = first_fault(inner, count, fault);
    free(inner);
    return status;
}
