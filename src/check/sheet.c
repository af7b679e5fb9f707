#include "check/sheet.h"

#include "fault/memory.h"

#include <stdlib.h>

static const char holder[] = "layers under judgement";

static fw_status split_posts(fw_sheet *sheet, const fw_stamp_plan *plan, int32_t layer,
                             fw_fault *fault)
{
    fw_member_runs footprint = {0}, lost = {0};
    fw_runs posts = {0};
    const fw_runs *solid = fw_slice_solid(&sheet->slice);
    fw_status status = fw_stamp_members(plan, layer, &footprint, &lost, fault);
    if (status == FW_OK)
        status =
            fw_members_within(&footprint, &sheet->slice.intended, &sheet->intended_members, fault);
    if (status == FW_OK)
        status = fw_members_within(&footprint, solid, &sheet->solid_members, fault);
    if (status == FW_OK)
        status = fw_members_within(&lost, solid, &sheet->solid_lost, fault);
    if (status == FW_OK)
        status = fw_members_pairs(&sheet->solid_members, &sheet->solid_lost, &sheet->pairs, fault);
    if (status == FW_OK)
        status = fw_members_set(&sheet->intended_members, NULL, NULL, &posts, fault);
    if (status == FW_OK && posts.count > 0)
        status = fw_runs_subtract(&sheet->slice.intended, &posts, &sheet->own_part, fault);
    if (status == FW_OK && posts.count > 0)
        status = fw_regions_label(&sheet->own_part, FW_FOUR, &sheet->own_part_regions, fault);
    if (status == FW_OK)
        status = fw_members_pieces(&sheet->solid_members, solid,
                                   fw_slice_solid_regions(&sheet->slice), &sheet->pieces, fault);
    fw_member_runs_free(&footprint);
    fw_member_runs_free(&lost);
    fw_runs_free(&posts);
    return status;
}

static void find_posts_only(fw_sheet *sheet)
{
    const fw_regions *regions = fw_slice_solid_regions(&sheet->slice);
    for (uint32_t r = 0, p = 0; r < regions->count; r++) {
        int64_t of_posts = 0;
        for (; p < sheet->pieces.count && sheet->pieces.item[p].region == r; p++)
            of_posts += sheet->pieces.item[p].pixels;
        sheet->posts_only[r] = of_posts == regions->region[r].pixels;
    }
}

/* out = solid pixels of the part. */
static fw_status part_solid(const fw_sheet *sheet, fw_runs *out, fw_fault *fault)
{
    fw_runs posts = {0};
    fw_status status = fw_members_set(&sheet->solid_members, NULL, NULL, &posts, fault);
    if (status == FW_OK)
        status = fw_runs_subtract(fw_slice_solid(&sheet->slice), &posts, out, fault);
    fw_runs_free(&posts);
    return status;
}

/* Where a vent's disc fits: outside of the image is the vat, and posts close nothing. */
static fw_status find_wide(fw_sheet *sheet, const fw_setup *setup, fw_fault *fault)
{
    fw_runs part = {0}, near_part = {0};
    const bool posts = sheet->solid_members.count > 0;
    fw_status status = posts ? part_solid(sheet, &part, fault) : FW_OK;
    if (status == FW_OK)
        status = fw_runs_dilate(posts ? &part : fw_slice_solid(&sheet->slice), setup->vent_px[0],
                                setup->vent_px[1], &near_part, fault);
    if (status == FW_OK)
        status = fw_runs_complement(&near_part, &sheet->wide, fault);
    fw_runs_free(&part);
    fw_runs_free(&near_part);
    return status;
}

