#include "check/clusters.h"

#include "fault/memory.h"
#include "physics/separation.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "peel clusters";

/* Union-find over solid regions; the smaller index is the root. */
static uint32_t root_of(uint32_t *parent, uint32_t region)
{
    while (parent[region] != region) {
        parent[region] = parent[parent[region]];
        region = parent[region];
    }
    return region;
}

static void unite(uint32_t *parent, uint32_t a, uint32_t b)
{
    a = root_of(parent, a);
    b = root_of(parent, b);
    if (a < b)
        parent[b] = a;
    else
        parent[a] = b;
}

/* The solid region at (x, y). Both ends of a sealed run touch solid, except where a narrow vent
 * begins: UINT32_MAX. */
static uint32_t region_beside(const fw_slice *slice, int32_t x, int32_t y)
{
    const uint32_t run = fw_runs_find(fw_slice_solid(slice), x, y);
    return run != UINT32_MAX ? fw_slice_solid_regions(slice)->label[run] : UINT32_MAX;
}

typedef struct body_region {
    uint32_t body, region; /* a solid region that bounds a sealed void body */
} body_region;

typedef struct body_regions {
    body_region *item;
    size_t count, capacity;
} body_regions;

static int by_body(const void *left, const void *right)
{
    const body_region *a = left, *b = right;
    if (a->body != b->body)
        return a->body < b->body ? -1 : 1;
    return (a->region > b->region) - (a->region < b->region);
}

static fw_status note(body_regions *list, uint32_t body, uint32_t region, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&list->item, &list->capacity, list->count + 1, sizeof *list->item,
                   holder, fault));
    list->item[list->count++] = (body_region){body, region};
    return FW_OK;
}

static fw_status note_bound(const fw_slice *slice, int32_t x, int32_t y, uint32_t body,
                            uint32_t *of_void, body_regions *list, fw_fault *fault)
{
    const uint32_t region = region_beside(slice, x, y);
    if (region == UINT32_MAX)
        return FW_OK;
    *of_void = region; /* its cluster follows */
    return note(list, body, region, fault);
}

static fw_status bounds_of_voids(const fw_slice *slice, const fw_openings *openings,
                                 uint32_t *of_void, body_regions *list, fw_fault *fault)
{
    const fw_runs *voids = openings->runs;
    for (uint32_t v = 0; v < openings->regions->count; v++)
        of_void[v] = UINT32_MAX;
    for (int32_t y = 0; y < voids->height; y++) {
        for (uint32_t i = voids->row[y]; i < voids->row[y + 1]; i++) {
            const uint32_t v = openings->regions->label[i], body = openings->sealed[v];
            if (body == UINT32_MAX)
                continue;
            FW_TRY(note_bound(slice, voids->run[i].x0 - 1, y, body, &of_void[v], list, fault));
            FW_TRY(note_bound(slice, voids->run[i].x1, y, body, &of_void[v], list, fault));
        }
    }
    return FW_OK;
}

/* Regions that bound the same sealed body belong together. */
static fw_status unite_by_cavities(const fw_slice *slice, const fw_openings *openings, fw_peel *out,
                                   fw_fault *fault)
{
    body_regions list = {0};
    fw_status status = bounds_of_voids(slice, openings, out->of_void, &list, fault);
    if (status == FW_OK && list.count > 0) {
        qsort(list.item, list.count, sizeof *list.item, by_body);
        for (size_t i = 1; i < list.count; i++) {
            if (list.item[i].body == list.item[i - 1].body)
                unite(out->of_region, list.item[i].region, list.item[i - 1].region);
        }
    }
    free(list.item);
    return status;
}

static void widen(fw_cluster *cluster, const fw_region *region)
{
    cluster->x0 = region->x0 < cluster->x0 ? region->x0 : cluster->x0;
    cluster->y0 = region->y0 < cluster->y0 ? region->y0 : cluster->y0;
    cluster->x1 = region->x1 > cluster->x1 ? region->x1 : cluster->x1;
    cluster->y1 = region->y1 > cluster->y1 ? region->y1 : cluster->y1;
}

/* Turns the union-find parents in of_region into cluster numbers, in order of the smallest region.
 */
