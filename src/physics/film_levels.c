#include "physics/film_levels.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char holder[] = "grids of the peel film";

static fw_status numbers(double **out, size_t count, fw_fault *fault)
{
    return fw_allocate((void **)out, count, sizeof(double), holder, fault);
}

static fw_status indices(uint32_t **out, size_t count, fw_fault *fault)
{
    return fw_allocate((void **)out, count, sizeof(uint32_t), holder, fault);
}

/* What every level has of its own; the finest takes its nodes from the grid. */
static fw_status allocate_nodes(fw_film_level *level, fw_fault *fault)
{
    size_t n = level->nodes;
    double **array[] = {&level->wall, &level->source, &level->inverse, &level->rest};
    for (size_t i = 0; i < sizeof array / sizeof *array; i++)
        FW_TRY(numbers(array[i], n, fault));
    FW_TRY(indices(&level->row, n + 1, fault));
    FW_TRY(indices(&level->coarse_node, n, fault));
    return fw_allocate((void **)&level->cavity, n, sizeof *level->cavity, holder, fault);
}

static fw_status allocate_coarser(fw_film_level *level, fw_fault *fault)
{
    size_t n = level->nodes;
    double **array[] = {&level->x, &level->y, &level->area, &level->solution, &level->load};
    FW_TRY(allocate_nodes(level, fault));
    for (size_t i = 0; i < sizeof array / sizeof *array; i++)
        FW_TRY(numbers(array[i], n, fault));
    FW_TRY(fw_allocate((void **)&level->block_x, n, sizeof *level->block_x, holder, fault));
    return fw_allocate((void **)&level->block_y, n, sizeof *level->block_y, holder, fault);
}

static fw_status allocate_entries(fw_film_level *level, size_t entries, fw_fault *fault)
{
    FW_TRY(indices(&level->col, entries, fault));
    return numbers(&level->conductance, entries, fault);
}

static void free_level(fw_film_level *level)
{
    void *array[] = {level->row,
                     level->col,
                     level->conductance,
                     level->wall,
                     level->source,
                     level->x,
                     level->y,
                     level->area,
                     level->block_x,
                     level->block_y,
                     level->cavity,
                     level->coarse_node,
                     level->coarse_entry,
                     level->entry_factor,
                     level->wall_factor,
                     level->cut_wall,
                     level->cut_to_held,
                     level->inverse,
                     level->solution,
                     level->load,
                     level->rest,
                     level->cut_conductance};
    for (size_t i = 0; i < sizeof array / sizeof *array; i++)
        free(array[i]);
    *level = (fw_film_level){0};
}

void fw_film_levels_free(fw_film_levels *levels)
{
    for (uint32_t l = 0; l < levels->count; l++)
        free_level(&levels->level[l]);
    levels->count = 0;
}

/* ---- the finest level ---- */

static double speed_at(const fw_film_grid *grid, const fw_film_level *level, uint32_t i)
{
    return fw_film_grid_factor(grid->faster, level->x[i], level->y[i]);
}

/* What the gap at (x, y) does to a flux: its third power. */
static double mobility_at(const fw_film_grid *grid, double x, double y)
{
    const double gap = fw_film_grid_factor(grid->wider, x, y);
    return gap * gap * gap;
}

static void take_nodes(fw_film_grid *grid, fw_film_level *level)
{
    level->area = grid->area;
    level->x = grid->x;
    level->y = grid->y;
    level->block_x = grid->block_x;
    level->block_y = grid->block_y;
    grid->area = grid->x = grid->y = NULL;
    grid->block_x = grid->block_y = NULL;
    for (uint32_t i = 0; i < level->nodes; i++) {
        level->source[i] = level->area[i] * speed_at(grid, level, i);
        level->cavity[i] = i >= grid->cells;
    }
}

/* The part of the source that moves from a cell to its sides (see film_grid.h). */
static void shift_source(const fw_film_grid *grid, fw_film_level *level)
{
    double share = 2.0 / 3.0 * (1.0 - 1.0 / ((double)grid->block * grid->block));
    for (size_t i = 0, end; i < grid->link_count; i = end) {
        uint32_t cell = grid->link[i].cell;
        double sum = 0;
        for (end = i; end < grid->link_count && grid->link[end].cell == cell; end++)
            sum += grid->link[end].length * grid->link[end].distance;
        double scale = sum > level->area[cell] ? share * level->area[cell] / sum : share;
        scale *= speed_at(grid, level, cell);
        level->source[cell] -= scale * sum;
        for (size_t k = i; k < end; k++) {
            if (grid->link[k].target != FW_FILM_VAT)
                level->source[grid->link[k].target] +=
                    scale * grid->link[k].length * grid->link[k].distance;
        }
    }
}

