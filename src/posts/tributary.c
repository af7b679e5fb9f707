/* Lengths are whole nanometres, so that equal paths are equal whatever the order of their sums, and
 * are kept less the thickness of all layers so far: to carry a node is to copy it, and a layer that
 * repeats costs one addition. The order (length, anchor) is total; steps are positive, so taking
 * the smallest first (Dijkstra) settles both at once. */
#include "posts/tributary.h"

#include "fault/memory.h"
#include "posts/tributary_nodes.h"

#include <math.h>
#include <stdlib.h>

/* Marks in `sole`, beside anchors (from 0) and FW_NO_ANCHOR. */
enum { MIXED = FW_MIXED, UNSEEN = -3 };

static const char holder[] = "shares of the anchors";

typedef struct node {
    int64_t length; /* nm, less `risen`; INT64_MAX where none */
    int32_t anchor;
} node;

typedef struct node_layer {
    fw_spans spans;
    node *node;        /* [spans.nodes] */
    uint64_t *version; /* [regions] */
    size_t node_capacity, version_capacity;
    uint32_t regions;
} node_layer;

typedef struct entry {
    node value;
    uint32_t span;
    int32_t c;
} entry;

struct fw_tributary {
    int32_t width, height; /* px */
    fw_cells cells;
    int64_t right, down, diagonal; /* nm, distances of cell centres */
    int64_t risen;                 /* nm, thickness of all layers so far */
    node_layer now, before;
    const fw_runs *solid; /* newest layer, borrowed; NULL before the first */
    const fw_regions *regions;
    fw_spans overlaps; /* of the last two layers, kept for its memory */
    int32_t *sole;     /* [now.regions] owner of all cells of the region, or MIXED */
    size_t sole_capacity;
    int64_t *origin; /* [now.regions] region before, UNSEEN, or MIXED */
    size_t origin_capacity;
    bool changed; /* some owner, since sole was filled */
    entry *heap;  /* [heap_count] */
    size_t heap_count, heap_capacity;
};

static const node nothing = {INT64_MAX, FW_NO_ANCHOR};

static int64_t nanometres(double mm)
{
    return (int64_t)llround(mm * 1e6);
}

/* A cell side of about 0.2 mm in pixels: well under the pitch of tips, coarse enough to be cheap.
 */
static int32_t pixels_in_cell(double pixel_mm)
{
    return pixel_mm >= 0.2 ? 1 : (int32_t)fmin(round(0.2 / pixel_mm), 65535);
}

static int32_t cells_over(int32_t pixels, int32_t cell)
{
    return pixels / cell + (pixels % cell != 0);
}

fw_status fw_tributary_new(int32_t width, int32_t height, double px_mm, double py_mm,
                           fw_tributary **out, fw_fault *fault)
{
    if (width < 1 || height < 1 || (uint64_t)width * (uint64_t)height > UINT32_MAX ||
        !(px_mm > 0 && px_mm <= 1000) || !(py_mm > 0 && py_mm <= 1000))
        return fw_fault_set(fault, FW_INPUT,
                            "cannot share %d x %d pixels of %g x %g mm between anchors, use "
                            "fewer than 2^32 pixels and sides up to 1000 mm",
                            (int)width, (int)height, px_mm, py_mm);
    fw_tributary *field = NULL;
    FW_TRY(fw_allocate((void **)&field, 1, sizeof *field, holder, fault));
    const int32_t kx = pixels_in_cell(px_mm), ky = pixels_in_cell(py_mm);
    field->width = width;
    field->height = height;
    field->cells = (fw_cells){kx, ky, cells_over(width, kx), cells_over(height, ky)};
    field->right = nanometres(kx * px_mm);
    field->down = nanometres(ky * py_mm);
    field->diagonal = nanometres(hypot(kx * px_mm, ky * py_mm));
    *out = field;
    return FW_OK;
}

