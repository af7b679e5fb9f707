#include "check/members.h"

#include "fault/memory.h"

#include <stdlib.h>

static const char holder[] = "post pixels of a layer";

void fw_members_clear(fw_member_runs *members)
{
    members->width = members->height = 0;
    members->count = 0;
}

static fw_status begin(fw_member_runs *out, const fw_member_runs *like, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&out->row, &out->row_capacity, (size_t)like->height + 1,
                   sizeof *out->row, holder, fault));
    out->width = like->width;
    out->height = like->height;
    out->count = 0;
    out->row[0] = 0;
    return FW_OK;
}

static fw_status push(fw_member_runs *out, fw_member_run run, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&out->run, &out->run_capacity, (size_t)out->count + 1, sizeof *out->run,
                   holder, fault));
    out->run[out->count++] = run;
    return FW_OK;
}

/* One row of the intersection. j steps back where the members do, so both kinds of lists (ascending
 * or overlapping) cost little more than their runs. */
static fw_status row_within(const fw_member_runs *members, const fw_runs *set, int32_t y,
                            fw_member_runs *out, fw_fault *fault)
{
    const uint32_t first = set->row[y], end = set->row[y + 1];
    uint32_t j = first;
    for (uint32_t i = members->row[y]; i < members->row[y + 1]; i++) {
        const fw_member_run m = members->run[i];
        while (j > first && set->run[j - 1].x1 > m.x0)
            j--;
        while (j < end && set->run[j].x1 <= m.x0)
            j++;
        for (; j < end && set->run[j].x0 < m.x1; j++) {
            const fw_run s = set->run[j];
            const int32_t x0 = m.x0 > s.x0 ? m.x0 : s.x0;
            const int32_t x1 = m.x1 < s.x1 ? m.x1 : s.x1;
            FW_TRY(push(out, (fw_member_run){x0, x1, m.post}, fault));
        }
    }
    return FW_OK;
}

fw_status fw_members_within(const fw_member_runs *members, const fw_runs *set, fw_member_runs *out,
                            fw_fault *fault)
{
    FW_TRY(begin(out, members, fault));
    for (int32_t y = 0; y < members->height; y++) {
        FW_TRY(row_within(members, set, y, out, fault));
        out->row[y + 1] = out->count;
    }
    return FW_OK;
}

