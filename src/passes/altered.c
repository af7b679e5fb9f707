#include "passes/altered.h"

#include "posts/stamp.h"
#include "stack/png_read.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "raw layers";

/* What differs in one layer. */
typedef struct difference {
    int64_t lowered, raised; /* px */
    int32_t x, y;            /* px, of the first */
} difference;

struct fw_altered {
    fw_pass *pass;
    const fw_recheck_input *input;
    fw_stamp_plan *plan; /* NULL until the size is known, or without posts */
    double px_mm, py_mm;
    uint8_t (*sha256)[FW_SHA256]; /* [raw layers] */
    int32_t raw_layers;
};

fw_status fw_altered_open(fw_pass *pass, const fw_recheck_input *input, fw_altered **out,
                          fw_fault *fault)
{
    const int32_t layers = fw_stack_count(input->stack), raw_layers = fw_stack_count(input->raw);
    if (layers - input->lift != raw_layers)
        return fw_fault_set(
            fault, FW_INPUT,
            "%d layers, %s, the stack has %d of which %d are lift: give its own raw "
            "stack",
            raw_layers, fw_stack_path(input->raw), layers, input->lift);
    fw_altered *altered = NULL;
    FW_TRY(fw_allocate((void **)&altered, 1, sizeof *altered, holder, fault));
    *altered = (fw_altered){.pass = pass,
                            .input = input,
                            .px_mm = input->job->pixel_um[0] / 1000,
                            .py_mm = input->job->pixel_um[1] / 1000,
                            .raw_layers = raw_layers};
    const fw_status status = fw_allocate((void **)&altered->sha256, (size_t)raw_layers,
                                         sizeof *altered->sha256, holder, fault);
    if (status == FW_OK)
        *out = altered;
    else
        fw_altered_close(altered);
    return status;
}

void fw_altered_close(fw_altered *altered)
{
    if (altered == NULL)
        return;
    fw_stamp_plan_free(altered->plan);
    free(altered->sha256);
    free(altered);
}

fw_status fw_altered_digest(fw_altered *altered, char hex[FW_SHA256_HEX], fw_fault *fault)
{
    uint8_t sha256[FW_SHA256];
    FW_TRY(fw_sha256_of_stack((const uint8_t(*)[FW_SHA256])altered->sha256, altered->raw_layers,
                              sha256, fault));
    fw_sha256_hex(sha256, hex);
    return FW_OK;
}

/* ---- two layers
 * ---------------------------------------------------------------------------------- */

/* A row as steps of grey: where the next run edge of either layer lies. */
typedef struct row_walk {
    const fw_greys *layer;
    uint32_t next, end;
} row_walk;

static int32_t grey_at(row_walk *walk, int32_t x, int32_t *until)
{
    while (walk->next < walk->end && walk->layer->run[walk->next].x1 <= x)
        walk->next++;
    if (walk->next == walk->end) {
        *until = walk->layer->width;
        return 0;
    }
    const fw_grey_run run = walk->layer->run[walk->next];
    *until = x < run.x0 ? run.x0 : run.x1;
    return x < run.x0 ? 0 : run.grey;
}

static fw_status compare_row(const fw_greys *now, const fw_greys *raw, int32_t y, fw_runs *lowered,
                             fw_runs *raised, fw_fault *fault)
{
    row_walk a = {now, now->row[y], now->row[y + 1]};
    row_walk b = {raw, raw->row[y], raw->row[y + 1]};
    for (int32_t x = 0; x < now->width;) {
        int32_t a_until = 0, b_until = 0;
        const int32_t a_grey = grey_at(&a, x, &a_until), b_grey = grey_at(&b, x, &b_until);
        const int32_t until = a_until < b_until ? a_until : b_until;
        if (a_grey < b_grey)
            FW_TRY(fw_runs_push(lowered, y, x, until, fault));
        if (a_grey > b_grey)
            FW_TRY(fw_runs_push(raised, y, x, until, fault));
        x = until;
    }
    return FW_OK;
}

static fw_status compare_layers(const fw_greys *now, const fw_greys *raw, fw_runs *lowered,
                                fw_runs *raised, fw_fault *fault)
{
    FW_TRY(fw_runs_begin(lowered, now->width, now->height, fault));
    FW_TRY(fw_runs_begin(raised, now->width, now->height, fault));
    for (int32_t y = 0; y < now->height; y++)
        FW_TRY(compare_row(now, raw, y, lowered, raised, fault));
    fw_runs_finish(lowered);
    fw_runs_finish(raised);
    return FW_OK;
}

/* Takes away from `set` what lies in the posts of this layer, bites included. */
static fw_status forgive_posts(const fw_altered *altered, int32_t layer, fw_runs *set,
                               fw_fault *fault)
{
    fw_runs post = {0}, left = {0};
    fw_status status = FW_OK;
    const fw_posts *posts = altered->input->posts;
    for (size_t p = 0; p < posts->count && set->count > 0 && status == FW_OK; p++) {
        const fw_post *one = &posts->item[p];
        if (!one->routed || layer >= one->tip_layer + one->bite_layers)
            continue;
        status = fw_stamp_post(altered->plan, p, layer, true, &post, fault);
        if (status == FW_OK)
            status = fw_runs_subtract(set, &post, &left, fault);
        if (status == FW_OK)
            status = fw_runs_copy(&left, set, fault);
    }
    fw_runs_free(&post);
    fw_runs_free(&left);
    return status;
}

