/* Filling: every layer is drawn into sub-cells of the sub-levels (a quarter cell high) that it
 * touches; a sub-level is closed when a layer beyond it comes. Closing finds the in-plane distance
 * of each cell to it in two passes (along x by scanning, along y as the least of gx^2 + gy^2 over
 * the sub-rows in range: exact for the separable gap between boxes) and folds it into the slabs
 * within the clearance above and below. A sub-level that repeats the one before (a prismatic part)
 * reuses its distances. */
#include "posts/lattice.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "routing lattice";
static const double first_cell_mm = 0.25;
static const double most_side_mm = 10000.0;
static const double slack = 1e-9; /* sub-cells: keeps pixel edges on sub-cell edges exact */
enum { SUB = 4, MOST_CELLS = 64 << 20, MOST_PLANE = 2 << 20, MOST_GAP = 180, FULL = 254 };

struct fw_lattice {
    fw_lattice_shape shape;
    fw_lattice_grid grid;
    fw_budget *budget;
    size_t charged;
    double unit_mm; /* of a stored room */
    int32_t gap;    /* largest distance looked at, in sub-cells */
    uint8_t *room;  /* [nz][ny][nx] */
    uint64_t *reach;
    fw_posts posts;
    /* while filling */
    int32_t level;      /* sub-level being drawn, -1 before the first layer */
    int32_t next_layer; /* layers below this were added */
    bool drawn, known;  /* occupied holds something; distance belongs to before[] */
    uint8_t *occupied;  /* [SUB ny][SUB nx] of the sub-level being drawn */
    uint8_t *before;    /* of the last sub-level that was closed */
    uint16_t *across;   /* [SUB ny][nx] squared gap along x */
    uint16_t *square;   /* [nx] */
    uint8_t *distance;  /* [ny][nx] */
    uint8_t *root;      /* [gap^2 + 1] distance in units of a squared gap */
};

static fw_status take(fw_lattice *l, void **out, size_t count, size_t size, fw_fault *fault)
{
    size_t bytes = count * size;
    if (l->budget != NULL && !fw_budget_fits(l->budget, bytes))
        return fw_fault_set(fault, FW_MACHINE,
                            "%s, needs %zu bytes more than its budget of %zu, use a coarser stack "
                            "or a smaller plate",
                            holder, bytes, l->budget->limit);
    FW_TRY(fw_allocate(out, count, size, holder, fault));
    if (l->budget != NULL)
        fw_budget_charge(l->budget, bytes);
    l->charged += bytes;
    return FW_OK;
}

static void give(fw_lattice *l, void **array, size_t bytes)
{
    if (*array == NULL)
        return;
    free(*array);
    *array = NULL;
    if (l->budget != NULL)
        fw_budget_release(l->budget, bytes);
    l->charged -= bytes;
}

static bool length_ok(double mm)
{
    return isfinite(mm) && mm > 0.0 && mm <= most_side_mm;
}

static fw_status check_shape(const fw_lattice_shape *s, fw_fault *fault)
{
    bool counts = s->width_px > 0 && s->height_px > 0 && s->layers > 0;
    bool lengths = length_ok(s->px_mm) && length_ok(s->py_mm) && length_ok(s->layer_mm) &&
                   length_ok(s->need_mm);
    bool clear = isfinite(s->clearance_mm) && s->clearance_mm >= 0.0 &&
                 isfinite(s->clearance_above_mm) && s->clearance_above_mm >= s->clearance_mm &&
                 s->clearance_above_mm <= most_side_mm && s->clearance_mm <= s->need_mm;
    if (!counts || !lengths || !clear || !length_ok(s->width_px * s->px_mm) ||
        !length_ok(s->height_px * s->py_mm) || !length_ok(s->layers * s->layer_mm))
        return fw_fault_set(fault, FW_INPUT,
                            "%s, %d x %d px, %d layers of %g x %g x %g mm with clearance %g, %g "
                            "and need %g mm is no possible stack, check job and stack",
                            holder, s->width_px, s->height_px, s->layers, s->px_mm, s->py_mm,
                            s->layer_mm, s->clearance_mm, s->clearance_above_mm, s->need_mm);
    return FW_OK;
}

/* The finest cell of 0.25, 0.5, 1, ... mm within all limits. */
static fw_lattice_grid choose_grid(const fw_lattice_shape *s)
{
    fw_lattice_grid g = {.width_mm = s->width_px * s->px_mm, .height_mm = s->height_px * s->py_mm};
    double depth = s->layers * s->layer_mm;
    for (double cell = first_cell_mm;; cell *= 2.0) {
        double nx = fmax(1.0, ceil(g.width_mm / cell - slack));
        double ny = fmax(1.0, ceil(g.height_mm / cell - slack));
        double nz = fmax(1.0, ceil(depth / cell - slack));
        if (nx * ny > MOST_PLANE || nx * ny * nz > MOST_CELLS || SUB * s->need_mm / cell > MOST_GAP)
            continue;
        g.nx = (int32_t)nx, g.ny = (int32_t)ny, g.nz = (int32_t)nz;
        g.cell_mm = cell;
        return g;
    }
}

