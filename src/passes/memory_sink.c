#include "passes/memory_sink.h"

static fw_status append(void *context, const char *text, size_t count, fw_fault *fault)
{
    return fw_bytes_append(context, text, count, "report", fault);
}

fw_sink fw_sink_to_bytes(fw_bytes *bytes)
{
    return (fw_sink){append, bytes};
}
