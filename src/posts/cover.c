/* Contents: lists; steps and the queue; distances; standing; Lloyd steps; the hexagonal
 * start; what each centre covers and pruning; the rounds; public calls. */
#include "posts/cover.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "placing";
enum { SUPPORTS = 32 }; /* directions in which a cell's outermost nodes are looked for */

typedef struct offset {
    int32_t a, b;
    double mm;
} offset;

typedef struct solver {
    const fw_cover_task *task;
    fw_ways ways;
    int32_t radius; /* units */
    uint8_t *stand; /* [nodes] 0 not asked yet, else 1 + fw_stand */
    offset *near;   /* [near_count] nodes within radius, nearest first */
    size_t near_count, near_capacity;
    int32_t *member; /* [members] needed nodes of centre c: from first[c] to first[c + 1] */
    size_t members, member_capacity;
    size_t *first; /* [count + 1] */
    size_t first_capacity;
    int32_t *covers; /* [nodes] by how many centres */
} solver;

/* ---- a solver ---- */

static int compare_offsets(const void *one, const void *two)
{
    const offset *p = one, *q = two;
    if (p->mm != q->mm)
        return p->mm < q->mm ? -1 : 1;
    return p->b != q->b ? (p->b < q->b ? -1 : 1) : p->a < q->a ? -1 : p->a > q->a;
}

static fw_status make_near(solver *s, fw_fault *fault)
{
    int32_t na = (int32_t)(s->task->radius_mm / s->task->dx_mm);
    int32_t nb = (int32_t)(s->task->radius_mm / s->task->dy_mm);
    for (int32_t b = -nb; b <= nb; b++)
        for (int32_t a = -na; a <= na; a++) {
            double mm = hypot(a * s->task->dx_mm, b * s->task->dy_mm);
            if (mm > s->task->radius_mm)
                continue;
            FW_TRY(fw_grow((void **)&s->near, &s->near_capacity, s->near_count + 1, sizeof *s->near,
                           holder, fault));
            s->near[s->near_count++] = (offset){a, b, mm};
        }
    qsort(s->near, s->near_count, sizeof *s->near, compare_offsets);
    return FW_OK;
}

static void close_solver(solver *s)
{
    fw_ways_close(&s->ways);
    free(s->stand);
    free(s->near);
    free(s->member);
    free(s->first);
    free(s->covers);
}

static fw_status open_arrays(solver *s, fw_fault *fault)
{
    FW_TRY(fw_ways_open(&s->ways, fault));
    FW_TRY(fw_allocate((void **)&s->stand, s->ways.nodes, 1, holder, fault));
    FW_TRY(fw_allocate((void **)&s->covers, s->ways.nodes, sizeof *s->covers, holder, fault));
    return make_near(s, fault);
}

/* On failure nothing is left to close. */
static fw_status open_solver(solver *s, const fw_cover_task *task, fw_fault *fault)
{
    *s = (solver){.task = task,
                  .ways = {.nx = task->nx,
                           .ny = task->ny,
                           .dx_mm = task->dx_mm,
                           .dy_mm = task->dy_mm,
                           .flags = task->flags,
                           .in = FW_COVER_IN,
                           .range_mm = 1.2 * task->radius_mm}};
    fw_status status = open_arrays(s, fault);
    if (status != FW_OK)
        close_solver(s);
    else
        s->radius = (int32_t)fmin(floor(task->radius_mm / s->ways.unit_mm), FW_WAYS_FAR / 2);
    return status;
}

static bool node_in(const solver *s, int32_t a, int32_t b)
{
    return a >= 0 && b >= 0 && a < s->task->nx && b < s->task->ny &&
           (s->task->flags[(size_t)b * (size_t)s->task->nx + (size_t)a] & FW_COVER_IN) != 0;
}

static bool needed(const solver *s, size_t node)
{
    return (s->task->flags[node] & FW_COVER_NEED) != 0;
}

