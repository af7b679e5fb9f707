/* One batch goes through four steps, each a loop over its layers that touches only their own slots:
 *
 *     plan     how many layers fit the budgets (serial, from file sizes and the last layer's runs)
 *     read     file bytes and their digest (parallel)
 *     decode   those that differ from the layer before (parallel)
 *     settle   in layer order: report the first failure, copy repeated layers, compare sizes
 *
 * The memory for decoded layers is a hard bound although nobody can know a layer's runs before it
 * is decoded: each layer of a batch gets an equal share, and a decode that outgrows its share is
 * given up and done again in a smaller batch.
 */
#include "stack/layers.h"

#include "stack/grey_rows.h"
#include "stack/png_read.h"

#include <assert.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "reading layers";

/* What a run may cost: arrays grow by half at a time. */
enum { RUN_COST = 3 * sizeof(fw_grey_run) / 2 };

/* Per layer of the batch, beside the layer itself. */
typedef struct slot {
    fw_bytes file;
    fw_status status;
    bool over; /* outgrew its share */
    fw_fault fault;
} slot;

struct fw_reader {
    const fw_stack *stack;
    int32_t batch;
    fw_budget *files, *runs;
    size_t runs_charged;
    int32_t next;    /* first layer of the next batch */
    int32_t handed;  /* layers handed out last time */
    fw_layer *layer; /* [batch] */
    slot *slot;      /* [batch] */
    fw_layer last;   /* the layer before `next`, when next > 0 */
    int32_t width, height;
    int64_t decodes;
};

fw_status fw_reader_open(const fw_stack *stack, const fw_reader_limits *limits, fw_reader **out,
                         fw_fault *fault)
{
    *out = NULL;
    fw_reader *reader;
    FW_TRY(fw_allocate((void **)&reader, 1, sizeof *reader, holder, fault));
    reader->stack = stack;
    reader->batch = limits->batch > 0 ? limits->batch : FW_BATCH;
    reader->files = limits->files;
    reader->runs = limits->runs;
    const size_t batch = (size_t)reader->batch;
    fw_status status =
        fw_allocate((void **)&reader->layer, batch, sizeof *reader->layer, holder, fault);
    if (status == FW_OK)
        status = fw_allocate((void **)&reader->slot, batch, sizeof *reader->slot, holder, fault);
    if (status == FW_OK)
        *out = reader;
    else
        fw_reader_close(reader);
    return status;
}

/* Runs that each of n layers may have, the layer before them being held as well. */
static uint32_t share_of(const fw_reader *reader, int32_t n)
{
    const size_t share = reader->runs->limit / ((size_t)n + 1) / RUN_COST;
    return n > 1 && share < FW_NOISE_RUNS ? (uint32_t)share : FW_NOISE_RUNS;
}

/* The newest layer handed out becomes the one to compare the next one with. */
static void retire(fw_reader *reader)
{
    if (reader->handed == 0)
        return;
    fw_layer *newest = &reader->layer[reader->handed - 1];
    const fw_layer swapped = reader->last;
    reader->last = *newest;
    *newest = swapped;
    reader->next += reader->handed;
    reader->handed = 0;
}

/* Gives back what layers of an earlier, smaller batch have more than their share now. */
static void trim(fw_reader *reader, int32_t n)
{
    for (int32_t i = 0; i < reader->batch; i++) {
        fw_greys *greys = &reader->layer[i].greys;
        if (i >= n || greys->run_capacity / 3 * 2 > share_of(reader, n))
            fw_greys_free(greys);
    }
}

static void charge_runs(fw_reader *reader)
{
    size_t now = fw_greys_size(&reader->last.greys);
    for (int32_t i = 0; i < reader->batch; i++)
        now += fw_greys_size(&reader->layer[i].greys);
    fw_budget_release(reader->runs, reader->runs_charged);
    fw_budget_charge(reader->runs, now);
    reader->runs_charged = now;
}

/* The next layers most often look like the last one: leave room for half as many runs again. */
static int32_t plan_runs(const fw_reader *reader)
{
    const int32_t left = fw_stack_count(reader->stack) - reader->next;
    int32_t n = reader->batch < left ? reader->batch : left;
    while (n > 1 && share_of(reader, n) / 3 * 2 < reader->last.greys.count)
        n /= 2;
    return n;
}

/* Cuts *n to the files that fit, and charges them. */
static fw_status plan_files(fw_reader *reader, int32_t *n, size_t *charged, fw_fault *fault)
{
    *charged = 0;
    for (int32_t i = 0; i < *n; i++) {
        size_t size;
        if (fw_stack_size(reader->stack, reader->next + i, &size, NULL) != FW_OK)
            size = 0; /* reading it will say why, if no layer before it fails */
        if (i > 0 && !fw_budget_fits(reader->files, size)) {
            *n = i;
            break;
        }
        if (!fw_budget_fits(reader->files, size))
            return fw_fault_set(fault, FW_MACHINE,
                                "mask file too large for the memory given, %s has %zu bytes, "
                                "export it compressed",
                                fw_stack_label(reader->stack, reader->next), size);
        fw_budget_charge(reader->files, size);
        *charged += size;
    }
    return FW_OK;
}

static void read_one(const fw_reader *reader, int32_t i)
{
    slot *s = &reader->slot[i];
    fw_layer *layer = &reader->layer[i];
    layer->index = reader->next + i;
    s->over = false;
    s->status = fw_stack_read(reader->stack, layer->index, &s->file, &s->fault);
    if (s->status == FW_OK)
        s->status = fw_sha256(s->file.data, s->file.size, layer->sha256, &s->fault);
}