static void put(fw_film_level *level, uint32_t *cursor, uint32_t a, uint32_t b, double value)
{
    level->col[cursor[a]] = b;
    level->conductance[cursor[a]++] = value;
    level->col[cursor[b]] = a;
    level->conductance[cursor[b]++] = value;
}

/* Adds up entries of a row that name the same column. seen: [nodes], any content below `base`. */
static void merge_rows(fw_film_level *level, uint32_t *seen)
{
    for (uint32_t i = 0; i < level->nodes; i++)
        seen[i] = UINT32_MAX;
    uint32_t kept = 0, from = 0;
    for (uint32_t i = 0; i < level->nodes; i++) {
        uint32_t begin = kept, to = level->row[i + 1];
        for (uint32_t e = from; e < to; e++) {
            uint32_t j = level->col[e];
            if (seen[j] != UINT32_MAX && seen[j] >= begin && seen[j] < kept) {
                level->conductance[seen[j]] += level->conductance[e];
                continue;
            }
            seen[j] = kept;
            level->col[kept] = j;
            level->conductance[kept++] = level->conductance[e];
        }
        from = to;
        level->row[i + 1] = kept;
    }
}

static double between(const double *x, const double *y, uint32_t a, uint32_t b)
{
    return hypot(x[a] - x[b], y[a] - y[b]);
}

static void count_entries(const fw_film_grid *grid, fw_film_level *level)
{
    for (size_t i = 0; i < grid->face_count; i++) {
        level->row[grid->face[i].a + 1]++;
        level->row[grid->face[i].b + 1]++;
    }
    for (size_t i = 0; i < grid->link_count; i++) {
        if (grid->link[i].target != FW_FILM_VAT) {
            level->row[grid->link[i].cell + 1]++;
            level->row[grid->link[i].target + 1]++;
        }
    }
    for (uint32_t i = 0; i < level->nodes; i++)
        level->row[i + 1] += level->row[i];
}

static void fill_entries(const fw_film_grid *grid, fw_film_level *level, uint32_t *cursor)
{
    memcpy(cursor, level->row, level->nodes * sizeof *cursor);
    for (size_t i = 0; i < grid->face_count; i++) {
        fw_film_face face = grid->face[i];
        const double mobility = mobility_at(grid, 0.5 * (level->x[face.a] + level->x[face.b]),
                                            0.5 * (level->y[face.a] + level->y[face.b]));
        put(level, cursor, face.a, face.b,
            mobility * face.length / between(level->x, level->y, face.a, face.b));
    }
    for (size_t i = 0; i < grid->link_count; i++) {
        fw_film_link side = grid->link[i];
        if (side.target == FW_FILM_VAT)
            level->wall[side.cell] += side.length / side.distance;
        else
            put(level, cursor, side.cell, side.target, side.length / side.distance);
    }
}

/* From here on a side is as long as a wider gap makes it. */
static void widen_sides(fw_film_grid *grid, const fw_film_level *level)
{
    for (size_t i = 0; i < grid->link_count; i++) {
        fw_film_link *side = &grid->link[i];
        side->length *= mobility_at(grid, level->x[side->cell] + 0.5 * side->nx * side->distance,
                                    level->y[side->cell] + 0.5 * side->ny * side->distance);
    }
}

static fw_status build_finest(fw_film_grid *grid, fw_film_level *level, fw_fault *fault)
{
    level->nodes = grid->cells + grid->cavities;
    FW_TRY(allocate_nodes(level, fault));
    take_nodes(grid, level);
    shift_source(grid, level);
    widen_sides(grid, level);
    count_entries(grid, level);
    FW_TRY(allocate_entries(level, level->row[level->nodes], fault));
    fill_entries(grid, level, level->coarse_node); /* free until the next level is made */
    merge_rows(level, level->coarse_node);
    fw_film_grid_drop_faces(grid);
    return FW_OK;
}

/* ---- coarser levels ---- */

static uint32_t root_of(uint32_t *parent, uint32_t i)
{
    while (parent[i] != i) {
        parent[i] = parent[parent[i]];
        i = parent[i];
    }
    return i;
}

static bool may_join(const fw_film_level *fine, bool joint, uint32_t a, uint32_t b)
{
    return (joint || (!fine->cavity[a] && !fine->cavity[b])) &&
           fine->block_x[a] / 2 == fine->block_x[b] / 2 &&
           fine->block_y[a] / 2 == fine->block_y[b] / 2;
}

