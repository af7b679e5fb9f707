#include "physics/film_obstacle.h"

#include <math.h>
#include <string.h>

enum { MOST_FREE = 400, MOST_CAPPED = 200, MOST_COARSE = 12, STEPS_CAPPED = 8 };

static double dot(const double *a, const double *b, uint32_t count)
{
    double sum = 0;
    for (uint32_t i = 0; i < count; i++)
        sum += a[i] * b[i];
    return sum;
}

/* product = A direction, with its product with direction. */
static double apply(const fw_film_level *level, const double *direction, double *product)
{
    double sum = 0;
    for (uint32_t i = 0; i < level->nodes; i++) {
        double inverse = level->inverse[i];
        double value = inverse > 0 ? direction[i] / inverse : 0;
        for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++)
            value -= level->held_conductance[e] * direction[level->col[e]];
        product[i] = value;
        sum += value * direction[i];
    }
    return sum;
}

double fw_film_conjugate(fw_film_system *system, uint32_t first, double *u, double tolerance,
                         double reference, uint32_t most, bool *done)
{
    const fw_film_level *level = &system->levels->level[first];
    uint32_t n = level->nodes;
    double *rest = system->rest, *direction = system->direction;
    double term[4] = {0}, sum = 0, before = 0;
    *done = false;
    for (uint32_t k = 0; k < most && !*done; k++) {
        fw_film_levels_cycle(system->levels, first, rest, system->step);
        double now = dot(rest, system->step, n);
        double beta = before > 0 ? now / before : 0;
        for (uint32_t i = 0; i < n; i++)
            direction[i] = system->step[i] + beta * direction[i];
        double curvature = apply(level, direction, system->product);
        if (!(now > 0 && curvature > 0)) { /* rest is zero, or rounding */
            *done = true;
            break;
        }
        double alpha = now / curvature;
        for (uint32_t i = 0; i < n; i++) {
            u[i] += alpha * direction[i];
            rest[i] -= alpha * system->product[i];
        }
        before = now;
        term[k % 4] = alpha * now;
        sum += alpha * now;
        system->iterations++;
        double last = term[0] + term[1] + term[2] + term[3];
        *done = k >= 3 && last <= tolerance * (reference + sum);
    }
    return sum;
}

bool fw_film_solve_free(fw_film_system *system)
{
    const fw_film_level *level = &system->levels->level[0];
    bool done;
    fw_film_levels_hold(system->levels, 0, NULL);
    memset(system->u, 0, level->nodes * sizeof *system->u);
    memcpy(system->rest, level->source, level->nodes * sizeof *system->rest);
    (void)fw_film_conjugate(system, 0, system->u, system->tolerance, 0, MOST_FREE, &done);
    return done;
}

/* ---- with an obstacle ---- */

static double full_diagonal(const fw_film_level *level, uint32_t i)
{
    double diagonal = level->wall[i];
    for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++)
        diagonal += level->conductance[e];
    return diagonal;
}

static void project_one(const fw_film_level *level, double *u, double top, uint32_t i)
{
    double sum = level->source[i], diagonal = level->wall[i];
    for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++) {
        sum += level->conductance[e] * u[level->col[e]];
        diagonal += level->conductance[e];
    }
    u[i] = diagonal > 0 && sum < top * diagonal ? sum / diagonal : top;
}

static void project_sweep(const fw_film_level *level, double *u, double top)
{
    for (uint32_t i = 0; i < level->nodes; i++)
        project_one(level, u, top, i);
    for (uint32_t i = level->nodes; i-- > 0;)
        project_one(level, u, top, i);
}

void fw_film_full_rest(const fw_film_level *level, const double *u, double *rest)
{
    for (uint32_t i = 0; i < level->nodes; i++) {
        double sum = level->source[i] - level->wall[i] * u[i];
        for (uint32_t e = level->row[i]; e < level->row[i + 1]; e++)
            sum += level->conductance[e] * (u[level->col[e]] - u[i]);
        rest[i] = sum;
    }
}

