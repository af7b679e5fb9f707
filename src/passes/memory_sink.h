/* A report written into memory, to be compared or handed on as a file. */
#ifndef FW_PASSES_MEMORY_SINK_H
#define FW_PASSES_MEMORY_SINK_H

#include "report/sink.h"
#include "stack/bytes.h"

/* Appends to bytes (borrowed). */
fw_sink fw_sink_to_bytes(fw_bytes *bytes);

#endif
