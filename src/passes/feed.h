/* Where a pass gets its layers from: files in order, or the store with posts drawn in. */
#ifndef FW_PASSES_FEED_H
#define FW_PASSES_FEED_H

#include "passes/pass.h"
#include "posts/stamp.h"
#include "stack/store.h"

/* A raw stack that was read once: its layers packed, and what the first look at it told. */
typedef struct fw_raw {
    const fw_stack *stack; /* borrowed */
    fw_store *store;
    int32_t layers, width, height, full;
    int32_t first_solid, last_solid; /* layers with any intended pixel; -1 when there is none */
    int32_t brightest;               /* grey */
    bool two_level;                  /* besides 0 only `brightest` occurs */
    int32_t level[256];              /* greys that a palette file can hold, ascending */
    size_t level_count;              /* 0 = not restricted */
    uint8_t (*sha256)[FW_SHA256];    /* [layers] of the files */
    uint8_t stack_sha256[FW_SHA256];
} fw_raw;

/* Reads the stack once. intent_level tells what counts as solid for first_solid and last_solid;
 * directory holds the store's overflow file. FW_INPUT when a layer's depth differs from the
 * first's, or when nothing in the stack is solid. Close with fw_raw_close, also after a failure. */
fw_status fw_raw_read(fw_pass *pass, const fw_stack *stack, double intent_level,
                      const char *directory, fw_raw *out, fw_fault *fault);
void fw_raw_close(fw_raw *raw);

/* Does layer n of the lifted stack come from a raw layer? Its number there, or -1. */
int32_t fw_raw_layer(int32_t layer, int32_t lift);

/* Layers [first, first + count) of the lifted stack into out[count] (reused), with the plan's posts
 * drawn in (plan may be NULL); touched [count] may be NULL. In parallel. */
fw_status fw_raw_layers(const fw_raw *raw, int32_t lift, const fw_stamp_plan *plan, int32_t first,
                        int32_t count, fw_greys *out, bool *touched, fw_fault *fault);

/* A batch of greys that is reused from call to call. */
typedef struct fw_batch {
    fw_greys *greys;        /* [size] */
    const fw_greys **order; /* [size] pointers to them, as the judge wants them */
    bool *touched;          /* [size] */
    int32_t size;
} fw_batch;
fw_status fw_batch_open(int32_t size, fw_batch *out, fw_fault *fault);
void fw_batch_close(fw_batch *batch);

/* Runs a judge over the lifted stack with the plan's posts drawn in. */
fw_status fw_feed_judge(const fw_pass *pass, const fw_raw *raw, int32_t lift,
                        const fw_stamp_plan *plan, const char *phase, fw_judge *judge,
                        fw_fault *fault);

#endif