double fw_film_residual(fw_film_system *system, double top)
{
    const fw_film_level *level = &system->levels->level[0];
    double worst = 0, largest = 0;
    fw_film_full_rest(level, system->u, system->rest);
    for (uint32_t i = 0; i < level->nodes; i++) {
        double room = full_diagonal(level, i) * (top - system->u[i]);
        double value = fabs(room < system->rest[i] ? room : system->rest[i]);
        worst = value > worst ? value : worst;
        largest = fabs(level->source[i]) > largest ? fabs(level->source[i]) : largest;
    }
    return largest > 0 ? worst / largest : 0;
}

/* u.A u / 2 - source.u; rest is scratch. */
static double energy(const fw_film_level *level, const double *u, double *rest)
{
    fw_film_full_rest(level, u, rest);
    return -0.5 * (dot(level->source, u, level->nodes) + dot(rest, u, level->nodes));
}

/* trial = min(u + share * step, top). True when some node was cut. */
static bool try_step(const fw_film_system *system, uint32_t n, const double *step, double share,
                     double top)
{
    bool cut = false;
    for (uint32_t i = 0; i < n; i++) {
        double value = system->u[i] + share * step[i];
        cut |= value > top;
        system->trial[i] = value > top ? top : value;
    }
    return cut;
}

/* Takes the step as far as the energy falls; true when it was taken whole and uncut. */
static bool take_step(fw_film_system *system, const fw_film_level *level, const double *step,
                      double top)
{
    double before = energy(level, system->u, system->rest);
    for (double share = 1; share > 0.05; share /= 2) {
        bool cut = try_step(system, level->nodes, step, share, top);
        if (!cut || energy(level, system->trial, system->rest) <= before) {
            memcpy(system->u, system->trial, level->nodes * sizeof *system->u);
            return !cut && share == 1;
        }
    }
    return false;
}

/* Holds the nodes at the obstacle. True when they are the same as last time. */
static bool hold(fw_film_system *system, uint32_t l, double top, bool first)
{
    uint32_t n = system->levels->level[l].nodes;
    for (uint32_t i = 0; i < n; i++)
        system->held[i] = system->u[i] >= top;
    if (!first && memcmp(system->held, system->was_held, n * sizeof *system->held) == 0)
        return true;
    memcpy(system->was_held, system->held, n * sizeof *system->held);
    fw_film_levels_hold(system->levels, l, system->held);
    return false;
}

static bool solve_level(fw_film_system *system, uint32_t l, double top, double tolerance,
                        uint32_t most)
{
    const fw_film_level *level = &system->levels->level[l];
    double *step = system->correction;
    for (uint32_t k = 0; k < most; k++) {
        bool done;
        project_sweep(level, system->u, top);
        bool settled = hold(system, l, top, k == 0);
        fw_film_full_rest(level, system->u, system->rest);
        for (uint32_t i = 0; i < level->nodes; i++)
            system->rest[i] = system->held[i] ? 0 : system->rest[i];
        memset(step, 0, level->nodes * sizeof *step);
        (void)fw_film_conjugate(system, l, step, tolerance * tolerance,
                                dot(level->source, system->u, level->nodes), STEPS_CAPPED, &done);
        bool whole = take_step(system, level, step, top);
        if (settled && done && whole)
            return true;
    }
    return false;
}

bool fw_film_solve_capped(fw_film_system *system, double top)
{
    fw_film_levels *levels = system->levels;
    uint32_t l = levels->count - 1;
    while (levels->level[l].joint)
        l--;
    memset(system->u, 0, levels->level[l].nodes * sizeof *system->u);
    for (; l > 0; l--) {
        (void)solve_level(system, l, top, 0.03, MOST_COARSE);
        const fw_film_level *fine = &levels->level[l - 1];
        memcpy(system->trial, system->u, levels->level[l].nodes * sizeof *system->u);
        for (uint32_t i = 0; i < fine->nodes; i++)
            system->u[i] = system->trial[fine->coarse_node[i]];
    }
    return solve_level(system, 0, top, system->tolerance, MOST_CAPPED);
}
