#include "check/loads.h"

#include "fault/memory.h"

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
    const uint32_t low = fw_runs_seek(set, x, y);
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

/* The first piece of a region or of one after it: pieces are sorted by region. */
static size_t first_piece(const fw_member_pieces *pieces, uint32_t region)
{
    size_t low = 0, high = pieces->count;
    while (low < high) {
        const size_t middle = low + (high - low) / 2;
        if (pieces->item[middle].region < region)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

static fw_status hand_to_posts(const fw_sheet *sheet, uint32_t region, double force_N,
                               const fw_load_taker *taker, fw_fault *fault)
{
    const int64_t pixels = fw_slice_solid_regions(&sheet->slice)->region[region].pixels;
    const fw_member_pieces *pieces = &sheet->pieces;
    for (size_t i = first_piece(pieces, region);
         i < pieces->count && pieces->item[i].region == region; i++) {
        const fw_member_piece *piece = &pieces->item[i];
        FW_TRY(taker->post(taker->context, piece->post,
                           force_N * (double)piece->pixels / (double)pixels, fault));
    }
    return FW_OK;
}

/* `owner` is the one at the place. */
static fw_status hand_to_owner(const fw_sheet *sheet, uint32_t region, int32_t owner,
                               double force_N, const fw_load_taker *taker, fw_fault *fault)
{
    if (sheet->posts_only[region])
        return hand_to_posts(sheet, region, force_N, taker, fault);
    return taker->anchor(taker->context, owner, force_N, fault);
}

static fw_status hand_out_at(const fw_sheet *sheet, const fw_tributary *tributary, place at,
                             double force_N, const fw_load_taker *taker, fw_fault *fault)
{
    const int32_t owner = fw_tributary_owner(tributary, at.region, at.x, at.y);
    return hand_to_owner(sheet, at.region, owner, force_N, taker, fault);
}

/* Who takes a piece of load: owners of a few places in a block of film, each as often as it owns.
 */
enum {
    COARSE = 2,  /* places looked at along each side of a block at first */
    SAMPLES = 8, /* and where these differ, at most */
};

typedef struct sample {
    uint32_t region; /* of solid; UINT32_MAX: not on the cluster's film */
    int32_t owner;
} sample;

/* Where the last look at a pixel row ended: blocks ascend along their row, so the next place is
 * found a few steps on, or is like the last. */
typedef struct row_cursor {
    int32_t x, y;  /* the last place; y < 0: none yet */
    int32_t x1;    /* places of the row are like the last up to here */
    uint32_t run;  /* first one of the row that ends after x */
    uint32_t hint; /* for the owner */
    sample found;
} row_cursor;

typedef struct sampling {
    const fw_sheet *sheet;
    const fw_tributary *tributary;
    const fw_cluster *cluster;
    uint32_t index;  /* of the cluster */
    int32_t cell_px; /* of the tributary, along a row */
    row_cursor coarse[COARSE], fine[SAMPLES];
    sample at[SAMPLES * SAMPLES];
    int32_t count;
} sampling;

static int32_t lesser(int32_t a, int32_t b)
{
    return a < b ? a : b;
}

/* Moves the cursor on to x in its row. */
static void look_at_place(const sampling *now, int32_t x, row_cursor *cursor)
{
    const fw_runs *solid = fw_slice_solid(&now->sheet->slice);
    const uint32_t end = solid->row[cursor->y + 1];
    while (cursor->run < end && solid->run[cursor->run].x1 <= x)
        cursor->run++;
    const fw_run run = cursor->run < end ? solid->run[cursor->run] : (fw_run){INT32_MAX, INT32_MAX};
    cursor->x = x;
    cursor->found = (sample){UINT32_MAX, FW_NO_ANCHOR};
    cursor->x1 = x < run.x0 ? run.x0 : run.x1;
    if (x < run.x0)
        return;
    const uint32_t region = fw_slice_solid_regions(&now->sheet->slice)->label[cursor->run];
    if (now->sheet->peel.of_region[region] != now->index)
        return;
    cursor->x1 = lesser(run.x1, (x / now->cell_px + 1) * now->cell_px);
    cursor->found = (sample){
        region, fw_tributary_owner_near(now->tributary, region, x, cursor->y, &cursor->hint)};
}

/* Adds n places of row y if they lie on the cluster's film; a block may reach out of the image. */
static void look_at_row(sampling *now, int32_t block_x, int32_t y, int32_t n, row_cursor *cursor)
{
    const fw_runs *solid = fw_slice_solid(&now->sheet->slice);
    const int32_t edge = now->cluster->solution->cell_px;
    if (y >= solid->height)
        return;
    if (cursor->y != y || block_x < cursor->x)
        *cursor = (row_cursor){
            .x = -1, .y = y, .run = fw_runs_seek(solid, block_x, y), .hint = cursor->hint};
    for (int32_t i = 0; i < n; i++) {
        const int32_t x = block_x + (2 * i + 1) * edge / (2 * n);
        if (x >= cursor->x1)
            look_at_place(now, x, cursor);
        if (cursor->found.region != UINT32_MAX)
            now->at[now->count++] = cursor->found;
    }
}

/* Looks at n x n places of the block that holds the cell's centroid; those off the cluster's film
 * do not count. True when all that count have one owner. */
static bool look_at_block(sampling *now, const fw_film_cell *cell, int32_t n, row_cursor *cursors)
{
    const int32_t edge = now->cluster->solution->cell_px;
    const int32_t x0 = now->cluster->x0 + (int32_t)cell->x_px / edge * edge;
    const int32_t y0 = now->cluster->y0 + (int32_t)cell->y_px / edge * edge;
    bool one_owner = true;
    now->count = 0;
    for (int32_t j = 0; j < n; j++)
        look_at_row(now, x0, y0 + (2 * j + 1) * edge / (2 * n), n, &cursors[j]);
    for (int32_t i = 1; i < now->count; i++)
        one_owner = one_owner && now->at[i].owner == now->at[0].owner;
    return one_owner;
}

/* A block that lies in one share goes there whole; one on the border of shares is cut up. */
static fw_status hand_out_cell(sampling *now, const fw_film_cell *cell, double force_N,
                               const fw_load_taker *taker, fw_fault *fault)
{
    const int32_t edge = now->cluster->solution->cell_px;
    const int32_t finest = edge < SAMPLES ? edge : SAMPLES;
    if (edge > 1 && !look_at_block(now, cell, COARSE, now->coarse))
        (void)look_at_block(now, cell, finest, now->fine);
    if (edge == 1 || now->count == 0)
        return hand_out_at(now->sheet, now->tributary,
                           place_of_cell(now->sheet, now->cluster, now->index, cell), force_N,
                           taker, fault);
    for (int32_t i = 0; i < now->count; i++)
        FW_TRY(hand_to_owner(now->sheet, now->at[i].region, now->at[i].owner, force_N / now->count,
                             taker, fault));
    return FW_OK;
}

static void forget_rows(row_cursor *cursors, int32_t count)
{
    for (int32_t i = 0; i < count; i++)
        cursors[i] = (row_cursor){.y = -1};
}

static fw_status hand_out_cells(const fw_sheet *sheet, const fw_tributary *tributary,
                                uint32_t index, const fw_load_taker *taker, fw_fault *fault)
{
    const fw_cluster *cluster = &sheet->peel.cluster[index];
    sampling now = {.sheet = sheet, .tributary = tributary, .cluster = cluster, .index = index};
    int32_t cell_rows;
    fw_tributary_cell(tributary, &now.cell_px, &cell_rows);
    forget_rows(now.coarse, COARSE);
    forget_rows(now.fine, SAMPLES);
    for (uint32_t i = 0; i < cluster->solution->cell_count; i++) {
        const fw_film_cell *cell = &cluster->solution->cell[i];
        const double force_N = cluster->q * (double)cell->u_mm2 * (double)cell->area_mm2;
        FW_TRY(hand_out_cell(&now, cell, force_N, taker, fault));
    }
    return FW_OK;
}

/* ---- what comes again ----------------------------------------------------------------------- */

void fw_load_memo_forget(fw_load_memo *memo)
{
    memo->entries = memo->pieces = 0;
}

/* Sums what one cluster gives to each anchor. */
typedef struct recorder {
    fw_load_memo *memo;
    size_t first; /* piece of the cluster */
    size_t last;  /* piece that was added to: neighbours mostly share an owner */
} recorder;

static fw_status record_anchor(void *context, int32_t anchor, double force_N, fw_fault *fault)
{
    recorder *now = context;
    fw_load_memo *memo = now->memo;
    if (now->last == memo->pieces || memo->piece[now->last].anchor != anchor) {
        now->last = now->first;
        while (now->last < memo->pieces && memo->piece[now->last].anchor != anchor)
            now->last++;
    }
    if (now->last < memo->pieces) {
        memo->piece[now->last].force_N += force_N;
        return FW_OK;
    }
    FW_TRY(fw_grow((void **)&memo->piece, &memo->piece_capacity, memo->pieces + 1,
                   sizeof *memo->piece, "loads of a batch", fault));
    memo->piece[memo->pieces++] = (fw_load_piece){anchor, force_N};
    return FW_OK;
}

/* Fills *found with the pieces of this cluster: known ones, or freshly summed. */
static fw_status recall(const fw_sheet *sheet, const fw_tributary *tributary, uint32_t index,
                        fw_load_memo *memo, const fw_load_entry **found, fw_fault *fault)
{
    const fw_cluster *cluster = &sheet->peel.cluster[index];
    const fw_load_entry wanted = {cluster->solution,
                                  cluster->q,
                                  cluster->x0,
                                  cluster->y0,
                                  fw_tributary_version(tributary, cluster->first_region),
                                  memo->pieces,
                                  0};
    for (size_t i = memo->entries; i-- > 0;) {
        *found = &memo->entry[i];
        if ((*found)->solution == wanted.solution && (*found)->version == wanted.version &&
            (*found)->q == wanted.q && (*found)->x0 == wanted.x0 && (*found)->y0 == wanted.y0)
            return FW_OK;
    }
    recorder now = {memo, memo->pieces, memo->pieces};
    const fw_load_taker taker = {record_anchor, NULL, &now};
    FW_TRY(hand_out_cells(sheet, tributary, index, &taker, fault));
    FW_TRY(fw_grow((void **)&memo->entry, &memo->entry_capacity, memo->entries + 1,
                   sizeof *memo->entry, "loads of a batch", fault));
    memo->entry[memo->entries] = wanted;
    memo->entry[memo->entries].count = memo->pieces - wanted.first;
    *found = &memo->entry[memo->entries++];
    return FW_OK;
}

/* A part region alone gives its loads through the memo, so that the sums are formed in the same
 * order whether it is known or new. */
static fw_status hand_out_solved(const fw_sheet *sheet, const fw_tributary *tributary,
                                 uint32_t index, fw_load_memo *memo, const fw_load_taker *taker,
                                 fw_fault *fault)
{
    const fw_cluster *cluster = &sheet->peel.cluster[index];
    const fw_load_entry *entry = NULL;
    if (cluster->region_count > 1 || sheet->posts_only[cluster->first_region])
        return hand_out_cells(sheet, tributary, index, taker, fault);
    const int32_t sole = fw_tributary_sole(tributary, cluster->first_region);
    if (sole != FW_MIXED && cluster->cavity_count == 0)
        return taker->anchor(taker->context, sole, cluster->force_N, fault);
    FW_TRY(recall(sheet, tributary, index, memo, &entry, fault));
    for (size_t i = 0; i < entry->count; i++) {
        const fw_load_piece *piece = &memo->piece[entry->first + i];
        FW_TRY(taker->anchor(taker->context, piece->anchor, piece->force_N, fault));
    }
    return FW_OK;
}

static place first_place(const fw_sheet *sheet, const fw_cluster *cluster)
{
    const fw_region *first = &fw_slice_solid_regions(&sheet->slice)->region[cluster->first_region];
    return (place){cluster->first_region, first->first_x, first->first_y};
}

/* The solid pixels nearest to a run of void on both sides of its row; a narrow vent may lie
 * between. UINT32_MAX: there is none on that side. */
static void walls_beside(const fw_runs *solid, fw_run gap, int32_t y, uint32_t run[2], int32_t x[2])
{
    const uint32_t low = fw_runs_seek(solid, gap.x0, y);
    run[0] = low > solid->row[y] ? low - 1 : UINT32_MAX;
    run[1] = low < solid->row[y + 1] ? low : UINT32_MAX;
    x[0] = run[0] != UINT32_MAX ? solid->run[run[0]].x1 - 1 : 0;
    x[1] = run[1] != UINT32_MAX ? solid->run[run[1]].x0 : 0;
}

/* Half of a cavity run's suction pulls at the wall on its left, half at the one on its right; all
 * of it at the only one. A row without any wall pulls at the cluster's first pixel. */
static fw_status hand_out_cavity_run(const fw_setup *setup, const fw_sheet *sheet,
                                     const fw_tributary *tributary, int32_t y, uint32_t run,
                                     const fw_load_taker *taker, fw_fault *fault)
{
    const fw_openings *openings = &sheet->openings;
    const uint32_t v = openings->regions->label[run], index = sheet->peel.of_void[v];
    if (index == UINT32_MAX || sheet->peel.cavity_of[v] == UINT32_MAX)
        return FW_OK;
    const fw_cluster *cluster = &sheet->peel.cluster[index];
    const fw_run r = openings->runs->run[run];
    const double force_N = cluster->q * cluster->solution->cavity_u_mm2[sheet->peel.cavity_of[v]] *
                           (r.x1 - r.x0) * setup->px_mm * setup->py_mm;
    uint32_t wall[2];
    int32_t x[2];
    walls_beside(fw_slice_solid(&sheet->slice), r, y, wall, x);
    const int walls = (wall[0] != UINT32_MAX) + (wall[1] != UINT32_MAX);
    if (walls == 0)
        return hand_out_at(sheet, tributary, first_place(sheet, cluster), force_N, taker, fault);
    for (int side = 0; side < 2; side++) {
        if (wall[side] != UINT32_MAX)
            FW_TRY(hand_out_at(sheet, tributary, place_of_run(sheet, wall[side], x[side], y),
                               force_N / walls, taker, fault));
    }
    return FW_OK;
}

static fw_status hand_out_cavities(const fw_setup *setup, const fw_sheet *sheet,
                                   const fw_tributary *tributary, const fw_load_taker *taker,
                                   fw_fault *fault)
{
    const fw_runs *voids = sheet->openings.runs;
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
                            const fw_tributary *tributary, fw_load_memo *memo,
                            const fw_load_taker *taker, fw_fault *fault)
{
    for (uint32_t c = 0; c < sheet->peel.count; c++) {
        const fw_cluster *cluster = &sheet->peel.cluster[c];
        if (cluster->solution == NULL)
            FW_TRY(hand_out_at(sheet, tributary, first_place(sheet, cluster), cluster->force_N,
                               taker, fault));
        else
            FW_TRY(hand_out_solved(sheet, tributary, c, memo, taker, fault));
    }
    return has_cavities(&sheet->peel) ? hand_out_cavities(setup, sheet, tributary, taker, fault)
                                      : FW_OK;
}
