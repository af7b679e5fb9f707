#include "physics/film_grid.h"

#include "fault/memory.h"
#include "physics/film_band.h"
#include "physics/film_sides.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "cells of the peel film";

/* Everything that one pass over the rows needs. */
typedef struct cutter {
    const fw_film_shape *shape;
    fw_film_grid *grid;
    fw_film_band now, before; /* the band of the current row, and the one above it */
    fw_fault *fault;
} cutter;

double fw_film_grid_factor(fw_film_plane plane, double x, double y)
{
    return 1 + plane.at + plane.per_x_px * x + plane.per_y_px * y;
}

void fw_film_grid_free(fw_film_grid *grid)
{
    free(grid->area);
    free(grid->x);
    free(grid->y);
    free(grid->block_x);
    free(grid->block_y);
    free(grid->face);
    free(grid->link);
    *grid = (fw_film_grid){0};
}

void fw_film_grid_drop_faces(fw_film_grid *grid)
{
    free(grid->face);
    grid->face = NULL;
    grid->face_count = grid->face_capacity = 0;
}

void fw_film_grid_drop_links(fw_film_grid *grid)
{
    free(grid->link);
    grid->link = NULL;
    grid->link_count = grid->link_capacity = 0;
}

static fw_status grow_nodes(fw_film_grid *grid, size_t need, fw_fault *fault)
{
    size_t *capacity = grid->node_capacity;
    FW_TRY(fw_grow((void **)&grid->area, &capacity[0], need, sizeof(double), holder, fault));
    FW_TRY(fw_grow((void **)&grid->x, &capacity[1], need, sizeof(double), holder, fault));
    FW_TRY(fw_grow((void **)&grid->y, &capacity[2], need, sizeof(double), holder, fault));
    FW_TRY(fw_grow((void **)&grid->block_x, &capacity[3], need, sizeof(int32_t), holder, fault));
    return fw_grow((void **)&grid->block_y, &capacity[4], need, sizeof(int32_t), holder, fault);
}

static void clear_nodes(fw_film_grid *grid, uint32_t from, uint32_t to)
{
    for (uint32_t i = from; i < to; i++) {
        grid->area[i] = grid->x[i] = grid->y[i] = 0;
        grid->block_x[i] = grid->block_y[i] = 0;
    }
}

/* Adds `pixels` in a row to a node: here x, y are still moments. */
static void add_pixels(fw_film_grid *grid, uint32_t node, double pixels, double x, double y)
{
    grid->area[node] += pixels * grid->ratio;
    grid->x[node] += pixels * grid->ratio * x;
    grid->y[node] += pixels * grid->ratio * y;
}

static void centre_nodes(fw_film_grid *grid, uint32_t from, uint32_t to)
{
    for (uint32_t i = from; i < to; i++) {
        grid->x[i] /= grid->area[i];
        grid->y[i] /= grid->area[i];
    }
}

static void measure_full(const cutter *cut)
{
    const fw_film_band *band = &cut->now;
    fw_film_grid *grid = cut->grid;
    double q = band->block;
    for (int32_t c = 0; c < band->columns; c++) {
        if (band->full[c] == FW_FILM_NO_CELL)
            continue;
        add_pixels(grid, band->full[c], q * q, (c + 0.5) * q, (band->y0 + 0.5 * q) * grid->ratio);
        grid->block_x[band->full[c]] = c;
    }
}

/* Areas, centroids and blocks of the cells of the band. */
static fw_status measure_cells(const cutter *cut)
{
    const fw_film_band *band = &cut->now;
    fw_film_grid *grid = cut->grid;
    FW_TRY(grow_nodes(grid, (size_t)band->end_cell + 1, cut->fault));
    clear_nodes(grid, grid->cells, band->end_cell);
    measure_full(cut);
    for (int32_t y = band->y0; y < band->y1; y++) {
        for (uint32_t i = band->row[y - band->y0]; i < band->row[y - band->y0 + 1]; i++) {
            const fw_film_segment *s = &band->segment[i];
            add_pixels(grid, s->cell, s->x1 - s->x0, 0.5 * (s->x0 + s->x1),
                       (y + 0.5) * grid->ratio);
            grid->block_x[s->cell] = s->x0 / band->block;
        }
    }
    for (uint32_t i = grid->cells; i < band->end_cell; i++)
        grid->block_y[i] = band->y0 / band->block;
    centre_nodes(grid, grid->cells, band->end_cell);
    grid->cells = band->end_cell;
    return FW_OK;
}

static fw_status add_face(const cutter *cut, uint32_t a, uint32_t b, double length)
{
    fw_film_grid *grid = cut->grid;
    FW_TRY(fw_grow((void **)&grid->face, &grid->face_capacity, grid->face_count + 1,
                   sizeof *grid->face, holder, cut->fault));
    grid->face[grid->face_count++] = (fw_film_face){a, b, length};
    return FW_OK;
}

/* A side of `length` whose middle lies at (x, y). target: a body, or FW_FILM_VAT; the nodes of
 * the bodies are numbered when the cells are counted. */