static void read_files(const fw_reader *reader, int32_t n)
{
#pragma omp parallel for schedule(dynamic)
    for (int32_t i = 0; i < n; i++)
        read_one(reader, i);
}

static const fw_layer *before(const fw_reader *reader, int32_t i)
{
    if (i > 0)
        return &reader->layer[i - 1];
    return reader->next > 0 ? &reader->last : NULL;
}

/* Equal SHA-256 is taken for equal bytes. */
static void mark_repeats(fw_reader *reader, int32_t n)
{
    for (int32_t i = 0; i < n; i++) {
        fw_layer *layer = &reader->layer[i];
        const fw_layer *above = before(reader, i);
        layer->same_as_before = above != NULL && reader->slot[i].status == FW_OK &&
                                (i == 0 || reader->slot[i - 1].status == FW_OK) &&
                                memcmp(layer->sha256, above->sha256, FW_SHA256) == 0;
    }
}

static void decode_one(const fw_reader *reader, int32_t i, uint32_t run_limit)
{
    slot *s = &reader->slot[i];
    fw_layer *layer = &reader->layer[i];
    if (s->status != FW_OK || layer->same_as_before)
        return;
    const char *name = fw_stack_label(reader->stack, layer->index);
    s->status = fw_png_decode_within(s->file.data, s->file.size, name, run_limit, &s->over,
                                     &layer->greys, &layer->format, &s->fault);
}

static void decode_files(fw_reader *reader, int32_t n)
{
    const uint32_t run_limit = share_of(reader, n);
    for (int32_t i = 0; i < n; i++)
        reader->decodes += reader->slot[i].status == FW_OK && !reader->layer[i].same_as_before;
#pragma omp parallel for schedule(dynamic)
    for (int32_t i = 0; i < n; i++)
        decode_one(reader, i, run_limit);
}

static fw_status check_size(fw_reader *reader, const fw_layer *layer, fw_fault *fault)
{
    if (layer->index == 0) {
        reader->width = layer->greys.width;
        reader->height = layer->greys.height;
    }
    if (layer->greys.width == reader->width && layer->greys.height == reader->height)
        return FW_OK;
    return fw_fault_set(fault, FW_INPUT,
                        "masks of different size, %s has %d x %d px and %s %d x %d, export the "
                        "stack again",
                        fw_stack_label(reader->stack, layer->index), (int)layer->greys.width,
                        (int)layer->greys.height, fw_stack_label(reader->stack, 0),
                        (int)reader->width, (int)reader->height);
}

static fw_status settle_one(fw_reader *reader, int32_t i, fw_fault *fault)
{
    fw_layer *layer = &reader->layer[i];
    if (reader->slot[i].status != FW_OK) {
        if (fault != NULL)
            *fault = reader->slot[i].fault;
        return reader->slot[i].status;
    }
    if (layer->same_as_before) {
        const fw_layer *above = before(reader, i);
        FW_TRY(fw_greys_copy(&above->greys, &layer->greys, fault));
        FW_TRY(fw_png_format_copy(&above->format, &layer->format, fault));
    }
    return check_size(reader, layer, fault);
}

/* *handed: layers up to the first that outgrew its share; one alone cannot, so it is noise. */
static fw_status settle(fw_reader *reader, int32_t n, int32_t *handed, fw_fault *fault)
{
    for (*handed = 0; *handed < n; ++*handed) {
        const int32_t i = *handed;
        if (reader->slot[i].over) {
            if (share_of(reader, n) < FW_NOISE_RUNS)
                return FW_OK;
            return fw_png_noise(fw_stack_label(reader->stack, reader->layer[i].index), fault);
        }
        FW_TRY(settle_one(reader, i, fault));
    }
    return FW_OK;
}

static fw_status run_batch(fw_reader *reader, int32_t n, int32_t *handed, fw_fault *fault)
{
    size_t charged;
    fw_status status = plan_files(reader, &n, &charged, fault);
    if (status == FW_OK) {
        trim(reader, n);
        read_files(reader, n);
        mark_repeats(reader, n);
        decode_files(reader, n);
        status = settle(reader, n, handed, fault);
    }
    for (int32_t i = 0; i < n; i++)
        fw_bytes_free(&reader->slot[i].file);
    fw_budget_release(reader->files, charged);
    charge_runs(reader);
    return status;
}

fw_status fw_reader_next(fw_reader *reader, fw_layer **batch, int32_t *count, fw_fault *fault)
{
    *batch = reader->layer;
    *count = 0;
    retire(reader);
    for (int32_t n = plan_runs(reader); n > 0 && *count == 0; n = n > 1 ? n / 2 : 1) {
        int32_t handed = 0;
        FW_TRY(run_batch(reader, n, &handed, fault));
        *count = handed;
    }
    reader->handed = *count;
    return FW_OK;
}

int64_t fw_reader_decodes(const fw_reader *reader)
{
    return reader->decodes;
}

static void free_layer(fw_layer *layer)
{
    fw_greys_free(&layer->greys);
    fw_png_format_free(&layer->format);
}

void fw_reader_close(fw_reader *reader)
{
    if (reader == NULL)
        return;
    fw_budget_release(reader->runs, reader->runs_charged);
    for (int32_t i = 0; reader->layer != NULL && i < reader->batch; i++)
        free_layer(&reader->layer[i]);
    for (int32_t i = 0; reader->slot != NULL && i < reader->batch; i++)
        fw_bytes_free(&reader->slot[i].file);
    free_layer(&reader->last);
    free(reader->layer);
    free(reader->slot);
    free(reader);
}
