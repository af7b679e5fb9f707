/* The output folder: appears whole under its name, or not at all.
 *
 * Order of use: fw_output_check before any work; fw_output_begin; folders and files; at the end
 * fw_output_publish; and in every case fw_output_close, which removes what was not published (so a
 * failed or stopped run leaves nothing behind). One thread at a time.
 */
#ifndef FW_OUTPUT_H
#define FW_OUTPUT_H

#include "stack/digest.h"
#include "stack/folder.h"

typedef struct fw_output fw_output;

typedef struct fw_output_rules {
    const char *path;           /* --out */
    const char *stack;          /* the input folder or file, NULL = none */
    const char *const *protect; /* [protect_count] files whose folder must survive: job, cards */
    size_t protect_count;
    bool replace; /* --replace */
} fw_output_rules;

/* FW_INPUT, with the reason, when the output
 * - is, holds or lies inside the stack; is or holds the current folder or the folder of a protected
 *   file (all compared by device and inode, links resolved); is a mount point;
 * - exists, even as an empty folder, unless `replace` and it is an earlier output of ours: its
 *   report.json carries "format": "falsework-report/1" and its SHA256SUMS lists every file in it (a
 *   stranger is named);
 * - has no parent folder, or an unusable name.
 * Changes nothing on disk. */
fw_status fw_output_check(const fw_output_rules *rules, fw_fault *fault);

/* Checks again, removes stale staging folders of the same name (whose lock is free), and makes a
 * staging folder ".NAME.part-XXXXXX" beside the output, locked. rules is not kept. */
fw_status fw_output_begin(const fw_output_rules *rules, fw_output **out, fw_fault *fault);

/* Path of the staging folder: for a temporary file, or to read written layers back. Borrowed. */
const char *fw_output_staging(const fw_output *output);

/* Makes the folder `name` (one level) in the output. */
fw_status fw_output_folder(fw_output *output, const char *name, fw_fault *fault);

/* Renames it, files and all ("layers" to "refused"). */
fw_status fw_output_rename(fw_output *output, const char *from, const char *to, fw_fault *fault);

/* Writes a new file; path is relative ("report.json", "layers/0001.png"). Its digest goes into
 * SHA256SUMS, and into sha256 (may be NULL). FW_MACHINE on a full disk and the like. */
fw_status fw_output_write(fw_output *output, const char *path, const void *bytes, size_t size,
                          uint8_t *sha256, fw_fault *fault);

/* Writes layer `index` of the input as it is; FW_INPUT naming the file when its digest is no longer
 * `sha256` (it changed while we worked). */
fw_status fw_output_copy(fw_output *output, const char *path, const fw_stack *stack, int32_t index,
                         const uint8_t sha256[FW_SHA256], fw_fault *fault);

/* A file written in pieces (a report): open, append, finish. One at a time. A file that was not
 * finished is an error at publish. */
fw_status fw_output_open_file(fw_output *output, const char *path, fw_fault *fault);
fw_status fw_output_append(fw_output *output, const void *bytes, size_t size, fw_fault *fault);
fw_status fw_output_finish_file(fw_output *output, fw_fault *fault);

/* Writes INPUT-SHA256SUMS: the digests of the stack's files in the form of `sha256sum`. sha256 has
 * shape [fw_stack_count(stack)][32]. */
fw_status fw_output_input_sums(fw_output *output, const fw_stack *stack,
                               const uint8_t (*sha256)[FW_SHA256], fw_fault *fault);

/* Writes SHA256SUMS, syncs, and gives the folder its name. On failure nothing is published. */
fw_status fw_output_publish(fw_output *output, fw_fault *fault);

/* Removes the staging folder unless published, and frees. NULL is allowed. Call it from normal
 * control flow, also after a signal has set the stop flag (it is not async-signal-safe). */
void fw_output_close(fw_output *output);

#endif