static fw_status number_clusters(const fw_regions *regions, const uint8_t *posts_only, fw_peel *out,
                                 fw_fault *fault)
{
    for (uint32_t r = 0; r < regions->count; r++)
        out->of_region[r] = root_of(out->of_region, r);
    for (uint32_t r = 0; r < regions->count; r++) {
        const fw_region *region = &regions->region[r];
        if (out->of_region[r] == r) {
            FW_TRY(fw_grow((void **)&out->cluster, &out->capacity, (size_t)out->count + 1,
                           sizeof *out->cluster, holder, fault));
            out->cluster[out->count] = (fw_cluster){.x0 = region->x0,
                                                    .y0 = region->y0,
                                                    .x1 = region->x1,
                                                    .y1 = region->y1,
                                                    .posts_only = posts_only[r] != 0,
                                                    .first_region = r,
                                                    .region_count = 1};
            out->of_region[r] = out->count++;
        } else { /* the root is smaller, so it has its number already */
            fw_cluster *cluster = &out->cluster[out->of_region[out->of_region[r]]];
            out->of_region[r] = out->of_region[out->of_region[r]];
            cluster->posts_only = cluster->posts_only && posts_only[r] != 0;
            cluster->region_count++;
            widen(cluster, region);
        }
    }
    return FW_OK;
}

/* Numbers the cavities of each cluster in raster order of their first opening in this layer; an
 * opening below the smallest area is filled. All openings of one body share its number. */
static fw_status number_cavities(const fw_setup *setup, const fw_openings *openings, fw_peel *out,
                                 fw_fault *fault)
{
    const fw_regions *voids = openings->regions;
    const uint32_t *sealed = openings->sealed;
    body_regions seen = {0}; /* (body, its number) of this layer */
    fw_status status = FW_OK;
    for (uint32_t v = 0; v < voids->count && status == FW_OK; v++) {
        out->cavity_of[v] = UINT32_MAX;
        if (out->of_void[v] == UINT32_MAX)
            continue;
        out->of_void[v] = out->of_region[out->of_void[v]];
        out->cluster[out->of_void[v]].sealed = true;
        widen(&out->cluster[out->of_void[v]], &voids->region[v]); /* a poor vent leaves it open */
        const double area = (double)voids->region[v].pixels * setup->px_mm * setup->py_mm;
        if (area < FW_SMALL_CAVITY_MM2)
            continue;
        size_t known = 0;
        while (known < seen.count && seen.item[known].body != sealed[v])
            known++;
        if (known == seen.count)
            status = note(&seen, sealed[v], out->cluster[out->of_void[v]].cavity_count++, fault);
        if (status == FW_OK)
            out->cavity_of[v] = seen.item[known].region;
    }
    free(seen.item);
    return status;
}

/* Strips of length l along the rows, each between its own two rims, carry at least as much as the
 * region itself: a region's film relieves through the rows above and below too. Per strip of one
 * pixel row: l^3 / 12 in the continuum and l / 6 more in the 5-point scheme (unit pixel). */
static void add_row_bounds(const fw_setup *setup, const fw_slice *slice, fw_peel *out)
{
    const fw_runs *solid = fw_slice_solid(slice);
    const uint32_t *label = fw_slice_solid_regions(slice)->label;
    const double unit = setup->px_mm * setup->px_mm * setup->px_mm * setup->py_mm;
    for (uint32_t i = 0; i < solid->count; i++) {
        const double l = solid->run[i].x1 - solid->run[i].x0;
        fw_cluster *cluster = &out->cluster[out->of_region[label[i]]];
        cluster->bound_mm4 += unit * (l * l * l / 12 + l / 6);
        cluster->area_mm2 += l * setup->px_mm * setup->py_mm;
    }
}

/* A film that parts no faster than w times the card's speed carries no more than w times as much.
 */
static void add_speeds(const fw_setup *setup, fw_peel *out)
{
    for (uint32_t c = 0; c < out->count; c++) {
        fw_cluster *cluster = &out->cluster[c];
        fw_film_plane faster = setup->faster;
        faster.at += faster.per_x_px * cluster->x0 + faster.per_y_px * cluster->y0;
        double least, most;
        fw_separation_speeds(faster, cluster->x1 - cluster->x0, cluster->y1 - cluster->y0, &least,
                             &most);
        cluster->bound_mm4 *= most;
    }
}