static size_t plane_cells(const fw_lattice *l)
{
    return (size_t)l->grid.nx * (size_t)l->grid.ny;
}

static fw_status take_arrays(fw_lattice *l, fw_fault *fault)
{
    size_t plane = plane_cells(l), sub = plane * SUB * SUB;
    FW_TRY(take(l, (void **)&l->room, plane * (size_t)l->grid.nz, 1, fault));
    memset(l->room, FULL, plane * (size_t)l->grid.nz);
    FW_TRY(take(l, (void **)&l->occupied, sub, 1, fault));
    FW_TRY(take(l, (void **)&l->before, sub, 1, fault));
    FW_TRY(take(l, (void **)&l->across, plane * SUB, sizeof *l->across, fault));
    FW_TRY(take(l, (void **)&l->square, (size_t)l->grid.nx, sizeof *l->square, fault));
    FW_TRY(take(l, (void **)&l->distance, plane, 1, fault));
    size_t roots = (size_t)(l->gap * l->gap) + 1;
    FW_TRY(take(l, (void **)&l->root, roots, 1, fault));
    double sub_mm = l->grid.cell_mm / SUB;
    for (size_t q = 0; q < roots; q++)
        l->root[q] = (uint8_t)fmin(FULL, floor(sqrt((double)q) * sub_mm / l->unit_mm + slack));
    return FW_OK;
}

fw_status fw_lattice_new(const fw_lattice_shape *shape, fw_budget *budget, fw_lattice **out,
                         fw_fault *fault)
{
    *out = NULL;
    FW_TRY(check_shape(shape, fault));
    fw_lattice *l = NULL;
    FW_TRY(fw_allocate((void **)&l, 1, sizeof *l, holder, fault));
    l->shape = *shape;
    l->budget = budget;
    l->grid = choose_grid(shape);
    l->unit_mm = shape->need_mm / FULL;
    l->gap = (int32_t)ceil(SUB * shape->need_mm / l->grid.cell_mm) + 1;
    l->level = -1;
    fw_status status = take_arrays(l, fault);
    if (status != FW_OK) {
        fw_lattice_free(l);
        return status;
    }
    *out = l;
    return FW_OK;
}

static void free_scratch(fw_lattice *l)
{
    size_t plane = plane_cells(l), sub = plane * SUB * SUB;
    give(l, (void **)&l->occupied, sub);
    give(l, (void **)&l->before, sub);
    give(l, (void **)&l->across, plane * SUB * sizeof *l->across);
    give(l, (void **)&l->square, (size_t)l->grid.nx * sizeof *l->square);
    give(l, (void **)&l->distance, plane);
    give(l, (void **)&l->root, (size_t)(l->gap * l->gap) + 1);
}

void fw_lattice_free(fw_lattice *l)
{
    if (l == NULL)
        return;
    free_scratch(l);
    free(l->room);
    free(l->reach);
    free(l->posts.item);
    if (l->budget != NULL)
        fw_budget_release(l->budget, l->charged);
    free(l);
}

/* Squared gap (sub-cells) along x from each cell of a sub-row to its nearest occupied sub-cell. */
static void scan_row(const fw_lattice *l, const uint8_t *occupied, uint16_t *across)
{
    int32_t cap = l->gap, gap = cap;
    for (int32_t i = 0; i < l->grid.nx; i++) {
        const uint8_t *cell = occupied + SUB * i;
        bool in = (cell[0] | cell[1] | cell[2] | cell[3]) != 0;
        across[i] = (uint16_t)(in ? 0 : gap);
        for (int32_t s = 0; s < SUB; s++)
            gap = cell[s] ? 0 : gap < cap ? gap + 1 : cap;
    }
    gap = cap;
    for (int32_t i = l->grid.nx - 1; i >= 0; i--) {
        const uint8_t *cell = occupied + SUB * i;
        int32_t least = gap < across[i] ? gap : across[i];
        across[i] = (uint16_t)(least * least);
        for (int32_t s = SUB - 1; s >= 0; s--)
            gap = cell[s] ? 0 : gap < cap ? gap + 1 : cap;
    }
}

static void lower_row(uint16_t *restrict square, const uint16_t *restrict across, int32_t n,
                      uint16_t add)
{
    for (int32_t i = 0; i < n; i++) {
        uint16_t sum = (uint16_t)(across[i] + add);
        square[i] = sum < square[i] ? sum : square[i];
    }
}

