#include "mask/runs.h"

#include "fault/memory.h"

#include <assert.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "runs of a layer";

fw_status fw_runs_begin(fw_runs *set, int32_t width, int32_t height, fw_fault *fault)
{
    assert(width >= 0 && height >= 0);
    FW_TRY(fw_grow((void **)&set->row, &set->row_capacity, (size_t)height + 1, sizeof *set->row,
                   holder, fault));
    set->width = width;
    set->height = height;
    set->count = 0;
    set->open_row = 0;
    set->row[0] = 0;
    return FW_OK;
}

static void close_rows_before(fw_runs *set, int32_t y)
{
    while (set->open_row < y)
        set->row[++set->open_row] = set->count;
}

fw_status fw_runs_push(fw_runs *set, int32_t y, int32_t x0, int32_t x1, fw_fault *fault)
{
    assert(y >= set->open_row && y < set->height && 0 <= x0 && x1 <= set->width);
    if (x0 >= x1)
        return FW_OK;
    close_rows_before(set, y);
    bool first_in_row = set->count == set->row[y];
    if (!first_in_row && set->run[set->count - 1].x1 >= x0) {
        if (x1 > set->run[set->count - 1].x1)
            set->run[set->count - 1].x1 = x1;
        return FW_OK;
    }
    FW_TRY(fw_grow((void **)&set->run, &set->run_capacity, (size_t)set->count + 1, sizeof *set->run,
                   holder, fault));
    set->run[set->count++] = (fw_run){x0, x1};
    return FW_OK;
}

void fw_runs_finish(fw_runs *set)
{
    close_rows_before(set, set->height);
}

void fw_runs_free(fw_runs *set)
{
    free(set->row);
    free(set->run);
    *set = (fw_runs){0};
}

static bool row_valid(const fw_runs *set, int32_t y)
{
    if (set->row[y] > set->row[y + 1])
        return false;
    for (uint32_t i = set->row[y]; i < set->row[y + 1]; i++) {
        const fw_run r = set->run[i];
        if (r.x0 < 0 || r.x0 >= r.x1 || r.x1 > set->width)
            return false;
        if (i > set->row[y] && set->run[i - 1].x1 >= r.x0)
            return false;
    }
    return true;
}

bool fw_runs_valid(const fw_runs *set)
{
    if (set->row == NULL)
        return set->count == 0 && set->height == 0;
    if (set->row[0] != 0 || set->row[set->height] != set->count)
        return false;
    for (int32_t y = 0; y < set->height; y++) {
        if (!row_valid(set, y))
            return false;
    }
    return true;
}

int64_t fw_runs_pixels(const fw_runs *set)
{
    int64_t pixels = 0;
    for (uint32_t i = 0; i < set->count; i++)
        pixels += set->run[i].x1 - set->run[i].x0;
    return pixels;
}

bool fw_runs_equal(const fw_runs *a, const fw_runs *b)
{
    if (a->width != b->width || a->height != b->height || a->count != b->count)
        return false;
    if (a->count == 0)
        return true;
    return memcmp(a->row, b->row, ((size_t)a->height + 1) * sizeof *a->row) == 0 &&
           memcmp(a->run, b->run, a->count * sizeof *a->run) == 0;
}

