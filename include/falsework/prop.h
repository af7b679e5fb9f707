/* Adds posts to a raw stack, sizes them to what they must carry, writes the supported stack, reads
 * it back and judges what was written. */
#ifndef FALSEWORK_PROP_H
#define FALSEWORK_PROP_H

#include "falsework/survey.h"

#ifdef __cplusplus
extern "C" {
#endif

/* Writes the folder `out`: layers/ (refused/ where the gate refuses), posts.json, report.json,
 * SHA256SUMS, INPUT-SHA256SUMS. It appears whole or not at all; the raw stack is only read, and no
 * pixel of it is ever lowered. replace: an earlier output of ours may be replaced. Both cards and
 * post rules are needed. FALSEWORK_OK also when the gate refuses: see the verdict. options may be
 * NULL. The caller closes *report. */
FALSEWORK_API falsework_status falsework_prop(const falsework_stack *stack,
                                              const falsework_job *job, const char *out,
                                              int replace, const falsework_options *options,
                                              falsework_report **report, falsework_fault *fault);

#ifdef __cplusplus
}
#endif
#endif
