/* Shapes for the film tests, drawn pixel by pixel, and a slow, obvious solver to hold against the
 * fast one: Gaussian elimination on the full-resolution scheme. */
#ifndef FW_TEST_FILM_SHAPES_H
#define FW_TEST_FILM_SHAPES_H

#include "fault/memory.h"
#include "physics/film.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

/* What a pixel is: open to the vat, film, or cavity k as CAVITY + k. */
enum { OPEN, FILM, CAVITY };

typedef struct drawing {
    int width, height;
    uint8_t *pixel; /* [height][width] */
} drawing;

static inline drawing draw_new(int width, int height)
{
    drawing d = {width, height, calloc((size_t)width * (size_t)height, 1)};
    assert_non_null(d.pixel);
    return d;
}

static inline uint8_t *draw_at(drawing *d, int x, int y)
{
    return &d->pixel[y * d->width + x];
}

static inline void draw_box(drawing *d, int x0, int y0, int x1, int y1, uint8_t what)
{
    for (int y = y0; y < y1; y++)
        for (int x = x0; x < x1; x++)
            *draw_at(d, x, y) = what;
}

/* Pixels whose centre lies within r of (cx, cy), in px. */
static inline void draw_disc(drawing *d, double cx, double cy, double r, uint8_t what)
{
    for (int y = 0; y < d->height; y++)
        for (int x = 0; x < d->width; x++)
            if (hypot(x + 0.5 - cx, y + 0.5 - cy) <= r)
                *draw_at(d, x, y) = what;
}

static inline fw_film_shape draw_shape(const drawing *d, double px_mm, double py_mm)
{
    fw_film_shape shape = {.px_mm = px_mm, .py_mm = py_mm};
    assert_int_equal(fw_runs_begin(&shape.film, d->width, d->height, NULL), FW_OK);
    assert_int_equal(fw_runs_begin(&shape.sealed, d->width, d->height, NULL), FW_OK);
    shape.cavity = calloc((size_t)d->width * (size_t)d->height + 1, sizeof *shape.cavity);
    assert_non_null(shape.cavity);
    for (int y = 0; y < d->height; y++) {
        for (int x = 0; x < d->width;) {
            const uint8_t what = d->pixel[y * d->width + x];
            int end = x + 1;
            while (end < d->width && d->pixel[y * d->width + end] == what)
                end++;
            if (what == FILM)
                assert_int_equal(fw_runs_push(&shape.film, y, x, end, NULL), FW_OK);
            if (what >= CAVITY) {
                assert_int_equal(fw_runs_push(&shape.sealed, y, x, end, NULL), FW_OK);
                shape.cavity[shape.sealed.count - 1] = (uint32_t)(what - CAVITY);
                if ((uint32_t)(what - CAVITY) + 1 > shape.cavity_count)
                    shape.cavity_count = (uint32_t)(what - CAVITY) + 1;
            }
            x = end;
        }
    }
    fw_runs_finish(&shape.film);
    fw_runs_finish(&shape.sealed);
    return shape;
}

static inline void shape_free(fw_film_shape *shape)
{
    fw_runs_free(&shape->film);
    fw_runs_free(&shape->sealed);
    free(shape->cavity);
}

