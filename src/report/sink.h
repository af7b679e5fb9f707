/* Where a report goes: the writers of this room open no file. */
#ifndef FW_REPORT_SINK_H
#define FW_REPORT_SINK_H

#include "fault/fault.h"

#include <stddef.h>

typedef struct fw_sink {
    /* Takes count bytes, in order; a failure ends the writing and is passed up as it is. */
    fw_status (*write)(void *context, const char *bytes, size_t count, fw_fault *fault);
    void *context; /* borrowed */
} fw_sink;

#endif
