#include "passes/pass.h"

#include <omp.h>
#include <stdlib.h>

/* The table of budgets stands in DEVELOPERS.md; their sum stays under 512 MiB. */
enum { MIB = 1024 * 1024, FILES_MIB = 64, RUNS_MIB = 128, MEMO_MIB = 96, STORE_MIB = 96 };

fw_pass_options fw_pass_defaults(void)
{
    return (fw_pass_options){.batch = FW_BATCH, .memo_MiB = MEMO_MIB, .store_MiB = STORE_MIB};
}

fw_status fw_pass_open(const fw_pass_options *options, fw_pass *out, fw_fault *fault)
{
    *out = (fw_pass){.options = *options,
                     .files = {.holder = "file buffers", .limit = (size_t)FILES_MIB * MIB},
                     .runs = {.holder = "decoded layers", .limit = (size_t)RUNS_MIB * MIB},
                     .memo_budget = {.holder = "peel memo", .limit = options->memo_MiB * MIB},
                     .store_budget = {.holder = "layer store", .limit = options->store_MiB * MIB}};
    if (out->options.batch <= 0)
        out->options.batch = FW_BATCH;
    omp_set_num_threads(options->threads > 0 ? options->threads : omp_get_num_procs());
    FW_TRY(fw_allocate((void **)&out->times, 1, sizeof *out->times, "pass", fault));
    return fw_film_memo_create(&out->memo_budget, &out->memo, fault);
}

void fw_pass_close(fw_pass *pass)
{
    if (pass->memo != NULL)
        fw_film_memo_free(pass->memo);
    free(pass->times);
    *pass = (fw_pass){0};
}

fw_status fw_pass_tick(const fw_pass *pass, const char *phase, int32_t done, int32_t total,
                       fw_fault *fault)
{
    if (pass->options.stop != NULL && *pass->options.stop)
        return fw_fault_set(fault, FW_STOPPED, "stopped, %s, nothing was written", phase);
    if (pass->options.progress != NULL)
        pass->options.progress(pass->options.progress_context, phase, done, total);
    return FW_OK;
}

fw_status fw_pass_first_fault(const fw_fault *faults, int32_t count, fw_fault *fault)
{
    for (int32_t i = 0; i < count; i++) {
        if (faults[i].status == FW_OK)
            continue;
        if (fault != NULL)
            *fault = faults[i];
        return faults[i].status;
    }
    return FW_OK;
}
