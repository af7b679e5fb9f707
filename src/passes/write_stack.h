/* Writes the supported stack and reads it back: what is judged is what lies on the disk. */
#ifndef FW_PASSES_WRITE_STACK_H
#define FW_PASSES_WRITE_STACK_H

#include "passes/fit.h"
#include "stack/output.h"

/* Where the stack goes: the folder inside the output, and the plan that is drawn into it. */
typedef struct fw_writing {
    fw_pass *pass;
    const fw_raw *raw;
    const fw_fit *fit;
    const fw_job *job;
    const fw_stamp_plan *plan;
    fw_output *output;
    const char *folder;           /* "layers" */
    uint8_t (*sha256)[FW_SHA256]; /* [layers] out: of the written files */
    bool *encoded;                /* [layers] out: written anew, not copied */
} fw_writing;

/* Encodes the layers that posts touch or that the lift adds; copies the files of all others. */
fw_status fw_write_stack(const fw_writing *writing, fw_fault *fault);

/* Judges the written stack from its files: every layer that was encoded is read, checked against
 * its digest and decoded again, every copied one is taken from the store (its bytes were compared
 * when it was copied). */
fw_status fw_read_back(const fw_writing *writing, fw_report *out, fw_fault *fault);

#endif
