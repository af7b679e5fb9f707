/* A layer is drawn row by row. The posts of a layer are a prefix of the plan's list, which is
 * sorted by where they end (all begin at the plate). Walking down the rows, the discs that cross a
 * row each give spans (x0, x1, value); the spans of a row are resolved into disjoint ones by the
 * largest value, which are then merged with the row of the layer that came in. For stamping the
 * value is the grey; for members it is INT32_MAX - post, so that the smaller index wins.
 */
#include "posts/stamp.h"

#include "fault/memory.h"
#include "posts/profile.h"

#include <assert.h>
#include <stdlib.h>

static const char holder[] = "posts of a layer";

typedef struct ending {
    int32_t end; /* first layer that the post does not reach */
    int32_t post;
} ending;

struct fw_stamp_plan {
    const fw_posts *posts;
    fw_screen screen;
    double layer_mm;
    ending *ending; /* [count] routed posts, highest end first */
    size_t count;
};

static int by_end(const void *left, const void *right)
{
    const ending *a = left, *b = right;
    int later = (a->end < b->end) - (a->end > b->end);
    return later != 0 ? later : (a->post > b->post) - (a->post < b->post);
}

static void list_endings(fw_stamp_plan *plan)
{
    for (size_t i = 0; i < plan->posts->count; i++) {
        int32_t first, end;
        fw_post_layers(&plan->posts->item[i], &first, &end);
        if (end > first)
            plan->ending[plan->count++] = (ending){end, (int32_t)i};
    }
    qsort(plan->ending, plan->count, sizeof *plan->ending, by_end);
}

fw_status fw_stamp_plan_make(const fw_posts *posts, const fw_screen *screen, double layer_mm,
                             fw_stamp_plan **plan, fw_fault *fault)
{
    void *memory = NULL, *endings = NULL;
    FW_TRY(fw_allocate(&memory, 1, sizeof **plan, holder, fault));
    fw_status status = fw_allocate(&endings, posts->count, sizeof(ending), holder, fault);
    if (status != FW_OK) {
        free(memory);
        return status;
    }
    *plan = memory;
    **plan =
        (fw_stamp_plan){.posts = posts, .screen = *screen, .layer_mm = layer_mm, .ending = endings};
    list_endings(*plan);
    return FW_OK;
}

void fw_stamp_plan_free(fw_stamp_plan *plan)
{
    if (plan == NULL)
        return;
    free(plan->ending);
    free(plan);
}

int32_t fw_stamp_layers(const fw_stamp_plan *plan)
{
    return plan->count > 0 ? plan->ending[0].end : 0;
}

/* A disc that is to be drawn in this layer. */
typedef struct placed {
    fw_disc disc;
    double left_mm;
    int32_t y0, y1; /* rows */
    int32_t post;
} placed;

typedef struct span {
    int32_t x0, x1, value;
} span;

typedef struct spans {
    span *item; /* [count] */
    size_t count, capacity;
} spans;

/* Everything that drawing one layer needs. */
typedef struct canvas canvas;
typedef fw_status (*span_maker)(canvas *, const placed *, int32_t y, fw_fault *);
struct canvas {
    const fw_stamp_plan *plan;
    span_maker make_spans;
    placed *disc; /* [disc_count] by first row */
    size_t disc_count, next_disc;
    size_t *active; /* [active_count] discs that cross the row, by left edge */
    size_t active_count;
    spans raw;  /* of one row, by x0, may overlap */
    spans flat; /* of one row, by x0, disjoint, largest value */
};

static void canvas_free(canvas *c)
{
    free(c->disc);
    free(c->active);
    free(c->raw.item);
    free(c->flat.item);
}

static int by_first_row(const void *left, const void *right)
{
    const placed *a = left, *b = right;
    int lower = (a->y0 > b->y0) - (a->y0 < b->y0);
    return lower != 0 ? lower : (a->post > b->post) - (a->post < b->post);
}

static bool place(const fw_stamp_plan *plan, int32_t post, int32_t layer, placed *out)
{
    if (!fw_post_disc(&plan->posts->item[post], layer, plan->layer_mm, &out->disc))
        return false;
    out->post = post;
    out->left_mm = out->disc.x_mm - out->disc.diameter_mm / 2.0;
    fw_disc_rows(&plan->screen, &out->disc, &out->y0, &out->y1);
    return out->y0 < out->y1;
}