fw_status fw_members_set(const fw_member_runs *members, bool (*keep)(void *, int32_t),
                         void *context, fw_runs *out, fw_fault *fault)
{
    FW_TRY(fw_runs_begin(out, members->width, members->height, fault));
    for (int32_t y = 0; y < members->height; y++) {
        for (uint32_t i = members->row[y]; i < members->row[y + 1]; i++) {
            const fw_member_run m = members->run[i];
            if (keep == NULL || keep(context, m.post))
                FW_TRY(fw_runs_push(out, y, m.x0, m.x1, fault));
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

static bool is_post(void *context, int32_t post)
{
    return post == *(const int32_t *)context;
}

fw_status fw_members_of(const fw_member_runs *members, int32_t post, fw_runs *out, fw_fault *fault)
{
    return fw_members_set(members, is_post, &post, out, fault);
}

int32_t fw_members_at(const fw_member_runs *members, int32_t x, int32_t y)
{
    if (y < 0 || y >= members->height)
        return -1;
    uint32_t low = members->row[y], high = members->row[y + 1];
    while (low < high) {
        const uint32_t middle = low + (high - low) / 2;
        if (members->run[middle].x1 <= x)
            low = middle + 1;
        else
            high = middle;
    }
    const bool inside = low < members->row[y + 1] && members->run[low].x0 <= x;
    return inside ? members->run[low].post : -1;
}

static int by_region_and_post(const void *left, const void *right)
{
    const fw_member_piece *a = left, *b = right;
    if (a->region != b->region)
        return a->region < b->region ? -1 : 1;
    return (a->post > b->post) - (a->post < b->post);
}

static void join_equal(fw_member_pieces *list)
{
    size_t kept = 0;
    for (size_t i = 0; i < list->count; i++) {
        fw_member_piece *last = kept > 0 ? &list->item[kept - 1] : NULL;
        if (last != NULL && by_region_and_post(last, &list->item[i]) == 0)
            last->pixels += list->item[i].pixels;
        else
            list->item[kept++] = list->item[i];
    }
    list->count = kept;
}

fw_status fw_members_pieces(const fw_member_runs *members, const fw_runs *set,
                            const fw_regions *regions, fw_member_pieces *out, fw_fault *fault)
{
    out->count = 0;
    for (int32_t y = 0; y < members->height; y++) {
        for (uint32_t i = members->row[y]; i < members->row[y + 1]; i++) {
            const fw_member_run m = members->run[i];
            FW_TRY(fw_grow((void **)&out->item, &out->capacity, out->count + 1, sizeof *out->item,
                           holder, fault));
            out->item[out->count++] =
                (fw_member_piece){regions->label[fw_runs_find(set, m.x0, y)], m.post, m.x1 - m.x0};
        }
    }
    if (out->count > 0)
        qsort(out->item, out->count, sizeof *out->item, by_region_and_post);
    join_equal(out);
    return FW_OK;
}

static int by_pair(const void *left, const void *right)
{
    const fw_member_pair *x = left, *y = right;
    if (x->a != y->a)
        return x->a < y->a ? -1 : 1;
    return (x->b > y->b) - (x->b < y->b);
}

static fw_status note_pair(fw_member_pairs *list, fw_member_run m, fw_member_run n, fw_fault *fault)
{
    const int32_t x0 = m.x0 > n.x0 ? m.x0 : n.x0, x1 = m.x1 < n.x1 ? m.x1 : n.x1;
    if (x0 >= x1)
        return FW_OK;
    FW_TRY(fw_grow((void **)&list->item, &list->capacity, list->count + 1, sizeof *list->item,
                   holder, fault));
    list->item[list->count++] = m.post < n.post ? (fw_member_pair){m.post, n.post, x1 - x0}
                                                : (fw_member_pair){n.post, m.post, x1 - x0};
    return FW_OK;
}

/* The pairs of one run that was lost: with those who own its pixels, and with the rest of the row
 * that lost them too. */
static fw_status pairs_of_run(const fw_member_runs *members, const fw_member_runs *lost, int32_t y,
                              uint32_t i, fw_member_pairs *out, fw_fault *fault)
{
    const fw_member_run m = lost->run[i];
    for (uint32_t j = members->row[y]; j < members->row[y + 1]; j++)
        FW_TRY(note_pair(out, m, members->run[j], fault));
    for (uint32_t j = i + 1; j < lost->row[y + 1]; j++) {
        if (lost->run[j].post != m.post)
            FW_TRY(note_pair(out, m, lost->run[j], fault));
    }
    return FW_OK;
}

static void join_pairs(fw_member_pairs *list)
{
    size_t kept = 0;
    if (list->count > 0)
        qsort(list->item, list->count, sizeof *list->item, by_pair);
    for (size_t i = 0; i < list->count; i++) {
        if (kept > 0 && by_pair(&list->item[kept - 1], &list->item[i]) == 0)
            list->item[kept - 1].pixels += list->item[i].pixels;
        else
            list->item[kept++] = list->item[i];
    }
    list->count = kept;
}

fw_status fw_members_pairs(const fw_member_runs *members, const fw_member_runs *lost,
                           fw_member_pairs *out, fw_fault *fault)
{
    out->count = 0;
    for (int32_t y = 0; y < lost->height; y++) {
        for (uint32_t i = lost->row[y]; i < lost->row[y + 1]; i++)
            FW_TRY(pairs_of_run(members, lost, y, i, out, fault));
    }
    join_pairs(out);
    return FW_OK;
}