/* Numbers the groups of nodes that touch within 2 x 2 blocks, by their first nodes. */
static uint32_t group_nodes(fw_film_level *fine, bool joint)
{
    uint32_t *parent = fine->coarse_node, groups = 0;
    for (uint32_t i = 0; i < fine->nodes; i++)
        parent[i] = i;
    for (uint32_t i = 0; i < fine->nodes; i++) {
        for (uint32_t e = fine->row[i]; e < fine->row[i + 1]; e++) {
            uint32_t j = fine->col[e];
            if (j > i && may_join(fine, joint, i, j)) {
                uint32_t a = root_of(parent, i), b = root_of(parent, j);
                parent[a < b ? b : a] = a < b ? a : b;
            }
        }
    }
    for (uint32_t i = 0; i < fine->nodes; i++)
        parent[i] = root_of(parent, i);
    for (uint32_t i = 0; i < fine->nodes; i++)
        parent[i] = parent[i] == i ? groups++ : parent[parent[i]];
    return groups;
}

/* A coarse wall is the sum of the fine ones for now. */
static void gather_nodes(const fw_film_level *fine, fw_film_level *coarse)
{
    for (uint32_t i = 0; i < fine->nodes; i++) {
        uint32_t c = fine->coarse_node[i];
        coarse->area[c] += fine->area[i];
        coarse->x[c] += fine->area[i] * fine->x[i];
        coarse->y[c] += fine->area[i] * fine->y[i];
        coarse->source[c] += fine->source[i];
        coarse->wall[c] += coarse->joint ? fine->wall[i] : 0;
        coarse->block_x[c] = fine->block_x[i] / 2;
        coarse->block_y[c] = fine->block_y[i] / 2;
        coarse->cavity[c] = !coarse->joint && fine->cavity[i];
    }
    for (uint32_t c = 0; c < coarse->nodes; c++) {
        coarse->x[c] /= coarse->area[c];
        coarse->y[c] /= coarse->area[c];
    }
}

/* Scratch of the passage from one level to the next. */
typedef struct gathering {
    uint32_t *start, *member; /* see list_members */
    uint32_t *seen;           /* [coarse] entry of the row at hand */
} gathering;

/* member[start[c]] .. are the fine nodes of coarse node c. start: [coarse + 1], zeroed. */
static void list_members(const fw_film_level *fine, uint32_t coarse_nodes, uint32_t *start,
                         uint32_t *member)
{
    for (uint32_t i = 0; i < fine->nodes; i++)
        start[fine->coarse_node[i] + 1]++;
    for (uint32_t c = 0; c < coarse_nodes; c++)
        start[c + 1] += start[c];
    for (uint32_t i = 0; i < fine->nodes; i++)
        member[start[fine->coarse_node[i]]++] = i;
    for (uint32_t c = coarse_nodes; c > 0; c--)
        start[c] = start[c - 1];
    start[0] = 0;
}

/* Makes row c of the coarse matrix: sum gets the sum of the fine conductances, conductance the sum
 * of conductance times distance. */
static void gather_row(const fw_film_level *fine, fw_film_level *coarse, uint32_t c,
                       const gathering *by, double *sum)
{
    uint32_t begin = coarse->row[c], end = begin, *seen = by->seen;
    for (uint32_t m = by->start[c]; m < by->start[c + 1]; m++) {
        uint32_t i = by->member[m];
        for (uint32_t e = fine->row[i]; e < fine->row[i + 1]; e++) {
            uint32_t to = fine->coarse_node[fine->col[e]];
            if (to == c)
                continue;
            if (seen[to] == UINT32_MAX || seen[to] < begin) {
                seen[to] = end;
                coarse->col[end] = to;
                sum[end] = coarse->conductance[end] = 0;
                end++;
            }
            sum[seen[to]] += fine->conductance[e];
            coarse->conductance[seen[to]] +=
                fine->conductance[e] * between(fine->x, fine->y, i, fine->col[e]);
        }
    }
    coarse->row[c + 1] = end;
}

static double held_within(double value, double low, double high)
{
    return value < low ? low : value > high ? high : value;
}

/* Conductances between cells from the coarse geometry; on a joint level one half of the sum, the
 * value for blocks of a regular network; to cavities zero, the sides are added later. */
static void set_conductances(fw_film_level *coarse, const double *sum)
{
    for (uint32_t c = 0; c < coarse->nodes; c++) {
        for (uint32_t e = coarse->row[c]; e < coarse->row[c + 1]; e++) {
            uint32_t to = coarse->col[e];
            double *value = &coarse->conductance[e];
            if (coarse->joint)
                *value = 0.5 * sum[e];
            else if (coarse->cavity[c] || coarse->cavity[to])
                *value = 0;
            else
                *value = held_within(*value / between(coarse->x, coarse->y, c, to), 0.5 * sum[e],
                                     sum[e]);
        }
    }
}

