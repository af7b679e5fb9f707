#include "passes/sinks.h"

static fw_status append(void *context, const char *text, size_t count, fw_fault *fault)
{
    return fw_bytes_append(context, text, count, "report", fault);
}

fw_sink fw_sink_to_bytes(fw_bytes *bytes)
{
    return (fw_sink){append, bytes};
}

static fw_status append_to_file(void *context, const char *text, size_t count, fw_fault *fault)
{
    return fw_output_append(context, text, count, fault);
}

fw_sink fw_sink_to_output(fw_output *output)
{
    return (fw_sink){append_to_file, output};
}
