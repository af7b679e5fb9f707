#include "mask/overlaps.h"

#include "fault/memory.h"

#include <assert.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "overlaps of two layers";

/* slot[now]: the pair that region `now` met last. Neighbouring rows mostly meet the same pair
 * again, so this alone folds nearly everything; what is left is folded after sorting. */
static fw_status meet(fw_overlaps *out, fw_overlap found, fw_fault *fault)
{
    const uint32_t last = out->slot[found.now];
    if (last < out->count && out->item[last].before == found.before) {
        out->item[last].pixels += found.pixels;
        return FW_OK;
    }
    FW_TRY(fw_grow((void **)&out->item, &out->capacity, (size_t)out->count + 1, sizeof *out->item,
                   holder, fault));
    out->slot[found.now] = out->count;
    out->item[out->count++] = found;
    return FW_OK;
}

typedef struct layer_pair {
    const fw_runs *before_runs, *now_runs;
    const fw_regions *before, *now;
} layer_pair;

static fw_status meet_row(const layer_pair *pair, int32_t y, fw_overlaps *out, fw_fault *fault)
{
    const fw_runs *a = pair->before_runs, *b = pair->now_runs;
    uint32_t i = a->row[y], j = b->row[y];
    while (i < a->row[y + 1] && j < b->row[y + 1]) {
        const fw_run p = a->run[i], q = b->run[j];
        const int32_t x0 = p.x0 > q.x0 ? p.x0 : q.x0, x1 = p.x1 < q.x1 ? p.x1 : q.x1;
        if (x0 < x1)
            FW_TRY(meet(out, (fw_overlap){pair->before->label[i], pair->now->label[j], x1 - x0},
                        fault));
        if (p.x1 < q.x1)
            i++;
        else
            j++;
    }
    return FW_OK;
}

static fw_status meet_all(const layer_pair *pair, fw_overlaps *out, fw_fault *fault)
{
    memset(out->slot, 0xff, pair->now->count * sizeof *out->slot);
    for (int32_t y = 0; y < pair->now_runs->height; y++)
        FW_TRY(meet_row(pair, y, out, fault));
    return FW_OK;
}

typedef uint32_t (*key_of)(const fw_overlap *);

static uint32_t before_key(const fw_overlap *overlap)
{
    return overlap->before;
}

static uint32_t now_key(const fw_overlap *overlap)
{
    return overlap->now;
}

/* One stable pass of a counting sort: from -> to in rising key < keys; slot holds keys + 1 items.
 */
static void sort_pass(const fw_overlap *from, fw_overlap *to, uint32_t count, key_of key,
                      uint32_t *slot, uint32_t keys)
{
    memset(slot, 0, ((size_t)keys + 1) * sizeof *slot);
    for (uint32_t i = 0; i < count; i++)
        slot[key(&from[i]) + 1]++;
    for (uint32_t k = 0; k < keys; k++)
        slot[k + 1] += slot[k];
    for (uint32_t i = 0; i < count; i++)
        to[slot[key(&from[i])]++] = from[i];
}

static void fold_equal(fw_overlaps *out)
{
    uint32_t kept = 0;
    for (uint32_t i = 0; i < out->count; i++) {
        const fw_overlap next = out->item[i];
        fw_overlap *last = kept > 0 ? &out->item[kept - 1] : NULL;
        if (last != NULL && last->now == next.now && last->before == next.before)
            last->pixels += next.pixels;
        else
            out->item[kept++] = next;
    }
    out->count = kept;
}

/* Two stable passes, the lesser key first: linear, however many pairs a lattice makes. */
static fw_status sort_and_fold(const layer_pair *pair, fw_overlaps *out, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&out->spare, &out->spare_capacity, out->count, sizeof *out->spare,
                   holder, fault));
    sort_pass(out->item, out->spare, out->count, before_key, out->slot, pair->before->count);
    sort_pass(out->spare, out->item, out->count, now_key, out->slot, pair->now->count);
    fold_equal(out);
    return FW_OK;
}

static fw_status find(const layer_pair *pair, fw_overlaps *out, fw_fault *fault)
{
    const uint32_t most =
        pair->before->count > pair->now->count ? pair->before->count : pair->now->count;
    FW_TRY(fw_grow((void **)&out->slot, &out->slot_capacity, (size_t)most + 1, sizeof *out->slot,
                   holder, fault));
    FW_TRY(meet_all(pair, out, fault));
    return sort_and_fold(pair, out, fault);
}

fw_status fw_overlaps_find(const fw_runs *before_runs, const fw_regions *before_regions,
                           const fw_runs *now_runs, const fw_regions *now_regions, fw_overlaps *out,
                           fw_fault *fault)
{
    assert(before_runs->width == now_runs->width && before_runs->height == now_runs->height);
    const layer_pair pair = {before_runs, now_runs, before_regions, now_regions};
    out->count = 0;
    const fw_status status = find(&pair, out, fault);
    if (status != FW_OK)
        out->count = 0;
    return status;
}

void fw_overlaps_free(fw_overlaps *overlaps)
{
    free(overlaps->item);
    free(overlaps->spare);
    free(overlaps->slot);
    *overlaps = (fw_overlaps){0};
}
