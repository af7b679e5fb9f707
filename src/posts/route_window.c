#include "posts/route_window.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "routing";
enum { MOST_RISE = 64, BEST_RISE = 8, MOST_STEP = 8 };

/* ---- what a post asks of a slab ---- */

fw_route_ask fw_route_ask_of(const fw_route_query *q, int32_t k)
{
    double low = k * q->grid.cell_mm, high = low + q->grid.cell_mm;
    double radius = 0.5 * q->post->shaft_mm, clearance = q->shape->clearance_mm;
    double share = q->post->neck_mm > 0.0 ? (q->face_mm - low) / q->post->neck_mm : 1.0;
    share = fmin(1.0, fmax(share, 0.0));
    double foot = 0.5 * q->post->foot_mm - low; /* flares at 45 degrees */
    fw_route_ask a = {.border_mm = radius * share, .gap_mm = q->post_gap_mm * share};
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

static void cross(fw_route_move *m, int32_t i, int32_t j, int32_t k)
{
    for (int32_t c = 0; c < m->count; c++)
        if (m->cell[c].i == i && m->cell[c].j == j && m->cell[c].k == k)
            return;
    if (m->count < FW_ROUTE_CROSSED)
        m->cell[m->count++] = (fw_route_crossed){i, j, k};
}

void fw_route_cell_range(double a, double b, int32_t *first, int32_t *last)
{
    *first = (int32_t)floor(fmin(a, b) + FW_ROUTE_TINY);
    *last = (int32_t)ceil(fmax(a, b) - FW_ROUTE_TINY) - 1;
    if (*last < *first)
        *last = *first;
}

int32_t fw_route_pieces(double dx, double dy)
{
    return (int32_t)fmax(1.0, ceil(fmax(fabs(dx), fabs(dy)) - FW_ROUTE_TINY));
}

static void cross_all(fw_route_move *m)
{
    double dx = (double)m->dx / m->rise, dy = (double)m->dy / m->rise;
    int32_t parts = fw_route_pieces(dx, dy);
    for (int32_t p = 0; p < m->rise * parts; p++) {
        double from = (double)p / parts, to = (double)(p + 1) / parts;
        int32_t i0, i1, j0, j1;
        fw_route_cell_range(0.5 + dx * from, 0.5 + dx * to, &i0, &i1);
        fw_route_cell_range(0.5 + dy * from, 0.5 + dy * to, &j0, &j1);
        for (int32_t j = j0; j <= j1; j++)
            for (int32_t i = i0; i <= i1; i++)
                cross(m, i, j, p / parts);
    }
}

static void add_move(fw_route_moves *all, int32_t dx, int32_t dy, int32_t rise)
{
    if (rise > MOST_RISE || all->count == FW_ROUTE_MOVES)
        return;
    fw_route_move *m = &all->item[all->count++];
    *m = (fw_route_move){.dx = dx, .dy = dy, .rise = rise};
    cross_all(m);
    if (rise > all->tallest)
        all->tallest = rise;
}

/* For one direction the shortest move, and the multiple of it that comes nearest to the full lean
 * if that gains anything. */
static void add_direction(fw_route_moves *all, int32_t dx, int32_t dy, double tan_lean)
{
    double length = hypot(dx, dy), best_ratio = 0.0;
    int32_t best = 0, best_rise = 0, first_rise = 0;
    for (int32_t n = 1; n * length <= MOST_STEP; n++) {
        double rise = fmax(1.0, ceil(n * length / tan_lean - FW_ROUTE_TINY));
        if (n == 1 && rise > MOST_RISE)
            return;
        if (n > 1 && rise > BEST_RISE)
            break;
        double ratio = n * length / rise;
        if (n == 1)
            first_rise = (int32_t)rise;
        if (ratio > best_ratio * (1.0 + FW_ROUTE_TINY)) {
            best = n, best_rise = (int32_t)rise;
            best_ratio = ratio;
        }
    }
    add_move(all, dx, dy, first_rise);
    if (best > 1)
        add_move(all, best * dx, best * dy, best_rise);
}

void fw_route_moves_make(fw_route_moves *all, double tan_lean)
{
    static const int32_t direction[16][2] = {{1, 0},  {-1, 0},  {0, 1},  {0, -1}, {1, 1},  {-1, 1},
                                             {1, -1}, {-1, -1}, {2, 1},  {-2, 1}, {2, -1}, {-2, -1},
                                             {1, 2},  {-1, 2},  {1, -2}, {-1, -2}};
    all->count = all->tallest = 0;
    add_move(all, 0, 0, 1);
    for (size_t d = 0; tan_lean > FW_ROUTE_TINY && d < sizeof direction / sizeof *direction; d++)
        add_direction(all, direction[d][0], direction[d][1], tan_lean);
}

/* ---- a window of the lattice as bits ---- */

uint64_t *fw_route_bit_row(const fw_route_window *w, uint64_t *plane, int32_t k, int32_t j)
{
    return plane + ((size_t)(k - w->low) * (size_t)w->nj + (size_t)j) * w->stride + 1;
}

fw_status fw_route_window_open(fw_route_window *w, fw_fault *fault)
{
    w->stride = (size_t)(w->ni + 63) / 64 + 2;
    size_t plane = (size_t)w->nj * w->stride, slabs = (size_t)(w->top - w->low);
    FW_TRY(fw_allocate((void **)&w->pass, plane * (2 * slabs + 1), sizeof *w->pass, holder, fault));
    w->reach = w->pass + plane * slabs;
    return FW_OK;
}

void fw_route_window_close(fw_route_window *w)
{
    free(w->pass);
    w->pass = w->reach = NULL;
}

bool fw_route_bit_at(const uint64_t *row, int32_t i)
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
static void pass_row(const fw_route_window *w, const fw_route_query *q, const fw_route_ask *a,
                     const uint8_t *room, int32_t j, uint64_t *row)
{
    double cell = q->grid.cell_mm, y = (w->j0 + j + 0.5) * cell;
    if (y < a->border_mm || y > q->grid.height_mm - a->border_mm)
        return;
    double first = ceil(a->border_mm / cell - 0.5 - FW_ROUTE_TINY);
    double last = floor((q->grid.width_mm - a->border_mm) / cell - 0.5 + FW_ROUTE_TINY);
    int32_t i0 = (int32_t)fmax(first - w->i0, 0.0), i1 = (int32_t)fmin(last - w->i0, w->ni - 1);
    for (int32_t i = i0; i <= i1; i++)
        if (room[i] >= a->level)
            row[i / 64] |= (uint64_t)1 << (i % 64);
}

void fw_route_pass_slabs(fw_route_window *w, const fw_route_query *q)
{
    size_t nx = (size_t)q->grid.nx;
    for (int32_t k = w->low; k < w->top; k++) {
        fw_route_ask a = fw_route_ask_of(q, k);
        const uint8_t *slab = fw_lattice_slab(q->lattice, k);
        for (int32_t j = 0; j < w->nj; j++)
            pass_row(w, q, &a, slab + (size_t)(w->j0 + j) * nx + (size_t)w->i0, j,
                     fw_route_bit_row(w, w->pass, k, j));
    }
}

/* Nodes of row j at a slab boundary that one move reaches from below. */
static void climb_row(fw_route_window *w, const fw_route_move *m, int32_t level, int32_t j,
                      uint64_t *out)
{
    int32_t below = level - m->rise, from = j - m->dy;
    if (below < w->low || from < 0 || from >= w->nj)
        return;
    const uint64_t *source = fw_route_bit_row(w, w->reach, below, from);
    for (ptrdiff_t word = 0; word < (ptrdiff_t)w->stride - 2; word++) {
        uint64_t bits = bits_from(source, word, -m->dx) & ~out[word];
        for (int32_t c = 0; bits != 0 && c < m->count; c++) {
            const fw_route_crossed *x = &m->cell[c];
            int32_t row = from + x->j;
            bits = row < 0 || row >= w->nj
                       ? 0
                       : bits & bits_from(fw_route_bit_row(w, w->pass, below + x->k, row), word,
                                          x->i - m->dx);
        }
        out[word] |= bits;
    }
}

void fw_route_climb(fw_route_window *w, const fw_route_moves *all, int32_t known)
{
    for (int32_t level = known + 1; level <= w->top; level++)
        for (int32_t m = 0; m < all->count; m++)
            for (int32_t j = 0; j < w->nj; j++)
                climb_row(w, &all->item[m], level, j, fw_route_bit_row(w, w->reach, level, j));
}

void fw_route_reach_plate(fw_route_window *w)
{
    for (int32_t j = 0; j < w->nj; j++) {
        uint64_t *row = fw_route_bit_row(w, w->reach, w->low, j);
        for (int32_t i = 0; i < w->ni; i++)
            row[i / 64] |= (uint64_t)1 << (i % 64);
    }
}

fw_route_window fw_route_window_round(const fw_route_query *q, const fw_point *tip, int32_t half,
                                      int32_t low, int32_t top)
{
    int32_t i = (int32_t)floor(tip->x / q->grid.cell_mm),
            j = (int32_t)floor(tip->y / q->grid.cell_mm);
    fw_route_window w = {.low = low, .top = top};
    w.i0 = i > half ? i - half : 0;
    w.j0 = j > half ? j - half : 0;
    w.ni = (i + half < q->grid.nx ? i + half + 1 : q->grid.nx) - w.i0;
    w.nj = (j + half < q->grid.ny ? j + half + 1 : q->grid.ny) - w.j0;
    return w;
}
