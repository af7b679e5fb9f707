#include "passes/stream.h"

#include <stdlib.h>

/* One reading in progress. */
typedef struct reading {
    fw_pass *pass;
    const fw_stream *stream;
    fw_reader *reader;
    fw_hash *hash;
    fw_judge *judge;
    const fw_greys **order; /* [batch] */
    int32_t full, done;
} reading;

static fw_status open_judge(reading *now, const fw_layer *first, fw_fault *fault)
{
    const fw_judge_input input = {.job = now->stream->job,
                                  .width = first->greys.width,
                                  .height = first->greys.height,
                                  .layers = fw_stack_count(now->stream->stack),
                                  .lift = now->stream->lift,
                                  .full = first->greys.full,
                                  .posts = now->stream->posts,
                                  .times = now->pass->times,
                                  .memo = now->pass->memo};
    now->full = first->greys.full;
    return fw_judge_new(&input, &now->judge, fault);
}

static fw_status take_batch(reading *now, const fw_layer *batch, int32_t count, fw_fault *fault)
{
    if (now->judge == NULL)
        FW_TRY(open_judge(now, batch, fault));
    for (int32_t i = 0; i < count; i++) {
        if (batch[i].greys.full != now->full)
            return fw_fault_set(
                fault, FW_INPUT,
                "another bit depth than the first layer, %s, export all layers alike",
                fw_stack_name(now->stream->stack, batch[i].index));
        FW_TRY(fw_hash_add_layer(now->hash, batch[i].sha256, batch[i].index, fault));
        now->order[i] = &batch[i].greys;
    }
    if (now->stream->watch != NULL)
        FW_TRY(
            now->stream->watch->look(now->stream->watch->context, batch, count, now->judge, fault));
    FW_TRY(fw_judge_layers(now->judge, now->order, count, fault));
    now->done += count;
    return fw_pass_tick(now->pass, now->stream->phase, now->done,
                        fw_stack_count(now->stream->stack), fault);
}

static fw_status read_all(reading *now, fw_report *out, fw_fault *fault)
{
    int32_t count = 0;
    do {
        fw_layer *batch = NULL;
        const double began = fw_times_now();
        FW_TRY(fw_reader_next(now->reader, &batch, &count, fault));
        fw_times_add(now->pass->times, FW_WORK_READING, began);
        if (count > 0)
            FW_TRY(take_batch(now, batch, count, fault));
    } while (count > 0);
    now->pass->decodes += fw_reader_decodes(now->reader);
    FW_TRY(fw_judge_finish(now->judge, out, fault));
    uint8_t sha256[FW_SHA256];
    const fw_status status = fw_hash_finish(now->hash, sha256, fault);
    fw_sha256_hex(sha256, out->sha256);
    if (status != FW_OK)
        fw_report_free(out);
    return status;
}

static fw_status open_reading(reading *now, fw_fault *fault)
{
    const fw_reader_limits limits = {now->pass->options.batch, &now->pass->files, &now->pass->runs};
    FW_TRY(fw_allocate((void **)&now->order, (size_t)now->pass->options.batch, sizeof *now->order,
                       "batch of layers", fault));
    FW_TRY(fw_hash_open(&now->hash, fault));
    return fw_reader_open(now->stream->stack, &limits, &now->reader, fault);
}

fw_status fw_stream_judge(fw_pass *pass, const fw_stream *stream, fw_report *out, fw_fault *fault)
{
    reading now = {.pass = pass, .stream = stream};
    *out = (fw_report){0};
    fw_status status = open_reading(&now, fault);
    if (status == FW_OK)
        status = read_all(&now, out, fault);
    fw_judge_free(now.judge);
    fw_reader_close(now.reader);
    fw_hash_close(now.hash);
    free(now.order);
    return status;
}