/* Of a node, in mm. */
static fw_tip node_place(const solver *s, size_t node)
{
    size_t nx = (size_t)s->task->nx;
    return (fw_tip){(double)(node % nx) * s->task->dx_mm, (double)(node / nx) * s->task->dy_mm};
}

/* ---- standing ---- */

static fw_stand stand_at_node(solver *s, int32_t a, int32_t b)
{
    size_t node = (size_t)b * (size_t)s->task->nx + (size_t)a;
    if (s->stand[node] == 0)
        s->stand[node] =
            (uint8_t)(1 + s->task->stand(s->task->context, a * s->task->dx_mm, b * s->task->dy_mm));
    return (fw_stand)(s->stand[node] - 1);
}

static bool apart(const fw_tips *centres, size_t own, double x, double y, double pitch)
{
    for (size_t c = 0; pitch > 0.0 && c < centres->count; c++)
        if (c != own && hypot(centres->item[c].x_mm - x, centres->item[c].y_mm - y) < pitch)
            return false;
    return true;
}

/* The nearest place to (x, y) for centre `own` to stand: there, or else the nearest node. One where
 * the whole tip stands may be a third of the radius farther than one where it does not. */
static bool nearest_stand(solver *s, double x, double y, const fw_tips *centres, size_t own,
                          double pitch, fw_tip *out)
{
    if (s->task->stand(s->task->context, x, y) == FW_STAND_WHOLE &&
        apart(centres, own, x, y, pitch)) {
        *out = (fw_tip){x, y};
        return true;
    }
    int32_t a0 = (int32_t)lround(x / s->task->dx_mm), b0 = (int32_t)lround(y / s->task->dy_mm);
    double edge_mm = INFINITY;
    for (size_t n = 0; n < s->near_count; n++) {
        int32_t a = a0 + s->near[n].a, b = b0 + s->near[n].b;
        if (s->near[n].mm > edge_mm + s->task->radius_mm / 3.0)
            break;
        fw_stand stand = node_in(s, a, b) ? stand_at_node(s, a, b) : FW_STAND_NOT;
        fw_tip tip = {a * s->task->dx_mm, b * s->task->dy_mm};
        if (stand == FW_STAND_NOT || (stand == FW_STAND_EDGE && edge_mm < INFINITY) ||
            !apart(centres, own, tip.x_mm, tip.y_mm, pitch))
            continue;
        *out = tip;
        if (stand == FW_STAND_WHOLE)
            return true;
        edge_mm = s->near[n].mm;
    }
    return edge_mm < INFINITY;
}

/* ---- Lloyd steps ---- */

typedef struct cell {
    double sum_x, sum_y, count;
    fw_tip support[SUPPORTS]; /* outermost needed nodes */
    double out[SUPPORTS];
    bool bordered;
} cell;

static void add_support(cell *c, const fw_tip *direction, double x, double y)
{
    for (int32_t d = 0; d < SUPPORTS; d++) {
        double out = x * direction[d].x_mm + y * direction[d].y_mm;
        if (!c->bordered || out > c->out[d]) {
            c->out[d] = out;
            c->support[d] = (fw_tip){x, y};
        }
    }
    c->bordered = true;
}

/* Centre of the smallest circle round the supports: steps toward the farthest point, shrinking as
 * 1 / (n + 1) (Badoiu and Clarkson, Smaller core-sets for balls, SODA 2003). */
static fw_tip circle_centre(const cell *c)
{
    fw_tip centre = {c->sum_x / c->count, c->sum_y / c->count};
    for (int32_t n = 1; c->bordered && n <= 60; n++) {
        double most = -1.0;
        int32_t far = 0;
        for (int32_t d = 0; d < SUPPORTS; d++) {
            double x = c->support[d].x_mm - centre.x_mm, y = c->support[d].y_mm - centre.y_mm;
            if (x * x + y * y > most) {
                most = x * x + y * y;
                far = d;
            }
        }
        centre.x_mm += (c->support[far].x_mm - centre.x_mm) / (n + 1);
        centre.y_mm += (c->support[far].y_mm - centre.y_mm) / (n + 1);
    }
    return centre;
}

