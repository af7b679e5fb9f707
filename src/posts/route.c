/* Contents: what a post asks of a slab; moves; a window of the lattice as bits and the climb of
 * reachability in it; distance to other posts; checking, tracing and straightening; public calls.
 *
 * Reachability is the carried distance of free space (sources = plate, credit = cell tan(lean) a
 * slab) written as moves between cell centres: a node (column, slab boundary) is reached when a
 * move leads to it from a reached node and crosses passable cells only. 64 columns are done at a
 * time. Unlike a carried number, a node that is reached always has a path that can be drawn.
 */
#include "posts/route.h"

#include "posts/profile.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "routing";
static const double tiny = 1e-9; /* cells or mm: keeps places on a cell's edge in one cell */
enum { MOST_MOVES = 40, MOST_CROSSED = 192, MOST_RISE = 64, BEST_RISE = 8, MOST_STEP = 8 };

/* ---- what a post asks of a slab ---- */

typedef struct query {
    const fw_lattice *lattice;
    fw_lattice_grid grid;
    const fw_lattice_shape *shape;
    const fw_post *post; /* diameters, neck, id */
    double face_mm;      /* INFINITY: shaft everywhere but in the foot */
    double tan_lean;
    double post_gap_mm; /* asked between posts */
    bool through_posts; /* other posts are not regarded */
} query;

typedef struct ask {
    int32_t level;    /* least stored room of a cell */
    double border_mm; /* least distance from the axis to the border of the image */
    double body_mm;   /* radius that other posts must not overlap: feet may */
    double gap_mm;    /* beyond that */
} ask;

static ask ask_of(const query *q, int32_t k)
{
    double low = k * q->grid.cell_mm, high = low + q->grid.cell_mm;
    double radius = 0.5 * q->post->shaft_mm, clearance = q->shape->clearance_mm;
    double share = q->post->neck_mm > 0.0 ? (q->face_mm - low) / q->post->neck_mm : 1.0;
    share = fmin(1.0, fmax(share, 0.0));
    double foot = 0.5 * q->post->foot_mm - low; /* flares at 45 degrees */
    ask a = {.border_mm = radius * share, .gap_mm = q->post_gap_mm * share};
    double need = (radius + clearance) * share;
    if (foot > radius) {
        a.border_mm = fmax(a.border_mm, foot);
        need = fmax(need, foot + clearance);
    }
    if (q->face_mm - high < q->shape->clearance_above_mm)
        need = 0.0;
    a.level = fw_lattice_level(q->lattice, need);
    double tip = 0.5 * q->post->tip_mm;
    a.body_mm = fmin(radius, tip + (radius - tip) * share);
    return a;
}

/* ---- moves ---- */

typedef struct crossed {
    int32_t i, j, k; /* cells, from the lower node's column and the slab on it */
} crossed;

typedef struct move {
    int32_t dx, dy, rise; /* cells, cells, slabs; from the lower node to the upper */
    int32_t count;
    crossed cell[MOST_CROSSED];
} move;

typedef struct moves {
    int32_t count, tallest;
    move item[MOST_MOVES]; /* [0] is straight up */
} moves;

static void cross(move *m, int32_t i, int32_t j, int32_t k)
{
    for (int32_t c = 0; c < m->count; c++)
        if (m->cell[c].i == i && m->cell[c].j == j && m->cell[c].k == k)
            return;
    if (m->count < MOST_CROSSED)
        m->cell[m->count++] = (crossed){i, j, k};
}

/* First and last cell that [a, b] (either order, in cells) lies in. */
static void cell_range(double a, double b, int32_t *first, int32_t *last)
{
    *first = (int32_t)floor(fmin(a, b) + tiny);
    *last = (int32_t)ceil(fmax(a, b) - tiny) - 1;
    if (*last < *first)
        *last = *first;
}

/* Pieces of a line within a slab, short enough that the box of each is at most 2 x 2 cells. */
static int32_t pieces(double dx, double dy)
{
    return (int32_t)fmax(1.0, ceil(fmax(fabs(dx), fabs(dy)) - tiny));
}

