/* Contents: tracing a path down the reached nodes and straightening it; public calls. What a post
 * asks of the lattice and where it can climb: route_window.c; straight lines and other posts:
 * route_lines.c.
 */
#include "posts/route.h"

#include "posts/profile.h"
#include "posts/route_lines.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "routing";
enum { MOST_RISE = 64 };
enum { MOST_STEP = 8 };

/* ---- from the tip to a node, down the nodes, and straight again ---- */

typedef struct node {
    int32_t i, j, level; /* fw_route_window column, slab boundary */
} node;

static fw_point node_point(const fw_route_window *w, const fw_route_query *q, node n)
{
    double cell = q->grid.cell_mm;
    return (fw_point){(w->i0 + n.i + 0.5) * cell, (w->j0 + n.j + 0.5) * cell, n.level * cell};
}

static void consider(const fw_route_window *w, const fw_route_query *q, const fw_point *tip, node n,
                     double *lean, node *best)
{
    if (n.i < 0 || n.j < 0 || n.i >= w->ni || n.j >= w->nj ||
        !fw_route_bit_at(fw_route_bit_row(w, w->reach, n.level, n.j), n.i))
        return;
    fw_point p = node_point(w, q, n);
    double own = hypot(p.x - tip->x, p.y - tip->y) / (tip->z - p.z);
    if (own < *lean && fw_route_line_passes(q, tip, &p)) {
        *lean = own;
        *best = n;
    }
}

/* The reached node with the least lean from the tip, among those a little (until the cone of leans
 * is three cells wide) on the plate side of it. */
static bool first_node(const fw_route_window *w, const fw_route_query *q, const fw_point *tip,
                       node *best)
{
    double cell = q->grid.cell_mm, lean = INFINITY;
    int32_t depth = (int32_t)fmin(MOST_RISE, ceil(1.5 / q->tan_lean) + 1.0);
    int32_t lowest = w->top - depth > w->low ? w->top - depth : w->low;
    int32_t i = (int32_t)floor(tip->x / cell) - w->i0, j = (int32_t)floor(tip->y / cell) - w->j0;
    for (int32_t level = lowest; level <= w->top; level++) {
        double height = tip->z - level * cell;
        if (height <= FW_ROUTE_TINY)
            continue;
        int32_t half = (int32_t)fmin(MOST_STEP, ceil(height * q->tan_lean / cell));
        for (int32_t b = -half; b <= half; b++)
            for (int32_t a = -half; a <= half; a++)
                consider(w, q, tip, (node){i + a, j + b, level}, &lean, best);
    }
    return lean < INFINITY;
}

static bool move_open(const fw_route_window *w, const fw_route_move *m, node upper)
{
    int32_t below = upper.level - m->rise, i = upper.i - m->dx, j = upper.j - m->dy;
    if (below < w->low || i < 0 || j < 0 || i >= w->ni || j >= w->nj ||
        !fw_route_bit_at(fw_route_bit_row(w, w->reach, below, j), i))
        return false;
    for (int32_t c = 0; c < m->count; c++) {
        int32_t x = i + m->cell[c].i, y = j + m->cell[c].j;
        if (x < 0 || y < 0 || x >= w->ni || y >= w->nj ||
            !fw_route_bit_at(fw_route_bit_row(w, w->pass, below + m->cell[c].k, y), x))
            return false;
    }
    return true;
}

/* Points from the tip down to the plate along open moves: straight down where that still leads to
 * the plate, else the move taken last, else the first that does. Returns their number. */
static int32_t trace(const fw_route_window *w, const fw_route_query *q, const fw_route_moves *all,
                     node n, fw_point *point)
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
static bool straighten(const fw_route_query *q, const fw_point *point, int32_t count, fw_post *post)
{
    int32_t kept = 1, from = 0;
    post->path[0] = point[0];
    while (from < count - 1) {
        int32_t to = count - 1;
        while (to > from + 1 && !fw_route_line_passes(q, &point[from], &point[to]))
            to--;
        if (kept == FW_POST_POINTS)
            return false;
        post->path[kept++] = point[to];
        from = to;
    }
    post->point_count = kept;
    return true;
}

