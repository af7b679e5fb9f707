#include "check/judge.h"

#include "check/clearance.h"
#include "check/conclude.h"
#include "fault/memory.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

static const char holder[] = "judge";

struct fw_judge {
    fw_setup setup;
    const fw_posts *posts; /* never NULL */
    fw_posts no_posts;
    const fw_placer *placer;
    fw_stamp_plan *plan; /* NULL: posts are not looked for in the pixels */
    fw_film_memo *memo;
    fw_times *times;
    fw_ground ground;
    fw_share share;
    fw_clearance clearance;
    fw_sheet *sheet; /* [sheet_capacity]: slot 0 is the layer before the batch */
    size_t sheet_capacity;
    int32_t next_layer;
    fw_layer_row *row; /* [layers] */
    fw_findings findings;
    double support_px, part_px;
    double range_N[2]; /* peak load at both ends of the gap range */
};

/* Where a post is, not how bright: a pixel belongs to a post when its disc touches it. */
static fw_status make_plan(fw_judge *judge, fw_fault *fault)
{
    const fw_setup *setup = &judge->setup;
    const fw_screen screen = {.width = setup->width,
                              .height = setup->height,
                              .px_mm = setup->px_mm,
                              .py_mm = setup->py_mm,
                              .full = setup->full,
                              .brightest = setup->full};
    return fw_stamp_plan_make(judge->posts, &screen, setup->t_mm, &judge->plan, fault);
}

static fw_status open_rooms(fw_judge *judge, fw_fault *fault)
{
    const fw_setup *setup = &judge->setup;
    FW_TRY(fw_allocate((void **)&judge->row, (size_t)setup->layers, sizeof *judge->row, holder,
                       fault));
    for (int32_t n = 0; n < setup->layers; n++)
        judge->row[n] = (fw_layer_row){.layer = n,
                                       .raw_layer = n >= setup->lift ? n - setup->lift : -1,
                                       .peel_N = NAN,
                                       .worst_margin = NAN};
    if (judge->placer == NULL && judge->posts->count > 0)
        FW_TRY(make_plan(judge, fault));
    FW_TRY(fw_ground_open(setup, &judge->ground, fault));
    FW_TRY(fw_share_open(setup, judge->posts, judge->plan, &judge->share, fault));
    if (judge->plan != NULL)
        FW_TRY(fw_clearance_open(setup, judge->posts, &judge->clearance, fault));
    return fw_grow((void **)&judge->sheet, &judge->sheet_capacity, 1, sizeof *judge->sheet, holder,
                   fault);
}

fw_status fw_judge_new(const fw_judge_input *input, fw_judge **out, fw_fault *fault)
{
    fw_judge *judge = NULL;
    FW_TRY(fw_allocate((void **)&judge, 1, sizeof *judge, holder, fault));
    judge->setup = fw_setup_make(input->job, input->width, input->height, input->layers,
                                 input->lift, input->full);
    judge->posts = input->posts != NULL ? input->posts : &judge->no_posts;
    judge->placer = input->placer;
    judge->memo = input->memo;
    judge->times = input->times;
    fw_status status = fw_setup_check(&judge->setup, fault);
    if (status == FW_OK)
        status = open_rooms(judge, fault);
    for (size_t i = 0; i < judge->sheet_capacity; i++)
        judge->sheet[i] = (fw_sheet){0};
    if (status != FW_OK) {
        fw_judge_free(judge);
        return status;
    }
    *out = judge;
    return FW_OK;
}

void fw_judge_free(fw_judge *judge)
{
    if (judge == NULL)
        return;
    for (size_t i = 0; i < judge->sheet_capacity; i++)
        fw_sheet_free(&judge->sheet[i]);
    free(judge->sheet);
    free(judge->row);
    fw_findings_free(&judge->findings);
    fw_clearance_close(&judge->clearance);
    fw_share_close(&judge->share);
    fw_ground_close(&judge->ground);
    fw_stamp_plan_free(judge->plan);
    free(judge);
}

const fw_share *fw_judge_share(const fw_judge *judge)
{
    return &judge->share;
}

const fw_layer_row *fw_judge_rows(const fw_judge *judge)
{
    return judge->row;
}

const fw_setup *fw_judge_setup(const fw_judge *judge)
{
    return &judge->setup;
}