static void cross_all(move *m)
{
    double dx = (double)m->dx / m->rise, dy = (double)m->dy / m->rise;
    int32_t parts = pieces(dx, dy);
    for (int32_t p = 0; p < m->rise * parts; p++) {
        double from = (double)p / parts, to = (double)(p + 1) / parts;
        int32_t i0, i1, j0, j1;
        cell_range(0.5 + dx * from, 0.5 + dx * to, &i0, &i1);
        cell_range(0.5 + dy * from, 0.5 + dy * to, &j0, &j1);
        for (int32_t j = j0; j <= j1; j++)
            for (int32_t i = i0; i <= i1; i++)
                cross(m, i, j, p / parts);
    }
}

static void add_move(moves *all, int32_t dx, int32_t dy, int32_t rise)
{
    if (rise > MOST_RISE || all->count == MOST_MOVES)
        return;
    move *m = &all->item[all->count++];
    *m = (move){.dx = dx, .dy = dy, .rise = rise};
    cross_all(m);
    if (rise > all->tallest)
        all->tallest = rise;
}

/* For one direction the shortest move, and the multiple of it that comes nearest to the full lean
 * if that gains anything. */
static void add_direction(moves *all, int32_t dx, int32_t dy, double tan_lean)
{
    double length = hypot(dx, dy), best_ratio = 0.0;
    int32_t best = 0, best_rise = 0, first_rise = 0;
    for (int32_t n = 1; n * length <= MOST_STEP; n++) {
        double rise = fmax(1.0, ceil(n * length / tan_lean - tiny));
        if (n == 1 && rise > MOST_RISE)
            return;
        if (n > 1 && rise > BEST_RISE)
            break;
        double ratio = n * length / rise;
        if (n == 1)
            first_rise = (int32_t)rise;
        if (ratio > best_ratio * (1.0 + tiny)) {
            best = n, best_rise = (int32_t)rise;
            best_ratio = ratio;
        }
    }
    add_move(all, dx, dy, first_rise);
    if (best > 1)
        add_move(all, best * dx, best * dy, best_rise);
}

static void make_moves(moves *all, double tan_lean)
{
    static const int32_t direction[16][2] = {{1, 0},  {-1, 0},  {0, 1},  {0, -1}, {1, 1},  {-1, 1},
                                             {1, -1}, {-1, -1}, {2, 1},  {-2, 1}, {2, -1}, {-2, -1},
                                             {1, 2},  {-1, 2},  {1, -2}, {-1, -2}};
    all->count = all->tallest = 0;
    add_move(all, 0, 0, 1);
    for (size_t d = 0; tan_lean > tiny && d < sizeof direction / sizeof *direction; d++)
        add_direction(all, direction[d][0], direction[d][1], tan_lean);
}

/* ---- a window of the lattice as bits ---- */

typedef struct window {
    int32_t i0, j0, ni, nj; /* cells */
    int32_t low, top;       /* slab boundaries; slabs are [low, top) */
    size_t stride;          /* words a row, one of padding at either end */
    uint64_t *pass;         /* [top - low][nj][stride] cells with enough room */
    uint64_t *reach;        /* [top - low + 1][nj][stride] nodes from which the plate is reached */
} window;

static uint64_t *bit_row(const window *w, uint64_t *plane, int32_t k, int32_t j)
{
    return plane + ((size_t)(k - w->low) * (size_t)w->nj + (size_t)j) * w->stride + 1;
}

static fw_status open_window(window *w, fw_fault *fault)
{
    w->stride = (size_t)(w->ni + 63) / 64 + 2;
    size_t plane = (size_t)w->nj * w->stride, slabs = (size_t)(w->top - w->low);
    FW_TRY(fw_allocate((void **)&w->pass, plane * (2 * slabs + 1), sizeof *w->pass, holder, fault));
    w->reach = w->pass + plane * slabs;
    return FW_OK;
}

static void close_window(window *w)
{
    free(w->pass);
    w->pass = w->reach = NULL;
}

static bool bit_at(const uint64_t *row, int32_t i)
{
    return row[i / 64] >> (i % 64) & 1;
}

