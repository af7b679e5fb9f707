/* Contents: lists; opening; the queue; straight looks; ways round corners; public calls. */
#include "posts/ways.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "placing";
enum { FINE = 64 }; /* stored units in the shorter node distance */

fw_status fw_tips_push(fw_tips *tips, fw_tip tip, fw_fault *fault)
{
    FW_TRY(
        fw_grow((void **)&tips->item, &tips->capacity, tips->count + 1, sizeof tip, holder, fault));
    tips->item[tips->count++] = tip;
    return FW_OK;
}

fw_status fw_tips_copy(const fw_tips *from, fw_tips *to, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&to->item, &to->capacity, from->count + 1, sizeof *to->item, holder,
                   fault));
    if (from->count > 0)
        memcpy(to->item, from->item, from->count * sizeof *to->item);
    to->count = from->count;
    return FW_OK;
}

void fw_tips_free(fw_tips *tips)
{
    free(tips->item);
    *tips = (fw_tips){0};
}

static int32_t units(const fw_ways *w, double a, double b)
{
    return (int32_t)lround(hypot(a * w->dx_mm, b * w->dy_mm) / w->unit_mm);
}

static void make_steps(fw_ways *w)
{
    static const int32_t shape[][2] = {{1, 0}, {0, 1}, {1, 1}, {2, 1}, {1, 2}, {3, 1}, {1, 3}};
    int32_t count = 0;
    for (size_t n = 0; n < sizeof shape / sizeof *shape; n++)
        for (int32_t sign = 0; sign < 4; sign++) {
            int32_t a = sign & 1 ? -shape[n][0] : shape[n][0];
            int32_t b = sign & 2 ? -shape[n][1] : shape[n][1];
            if ((shape[n][0] == 0 && (sign & 1)) || (shape[n][1] == 0 && (sign & 2)))
                continue; /* -0 is 0: there once already */
            w->step[count++] = (fw_way_step){a, b, units(w, a, b)};
        }
}

static void count_open(fw_ways *w)
{
    size_t nx = (size_t)w->nx, ny = (size_t)w->ny, width = nx + 1;
    for (size_t b = 0; b < ny; b++)
        for (size_t a = 0; a < nx; a++) {
            int32_t in = (w->flags[b * nx + a] & w->in) != 0;
            w->open[(b + 1) * width + a + 1] = w->open[b * width + a + 1] +
                                               w->open[(b + 1) * width + a] -
                                               w->open[b * width + a] + in;
        }
}

static fw_status open_arrays(fw_ways *w, fw_fault *fault)
{
    size_t corners = (size_t)(w->nx + 1) * (size_t)(w->ny + 1);
    FW_TRY(fw_allocate((void **)&w->open, corners, sizeof *w->open, holder, fault));
    FW_TRY(fw_allocate((void **)&w->distance, w->nodes, sizeof *w->distance, holder, fault));
    FW_TRY(fw_allocate((void **)&w->label, w->nodes, sizeof *w->label, holder, fault));
    return fw_allocate((void **)&w->blind, w->nodes, 1, holder, fault);
}

fw_status fw_ways_open(fw_ways *w, fw_fault *fault)
{
    w->nodes = (size_t)w->nx * (size_t)w->ny;
    w->unit_mm = fmin(w->dx_mm, w->dy_mm) / FINE;
    make_steps(w);
    fw_status status = open_arrays(w, fault);
    if (status == FW_OK)
        count_open(w);
    else
        fw_ways_close(w);
    return status;
}

void fw_ways_close(fw_ways *w)
{
    free(w->open);
    free(w->distance);
    free(w->label);
    free(w->blind);
    free(w->heap);
    w->open = w->distance = w->label = NULL;
    w->blind = NULL;
    w->heap = NULL;
}

static bool node_in(const fw_ways *w, int32_t a, int32_t b)
{
    return a >= 0 && b >= 0 && a < w->nx && b < w->ny &&
           (w->flags[(size_t)b * (size_t)w->nx + (size_t)a] & w->in) != 0;
}

static bool sooner(fw_way_entry one, fw_way_entry two)
{
    return one.distance != two.distance ? one.distance < two.distance : one.node < two.node;
}

static void push_entry(fw_ways *w, fw_way_entry e)
{
    size_t at = w->heap_count++;
    for (; at > 0 && sooner(e, w->heap[(at - 1) / 2]); at = (at - 1) / 2)
        w->heap[at] = w->heap[(at - 1) / 2];
    w->heap[at] = e;
}