/* True when a node of its cell is next to a node that is not. */
static bool at_border(const solver *s, size_t node)
{
    size_t nx = (size_t)s->task->nx, a = node % nx, b = node / nx;
    int32_t own = s->ways.label[node];
    return a == 0 || b == 0 || a + 1 == nx || b + 1 == (size_t)s->task->ny ||
           s->ways.label[node - 1] != own || s->ways.label[node + 1] != own ||
           s->ways.label[node - nx] != own || s->ways.label[node + nx] != own ||
           !needed(s, node - 1) || !needed(s, node + 1) || !needed(s, node - nx) ||
           !needed(s, node + nx);
}

static void fill_cells(const solver *s, cell *cells)
{
    fw_tip direction[SUPPORTS];
    for (int32_t d = 0; d < SUPPORTS; d++) {
        double angle = 2.0 * acos(-1.0) * d / SUPPORTS;
        direction[d] = (fw_tip){cos(angle), sin(angle)};
    }
    for (size_t n = 0; n < s->ways.nodes; n++) {
        if (!needed(s, n) || s->ways.label[n] < 0)
            continue;
        size_t nx = (size_t)s->task->nx;
        double x = (double)(n % nx) * s->task->dx_mm, y = (double)(n / nx) * s->task->dy_mm;
        cell *c = &cells[s->ways.label[n]];
        c->sum_x += x, c->sum_y += y, c->count += 1.0;
        if (at_border(s, n))
            add_support(c, direction, x, y);
    }
}

/* One step for the centres from `fixed` on, after measure. */
static fw_status move_centres(solver *s, fw_tips *centres, size_t fixed, double pitch, bool circle,
                              fw_fault *fault)
{
    cell *cells = NULL;
    FW_TRY(fw_allocate((void **)&cells, centres->count, sizeof *cells, holder, fault));
    fill_cells(s, cells);
    for (size_t c = fixed; c < centres->count; c++) {
        if (cells[c].count == 0.0)
            continue;
        fw_tip to = {cells[c].sum_x / cells[c].count, cells[c].sum_y / cells[c].count};
        if (circle)
            to = circle_centre(&cells[c]);
        if (nearest_stand(s, to.x_mm, to.y_mm, centres, c, pitch, &to))
            centres->item[c] = to;
    }
    free(cells);
    return FW_OK;
}

static fw_status relax(solver *s, fw_tips *centres, int32_t rounds, bool circle, fw_fault *fault)
{
    for (int32_t n = 0; n < rounds; n++) {
        FW_TRY(fw_ways_measure(&s->ways, centres, fault));
        FW_TRY(move_centres(s, centres, 0, 0.0, circle, fault));
    }
    return FW_OK;
}

/* ---- farthest first ---- */

/* Adds a centre at the farthest needed node over `limit` that any place is near enough for. */
static fw_status add_farthest(solver *s, fw_tips *centres, uint8_t *given_up, int32_t limit,
                              double pitch, bool *added, fw_fault *fault)
{
    for (*added = false;;) {
        int32_t most = limit;
        size_t node = s->ways.nodes;
        for (size_t n = 0; n < s->ways.nodes; n++)
            if (needed(s, n) && s->ways.distance[n] > most && !given_up[n])
                most = s->ways.distance[n], node = n;
        if (node == s->ways.nodes)
            return FW_OK;
        fw_tip place = node_place(s, node);
        fw_tip tip;
        given_up[node] = 1;
        if (!nearest_stand(s, place.x_mm, place.y_mm, centres, SIZE_MAX, pitch, &tip))
            continue;
        FW_TRY(fw_tips_push(centres, tip, fault));
        *added = true;
        return fw_ways_add(&s->ways, &tip, (int32_t)centres->count - 1, fault);
    }
}