static void free_layer(node_layer *layer)
{
    fw_spans_free(&layer->spans);
    free(layer->node);
    free(layer->version);
}

void fw_tributary_free(fw_tributary *field)
{
    if (field == NULL)
        return;
    free_layer(&field->now);
    free_layer(&field->before);
    fw_spans_free(&field->overlaps);
    free(field->heap);
    free(field->sole);
    free(field->origin);
    free(field);
}

static bool less(node a, node b)
{
    return a.length != b.length ? a.length < b.length : a.anchor < b.anchor;
}

static bool entry_less(const entry *a, const entry *b)
{
    if (less(a->value, b->value) || less(b->value, a->value))
        return less(a->value, b->value);
    return a->span != b->span ? a->span < b->span : a->c < b->c;
}

static fw_status heap_push(fw_tributary *field, entry e, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&field->heap, &field->heap_capacity, field->heap_count + 1,
                   sizeof *field->heap, holder, fault));
    size_t at = field->heap_count++;
    for (; at > 0 && entry_less(&e, &field->heap[(at - 1) / 2]); at = (at - 1) / 2)
        field->heap[at] = field->heap[(at - 1) / 2];
    field->heap[at] = e;
    return FW_OK;
}

static entry heap_pop(fw_tributary *field)
{
    entry *heap = field->heap;
    const entry top = heap[0], last = heap[--field->heap_count];
    size_t at = 0;
    for (size_t child = 1; child < field->heap_count; child = 2 * at + 1) {
        if (child + 1 < field->heap_count && entry_less(&heap[child + 1], &heap[child]))
            child++;
        if (!entry_less(&heap[child], &last))
            break;
        heap[at] = heap[child];
        at = child;
    }
    heap[at] = last;
    return top;
}

static node *node_at(node_layer *layer, uint32_t span, int32_t c)
{
    const fw_span *s = &layer->spans.span[span];
    return &layer->node[s->first + (uint32_t)(c - s->c0)];
}

/* A well mixed number for a cell and its owner (the finaliser of splitmix64, public domain). A
 * region's version is the sum over its cells, so that one change costs one subtraction. */
static uint64_t mix(const fw_tributary *field, int32_t row, int32_t c, int32_t anchor)
{
    uint64_t z = ((uint64_t)row * (uint64_t)field->cells.columns + (uint64_t)c) << 32;
    z = (z ^ (uint32_t)anchor) + UINT64_C(0x9e3779b97f4a7c15);
    z = (z ^ z >> 30) * UINT64_C(0xbf58476d1ce4e5b9);
    z = (z ^ z >> 27) * UINT64_C(0x94d049bb133111eb);
    return z ^ z >> 31;
}

static void set_node(fw_tributary *field, uint32_t span, int32_t c, node value)
{
    node *at = node_at(&field->now, span, c);
    const fw_span *s = &field->now.spans.span[span];
    if (at->anchor != value.anchor) {
        field->changed = true;
        field->now.version[s->key] +=
            mix(field, s->row, c, value.anchor) - mix(field, s->row, c, at->anchor);
    }
    *at = value;
}

static fw_status offer(fw_tributary *field, uint32_t span, int32_t c, node value, fw_fault *fault)
{
    if (!less(value, *node_at(&field->now, span, c)))
        return FW_OK;
    set_node(field, span, c, value);
    return heap_push(field, (entry){value, span, c}, fault);
}

static fw_status offer_to_row(fw_tributary *field, uint32_t span, int32_t c, int32_t row,
                              fw_fault *fault)
{
    const fw_spans *spans = &field->now.spans;
    const uint64_t key = spans->span[span].key;
    const node from = *node_at(&field->now, span, c);
    if (row < 0 || row >= field->cells.rows)
        return FW_OK;
    uint32_t next = fw_spans_find(spans, row, key, c - 1);
    for (; next < spans->row_start[row + 1] && spans->span[next].key == key; next++) {
        const fw_span *s = &spans->span[next];
        if (s->c0 > c + 1)
            break;
        for (int32_t to = s->c0 > c - 1 ? s->c0 : c - 1; to <= c + 1 && to < s->c1; to++) {
            const int64_t step = to == c ? field->down : field->diagonal;
            FW_TRY(offer(field, next, to, (node){from.length + step, from.anchor}, fault));
        }
    }
    return FW_OK;
}