fw_status fw_sheet_build(fw_sheet *sheet, const fw_setup *setup, const fw_stamp_plan *plan,
                         int32_t layer, const fw_greys *greys, fw_fault *fault)
{
    sheet->layer = layer;
    fw_members_clear(&sheet->intended_members);
    fw_members_clear(&sheet->solid_members);
    fw_members_clear(&sheet->solid_lost);
    sheet->pairs.count = 0;
    sheet->pieces.count = 0;
    fw_contacts_clear(&sheet->contacts);
    FW_TRY(fw_slice_build(greys, setup->intended_least, setup->solid_least, &sheet->slice, fault));
    const size_t regions = sheet->slice.regions.count, voids = sheet->slice.void_regions.count;
    FW_TRY(fw_grow((void **)&sheet->held, &sheet->held_capacity, regions + 1, sizeof *sheet->held,
                   holder, fault));
    FW_TRY(fw_grow((void **)&sheet->cavity, &sheet->cavity_capacity, voids + 1,
                   sizeof *sheet->cavity, holder, fault));
    FW_TRY(fw_grow((void **)&sheet->posts_only, &sheet->posts_only_capacity,
                   (size_t)fw_slice_solid_regions(&sheet->slice)->count + 1,
                   sizeof *sheet->posts_only, holder, fault));
    const bool posts_here = plan != NULL && layer < fw_stamp_layers(plan);
    if (posts_here)
        FW_TRY(split_posts(sheet, plan, layer, fault));
    if (setup->vent_mm > 0)
        FW_TRY(find_wide(sheet, setup, fault));
    FW_TRY(fw_grow((void **)&sheet->part_body, &sheet->part_body_capacity,
                   (size_t)fw_sheet_part_regions(sheet)->count + 1, sizeof *sheet->part_body,
                   holder, fault));
    find_posts_only(sheet);
    return FW_OK;
}

const fw_runs *fw_sheet_part(const fw_sheet *sheet)
{
    return sheet->intended_members.count > 0 ? &sheet->own_part : &sheet->slice.intended;
}

const fw_regions *fw_sheet_part_regions(const fw_sheet *sheet)
{
    return sheet->intended_members.count > 0 ? &sheet->own_part_regions : &sheet->slice.regions;
}

fw_status fw_sheet_join(fw_sheet *sheet, const fw_sheet *before, fw_fault *fault)
{
    const fw_slice *a = &before->slice, *b = &sheet->slice;
    FW_TRY(fw_overlaps_find(&a->intended, &a->regions, &b->intended, &b->regions,
                            &sheet->from_before, fault));
    FW_TRY(fw_overlaps_find(&a->voids, &a->void_regions, &b->voids, &b->void_regions,
                            &sheet->void_from_before, fault));
    return fw_overlaps_find(fw_sheet_part(before), fw_sheet_part_regions(before),
                            fw_sheet_part(sheet), fw_sheet_part_regions(sheet),
                            &sheet->part_from_before, fault);
}

fw_status fw_contacts_add(fw_contacts *contacts, int32_t anchor, fw_runs **out, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&contacts->item, &contacts->capacity, contacts->count + 1,
                   sizeof *contacts->item, holder, fault));
    fw_contact *added = &contacts->item[contacts->count++];
    *added = (fw_contact){.anchor = anchor};
    *out = &added->runs;
    return FW_OK;
}

void fw_contacts_clear(fw_contacts *contacts)
{
    for (size_t i = 0; i < contacts->count; i++)
        fw_runs_free(&contacts->item[i].runs);
    contacts->count = 0;
}

void fw_sheet_free(fw_sheet *sheet)
{
    fw_slice_free(&sheet->slice);
    fw_member_runs_free(&sheet->intended_members);
    fw_member_runs_free(&sheet->solid_members);
    fw_member_runs_free(&sheet->solid_lost);
    free(sheet->pairs.item);
    free(sheet->pieces.item);
    fw_runs_free(&sheet->own_part);
    fw_regions_free(&sheet->own_part_regions);
    fw_overlaps_free(&sheet->from_before);
    fw_overlaps_free(&sheet->part_from_before);
    fw_overlaps_free(&sheet->void_from_before);
    free(sheet->held);
    free(sheet->cavity);
    free(sheet->part_body);
    free(sheet->posts_only);
    fw_runs_free(&sheet->wide);
    fw_runs_free(&sheet->shut);
    fw_regions_free(&sheet->shut_regions);
    free(sheet->shut_body);
    fw_contacts_clear(&sheet->contacts);
    free(sheet->contacts.item);
    fw_peel_free(&sheet->peel);
    *sheet = (fw_sheet){0};
}