fw_status fw_clusters_find(const fw_setup *setup, const fw_slice *slice, const uint8_t *posts_only,
                           const fw_openings *openings, fw_peel *out, fw_fault *fault)
{
    const fw_regions *regions = fw_slice_solid_regions(slice);
    const uint32_t voids = openings->regions->count;
    out->count = 0;
    FW_TRY(fw_grow((void **)&out->of_region, &out->of_region_capacity, (size_t)regions->count + 1,
                   sizeof *out->of_region, holder, fault));
    FW_TRY(fw_grow((void **)&out->of_void, &out->of_void_capacity, (size_t)voids + 1,
                   sizeof *out->of_void, holder, fault));
    FW_TRY(fw_grow((void **)&out->cavity_of, &out->cavity_of_capacity, (size_t)voids + 1,
                   sizeof *out->cavity_of, holder, fault));
    for (uint32_t r = 0; r < regions->count; r++)
        out->of_region[r] = r;
    FW_TRY(unite_by_cavities(slice, openings, out, fault));
    FW_TRY(number_clusters(regions, posts_only, out, fault));
    FW_TRY(number_cavities(setup, openings, out, fault));
    add_row_bounds(setup, slice, out);
    add_speeds(setup, out);
    return FW_OK;
}

static fw_status begin_shape(const fw_setup *setup, fw_cluster *cluster, fw_fault *fault)
{
    const int32_t width = cluster->x1 - cluster->x0, height = cluster->y1 - cluster->y0;
    cluster->shape.px_mm = setup->px_mm;
    cluster->shape.py_mm = setup->py_mm;
    cluster->shape.cavity_count = cluster->cavity_count;
    cluster->shape.faster = setup->faster;
    cluster->shape.faster.at +=
        setup->faster.per_x_px * cluster->x0 + setup->faster.per_y_px * cluster->y0;
    FW_TRY(fw_runs_begin(&cluster->shape.film, width, height, fault));
    return fw_runs_begin(&cluster->shape.sealed, width, height, fault);
}

static fw_status push_film(fw_cluster *cluster, int32_t y, fw_run run, fw_fault *fault)
{
    return fw_runs_push(&cluster->shape.film, y - cluster->y0, run.x0 - cluster->x0,
                        run.x1 - cluster->x0, fault);
}

/* cavity has one item a sealed run; it grows in step with the runs' own capacity. */
static fw_status push_sealed(fw_cluster *cluster, int32_t y, fw_run run, uint32_t cavity,
                             fw_fault *fault)
{
    fw_film_shape *shape = &cluster->shape;
    const size_t before = shape->sealed.run_capacity;
    FW_TRY(fw_runs_push(&shape->sealed, y - cluster->y0, run.x0 - cluster->x0, run.x1 - cluster->x0,
                        fault));
    if (shape->sealed.run_capacity != before) {
        size_t capacity = before;
        FW_TRY(fw_grow((void **)&shape->cavity, &capacity, shape->sealed.run_capacity,
                       sizeof *shape->cavity, holder, fault));
    }
    shape->cavity[shape->sealed.count - 1] = cavity;
    return FW_OK;
}

static fw_status push_void(const fw_openings *openings, uint32_t run, int32_t y,
                           const uint8_t *wanted, fw_peel *out, fw_fault *fault)
{
    const uint32_t v = openings->regions->label[run];
    const uint32_t cluster = out->of_void[v];
    if (cluster == UINT32_MAX || !wanted[cluster])
        return FW_OK;
    if (out->cavity_of[v] == UINT32_MAX)
        return push_film(&out->cluster[cluster], y, openings->runs->run[run], fault);
    return push_sealed(&out->cluster[cluster], y, openings->runs->run[run], out->cavity_of[v],
                       fault);
}

/* Solid and void runs of a row are disjoint; they are handed out from left to right. */
static fw_status push_row(const fw_slice *slice, const fw_openings *openings, int32_t y,
                          const uint8_t *wanted, fw_peel *out, fw_fault *fault)
{
    const fw_runs *solid = fw_slice_solid(slice), *voids = openings->runs;
    const uint32_t *label = fw_slice_solid_regions(slice)->label;
    uint32_t i = solid->row[y], j = voids->row[y];
    while (i < solid->row[y + 1] || j < voids->row[y + 1]) {
        const bool take_solid = j == voids->row[y + 1] ||
                                (i < solid->row[y + 1] && solid->run[i].x0 < voids->run[j].x0);
        if (!take_solid) {
            FW_TRY(push_void(openings, j++, y, wanted, out, fault));
            continue;
        }
        const uint32_t cluster = out->of_region[label[i]];
        if (wanted[cluster])
            FW_TRY(push_film(&out->cluster[cluster], y, solid->run[i], fault));
        i++;
    }
    return FW_OK;
}

