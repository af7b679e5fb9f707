/* Public table of handbook checks. */
#include "calibrate/proof.h"
#include "falsework/prove.h"
#include "fault/memory.h"
#include "passes/api.h"

#include <stdlib.h>

static falsework_proof row_of(const fw_proof *proof, const fw_proof_result *result)
{
    return (falsework_proof){.id = proof->id,
                             .what = proof->what,
                             .source = proof->source,
                             .kind = (falsework_proof_kind)proof->kind,
                             .count = proof->count,
                             .expected = proof->expected,
                             .computed = result->computed,
                             .worst = result->worst,
                             .error = result->error,
                             .tolerance = proof->tolerance,
                             .passed = result->passed};
}

static falsework_status give(const fw_proof_result *result, falsework_proof_taker take,
                             void *context, falsework_proved *proved)
{
    for (size_t i = 0; i < fw_proof_count(); i++) {
        const falsework_proof row = row_of(fw_proof_at(i), &result[i]);
        if (row.kind == FALSEWORK_PROOF_NOT_COMPUTED)
            proved->not_computed++;
        else
            *(row.passed ? &proved->passed : &proved->failed) += 1;
        const falsework_status status = take(context, &row);
        if (status != FALSEWORK_OK)
            return status;
    }
    return FALSEWORK_OK;
}

falsework_status falsework_prove(const falsework_options *options, falsework_proof_taker take,
                                 void *context, falsework_proved *proved, falsework_fault *fault)
{
    const falsework_options chosen = options != NULL ? *options : falsework_options_default();
    fw_fault inner = {0};
    fw_proof_result *result = NULL;
    *proved = (falsework_proved){0};
    fw_status status =
        fw_allocate((void **)&result, fw_proof_count(), sizeof *result, "handbook checks", &inner);
    if (status == FW_OK)
        status = fw_proof_run_all(chosen.threads, chosen.stop, result, &inner);
    falsework_status given = FALSEWORK_OK;
    if (status == FW_OK)
        given = give(result, take, context, proved);
    free(result);
    if (given != FALSEWORK_OK) {
        *proved = (falsework_proved){0};
        status = fw_fault_set(&inner, (fw_status)given, "%s",
                              "what takes the checks ended it, handbook checks, see what it says");
    }
    return fw_api_status(status, &inner, fault);
}