static fw_status fill(solver *s, fw_tips *centres, fw_fault *fault)
{
    uint8_t *given_up = NULL;
    FW_TRY(fw_allocate((void **)&given_up, s->ways.nodes, 1, holder, fault));
    fw_status status = fw_ways_measure(&s->ways, centres, fault);
    for (bool added = true; status == FW_OK && added;)
        status = add_farthest(s, centres, given_up, s->radius, 0.0, &added, fault);
    free(given_up);
    return status;
}

/* ---- the hexagonal start ---- */

/* Points of a hexagonal pattern whose cells have the task's radius. */
typedef struct pattern {
    double across, along; /* pitch in a row, pitch of rows */
    double x0, y0;
    bool turned; /* rows run along y */
    int32_t columns, rows;
} pattern;

static pattern make_pattern(const fw_cover_task *t, int32_t variant)
{
    double wide = t->nx * t->dx_mm, high = t->ny * t->dy_mm;
    pattern p = {.across = sqrt(3.0) * t->radius_mm, .along = 1.5 * t->radius_mm};
    p.turned = (variant & 1) != 0;
    p.x0 = -p.across * (variant >> 1 & 3) / 4.0;
    p.y0 = -p.along * (variant >> 3 & 3) / 4.0;
    p.columns = (int32_t)((p.turned ? high : wide) / p.across) + 4;
    p.rows = (int32_t)((p.turned ? wide : high) / p.along) + 4;
    return p;
}

/* The pattern's point nearest to (x, y), as an index. */
static size_t nearest_point(const pattern *p, double x, double y)
{
    double u = (p->turned ? y : x) - p->x0, v = (p->turned ? x : y) - p->y0;
    int32_t middle = (int32_t)floor(v / p->along + 0.5), best_row = 0, best_column = 0;
    double best = INFINITY;
    for (int32_t row = middle > 0 ? middle - 1 : 0; row <= middle + 1; row++) {
        double shift = row & 1 ? 0.5 : 0.0;
        int32_t column = (int32_t)floor(u / p->across - shift + 0.5);
        column = column < 0 ? 0 : column;
        double far = hypot(u - (column + shift) * p->across, v - row * p->along);
        if (far < best)
            best = far, best_row = row, best_column = column;
    }
    return (size_t)best_row * (size_t)p->columns + (size_t)best_column;
}

/* Sums of the needed nodes nearest to each point of a pattern: [rows][columns]. */
static void gather(const solver *s, const pattern *p, cell *sums)
{
    size_t nx = (size_t)s->task->nx;
    for (size_t n = 0; n < s->ways.nodes; n++) {
        if (!needed(s, n))
            continue;
        double x = (double)(n % nx) * s->task->dx_mm, y = (double)(n / nx) * s->task->dy_mm;
        cell *c = &sums[nearest_point(p, x, y)];
        c->sum_x += x, c->sum_y += y, c->count += 1.0;
    }
}

/* Cells of a pattern that hold at least a seventh of a full one: smaller ones are left to the
 * neighbours, which move toward them. */
static fw_status start_from(solver *s, const pattern *p, fw_tips *out, fw_fault *fault)
{
    size_t points = (size_t)p->rows * (size_t)p->columns;
    cell *sums = NULL;
    FW_TRY(fw_allocate((void **)&sums, points, sizeof *sums, holder, fault));
    gather(s, p, sums);
    double full = p->across * p->along / (s->task->dx_mm * s->task->dy_mm);
    fw_status status = FW_OK;
    out->count = 0;
    for (size_t n = 0; status == FW_OK && n < points; n++) {
        fw_tip tip;
        if (7.0 * sums[n].count < full ||
            !nearest_stand(s, sums[n].sum_x / sums[n].count, sums[n].sum_y / sums[n].count, out,
                           SIZE_MAX, 0.0, &tip))
            continue;
        status = fw_tips_push(out, tip, fault);
    }
    free(sums);
    return status;
}

/* ---- what each centre covers; pruning ---- */

static fw_status add_member(solver *s, size_t node, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&s->member, &s->member_capacity, s->members + 1, sizeof *s->member,
                   holder, fault));
    s->member[s->members++] = (int32_t)node;
    s->covers[node]++;
    return FW_OK;
}

