/* Judges a stack straight from its files, in one reading. */
#ifndef FW_PASSES_STREAM_H
#define FW_PASSES_STREAM_H

#include "passes/pass.h"
#include "posts/stamp.h"

/* Looks at each batch before the judge does (an altered part); may add findings to the judge. */
typedef struct fw_stream_watch {
    fw_status (*look)(void *context, const fw_layer *layers, int32_t count, fw_judge *judge,
                      fw_fault *fault);
    void *context;
} fw_stream_watch;

typedef struct fw_stream {
    const fw_stack *stack;
    const fw_job *job;
    const fw_posts *posts;        /* NULL: none */
    int32_t lift;                 /* layers that a lift prepended */
    const char *phase;            /* for the progress */
    const fw_stream_watch *watch; /* NULL: none */
} fw_stream;

/* Fills *out, its sha256 included. FW_INPUT when a layer's depth differs from the first's. */
fw_status fw_stream_judge(fw_pass *pass, const fw_stream *stream, fw_report *out, fw_fault *fault);

#endif