/* 64 bits from bit 64 word + shift on, |shift| < 64. */
static uint64_t bits_from(const uint64_t *row, ptrdiff_t word, int32_t shift)
{
    if (shift == 0)
        return row[word];
    if (shift > 0)
        return row[word] >> shift | row[word + 1] << (64 - shift);
    return row[word] << -shift | row[word - 1] >> (64 + shift);
}

/* Cells of one row whose room is at least the level and whose centre keeps from the border. */
static void pass_row(const window *w, const query *q, const ask *a, const uint8_t *room, int32_t j,
                     uint64_t *row)
{
    double cell = q->grid.cell_mm, y = (w->j0 + j + 0.5) * cell;
    if (y < a->border_mm || y > q->grid.height_mm - a->border_mm)
        return;
    double first = ceil(a->border_mm / cell - 0.5 - tiny);
    double last = floor((q->grid.width_mm - a->border_mm) / cell - 0.5 + tiny);
    int32_t i0 = (int32_t)fmax(first - w->i0, 0.0), i1 = (int32_t)fmin(last - w->i0, w->ni - 1);
    for (int32_t i = i0; i <= i1; i++)
        if (room[i] >= a->level)
            row[i / 64] |= (uint64_t)1 << (i % 64);
}

static void pass_slabs(window *w, const query *q)
{
    size_t nx = (size_t)q->grid.nx;
    for (int32_t k = w->low; k < w->top; k++) {
        ask a = ask_of(q, k);
        const uint8_t *slab = fw_lattice_slab(q->lattice, k);
        for (int32_t j = 0; j < w->nj; j++)
            pass_row(w, q, &a, slab + (size_t)(w->j0 + j) * nx + (size_t)w->i0, j,
                     bit_row(w, w->pass, k, j));
    }
}

/* Nodes of row j at a slab boundary that one move reaches from below. */
static void climb_row(window *w, const move *m, int32_t level, int32_t j, uint64_t *out)
{
    int32_t below = level - m->rise, from = j - m->dy;
    if (below < w->low || from < 0 || from >= w->nj)
        return;
    const uint64_t *source = bit_row(w, w->reach, below, from);
    for (ptrdiff_t word = 0; word < (ptrdiff_t)w->stride - 2; word++) {
        uint64_t bits = bits_from(source, word, -m->dx) & ~out[word];
        for (int32_t c = 0; bits != 0 && c < m->count; c++) {
            const crossed *x = &m->cell[c];
            int32_t row = from + x->j;
            bits =
                row < 0 || row >= w->nj
                    ? 0
                    : bits & bits_from(bit_row(w, w->pass, below + x->k, row), word, x->i - m->dx);
        }
        out[word] |= bits;
    }
}

/* Fills reach for the slab boundaries above `known`, up to the window's top. */
static void climb(window *w, const moves *all, int32_t known)
{
    for (int32_t level = known + 1; level <= w->top; level++)
        for (int32_t m = 0; m < all->count; m++)
            for (int32_t j = 0; j < w->nj; j++)
                climb_row(w, &all->item[m], level, j, bit_row(w, w->reach, level, j));
}

static void reach_plate(window *w)
{
    for (int32_t j = 0; j < w->nj; j++) {
        uint64_t *row = bit_row(w, w->reach, w->low, j);
        for (int32_t i = 0; i < w->ni; i++)
            row[i / 64] |= (uint64_t)1 << (i % 64);
    }
}

/* A window of `half` cells to each side of the tip's column, cut to the lattice. */
static window window_round(const query *q, const fw_point *tip, int32_t half, int32_t low,
                           int32_t top)
{
    int32_t i = (int32_t)floor(tip->x / q->grid.cell_mm),
            j = (int32_t)floor(tip->y / q->grid.cell_mm);
    window w = {.low = low, .top = top};
    w.i0 = i > half ? i - half : 0;
    w.j0 = j > half ? j - half : 0;
    w.ni = (i + half < q->grid.nx ? i + half + 1 : q->grid.nx) - w.i0;
    w.nj = (j + half < q->grid.ny ? j + half + 1 : q->grid.ny) - w.j0;
    return w;
}

/* ---- other posts ---- */

/* Where a post's axis is within a slab: a box of its centres, and its largest radius there. False
 * where the post is not. */
