/* Judges any stack, with its posts if they are known, against its raw stack if that is at hand. */
#ifndef FW_PASSES_RECHECK_H
#define FW_PASSES_RECHECK_H

#include "passes/pass.h"

typedef struct fw_recheck_input {
    const fw_stack *stack;
    const fw_job *job;
    const fw_posts *posts; /* NULL: everything solid is taken as part */
    int32_t lift;          /* of the posts file; 0 without one */
    const char
        *posts_raw_sha256; /* digest of the raw stack in the posts file; NULL or "" = unknown */
    const fw_stack *raw;   /* NULL: alterations are not looked for */
} fw_recheck_input;

/* *out as from fw_survey. With `raw`, a lowered pixel, or a raised one outside every post, is an
 * altered-part finding. FW_INPUT: a raw stack of another size or length, or not the one that the
 * posts were made for. */
fw_status fw_recheck(fw_pass *pass, const fw_recheck_input *input, fw_report *out, fw_fault *fault);

#endif
