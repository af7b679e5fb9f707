/* Looks at a stack as it is: what starts unanchored, reaches too far, sucks, pulls. */
#ifndef FW_PASSES_SURVEY_H
#define FW_PASSES_SURVEY_H

#include "passes/pass.h"

/* Reads the stack once; *out is to be freed with fw_report_free. Nothing is written. */
fw_status fw_survey(fw_pass *pass, const fw_stack *stack, const fw_job *job, fw_report *out,
                    fw_fault *fault);

#endif