/* Whether all pixels [x0, x1) of row y are film or sealed; outside of the box is the vat. */
static bool is_closed(const fw_film_shape *shape, int32_t x0, int32_t x1, int32_t y)
{
    const fw_runs *film = &shape->film, *sealed = &shape->sealed;
    for (int32_t x = x0; x < x1;) {
        const uint32_t in_film = fw_runs_find(film, x, y), in_sealed = fw_runs_find(sealed, x, y);
        if (in_film == UINT32_MAX && in_sealed == UINT32_MAX)
            return false;
        x = in_film != UINT32_MAX ? film->run[in_film].x1 : sealed->run[in_sealed].x1;
    }
    return true;
}

/* Some film pixel has a side toward the vat. Mostly the first run that is asked has. */
static bool has_open_edge(const fw_film_shape *shape)
{
    const fw_runs *film = &shape->film;
    for (int32_t y = 0; y < film->height; y++) {
        for (uint32_t i = film->row[y]; i < film->row[y + 1]; i++) {
            const fw_run r = film->run[i];
            if (!is_closed(shape, r.x0 - 1, r.x1 + 1, y) || !is_closed(shape, r.x0, r.x1, y - 1) ||
                !is_closed(shape, r.x0, r.x1, y + 1))
                return true;
        }
    }
    return false;
}

/* Leaves out the cavities of one cluster that are sealed by poor vents alone, and numbers the
 * others anew in their order. */
static fw_status open_vents(const fw_openings *openings, uint32_t index, fw_peel *out,
                            fw_fault *fault)
{
    fw_cluster *cluster = &out->cluster[index];
    uint32_t *number = NULL;
    FW_TRY(fw_allocate((void **)&number, cluster->cavity_count, sizeof *number, holder, fault));
    for (uint32_t k = 0; k < cluster->cavity_count; k++)
        number[k] = UINT32_MAX;
    cluster->cavity_count = 0;
    for (uint32_t v = 0; v < openings->regions->count; v++) {
        if (out->of_void[v] != index)
            continue;
        uint32_t *cavity = &out->cavity_of[v];
        if (openings->sealed[v] >= openings->poor_from)
            out->of_void[v] = *cavity = UINT32_MAX;
        if (*cavity == UINT32_MAX)
            continue;
        if (number[*cavity] == UINT32_MAX)
            number[*cavity] = cluster->cavity_count++;
        *cavity = number[*cavity];
    }
    free(number);
    return FW_OK;
}

static fw_status draw_shapes(const fw_setup *setup, const fw_slice *slice,
                             const fw_openings *openings, const uint8_t *wanted, fw_peel *out,
                             fw_fault *fault)
{
    for (uint32_t c = 0; c < out->count; c++) {
        if (wanted[c])
            FW_TRY(begin_shape(setup, &out->cluster[c], fault));
    }
    for (int32_t y = 0; y < openings->runs->height; y++)
        FW_TRY(push_row(slice, openings, y, wanted, out, fault));
    for (uint32_t c = 0; c < out->count; c++) {
        if (wanted[c]) {
            fw_runs_finish(&out->cluster[c].shape.film);
            fw_runs_finish(&out->cluster[c].shape.sealed);
        }
    }
    return FW_OK;
}

/* A film that borders on nothing but poor vents has no way to the vat in the film equation, since
 * the narrow ways are no part of the film: there the vents count as open after all. */
fw_status fw_clusters_shape(const fw_setup *setup, const fw_slice *slice,
                            const fw_openings *openings, const uint8_t *wanted, fw_peel *out,
                            fw_fault *fault)
{
    bool opened = false;
    FW_TRY(draw_shapes(setup, slice, openings, wanted, out, fault));
    for (uint32_t c = 0; c < out->count && openings->poor_from > 0; c++) {
        const fw_cluster *cluster = &out->cluster[c];
        if (!wanted[c] || cluster->cavity_count == 0 || has_open_edge(&cluster->shape))
            continue;
        FW_TRY(open_vents(openings, c, out, fault));
        opened = true;
    }
    return opened ? draw_shapes(setup, slice, openings, wanted, out, fault) : FW_OK;
}