/* Distances of one row of cells: the least over the sub-rows in range. */
static void measure_row(fw_lattice *l, int32_t j)
{
    int32_t nx = l->grid.nx, cap = l->gap;
    for (int32_t i = 0; i < nx; i++)
        l->square[i] = (uint16_t)(cap * cap);
    int32_t first = SUB * j - cap + 1, last = SUB * j + SUB - 2 + cap;
    for (int32_t s = first < 0 ? 0 : first; s <= last && s < SUB * l->grid.ny; s++) {
        int32_t gap = s < SUB * j ? SUB * j - s - 1 : s >= SUB * j + SUB ? s - SUB * j - SUB : 0;
        lower_row(l->square, l->across + (size_t)s * (size_t)nx, nx, (uint16_t)(gap * gap));
    }
    uint8_t *distance = l->distance + (size_t)j * (size_t)nx;
    for (int32_t i = 0; i < nx; i++)
        distance[i] = l->root[l->square[i]];
}

static void measure_level(fw_lattice *l)
{
    size_t plane = plane_cells(l), sub = plane * SUB * SUB, row = (size_t)l->grid.nx * SUB;
    if (l->known && memcmp(l->occupied, l->before, sub) == 0)
        return;
    for (int32_t s = 0; s < SUB * l->grid.ny; s++)
        scan_row(l, l->occupied + (size_t)s * row, l->across + (size_t)s * (size_t)l->grid.nx);
    for (int32_t j = 0; j < l->grid.ny; j++)
        measure_row(l, j);
    memcpy(l->before, l->occupied, sub);
    l->known = true;
}

static void fold_slab(uint8_t *restrict room, const uint8_t *restrict distance, size_t cells,
                      int32_t add)
{
    for (size_t c = 0; c < cells; c++) {
        int32_t sum = distance[c] + add;
        room[c] = (uint8_t)(sum < room[c] ? sum : room[c]);
    }
}

/* What the sub-level being closed, above (positive) or below (negative) slab k, adds to a distance
 * when it is folded into that slab; -1 where it is out of the clearance. */
static int32_t height_bonus(const fw_lattice *l, int32_t k)
{
    int32_t above = l->level - SUB * (k + 1),
            below = SUB * k - l->level - 1; /* sub-levels between */
    if (above < 0 && below < 0)
        return 0;
    double height = above >= 0 ? l->shape.clearance_above_mm : l->shape.clearance_mm;
    double dz = (above >= 0 ? above : below) * l->grid.cell_mm / SUB;
    if (dz >= height)
        return -1;
    double share = dz / height;
    double bonus = l->shape.clearance_mm * (1.0 - sqrt(1.0 - share * share));
    return (int32_t)fmin(FULL, floor(bonus / l->unit_mm));
}

static void fold_level(fw_lattice *l)
{
    int32_t reach = (int32_t)ceil(l->shape.clearance_above_mm / l->grid.cell_mm) + 1;
    int32_t slab = l->level / SUB;
    for (int32_t k = slab < reach ? 0 : slab - reach; k < l->grid.nz && k <= slab + reach; k++) {
        int32_t add = height_bonus(l, k);
        if (add >= 0)
            fold_slab(l->room + (size_t)k * plane_cells(l), l->distance, plane_cells(l), add);
    }
}

static void close_level(fw_lattice *l)
{
    if (!l->drawn)
        return;
    measure_level(l);
    fold_level(l);
    memset(l->occupied, 0, plane_cells(l) * SUB * SUB);
    l->drawn = false;
}

/* [*first, *end) sub-cells that [a, b) items of `size` mm touch, of `count`. */
static void sub_range(const fw_lattice *l, int32_t a, int32_t b, double size, int32_t count,
                      int32_t *first, int32_t *end)
{
    double sub_mm = l->grid.cell_mm / SUB;
    double low = floor(a * size / sub_mm + slack), high = ceil(b * size / sub_mm - slack);
    *first = (int32_t)fmin(fmax(low, 0.0), count - 1);
    *end = (int32_t)fmin(fmax(high, *first + 1.0), count);
}

static void draw_layer(fw_lattice *l, const fw_runs *part)
{
    int32_t across = SUB * l->grid.nx, down = SUB * l->grid.ny;
    for (int32_t y = 0; y < part->height; y++) {
        int32_t s0, s1;
        sub_range(l, y, y + 1, l->shape.py_mm, down, &s0, &s1);
        for (uint32_t r = part->row[y]; r < part->row[y + 1]; r++) {
            int32_t c0, c1;
            sub_range(l, part->run[r].x0, part->run[r].x1, l->shape.px_mm, across, &c0, &c1);
            for (int32_t s = s0; s < s1; s++)
                memset(l->occupied + (size_t)s * (size_t)across + c0, 1, (size_t)(c1 - c0));
        }
    }
    l->drawn = true;
}

