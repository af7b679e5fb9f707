#include "passes/write_stack.h"

#include "stack/png_read.h"
#include "stack/png_write.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "written layers";

static int32_t layer_count(const fw_writing *writing)
{
    return writing->raw->layers + writing->fit->lift;
}

/* Lifted layers are written in the format of the first raw layer. */
static const fw_png_format *format_of(const fw_writing *writing, int32_t layer)
{
    const int32_t raw_layer = fw_raw_layer(layer, writing->fit->lift);
    return fw_store_format(writing->raw->store, raw_layer >= 0 ? raw_layer : 0);
}

enum { PATH_SIZE = FW_NAME_SIZE + 16 };

static fw_status path_of(const fw_writing *writing, int32_t layer, char path[PATH_SIZE],
                         fw_fault *fault)
{
    char name[FW_NAME_SIZE];
    FW_TRY(fw_stack_output_name(writing->raw->stack, layer, name, fault));
    (void)snprintf(path, PATH_SIZE, "%s/%s", writing->folder, name);
    return FW_OK;
}

/* ---- writing
 * ------------------------------------------------------------------------------------- */

static bool must_encode(const fw_writing *writing, int32_t layer, bool touched)
{
    return touched || fw_raw_layer(layer, writing->fit->lift) < 0;
}

static fw_status encode_batch(const fw_writing *writing, int32_t first, int32_t count,
                              const fw_batch *batch, fw_bytes *files, fw_fault *fault)
{
    fw_fault *faults = NULL;
    FW_TRY(fw_allocate((void **)&faults, (size_t)count, sizeof *faults, holder, fault));
#pragma omp parallel for schedule(dynamic, 1)
    for (int32_t i = 0; i < count; i++) {
        if (must_encode(writing, first + i, batch->touched[i]))
            faults[i].status = fw_png_encode(&batch->greys[i], format_of(writing, first + i),
                                             "a supported layer", &files[i], &faults[i]);
    }
    const fw_status status = fw_pass_first_fault(faults, count, fault);
    free(faults);
    return status;
}

static fw_status put_layer(const fw_writing *writing, int32_t layer, bool touched,
                           const fw_bytes *file, fw_fault *fault)
{
    char path[PATH_SIZE];
    FW_TRY(path_of(writing, layer, path, fault));
    writing->encoded[layer] = must_encode(writing, layer, touched);
    if (writing->encoded[layer])
        return fw_output_write(writing->output, path, file->data, file->size,
                               writing->sha256[layer], fault);
    const int32_t raw_layer = fw_raw_layer(layer, writing->fit->lift);
    memcpy(writing->sha256[layer], writing->raw->sha256[raw_layer], FW_SHA256);
    return fw_output_copy(writing->output, path, writing->raw->stack, raw_layer,
                          writing->raw->sha256[raw_layer], fault);
}

static fw_status write_batch(const fw_writing *writing, int32_t first, int32_t count,
                             const fw_batch *batch, fw_bytes *files, fw_fault *fault)
{
    fw_times *times = writing->pass->times;
    double began = fw_times_now();
    FW_TRY(fw_raw_layers(writing->raw, writing->fit->lift, writing->plan, first, count,
                         batch->greys, batch->touched, fault));
    fw_times_add(times, FW_WORK_STAMPING, began);
    began = fw_times_now();
    FW_TRY(encode_batch(writing, first, count, batch, files, fault));
    fw_times_add(times, FW_WORK_ENCODING, began);
    began = fw_times_now();
    for (int32_t i = 0; i < count; i++)
        FW_TRY(put_layer(writing, first + i, batch->touched[i], &files[i], fault));
    fw_times_add(times, FW_WORK_WRITING, began);
    return fw_pass_tick(writing->pass, "writing", first + count, layer_count(writing), fault);
}

fw_status fw_write_stack(const fw_writing *writing, fw_fault *fault)
{
    const int32_t layers = layer_count(writing), size = writing->pass->options.batch;
    fw_batch batch = {0};
    fw_bytes *files = NULL;
    fw_status status = fw_batch_open(size, &batch, fault);
    if (status == FW_OK)
        status = fw_allocate((void **)&files, (size_t)size, sizeof *files, holder, fault);
    for (int32_t first = 0; first < layers && status == FW_OK; first += size) {
        const int32_t count = layers - first < size ? layers - first : size;
        status = write_batch(writing, first, count, &batch, files, fault);
    }
    for (int32_t i = 0; i < size && files != NULL; i++)
        fw_bytes_free(&files[i]);
    free(files);
    fw_batch_close(&batch);
    return status;
}

/* ---- reading back
 * -------------------------------------------------------------------------------- */

/* The written folder as a stack of its own. */
typedef struct reading_back {
    const fw_writing *writing;
    fw_stack *stack;
} reading_back;

