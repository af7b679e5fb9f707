/* What the lengths of the runs alone say about a shape. */
#include "physics/film.h"

#include "fault/memory.h"

#include <stdlib.h>

enum { SHORT_RUN = 16, CLASSES = 7 }; /* blocks of 1 << 0 .. 1 << (CLASSES - 1) px */

/* Sums over the runs of one direction, lengths in px, cavities counted as film. */
typedef struct lengths {
    double cubes, sum, count;
    double below[CLASSES]; /* cubes of the runs shorter than SHORT_RUN << class */
} lengths;

static void see(lengths *all, int32_t length)
{
    double cube = (double)length * length * length;
    all->cubes += cube;
    all->sum += length;
    all->count += 1;
    for (int c = 0; c < CLASSES; c++) {
        if (length < SHORT_RUN << c)
            all->below[c] += cube;
    }
}

/* A row of film and cavities together, read span by span. */
typedef struct union_row {
    const fw_run *a, *a_end, *b, *b_end;
    fw_run span; /* the current one; x0 = INT32_MAX after the last */
} union_row;

static const fw_run *take_left(union_row *row)
{
    if (row->a == row->a_end && row->b == row->b_end)
        return NULL;
    bool from_a = row->b == row->b_end || (row->a != row->a_end && row->a->x0 < row->b->x0);
    return from_a ? row->a++ : row->b++;
}

static void next_span(union_row *row)
{
    const fw_run *run = take_left(row);
    row->span = run != NULL ? *run : (fw_run){INT32_MAX, INT32_MAX};
    while (run != NULL && ((row->a != row->a_end && row->a->x0 <= row->span.x1) ||
                           (row->b != row->b_end && row->b->x0 <= row->span.x1))) {
        run = take_left(row);
        row->span.x1 = run->x1 > row->span.x1 ? run->x1 : row->span.x1;
    }
}

static union_row row_of(const fw_film_shape *shape, int32_t y)
{
    const fw_runs *film = &shape->film, *sealed = &shape->sealed;
    union_row row = {0};
    if (y >= 0 && y < film->height) {
        row.a = film->run + film->row[y];
        row.a_end = film->run + film->row[y + 1];
    }
    if (sealed->count > 0 && y >= 0 && y < sealed->height) {
        row.b = sealed->run + sealed->row[y];
        row.b_end = sealed->run + sealed->row[y + 1];
    }
    next_span(&row);
    return row;
}

static lengths row_lengths(const fw_film_shape *shape)
{
    lengths all = {0};
    for (int32_t y = 0; y < shape->film.height; y++) {
        for (union_row row = row_of(shape, y); row.span.x0 < INT32_MAX; next_span(&row))
            see(&all, row.span.x1 - row.span.x0);
    }
    return all;
}

/* Whether span by span x is inside, and the next column where that changes. */
static bool look(union_row *row, int32_t x, int32_t *change)
{
    while (row->span.x1 <= x)
        next_span(row);
    int32_t next = row->span.x0 <= x ? row->span.x1 : row->span.x0;
    *change = next < *change ? next : *change;
    return row->span.x0 <= x;
}

/* Notes where columns begin (top[x] = y) and reports those that end between rows y - 1 and y. */
static void cross_line(const fw_film_shape *shape, int32_t y, int32_t *top, lengths *all)
{
    union_row up = row_of(shape, y - 1), down = row_of(shape, y);
    for (int32_t x = 0, to; x < shape->film.width; x = to) {
        to = shape->film.width;
        bool above = look(&up, x, &to), below = look(&down, x, &to);
        for (int32_t i = x; i < to && above != below; i++) {
            if (below)
                top[i] = y;
            else
                see(all, y - top[i]);
        }
    }
}

/* Cost: O(runs + lengths of the plate-parallel rims). False: no memory. */
static bool column_lengths(const fw_film_shape *shape, lengths *all)
{
    int32_t *top = NULL;
    *all = (lengths){0};
    if (fw_allocate((void **)&top, (size_t)shape->film.width, sizeof *top, "film bound", NULL) !=
        FW_OK)
        return false;
    for (int32_t y = 0; y <= shape->film.height; y++)
        cross_line(shape, y, top, all);
    free(top);
    return true;
}

/* The largest class of blocks that this direction allows. */
static int allowed(const lengths *all)
{
    int c = CLASSES - 1;
    while (c > 0 && all->below[c] >= 0.01 * all->cubes)
        c--;
    return c;
}

/* Crossing struts are long both ways and thin all the same: their runs alone look like plates. So
 * blocks must also stay fine against the hydraulic diameter, 4 area / perimeter: twice the width of
 * a strip, the side of a square. Every run has a rim at both ends. */
static int allowed_by_rim(const lengths *rows, const lengths *columns)
{
    const double diameter = 2 * rows->sum / (rows->count + columns->count);
    int c = CLASSES - 1;
    while (c > 0 && SHORT_RUN << c > diameter)
        c--;
    return c;
}

int32_t fw_film_choose_cell(const fw_film_shape *shape)
{
    lengths rows = row_lengths(shape), columns;
    if (!column_lengths(shape, &columns))
        return 1; /* the accurate choice; what follows will say that there is no memory */
    if (rows.count == 0)
        return 1;
    int by_rows = allowed(&rows), by_columns = allowed(&columns);
    int least = by_rows < by_columns ? by_rows : by_columns;
    int by_rim = allowed_by_rim(&rows, &columns);
    return 1 << (least < by_rim ? least : by_rim);
}

double fw_film_bound(const fw_film_shape *shape)
{
    lengths rows = row_lengths(shape), columns;
    double px = shape->px_mm, py = shape->py_mm;
    double by_rows = (rows.cubes / 12 + rows.sum / 6) * px * px * px * py;
    if (!column_lengths(shape, &columns))
        return by_rows; /* a bound, if a wider one */
    double by_columns = (columns.cubes / 12 + columns.sum / 6) * py * py * py * px;
    return by_rows < by_columns ? by_rows : by_columns;
}