fw_status fw_lattice_add_layer(fw_lattice *l, int32_t layer, const fw_runs *part, fw_fault *fault)
{
    if (l->occupied == NULL || layer < l->next_layer || layer >= l->shape.layers ||
        part->width != l->shape.width_px || part->height != l->shape.height_px)
        return fw_fault_set(fault, FW_INPUT,
                            "%s, layer %d (%d x %d px) is not the next of %d layers of %d x %d px, "
                            "check the stack",
                            holder, layer, part->width, part->height, l->shape.layers,
                            l->shape.width_px, l->shape.height_px);
    l->next_layer = layer + 1;
    if (part->count == 0)
        return FW_OK;
    int32_t first, end;
    sub_range(l, layer, layer + 1, l->shape.layer_mm, SUB * l->grid.nz, &first, &end);
    for (int32_t level = first; level < end; level++) {
        if (level != l->level)
            close_level(l);
        l->level = level;
        draw_layer(l, part);
    }
    return FW_OK;
}

fw_status fw_lattice_finish(fw_lattice *l, fw_fault *fault)
{
    if (l->occupied == NULL)
        return fw_fault_set(fault, FW_INPUT, "%s, finished twice, finish it once", holder);
    close_level(l);
    free_scratch(l);
    return FW_OK;
}

/* First kept post whose id is not below `id`. */
static size_t post_place(const fw_lattice *l, int32_t id)
{
    size_t p = 0;
    while (p < l->posts.count && l->posts.item[p].id < id)
        p++;
    return p;
}

static fw_status grow_posts(fw_lattice *l, fw_fault *fault)
{
    size_t before = l->posts.capacity;
    FW_TRY(fw_grow((void **)&l->posts.item, &l->posts.capacity, l->posts.count + 1, sizeof(fw_post),
                   holder, fault));
    size_t bytes = (l->posts.capacity - before) * sizeof(fw_post);
    if (l->budget != NULL)
        fw_budget_charge(l->budget, bytes);
    l->charged += bytes;
    return FW_OK;
}

fw_status fw_lattice_add_post(fw_lattice *l, const fw_post *post, fw_fault *fault)
{
    size_t p = post_place(l, post->id);
    if (p == l->posts.count || l->posts.item[p].id != post->id) {
        FW_TRY(grow_posts(l, fault));
        fw_post *item = l->posts.item;
        memmove(item + p + 1, item + p, (l->posts.count - p) * sizeof *item);
        l->posts.count++;
    }
    l->posts.item[p] = *post;
    return FW_OK;
}

void fw_lattice_drop_post(fw_lattice *l, int32_t id)
{
    size_t p = post_place(l, id);
    if (p == l->posts.count || l->posts.item[p].id != id)
        return;
    fw_post *item = l->posts.item;
    memmove(item + p, item + p + 1, (l->posts.count - p - 1) * sizeof *item);
    l->posts.count--;
}

fw_lattice_grid fw_lattice_grid_of(const fw_lattice *l)
{
    return l->grid;
}

const fw_lattice_shape *fw_lattice_shape_of(const fw_lattice *l)
{
    return &l->shape;
}

double fw_lattice_room(const fw_lattice *l, int32_t i, int32_t j, int32_t k)
{
    if (i < 0 || j < 0 || k < 0 || i >= l->grid.nx || j >= l->grid.ny)
        return 0.0;
    if (k >= l->grid.nz)
        return l->shape.need_mm;
    return l->unit_mm * fw_lattice_slab(l, k)[(size_t)j * (size_t)l->grid.nx + (size_t)i];
}

const uint8_t *fw_lattice_slab(const fw_lattice *l, int32_t k)
{
    return l->room + (size_t)k * plane_cells(l);
}

int32_t fw_lattice_level(const fw_lattice *l, double need_mm)
{
    if (!(need_mm > 0.0))
        return 0;
    double level = ceil(need_mm / l->unit_mm - slack);
    return level > FULL ? FULL + 1 : (int32_t)level;
}

fw_status fw_lattice_reach_new(fw_lattice *l, uint64_t **bits, fw_fault *fault)
{
    size_t words = (size_t)(l->grid.nz + 1) * (size_t)l->grid.ny * (size_t)fw_lattice_words(l);
    if (l->reach == NULL)
        FW_TRY(take(l, (void **)&l->reach, words, sizeof *l->reach, fault));
    memset(l->reach, 0, words * sizeof *l->reach);
    *bits = l->reach;
    return FW_OK;
}

const uint64_t *fw_lattice_reach(const fw_lattice *l)
{
    return l->reach;
}

int32_t fw_lattice_words(const fw_lattice *l)
{
    return (l->grid.nx + 63) / 64;
}

const fw_posts *fw_lattice_posts(const fw_lattice *l)
{
    return &l->posts;
}
