/* A job: the stack's geometry, the two cards, the post rules and the gate, from YAML. */
#ifndef FALSEWORK_JOB_H
#define FALSEWORK_JOB_H

#include "falsework/fault.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef struct falsework_job falsework_job;

/* Reads a job and the cards that it names (paths relative to the job). FALSEWORK_INPUT with file,
 * line and key for whatever is wrong in them. The caller closes *job. */
FALSEWORK_API falsework_status falsework_job_open(const char *path, falsework_job **job,
                                                  falsework_fault *fault);
FALSEWORK_API void falsework_job_close(falsework_job *job); /* NULL is allowed */

/* Replace one card, for "what if" rechecks. On failure the job keeps the card that it had. */
FALSEWORK_API falsework_status falsework_job_use_resin(falsework_job *job, const char *path,
                                                       falsework_fault *fault);
FALSEWORK_API falsework_status falsework_job_use_machine(falsework_job *job, const char *path,
                                                         falsework_fault *fault);

#ifdef __cplusplus
}
#endif
#endif