/* The posts of a layer; below_tip: only those that have not reached their tip layer. */
static fw_status canvas_fill(canvas *c, int32_t layer, bool below_tip, fw_fault *fault)
{
    const fw_stamp_plan *plan = c->plan;
    size_t reaching = 0;
    while (reaching < plan->count && plan->ending[reaching].end > layer)
        reaching++;
    void *discs = NULL, *active = NULL;
    FW_TRY(fw_allocate(&discs, reaching, sizeof *c->disc, holder, fault));
    c->disc = discs;
    FW_TRY(fw_allocate(&active, reaching, sizeof *c->active, holder, fault));
    c->active = active;
    for (size_t i = 0; i < reaching; i++) {
        int32_t post = plan->ending[i].post;
        bool wanted = !below_tip || layer < plan->posts->item[post].tip_layer;
        if (wanted && place(plan, post, layer, &c->disc[c->disc_count]))
            c->disc_count++;
    }
    qsort(c->disc, c->disc_count, sizeof *c->disc, by_first_row);
    return FW_OK;
}

static fw_status add_span(spans *list, span s, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&list->item, &list->capacity, list->count + 1, sizeof *list->item,
                   holder, fault));
    list->item[list->count++] = s;
    return FW_OK;
}

static fw_status add_pixels(canvas *c, const placed *p, int32_t y, int32_t from, int32_t to,
                            fw_fault *fault)
{
    for (int32_t x = from; x < to; x++) {
        double coverage = fw_disc_coverage(&c->plan->screen, &p->disc, x, y);
        int32_t grey = fw_screen_grey(&c->plan->screen, coverage);
        if (grey > 0)
            FW_TRY(add_span(&c->raw, (span){x, x + 1, grey}, fault));
    }
    return FW_OK;
}

static fw_status make_grey_spans(canvas *c, const placed *p, int32_t y, fw_fault *fault)
{
    fw_disc_row row = fw_disc_row_at(&c->plan->screen, &p->disc, y);
    FW_TRY(add_pixels(c, p, y, row.x0, row.core0, fault));
    if (row.core0 < row.core1) {
        int32_t grey = fw_screen_grey(&c->plan->screen, 1.0);
        FW_TRY(add_span(&c->raw, (span){row.core0, row.core1, grey}, fault));
    }
    return add_pixels(c, p, y, row.core1, row.x1, fault);
}

static fw_status make_member_spans(canvas *c, const placed *p, int32_t y, fw_fault *fault)
{
    fw_run run = fw_disc_row_footprint(&c->plan->screen, &p->disc, y);
    if (run.x0 >= run.x1)
        return FW_OK;
    return add_span(&c->raw, (span){run.x0, run.x1, INT32_MAX - p->post}, fault);
}

/* Drops the discs that end before row y, then takes in those that begin at it or before. */
static void canvas_advance(canvas *c, int32_t y)
{
    size_t kept = 0;
    for (size_t i = 0; i < c->active_count; i++) {
        if (c->disc[c->active[i]].y1 > y)
            c->active[kept++] = c->active[i];
    }
    c->active_count = kept;
    for (; c->next_disc < c->disc_count && c->disc[c->next_disc].y0 <= y; c->next_disc++) {
        size_t i = c->active_count++;
        double left_mm = c->disc[c->next_disc].left_mm;
        for (; i > 0 && c->disc[c->active[i - 1]].left_mm > left_mm; i--)
            c->active[i] = c->active[i - 1];
        c->active[i] = c->next_disc;
    }
}

static int by_start(const void *left, const void *right)
{
    const span *a = left, *b = right;
    return (a->x0 > b->x0) - (a->x0 < b->x0);
}

/* Discs that do not overlap give their spans in order already. */
static void sort_spans(spans *list)
{
    for (size_t i = 1; i < list->count; i++) {
        if (list->item[i - 1].x0 > list->item[i].x0) {
            qsort(list->item, list->count, sizeof *list->item, by_start);
            return;
        }
    }
}

