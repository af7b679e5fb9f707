/* Holds a supported stack against its raw stack: the part is sacred. */
#ifndef FW_PASSES_ALTERED_H
#define FW_PASSES_ALTERED_H

#include "passes/recheck.h"

typedef struct fw_altered fw_altered;

/* The raw stack must have as many layers as the supported one less its lift (FW_INPUT). */
fw_status fw_altered_open(fw_pass *pass, const fw_recheck_input *input, fw_altered **out,
                          fw_fault *fault);

/* Compares a batch of supported layers (a stream watch; context: fw_altered). */
fw_status fw_altered_look(void *altered, const fw_layer *layers, int32_t count, fw_judge *judge,
                          fw_fault *fault);

/* After the last layer: the raw stack's digest. */
fw_status fw_altered_digest(fw_altered *altered, char hex[FW_SHA256_HEX], fw_fault *fault);
void fw_altered_close(fw_altered *altered); /* NULL is allowed */

#endif