uint32_t fw_film_level_entry(const fw_film_level *level, uint32_t i, uint32_t j)
{
    uint32_t e = level->row[i];
    while (level->col[e] != j)
        e++;
    return e;
}

/* Moves the sides of the cells to the coarse ones, with the distances to the new centroids. */
static void move_sides(fw_film_grid *grid, const fw_film_level *fine, fw_film_level *coarse)
{
    for (size_t i = 0; i < grid->link_count; i++) {
        fw_film_link *side = &grid->link[i];
        uint32_t from = side->cell, to = fine->coarse_node[from];
        double moved =
            side->nx * (fine->x[from] - coarse->x[to]) + side->ny * (fine->y[from] - coarse->y[to]);
        side->distance = held_within(side->distance + moved, side->distance, 2 * side->distance);
        side->cell = to;
        if (side->target == FW_FILM_VAT) {
            coarse->wall[to] += side->length / side->distance;
            continue;
        }
        side->target = fine->coarse_node[side->target];
        coarse->conductance[fw_film_level_entry(coarse, to, side->target)] +=
            side->length / side->distance;
    }
    for (uint32_t c = 0; c < coarse->nodes; c++) {
        if (!coarse->cavity[c])
            continue;
        for (uint32_t e = coarse->row[c]; e < coarse->row[c + 1]; e++)
            coarse->conductance[e] =
                coarse->conductance[fw_film_level_entry(coarse, coarse->col[e], c)];
    }
}

static fw_status build_coarser(fw_film_grid *grid, const fw_film_level *fine, fw_film_level *coarse,
                               const gathering *by, fw_fault *fault)
{
    double *sum = NULL;
    FW_TRY(allocate_coarser(coarse, fault));
    FW_TRY(allocate_entries(coarse, fine->row[fine->nodes], fault));
    FW_TRY(numbers(&sum, fine->row[fine->nodes], fault));
    gather_nodes(fine, coarse);
    memset(by->start, 0, ((size_t)coarse->nodes + 1) * sizeof *by->start);
    memset(by->seen, 0xff, coarse->nodes * sizeof *by->seen);
    list_members(fine, coarse->nodes, by->start, by->member);
    for (uint32_t c = 0; c < coarse->nodes; c++)
        gather_row(fine, coarse, c, by, sum);
    set_conductances(coarse, sum);
    free(sum);
    if (!coarse->joint)
        move_sides(grid, fine, coarse);
    return FW_OK;
}

static bool one_block(const fw_film_level *level)
{
    for (uint32_t i = 0; i < level->nodes; i++) {
        if (level->block_x[i] != 0 || level->block_y[i] != 0)
            return false;
    }
    return true;
}

static bool want_joint(const fw_film_level *fine)
{
    uint32_t cavities = 0;
    for (uint32_t i = 0; i < fine->nodes; i++)
        cavities += fine->cavity[i];
    return fine->joint || fine->nodes < 3 * cavities;
}

static fw_status build_all(fw_film_grid *grid, fw_film_levels *out, const gathering *by,
                           fw_fault *fault)
{
    while (out->count < FW_FILM_LEVELS) {
        fw_film_level *fine = &out->level[out->count - 1], *coarse = fine + 1;
        if (fine->nodes <= FW_FILM_DIRECT || one_block(fine))
            break;
        bool joint = want_joint(fine);
        *coarse = (fw_film_level){.nodes = group_nodes(fine, joint), .joint = joint};
        out->count++;
        FW_TRY(build_coarser(grid, fine, coarse, by, fault));
    }
    return FW_OK;
}

/* What only building needs. */
static void drop_scaffold(fw_film_grid *grid, fw_film_levels *levels)
{
    fw_film_grid_drop_links(grid);
    for (uint32_t l = 0; l < levels->count; l++) {
        free(levels->level[l].block_x);
        free(levels->level[l].block_y);
        levels->level[l].block_x = levels->level[l].block_y = NULL;
    }
}

fw_status fw_film_levels_build(fw_film_grid *grid, fw_film_levels *out, fw_fault *fault)
{
    gathering by = {0};
    out->count = 1;
    out->level[0] = (fw_film_level){0};
    fw_status status = build_finest(grid, &out->level[0], fault);
    const size_t nodes = (size_t)out->level[0].nodes + 1;
    if (status == FW_OK)
        status = indices(&by.start, nodes, fault);
    if (status == FW_OK)
        status = indices(&by.member, nodes, fault);
    if (status == FW_OK)
        status = indices(&by.seen, nodes, fault);
    if (status == FW_OK)
        status = build_all(grid, out, &by, fault);
    free(by.start);
    free(by.member);
    free(by.seen);
    drop_scaffold(grid, out);
    if (status != FW_OK)
        fw_film_levels_free(out);
    return status;
}