/* Largest value of the live spans, the front of `raw` (those taken in are never needed again). */
static fw_status flatten(canvas *c, fw_fault *fault)
{
    span *item = c->raw.item;
    size_t live = 0, next = 0;
    int32_t x = 0;
    c->flat.count = 0;
    while (live > 0 || next < c->raw.count) {
        if (live == 0)
            x = item[next].x0;
        while (next < c->raw.count && item[next].x0 <= x)
            item[live++] = item[next++];
        span piece = {x, next < c->raw.count ? item[next].x0 : INT32_MAX, 0};
        for (size_t i = 0; i < live; i++) {
            piece.x1 = item[i].x1 < piece.x1 ? item[i].x1 : piece.x1;
            piece.value = item[i].value > piece.value ? item[i].value : piece.value;
        }
        FW_TRY(add_span(&c->flat, piece, fault));
        x = piece.x1;
        size_t kept = 0;
        for (size_t i = 0; i < live; i++) {
            if (item[i].x1 > x)
                item[kept++] = item[i];
        }
        live = kept;
    }
    return FW_OK;
}

/* Leaves the spans of row y in c->raw. Rows are asked for in ascending order. */
static fw_status canvas_gather(canvas *c, int32_t y, fw_fault *fault)
{
    canvas_advance(c, y);
    c->raw.count = 0;
    for (size_t i = 0; i < c->active_count; i++)
        FW_TRY(c->make_spans(c, &c->disc[c->active[i]], y, fault));
    sort_spans(&c->raw);
    return FW_OK;
}

/* The same, resolved into c->flat. */
static fw_status canvas_row(canvas *c, int32_t y, fw_fault *fault)
{
    FW_TRY(canvas_gather(c, y, fault));
    return flatten(c, fault);
}

static int32_t lesser(int32_t a, int32_t b)
{
    return a < b ? a : b;
}

/* Value and end of a list of disjoint spans at x; items that end at x or before are passed. */
typedef struct reader {
    int32_t x0, x1, value; /* of the item at hand; x0 == INT32_MAX when there is none */
} reader;

static int32_t value_at(const reader *r, int32_t x)
{
    return r->x0 <= x ? r->value : 0;
}

static int32_t edge_after(const reader *r, int32_t x)
{
    return r->x0 > x ? r->x0 : r->x1;
}

static reader read_grey(const fw_greys *in, uint32_t *i, uint32_t end, int32_t x)
{
    while (*i < end && in->run[*i].x1 <= x)
        (*i)++;
    if (*i == end)
        return (reader){INT32_MAX, INT32_MAX, 0};
    return (reader){in->run[*i].x0, in->run[*i].x1, in->run[*i].grey};
}

static reader read_span(const spans *list, size_t *i, int32_t x)
{
    while (*i < list->count && list->item[*i].x1 <= x)
        (*i)++;
    if (*i == list->count)
        return (reader){INT32_MAX, INT32_MAX, 0};
    return (reader){list->item[*i].x0, list->item[*i].x1, list->item[*i].value};
}

/* out's row y = the larger of both at each pixel. */
static fw_status merge_row(const fw_greys *in, const spans *drawn, int32_t y, fw_greys *out,
                           bool *touched, fw_fault *fault)
{
    uint32_t i = in != NULL ? in->row[y] : 0;
    const uint32_t end = in != NULL ? in->row[y + 1] : 0;
    size_t j = 0;
    int32_t x = 0;
    for (;;) {
        reader was = read_grey(in, &i, end, x), post = read_span(drawn, &j, x);
        x = lesser(was.x0, post.x0) > x ? lesser(was.x0, post.x0) : x;
        if (x == INT32_MAX)
            return FW_OK;
        int32_t old = value_at(&was, x), grey = value_at(&post, x);
        int32_t stop = lesser(edge_after(&was, x), edge_after(&post, x));
        *touched = *touched || grey > old;
        FW_TRY(fw_greys_push(out, y, x, stop, grey > old ? grey : old, fault));
        x = stop;
    }
}

static fw_status draw(canvas *c, const fw_greys *in, fw_greys *out, bool *touched, fw_fault *fault)
{
    for (int32_t y = 0; y < out->height; y++) {
        FW_TRY(canvas_row(c, y, fault));
        FW_TRY(merge_row(in, &c->flat, y, out, touched, fault));
    }
    fw_greys_finish(out);
    return FW_OK;
}

fw_status fw_stamp_layer(const fw_stamp_plan *plan, int32_t layer, const fw_greys *in,
                         fw_greys *out, bool *touched, fw_fault *fault)
{
    const fw_screen *screen = &plan->screen;
    assert(in == NULL || (in->width == screen->width && in->height == screen->height));
    *touched = false;
    int32_t full = in != NULL ? in->full : screen->full;
    FW_TRY(fw_greys_begin(out, screen->width, screen->height, full, fault));
    canvas c = {.plan = plan, .make_spans = make_grey_spans};
    fw_status status = canvas_fill(&c, layer, false, fault);
    if (status == FW_OK)
        status = draw(&c, in, out, touched, fault);
    canvas_free(&c);
    return status;
}