static bool first_pixel(const fw_runs *set, difference *found)
{
    if (set->count == 0)
        return false;
    found->y = 0;
    while (set->row[found->y + 1] == 0)
        found->y++;
    found->x = set->run[0].x0;
    return true;
}

static fw_status find_difference(const fw_altered *altered, int32_t layer, const fw_greys *now,
                                 const fw_greys *raw, difference *found, fw_fault *fault)
{
    fw_runs lowered = {0}, raised = {0};
    fw_status status = compare_layers(now, raw, &lowered, &raised, fault);
    if (status == FW_OK && altered->plan != NULL)
        status = forgive_posts(altered, layer, &raised, fault);
    if (status == FW_OK) {
        found->lowered = fw_runs_pixels(&lowered);
        found->raised = fw_runs_pixels(&raised);
        if (!first_pixel(&lowered, found))
            (void)first_pixel(&raised, found);
    }
    fw_runs_free(&lowered);
    fw_runs_free(&raised);
    return status;
}

/* ---- a batch
 * ------------------------------------------------------------------------------------- */

static fw_status read_raw(fw_altered *altered, int32_t raw_layer, const fw_layer *like,
                          fw_greys *out, fw_fault *fault)
{
    const fw_stack *stack = altered->input->raw;
    fw_bytes bytes = {0};
    fw_png_format format = {0};
    fw_status status = fw_stack_read(stack, raw_layer, &bytes, fault);
    if (status == FW_OK)
        status = fw_sha256(bytes.data, bytes.size, altered->sha256[raw_layer], fault);
    if (status == FW_OK)
        status = fw_png_decode(bytes.data, bytes.size, fw_stack_name(stack, raw_layer), out,
                               &format, fault);
    if (status == FW_OK && (out->width != like->greys.width || out->height != like->greys.height ||
                            out->full != like->greys.full))
        status =
            fw_fault_set(fault, FW_INPUT,
                         "another size or depth than the stack, raw layer %s, give its own raw "
                         "stack",
                         fw_stack_name(stack, raw_layer));
    fw_bytes_free(&bytes);
    fw_png_format_free(&format);
    return status;
}

static fw_status look_at(fw_altered *altered, const fw_layer *layer, difference *found,
                         fw_fault *fault)
{
    const int32_t raw_layer = layer->index - altered->input->lift;
    fw_greys raw = {0};
    fw_status status = FW_OK;
    if (raw_layer >= 0) {
        status = read_raw(altered, raw_layer, layer, &raw, fault);
    } else {
        status =
            fw_greys_begin(&raw, layer->greys.width, layer->greys.height, layer->greys.full, fault);
        if (status == FW_OK)
            fw_greys_finish(&raw);
    }
    if (status == FW_OK)
        status = find_difference(altered, layer->index, &layer->greys, &raw, found, fault);
    fw_greys_free(&raw);
    return status;
}

static fw_status note(const fw_altered *altered, int32_t layer, const difference *found,
                      fw_judge *judge, fw_fault *fault)
{
    if (found->lowered == 0 && found->raised == 0)
        return FW_OK;
    const int64_t pixels = found->lowered + found->raised;
    fw_finding finding = {.kind = FW_ALTERED_PART,
                          .severity = FW_FAIL,
                          .layer = layer,
                          .x_mm = (found->x + 0.5) * altered->px_mm,
                          .y_mm = (found->y + 0.5) * altered->py_mm,
                          .pixels = pixels,
                          .area_mm2 = (double)pixels * altered->px_mm * altered->py_mm,
                          .margin = NAN,
                          .post = -1,
                          .badness = (double)pixels};
    (void)snprintf(finding.message, sizeof finding.message,
                   "%lld pixels darker than in the raw stack, %lld brighter outside the posts",
                   (long long)found->lowered, (long long)found->raised);
    return fw_judge_note(judge, &finding, fault);
}

static fw_status make_plan(fw_altered *altered, const fw_greys *like, fw_fault *fault)
{
    if (altered->plan != NULL || altered->input->posts == NULL)
        return FW_OK;
    const fw_screen screen = {.width = like->width,
                              .height = like->height,
                              .px_mm = altered->px_mm,
                              .py_mm = altered->py_mm,
                              .full = like->full,
                              .brightest = like->full};
    return fw_stamp_plan_make(altered->input->posts, &screen, altered->input->job->layer_um / 1000,
                              &altered->plan, fault);
}

fw_status fw_altered_look(void *context, const fw_layer *layers, int32_t count, fw_judge *judge,
                          fw_fault *fault)
{
    fw_altered *altered = context;
    difference *found = NULL;
    fw_fault *faults = NULL;
    FW_TRY(make_plan(altered, &layers[0].greys, fault));
    FW_TRY(fw_allocate((void **)&found, (size_t)count, sizeof *found, holder, fault));
    fw_status status = fw_allocate((void **)&faults, (size_t)count, sizeof *faults, holder, fault);
    if (status == FW_OK) {
#pragma omp parallel for schedule(dynamic, 1)
        for (int32_t i = 0; i < count; i++)
            faults[i].status = look_at(altered, &layers[i], &found[i], &faults[i]);
        status = fw_pass_first_fault(faults, count, fault);
    }
    for (int32_t i = 0; i < count && status == FW_OK; i++) {
        altered->pass->decodes += layers[i].index >= altered->input->lift;
        status = note(altered, layers[i].index, &found[i], judge, fault);
    }
    free(faults);
    free(found);
    return status;
}