static fw_status add_link(const cutter *cut, fw_film_link link, double x, double y)
{
    fw_film_grid *grid = cut->grid;
    FW_TRY(fw_grow((void **)&grid->link, &grid->link_capacity, grid->link_count + 1,
                   sizeof *grid->link, holder, cut->fault));
    link.distance = link.nx * (x - grid->x[link.cell]) + link.ny * (y - grid->y[link.cell]);
    grid->link[grid->link_count++] = link;
    return FW_OK;
}

/* What lies at (x, y), a pixel without film: a body or the vat, and up to which column it goes on
 * (at most `to`). */
static uint32_t beyond(const fw_film_shape *shape, int32_t x, int32_t y, int32_t *to)
{
    if (y < 0 || y >= shape->sealed.height)
        return FW_FILM_VAT;
    const fw_runs *sealed = &shape->sealed;
    uint32_t low = sealed->row[y], high = sealed->row[y + 1];
    while (low < high) {
        uint32_t middle = low + (high - low) / 2;
        if (sealed->run[middle].x1 <= x)
            low = middle + 1;
        else
            high = middle;
    }
    if (low == sealed->row[y + 1])
        return FW_FILM_VAT;
    bool inside = sealed->run[low].x0 <= x;
    int32_t end = inside ? sealed->run[low].x1 : sealed->run[low].x0;
    *to = end < *to ? end : *to;
    return inside ? shape->cavity[low] : FW_FILM_VAT;
}

static fw_status add_side(const cutter *cut, uint32_t cell, int32_t x, int32_t y, double nx)
{
    int32_t outside = nx < 0 ? x - 1 : x, to = outside + 1;
    fw_film_link link = {.cell = cell, .nx = nx, .length = cut->grid->ratio};
    link.target = beyond(cut->shape, outside, y, &to);
    return add_link(cut, link, x, (y + 0.5) * cut->grid->ratio);
}

/* Faces between the cells that a run passes, and the two sides at its ends. */
static fw_status cut_run(const cutter *cut, fw_run run, int32_t y)
{
    const fw_film_band *band = &cut->now;
    uint32_t cell = fw_film_band_cell(band, run.x0, y);
    FW_TRY(add_side(cut, cell, run.x0, y, -1));
    int32_t c = run.x0 / band->block;
    for (;;) {
        if (band->skip[c] > c) { /* faces inside a row of full blocks are made once a band */
            c = band->skip[c];
            cell = band->full[c - 1];
        } else {
            c++;
        }
        if (c * band->block >= run.x1)
            break;
        uint32_t next = fw_film_band_cell(band, c * band->block, y);
        FW_TRY(add_face(cut, cell, next, cut->grid->ratio));
        cell = next;
    }
    return add_side(cut, cell, run.x1, y, 1);
}

static fw_status join_full(const cutter *cut)
{
    const fw_film_band *band = &cut->now;
    for (int32_t c = 1; c < band->columns; c++) {
        if (band->full[c - 1] != FW_FILM_NO_CELL && band->full[c] != FW_FILM_NO_CELL)
            FW_TRY(add_face(cut, band->full[c - 1], band->full[c], band->block * cut->grid->ratio));
    }
    return FW_OK;
}

static const fw_film_band *band_of(const cutter *cut, int32_t y)
{
    return y >= cut->now.y0 ? &cut->now : &cut->before;
}

/* Sides of film pixels [x0, x1) of row y toward the row at y + step, where there is no film. */
static fw_status add_ledge(const cutter *cut, int32_t x0, int32_t x1, int32_t y, int32_t step)
{
    const fw_film_band *band = band_of(cut, y);
    double wall_y = (step < 0 ? y : y + 1) * cut->grid->ratio;
    while (x0 < x1) {
        int32_t block_end = (x0 / band->block + 1) * band->block;
        int32_t to = block_end < x1 ? block_end : x1;
        fw_film_link link = {.cell = fw_film_band_cell(band, x0, y), .ny = step};
        link.target = beyond(cut->shape, x0, y + step, &to);
        link.length = to - x0;
        FW_TRY(add_link(cut, link, 0.5 * (x0 + to), wall_y));
        x0 = to;
    }
    return FW_OK;
}

/* Faces through the line between row y - 1 and row y over columns [x0, x1), film on both sides. */
static fw_status add_crossing(const cutter *cut, int32_t x0, int32_t x1, int32_t y)
{
    if (y != cut->now.y0)
        return FW_OK;
    while (x0 < x1) {
        int32_t block_end = (x0 / cut->now.block + 1) * cut->now.block;
        int32_t to = block_end < x1 ? block_end : x1;
        FW_TRY(add_face(cut, fw_film_band_cell(&cut->before, x0, y - 1),
                        fw_film_band_cell(&cut->now, x0, y), to - x0));
        x0 = to;
    }
    return FW_OK;
}

typedef struct cursor {
    const fw_runs *film;
    uint32_t i, end;
} cursor;