typedef struct stay {
    double x0, x1, y0, y1, radius_mm;
} stay;

static double body_radius(const fw_post *post, double z)
{
    return 0.5 * fmin(post->shaft_mm, fw_post_diameter(post, z, post->path[0].z));
}

static bool stay_of(const fw_post *post, double low, double high, stay *s)
{
    high = fmin(high, post->path[0].z);
    if (high < low)
        return false;
    double xa, ya, xb, yb;
    if (!fw_post_centre(post, low, &xa, &ya) || !fw_post_centre(post, high, &xb, &yb))
        return false;
    *s = (stay){fmin(xa, xb), fmax(xa, xb), fmin(ya, yb), fmax(ya, yb), body_radius(post, low)};
    for (int32_t p = 1; p < post->point_count; p++) {
        const fw_point *v = &post->path[p];
        if (v->z <= low || v->z >= high)
            continue;
        s->x0 = fmin(s->x0, v->x), s->x1 = fmax(s->x1, v->x);
        s->y0 = fmin(s->y0, v->y), s->y1 = fmax(s->y1, v->y);
    }
    return true;
}

static void block_stay(window *w, const query *q, int32_t k, const stay *s, double radius)
{
    double cell = q->grid.cell_mm;
    int32_t j0 = (int32_t)floor((s->y0 - radius) / cell) - w->j0;
    int32_t j1 = (int32_t)floor((s->y1 + radius) / cell) - w->j0;
    int32_t i0 = (int32_t)floor((s->x0 - radius) / cell) - w->i0;
    int32_t i1 = (int32_t)floor((s->x1 + radius) / cell) - w->i0;
    for (int32_t j = j0 < 0 ? 0 : j0; j <= j1 && j < w->nj; j++) {
        uint64_t *row = bit_row(w, w->pass, k, j);
        double y = (w->j0 + j) * cell, gap_y = fmax(0.0, fmax(s->y0 - y - cell, y - s->y1));
        for (int32_t i = i0 < 0 ? 0 : i0; i <= i1 && i < w->ni; i++) {
            double x = (w->i0 + i) * cell, gap_x = fmax(0.0, fmax(s->x0 - x - cell, x - s->x1));
            if (gap_x * gap_x + gap_y * gap_y < radius * radius)
                row[i / 64] &= ~((uint64_t)1 << (i % 64));
        }
    }
}

/* Takes the cells out of a window that other posts need. */
static void block_posts(window *w, const query *q)
{
    const fw_posts *posts = fw_lattice_posts(q->lattice);
    double cell = q->grid.cell_mm;
    for (size_t p = 0; !q->through_posts && p < posts->count; p++) {
        const fw_post *other = &posts->item[p];
        for (int32_t k = w->low; other->id != q->post->id && k < w->top; k++) {
            stay s;
            if (!stay_of(other, k * cell, (k + 1) * cell, &s))
                break;
            ask a = ask_of(q, k);
            block_stay(w, q, k, &s, s.radius_mm + a.body_mm + a.gap_mm);
        }
    }
}

/* Least length of a + s (b - a), 0 <= s <= 1. */
static double least_length(double ax, double ay, double bx, double by)
{
    double dx = bx - ax, dy = by - ay, square = dx * dx + dy * dy;
    double s = square > 0.0 ? fmin(1.0, fmax(0.0, -(ax * dx + ay * dy) / square)) : 0.0;
    return hypot(ax + s * dx, ay + s * dy);
}

static fw_point point_between(const fw_point *p, const fw_point *q, double z)
{
    double s = p->z > q->z ? (p->z - z) / (p->z - q->z) : 0.0;
    return (fw_point){p->x + s * (q->x - p->x), p->y + s * (q->y - p->y), z};
}

/* True when the line p, q (p above, within one slab) keeps from one straight piece of a post. */
static bool piece_clear(const fw_post *other, int32_t piece, const ask *a, const fw_point *p,
                        const fw_point *q)
{
    const fw_point *u = &other->path[piece], *v = &other->path[piece + 1];
    double high = fmin(p->z, u->z), low = fmax(q->z, v->z);
    if (high < low)
        return true;
    fw_point ph = point_between(p, q, high), pl = point_between(p, q, low);
    fw_point uh = point_between(u, v, high), ul = point_between(u, v, low);
    double least = least_length(ph.x - uh.x, ph.y - uh.y, pl.x - ul.x, pl.y - ul.y);
    return least >= body_radius(other, low) + a->body_mm + a->gap_mm - tiny;
}

