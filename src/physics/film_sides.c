#include "physics/film_sides.h"

#include "fault/memory.h"

#include <stdlib.h>

static const char holder[] = "cells of the peel film";

/* Stable counting sort by cell. start: [cells + 1], zeroed. */
static void sort_by_cell(const fw_film_grid *grid, uint32_t *start, fw_film_link *sorted)
{
    for (size_t i = 0; i < grid->link_count; i++)
        start[grid->link[i].cell + 1]++;
    for (uint32_t c = 0; c < grid->cells; c++)
        start[c + 1] += start[c];
    for (size_t i = 0; i < grid->link_count; i++)
        sorted[start[grid->link[i].cell]++] = grid->link[i];
}

static bool same_side(const fw_film_link *a, const fw_film_link *b)
{
    return a->target == b->target && a->nx == b->nx && a->ny == b->ny;
}

/* Adds one face to the sides of its cell, which begin at `from`; distance holds length times
 * distance until the cell is complete. */
static void gather(fw_film_grid *grid, size_t from, const fw_film_link *face)
{
    double moment = face->length * face->distance;
    for (size_t i = from; i < grid->link_count; i++) {
        if (same_side(&grid->link[i], face)) {
            grid->link[i].length += face->length;
            grid->link[i].distance += moment;
            return;
        }
    }
    grid->link[grid->link_count] = *face;
    grid->link[grid->link_count++].distance = moment;
}

/* The factor on both distances of a slanted wall: see film_sides.h. */
static double slant_factor(const fw_film_link *a, const fw_film_link *b)
{
    double apart = a->length / a->distance + b->length / b->distance;
    double together = (a->length * a->length + b->length * b->length) /
                      (a->length * a->distance + b->length * b->distance);
    return together < apart ? apart / (0.5 * (apart + together)) : 1;
}

/* The only other side of the cell toward the same target; NULL where there is none or several. */
static fw_film_link *partner(fw_film_grid *grid, size_t from, const fw_film_link *side)
{
    fw_film_link *found = NULL;
    for (size_t k = from; k < grid->link_count; k++) {
        fw_film_link *other = &grid->link[k];
        if (other == side || other->target != side->target)
            continue;
        if (found != NULL)
            return NULL;
        found = other;
    }
    return found;
}

static void soften_slants(fw_film_grid *grid, size_t from)
{
    for (size_t i = from; i < grid->link_count; i++) {
        fw_film_link *side = &grid->link[i], *other = partner(grid, from, side);
        bool square = other != NULL && side->nx * other->nx + side->ny * other->ny == 0;
        if (!square || other < side)
            continue;
        double factor = slant_factor(side, other);
        side->distance *= factor;
        other->distance *= factor;
    }
}

/* A piece that bends round a gap may have its centroid behind the wall: no distance falls below
 * half a pixel, that of a piece one pixel wide. */
static void finish_cell(fw_film_grid *grid, size_t from)
{
    for (size_t i = from; i < grid->link_count; i++) {
        fw_film_link *side = &grid->link[i];
        double least = side->nx != 0 ? 0.5 : 0.5 * grid->ratio;
        side->distance /= side->length;
        if (side->distance < least)
            side->distance = least;
    }
    if (grid->block > 1)
        soften_slants(grid, from);
}

fw_status fw_film_sides_merge(fw_film_grid *grid, fw_fault *fault)
{
    uint32_t *start = NULL;
    fw_film_link *sorted = NULL;
    fw_status status =
        fw_allocate((void **)&start, (size_t)grid->cells + 2, sizeof *start, holder, fault);
    if (status == FW_OK)
        status = fw_allocate((void **)&sorted, grid->link_count, sizeof *sorted, holder, fault);
    if (status == FW_OK) {
        sort_by_cell(grid, start, sorted);
        size_t faces = grid->link_count, i = 0;
        grid->link_count = 0;
        while (i < faces) {
            size_t from = grid->link_count;
            uint32_t cell = sorted[i].cell;
            for (; i < faces && sorted[i].cell == cell; i++)
                gather(grid, from, &sorted[i]);
            finish_cell(grid, from);
        }
    }
    free(start);
    free(sorted);
    return status;
}
