/* What stands behind the public handles. */
#ifndef FW_PASSES_API_H
#define FW_PASSES_API_H

#include "cards/job_read.h"
#include "check/report.h"
#include "falsework/recheck.h"
#include "passes/pass.h"
#include "stack/output.h"

struct falsework_job {
    fw_job job;
    fw_job_sources sources;
};

struct falsework_stack {
    fw_stack *stack;
};

struct falsework_posts {
    fw_posts posts;
    char raw_sha256[FW_DIGEST_HEX];
    int32_t lift_layers;
};

struct falsework_report {
    fw_report report;
};

/* Hands an inner status and fault out. */
falsework_status fw_api_status(fw_status status, const fw_fault *inner, falsework_fault *fault);

/* Opens a pass with the caller's options (NULL: defaults). */
fw_status fw_api_pass(const falsework_options *options, fw_pass *out, fw_fault *fault);
void fw_api_pass_done(const falsework_options *options, fw_pass *pass);

/* The output rules that protect the stack and all files of the job. sources has room for them. */
fw_output_rules fw_api_output(const falsework_stack *stack, const falsework_job *job,
                              const char *out, int replace, const char *protect[FW_SOURCE_COUNT]);

#endif