static bool near_box(const fw_post *post, const fw_point *p, const fw_point *q, double far)
{
    double x0 = fmin(p->x, q->x) - far, x1 = fmax(p->x, q->x) + far;
    double y0 = fmin(p->y, q->y) - far, y1 = fmax(p->y, q->y) + far;
    bool left = true, right = true, up = true, down = true;
    for (int32_t n = 0; n < post->point_count; n++) {
        left = left && post->path[n].x < x0;
        right = right && post->path[n].x > x1;
        up = up && post->path[n].y < y0;
        down = down && post->path[n].y > y1;
    }
    return !(left || right || up || down);
}

/* True when the line p, q keeps from one post. */
static bool post_clear(const query *q, const fw_post *other, const fw_point *p, const fw_point *r)
{
    double cell = q->grid.cell_mm;
    double far = 0.5 * (other->shaft_mm + q->post->shaft_mm) + q->post_gap_mm;
    if (other->id == q->post->id || !near_box(other, p, r, far))
        return true;
    for (int32_t k = (int32_t)floor(r->z / cell + tiny); k * cell < p->z - tiny; k++) {
        fw_point high = point_between(p, r, fmin(p->z, (k + 1) * cell));
        fw_point low = point_between(p, r, fmax(r->z, k * cell));
        ask a = ask_of(q, k);
        for (int32_t n = 0; n + 1 < other->point_count; n++)
            if (!piece_clear(other, n, &a, &high, &low))
                return false;
    }
    return true;
}

static bool posts_clear(const query *q, const fw_point *p, const fw_point *r)
{
    const fw_posts *posts = fw_lattice_posts(q->lattice);
    for (size_t n = 0; !q->through_posts && n < posts->count; n++)
        if (!post_clear(q, &posts->item[n], p, r))
            return false;
    return true;
}

/* ---- lines ---- */

static bool inside_border(const query *q, const ask *a, const fw_point *p)
{
    return p->x >= a->border_mm - tiny && p->x <= q->grid.width_mm - a->border_mm + tiny &&
           p->y >= a->border_mm - tiny && p->y <= q->grid.height_mm - a->border_mm + tiny;
}

static bool box_passes(const query *q, const ask *a, const uint8_t *slab, const fw_point *p,
                       const fw_point *r)
{
    double cell = q->grid.cell_mm;
    int32_t i0, i1, j0, j1;
    cell_range(p->x / cell, r->x / cell, &i0, &i1);
    cell_range(p->y / cell, r->y / cell, &j0, &j1);
    if (i0 < 0 || j0 < 0 || i1 >= q->grid.nx || j1 >= q->grid.ny)
        return false;
    for (int32_t j = j0; j <= j1; j++)
        for (int32_t i = i0; i <= i1; i++)
            if (slab[(size_t)j * (size_t)q->grid.nx + (size_t)i] < a->level)
                return false;
    return true;
}

/* True when the line p, r within slab k (p above) has room. */
static bool slab_passes(const query *q, int32_t k, const fw_point *p, const fw_point *r)
{
    ask a = ask_of(q, k);
    if (!inside_border(q, &a, p) || !inside_border(q, &a, r))
        return false;
    const uint8_t *slab = fw_lattice_slab(q->lattice, k);
    double cell = q->grid.cell_mm;
    int32_t parts = pieces((r->x - p->x) / cell, (r->y - p->y) / cell);
    for (int32_t n = 0; n < parts; n++) {
        fw_point high = point_between(p, r, p->z + (r->z - p->z) * n / parts);
        fw_point low = point_between(p, r, p->z + (r->z - p->z) * (n + 1) / parts);
        if (!box_passes(q, &a, slab, &high, &low))
            return false;
    }
    return true;
}

