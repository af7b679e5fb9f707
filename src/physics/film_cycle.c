/* The W-cycle: see film_levels.h. */
#include "physics/film_levels.h"

#include <string.h>

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
