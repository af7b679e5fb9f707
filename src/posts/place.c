/* Contents: where a tip may stand; the grid of one region's exposed face;
 * covering it; farthest first for what the grid missed; what is missed in the end; public calls. */
#include "posts/place.h"

#include "fault/memory.h"
#include "posts/place_ground.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "placing";

enum { BLOCK_BUSY = 1, BLOCK_GIVEN_UP = 2 };

/* ---- where a tip may stand ---- */

/* How well a tip fits the face, whether or not it can be routed. */
static fw_stand fit_at(const fw_place_ground *g, uint32_t region, int32_t x, int32_t y)
{
    if (fw_place_region_at(g, x, y) != region || !fw_place_has(g->fresh, x, y))
        return FW_STAND_NOT;
    double radius = 0.5 * g->rules->tip_mm, px = g->screen->px_mm, py = g->screen->py_mm;
    bool in_image = (x + 0.5) * px >= radius && (g->now->width - x - 0.5) * px >= radius &&
                    (y + 0.5) * py >= radius && (g->now->height - y - 0.5) * py >= radius;
    if (in_image && fw_place_has(&g->whole, x, y))
        return FW_STAND_WHOLE;
    return g->held[region] || fw_place_has(&g->inside, x, y) ? FW_STAND_EDGE : FW_STAND_NOT;
}

static fw_stand stand_at(const fw_place_ground *g, uint32_t region, double x_mm, double y_mm)
{
    int32_t x = (int32_t)floor(x_mm / g->screen->px_mm),
            y = (int32_t)floor(y_mm / g->screen->py_mm);
    fw_stand fit = fit_at(g, region, x, y);
    bool routed = fit == FW_STAND_NOT || g->possible == NULL || g->possible(g->context, x_mm, y_mm);
    return routed ? fit : FW_STAND_NOT;
}

/* Adds a tip to the list. Its contact joins the field with the others', before that is read again.
 */
static fw_status add_tip(fw_place_ground *g, uint32_t region, fw_tip tip, fw_fault *fault)
{
    g->held[region] = 1;
    return fw_tips_push(g->out, tip, fault);
}

static fw_status contact_of_new(const fw_place_ground *g, fw_runs *contact, fw_fault *fault)
{
    const size_t count = g->out->count - g->in_field;
    const fw_tip *tip = g->out->item + g->in_field;
    fw_disc *discs = NULL;
    fw_runs feet = {0};
    FW_TRY(fw_allocate((void **)&discs, count, sizeof *discs, holder, fault));
    for (size_t n = 0; n < count; n++)
        discs[n] = (fw_disc){tip[n].x_mm, tip[n].y_mm, g->rules->tip_mm};
    fw_status status = fw_discs_footprint(g->screen, discs, count, &feet, fault);
    if (status == FW_OK)
        status = fw_runs_intersect(&feet, g->now, contact, fault);
    free(discs);
    fw_runs_free(&feet);
    return status;
}

/* Gives the contacts of all new tips to the field at once: settling it costs more than a tip. */
static fw_status tell_field(fw_place_ground *g, fw_fault *fault)
{
    fw_runs contact = {0};
    if (g->in_field == g->out->count)
        return FW_OK;
    fw_status status = contact_of_new(g, &contact, fault);
    if (status == FW_OK)
        status = fw_carried_add_sources(g->field, &contact, fault);
    fw_runs_free(&contact);
    g->in_field = g->out->count;
    return status;
}

/* ---- the grid of one region's exposed face ---- */

typedef struct grid {
    const fw_place_ground *ground;
    uint32_t region;
    int32_t x0, y0, sx, sy; /* px of node (0, 0), px between nodes */
    double x_mm, y_mm;      /* of node (0, 0) */
    uint8_t *flags;
    fw_cover_task task;
} grid;

static fw_stand grid_stand(void *context, double x_mm, double y_mm)
{
    const grid *r = context;
    return stand_at(r->ground, r->region, fw_place_micrometres(r->x_mm + x_mm),
                    fw_place_micrometres(r->y_mm + y_mm));
}

static bool exposed(const fw_place_ground *g, uint32_t region, int32_t x, int32_t y)
{
    return !g->held[region] || fw_carried_at(g->field, x, y) > g->rules->reach_mm;
}

/* Mean thickness of a region in px, the smaller of along rows and along columns: pixels over the
 * number of pixels that begin a run, or have none of the region before them in their column. */
