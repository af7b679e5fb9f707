#include "check/loads.h"

/* Where a piece of load pulls. */
typedef struct place {
    uint32_t region; /* of solid; UINT32_MAX: nothing solid here */
    int32_t x, y;    /* px, a pixel of that region */
} place;

static place place_of_run(const fw_sheet *sheet, uint32_t run, int32_t x, int32_t y)
{
    return (place){fw_slice_solid_regions(&sheet->slice)->label[run], x, y};
}

/* The run of row y that is nearest to x, or UINT32_MAX in an empty row. */
static uint32_t nearest_run(const fw_runs *set, int32_t x, int32_t y)
{
    const uint32_t first = set->row[y], end = set->row[y + 1];
    uint32_t low = first, high = end;
    while (low < high) {
        const uint32_t middle = low + (high - low) / 2;
        if (set->run[middle].x1 <= x)
            low = middle + 1;
        else
            high = middle;
    }
    if (low == end)
        return end > first ? end - 1 : UINT32_MAX;
    const bool left_is_nearer = low > first && x - set->run[low - 1].x1 + 1 < set->run[low].x0 - x;
    return left_is_nearer ? low - 1 : low;
}

static int32_t into_run(fw_run run, int32_t x)
{
    if (x < run.x0)
        return run.x0;
    return x >= run.x1 ? run.x1 - 1 : x;
}

/* A cell's centroid may lie beside its film (a bent piece): the nearest solid of its row stands for
 * it where that is part of the same cluster, else the cluster's first pixel. */
static place place_of_cell(const fw_sheet *sheet, const fw_cluster *cluster, uint32_t index,
                           const fw_film_cell *cell)
{
    const fw_runs *solid = fw_slice_solid(&sheet->slice);
    const fw_regions *regions = fw_slice_solid_regions(&sheet->slice);
    const int32_t x = cluster->x0 + (int32_t)cell->x_px, y = cluster->y0 + (int32_t)cell->y_px;
    const uint32_t run = nearest_run(solid, x, y);
    if (run != UINT32_MAX && sheet->peel.of_region[regions->label[run]] == index)
        return place_of_run(sheet, run, into_run(solid->run[run], x), y);
    const fw_region *first = &regions->region[cluster->first_region];
    return (place){cluster->first_region, first->first_x, first->first_y};
}

static fw_status hand_to_posts(const fw_sheet *sheet, uint32_t region, double force_N,
                               const fw_load_taker *taker, fw_fault *fault)
{
    const int64_t pixels = fw_slice_solid_regions(&sheet->slice)->region[region].pixels;
    for (size_t i = 0; i < sheet->pieces.count; i++) {
        const fw_member_piece *piece = &sheet->pieces.item[i];
        if (piece->region == region)
            FW_TRY(taker->post(taker->context, piece->post,
                               force_N * (double)piece->pixels / (double)pixels, fault));
    }
    return FW_OK;
}

static fw_status hand_out_at(const fw_sheet *sheet, const fw_tributary *tributary, place at,
                             double force_N, const fw_load_taker *taker, fw_fault *fault)
{
    if (sheet->posts_only[at.region])
        return hand_to_posts(sheet, at.region, force_N, taker, fault);
    const int32_t owner = fw_tributary_owner(tributary, at.region, at.x, at.y);
    return taker->anchor(taker->context, owner, force_N, fault);
}

static fw_status hand_out_cells(const fw_setup *setup, const fw_sheet *sheet,
                                const fw_tributary *tributary, uint32_t index,
                                const fw_load_taker *taker, fw_fault *fault)
{
    const fw_cluster *cluster = &sheet->peel.cluster[index];
    for (uint32_t i = 0; i < cluster->solution->cell_count; i++) {
        const fw_film_cell *cell = &cluster->solution->cell[i];
        const double force_N = setup->q * (double)cell->u_mm2 * (double)cell->area_mm2;
        FW_TRY(hand_out_at(sheet, tributary, place_of_cell(sheet, cluster, index, cell), force_N,
                           taker, fault));
    }
    return FW_OK;
}

/* Half of a cavity run's suction pulls at the wall on its left, half at the one on its right. */
static fw_status hand_out_cavity_run(const fw_setup *setup, const fw_sheet *sheet,
                                     const fw_tributary *tributary, int32_t y, uint32_t run,
                                     const fw_load_taker *taker, fw_fault *fault)
{
    const uint32_t v = sheet->slice.void_regions.label[run];
    const uint32_t index = sheet->peel.of_void[v];
    if (index == UINT32_MAX || sheet->peel.cavity_of[v] == UINT32_MAX)
        return FW_OK;
    const fw_cluster *cluster = &sheet->peel.cluster[index];
    const fw_run r = sheet->slice.voids.run[run];
    const fw_runs *solid = fw_slice_solid(&sheet->slice);
    const double force_N = setup->q * cluster->solution->cavity_u_mm2[sheet->peel.cavity_of[v]] *
                           (r.x1 - r.x0) * setup->px_mm * setup->py_mm;
    const int32_t beside[2] = {r.x0 - 1, r.x1};
    for (int side = 0; side < 2; side++) {
        const place at = place_of_run(sheet, fw_runs_find(solid, beside[side], y), beside[side], y);
        FW_TRY(hand_out_at(sheet, tributary, at, force_N / 2, taker, fault));
    }
    return FW_OK;
}

static fw_status hand_out_cavities(const fw_setup *setup, const fw_sheet *sheet,
                                   const fw_tributary *tributary, const fw_load_taker *taker,
                                   fw_fault *fault)
{
    const fw_runs *voids = &sheet->slice.voids;
    for (int32_t y = 0; y < voids->height; y++) {
        for (uint32_t i = voids->row[y]; i < voids->row[y + 1]; i++)
            FW_TRY(hand_out_cavity_run(setup, sheet, tributary, y, i, taker, fault));
    }
    return FW_OK;
}

static bool has_cavities(const fw_peel *peel)
{
    for (uint32_t c = 0; c < peel->count; c++) {
        if (peel->cluster[c].cavity_count > 0)
            return true;
    }
    return false;
}

fw_status fw_loads_hand_out(const fw_setup *setup, const fw_sheet *sheet,
                            const fw_tributary *tributary, const fw_load_taker *taker,
                            fw_fault *fault)
{
    for (uint32_t c = 0; c < sheet->peel.count; c++) {
        const fw_cluster *cluster = &sheet->peel.cluster[c];
        const fw_region *first =
            &fw_slice_solid_regions(&sheet->slice)->region[cluster->first_region];
        const place whole = {cluster->first_region, first->first_x, first->first_y};
        if (cluster->solution == NULL)
            FW_TRY(hand_out_at(sheet, tributary, whole, cluster->force_N, taker, fault));
        else
            FW_TRY(hand_out_cells(setup, sheet, tributary, c, taker, fault));
    }
    return has_cavities(&sheet->peel) ? hand_out_cavities(setup, sheet, tributary, taker, fault)
                                      : FW_OK;
}