/* Offers a reached node to its eight neighbours in the region. */
static fw_status offer_round(fw_tributary *field, uint32_t span, int32_t c, fw_fault *fault)
{
    const fw_span s = field->now.spans.span[span];
    const node from = *node_at(&field->now, span, c);
    const node beside = {from.length + field->right, from.anchor};
    if (c > s.c0)
        FW_TRY(offer(field, span, c - 1, beside, fault));
    if (c + 1 < s.c1)
        FW_TRY(offer(field, span, c + 1, beside, fault));
    FW_TRY(offer_to_row(field, span, c, s.row - 1, fault));
    return offer_to_row(field, span, c, s.row + 1, fault);
}

static fw_status settle(fw_tributary *field, fw_fault *fault)
{
    while (field->heap_count > 0) {
        const entry e = heap_pop(field);
        const node at = *node_at(&field->now, e.span, e.c);
        if (!less(at, e.value)) /* else it was shortened once more */
            FW_TRY(offer_round(field, e.span, e.c, fault));
    }
    return FW_OK;
}

/* A fresh node takes from its reached neighbours in one row. */
static fw_status pull_from_row(fw_tributary *field, uint32_t span, int32_t c, int32_t row,
                               fw_fault *fault)
{
    const fw_spans *spans = &field->now.spans;
    const fw_span *at = &spans->span[span];
    if (row < 0 || row >= field->cells.rows)
        return FW_OK;
    uint32_t next = fw_spans_find(spans, row, at->key, c - 1);
    for (; next < spans->row_start[row + 1] && spans->span[next].key == at->key; next++) {
        const fw_span *s = &spans->span[next];
        if (s->c0 > c + 1)
            break;
        for (int32_t from = s->c0 > c - 1 ? s->c0 : c - 1; from <= c + 1 && from < s->c1; from++) {
            const node there = *node_at(&field->now, next, from);
            const int64_t step = row == at->row ? field->right
                                 : from == c    ? field->down
                                                : field->diagonal;
            if (there.anchor != FW_NO_ANCHOR && (row != at->row || from != c))
                FW_TRY(offer(field, span, c, (node){there.length + step, there.anchor}, fault));
        }
    }
    return FW_OK;
}

/* What is carried from one region stays as short as it was against its neighbours, so only fresh
 * nodes bring new ways. Where regions have grown together any pair of neighbours may be new: there
 * every reached node offers. */
static fw_status offer_span(fw_tributary *field, uint32_t span, fw_fault *fault)
{
    const fw_span s = field->now.spans.span[span];
    const bool joined = field->origin[s.key] == MIXED;
    for (int32_t c = s.c0; c < s.c1; c++) {
        const bool reached = node_at(&field->now, span, c)->anchor != FW_NO_ANCHOR;
        if (joined && reached)
            FW_TRY(offer_round(field, span, c, fault));
        for (int32_t row = s.row - 1; !joined && !reached && row <= s.row + 1; row++)
            FW_TRY(pull_from_row(field, span, c, row, fault));
    }
    return FW_OK;
}

static fw_status offer_fresh(fw_tributary *field, fw_fault *fault)
{
    for (uint32_t span = 0; span < field->now.spans.count; span++)
        FW_TRY(offer_span(field, span, fault));
    return FW_OK;
}