static fw_way_entry pop_entry(fw_ways *w)
{
    fw_way_entry top = w->heap[0], last = w->heap[--w->heap_count];
    size_t at = 0;
    for (size_t child; (child = 2 * at + 1) < w->heap_count; at = child) {
        if (child + 1 < w->heap_count && sooner(w->heap[child + 1], w->heap[child]))
            child++;
        if (!sooner(w->heap[child], last))
            break;
        w->heap[at] = w->heap[child];
    }
    w->heap[at] = last;
    return top;
}

static fw_status offer(fw_ways *w, int32_t node, int32_t distance, int32_t label, fw_fault *fault)
{
    if (distance >= w->distance[node])
        return FW_OK;
    FW_TRY(fw_grow((void **)&w->heap, &w->heap_capacity, w->heap_count + 1, sizeof *w->heap, holder,
                   fault));
    w->distance[node] = distance;
    w->label[node] = label;
    push_entry(w, (fw_way_entry){distance, node});
    return FW_OK;
}

/* The nodes round a point get their straight distance to it. */
static fw_status seed(fw_ways *w, const fw_tip *point, int32_t label, fw_fault *fault)
{
    int32_t a0 = (int32_t)floor(point->x_mm / w->dx_mm);
    int32_t b0 = (int32_t)floor(point->y_mm / w->dy_mm);
    for (int32_t b = b0 - 1; b <= b0 + 2; b++)
        for (int32_t a = a0 - 1; a <= a0 + 2; a++) {
            if (!node_in(w, a, b))
                continue;
            int32_t far = units(w, a - point->x_mm / w->dx_mm, b - point->y_mm / w->dy_mm);
            FW_TRY(offer(w, b * w->nx + a, far, label, fault));
        }
    return FW_OK;
}

static fw_status settle(fw_ways *w, int32_t node, int32_t limit, fw_fault *fault)
{
    int32_t a = node % w->nx, b = node / w->nx;
    int32_t here = w->distance[node], label = w->label[node];
    for (int32_t n = 0; n < FW_WAYS_DIRECTIONS; n++) {
        const fw_way_step *t = &w->step[n];
        if (here + t->length <= limit && node_in(w, a + t->a, b + t->b))
            FW_TRY(offer(w, node + t->b * w->nx + t->a, here + t->length, label, fault));
    }
    return FW_OK;
}

/* Empties the queue in order of distance. An fw_way_entry is stale when its node was settled
 * nearer. */
static fw_status sweep(fw_ways *w, int32_t limit, fw_fault *fault)
{
    while (w->heap_count > 0) {
        fw_way_entry e = pop_entry(w);
        if (w->distance[e.node] == e.distance)
            FW_TRY(settle(w, e.node, limit, fault));
    }
    return FW_OK;
}

/* True when all nodes of the box [a0, a1] x [b0, b1] are in. */
static bool box_open(const fw_ways *w, int32_t a0, int32_t a1, int32_t b0, int32_t b1)
{
    size_t width = (size_t)w->nx + 1;
    const int32_t *low = w->open + (size_t)b0 * width, *high = w->open + (size_t)(b1 + 1) * width;
    return high[a1 + 1] - high[a0] - low[a1 + 1] + low[a0] == (a1 - a0 + 1) * (b1 - b0 + 1);
}

/* The nodes round a point, and those it sees. */
typedef struct view {
    double x, y;                   /* nodes */
    fw_way_box box;                /* nodes within range */
    int32_t left, right, up, down; /* the nodes next to the point */
} view;

static int32_t clip(double at, int32_t count)
{
    return (int32_t)fmin(fmax(at, 0.0), count - 1);
}

static view view_from(const fw_ways *w, const fw_tip *point, double range_mm)
{
    view v = {.x = point->x_mm / w->dx_mm, .y = point->y_mm / w->dy_mm};
    double across = range_mm / w->dx_mm, along = range_mm / w->dy_mm;
    v.box = (fw_way_box){clip(ceil(v.x - across), w->nx), clip(floor(v.x + across), w->nx),
                         clip(ceil(v.y - along), w->ny), clip(floor(v.y + along), w->ny)};
    v.left = clip(floor(v.x), w->nx);
    v.right = clip(ceil(v.x), w->nx);
    v.up = clip(floor(v.y), w->ny);
    v.down = clip(ceil(v.y), w->ny);
    return v;
}