/* Lists the needed nodes within the radius of one centre. */
static fw_status cover_of(solver *s, const fw_tip *centre, fw_fault *fault)
{
    fw_way_box box;
    FW_TRY(fw_ways_round(&s->ways, centre, s->radius, &box, fault));
    for (int32_t b = box.b0; b <= box.b1; b++)
        for (int32_t a = box.a0; a <= box.a1; a++) {
            size_t node = (size_t)b * (size_t)s->task->nx + (size_t)a;
            if (s->ways.distance[node] <= s->radius && needed(s, node))
                FW_TRY(add_member(s, node, fault));
            s->ways.distance[node] = FW_WAYS_FAR;
        }
    return FW_OK;
}

static fw_status list_covers(solver *s, const fw_tips *centres, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&s->first, &s->first_capacity, centres->count + 1, sizeof *s->first,
                   holder, fault));
    fw_ways_forget(&s->ways);
    memset(s->covers, 0, s->ways.nodes * sizeof *s->covers);
    s->members = 0;
    for (size_t c = 0; c < centres->count; c++) {
        s->first[c] = s->members;
        FW_TRY(cover_of(s, &centres->item[c], fault));
    }
    s->first[centres->count] = s->members;
    return FW_OK;
}

static size_t alone(const solver *s, size_t c)
{
    size_t count = 0;
    for (size_t n = s->first[c]; n < s->first[c + 1]; n++)
        count += s->covers[s->member[n]] == 1;
    return count;
}

typedef struct weight {
    size_t alone, centre;
} weight;

static int compare_weights(const void *one, const void *two)
{
    const weight *p = one, *q = two;
    if (p->alone != q->alone)
        return p->alone < q->alone ? -1 : 1;
    return p->centre < q->centre ? -1 : p->centre > q->centre;
}

/* Takes out, of the centres with the least cover of their own, those that cover nothing alone at
 * their turn, and the first `more` whatever they cover. */
static fw_status take_out(solver *s, fw_tips *centres, size_t more, fw_fault *fault)
{
    FW_TRY(list_covers(s, centres, fault));
    weight *order = NULL;
    FW_TRY(fw_allocate((void **)&order, centres->count, sizeof *order, holder, fault));
    for (size_t c = 0; c < centres->count; c++)
        order[c] = (weight){alone(s, c), c};
    qsort(order, centres->count, sizeof *order, compare_weights);
    for (size_t n = 0; n < centres->count; n++) {
        size_t c = order[n].centre;
        if (n >= more && alone(s, c) > 0)
            continue;
        for (size_t m = s->first[c]; m < s->first[c + 1]; m++)
            s->covers[s->member[m]]--;
        centres->item[c].x_mm = NAN;
    }
    free(order);
    size_t kept = 0;
    for (size_t c = 0; c < centres->count; c++)
        if (!isnan(centres->item[c].x_mm))
            centres->item[kept++] = centres->item[c];
    centres->count = kept;
    return FW_OK;
}

/* ---- rounds ---- */

static fw_status settle_cover(solver *s, fw_tips *centres, int32_t even, fw_fault *fault)
{
    FW_TRY(relax(s, centres, even, false, fault));
    FW_TRY(relax(s, centres, 5, true, fault));
    FW_TRY(fill(s, centres, fault));
    FW_TRY(relax(s, centres, 2, true, fault));
    FW_TRY(fill(s, centres, fault));
    return take_out(s, centres, 0, fault);
}

enum { VARIANTS = 32, MOST_TRIED = 8, TRIED_TIPS = 600 };

typedef struct start {
    size_t count;
    int32_t variant;
} start;

static int compare_starts(const void *one, const void *two)
{
    const start *p = one, *q = two;
    if (p->count != q->count)
        return p->count < q->count ? -1 : 1;
    return p->variant < q->variant ? -1 : p->variant > q->variant;
}

