/* Where reports go: into memory to be compared, or piece by piece into a file of the output. */
#ifndef FW_PASSES_SINKS_H
#define FW_PASSES_SINKS_H

#include "report/sink.h"
#include "stack/bytes.h"
#include "stack/output.h"

/* Appends to bytes (borrowed). */
fw_sink fw_sink_to_bytes(fw_bytes *bytes);

/* Appends to the file that is open in output (borrowed; fw_output_open_file). */
fw_sink fw_sink_to_output(fw_output *output);

#endif