static fw_status decode_again(const reading_back *now, int32_t layer, fw_greys *out,
                              fw_fault *fault)
{
    fw_bytes bytes = {0};
    fw_png_format format = {0};
    uint8_t sha256[FW_SHA256];
    const char *name = fw_stack_name(now->stack, layer);
    fw_status status = fw_stack_read(now->stack, layer, &bytes, fault);
    if (status == FW_OK)
        status = fw_sha256(bytes.data, bytes.size, sha256, fault);
    if (status == FW_OK && memcmp(sha256, now->writing->sha256[layer], FW_SHA256) != 0)
        status = fw_fault_set(fault, FW_MACHINE,
                              "reads back other bytes than were written, %s, check the disk", name);
    if (status == FW_OK)
        status = fw_png_decode(bytes.data, bytes.size, name, out, &format, fault);
    fw_bytes_free(&bytes);
    fw_png_format_free(&format);
    return status;
}

static fw_status read_layer(const reading_back *now, int32_t layer, fw_greys *out, fw_fault *fault)
{
    const fw_writing *writing = now->writing;
    if (writing->encoded[layer])
        return decode_again(now, layer, out, fault);
    return fw_store_get(writing->raw->store, fw_raw_layer(layer, writing->fit->lift), out, fault);
}

static fw_status read_batch(const reading_back *now, int32_t first, int32_t count,
                            const fw_batch *batch, fw_fault *fault)
{
    fw_fault *faults = NULL;
    FW_TRY(fw_allocate((void **)&faults, (size_t)count, sizeof *faults, holder, fault));
#pragma omp parallel for schedule(dynamic, 1)
    for (int32_t i = 0; i < count; i++) {
        /* Equal files of neighbouring layers are decoded once. */
        const bool same = i > 0 && memcmp(now->writing->sha256[first + i],
                                          now->writing->sha256[first + i - 1], FW_SHA256) == 0;
        if (!same)
            faults[i].status = read_layer(now, first + i, &batch->greys[i], &faults[i]);
    }
    const fw_status status = fw_pass_first_fault(faults, count, fault);
    free(faults);
    return status;
}

/* Points every layer of a batch at its greys, equal ones at the same, and counts the decodes. */
static void order_batch(const reading_back *now, int32_t first, int32_t count, fw_batch *batch)
{
    const fw_writing *writing = now->writing;
    for (int32_t i = 0; i < count; i++) {
        const bool same = i > 0 && memcmp(writing->sha256[first + i],
                                          writing->sha256[first + i - 1], FW_SHA256) == 0;
        batch->order[i] = same ? batch->order[i - 1] : &batch->greys[i];
        if (!same && writing->encoded[first + i])
            writing->pass->decodes++;
    }
}

static fw_status judge_back(const reading_back *now, fw_judge *judge, fw_batch *batch,
                            fw_fault *fault)
{
    const int32_t layers = layer_count(now->writing);
    for (int32_t first = 0; first < layers; first += batch->size) {
        const int32_t count = layers - first < batch->size ? layers - first : batch->size;
        const double began = fw_times_now();
        FW_TRY(read_batch(now, first, count, batch, fault));
        fw_times_add(now->writing->pass->times, FW_WORK_READING, began);
        order_batch(now, first, count, batch);
        FW_TRY(fw_judge_layers(judge, batch->order, count, fault));
        FW_TRY(fw_pass_tick(now->writing->pass, "reading back", first + count, layers, fault));
    }
    const fw_fit *fit = now->writing->fit;
    const fw_finding unsettled = fw_fit_unsettled(fit);
    return fit->settled ? FW_OK : fw_judge_note(judge, &unsettled, fault);
}

static fw_status open_back(reading_back *now, fw_fault *fault)
{
    const fw_writing *writing = now->writing;
    const size_t size = strlen(fw_output_staging(writing->output)) + strlen(writing->folder) + 2;
    char *path = NULL;
    FW_TRY(fw_allocate((void **)&path, size, 1, holder, fault));
    (void)snprintf(path, size, "%s/%s", fw_output_staging(writing->output), writing->folder);
    const fw_status status = fw_stack_open(path, NULL, &now->stack, fault);
    free(path);
    return status;
}

fw_status fw_read_back(const fw_writing *writing, fw_report *out, fw_fault *fault)
{
    const fw_raw *raw = writing->raw;
    const fw_judge_input input = {.job = writing->job,
                                  .width = raw->width,
                                  .height = raw->height,
                                  .layers = layer_count(writing),
                                  .lift = writing->fit->lift,
                                  .full = raw->full,
                                  .posts = &writing->fit->posts,
                                  .times = writing->pass->times,
                                  .memo = writing->pass->memo};
    reading_back now = {.writing = writing};
    fw_judge *judge = NULL;
    fw_batch batch = {0};
    fw_status status = open_back(&now, fault);
    if (status == FW_OK)
        status = fw_judge_new(&input, &judge, fault);
    if (status == FW_OK)
        status = fw_batch_open(writing->pass->options.batch, &batch, fault);
    if (status == FW_OK)
        status = judge_back(&now, judge, &batch, fault);
    if (status == FW_OK)
        status = fw_judge_finish(judge, out, fault);
    fw_batch_close(&batch);
    fw_judge_free(judge);
    fw_stack_close(now.stack);
    return status;
}
