#include "mask/slice.h"

const fw_runs *fw_slice_solid(const fw_slice *slice)
{
    return slice->same ? &slice->intended : &slice->own_solid;
}

const fw_regions *fw_slice_solid_regions(const fw_slice *slice)
{
    return slice->same ? &slice->regions : &slice->own_solid_regions;
}

static fw_status clear_own_solid(fw_slice *slice, fw_fault *fault)
{
    FW_TRY(fw_runs_begin(&slice->own_solid, 0, 0, fault));
    fw_runs_finish(&slice->own_solid);
    return fw_regions_label(&slice->own_solid, FW_FOUR, &slice->own_solid_regions, fault);
}

/* Two thresholds often pick the same pixels (a stack of two levels): solid is then kept once. */
static fw_status build_solid(const fw_greys *layer, int32_t intended_least, int32_t solid_least,
                             fw_slice *out, fw_fault *fault)
{
    out->same = solid_least == intended_least;
    if (!out->same) {
        FW_TRY(fw_greys_at_least(layer, solid_least, &out->own_solid, fault));
        out->same = fw_runs_equal(&out->intended, &out->own_solid);
    }
    if (out->same)
        return clear_own_solid(out, fault);
    return fw_regions_label(&out->own_solid, FW_FOUR, &out->own_solid_regions, fault);
}

fw_status fw_slice_build(const fw_greys *layer, int32_t intended_least, int32_t solid_least,
                         fw_slice *out, fw_fault *fault)
{
    FW_TRY(fw_greys_at_least(layer, intended_least, &out->intended, fault));
    FW_TRY(fw_regions_label(&out->intended, FW_FOUR, &out->regions, fault));
    FW_TRY(build_solid(layer, intended_least, solid_least, out, fault));
    FW_TRY(fw_runs_complement(fw_slice_solid(out), &out->voids, fault));
    return fw_regions_label(&out->voids, FW_EIGHT, &out->void_regions, fault);
}

void fw_slice_free(fw_slice *slice)
{
    fw_runs_free(&slice->intended);
    fw_regions_free(&slice->regions);
    fw_runs_free(&slice->own_solid);
    fw_regions_free(&slice->own_solid_regions);
    fw_runs_free(&slice->voids);
    fw_regions_free(&slice->void_regions);
    *slice = (fw_slice){0};
}