static double thickness(const fw_place_ground *g, uint32_t region)
{
    const fw_region *r = &g->regions->region[region];
    double starts = 0.0, touching = 0.0;
    for (int32_t y = r->y0; y < r->y1; y++) {
        uint32_t above = y > 0 ? g->now->row[y - 1] : 0, end = y > 0 ? g->now->row[y] : 0;
        for (uint32_t n = g->now->row[y]; n < g->now->row[y + 1]; n++) {
            fw_run run = g->now->run[n];
            if (g->regions->label[n] != region)
                continue;
            starts += 1.0;
            for (; above < end && g->now->run[above].x0 < run.x1; above++) {
                fw_run up = g->now->run[above];
                touching += fmax(0.0, fmin(up.x1, run.x1) - fmax(up.x0, run.x0));
                if (up.x1 >= run.x1)
                    break;
            }
        }
    }
    double pixels = (double)r->pixels;
    return fmin(pixels / starts, pixels / fmax(1.0, pixels - touching));
}

/* A sixth of the reach between nodes; less where the region is thin or small, but at most
 * MOST_NODES. */
static void choose_steps(grid *r, const fw_place_box *b, double thick)
{
    enum { FEW_NODES = 3600, MOST_NODES = 1 << 22 };
    const fw_place_ground *g = r->ground;
    double area = (double)(b->x1 - b->x0) * (double)(b->y1 - b->y0);
    r->sx = g->block_px[0];
    r->sy = g->block_px[1];
    while ((r->sx > 1 || r->sy > 1) &&
           (3.0 * r->sx > thick || 3.0 * r->sy > thick || area / r->sx / r->sy < FEW_NODES)) {
        r->sx = (r->sx + 1) / 2;
        r->sy = (r->sy + 1) / 2;
    }
    while (area / r->sx / r->sy > MOST_NODES) {
        r->sx *= 2;
        r->sy *= 2;
    }
}

static void fill_flags(grid *r)
{
    const fw_place_ground *g = r->ground;
    for (int32_t b = 0; b < r->task.ny; b++) {
        int32_t y = r->y0 + b * r->sy;
        uint8_t *row = r->flags + (size_t)b * (size_t)r->task.nx;
        for (int32_t a = 0; a < r->task.nx; a++) {
            int32_t x = r->x0 + a * r->sx;
            if (fw_place_region_at(g, x, y) != r->region)
                continue;
            row[a] = FW_COVER_IN;
            if (exposed(g, r->region, x, y))
                row[a] |= FW_COVER_NEED;
        }
    }
}

/* Lays the nodes, sx by sy px apart, over *b. The radius is shortened by a quarter of the node
 * distance, for the pixels between nodes, and a two-hundredth of the reach, for the field's own
 * error; what that does not catch is left to farthest first. Caller frees grid->flags. */
static fw_status open_grid(grid *r, const fw_place_box *b, fw_fault *fault)
{
    const fw_place_ground *g = r->ground;
    r->x0 = b->x0 + (b->x1 - b->x0 - 1) % r->sx / 2;
    r->y0 = b->y0 + (b->y1 - b->y0 - 1) % r->sy / 2;
    r->x_mm = (r->x0 + 0.5) * g->screen->px_mm;
    r->y_mm = (r->y0 + 0.5) * g->screen->py_mm;
    r->task = (fw_cover_task){.nx = (b->x1 - 1 - r->x0) / r->sx + 1,
                              .ny = (b->y1 - 1 - r->y0) / r->sy + 1,
                              .dx_mm = r->sx * g->screen->px_mm,
                              .dy_mm = r->sy * g->screen->py_mm,
                              .stand = grid_stand,
                              .context = r};
    double apart = r->sx > 1 || r->sy > 1 ? fmax(r->task.dx_mm, r->task.dy_mm) : 0.0;
    r->task.radius_mm = 0.995 * g->rules->reach_mm + 0.5 * g->rules->tip_mm - 0.25 * apart;
    FW_TRY(
        fw_allocate((void **)&r->flags, (size_t)r->task.nx * (size_t)r->task.ny, 1, holder, fault));
    r->task.flags = r->flags;
    fill_flags(r);
    return FW_OK;
}

static void shift_tips(fw_tips *tips, double x_mm, double y_mm)
{
    for (size_t n = 0; n < tips->count; n++) {
        tips->item[n].x_mm += x_mm;
        tips->item[n].y_mm += y_mm;
    }
}

/* Centres for one region in image mm: covered on a coarse grid, then refined on one four times as
 * fine. */