fw_status fw_judge_note(fw_judge *judge, const fw_finding *finding, fw_fault *fault)
{
    return fw_findings_add(&judge->findings, finding, fault);
}

static fw_status make_room(fw_judge *judge, int32_t count, fw_fault *fault)
{
    const size_t before = judge->sheet_capacity;
    FW_TRY(fw_grow((void **)&judge->sheet, &judge->sheet_capacity, (size_t)count + 1,
                   sizeof *judge->sheet, holder, fault));
    for (size_t i = before; i < judge->sheet_capacity; i++)
        judge->sheet[i] = (fw_sheet){0};
    return FW_OK;
}

/* The newest sheet becomes the one before the next batch. */
static void turn_over(fw_judge *judge, int32_t count)
{
    const fw_sheet first = judge->sheet[0];
    judge->sheet[0] = judge->sheet[count];
    judge->sheet[count] = first;
}

/* A parallel phase over the sheets of a batch: each writes its own slot; the fault of the first
 * sheet in order is the one that counts, whatever the threads. */
typedef struct phase {
    fw_judge *judge;
    const fw_greys *const *greys;
} phase;

typedef fw_status (*phase_work)(const phase *batch, int32_t slot, fw_fault *fault);

static fw_status run_phase(const phase *batch, phase_work work, int32_t count, fw_fault *fault)
{
    fw_fault *faults = NULL;
    FW_TRY(fw_allocate((void **)&faults, (size_t)count, sizeof *faults, holder, fault));
#pragma omp parallel for schedule(dynamic, 1)
    for (int32_t i = 0; i < count; i++)
        faults[i].status = work(batch, i + 1, &faults[i]);
    fw_status status = FW_OK;
    for (int32_t i = 0; i < count && status == FW_OK; i++) {
        status = faults[i].status;
        if (status != FW_OK && fault != NULL)
            *fault = faults[i];
    }
    free(faults);
    return status;
}

static fw_status build_sheet(const phase *batch, int32_t slot, fw_fault *fault)
{
    fw_judge *judge = batch->judge;
    return fw_sheet_build(&judge->sheet[slot], &judge->setup, judge->plan,
                          judge->next_layer + slot - 1, batch->greys[slot - 1], fault);
}

static const fw_sheet *sheet_before(const fw_judge *judge, int32_t slot)
{
    return judge->sheet[slot].layer > 0 ? &judge->sheet[slot - 1] : NULL;
}

static fw_status join_sheet(const phase *batch, int32_t slot, fw_fault *fault)
{
    const fw_sheet *before = sheet_before(batch->judge, slot);
    return before != NULL ? fw_sheet_join(&batch->judge->sheet[slot], before, fault) : FW_OK;
}

static fw_status peel_sheet(const phase *batch, int32_t slot, fw_fault *fault)
{
    fw_judge *judge = batch->judge;
    fw_sheet *sheet = &judge->sheet[slot];
    return fw_peel_solve(&judge->setup, &sheet->slice, sheet->posts_only, &sheet->openings,
                         judge->memo, &sheet->peel, fault);
}

/* Only the largest load at each end of the gap range is reported, so a layer whose bound lies under
 * what is known needs no load curve. What is skipped depends on the batch, the result does not. */
static fw_status range_sheet(const phase *batch, int32_t slot, fw_fault *fault)
{
    fw_judge *judge = batch->judge;
    fw_peel *peel = &judge->sheet[slot].peel;
    fw_peel_range_bound(&judge->setup, peel, peel->range_N);
    if (peel->range_N[0] <= judge->range_N[0] && peel->range_N[1] <= judge->range_N[1])
        return FW_OK;
    return fw_peel_range(&judge->setup, judge->memo, peel, fault);
}

static fw_status peel_sheets(const phase *batch, int32_t count, fw_fault *fault)
{
    FW_TRY(run_phase(batch, peel_sheet, count, fault));
    /* Placing looks at the card's gap alone. */
    return batch->judge->placer != NULL ? FW_OK : run_phase(batch, range_sheet, count, fault);
}

