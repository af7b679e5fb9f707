#include "check/contacts.h"

#include "fault/memory.h"

static const char holder[] = "contacts of anchors";

/* Every solid region of layer 0 that is not post alone stands on the plate by itself. */
static fw_status add_plate(fw_share *share, fw_sheet *sheet, uint32_t region, const fw_runs *part,
                           fw_fault *fault)
{
    const fw_runs *solid = fw_slice_solid(&sheet->slice);
    const fw_regions *regions = fw_slice_solid_regions(&sheet->slice);
    fw_runs *contact = NULL;
    FW_TRY(fw_contacts_add(&sheet->contacts, FW_PLATE_ANCHOR + (int32_t)share->plate_count,
                           &contact, fault));
    FW_TRY(fw_runs_begin(contact, solid->width, solid->height, fault));
    const fw_region *r = &regions->region[region];
    for (int32_t y = r->y0; y < r->y1; y++) {
        for (uint32_t i = part->row[y]; i < part->row[y + 1]; i++) {
            const uint32_t in = fw_runs_find(solid, part->run[i].x0, y);
            if (in != UINT32_MAX && regions->label[in] == region)
                FW_TRY(fw_runs_push(contact, y, part->run[i].x0, part->run[i].x1, fault));
        }
    }
    fw_runs_finish(contact);
    FW_TRY(fw_grow((void **)&share->plate, &share->plate_capacity, share->plate_count + 1,
                   sizeof *share->plate, holder, fault));
    const double pixels = (double)r->pixels, mm2 = share->setup->px_mm * share->setup->py_mm;
    int32_t y = 0; /* of its first pixel: a region that is not post alone has one */
    while (contact->row[y + 1] == 0)
        y++;
    const uint32_t in_part = fw_runs_find(fw_sheet_part(sheet), contact->run[0].x0, y);
    share->plate[share->plate_count++] = (fw_plate_account){
        .part = in_part != UINT32_MAX
                    ? sheet->part_body[fw_sheet_part_regions(sheet)->label[in_part]]
                    : UINT32_MAX,
        .area_mm2 = (double)fw_runs_pixels(contact) * mm2,
        .x_mm = fw_setup_x(share->setup, (double)r->sum_x / pixels),
        .y_mm = fw_setup_y(share->setup, (double)r->sum_y / pixels),
        .load_layer = -1};
    const fw_plate_account *made = &share->plate[share->plate_count - 1];
    if (made->part == UINT32_MAX)
        return FW_OK;
    return fw_lever_add_plate(&share->lever, contact, (int32_t)share->plate_count - 1, made->part,
                              fault);
}

static fw_status add_plates(fw_share *share, fw_sheet *sheet, fw_fault *fault)
{
    const fw_runs *solid = fw_slice_solid(&sheet->slice);
    fw_runs posts = {0}, part = {0};
    fw_status status = FW_OK;
    if (sheet->solid_members.count > 0) {
        status = fw_members_set(&sheet->solid_members, NULL, NULL, &posts, fault);
        if (status == FW_OK)
            status = fw_runs_subtract(solid, &posts, &part, fault);
    }
    const uint32_t count = fw_slice_solid_regions(&sheet->slice)->count;
    for (uint32_t r = 0; r < count && status == FW_OK; r++) {
        if (!sheet->posts_only[r])
            status = add_plate(share, sheet, r, posts.count > 0 ? &part : solid, fault);
    }
    fw_runs_free(&posts);
    fw_runs_free(&part);
    return status;
}

/* Beside the part (a tip on a slope) a post holds it through the pixels that it shares a region
 * with. */
static fw_status add_beside(fw_sheet *sheet, fw_fault *fault)
{
    int32_t last = -1;
    for (size_t i = 0; i < sheet->pieces.count; i++) {
        const fw_member_piece *piece = &sheet->pieces.item[i];
        if (sheet->posts_only[piece->region] || piece->post == last)
            continue;
        last = piece->post;
        fw_runs *contact = NULL;
        FW_TRY(fw_contacts_add(&sheet->contacts, piece->post, &contact, fault));
        FW_TRY(fw_members_of(&sheet->solid_members, piece->post, contact, fault));
    }
    return FW_OK;
}

/* At its tip layer a post holds what lies on its last section. */
static fw_status add_on_top(fw_sheet *sheet, const fw_sheet *before, int32_t post, fw_fault *fault)
{
    fw_runs section = {0};
    fw_runs *contact = NULL;
    fw_status status = fw_members_of(&before->solid_members, post, &section, fault);
    if (status == FW_OK && section.count > 0) {
        status = fw_contacts_add(&sheet->contacts, post, &contact, fault);
        if (status == FW_OK)
            status = fw_runs_intersect(&section, fw_slice_solid(&sheet->slice), contact, fault);
    }
    fw_runs_free(&section);
    return status;
}

fw_status fw_contacts_find(fw_share *share, fw_sheet *sheet, const fw_sheet *before,
                           fw_fault *fault)
{
    if (before == NULL)
        return add_plates(share, sheet, fault);
    if (share->plan == NULL)
        return FW_OK; /* the placing hook has noted them */
    FW_TRY(add_beside(sheet, fault));
    if (before->solid_members.count == 0)
        return FW_OK;
    for (size_t p = 0; p < share->posts->count; p++) {
        if (share->posts->item[p].tip_layer == sheet->layer && share->posts->item[p].routed)
            FW_TRY(add_on_top(sheet, before, (int32_t)p, fault));
    }
    return FW_OK;
}
