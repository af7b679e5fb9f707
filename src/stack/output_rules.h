/* The parts of fw_output_check that the output itself needs again. */
#ifndef FW_OUTPUT_RULES_H
#define FW_OUTPUT_RULES_H

#include "stack/output.h"
#include "stack/place.h"

#define FW_SUMS_FILE "SHA256SUMS"

/* fw_output_check for a path that is split already. */
fw_status fw_output_check_place(const fw_output_rules *rules, const fw_place *place,
                                fw_fault *fault);

/* FW_INPUT unless the folder is an earlier output of ours without a stranger in it. */
fw_status fw_output_check_ours(const char *path, fw_fault *fault);

#endif