static fw_status find_centres(const fw_place_ground *g, uint32_t region, const fw_place_box *b,
                              fw_tips *centres, fw_fault *fault)
{
    grid r = {.ground = g, .region = region};
    choose_steps(&r, b, thickness(g, region));
    for (bool coarse = true, last = false; !last; coarse = false) {
        last = !coarse || (r.sx == 1 && r.sy == 1);
        fw_status status = open_grid(&r, b, fault);
        shift_tips(centres, -r.x_mm, -r.y_mm);
        if (status == FW_OK)
            status = coarse ? fw_cover(&r.task, centres, fault)
                            : fw_cover_refine(&r.task, centres, fault);
        shift_tips(centres, r.x_mm, r.y_mm);
        free(r.flags);
        r.flags = NULL;
        FW_TRY(status);
        r.sx = (r.sx + 3) / 4;
        r.sy = (r.sy + 3) / 4;
    }
    return FW_OK;
}

/* Covers the exposed pixels of one region, which lie in *b. */
static fw_status cover_region(fw_place_ground *g, uint32_t region, const fw_place_box *b,
                              fw_fault *fault)
{
    fw_tips centres = {0};
    fw_status status = find_centres(g, region, b, &centres, fault);
    for (size_t n = 0; status == FW_OK && n < centres.count; n++) {
        fw_tip tip = {fw_place_micrometres(centres.item[n].x_mm),
                      fw_place_micrometres(centres.item[n].y_mm)};
        status = add_tip(g, region, tip, fault);
    }
    fw_tips_free(&centres);
    return status;
}

/* ---- which pixels are over ---- */

static fw_status note_over(void *context, int32_t y, int32_t x0, int32_t x1, const double *value_mm,
                           fw_fault *fault)
{
    fw_place_ground *g = context;
    uint32_t region = fw_place_region_at(g, x0, y);
    FW_TRY(fw_grow((void **)&g->over, &g->over_capacity, g->over_count + (size_t)(x1 - x0),
                   sizeof *g->over, holder, fault));
    for (int32_t x = x0; x < x1; x++)
        g->over[g->over_count++] = (fw_place_spot){region, x, y, value_mm[x - x0]};
    return FW_OK;
}

/* Lists the pixels over the reach in raster order. */
static fw_status list_over(fw_place_ground *g, fw_fault *fault)
{
    FW_TRY(tell_field(g, fault));
    g->over_count = 0;
    return fw_carried_visit(g->field, g->rules->reach_mm, note_over, g, fault);
}

/* Wider by the reach, within the region: ways to what is exposed may lead round it. */
static fw_place_box widen(const fw_place_ground *g, const fw_place_box *b, const fw_region *r)
{
    int32_t across = 6 * g->block_px[0] + 6, along = 6 * g->block_px[1] + 6;
    fw_place_box w = {b->x0 - across, b->y0 - along, b->x1 + across, b->y1 + along};
    w.x0 = w.x0 < r->x0 ? r->x0 : w.x0;
    w.y0 = w.y0 < r->y0 ? r->y0 : w.y0;
    w.x1 = w.x1 > r->x1 ? r->x1 : w.x1;
    w.y1 = w.y1 > r->y1 ? r->y1 : w.y1;
    return w;
}

/* True when some pixel of an unheld region has room for the whole smallest tip. */
static bool has_room(const fw_place_ground *g, uint32_t region)
{
    const fw_region *r = &g->regions->region[region];
    for (int32_t y = r->y0; y < r->y1; y++)
        for (uint32_t n = g->inside.row[y]; n < g->inside.row[y + 1]; n++)
            for (int32_t x = g->inside.run[n].x0; x < g->inside.run[n].x1; x++)
                if (fit_at(g, region, x, y) != FW_STAND_NOT)
                    return true;
    return false;
}

/* For a face that the grid has no node on: the first place where a tip may stand. */
static fw_status hold_anywhere(fw_place_ground *g, uint32_t region, fw_fault *fault)
{
    const fw_region *r = &g->regions->region[region];
    for (int32_t y = r->y0; y < r->y1; y++)
        for (uint32_t n = g->inside.row[y]; n < g->inside.row[y + 1]; n++) {
            int32_t x = (g->inside.run[n].x0 + g->inside.run[n].x1) / 2;
            fw_tip tip = {fw_place_micrometres((x + 0.5) * g->screen->px_mm),
                          fw_place_micrometres((y + 0.5) * g->screen->py_mm)};
            if (stand_at(g, region, tip.x_mm, tip.y_mm) != FW_STAND_NOT)
                return add_tip(g, region, tip, fault);
        }
    return FW_OK;
}

