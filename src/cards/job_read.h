/* The job file and the two cards, read from YAML into the structs that the physics and the posts
 * want.
 *
 * Every refusal is one line `file:line: key: what, and what to do` with status FW_INPUT: an
 * unknown, repeated or missing key, a number that is not plain decimal, a value out of its range,
 * values that cannot stand together. A file that cannot be opened or is no plain file is FW_INPUT
 * as well; no memory is FW_MACHINE. After a failure *out and *sources are zeroed and own nothing.
 * Not for use by several threads on the same structs; no global state.
 */
#ifndef FW_CARDS_JOB_READ_H
#define FW_CARDS_JOB_READ_H

#include "check/job.h"
#include "fault/fault.h"

/* Which files were read, as paths that open from the current folder (relative paths inside a job
 * count from the job file's folder). For the output folder's protection and the input digests. */
enum { FW_SOURCE_JOB, FW_SOURCE_RESIN, FW_SOURCE_MACHINE, FW_SOURCE_COUNT };

typedef struct fw_job_sources {
    char *path[FW_SOURCE_COUNT]; /* owned; NULL where the job names none */
} fw_job_sources;

void fw_job_sources_free(fw_job_sources *sources);

/* Reads the job at path and the cards that it names. sources (may be NULL) is to be freed with
 * fw_job_sources_free. Without a `posts:` section has_rules is false and rules holds only the
 * margin. gap_range_um is both gap_um where the card gives none. */
fw_status fw_job_read(const char *path, fw_job *out, fw_job_sources *sources, fw_fault *fault);

fw_status fw_resin_read(const char *path, fw_resin *out, fw_fault *fault);
fw_status fw_machine_read(const char *path, fw_machine *out, fw_fault *fault);

/* Refuses a resin that cannot cure the job's layer thickness: the working curve's dose at the far
 * side of the layer, E0 exp(-t / Dp), is below joint_ratio Ec (Jacobs 1992, Beer-Lambert depth
 * t <= Dp ln(E0 / Ec)). fw_job_read does so itself; call it again after replacing job->resin by
 * another card, read from `path` (for the message). Does nothing when the job has no resin. */
fw_status fw_job_curable(const fw_job *job, const char *path, fw_fault *fault);

#endif