static fw_status note_coarse(fw_judge *judge, const fw_sheet *sheet, fw_fault *fault)
{
    const int32_t cell_px = sheet->peel.coarse_px;
    if (cell_px == 0)
        return FW_OK;
    fw_finding finding = {.kind = FW_COARSE_FILM,
                          .severity = FW_WARN,
                          .layer = sheet->layer,
                          .margin = NAN,
                          .post = -1,
                          .badness = cell_px};
    (void)snprintf(finding.message, sizeof finding.message,
                   "peel load solved on cells of %d px, coarser than its accuracy asks for",
                   (int)cell_px);
    return fw_findings_add(&judge->findings, &finding, fault);
}

static fw_status book_layer(fw_judge *judge, const fw_sheet *sheet, fw_fault *fault)
{
    const int64_t part = fw_runs_pixels(fw_sheet_part(sheet));
    judge->part_px += (double)part;
    judge->support_px += (double)(fw_runs_pixels(&sheet->slice.intended) - part);
    if (!judge->setup.loads)
        return FW_OK;
    fw_layer_row *row = &judge->row[sheet->layer];
    row->peel_N = sheet->peel.force_N;
    row->peel_q = sheet->peel.q;
    row->limited_by = sheet->peel.limited_by;
    for (int end = 0; end < 2; end++)
        judge->range_N[end] = fmax(judge->range_N[end], sheet->peel.range_N[end]);
    return note_coarse(judge, sheet, fault);
}

static fw_status ground_sheets(fw_judge *judge, int32_t count, fw_fault *fault)
{
    for (int32_t slot = 1; slot <= count; slot++) {
        fw_sheet *sheet = &judge->sheet[slot];
        FW_TRY(fw_ground_step(&judge->ground, sheet, sheet_before(judge, slot), judge->placer,
                              &judge->row[sheet->layer], &judge->findings, fault));
    }
    return FW_OK;
}

static fw_status share_sheets(fw_judge *judge, int32_t count, fw_fault *fault)
{
    fw_share_new_batch(&judge->share);
    for (int32_t slot = 1; slot <= count; slot++) {
        fw_sheet *sheet = &judge->sheet[slot];
        FW_TRY(fw_share_step(&judge->share, sheet, sheet_before(judge, slot), judge->row, fault));
        if (judge->plan != NULL)
            FW_TRY(fw_clearance_step(&judge->clearance, sheet, &judge->findings, fault));
        FW_TRY(book_layer(judge, sheet, fault));
    }
    return FW_OK;
}

static double book_time(fw_judge *judge, fw_work work, double began)
{
    fw_times_add(judge->times, work, began);
    return fw_times_now();
}

fw_status fw_judge_layers(fw_judge *judge, const fw_greys *const *layers, int32_t count,
                          fw_fault *fault)
{
    const phase batch = {judge, layers};
    double began = fw_times_now();
    FW_TRY(make_room(judge, count, fault));
    FW_TRY(run_phase(&batch, build_sheet, count, fault));
    began = book_time(judge, FW_WORK_SHEETS, began);
    FW_TRY(run_phase(&batch, join_sheet, count, fault));
    began = book_time(judge, FW_WORK_JOINING, began);
    FW_TRY(ground_sheets(judge, count, fault));
    began = book_time(judge, FW_WORK_GROUND, began);
    if (judge->setup.loads)
        FW_TRY(peel_sheets(&batch, count, fault));
    began = book_time(judge, FW_WORK_PEEL, began);
    FW_TRY(share_sheets(judge, count, fault));
    (void)book_time(judge, FW_WORK_SHARE, began);
    if (judge->memo != NULL)
        fw_film_memo_trim(judge->memo);
    judge->next_layer += count;
    turn_over(judge, count);
    return FW_OK;
}

fw_status fw_judge_finish(fw_judge *judge, fw_report *out, fw_fault *fault)
{
    FW_TRY(fw_ground_finish(&judge->ground, &judge->findings, fault));
    fw_share_finish(&judge->share, judge->row);
    const fw_conclusion conclusion = {.setup = &judge->setup,
                                      .posts = judge->posts,
                                      .ground = &judge->ground,
                                      .share = &judge->share,
                                      .support_px = judge->support_px,
                                      .part_px = judge->part_px,
                                      .range_N = {judge->range_N[0], judge->range_N[1]},
                                      .looked_for_posts = judge->plan != NULL};
    out->layer = judge->row;
    judge->row = NULL;
    out->findings = judge->findings;
    judge->findings = (fw_findings){0};
    const fw_status status = fw_conclude(&conclusion, out, fault);
    if (status != FW_OK)
        fw_report_free(out);
    return status;
}
