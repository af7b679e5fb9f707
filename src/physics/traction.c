#include "physics/traction.h"

#include "fault/memory.h"
#include "physics/film_grid.h"

#include <math.h>
#include <stdlib.h>

static const char holder[] = "pull of a layer";

enum { EVEN_BLOCK = 16, LARGEST_BLOCK = 64 };

double fw_traction_table_N(const fw_points *table, double area_mm2)
{
    const double(*at)[2] = table->at;
    double before[2] = {0, 0};
    for (int i = 0; i < table->count; i++) {
        if (area_mm2 <= at[i][0] || i + 1 == table->count)
            return before[1] +
                   (area_mm2 - before[0]) * (at[i][1] - before[1]) / (at[i][0] - before[0]);
        before[0] = at[i][0];
        before[1] = at[i][1];
    }
    return 0;
}

/* Blocks small enough that two to four of them make the front. */
static int32_t choose_block(const fw_film_shape *shape, const fw_traction *traction)
{
    int32_t block = EVEN_BLOCK;
    if (traction->law != FW_TRACTION_FILM)
        return block;
    const double front_px = traction->front_mm / fmax(shape->px_mm, shape->py_mm);
    for (block = 1; block < LARGEST_BLOCK && 4 * block <= front_px; block *= 2)
        continue;
    return block;
}

static fw_status cut(const fw_film_shape *shape, const fw_traction *traction, fw_film_grid *grid,
                     fw_fault *fault)
{
    bool fits = false;
    for (int32_t block = choose_block(shape, traction); !fits; block *= 2)
        FW_TRY(fw_film_grid_build(shape, block, FW_FILM_MOST_CELLS, grid, &fits, fault));
    return FW_OK;
}

static double total_mm2(const fw_film_grid *grid, double unit_mm2)
{
    double area = 0;
    for (uint32_t i = 0; i < grid->cells + grid->cavities; i++)
        area += grid->area[i] * unit_mm2;
    return area;
}

/* ---- the rim ---- */

/* Faces of one cell that are open to the vat, by direction, in columns. */
typedef struct sides {
    double left, right, up, down;
} sides;

/* Which sides belong to one wall is not known where all four are there: the longer answer is taken.
 */
static double straightened(sides s)
{
    return fmin(hypot(s.left, s.up) + hypot(s.right, s.down),
                hypot(s.left, s.down) + hypot(s.right, s.up));
}

static void add_side(sides *s, const fw_film_link *link)
{
    s->left += link->nx < 0 ? link->length : 0;
    s->right += link->nx > 0 ? link->length : 0;
    s->up += link->ny < 0 ? link->length : 0;
    s->down += link->ny > 0 ? link->length : 0;
}

/* rim[cell] = its open rim in columns; zeroed before. */
static void measure_rims(const fw_film_grid *grid, double *rim)
{
    for (size_t i = 0, end; i < grid->link_count; i = end) {
        const uint32_t cell = grid->link[i].cell;
        sides open = {0};
        for (end = i; end < grid->link_count && grid->link[end].cell == cell; end++) {
            if (grid->link[end].target == FW_FILM_VAT)
                add_side(&open, &grid->link[end]);
        }
        rim[cell] = straightened(open);
    }
}

/* The cells of a row of blocks: row[b] .. row[b + 1] - 1 of the raster order. */
static fw_status index_rows(const fw_film_grid *grid, int32_t rows, uint32_t **out, fw_fault *fault)
{
    uint32_t *row = NULL;
    FW_TRY(fw_allocate((void **)&row, (size_t)rows + 2, sizeof *row, holder, fault));
    for (uint32_t i = 0; i < grid->cells; i++)
        row[grid->block_y[i] + 1]++;
    for (int32_t b = 0; b <= rows; b++)
        row[b + 1] += row[b];
    *out = row;
    return FW_OK;
}

typedef struct spreading {
    const fw_film_grid *grid;
    const uint32_t *row;
    int32_t rows;
    double front; /* columns */
} spreading;

static bool is_near(const spreading *s, uint32_t a, uint32_t b)
{
    return a == b ||
           hypot(s->grid->x[a] - s->grid->x[b], s->grid->y[a] - s->grid->y[b]) <= s->front;
}

/* Calls for every cell within the front of cell i: adds its area (load == NULL), or gives it its
 * part of `force`. */
static double visit_front(const spreading *s, uint32_t i, double force, double *load)
{
    const fw_film_grid *grid = s->grid;
    const int32_t reach = (int32_t)(s->front / (grid->block * fmin(1, grid->ratio))) + 1;
    const int32_t first = grid->block_y[i] > reach ? grid->block_y[i] - reach : 0;
    const int32_t last =
        grid->block_y[i] + reach < s->rows ? grid->block_y[i] + reach : s->rows - 1;
    double area = 0;
    for (int32_t b = first; b <= last; b++) {
        for (uint32_t k = s->row[b]; k < s->row[b + 1]; k++) {
            if (abs(grid->block_x[k] - grid->block_x[i]) > reach || !is_near(s, i, k))
                continue;
            area += grid->area[k];
            if (load != NULL)
                load[k] += force * grid->area[k];
        }
    }
    return area;
}