/* Which region of the layer before each region comes from: UNSEEN, one, or MIXED. */
static fw_status find_origins(fw_tributary *field, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&field->origin, &field->origin_capacity, field->now.regions,
                   sizeof *field->origin, holder, fault));
    for (uint32_t r = 0; r < field->now.regions; r++)
        field->origin[r] = UNSEEN;
    for (size_t i = 0; i < field->overlaps.count; i++) {
        const uint64_t key = field->overlaps.span[i].key;
        int64_t *origin = &field->origin[(uint32_t)key];
        const int64_t from = (int64_t)(key >> 32);
        *origin = *origin == UNSEEN || *origin == from ? from : MIXED;
    }
    return FW_OK;
}

/* From the centre of cell (c, row y's) to the nearest pixel centre of a run in row y, in nm; the
 * pixel that the centre lies in is 0 away. */
static int64_t to_run(const fw_tributary *field, int32_t c, fw_run run, int32_t y)
{
    const double kx = field->cells.kx, ky = field->cells.ky;
    const double x = (c + 0.5) * kx - 0.5, row = (floor(y / ky) + 0.5) * ky - 0.5;
    const double dx =
        fmax(fmax(run.x0 - x, x - (run.x1 - 1)) - 0.5, 0) * ((double)field->right / kx);
    const double dy = fmax(fabs(y - row) - 0.5, 0) * ((double)field->down / ky);
    return llround(hypot(dx, dy));
}

/* The contact's nodes start at the anchor's own way to the plate and what is missing to the
 * contact; those that gain by it join the heap. */
static fw_status place_anchor(fw_tributary *field, fw_anchor_contact anchor, fw_fault *fault)
{
    const fw_runs *contact = anchor.contact;
    const int64_t start = llround(anchor.start_mm * 1e6) - field->risen;
    for (int32_t y = 0; y < contact->height; y++) {
        for (uint32_t i = contact->row[y]; i < contact->row[y + 1]; i++) {
            const fw_run run = contact->run[i];
            const uint32_t found = fw_runs_find(field->solid, run.x0, y);
            if (found == UINT32_MAX)
                continue;
            const int32_t c0 = run.x0 / field->cells.kx, c1 = (run.x1 - 1) / field->cells.kx;
            const uint32_t span = fw_spans_find(&field->now.spans, y / field->cells.ky,
                                                field->regions->label[found], c0);
            for (int32_t c = c0; c <= c1 && c < field->now.spans.span[span].c1; c++)
                FW_TRY(offer(field, span, c,
                             (node){start + to_run(field, c, run, y), anchor.anchor}, fault));
        }
    }
    return FW_OK;
}

static fw_status size_layer(fw_tributary *field, const fw_runs *solid, const fw_regions *regions,
                            fw_fault *fault)
{
    node_layer *now = &field->now;
    FW_TRY(fw_spans_of_regions(&field->cells, solid, regions, &now->spans, fault));
    FW_TRY(fw_grow((void **)&now->node, &now->node_capacity, now->spans.nodes, sizeof *now->node,
                   holder, fault));
    FW_TRY(fw_grow((void **)&now->version, &now->version_capacity, regions->count,
                   sizeof *now->version, holder, fault));
    now->regions = regions->count;
    for (uint32_t i = 0; i < now->spans.nodes; i++)
        now->node[i] = nothing;
    for (uint32_t r = 0; r < regions->count; r++)
        now->version[r] = 0;
    for (size_t i = 0; i < now->spans.count; i++) {
        const fw_span *s = &now->spans.span[i];
        for (int32_t c = s->c0; c < s->c1; c++)
            now->version[s->key] += mix(field, s->row, c, FW_NO_ANCHOR);
    }
    return FW_OK;
}

static void carry(fw_tributary *field)
{
    for (size_t i = 0; i < field->overlaps.count; i++) {
        const fw_span *s = &field->overlaps.span[i];
        const uint32_t from = fw_spans_find(&field->before.spans, s->row, s->key >> 32, s->c0);
        const uint32_t to = fw_spans_find(&field->now.spans, s->row, (uint32_t)s->key, s->c0);
        for (int32_t c = s->c0; c < s->c1; c++) {
            const node value = *node_at(&field->before, from, c);
            if (less(value, *node_at(&field->now, to, c)))
                set_node(field, to, c, value);
        }
    }
}

