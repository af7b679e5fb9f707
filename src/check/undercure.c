#include "check/undercure.h"

#include "fault/memory.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

static const char holder[] = "undercured regions";

/* One intended region of the layer. */
typedef struct shortfall {
    int64_t pixels;    /* missing, rims left out */
    uint32_t pieces;   /* solid regions in it */
    int32_t x, y;      /* first missing pixel */
    bool touches_post; /* a missing pixel is a post's */
} shortfall;

/* out = intended pixels that are neither solid nor next to solid, corners included. */
static fw_status find_missing(const fw_slice *slice, fw_runs *out, fw_fault *fault)
{
    const double next = 1.5; /* px: the eight neighbours */
    fw_runs near_solid = {0};
    fw_status status = fw_runs_dilate(fw_slice_solid(slice), next, next, &near_solid, fault);
    if (status == FW_OK)
        status = fw_runs_subtract(&slice->intended, &near_solid, out, fault);
    fw_runs_free(&near_solid);
    return status;
}

static void count_missing(const fw_sheet *sheet, const fw_runs *missing, shortfall *of)
{
    const fw_runs *intended = &sheet->slice.intended;
    for (int32_t y = 0; y < missing->height; y++) {
        for (uint32_t i = missing->row[y]; i < missing->row[y + 1]; i++) {
            const fw_run r = missing->run[i];
            shortfall *one = &of[sheet->slice.regions.label[fw_runs_find(intended, r.x0, y)]];
            if (one->pixels == 0) {
                one->x = r.x0;
                one->y = y;
            }
            one->pixels += r.x1 - r.x0;
            one->touches_post = one->touches_post ||
                                fw_members_at(&sheet->intended_members, r.x0, y) >= 0 ||
                                fw_members_at(&sheet->intended_members, r.x1 - 1, y) >= 0;
        }
    }
}

/* Solid regions lie within intended ones; each is counted at its first pixel. */
static void count_pieces(const fw_sheet *sheet, shortfall *of)
{
    const fw_regions *solid = fw_slice_solid_regions(&sheet->slice);
    for (uint32_t s = 0; s < solid->count; s++) {
        const fw_region *r = &solid->region[s];
        const uint32_t run = fw_runs_find(&sheet->slice.intended, r->first_x, r->first_y);
        if (run != UINT32_MAX)
            of[sheet->slice.regions.label[run]].pieces++;
    }
}

static bool is_speck(const fw_setup *setup, const fw_region *region)
{
    const double r = setup->smallest_tip_mm / 2;
    return (double)region->pixels * setup->px_mm * setup->py_mm < acos(-1.0) * r * r;
}

static fw_status note(const fw_setup *setup, const fw_sheet *sheet, uint32_t index,
                      const shortfall *of, fw_findings *findings, fw_fault *fault)
{
    const fw_region *region = &sheet->slice.regions.region[index];
    const double share = (double)of->pixels / (double)region->pixels;
    const bool apart = of->pieces != 1;
    if (of->pixels == 0 && !apart)
        return FW_OK;
    const bool serious = !is_speck(setup, region) && (apart || share > 0.01 || of->touches_post);
    fw_finding finding = {.kind = FW_UNDERCURE,
                          .severity = serious ? FW_FAIL : FW_WARN,
                          .group = serious,
                          .layer = sheet->layer,
                          .x_mm = fw_setup_x(setup, of->pixels > 0 ? of->x : region->first_x),
                          .y_mm = fw_setup_y(setup, of->pixels > 0 ? of->y : region->first_y),
                          .pixels = of->pixels,
                          .area_mm2 = (double)of->pixels * setup->px_mm * setup->py_mm,
                          .margin = NAN,
                          .post = -1,
                          .badness = (double)of->pixels + (apart ? 0.5 : 0)};
    (void)snprintf(finding.message, sizeof finding.message,
                   "of %.4g mm2 intended %.3g %% do not cure beyond the rim%s",
                   (double)region->pixels * setup->px_mm * setup->py_mm, 100 * share,
                   of->pieces == 0 ? ": nothing of it does"
                   : apart         ? ": it comes apart"
                                   : "");
    return fw_findings_add(findings, &finding, fault);
}

fw_status fw_undercure_step(const fw_setup *setup, const fw_sheet *sheet, fw_findings *findings,
                            fw_fault *fault)
{
    const uint32_t regions = sheet->slice.regions.count;
    if (sheet->slice.same || setup->solid_least <= setup->intended_least)
        return FW_OK;
    shortfall *of = NULL;
    fw_runs missing = {0};
    FW_TRY(fw_allocate((void **)&of, regions, sizeof *of, holder, fault));
    fw_status status = find_missing(&sheet->slice, &missing, fault);
    if (status == FW_OK) {
        count_missing(sheet, &missing, of);
        count_pieces(sheet, of);
    }
    for (uint32_t r = 0; r < regions && status == FW_OK; r++)
        status = note(setup, sheet, r, &of[r], findings, fault);
    fw_runs_free(&missing);
    free(of);
    return status;
}
