#include "posts/route_lines.h"

#include "posts/profile.h"

#include <math.h>
#include <string.h>

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

static void block_stay(fw_route_window *w, const fw_route_query *q, int32_t k, const stay *s,
                       double radius)
{
    double cell = q->grid.cell_mm;
    int32_t j0 = (int32_t)floor((s->y0 - radius) / cell) - w->j0;
    int32_t j1 = (int32_t)floor((s->y1 + radius) / cell) - w->j0;
    int32_t i0 = (int32_t)floor((s->x0 - radius) / cell) - w->i0;
    int32_t i1 = (int32_t)floor((s->x1 + radius) / cell) - w->i0;
    for (int32_t j = j0 < 0 ? 0 : j0; j <= j1 && j < w->nj; j++) {
        uint64_t *row = fw_route_bit_row(w, w->pass, k, j);
        double y = (w->j0 + j) * cell, gap_y = fmax(0.0, fmax(s->y0 - y - cell, y - s->y1));
        for (int32_t i = i0 < 0 ? 0 : i0; i <= i1 && i < w->ni; i++) {
            double x = (w->i0 + i) * cell, gap_x = fmax(0.0, fmax(s->x0 - x - cell, x - s->x1));
            if (gap_x * gap_x + gap_y * gap_y < radius * radius)
                row[i / 64] &= ~((uint64_t)1 << (i % 64));
        }
    }
}

void fw_route_block_posts(fw_route_window *w, const fw_route_query *q)
{
    const fw_posts *posts = fw_lattice_posts(q->lattice);
    double cell = q->grid.cell_mm;
    for (size_t p = 0; !q->through_posts && p < posts->count; p++) {
        const fw_post *other = &posts->item[p];
        for (int32_t k = w->low; other->id != q->post->id && k < w->top; k++) {
            stay s;
            if (!stay_of(other, k * cell, (k + 1) * cell, &s))
                break;
            fw_route_ask a = fw_route_ask_of(q, k);
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
static bool piece_clear(const fw_post *other, int32_t piece, const fw_route_ask *a,
                        const fw_point *p, const fw_point *q)
{
    const fw_point *u = &other->path[piece], *v = &other->path[piece + 1];
    double high = fmin(p->z, u->z), low = fmax(q->z, v->z);
    if (high < low)
        return true;
    fw_point ph = point_between(p, q, high), pl = point_between(p, q, low);
    fw_point uh = point_between(u, v, high), ul = point_between(u, v, low);
    double least = least_length(ph.x - uh.x, ph.y - uh.y, pl.x - ul.x, pl.y - ul.y);
    return least >= body_radius(other, low) + a->body_mm + a->gap_mm - FW_ROUTE_TINY;
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
static bool post_clear(const fw_route_query *q, const fw_post *other, const fw_point *p,
                       const fw_point *r)
{
    double cell = q->grid.cell_mm;
    double far = 0.5 * (other->shaft_mm + q->post->shaft_mm) + q->post_gap_mm;
    if (other->id == q->post->id || !near_box(other, p, r, far))
        return true;
    for (int32_t k = (int32_t)floor(r->z / cell + FW_ROUTE_TINY); k * cell < p->z - FW_ROUTE_TINY;
         k++) {
        fw_point high = point_between(p, r, fmin(p->z, (k + 1) * cell));
        fw_point low = point_between(p, r, fmax(r->z, k * cell));
        fw_route_ask a = fw_route_ask_of(q, k);
        for (int32_t n = 0; n + 1 < other->point_count; n++)
            if (!piece_clear(other, n, &a, &high, &low))
                return false;
    }
    return true;
}

static bool posts_clear(const fw_route_query *q, const fw_point *p, const fw_point *r)
{
    const fw_posts *posts = fw_lattice_posts(q->lattice);
    for (size_t n = 0; !q->through_posts && n < posts->count; n++)
        if (!post_clear(q, &posts->item[n], p, r))
            return false;
    return true;
}

/* ---- lines ---- */

static bool inside_border(const fw_route_query *q, const fw_route_ask *a, const fw_point *p)
{
    return p->x >= a->border_mm - FW_ROUTE_TINY &&
           p->x <= q->grid.width_mm - a->border_mm + FW_ROUTE_TINY &&
           p->y >= a->border_mm - FW_ROUTE_TINY &&
           p->y <= q->grid.height_mm - a->border_mm + FW_ROUTE_TINY;
}

static bool box_passes(const fw_route_query *q, const fw_route_ask *a, const uint8_t *slab,
                       const fw_point *p, const fw_point *r)
{
    double cell = q->grid.cell_mm;
    int32_t i0, i1, j0, j1;
    fw_route_cell_range(p->x / cell, r->x / cell, &i0, &i1);
    fw_route_cell_range(p->y / cell, r->y / cell, &j0, &j1);
    if (i0 < 0 || j0 < 0 || i1 >= q->grid.nx || j1 >= q->grid.ny)
        return false;
    for (int32_t j = j0; j <= j1; j++)
        for (int32_t i = i0; i <= i1; i++)
            if (slab[(size_t)j * (size_t)q->grid.nx + (size_t)i] < a->level)
                return false;
    return true;
}

/* True when the line p, r within slab k (p above) has room. */
static bool slab_passes(const fw_route_query *q, int32_t k, const fw_point *p, const fw_point *r)
{
    fw_route_ask a = fw_route_ask_of(q, k);
    if (!inside_border(q, &a, p) || !inside_border(q, &a, r))
        return false;
    const uint8_t *slab = fw_lattice_slab(q->lattice, k);
    double cell = q->grid.cell_mm;
    int32_t parts = fw_route_pieces((r->x - p->x) / cell, (r->y - p->y) / cell);
    for (int32_t n = 0; n < parts; n++) {
        fw_point high = point_between(p, r, p->z + (r->z - p->z) * n / parts);
        fw_point low = point_between(p, r, p->z + (r->z - p->z) * (n + 1) / parts);
        if (!box_passes(q, &a, slab, &high, &low))
            return false;
    }
    return true;
}

bool fw_route_line_passes(const fw_route_query *q, const fw_point *p, const fw_point *r)
{
    if (hypot(p->x - r->x, p->y - r->y) > (p->z - r->z) * q->tan_lean + FW_ROUTE_TINY)
        return false;
    double cell = q->grid.cell_mm;
    for (int32_t k = (int32_t)floor(r->z / cell + FW_ROUTE_TINY); k * cell < p->z - FW_ROUTE_TINY;
         k++) {
        fw_point high = point_between(p, r, fmin(p->z, (k + 1) * cell));
        fw_point low = point_between(p, r, fmax(r->z, k * cell));
        if (k >= q->grid.nz || !slab_passes(q, k, &high, &low))
            return false;
    }
    return posts_clear(q, p, r);
}