/* True when a post may run straight from p down to r: lean, room, border, other posts. */
static bool line_passes(const query *q, const fw_point *p, const fw_point *r)
{
    if (hypot(p->x - r->x, p->y - r->y) > (p->z - r->z) * q->tan_lean + tiny)
        return false;
    double cell = q->grid.cell_mm;
    for (int32_t k = (int32_t)floor(r->z / cell + tiny); k * cell < p->z - tiny; k++) {
        fw_point high = point_between(p, r, fmin(p->z, (k + 1) * cell));
        fw_point low = point_between(p, r, fmax(r->z, k * cell));
        if (k >= q->grid.nz || !slab_passes(q, k, &high, &low))
            return false;
    }
    return posts_clear(q, p, r);
}

/* ---- from the tip to a node, down the nodes, and straight again ---- */

typedef struct node {
    int32_t i, j, level; /* window column, slab boundary */
} node;

static fw_point node_point(const window *w, const query *q, node n)
{
    double cell = q->grid.cell_mm;
    return (fw_point){(w->i0 + n.i + 0.5) * cell, (w->j0 + n.j + 0.5) * cell, n.level * cell};
}

static void consider(const window *w, const query *q, const fw_point *tip, node n, double *lean,
                     node *best)
{
    if (n.i < 0 || n.j < 0 || n.i >= w->ni || n.j >= w->nj ||
        !bit_at(bit_row(w, w->reach, n.level, n.j), n.i))
        return;
    fw_point p = node_point(w, q, n);
    double own = hypot(p.x - tip->x, p.y - tip->y) / (tip->z - p.z);
    if (own < *lean && line_passes(q, tip, &p)) {
        *lean = own;
        *best = n;
    }
}

/* The reached node with the least lean from the tip, among those a little (until the cone of leans
 * is three cells wide) on the plate side of it. */
static bool first_node(const window *w, const query *q, const fw_point *tip, node *best)
{
    double cell = q->grid.cell_mm, lean = INFINITY;
    int32_t depth = (int32_t)fmin(MOST_RISE, ceil(1.5 / q->tan_lean) + 1.0);
    int32_t lowest = w->top - depth > w->low ? w->top - depth : w->low;
    int32_t i = (int32_t)floor(tip->x / cell) - w->i0, j = (int32_t)floor(tip->y / cell) - w->j0;
    for (int32_t level = lowest; level <= w->top; level++) {
        double height = tip->z - level * cell;
        if (height <= tiny)
            continue;
        int32_t half = (int32_t)fmin(MOST_STEP, ceil(height * q->tan_lean / cell));
        for (int32_t b = -half; b <= half; b++)
            for (int32_t a = -half; a <= half; a++)
                consider(w, q, tip, (node){i + a, j + b, level}, &lean, best);
    }
    return lean < INFINITY;
}

static bool move_open(const window *w, const move *m, node upper)
{
    int32_t below = upper.level - m->rise, i = upper.i - m->dx, j = upper.j - m->dy;
    if (below < w->low || i < 0 || j < 0 || i >= w->ni || j >= w->nj ||
        !bit_at(bit_row(w, w->reach, below, j), i))
        return false;
    for (int32_t c = 0; c < m->count; c++) {
        int32_t x = i + m->cell[c].i, y = j + m->cell[c].j;
        if (x < 0 || y < 0 || x >= w->ni || y >= w->nj ||
            !bit_at(bit_row(w, w->pass, below + m->cell[c].k, y), x))
            return false;
    }
    return true;
}

/* Points from the tip down to the plate along open moves: straight down where that still leads to
 * the plate, else the move taken last, else the first that does. Returns their number. */
static int32_t trace(const window *w, const query *q, const moves *all, node n, fw_point *point)
{
    int32_t count = 1, last = 0;
    point[count++] = node_point(w, q, n);
    while (n.level > w->low) {
        int32_t m = move_open(w, &all->item[0], n) ? 0 : last;
        for (int32_t next = 0; !move_open(w, &all->item[m], n); next++)
            m = next;
        last = m != 0 ? m : last;
        n = (node){n.i - all->item[m].dx, n.j - all->item[m].dy, n.level - all->item[m].rise};
        point[count++] = node_point(w, q, n);
    }
    return count;
}