void fw_member_runs_free(fw_member_runs *members)
{
    free(members->row);
    free(members->run);
    *members = (fw_member_runs){0};
}

static fw_status add_member(fw_member_runs *out, span s, fw_fault *fault)
{
    int32_t post = INT32_MAX - s.value;
    fw_member_run *last = out->count > out->row[out->open_row] ? &out->run[out->count - 1] : NULL;
    if (last != NULL && last->x1 == s.x0 && last->post == post) {
        last->x1 = s.x1;
        return FW_OK;
    }
    FW_TRY(fw_grow((void **)&out->run, &out->run_capacity, (size_t)out->count + 1, sizeof *out->run,
                   holder, fault));
    out->run[out->count++] = (fw_member_run){s.x0, s.x1, post};
    return FW_OK;
}

/* What span s loses to those of greater value; `list` ascends by x0, items before `first` end
 * before s begins. */
static fw_status add_lost(const spans *list, size_t first, span s, fw_member_runs *out,
                          fw_fault *fault)
{
    int32_t x = s.x0;
    for (size_t i = first; i < list->count && list->item[i].x0 < s.x1; i++) {
        const span winner = list->item[i];
        if (winner.value <= s.value)
            continue;
        const span lost = {winner.x0 > x ? winner.x0 : x, lesser(winner.x1, s.x1), s.value};
        if (lost.x0 >= lost.x1)
            continue;
        FW_TRY(add_member(out, lost, fault));
        x = lost.x1;
    }
    return FW_OK;
}

static fw_status list_lost(const spans *list, fw_member_runs *out, fw_fault *fault)
{
    size_t first = 0;
    for (size_t i = 0; i < list->count; i++) {
        while (list->item[first].x1 <= list->item[i].x0)
            first++;
        FW_TRY(add_lost(list, first, list->item[i], out, fault));
    }
    return FW_OK;
}

static fw_status list_members(canvas *c, fw_member_runs *out, fw_member_runs *lost, fw_fault *fault)
{
    for (int32_t y = 0; y < out->height; y++) {
        out->open_row = lost->open_row = y;
        FW_TRY(canvas_gather(c, y, fault));
        FW_TRY(list_lost(&c->raw, lost, fault));
        FW_TRY(flatten(c, fault));
        for (size_t i = 0; i < c->flat.count; i++)
            FW_TRY(add_member(out, c->flat.item[i], fault));
        out->row[y + 1] = out->count;
        lost->row[y + 1] = lost->count;
    }
    out->open_row = lost->open_row = out->height;
    return FW_OK;
}

static fw_status begin_members(const fw_screen *screen, fw_member_runs *out, fw_fault *fault)
{
    out->width = screen->width;
    out->height = screen->height;
    out->count = 0;
    FW_TRY(fw_grow((void **)&out->row, &out->row_capacity, (size_t)out->height + 1,
                   sizeof *out->row, holder, fault));
    out->row[0] = 0;
    return FW_OK;
}

fw_status fw_stamp_members(const fw_stamp_plan *plan, int32_t layer, fw_member_runs *out,
                           fw_member_runs *lost, fw_fault *fault)
{
    FW_TRY(begin_members(&plan->screen, out, fault));
    FW_TRY(begin_members(&plan->screen, lost, fault));
    canvas c = {.plan = plan, .make_spans = make_member_spans};
    fw_status status = canvas_fill(&c, layer, true, fault);
    if (status == FW_OK)
        status = list_members(&c, out, lost, fault);
    canvas_free(&c);
    return status;
}

fw_status fw_stamp_post(const fw_stamp_plan *plan, size_t post, int32_t layer, bool include_bite,
                        fw_runs *out, fw_fault *fault)
{
    const fw_post *p = &plan->posts->item[post];
    fw_disc disc = {0};
    bool wanted = include_bite || layer < p->tip_layer;
    if (!wanted || !fw_post_disc(p, layer, plan->layer_mm, &disc))
        disc.diameter_mm = 0.0;
    return fw_disc_footprint(&plan->screen, &disc, out, fault);
}