uint32_t fw_runs_seek(const fw_runs *set, int32_t x, int32_t y)
{
    uint32_t low = set->row[y], high = set->row[y + 1];
    while (low < high) {
        uint32_t middle = low + (high - low) / 2;
        if (set->run[middle].x1 <= x)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

uint32_t fw_runs_find(const fw_runs *set, int32_t x, int32_t y)
{
    if (y < 0 || y >= set->height)
        return UINT32_MAX;
    uint32_t run = fw_runs_seek(set, x, y);
    bool inside = run < set->row[y + 1] && set->run[run].x0 <= x;
    return inside ? run : UINT32_MAX;
}

fw_status fw_runs_complement(const fw_runs *a, fw_runs *out, fw_fault *fault)
{
    FW_TRY(fw_runs_begin(out, a->width, a->height, fault));
    for (int32_t y = 0; y < a->height; y++) {
        int32_t x = 0;
        for (uint32_t i = a->row[y]; i < a->row[y + 1]; i++) {
            FW_TRY(fw_runs_push(out, y, x, a->run[i].x0, fault));
            x = a->run[i].x1;
        }
        FW_TRY(fw_runs_push(out, y, x, a->width, fault));
    }
    fw_runs_finish(out);
    return FW_OK;
}

static int32_t least(int32_t a, int32_t b)
{
    return a < b ? a : b;
}

static int32_t most(int32_t a, int32_t b)
{
    return a > b ? a : b;
}

fw_status fw_runs_intersect(const fw_runs *a, const fw_runs *b, fw_runs *out, fw_fault *fault)
{
    assert(a->width == b->width && a->height == b->height);
    FW_TRY(fw_runs_begin(out, a->width, a->height, fault));
    for (int32_t y = 0; y < a->height; y++) {
        uint32_t i = a->row[y], j = b->row[y];
        while (i < a->row[y + 1] && j < b->row[y + 1]) {
            const fw_run p = a->run[i], q = b->run[j];
            FW_TRY(fw_runs_push(out, y, most(p.x0, q.x0), least(p.x1, q.x1), fault));
            if (p.x1 < q.x1)
                i++;
            else
                j++;
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

fw_status fw_runs_subtract(const fw_runs *a, const fw_runs *b, fw_runs *out, fw_fault *fault)
{
    assert(a->width == b->width && a->height == b->height);
    FW_TRY(fw_runs_begin(out, a->width, a->height, fault));
    for (int32_t y = 0; y < a->height; y++) {
        uint32_t j = b->row[y];
        for (uint32_t i = a->row[y]; i < a->row[y + 1]; i++) {
            int32_t x = a->run[i].x0;
            const int32_t end = a->run[i].x1;
            while (j < b->row[y + 1] && b->run[j].x1 <= x)
                j++;
            for (uint32_t k = j; k < b->row[y + 1] && b->run[k].x0 < end; k++) {
                FW_TRY(fw_runs_push(out, y, x, most(x, b->run[k].x0), fault));
                x = most(x, b->run[k].x1);
            }
            FW_TRY(fw_runs_push(out, y, x, most(x, end), fault));
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

fw_status fw_runs_unite(const fw_runs *a, const fw_runs *b, fw_runs *out, fw_fault *fault)
{
    assert(a->width == b->width && a->height == b->height);
    FW_TRY(fw_runs_begin(out, a->width, a->height, fault));
    for (int32_t y = 0; y < a->height; y++) {
        uint32_t i = a->row[y], j = b->row[y];
        while (i < a->row[y + 1] || j < b->row[y + 1]) {
            bool take_a = j == b->row[y + 1] || (i < a->row[y + 1] && a->run[i].x0 <= b->run[j].x0);
            const fw_run next = take_a ? a->run[i++] : b->run[j++];
            FW_TRY(fw_runs_push(out, y, next.x0, next.x1, fault));
        }
    }
    fw_runs_finish(out);
    return FW_OK;
}

fw_status fw_runs_copy(const fw_runs *a, fw_runs *out, fw_fault *fault)
{
    FW_TRY(fw_runs_begin(out, a->width, a->height, fault));
    FW_TRY(
        fw_grow((void **)&out->run, &out->run_capacity, a->count, sizeof *a->run, holder, fault));
    if (a->count > 0)
        memcpy(out->run, a->run, a->count * sizeof *a->run);
    memcpy(out->row, a->row, ((size_t)a->height + 1) * sizeof *a->row);
    out->count = a->count;
    out->open_row = a->height;
    return FW_OK;
}

static bool rows_meet(const fw_runs *a, const fw_runs *b, int32_t y)
{
    uint32_t i = a->row[y], j = b->row[y];
    while (i < a->row[y + 1] && j < b->row[y + 1]) {
        if (a->run[i].x1 <= b->run[j].x0)
            i++;
        else if (b->run[j].x1 <= a->run[i].x0)
            j++;
        else
            return true;
    }
    return false;
}

bool fw_runs_meet(const fw_runs *a, const fw_runs *b)
{
    assert(a->width == b->width && a->height == b->height);
    for (int32_t y = 0; y < a->height; y++) {
        if (rows_meet(a, b, y))
            return true;
    }
    return false;
}

/* Half width of the ellipse at dy rows from its centre, in whole pixels; -1 outside. A reach that
 * misses a whole pixel by rounding alone (0.3 mm / 0.05 mm) counts as that pixel on both axes. */
static int32_t ellipse_half_width(double reach_x, double reach_y, int32_t dy)
{
    double share = reach_y > 0 ? (double)dy / reach_y : (dy == 0 ? 0.0 : 2.0);
    const double rest = 1.0 - share * share;
    if (rest < -1e-9)
        return -1;
    return (int32_t)floor(reach_x * sqrt(fmax(0.0, rest)) + 1e-9);
}

typedef struct row_pool {
    fw_run *run;
    size_t count, capacity;
} row_pool;

static void pool_push(row_pool *pool, int32_t x0, int32_t x1)
{
    fw_run *last = pool->count > 0 ? &pool->run[pool->count - 1] : NULL;
    if (last == NULL || last->x1 < x0)
        pool->run[pool->count++] = (fw_run){x0, x1};
    else if (last->x1 < x1)
        last->x1 = x1;
}

/* out = what is in `pool` and one row of a, widened by half. Both ascend, so does out. */
static fw_status cast_row(const fw_runs *a, int32_t row, int32_t half, const row_pool *pool,
                          row_pool *out, fw_fault *fault)
{
    uint32_t i = a->row[row];
    const uint32_t end = a->row[row + 1];
    FW_TRY(fw_grow((void **)&out->run, &out->capacity, pool->count + (end - i), sizeof *out->run,
                   holder, fault));
    out->count = 0;
    for (size_t j = 0; i < end || j < pool->count;) {
        if (i < end && (j == pool->count || a->run[i].x0 - half <= pool->run[j].x0)) {
            pool_push(out, most(0, a->run[i].x0 - half), least(a->width, a->run[i].x1 + half));
            i++;
        } else {
            pool_push(out, pool->run[j].x0, pool->run[j].x1);
            j++;
        }
    }
    return FW_OK;
}

/* pool[0] = what the rows within reach of y cast onto it. Row by row, as what they cast mostly
 * grows together: sorting all of it takes longer. */
static fw_status gather_row(const fw_runs *a, double reach_x, double reach_y, int32_t y,
                            row_pool pool[2], fw_fault *fault)
{
    const int32_t rows = (int32_t)floor(reach_y + 1e-9);
    pool[0].count = 0;
    for (int32_t dy = -rows; dy <= rows; dy++) {
        const int32_t from = y + dy;
        if (from < 0 || from >= a->height || a->row[from] == a->row[from + 1])
            continue;
        const int32_t half = ellipse_half_width(reach_x, reach_y, dy);
        if (half < 0)
            continue;
        FW_TRY(cast_row(a, from, half, &pool[0], &pool[1], fault));
        const row_pool cast = pool[1];
        pool[1] = pool[0];
        pool[0] = cast;
    }
    return FW_OK;
}

static fw_status dilate_rows(const fw_runs *a, double reach_x, double reach_y, row_pool pool[2],
                             fw_runs *out, fw_fault *fault)
{
    for (int32_t y = 0; y < a->height; y++) {
        FW_TRY(gather_row(a, reach_x, reach_y, y, pool, fault));
        for (size_t i = 0; i < pool[0].count; i++)
            FW_TRY(fw_runs_push(out, y, pool[0].run[i].x0, pool[0].run[i].x1, fault));
    }
    return FW_OK;
}

fw_status fw_runs_dilate(const fw_runs *a, double reach_x, double reach_y, fw_runs *out,
                         fw_fault *fault)
{
    FW_TRY(fw_runs_begin(out, a->width, a->height, fault));
    row_pool pool[2] = {{0}, {0}};
    fw_status status = dilate_rows(a, reach_x, reach_y, pool, out, fault);
    free(pool[0].run);
    free(pool[1].run);
    fw_runs_finish(out);
    return status;
}