static fw_status cover_all(fw_place_ground *g, fw_fault *fault)
{
    fw_place_box *exposed_box = NULL;
    FW_TRY(
        fw_allocate((void **)&exposed_box, g->regions->count, sizeof *exposed_box, holder, fault));
    for (size_t n = 0; n < g->over_count; n++)
        fw_place_grow_box(&exposed_box[g->over[n].region], g->over[n].x, g->over[n].y);
    fw_status status = FW_OK;
    for (uint32_t n = 0; status == FW_OK && n < g->regions->count; n++) {
        const fw_region *r = &g->regions->region[n];
        fw_place_box all = {r->x0, r->y0, r->x1, r->y1};
        if (!g->held[n] && has_room(g, n)) {
            status = cover_region(g, n, &all, fault);
            if (status == FW_OK && !g->held[n])
                status = hold_anywhere(g, n, fault);
        } else if (g->held[n] && exposed_box[n].x1 > 0) {
            all = widen(g, &exposed_box[n], r);
            status = tell_field(g, fault); /* a tip beside it may have touched it */
            if (status == FW_OK)
                status = cover_region(g, n, &all, fault);
        }
    }
    free(exposed_box);
    return status;
}

/* ---- farthest first ---- */

static uint8_t *block_of(const fw_place_ground *g, int32_t x, int32_t y)
{
    return &g->block[(size_t)(y / g->block_px[1]) * (size_t)g->blocks[0] +
                     (size_t)(x / g->block_px[0])];
}

static void mark_round(fw_place_ground *g, const fw_tip *tip)
{
    int32_t i = (int32_t)(tip->x_mm / g->screen->px_mm) / g->block_px[0];
    int32_t j = (int32_t)(tip->y_mm / g->screen->py_mm) / g->block_px[1];
    for (int32_t b = j - 6; b <= j + 6; b++)
        for (int32_t a = i - 6; a <= i + 6; a++)
            if (a >= 0 && b >= 0 && a < g->blocks[0] && b < g->blocks[1])
                g->block[(size_t)b * (size_t)g->blocks[0] + (size_t)a] |= BLOCK_BUSY;
}

static int compare_spots(const void *one, const void *two)
{
    const fw_place_spot *p = one, *q = two;
    if (p->debt_mm != q->debt_mm)
        return p->debt_mm > q->debt_mm ? -1 : 1;
    return p->y != q->y ? (p->y < q->y ? -1 : 1) : p->x < q->x ? -1 : p->x > q->x;
}

/* The standing place nearest to a spot and within the reach, on every pixel or (wide reach) every
 * n-th; one where the tip overhangs the face counts as a third of the reach farther. */
static bool stand_near(const fw_place_ground *g, const fw_place_spot *s, fw_tip *out)
{
    enum { RINGS = 12 };
    double px = g->screen->px_mm, py = g->screen->py_mm, reach = g->rules->reach_mm;
    int32_t sx = fw_place_step_px(reach / RINGS, px), sy = fw_place_step_px(reach / RINGS, py);
    int32_t na = (int32_t)(reach / (sx * px)), nb = (int32_t)(reach / (sy * py));
    double best = INFINITY;
    for (int32_t b = -nb; b <= nb; b++)
        for (int32_t a = -na; a <= na; a++) {
            double mm = hypot(a * sx * px, b * sy * py);
            int32_t x = s->x + a * sx, y = s->y + b * sy;
            fw_stand fit = mm <= reach && mm < best ? fit_at(g, s->region, x, y) : FW_STAND_NOT;
            double score = mm + (fit == FW_STAND_WHOLE ? 0.0 : reach / 3.0);
            fw_tip tip = {fw_place_micrometres((x + 0.5) * px),
                          fw_place_micrometres((y + 0.5) * py)};
            if (fit == FW_STAND_NOT || score >= best ||
                stand_at(g, s->region, tip.x_mm, tip.y_mm) == FW_STAND_NOT)
                continue;
            best = score;
            *out = tip;
        }
    return best < INFINITY;
}

/* One pass over the listed pixels, worst first: each gets a tip near it, unless one was just put
 * near it or its block was given up. */