static fw_status bend_in(fw_route_window *w, const fw_route_query *q, const fw_route_moves *all,
                         fw_post *post, bool *found, fw_fault *fault)
{
    fw_route_pass_slabs(w, q);
    fw_route_block_posts(w, q);
    fw_route_reach_plate(w);
    fw_route_climb(w, all, w->low);
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
static fw_status bend(const fw_route_query *q, const fw_route_moves *all, fw_post *post,
                      bool *found, fw_fault *fault)
{
    int32_t top = (int32_t)floor(q->face_mm / q->grid.cell_mm + FW_ROUTE_TINY);
    double cone = ceil(top * q->tan_lean) + 2.0;
    *found = false;
    for (double half = 12.0; !*found; half *= 4.0) {
        fw_route_window w = fw_route_window_round(q, &post->path[0],
                                                  (int32_t)fmin(fmin(half, cone), 1 << 20), 0, top);
        fw_status status = fw_route_window_open(&w, fault);
        if (status == FW_OK)
            status = bend_in(&w, q, all, post, found, fault);
        fw_route_window_close(&w);
        FW_TRY(status);
        if (half >= cone)
            break;
    }
    return FW_OK;
}

static bool straight(const fw_route_query *q, fw_post *post)
{
    fw_point foot = {post->path[0].x, post->path[0].y, 0.0};
    if (!fw_route_line_passes(q, &post->path[0], &foot))
        return false;
    post->path[1] = foot;
    post->point_count = 2;
    return true;
}

/* ---- public ---- */

static fw_route_query query_of(const fw_lattice *lattice, const fw_route_rules *rules,
                               const fw_post *post, double face_mm)
{
    double lean = fmin(80.0, fmax(0.0, rules->lean_deg)) * acos(-1.0) / 180.0;
    return (fw_route_query){.lattice = lattice,
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
static bool tip_inside(const fw_route_query *q, const fw_point *tip)
{
    return tip->x >= 0.0 && tip->y >= 0.0 && tip->x < q->grid.width_mm &&
           tip->y < q->grid.height_mm && tip->z > FW_ROUTE_TINY &&
           tip->z <= q->grid.nz * q->grid.cell_mm + FW_ROUTE_TINY;
}

fw_status fw_route_prepare(fw_lattice *lattice, const fw_route_rules *rules, fw_fault *fault)
{
    fw_post post = smallest_post(rules);
    fw_route_query q = query_of(lattice, rules, &post, INFINITY);
    fw_route_moves all;
    fw_route_moves_make(&all, q.tan_lean);
    uint64_t *bits;
    FW_TRY(fw_lattice_reach_new(lattice, &bits, fault));
    fw_route_window w = {.ni = q.grid.nx, .nj = q.grid.ny, .top = q.grid.nz};
    FW_TRY(fw_route_window_open(&w, fault));
    fw_route_pass_slabs(&w, &q);
    fw_route_reach_plate(&w);
    fw_route_climb(&w, &all, 0);
    size_t words = (size_t)fw_lattice_words(lattice);
    for (int32_t level = 0; level <= w.top; level++)
        for (int32_t j = 0; j < w.nj; j++, bits += words)
            memcpy(bits, fw_route_bit_row(&w, w.reach, level, j), words * sizeof *bits);
    fw_route_window_close(&w);
    return FW_OK;
}

/* Copies what is known of one slab boundary into a window. */
static void load_reach(fw_route_window *w, const fw_route_query *q, int32_t level)
{
    int32_t words = fw_lattice_words(q->lattice);
    const uint64_t *bits = fw_lattice_reach(q->lattice);
    for (int32_t j = 0; j < w->nj; j++) {
        size_t at = ((size_t)level * (size_t)q->grid.ny + (size_t)(w->j0 + j)) * (size_t)words;
        uint64_t *row = fw_route_bit_row(w, w->reach, level, j);
        for (int32_t i = 0; i < w->ni; i++)
            if (fw_route_bit_at(bits + at, w->i0 + i))
                row[i / 64] |= (uint64_t)1 << (i % 64);
    }
}

/* Climbs through the neck alone, from what is known where the shaft begins. */
static bool neck_possible(const fw_route_query *q, const fw_point *tip)
{
    fw_route_moves all;
    fw_route_moves_make(&all, q->tan_lean);
    double cell = q->grid.cell_mm;
    int32_t top = (int32_t)floor(tip->z / cell + FW_ROUTE_TINY);
    int32_t known = (int32_t)fmax(0.0, floor((tip->z - q->post->neck_mm) / cell));
    int32_t low = known > all.tallest ? known - all.tallest : 0;
    int32_t half = (int32_t)fmin(1 << 20, ceil((top - low) * q->tan_lean) + 2.0);
    fw_route_window w = fw_route_window_round(q, tip, half, low, top);
    if (fw_route_window_open(&w, NULL) != FW_OK)
        return false;
    fw_route_pass_slabs(&w, q);
    for (int32_t level = low; level <= known; level++)
        load_reach(&w, q, level);
    fw_route_climb(&w, &all, known);
    node best = {0};
    bool found = first_node(&w, q, tip, &best);
    fw_route_window_close(&w);
    return found;
}

bool fw_route_possible(const fw_lattice *lattice, const fw_route_rules *rules, double x_mm,
                       double y_mm, double z_face_mm)
{
    fw_post post = smallest_post(rules);
    fw_route_query q = query_of(lattice, rules, &post, z_face_mm);
    q.through_posts = true;
    fw_point tip = {x_mm, y_mm, z_face_mm}, foot = {x_mm, y_mm, 0.0};
    if (!tip_inside(&q, &tip) || fw_lattice_reach(lattice) == NULL)
        return false;
    return fw_route_line_passes(&q, &tip, &foot) || neck_possible(&q, &tip);
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
    fw_route_query q = query_of(lattice, rules, post, post->path[0].z);
    if (!tip_inside(&q, &post->path[0]))
        return FW_OK;
    fw_route_moves all;
    fw_route_moves_make(&all, q.tan_lean);
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