/* The starts with the fewest centres are settled, and the best result is kept: on a small face the
 * rim decides, and no pattern fits it best by its looks. On a large one the rim matters little, and
 * only the first is tried. */
static fw_status best_start(solver *s, fw_tips *trial, fw_tips *best, fw_fault *fault)
{
    start order[VARIANTS];
    for (int32_t variant = 0; variant < VARIANTS; variant++) {
        pattern p = make_pattern(s->task, variant);
        FW_TRY(start_from(s, &p, trial, fault));
        order[variant] = (start){trial->count, variant};
    }
    qsort(order, VARIANTS, sizeof *order, compare_starts);
    const size_t affordable = 1 + TRIED_TIPS / (order[0].count + 1);
    const size_t tried = affordable < MOST_TRIED ? affordable : MOST_TRIED;
    for (size_t n = 0; n < tried; n++) {
        pattern p = make_pattern(s->task, order[n].variant);
        FW_TRY(start_from(s, &p, trial, fault));
        FW_TRY(settle_cover(s, trial, 3, fault));
        if (n == 0 || trial->count < best->count)
            FW_TRY(fw_tips_copy(trial, best, fault));
    }
    return FW_OK;
}

static fw_status improve(solver *s, fw_tips *trial, fw_tips *best, fw_fault *fault)
{
    enum { MOST_ROUNDS = 12 };
    size_t more = best->count / 12 + 1;
    for (int32_t round = 0; round < MOST_ROUNDS && best->count > 1; round++) {
        FW_TRY(fw_tips_copy(best, trial, fault));
        FW_TRY(take_out(s, trial, more, fault));
        FW_TRY(settle_cover(s, trial, 1, fault));
        if (trial->count < best->count) {
            FW_TRY(fw_tips_copy(trial, best, fault));
            continue;
        }
        if (more == 1)
            break;
        more = (more + 1) / 2;
    }
    return FW_OK;
}

static fw_status solve(solver *s, fw_tips *trial, fw_tips *best, fw_fault *fault)
{
    FW_TRY(best_start(s, trial, best, fault));
    return improve(s, trial, best, fault);
}

fw_status fw_cover(const fw_cover_task *task, fw_tips *out, fw_fault *fault)
{
    solver s;
    fw_tips trial = {0};
    out->count = 0;
    FW_TRY(open_solver(&s, task, fault));
    fw_status status = solve(&s, &trial, out, fault);
    fw_tips_free(&trial);
    close_solver(&s);
    return status;
}

fw_status fw_cover_refine(const fw_cover_task *task, fw_tips *centres, fw_fault *fault)
{
    solver s;
    FW_TRY(open_solver(&s, task, fault));
    fw_status status = settle_cover(&s, centres, 0, fault);
    close_solver(&s);
    return status;
}

fw_status fw_cover_spread(const fw_cover_task *task, fw_tips *centres, size_t fixed,
                          double pitch_mm, int32_t rounds, fw_fault *fault)
{
    solver s;
    FW_TRY(open_solver(&s, task, fault));
    fw_status status = FW_OK;
    for (int32_t n = 0; status == FW_OK && n < rounds; n++) {
        status = fw_ways_measure(&s.ways, centres, fault);
        if (status == FW_OK)
            status = move_centres(&s, centres, fixed, pitch_mm, false, fault);
    }
    close_solver(&s);
    return status;
}

fw_status fw_cover_farthest(const fw_cover_task *task, fw_tips *centres, double pitch_mm,
                            bool *added, fw_fault *fault)
{
    solver s;
    uint8_t *given_up = NULL;
    *added = false;
    FW_TRY(open_solver(&s, task, fault));
    fw_status status = fw_allocate((void **)&given_up, s.ways.nodes, 1, holder, fault);
    if (status == FW_OK)
        status = fw_ways_measure(&s.ways, centres, fault);
    if (status == FW_OK)
        status = add_farthest(&s, centres, given_up, 0, pitch_mm, added, fault);
    free(given_up);
    close_solver(&s);
    return status;
}
