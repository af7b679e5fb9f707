#include "physics/film_band.h"

#include "fault/memory.h"

#include <stdlib.h>

static const char holder[] = "cells of the peel film";

fw_status fw_film_band_begin(fw_film_band *band, int32_t width, int32_t block, fw_fault *fault)
{
    *band = (fw_film_band){.block = block, .columns = (width + block - 1) / block};
    size_t columns = (size_t)band->columns;
    FW_TRY(fw_allocate((void **)&band->full, columns, sizeof *band->full, holder, fault));
    FW_TRY(fw_allocate((void **)&band->skip, columns + 1, sizeof *band->skip, holder, fault));
    FW_TRY(fw_allocate((void **)&band->first, columns + 1, sizeof *band->first, holder, fault));
    return fw_allocate((void **)&band->row, (size_t)block + 1, sizeof *band->row, holder, fault);
}

void fw_film_band_free(fw_film_band *band)
{
    free(band->full);
    free(band->skip);
    free(band->first);
    free(band->segment);
    free(band->row);
    *band = (fw_film_band){0};
}

/* Marks full blocks (full = 0, else FW_FILM_NO_CELL) by counting the rows that cover them. */
static void find_full(fw_film_band *band, const fw_runs *film)
{
    int32_t *covered = band->skip; /* differences along the columns, then overwritten */
    for (int32_t c = 0; c <= band->columns; c++)
        covered[c] = 0;
    for (uint32_t i = film->row[band->y0]; i < film->row[band->y1]; i++) {
        int32_t from = (film->run[i].x0 + band->block - 1) / band->block;
        int32_t to = film->run[i].x1 / band->block;
        if (from < to) {
            covered[from]++;
            covered[to]--;
        }
    }
    int32_t rows = 0;
    for (int32_t c = 0; c < band->columns; c++) {
        rows += covered[c];
        band->full[c] = rows == band->block ? 0 : FW_FILM_NO_CELL;
    }
    band->skip[band->columns] = band->columns;
    for (int32_t c = band->columns - 1; c >= 0; c--)
        band->skip[c] = band->full[c] == FW_FILM_NO_CELL ? c : band->skip[c + 1];
}

static fw_status split_run(fw_film_band *band, fw_run run, uint32_t *count, fw_fault *fault)
{
    for (int32_t c = band->skip[run.x0 / band->block]; c * band->block < run.x1;
         c = band->skip[c + 1]) {
        int32_t left = c * band->block, right = left + band->block;
        FW_TRY(fw_grow((void **)&band->segment, &band->segment_capacity, (size_t)*count + 1,
                       sizeof *band->segment, holder, fault));
        band->segment[*count] = (fw_film_segment){run.x0 > left ? run.x0 : left,
                                                  run.x1 < right ? run.x1 : right, *count};
        (*count)++;
    }
    return FW_OK;
}

static fw_status find_segments(fw_film_band *band, const fw_runs *film, fw_fault *fault)
{
    uint32_t count = 0;
    for (int32_t y = band->y0; y < band->y1; y++) {
        band->row[y - band->y0] = count;
        for (uint32_t i = film->row[y]; i < film->row[y + 1]; i++)
            FW_TRY(split_run(band, film->run[i], &count, fault));
    }
    band->row[band->y1 - band->y0] = count;
    return FW_OK;
}

/* Root of a piece: its first segment. */
static uint32_t root_of(fw_film_segment *segment, uint32_t i)
{
    while (segment[i].cell != i) {
        segment[i].cell = segment[segment[i].cell].cell;
        i = segment[i].cell;
    }
    return i;
}

static void join(fw_film_segment *segment, uint32_t a, uint32_t b)
{
    a = root_of(segment, a);
    b = root_of(segment, b);
    if (a < b)
        segment[b].cell = a;
    else
        segment[a].cell = b;
}

/* Segments of neighbouring rows that share a column are one piece; they lie in one block, since
 * segments end at the blocks. */
static void join_rows(fw_film_band *band, int32_t row)
{
    uint32_t a = band->row[row - 1], a_end = band->row[row];
    uint32_t b = a_end, b_end = band->row[row + 1];
    while (a < a_end && b < b_end) {
        const fw_film_segment *up = &band->segment[a], *down = &band->segment[b];
        bool up_ends_first = up->x1 < down->x1;
        if (up->x0 < down->x1 && down->x0 < up->x1)
            join(band->segment, a, b);
        if (up_ends_first)
            a++;
        else
            b++;
    }
}

/* first[c] = number of the first cell of block c. */
static void count_cells(fw_film_band *band, uint32_t segments, uint32_t first_cell)
{
    for (int32_t c = 0; c < band->columns; c++)
        band->first[c + 1] = band->full[c] != FW_FILM_NO_CELL;
    for (uint32_t i = 0; i < segments; i++) {
        if (band->segment[i].cell == i)
            band->first[band->segment[i].x0 / band->block + 1]++;
    }
    band->first[0] = first_cell;
    for (int32_t c = 0; c < band->columns; c++)
        band->first[c + 1] += band->first[c];
    band->end_cell = band->first[band->columns];
}

/* Numbers the pieces block by block, within a block by their first segments. A root comes before
 * the other segments of its piece, so its number stands when they ask for it. */
static void number_cells(fw_film_band *band, uint32_t first_cell)
{
    uint32_t segments = band->row[band->y1 - band->y0];
    for (uint32_t i = 0; i < segments; i++)
        band->segment[i].cell = root_of(band->segment, i);
    count_cells(band, segments, first_cell);
    for (int32_t c = 0; c < band->columns; c++) {
        if (band->full[c] != FW_FILM_NO_CELL)
            band->full[c] = band->first[c];
    }
    for (uint32_t i = 0; i < segments; i++) {
        uint32_t root = band->segment[i].cell;
        int32_t c = band->segment[i].x0 / band->block;
        band->segment[i].cell = root == i ? band->first[c]++ : band->segment[root].cell;
    }
}

fw_status fw_film_band_fill(fw_film_band *band, const fw_runs *film, int32_t y0,
                            uint32_t first_cell, fw_fault *fault)
{
    band->y0 = y0;
    band->y1 = y0 + band->block < film->height ? y0 + band->block : film->height;
    find_full(band, film);
    FW_TRY(find_segments(band, film, fault));
    for (int32_t row = 1; row < band->y1 - band->y0; row++)
        join_rows(band, row);
    number_cells(band, first_cell);
    return FW_OK;
}

uint32_t fw_film_band_cell(const fw_film_band *band, int32_t x, int32_t y)
{
    uint32_t full = band->full[x / band->block];
    if (full != FW_FILM_NO_CELL)
        return full;
    uint32_t low = band->row[y - band->y0], high = band->row[y - band->y0 + 1] - 1;
    while (low < high) {
        uint32_t middle = low + (high - low) / 2;
        if (band->segment[middle].x1 <= x)
            low = middle + 1;
        else
            high = middle;
    }
    return band->segment[low].cell;
}