static inline fw_film_solution solve(const fw_film_shape *shape, int cell_px, double obstacle_mm2,
                                     double tolerance)
{
    const fw_film_options options = {
        .cell_px = cell_px, .obstacle_mm2 = obstacle_mm2, .work_tolerance = tolerance};
    fw_film_solution solution;
    fw_fault fault = {0};
    if (fw_film_solve(shape, &options, &solution, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    return solution;
}

/* Integral of u in mm4 at full resolution, no cap. */
static inline double integral(const drawing *d, double px_mm, double py_mm, int cell_px)
{
    fw_film_shape shape = draw_shape(d, px_mm, py_mm);
    fw_film_solution solution = solve(&shape, cell_px, (double)INFINITY, 1e-13);
    const double g = solution.integral_mm4;
    fw_film_solution_free(&solution);
    shape_free(&shape);
    return g;
}

/* Unknown of a pixel: its number, one for each cavity, or -1 where u = 0. Returns how many. */
static inline int number_unknowns(const drawing *d, int *of)
{
    int count = 0, cavity[64];
    for (int k = 0; k < 64; k++)
        cavity[k] = -1;
    for (int i = 0; i < d->width * d->height; i++) {
        const int what = d->pixel[i];
        of[i] = -1;
        if (what == FILM)
            of[i] = count++;
        if (what >= CAVITY) {
            if (cavity[what - CAVITY] < 0)
                cavity[what - CAVITY] = count++;
            of[i] = cavity[what - CAVITY];
        }
    }
    return count;
}

/* Conductance of the face between two pixels whose centres are `along` apart and whose face is
 * `face` long: 1 between films, 2 from a film's centre to a face with a given u (rim or cavity). */
static inline void add_face(double *a, int n, const drawing *d, const int *of, int from, int to,
                            double face, double along)
{
    if (d->pixel[from] != FILM)
        return;
    const bool wall = to < 0 || d->pixel[to] != FILM;
    const double c = face / along * (wall ? 2 : 1);
    const int i = of[from], j = to < 0 ? -1 : of[to];
    a[i * n + i] += c;
    if (j >= 0) {
        a[i * n + j] -= c;
        if (d->pixel[to] >= CAVITY) { /* the cavity's row sees the same face */
            a[j * n + j] += c;
            a[j * n + i] -= c;
        }
    }
}

/* The same integral by Gaussian elimination with pivoting: for small drawings. */
static inline double dense_integral(const drawing *d, double px, double py)
{
    const int pixels = d->width * d->height;
    int *of = calloc((size_t)pixels, sizeof *of);
    assert_non_null(of);
    const int n = number_unknowns(d, of);
    double *a = calloc((size_t)n * (size_t)n, sizeof *a), *b = calloc((size_t)n, sizeof *b);
    double *area = calloc((size_t)n, sizeof *area);
    assert_non_null(a);
    assert_non_null(b);
    assert_non_null(area);
    for (int y = 0; y < d->height; y++) {
        for (int x = 0; x < d->width; x++) {
            const int i = y * d->width + x;
            if (of[i] < 0)
                continue;
            area[of[i]] += px * py;
            add_face(a, n, d, of, i, x > 0 ? i - 1 : -1, py, px);
            add_face(a, n, d, of, i, x + 1 < d->width ? i + 1 : -1, py, px);
            add_face(a, n, d, of, i, y > 0 ? i - d->width : -1, px, py);
            add_face(a, n, d, of, i, y + 1 < d->height ? i + d->width : -1, px, py);
        }
    }
    memcpy(b, area, (size_t)n * sizeof *b);
    for (int k = 0; k < n; k++) {
        int pivot = k;
        for (int i = k + 1; i < n; i++)
            if (fabs(a[i * n + k]) > fabs(a[pivot * n + k]))
                pivot = i;
        for (int j = 0; j < n; j++) {
            const double t = a[k * n + j];
            a[k * n + j] = a[pivot * n + j];
            a[pivot * n + j] = t;
        }
        const double t = b[k];
        b[k] = b[pivot];
        b[pivot] = t;
        for (int i = k + 1; i < n; i++) {
            const double f = a[i * n + k] / a[k * n + k];
            if (f == 0)
                continue;
            for (int j = k; j < n; j++)
                a[i * n + j] -= f * a[k * n + j];
            b[i] -= f * b[k];
        }
    }
    double g = 0;
    for (int k = n - 1; k >= 0; k--) {
        for (int j = k + 1; j < n; j++)
            b[k] -= a[k * n + j] * b[j];
        b[k] /= a[k * n + k];
        g += b[k] * area[k];
    }
    free(of);
    free(a);
    free(b);
    free(area);
    return g;
}

static inline void assert_close(double got, double expected, double relative)
{
    if (!(fabs(got - expected) <= relative * fabs(expected)))
        fail_msg("got %.12g, expected %.12g, off by %.3g, allowed %.3g", got, expected,
                 got / expected - 1, relative);
}

#endif