static fw_status pass_over(fw_place_ground *g, bool *added, fw_fault *fault)
{
    size_t blocks = (size_t)g->blocks[0] * (size_t)g->blocks[1];
    *added = false;
    for (size_t n = 0; n < blocks; n++)
        g->block[n] &= (uint8_t)~BLOCK_BUSY;
    qsort(g->over, g->over_count, sizeof *g->over, compare_spots);
    for (size_t n = 0; n < g->over_count; n++) {
        const fw_place_spot *s = &g->over[n];
        fw_tip tip;
        uint8_t *block = block_of(g, s->x, s->y);
        if (*block != 0)
            continue;
        *block |= BLOCK_GIVEN_UP; /* also after success: if that did not help nothing will */
        if (!stand_near(g, s, &tip))
            continue;
        FW_TRY(add_tip(g, s->region, tip, fault));
        mark_round(g, &tip);
        *added = true;
    }
    return FW_OK;
}

static fw_status add_leftovers(fw_place_ground *g, fw_fault *fault)
{
    for (bool added = true; added;) {
        FW_TRY(list_over(g, fault));
        FW_TRY(pass_over(g, &added, fault));
    }
    return list_over(g, fault);
}

/* ---- what is missed ---- */

void fw_misses_free(fw_misses *misses)
{
    free(misses->item);
    *misses = (fw_misses){0};
}

static fw_status push_miss(fw_misses *misses, fw_miss miss, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&misses->item, &misses->capacity, misses->count + 1, sizeof miss,
                   holder, fault));
    misses->item[misses->count++] = miss;
    return FW_OK;
}

/* A tip would fit within the reach of the pixel, so that only the way to the plate is missing. */
static bool fits_near(const fw_place_ground *g, const fw_miss *m)
{
    double px = g->screen->px_mm, py = g->screen->py_mm, reach = g->rules->reach_mm;
    int32_t na = (int32_t)(reach / px), nb = (int32_t)(reach / py);
    for (int32_t b = -nb; b <= nb; b++)
        for (int32_t a = -na; a <= na; a++)
            if (hypot(a * px, b * py) <= reach &&
                fit_at(g, m->region, m->x + a, m->y + b) != FW_STAND_NOT)
                return true;
    return false;
}

static fw_status report_missed(const fw_place_ground *g, fw_misses *missed, fw_fault *fault)
{
    fw_miss *of = NULL;
    FW_TRY(fw_allocate((void **)&of, g->regions->count, sizeof *of, holder, fault));
    for (size_t n = 0; n < g->over_count; n++) {
        const fw_place_spot *s = &g->over[n];
        fw_miss *m = &of[s->region];
        int64_t pixels = m->pixels + 1;
        if (m->pixels == 0 || s->debt_mm > m->debt_mm)
            *m = (fw_miss){.region = s->region, .x = s->x, .y = s->y, .debt_mm = s->debt_mm};
        m->pixels = pixels;
    }
    fw_status status = FW_OK;
    for (uint32_t n = 0; status == FW_OK && n < g->regions->count; n++) {
        const fw_region *r = &g->regions->region[n];
        if (!g->held[n]) {
            fw_miss_cause cause = has_room(g, n) ? FW_MISS_NO_PATH : FW_MISS_SMALL;
            of[n] = (fw_miss){cause, n, r->pixels, r->first_x, r->first_y, INFINITY};
        } else if (of[n].pixels > 0)
            of[n].cause = fits_near(g, &of[n]) ? FW_MISS_NO_PATH : FW_MISS_NO_FACE;
        if (of[n].pixels > 0)
            status = push_miss(missed, of[n], fault);
    }
    free(of);
    return status;
}

/* ---- public ---- */

static bool all_held(const fw_place_ground *g)
{
    for (uint32_t n = 0; n < g->regions->count; n++)
        if (!g->held[n])
            return false;
    return true;
}

static fw_status place_on(fw_place_ground *g, fw_misses *missed, fw_fault *fault)
{
    FW_TRY(list_over(g, fault));
    if (g->over_count == 0 && all_held(g))
        return FW_OK;
    FW_TRY(fw_place_ground_open(g, fault));
    FW_TRY(cover_all(g, fault));
    FW_TRY(add_leftovers(g, fault));
    return report_missed(g, missed, fault);
}

fw_status fw_place_layer(const fw_place_rules *rules, fw_carried *field, const fw_runs *now,
                         const fw_regions *regions, uint8_t *held, const fw_runs *fresh,
                         fw_place_possible possible, void *context, fw_tips *out, fw_misses *missed,
                         fw_fault *fault)
{
    fw_place_ground g = {.rules = rules,
                         .screen = rules->screen,
                         .field = field,
                         .now = now,
                         .fresh = fresh,
                         .regions = regions,
                         .held = held,
                         .possible = possible,
                         .context = context,
                         .out = out,
                         .in_field = out->count};
    fw_status status = place_on(&g, missed, fault);
    fw_place_ground_close(&g);
    return status;
}