/* Adds to load[cell] (N) the part of each rim, over the cells within the front of it. */
static void spread_rims(const spreading *s, const double *rim, double N_column, double *load)
{
    for (uint32_t i = 0; i < s->grid->cells; i++) {
        if (rim[i] > 0)
            (void)visit_front(s, i, rim[i] * N_column / visit_front(s, i, 0, NULL), load);
    }
}

static fw_status load_rims(const fw_film_shape *shape, const fw_film_grid *grid,
                           const fw_traction *traction, double *load, fw_fault *fault)
{
    spreading s = {.grid = grid,
                   .rows = shape->film.height / grid->block + 1,
                   .front = traction->front_mm / shape->px_mm};
    uint32_t *row = NULL;
    double *rim = NULL;
    fw_status status = fw_allocate((void **)&rim, grid->cells, sizeof *rim, holder, fault);
    if (status == FW_OK)
        status = index_rows(grid, s.rows, &row, fault);
    if (status == FW_OK) {
        s.row = row;
        measure_rims(grid, rim);
        spread_rims(&s, rim, traction->rim_N_mm * shape->px_mm, load);
    }
    free(rim);
    free(row);
    return status;
}

/* ---- the answer ---- */

/* load[node] in N, cells then cavities; zeroed before. */
static fw_status find_loads(const fw_film_shape *shape, const fw_film_grid *grid,
                            const fw_traction *traction, double *load, fw_fault *fault)
{
    const double unit = shape->px_mm * shape->px_mm;
    const uint32_t nodes = grid->cells + grid->cavities;
    const double area = total_mm2(grid, unit);
    const bool table = traction->law == FW_TRACTION_TABLE;
    const double even_MPa =
        table ? fw_traction_table_N(traction->table, area) / area : traction->area_MPa;
    for (uint32_t i = 0; i < nodes; i++)
        load[i] =
            grid->area[i] * unit * (!table && i >= grid->cells ? traction->cavity_MPa : even_MPa);
    return traction->law == FW_TRACTION_FILM ? load_rims(shape, grid, traction, load, fault)
                                             : FW_OK;
}

static void fill(const fw_film_shape *shape, const fw_film_grid *grid, const double *load,
                 fw_film_solution *out)
{
    const double px = shape->px_mm, unit = px * px;
    for (uint32_t i = 0; i < grid->cells + grid->cavities; i++) {
        const double area = grid->area[i] * unit, u = load[i] / area;
        out->integral_mm4 += load[i];
        out->moment_x_mm5 += load[i] * grid->x[i] * px;
        out->moment_y_mm5 += load[i] * grid->y[i] * px;
        out->area_mm2 += area;
        out->peak_u_mm2 = fmax(out->peak_u_mm2, u);
        if (i < grid->cells) {
            out->cell[i] = (fw_film_cell){(float)grid->x[i], (float)(grid->y[i] / grid->ratio),
                                          (float)area, (float)u};
        } else {
            out->cavity_u_mm2[i - grid->cells] = u;
            out->cavity_area_mm2[i - grid->cells] = area;
        }
    }
    out->tangent_mm4 = out->integral_mm4;
    out->cell_px = grid->block;
    out->unknowns = grid->cells + grid->cavities;
}

static fw_status answer(const fw_film_shape *shape, const fw_film_grid *grid,
                        const fw_traction *traction, fw_film_solution *out, fw_fault *fault)
{
    double *load = NULL;
    out->cell_count = grid->cells;
    out->cavity_count = grid->cavities;
    FW_TRY(fw_allocate((void **)&out->cell, grid->cells, sizeof *out->cell, holder, fault));
    FW_TRY(fw_allocate((void **)&out->cavity_u_mm2, grid->cavities, sizeof(double), holder, fault));
    FW_TRY(
        fw_allocate((void **)&out->cavity_area_mm2, grid->cavities, sizeof(double), holder, fault));
    FW_TRY(fw_allocate((void **)&load, (size_t)grid->cells + grid->cavities, sizeof *load, holder,
                       fault));
    const fw_status status = find_loads(shape, grid, traction, load, fault);
    if (status == FW_OK)
        fill(shape, grid, load, out);
    free(load);
    return status;
}

fw_status fw_traction_solve(const fw_film_shape *shape, const fw_traction *traction,
                            fw_film_solution *out, fw_fault *fault)
{
    fw_film_grid grid = {0};
    *out = (fw_film_solution){0};
    FW_TRY(cut(shape, traction, &grid, fault));
    const fw_status status = answer(shape, &grid, traction, out, fault);
    fw_film_grid_free(&grid);
    if (status != FW_OK)
        fw_film_solution_free(out);
    return status;
}
