/* Looks at a raw stack: what starts unanchored, reaches too far, sucks, pulls. Changes nothing. */
#ifndef FALSEWORK_SURVEY_H
#define FALSEWORK_SURVEY_H

#include "falsework/report.h"
#include "falsework/stack.h"

#include <signal.h>

#ifdef __cplusplus
extern "C" {
#endif

/* How a pass runs; none of it changes a byte of what comes out. */
typedef struct falsework_options {
    int threads;      /* 0 = as many as the machine has */
    int batch;        /* layers taken at a time; 0 = 16 */
    size_t memo_MiB;  /* memory for peel solutions that recur; 0 = solve each anew */
    size_t store_MiB; /* memory for packed layers; what is beyond goes to a nameless file */
    const volatile sig_atomic_t *stop; /* NULL; or set it to end the pass with FALSEWORK_STOPPED */
    /* NULL; or told what is done, from the calling thread */
    void (*progress)(void *context, const char *phase, int32_t done, int32_t total);
    void *progress_context;
    /* NULL; or told at the end how much wall time each kind of work took */
    void (*timing)(void *context, const char *work, double seconds);
    void *timing_context;
    int64_t *decodes; /* NULL; or receives the number of PNG files that were decoded */
} falsework_options;

/* Fits in 512 MiB. */
FALSEWORK_API falsework_options falsework_options_default(void);

/* Reads the stack once. Without a resin or machine card it does what geometry alone can, lists what
 * was not checked, and the verdict is FALSEWORK_INCOMPLETE. options may be NULL. The caller closes
 * *report. */
FALSEWORK_API falsework_status falsework_survey(const falsework_stack *stack,
                                                const falsework_job *job,
                                                const falsework_options *options,
                                                falsework_report **report, falsework_fault *fault);

/* Writes the folder `out` with report.json and SHA256SUMS, whole or not at all, under the same
 * rules as prop's output: it must not touch the stack, the job or the cards. replace: an earlier
 * output of ours may be replaced. */
FALSEWORK_API falsework_status falsework_report_publish(const falsework_report *report,
                                                        const falsework_stack *stack,
                                                        const falsework_job *job, const char *out,
                                                        int replace, falsework_fault *fault);

/* The rules for an `out` folder alone, to be asked before any work. Changes nothing. */
FALSEWORK_API falsework_status falsework_out_check(const falsework_stack *stack,
                                                   const falsework_job *job, const char *out,
                                                   int replace, falsework_fault *fault);

#ifdef __cplusplus
}
#endif
#endif
