/* The layers of a stack in order, read and decoded in parallel batches. */
#ifndef FW_LAYERS_H
#define FW_LAYERS_H

#include "fault/memory.h"
#include "mask/greys.h"
#include "stack/digest.h"
#include "stack/folder.h"
#include "stack/png_format.h"

typedef struct fw_layer {
    int32_t index;
    fw_greys greys;
    fw_png_format format;
    uint8_t sha256[FW_SHA256]; /* of the file's bytes */
    bool same_as_before;       /* its file equals the file of layer index - 1, byte for byte */
} fw_layer;

enum { FW_BATCH = 16 };

typedef struct fw_reader_limits {
    int32_t batch;    /* layers decoded at a time, 0 = FW_BATCH */
    fw_budget *files; /* for file bytes; a batch is cut short to stay inside. Borrowed */
    fw_budget *runs;  /* for the decoded layers of a batch; likewise. Borrowed */
} fw_reader_limits;

typedef struct fw_reader fw_reader;

/* Reads stack (borrowed) from layer 0. The caller closes *out. */
fw_status fw_reader_open(const fw_stack *stack, const fw_reader_limits *limits, fw_reader **out,
                         fw_fault *fault);

/* The next layers, in order: *batch [*count] is the reader's and valid until the next call;
 * *count == 0 at the end. Every layer must have the size of layer 0 (FW_INPUT names the file). The
 * first layer in order that fails is the one reported, and what comes before it is not handed out.
 * Decoding runs on as many threads as omp_set_num_threads allows; the result does not depend on
 * threads or batch. */
fw_status fw_reader_next(fw_reader *reader, fw_layer **batch, int32_t *count, fw_fault *fault);

/* Layers decoded so far: a layer that is same_as_before is copied instead. */
int64_t fw_reader_decodes(const fw_reader *reader);
void fw_reader_close(fw_reader *reader); /* NULL is allowed */

#endif