/* Keeps the longest lines that pass. False when more than FW_POST_POINTS points are left. */
static bool straighten(const query *q, const fw_point *point, int32_t count, fw_post *post)
{
    int32_t kept = 1, from = 0;
    post->path[0] = point[0];
    while (from < count - 1) {
        int32_t to = count - 1;
        while (to > from + 1 && !line_passes(q, &point[from], &point[to]))
            to--;
        if (kept == FW_POST_POINTS)
            return false;
        post->path[kept++] = point[to];
        from = to;
    }
    post->point_count = kept;
    return true;
}

static fw_status bend_in(window *w, const query *q, const moves *all, fw_post *post, bool *found,
                         fw_fault *fault)
{
    pass_slabs(w, q);
    block_posts(w, q);
    reach_plate(w);
    climb(w, all, w->low);
    node start = {0};
    fw_point tip = post->path[0];
    *found = first_node(w, q, &tip, &start);
    if (!*found)
        return FW_OK;
    fw_point *point = NULL;
    FW_TRY(fw_allocate((void **)&point, (size_t)w->top + 3, sizeof *point, holder, fault));
    point[0] = tip;
    int32_t count = trace(w, q, all, start, point);
    *found = straighten(q, point, count, post);
    free(point);
    return FW_OK;
}

/* A bent path, in growing windows up to the whole cone of leans. */
static fw_status bend(const query *q, const moves *all, fw_post *post, bool *found, fw_fault *fault)
{
    int32_t top = (int32_t)floor(q->face_mm / q->grid.cell_mm + tiny);
    double cone = ceil(top * q->tan_lean) + 2.0;
    *found = false;
    for (double half = 12.0; !*found; half *= 4.0) {
        window w =
            window_round(q, &post->path[0], (int32_t)fmin(fmin(half, cone), 1 << 20), 0, top);
        fw_status status = open_window(&w, fault);
        if (status == FW_OK)
            status = bend_in(&w, q, all, post, found, fault);
        close_window(&w);
        FW_TRY(status);
        if (half >= cone)
            break;
    }
    return FW_OK;
}

static bool straight(const query *q, fw_post *post)
{
    fw_point foot = {post->path[0].x, post->path[0].y, 0.0};
    if (!line_passes(q, &post->path[0], &foot))
        return false;
    post->path[1] = foot;
    post->point_count = 2;
    return true;
}

/* ---- public ---- */

static query query_of(const fw_lattice *lattice, const fw_route_rules *rules, const fw_post *post,
                      double face_mm)
{
    double lean = fmin(80.0, fmax(0.0, rules->lean_deg)) * acos(-1.0) / 180.0;
    return (query){.lattice = lattice,
                   .grid = fw_lattice_grid_of(lattice),
                   .shape = fw_lattice_shape_of(lattice),
                   .post = post,
                   .face_mm = face_mm,
                   .tan_lean = tan(lean),
                   .post_gap_mm = rules->post_gap_mm};
}

static fw_post smallest_post(const fw_route_rules *rules)
{
    return (fw_post){.id = -1,
                     .tip_mm = 0.0,
                     .neck_mm = rules->neck_mm,
                     .shaft_mm = rules->shaft_mm,
                     .foot_mm = rules->foot_mm};
}

/* True when the tip lies over the image and within the stack. */
static bool tip_inside(const query *q, const fw_point *tip)
{
    return tip->x >= 0.0 && tip->y >= 0.0 && tip->x < q->grid.width_mm &&
           tip->y < q->grid.height_mm && tip->z > tiny &&
           tip->z <= q->grid.nz * q->grid.cell_mm + tiny;
}

