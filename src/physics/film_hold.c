/* Holding nodes: see film_levels.h. */
#include "fault/memory.h"
#include "physics/film_levels.h"

#include <math.h>
#include <string.h>

static const char holder[] = "held nodes of the peel film";

/* ---- room for it ---- */

/* Where each fine entry goes, and how the coarse matrix differs from the sums of the fine one. */
static void relate(fw_film_level *fine, fw_film_level *coarse)
{
    for (uint32_t i = 0; i < fine->nodes; i++) {
        const uint32_t c = fine->coarse_node[i];
        coarse->wall_factor[c] += fine->wall[i];
        for (uint32_t e = fine->row[i]; e < fine->row[i + 1]; e++) {
            const uint32_t to = fine->coarse_node[fine->col[e]];
            fine->coarse_entry[e] = to == c ? FW_FILM_VAT : fw_film_level_entry(coarse, c, to);
            if (to != c)
                coarse->entry_factor[fine->coarse_entry[e]] += fine->conductance[e];
        }
    }
    for (uint32_t c = 0; c < coarse->nodes; c++) {
        double *factor = &coarse->wall_factor[c];
        *factor = *factor > 0 ? coarse->wall[c] / *factor : 1;
    }
    for (uint32_t e = 0; e < coarse->row[coarse->nodes]; e++)
        coarse->entry_factor[e] = coarse->conductance[e] / coarse->entry_factor[e];
}

static fw_status make_room(fw_film_level *level, fw_fault *fault)
{
    const size_t n = level->nodes, entries = level->row[n];
    double **of_nodes[] = {&level->wall_factor, &level->cut_wall, &level->cut_to_held};
    double **of_entries[] = {&level->entry_factor, &level->cut_conductance};
    for (size_t i = 0; i < sizeof of_nodes / sizeof *of_nodes; i++)
        FW_TRY(fw_allocate((void **)of_nodes[i], n, sizeof(double), holder, fault));
    for (size_t i = 0; i < sizeof of_entries / sizeof *of_entries; i++)
        FW_TRY(fw_allocate((void **)of_entries[i], entries, sizeof(double), holder, fault));
    return fw_allocate((void **)&level->coarse_entry, entries, sizeof(uint32_t), holder, fault);
}

fw_status fw_film_levels_may_hold(fw_film_levels *levels, fw_fault *fault)
{
    if (levels->level[0].cut_wall != NULL)
        return FW_OK;
    for (uint32_t l = 0; l < levels->count; l++)
        FW_TRY(make_room(&levels->level[l], fault));
    for (uint32_t l = 1; l < levels->count; l++)
        relate(&levels->level[l - 1], &levels->level[l]);
    return FW_OK;
}

/* ---- the matrix ---- */

static void use_whole(fw_film_level *level)
{
    level->held_conductance = level->conductance;
    level->held_wall = level->wall;
    level->to_held = NULL;
}

static void use_cut(fw_film_level *level)
{
    level->held_conductance = level->cut_conductance;
    level->held_wall = level->cut_wall;
    level->to_held = level->cut_to_held;
}

static void hold_finest(fw_film_level *level, const bool *held)
{
    for (uint32_t i = 0; i < level->nodes; i++) {
        level->cut_wall[i] = held[i] ? 0 : level->wall[i];
        level->cut_to_held[i] = 0;
        for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++) {
            const bool held_other = held[level->col[e]];
            level->cut_conductance[e] = held[i] || held_other ? 0 : level->conductance[e];
            if (held_other && !held[i])
                level->cut_to_held[i] += level->conductance[e];
        }
    }
}

static void hold_coarser(const fw_film_level *fine, fw_film_level *coarse)
{
    memset(coarse->cut_wall, 0, coarse->nodes * sizeof *coarse->cut_wall);
    memset(coarse->cut_to_held, 0, coarse->nodes * sizeof *coarse->cut_to_held);
    memset(coarse->cut_conductance, 0,
           coarse->row[coarse->nodes] * sizeof *coarse->cut_conductance);
    for (uint32_t i = 0; i < fine->nodes; i++) {
        uint32_t c = fine->coarse_node[i];
        coarse->cut_wall[c] += fine->cut_wall[i] * coarse->wall_factor[c];
        coarse->cut_to_held[c] += fine->cut_to_held[i];
        for (uint32_t e = fine->row[i]; e < fine->row[i + 1]; e++) {
            uint32_t to = fine->coarse_entry[e];
            if (to != FW_FILM_VAT)
                coarse->cut_conductance[to] += fine->cut_conductance[e];
        }
    }
    for (uint32_t e = 0; e < coarse->row[coarse->nodes]; e++)
        coarse->cut_conductance[e] *= coarse->entry_factor[e];
}

static void set_inverse(fw_film_level *level)
{
    for (uint32_t i = 0; i < level->nodes; i++) {
        double diagonal = level->held_wall[i] + (level->to_held != NULL ? level->to_held[i] : 0);
        for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++)
            diagonal += level->held_conductance[e];
        level->inverse[i] = diagonal > 0 ? 1 / diagonal : 0;
    }
}

/* Cholesky factor of the last level, row by row; a held node or one that floats in rounding gets
 * a row of its own with no solution (factor 0). */
static void factorise(fw_film_levels *levels)
{
    const fw_film_level *last = &levels->level[levels->count - 1];
    uint32_t n = last->nodes;
    if (n > FW_FILM_DIRECT)
        return;
    double *f = levels->factor;
    memset(f, 0, (size_t)n * n * sizeof *f);
    for (uint32_t i = 0; i < n; i++) {
        f[i * n + i] = last->inverse[i] > 0 ? 1 / last->inverse[i] : 0;
        for (uint32_t e = last->row[i]; e < last->row[i + 1]; e++) {
            if (last->col[e] < i)
                f[i * n + last->col[e]] = -last->held_conductance[e];
        }
    }
    for (uint32_t i = 0; i < n; i++) {
        double whole = f[i * n + i];
        for (uint32_t j = 0; j <= i; j++) {
            double sum = f[i * n + j];
            for (uint32_t k = 0; k < j; k++)
                sum -= f[i * n + k] * f[j * n + k];
            if (j == i)
                f[i * n + i] = sum > 1e-14 * whole ? sqrt(sum) : 0;
            else
                f[i * n + j] = f[j * n + j] > 0 ? sum / f[j * n + j] : 0;
        }
    }
}

void fw_film_levels_hold(fw_film_levels *levels, uint32_t first, const bool *held)
{
    for (uint32_t l = first; l < levels->count; l++) {
        fw_film_level *level = &levels->level[l];
        if (held == NULL)
            use_whole(level);
        else if (l == first)
            hold_finest(level, held);
        else
            hold_coarser(level - 1, level);
        if (held != NULL)
            use_cut(level);
        set_inverse(level);
    }
    factorise(levels);
}