static fw_status renew(fw_tributary *field, const fw_runs *solid, const fw_regions *regions,
                       const fw_runs *before, const fw_regions *before_regions, fw_fault *fault)
{
    const node_layer last = field->now;
    field->now = field->before;
    field->before = last;
    FW_TRY(size_layer(field, solid, regions, fault));
    if (before == NULL)
        return FW_OK;
    FW_TRY(fw_spans_of_overlaps(&field->cells, before, before_regions, solid, regions,
                                &field->overlaps, fault));
    FW_TRY(find_origins(field, fault));
    carry(field);
    return offer_fresh(field, fault);
}

static fw_status check_anchor(const fw_tributary *field, const fw_anchor_contact *anchor,
                              fw_fault *fault)
{
    if (anchor->anchor < 0)
        return fw_fault_set(fault, FW_INPUT, "anchor %d makes no sense, use numbers from 0",
                            (int)anchor->anchor);
    if (!(anchor->start_mm >= 0 && anchor->start_mm < 1e6))
        return fw_fault_set(fault, FW_INPUT, "anchor %d starts at %g mm, use a length from 0",
                            (int)anchor->anchor, anchor->start_mm);
    if (anchor->contact->width != field->width || anchor->contact->height != field->height)
        return fw_fault_set(fault, FW_INPUT,
                            "the contact of anchor %d has %d x %d pixels, use the layer's %d x %d",
                            (int)anchor->anchor, (int)anchor->contact->width,
                            (int)anchor->contact->height, (int)field->width, (int)field->height);
    return FW_OK;
}

static fw_status check_layer(const fw_tributary *field, const fw_runs *layer, fw_fault *fault)
{
    if (layer->width == field->width && layer->height == field->height)
        return FW_OK;
    return fw_fault_set(
        fault, FW_INPUT, "a layer of %d x %d pixels follows layers of %d x %d, use one size",
        (int)layer->width, (int)layer->height, (int)field->width, (int)field->height);
}

static fw_status check_step(const fw_tributary *field, const fw_runs *solid, const fw_runs *before,
                            const fw_regions *before_regions, double thickness_mm, fw_fault *fault)
{
    FW_TRY(check_layer(field, solid, fault));
    if (!(thickness_mm > 0 && thickness_mm <= 1000))
        return fw_fault_set(fault, FW_INPUT,
                            "a layer of %g mm makes no sense, use more than 0 and up to 1000",
                            thickness_mm);
    if (before == NULL)
        return FW_OK;
    FW_TRY(check_layer(field, before, fault));
    if (field->solid == NULL || before_regions->count != field->now.regions)
        return fw_fault_set(fault, FW_INPUT,
                            "the layer before is not the one that was shared last, go in order");
    return FW_OK;
}

/* Most regions have one owner: found in one walk over the cells, and only where something changed.
 */
static fw_status find_sole(fw_tributary *field, fw_fault *fault)
{
    const node_layer *now = &field->now;
    if (!field->changed)
        return FW_OK;
    FW_TRY(fw_grow((void **)&field->sole, &field->sole_capacity, now->regions, sizeof *field->sole,
                   holder, fault));
    for (uint32_t r = 0; r < now->regions; r++)
        field->sole[r] = UNSEEN;
    for (size_t s = 0; s < now->spans.count; s++) {
        const fw_span *span = &now->spans.span[s];
        int32_t *sole = &field->sole[span->key];
        for (int32_t c = span->c0; c < span->c1 && *sole != MIXED; c++) {
            const int32_t owner = now->node[span->first + (uint32_t)(c - span->c0)].anchor;
            *sole = *sole == UNSEEN || *sole == owner ? owner : MIXED;
        }
    }
    field->changed = false;
    return FW_OK;
}