static cursor cursor_at(const fw_runs *film, int32_t y)
{
    if (y < 0 || y >= film->height)
        return (cursor){film, 0, 0};
    return (cursor){film, film->row[y], film->row[y + 1]};
}

/* Whether there is film at x, and the next column after x where that changes. */
static bool look(cursor *row, int32_t x, int32_t *change)
{
    while (row->i < row->end && row->film->run[row->i].x1 <= x)
        row->i++;
    if (row->i == row->end)
        return false;
    fw_run run = row->film->run[row->i];
    int32_t next = run.x0 <= x ? run.x1 : run.x0;
    *change = next < *change ? next : *change;
    return run.x0 <= x;
}

/* The line between row y - 1 and row y. */
static fw_status cut_line(const cutter *cut, int32_t y)
{
    const fw_runs *film = &cut->shape->film;
    cursor up = cursor_at(film, y - 1), down = cursor_at(film, y);
    for (int32_t x = 0, to; x < film->width; x = to) {
        to = film->width;
        bool above = look(&up, x, &to), below = look(&down, x, &to);
        if (above && below)
            FW_TRY(add_crossing(cut, x, to, y));
        else if (above)
            FW_TRY(add_ledge(cut, x, to, y - 1, 1));
        else if (below)
            FW_TRY(add_ledge(cut, x, to, y, -1));
    }
    return FW_OK;
}

static fw_status cut_band(cutter *cut, int32_t y0)
{
    const fw_runs *film = &cut->shape->film;
    fw_film_band swap = cut->before;
    cut->before = cut->now;
    cut->now = swap;
    FW_TRY(fw_film_band_fill(&cut->now, film, y0, cut->grid->cells, cut->fault));
    FW_TRY(measure_cells(cut));
    FW_TRY(join_full(cut));
    for (int32_t y = cut->now.y0; y < cut->now.y1; y++) {
        for (uint32_t i = film->row[y]; i < film->row[y + 1]; i++)
            FW_TRY(cut_run(cut, film->run[i], y));
        FW_TRY(cut_line(cut, y));
    }
    if (cut->now.y1 == film->height)
        FW_TRY(cut_line(cut, film->height));
    return FW_OK;
}

/* Nodes of the cavities: after the cells. */
static fw_status add_cavities(const cutter *cut)
{
    const fw_film_shape *shape = cut->shape;
    fw_film_grid *grid = cut->grid;
    uint32_t nodes = grid->cells + shape->cavity_count;
    FW_TRY(grow_nodes(grid, (size_t)nodes + 1, cut->fault));
    clear_nodes(grid, grid->cells, nodes);
    for (int32_t y = 0; y < shape->sealed.height; y++) {
        for (uint32_t i = shape->sealed.row[y]; i < shape->sealed.row[y + 1]; i++) {
            fw_run run = shape->sealed.run[i];
            add_pixels(grid, grid->cells + shape->cavity[i], run.x1 - run.x0,
                       0.5 * (run.x0 + run.x1), (y + 0.5) * grid->ratio);
        }
    }
    centre_nodes(grid, grid->cells, nodes);
    for (uint32_t i = grid->cells; i < nodes; i++) {
        grid->block_x[i] = (int32_t)(grid->x[i] / grid->block);
        grid->block_y[i] = (int32_t)(grid->y[i] / (grid->block * grid->ratio));
    }
    grid->cavities = shape->cavity_count;
    for (size_t i = 0; i < grid->link_count; i++) {
        if (grid->link[i].target != FW_FILM_VAT)
            grid->link[i].target += grid->cells;
    }
    return FW_OK;
}

static fw_status cut_all(cutter *cut, uint32_t most, bool *fits)
{
    const fw_runs *film = &cut->shape->film;
    FW_TRY(fw_film_band_begin(&cut->now, film->width, cut->grid->block, cut->fault));
    FW_TRY(fw_film_band_begin(&cut->before, film->width, cut->grid->block, cut->fault));
    for (int32_t y0 = 0; y0 < film->height && cut->grid->cells <= most; y0 += cut->grid->block)
        FW_TRY(cut_band(cut, y0));
    *fits = cut->grid->cells <= most;
    if (!*fits)
        return FW_OK;
    FW_TRY(add_cavities(cut));
    return fw_film_sides_merge(cut->grid, cut->fault);
}

fw_status fw_film_grid_build(const fw_film_shape *shape, int32_t block, uint32_t most,
                             fw_film_grid *out, bool *fits, fw_fault *fault)
{
    *out = (fw_film_grid){.block = block,
                          .ratio = shape->py_mm / shape->px_mm,
                          .faster = shape->faster,
                          .wider = shape->wider};
    out->faster.per_y_px /= out->ratio;
    out->wider.per_y_px /= out->ratio;
    cutter cut = {.shape = shape, .grid = out, .fault = fault};
    *fits = false;
    fw_status status = cut_all(&cut, most, fits);
    fw_film_band_free(&cut.now);
    fw_film_band_free(&cut.before);
    if (status != FW_OK || !*fits)
        fw_film_grid_free(out);
    return status;
}
