/* Holding nodes and the W-cycle: see film_levels.h. */
#include "physics/film_levels.h"

#include <math.h>
#include <string.h>

/* ---- held nodes ---- */

static void hold_finest(fw_film_level *level, const bool *held)
{
    for (uint32_t i = 0; i < level->nodes; i++) {
        bool cut = held != NULL && held[i];
        level->held_wall[i] = cut ? 0 : level->wall[i];
        level->to_held[i] = 0;
        for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++) {
            bool cut_other = held != NULL && held[level->col[e]];
            level->held_conductance[e] = cut || cut_other ? 0 : level->conductance[e];
            if (cut_other && !cut)
                level->to_held[i] += level->conductance[e];
        }
    }
}

static void hold_coarser(const fw_film_level *fine, fw_film_level *coarse)
{
    memset(coarse->held_wall, 0, coarse->nodes * sizeof *coarse->held_wall);
    memset(coarse->to_held, 0, coarse->nodes * sizeof *coarse->to_held);
    memset(coarse->held_conductance, 0,
           coarse->row[coarse->nodes] * sizeof *coarse->held_conductance);
    for (uint32_t i = 0; i < fine->nodes; i++) {
        uint32_t c = fine->coarse_node[i];
        coarse->held_wall[c] += fine->held_wall[i] * coarse->wall_factor[c];
        coarse->to_held[c] += fine->to_held[i];
        for (uint32_t e = fine->row[i]; e < fine->row[i + 1]; e++) {
            uint32_t to = fine->coarse_entry[e];
            if (to != FW_FILM_VAT)
                coarse->held_conductance[to] += fine->held_conductance[e];
        }
    }
    for (uint32_t e = 0; e < coarse->row[coarse->nodes]; e++)
        coarse->held_conductance[e] *= coarse->entry_factor[e];
}

static void set_inverse(fw_film_level *level)
{
    for (uint32_t i = 0; i < level->nodes; i++) {
        double diagonal = level->held_wall[i] + level->to_held[i];
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
    hold_finest(&levels->level[first], held);
    set_inverse(&levels->level[first]);
    for (uint32_t l = first + 1; l < levels->count; l++) {
        hold_coarser(&levels->level[l - 1], &levels->level[l]);
        set_inverse(&levels->level[l]);
    }
    factorise(levels);
}

/* ---- the cycle ---- */

static void solve_last(const fw_film_levels *levels, const double *load, double *u)
{
    uint32_t n = levels->level[levels->count - 1].nodes;
    const double *f = levels->factor;
    for (uint32_t i = 0; i < n; i++) {
        double sum = load[i];
        for (uint32_t k = 0; k < i; k++)
            sum -= f[i * n + k] * u[k];
        u[i] = f[i * n + i] > 0 ? sum / f[i * n + i] : 0;
    }
    for (uint32_t i = n; i-- > 0;) {
        double sum = u[i];
        for (uint32_t k = i + 1; k < n; k++)
            sum -= f[k * n + i] * u[k];
        u[i] = f[i * n + i] > 0 ? sum / f[i * n + i] : 0;
    }
}

static double relaxed(const fw_film_level *level, const double *u, const double *load, uint32_t i)
{
    double sum = load[i];
    for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++)
        sum += level->held_conductance[e] * u[level->col[e]];
    return sum * level->inverse[i];
}

static void sweep_forward(const fw_film_level *level, const double *load, double *u)
{
    for (uint32_t i = 0; i < level->nodes; i++)
        u[i] = relaxed(level, u, load, i);
}

static void sweep_backward(const fw_film_level *level, const double *load, double *u)
{
    for (uint32_t i = level->nodes; i-- > 0;)
        u[i] = relaxed(level, u, load, i);
}

void fw_film_level_rest(const fw_film_level *level, const double *u, const double *load,
                        double *rest)
{
    for (uint32_t i = 0; i < level->nodes; i++) {
        double inverse = level->inverse[i];
        double sum = inverse > 0 ? load[i] - u[i] / inverse : 0;
        for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++)
            sum += level->held_conductance[e] * u[level->col[e]];
        rest[i] = sum;
    }
}

static void restrict_rest(const fw_film_level *fine, fw_film_level *coarse)
{
    memset(coarse->load, 0, coarse->nodes * sizeof *coarse->load);
    for (uint32_t i = 0; i < fine->nodes; i++)
        coarse->load[fine->coarse_node[i]] += fine->rest[i];
}

/* Adds the correction of the coarser level, by one cycle there, or two where it is so much smaller
 * that the work still falls from level to level. */
static void cycle(fw_film_levels *levels, uint32_t l, const double *load, double *u);

static void correct(fw_film_levels *levels, uint32_t l, const double *load, double *u)
{
    fw_film_level *fine = &levels->level[l], *coarse = fine + 1;
    fw_film_level_rest(fine, u, load, fine->rest);
    restrict_rest(fine, coarse);
    bool twice = coarse->nodes * 5 < fine->nodes * 2 && l + 2 < levels->count;
    cycle(levels, l + 1, coarse->load, coarse->solution);
    for (uint32_t i = 0; i < fine->nodes; i++)
        u[i] += fine->inverse[i] > 0 ? coarse->solution[fine->coarse_node[i]] : 0;
    if (!twice)
        return;
    double *first = coarse->rest; /* second cycle on what the first left */
    fw_film_level_rest(coarse, coarse->solution, coarse->load, first);
    memcpy(coarse->load, first, coarse->nodes * sizeof *first);
    cycle(levels, l + 1, coarse->load, coarse->solution);
    for (uint32_t i = 0; i < fine->nodes; i++)
        u[i] += fine->inverse[i] > 0 ? coarse->solution[fine->coarse_node[i]] : 0;
}

static void cycle(fw_film_levels *levels, uint32_t l, const double *load, double *u)
{
    fw_film_level *level = &levels->level[l];
    bool last = l + 1 == levels->count;
    if (last && level->nodes <= FW_FILM_DIRECT) {
        solve_last(levels, load, u);
        return;
    }
    memset(u, 0, level->nodes * sizeof *u);
    sweep_forward(level, load, u);
    if (!last)
        correct(levels, l, load, u);
    sweep_backward(level, load, u);
}

void fw_film_levels_cycle(fw_film_levels *levels, uint32_t first, const double *load, double *u)
{
    cycle(levels, first, load, u);
}