int32_t fw_tributary_sole(const fw_tributary *field, uint32_t region)
{
    return field->sole[region];
}

fw_status fw_tributary_step(fw_tributary *field, const fw_runs *solid, const fw_regions *regions,
                            const fw_runs *before, const fw_regions *before_regions,
                            double thickness_mm, const fw_anchor_contact *anchors,
                            size_t anchor_count, fw_fault *fault)
{
    FW_TRY(check_step(field, solid, before, before_regions, thickness_mm, fault));
    for (size_t i = 0; i < anchor_count; i++)
        FW_TRY(check_anchor(field, &anchors[i], fault));
    field->heap_count = 0;
    field->risen += nanometres(thickness_mm);
    field->solid = solid;
    field->regions = regions;
    /* Equal runs have equal labels, so a layer that repeats keeps its nodes. */
    const bool repeats = before != NULL && fw_runs_equal(solid, before);
    field->changed = field->changed || !repeats;
    if (!repeats)
        FW_TRY(renew(field, solid, regions, before, before_regions, fault));
    for (size_t i = 0; i < anchor_count; i++)
        FW_TRY(place_anchor(field, anchors[i], fault));
    FW_TRY(settle(field, fault));
    return find_sole(field, fault);
}

fw_status fw_tributary_add_anchor(fw_tributary *field, fw_anchor_contact anchor, fw_fault *fault)
{
    FW_TRY(check_anchor(field, &anchor, fault));
    if (field->solid == NULL)
        return FW_OK;
    field->heap_count = 0;
    FW_TRY(place_anchor(field, anchor, fault));
    FW_TRY(settle(field, fault));
    return find_sole(field, fault);
}

static bool holds_cell(const fw_spans *spans, uint32_t span, int32_t row, uint32_t region,
                       int32_t c)
{
    if (span >= spans->count)
        return false;
    const fw_span *at = &spans->span[span];
    return at->row == row && at->key == region && at->c0 <= c && c < at->c1;
}

static node look_up(const fw_tributary *field, uint32_t region, int32_t x, int32_t y,
                    uint32_t *hint)
{
    if (field->solid == NULL || x < 0 || x >= field->width || y < 0 || y >= field->height)
        return nothing;
    const fw_spans *spans = &field->now.spans;
    const int32_t c = x / field->cells.kx, row = y / field->cells.ky;
    if (!holds_cell(spans, *hint, row, region, c))
        *hint = fw_spans_find(spans, row, region, c);
    if (!holds_cell(spans, *hint, row, region, c))
        return nothing;
    const fw_span *span = &spans->span[*hint];
    return field->now.node[span->first + (uint32_t)(c - span->c0)];
}

int32_t fw_tributary_owner_near(const fw_tributary *field, uint32_t region, int32_t x, int32_t y,
                                uint32_t *hint)
{
    return look_up(field, region, x, y, hint).anchor;
}

int32_t fw_tributary_owner(const fw_tributary *field, uint32_t region, int32_t x, int32_t y)
{
    uint32_t hint = UINT32_MAX;
    return look_up(field, region, x, y, &hint).anchor;
}

double fw_tributary_length(const fw_tributary *field, uint32_t region, int32_t x, int32_t y)
{
    uint32_t hint = UINT32_MAX;
    const node at = look_up(field, region, x, y, &hint);
    return at.anchor == FW_NO_ANCHOR ? INFINITY : (double)(at.length + field->risen) * 1e-6;
}

uint64_t fw_tributary_version(const fw_tributary *field, uint32_t region)
{
    return region < field->now.regions ? field->now.version[region] : 0;
}

void fw_tributary_cell(const fw_tributary *field, int32_t *kx, int32_t *ky)
{
    *kx = field->cells.kx;
    *ky = field->cells.ky;
}