fw_status fw_route_prepare(fw_lattice *lattice, const fw_route_rules *rules, fw_fault *fault)
{
    fw_post post = smallest_post(rules);
    query q = query_of(lattice, rules, &post, INFINITY);
    moves all;
    make_moves(&all, q.tan_lean);
    uint64_t *bits;
    FW_TRY(fw_lattice_reach_new(lattice, &bits, fault));
    window w = {.ni = q.grid.nx, .nj = q.grid.ny, .top = q.grid.nz};
    FW_TRY(open_window(&w, fault));
    pass_slabs(&w, &q);
    reach_plate(&w);
    climb(&w, &all, 0);
    size_t words = (size_t)fw_lattice_words(lattice);
    for (int32_t level = 0; level <= w.top; level++)
        for (int32_t j = 0; j < w.nj; j++, bits += words)
            memcpy(bits, bit_row(&w, w.reach, level, j), words * sizeof *bits);
    close_window(&w);
    return FW_OK;
}

/* Copies what is known of one slab boundary into a window. */
static void load_reach(window *w, const query *q, int32_t level)
{
    int32_t words = fw_lattice_words(q->lattice);
    const uint64_t *bits = fw_lattice_reach(q->lattice);
    for (int32_t j = 0; j < w->nj; j++) {
        size_t at = ((size_t)level * (size_t)q->grid.ny + (size_t)(w->j0 + j)) * (size_t)words;
        uint64_t *row = bit_row(w, w->reach, level, j);
        for (int32_t i = 0; i < w->ni; i++)
            if (bit_at(bits + at, w->i0 + i))
                row[i / 64] |= (uint64_t)1 << (i % 64);
    }
}

/* Climbs through the neck alone, from what is known where the shaft begins. */
static bool neck_possible(const query *q, const fw_point *tip)
{
    moves all;
    make_moves(&all, q->tan_lean);
    double cell = q->grid.cell_mm;
    int32_t top = (int32_t)floor(tip->z / cell + tiny);
    int32_t known = (int32_t)fmax(0.0, floor((tip->z - q->post->neck_mm) / cell));
    int32_t low = known > all.tallest ? known - all.tallest : 0;
    int32_t half = (int32_t)fmin(1 << 20, ceil((top - low) * q->tan_lean) + 2.0);
    window w = window_round(q, tip, half, low, top);
    if (open_window(&w, NULL) != FW_OK)
        return false;
    pass_slabs(&w, q);
    for (int32_t level = low; level <= known; level++)
        load_reach(&w, q, level);
    climb(&w, &all, known);
    node best = {0};
    bool found = first_node(&w, q, tip, &best);
    close_window(&w);
    return found;
}

bool fw_route_possible(const fw_lattice *lattice, const fw_route_rules *rules, double x_mm,
                       double y_mm, double z_face_mm)
{
    fw_post post = smallest_post(rules);
    query q = query_of(lattice, rules, &post, z_face_mm);
    q.through_posts = true;
    fw_point tip = {x_mm, y_mm, z_face_mm}, foot = {x_mm, y_mm, 0.0};
    if (!tip_inside(&q, &tip) || fw_lattice_reach(lattice) == NULL)
        return false;
    return line_passes(&q, &tip, &foot) || neck_possible(&q, &tip);
}

static double to_micrometre(double mm)
{
    return round(mm * 1000.0) / 1000.0;
}

fw_status fw_route_post(const fw_lattice *lattice, const fw_route_rules *rules, fw_post *post,
                        fw_fault *fault)
{
    post->routed = false;
    post->point_count = 1;
    post->path[0].x = to_micrometre(post->path[0].x);
    post->path[0].y = to_micrometre(post->path[0].y);
    query q = query_of(lattice, rules, post, post->path[0].z);
    if (!tip_inside(&q, &post->path[0]))
        return FW_OK;
    moves all;
    make_moves(&all, q.tan_lean);
    for (int32_t attempt = 0; attempt < 3 && !post->routed; attempt++) {
        q.post_gap_mm = attempt == 0 ? rules->post_gap_mm : 0.0;
        q.through_posts = attempt == 2;
        post->routed = straight(&q, post);
        if (!post->routed)
            FW_TRY(bend(&q, &all, post, &post->routed, fault));
    }
    for (int32_t n = 1; post->routed && n < post->point_count; n++) {
        post->path[n].x = to_micrometre(post->path[n].x);
        post->path[n].y = to_micrometre(post->path[n].y);
        post->path[n].z = to_micrometre(post->path[n].z);
    }
    if (!post->routed)
        post->point_count = 1;
    return FW_OK;
}
