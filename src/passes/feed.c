#include "passes/feed.h"

#include "physics/cure.h"

#include <stdlib.h>
#include <string.h>

static const char holder[] = "layers of a pass";

/* ---- the one reading of the input --------------------------------------------------------- */

static void look_at_greys(fw_raw *raw, const fw_layer *layer, int32_t intended_least)
{
    bool solid = false;
    for (uint32_t i = 0; i < layer->greys.count; i++) {
        const int32_t grey = layer->greys.run[i].grey;
        if (raw->brightest != 0 && grey != raw->brightest)
            raw->two_level = false;
        if (grey > raw->brightest)
            raw->brightest = grey;
        solid = solid || grey >= intended_least;
    }
    if (!solid)
        return;
    if (raw->first_solid < 0)
        raw->first_solid = layer->index;
    raw->last_solid = layer->index;
}

static fw_status take_first(fw_raw *raw, const fw_layer *layer, fw_fault *fault)
{
    raw->width = layer->greys.width;
    raw->height = layer->greys.height;
    raw->full = layer->greys.full;
    raw->level_count = fw_png_levels(&layer->format, raw->level);
    return fw_allocate((void **)&raw->sha256, (size_t)raw->layers, sizeof *raw->sha256, holder,
                       fault);
}

static fw_status take_layer(fw_raw *raw, const fw_layer *layer, double intent_level,
                            fw_fault *fault)
{
    if (layer->index == 0)
        FW_TRY(take_first(raw, layer, fault));
    if (layer->greys.full != raw->full)
        return fw_fault_set(fault, FW_INPUT,
                            "another bit depth than the first layer, %s, export all layers alike",
                            fw_stack_name(raw->stack, layer->index));
    look_at_greys(raw, layer, fw_cure_intended_least(intent_level, raw->full));
    memcpy(raw->sha256[layer->index], layer->sha256, FW_SHA256);
    return fw_store_put(raw->store, layer, fault);
}

static fw_status read_all(fw_pass *pass, fw_reader *reader, double intent_level, fw_raw *raw,
                          fw_fault *fault)
{
    int32_t done = 0, count = 0;
    do {
        fw_layer *batch = NULL;
        double began = fw_times_now();
        FW_TRY(fw_reader_next(reader, &batch, &count, fault));
        fw_times_add(pass->times, FW_WORK_READING, began);
        began = fw_times_now();
        for (int32_t i = 0; i < count; i++)
            FW_TRY(take_layer(raw, &batch[i], intent_level, fault));
        fw_times_add(pass->times, FW_WORK_PACKING, began);
        done += count;
        FW_TRY(fw_pass_tick(pass, "reading", done, raw->layers, fault));
    } while (count > 0);
    pass->decodes += fw_reader_decodes(reader);
    if (raw->first_solid < 0)
        return fw_fault_set(fault, FW_INPUT,
                            "nothing in the stack is solid, %s, check the masks or intent_level",
                            fw_stack_path(raw->stack));
    return fw_sha256_of_stack((const uint8_t(*)[FW_SHA256])raw->sha256, raw->layers,
                              raw->stack_sha256, fault);
}

fw_status fw_raw_read(fw_pass *pass, const fw_stack *stack, double intent_level,
                      const char *directory, fw_raw *out, fw_fault *fault)
{
    *out = (fw_raw){.stack = stack,
                    .layers = fw_stack_count(stack),
                    .first_solid = -1,
                    .last_solid = -1,
                    .two_level = true};
    FW_TRY(fw_store_open(&pass->store_budget, directory, &out->store, fault));
    const fw_reader_limits limits = {pass->options.batch, &pass->files, &pass->runs};
    fw_reader *reader = NULL;
    FW_TRY(fw_reader_open(stack, &limits, &reader, fault));
    const fw_status status = read_all(pass, reader, intent_level, out, fault);
    fw_reader_close(reader);
    return status;
}

void fw_raw_close(fw_raw *raw)
{
    fw_store_close(raw->store);
    free(raw->sha256);
    *raw = (fw_raw){0};
}

/* ---- the layers, lifted and with posts ------------------------------------------------------ */

int32_t fw_raw_layer(int32_t layer, int32_t lift)
{
    return layer >= lift ? layer - lift : -1;
}