/* True when the box between a node and the point is open: then the way is straight. */
static bool sees(const fw_ways *w, const view *v, int32_t a, int32_t b)
{
    return box_open(w, a < v->left ? a : v->left, a > v->right ? a : v->right,
                    b < v->up ? b : v->up, b > v->down ? b : v->down);
}

/* Straight distances to the nodes that a point sees. */
static void look(fw_ways *w, const view *v, int32_t label)
{
    for (int32_t b = v->box.b0; b <= v->box.b1; b++) {
        double y = (b - v->y) * w->dy_mm;
        for (int32_t a = v->box.a0; a <= v->box.a1; a++) {
            double x = (a - v->x) * w->dx_mm;
            size_t node = (size_t)b * (size_t)w->nx + (size_t)a;
            int32_t far = (int32_t)(sqrt(x * x + y * y) / w->unit_mm + 0.5);
            if (far >= w->distance[node])
                continue;
            if (!sees(w, v, a, b))
                w->blind[node] = 1;
            else
                w->distance[node] = far, w->label[node] = label;
        }
    }
}

/* A node gets what its neighbours know. */
static fw_status ask_neighbours(fw_ways *w, int32_t a, int32_t b, fw_fault *fault)
{
    int32_t node = b * w->nx + a;
    for (int32_t n = 0; n < FW_WAYS_DIRECTIONS; n++) {
        const fw_way_step *t = &w->step[n];
        int32_t from = node + t->b * w->nx + t->a;
        if (node_in(w, a + t->a, b + t->b) && w->distance[from] < FW_WAYS_FAR)
            FW_TRY(offer(w, node, w->distance[from] + t->length, w->label[from], fault));
    }
    return FW_OK;
}

/* Asks for all nodes of a range that a point does not see, or that none is in range of. */
static fw_status ask_within(fw_ways *w, const fw_way_box *box, fw_fault *fault)
{
    for (int32_t b = box->b0; b <= box->b1; b++)
        for (int32_t a = box->a0; a <= box->a1; a++) {
            size_t node = (size_t)b * (size_t)w->nx + (size_t)a;
            if ((w->blind[node] || w->distance[node] == FW_WAYS_FAR) && node_in(w, a, b))
                FW_TRY(ask_neighbours(w, a, b, fault));
        }
    return FW_OK;
}

void fw_ways_forget(fw_ways *w)
{
    for (size_t n = 0; n < w->nodes; n++) {
        w->distance[n] = FW_WAYS_FAR;
        w->label[n] = -1;
    }
    memset(w->blind, 0, w->nodes);
}

fw_status fw_ways_measure(fw_ways *w, const fw_tips *points, fw_fault *fault)
{
    fw_ways_forget(w);
    for (size_t c = 0; c < points->count; c++) {
        view v = view_from(w, &points->item[c], w->range_mm);
        look(w, &v, (int32_t)c);
    }
    for (size_t c = 0; c < points->count; c++)
        FW_TRY(seed(w, &points->item[c], (int32_t)c, fault));
    fw_way_box all = {.a1 = w->nx - 1, .b1 = w->ny - 1};
    FW_TRY(ask_within(w, &all, fault));
    return sweep(w, FW_WAYS_FAR / 2, fault);
}

fw_status fw_ways_add(fw_ways *w, const fw_tip *point, int32_t label, fw_fault *fault)
{
    FW_TRY(seed(w, point, label, fault));
    return sweep(w, FW_WAYS_FAR / 2, fault);
}

fw_status fw_ways_round(fw_ways *w, const fw_tip *point, int32_t limit, fw_way_box *box,
                        fw_fault *fault)
{
    view v = view_from(w, point, limit * w->unit_mm + 3.0 * (w->dx_mm + w->dy_mm));
    look(w, &v, 0);
    FW_TRY(seed(w, point, 0, fault));
    FW_TRY(ask_within(w, &v.box, fault));
    *box = v.box;
    FW_TRY(sweep(w, limit, fault));
    for (int32_t b = box->b0; b <= box->b1; b++)
        memset(w->blind + (size_t)b * (size_t)w->nx + box->a0, 0, (size_t)(box->a1 - box->a0 + 1));
    return FW_OK;
}