static fw_status empty_layer(const fw_raw *raw, fw_greys *out, fw_fault *fault)
{
    FW_TRY(fw_greys_begin(out, raw->width, raw->height, raw->full, fault));
    fw_greys_finish(out);
    return FW_OK;
}

static fw_status plain_layer(const fw_raw *raw, int32_t layer, fw_greys *out, fw_fault *fault)
{
    return layer >= 0 ? fw_store_get(raw->store, layer, out, fault) : empty_layer(raw, out, fault);
}

static fw_status make_layer(const fw_raw *raw, int32_t lift, const fw_stamp_plan *plan,
                            int32_t layer, fw_greys *out, bool *touched, fw_fault *fault)
{
    *touched = false;
    const int32_t raw_layer = fw_raw_layer(layer, lift);
    if (plan == NULL || layer >= fw_stamp_layers(plan))
        return plain_layer(raw, raw_layer, out, fault);
    fw_greys plain = {0};
    fw_status status = plain_layer(raw, raw_layer, &plain, fault);
    if (status == FW_OK)
        status = fw_stamp_layer(plan, layer, &plain, out, touched, fault);
    fw_greys_free(&plain);
    return status;
}

fw_status fw_raw_layers(const fw_raw *raw, int32_t lift, const fw_stamp_plan *plan, int32_t first,
                        int32_t count, fw_greys *out, bool *touched, fw_fault *fault)
{
    fw_fault *faults = NULL;
    FW_TRY(fw_allocate((void **)&faults, (size_t)count, sizeof *faults, holder, fault));
#pragma omp parallel for schedule(dynamic, 1)
    for (int32_t i = 0; i < count; i++) {
        bool drawn = false;
        faults[i].status = make_layer(raw, lift, plan, first + i, &out[i], &drawn, &faults[i]);
        if (touched != NULL)
            touched[i] = drawn;
    }
    const fw_status status = fw_pass_first_fault(faults, count, fault);
    free(faults);
    return status;
}

fw_status fw_batch_open(int32_t size, fw_batch *out, fw_fault *fault)
{
    *out = (fw_batch){.size = size};
    FW_TRY(fw_allocate((void **)&out->greys, (size_t)size, sizeof *out->greys, holder, fault));
    FW_TRY(fw_allocate((void **)&out->order, (size_t)size, sizeof *out->order, holder, fault));
    FW_TRY(fw_allocate((void **)&out->touched, (size_t)size, sizeof *out->touched, holder, fault));
    for (int32_t i = 0; i < size; i++)
        out->order[i] = &out->greys[i];
    return FW_OK;
}

void fw_batch_close(fw_batch *batch)
{
    for (int32_t i = 0; i < batch->size && batch->greys != NULL; i++)
        fw_greys_free(&batch->greys[i]);
    free(batch->greys);
    free(batch->order);
    free(batch->touched);
    *batch = (fw_batch){0};
}

static fw_status feed_all(const fw_pass *pass, const fw_raw *raw, int32_t lift,
                          const fw_stamp_plan *plan, const char *phase, fw_judge *judge,
                          fw_batch *batch, fw_fault *fault)
{
    const int32_t layers = raw->layers + lift;
    for (int32_t first = 0; first < layers; first += batch->size) {
        const int32_t left = layers - first;
        const int32_t count = left < batch->size ? left : batch->size;
        const double began = fw_times_now();
        FW_TRY(fw_raw_layers(raw, lift, plan, first, count, batch->greys, NULL, fault));
        fw_times_add(pass->times, FW_WORK_STAMPING, began);
        FW_TRY(fw_judge_layers(judge, batch->order, count, fault));
        FW_TRY(fw_pass_tick(pass, phase, first + count, layers, fault));
    }
    return FW_OK;
}

fw_status fw_feed_judge(const fw_pass *pass, const fw_raw *raw, int32_t lift,
                        const fw_stamp_plan *plan, const char *phase, fw_judge *judge,
                        fw_fault *fault)
{
    fw_batch batch = {0};
    fw_status status = fw_batch_open(pass->options.batch, &batch, fault);
    if (status == FW_OK)
        status = feed_all(pass, raw, lift, plan, phase, judge, &batch, fault);
    fw_batch_close(&batch);
    return status;
}
