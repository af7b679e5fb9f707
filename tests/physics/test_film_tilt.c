/* A plate that tilts: the film parts at a speed, and from a gap, that grow along a line. Closed
 * forms for strips, discs and rectangles; units in which 12 eta omega / h0^3 = 12, so that F is 12
 * times the integral of u. Strips without ends: the difference of two lengths, whose ends are
 * alike. */
#include "physics/film_shapes.h"

static const double pi = 3.14159265358979323846;

typedef struct outcome {
    double force, moment; /* of one strip a unit long, breadth 1 */
    double peak;
} outcome;

typedef struct tilting {
    int width;       /* px of breadth */
    double slope;    /* h = h0 (1 + slope x) */
    bool even;       /* even speed 1 in place of x */
    double obstacle; /* of u in units of breadth^2, or INFINITY */
} tilting;

static outcome strip_of(const tilting *t, int length)
{
    drawing d = draw_new(t->width, length);
    draw_box(&d, 0, 0, t->width, length, FILM);
    fw_film_shape shape = draw_shape(&d, 1.0 / t->width, 1.0 / t->width);
    if (!t->even)
        shape.faster = (fw_film_plane){-1, 1.0 / t->width, 0};
    shape.wider = (fw_film_plane){0, t->slope / t->width, 0};
    fw_film_solution got = solve(&shape, 1, t->obstacle, 1e-12);
    const outcome out = {12 * got.integral_mm4, 12 * got.moment_x_mm5, 12 * got.peak_u_mm2};
    fw_film_solution_free(&got);
    shape_free(&shape);
    free(d.pixel);
    return out;
}

static outcome endless(tilting t)
{
    const int most = 5 * t.width, least = 4 * t.width;
    const outcome a = strip_of(&t, most), b = strip_of(&t, least);
    const double unit = (double)(most - least) / t.width;
    return (outcome){(a.force - b.force) / unit, (a.moment - b.moment) / unit, a.peak};
}

/* Error of the cells goes with their square, so two sizes tell the limit (Richardson). */
static outcome limit_of(tilting t)
{
    tilting finer = t;
    finer.width *= 2;
    const outcome c = endless(t), f = endless(finer);
    return (outcome){(4 * f.force - c.force) / 3, (4 * f.moment - c.moment) / 3,
                     (4 * f.peak - c.peak) / 3};
}

/* Hinged strip, u = (b^2 x - x^3) / 6: F' = 1/2, M' = 4/15, peak 4 / (3 sqrt 3) (derived by hand,
 * common practice). */
static void hinged_strip(void **state)
{
    (void)state;
    const outcome got = limit_of((tilting){.width = 40, .obstacle = (double)INFINITY});
    assert_close(got.force, 0.5, 1e-5);
    assert_close(got.moment, 4.0 / 15, 1e-5);
    assert_close(got.peak, 4 / (3 * sqrt(3)), 1e-3); /* between the middles of cells */
}

/* Wedge h = h0 (1 + a x / b): h^3 s' = -6 (x^2 - K b^2), K = [int x^2/h^3] / [int 1/h^3],
 * integrated here by Simpson's rule. Derived by hand from Reynolds 1886. */
typedef struct wedge {
    double force, moment;
} wedge;

static double simpson(double (*f)(double, double, double), double slope, double k, double from,
                      double to)
{
    enum { PARTS = 2000 };
    double sum = f(from, slope, k) + f(to, slope, k);
    for (int i = 1; i < PARTS; i++)
        sum += (i % 2 == 1 ? 4 : 2) * f(from + (to - from) * i / PARTS, slope, k);
    return sum * (to - from) / (3 * PARTS);
}

static double over_cube(double x, double slope, double k)
{
    (void)k;
    return 1 / pow(1 + slope * x, 3);
}

static double square_over_cube(double x, double slope, double k)
{
    return x * x * over_cube(x, slope, k);
}

/* F' = int s = -int x s', M' = int x s = -int x^2 s' / 2 (by parts, s = 0 at both ends). */
static double force_density(double x, double slope, double k)
{
    return 6 * x * (x * x - k) * over_cube(x, slope, k);
}

static double moment_density(double x, double slope, double k)
{
    return 3 * x * x * (x * x - k) * over_cube(x, slope, k);
}

static wedge wedge_of(double slope)
{
    const double k = simpson(square_over_cube, slope, 0, 0, 1) / simpson(over_cube, slope, 0, 0, 1);
    return (wedge){simpson(force_density, slope, k, 0, 1), simpson(moment_density, slope, k, 0, 1)};
}

static void wedges(void **state)
{
    (void)state;
    static const double slope[] = {0.1, 0.5, 1, 2, 5};
    for (size_t i = 0; i < sizeof slope / sizeof *slope; i++) {
        const wedge expected = wedge_of(slope[i]);
        const outcome got =
            limit_of((tilting){.width = 40, .slope = slope[i], .obstacle = (double)INFINITY});
        assert_close(got.force, expected.force, 1e-4);
        assert_close(got.moment, expected.moment, 1e-4);
    }
    assert_close(wedge_of(1).force, 0.13705639, 1e-7); /* values from an independent quadrature */
    assert_close(wedge_of(5).moment, 0.00444945, 1e-5);
}

/* The same wedge drawn straight away: 1 / (2 + a) is K of s' (Reynolds). */
static void wedge_pulled_straight(void **state)
{
    (void)state;
    static const double slope[] = {0.5, 1, 2}, force[] = {0.52465038, 0.31776617, 0.14791843};
    for (size_t i = 0; i < 3; i++) {
        const outcome got = limit_of(
            (tilting){.width = 40, .slope = slope[i], .even = true, .obstacle = (double)INFINITY});
        assert_close(got.force, force[i], 1e-4);
    }
}

/* Hinged strip at its cap U (breadth 1): u = U from c1 = (3 U)^(1/3) to c2 with U = c2^3/3 + 1/6 -
 * c2^2/2, a cubic on both sides that meets it level. Derived here. */
static double capped_force(double top)
{
    const double c1 = cbrt(3 * top);
    double low = c1, high = 1;
    for (int i = 0; i < 200; i++) {
        const double c2 = 0.5 * (low + high);
        if (c2 * c2 * c2 / 3 + 1.0 / 6 - c2 * c2 / 2 > top)
            low = c2;
        else
            high = c2;
    }
    const double c2 = low, d = -c2 * c2 / 2 + 1.0 / 6;
    const double left = -pow(c1, 4) / 24 + pow(c1, 4) / 4, core = top * (c2 - c1);
    const double right = -(1 - pow(c2, 4)) / 24 + c2 * c2 * (1 - c2 * c2) / 4 + d * (1 - c2);
    return 12 * (left + core + right);
}

static void hinged_strip_at_its_cap(void **state)
{
    (void)state;
    const double peak = 1 / (9 * sqrt(3));
    assert_close(capped_force(peak * 0.999999), 0.5, 1e-5);
    for (double share = 0.25; share < 1; share += 0.25) {
        const outcome got = limit_of((tilting){.width = 40, .obstacle = share * peak});
        assert_close(got.force, capped_force(share * peak), 2e-3);
        assert_true(got.force < 0.5);
    }
}

/* Rocking about its middle line, u (x - middle) integrated, by series: M / (eta omega a^5 b / h^3)
 * for the square 0.01160229, long side across 0.00731469 (b = a / 2), 0.01412536 (b = 2 a). */
static void rocking_rectangles(void **state)
{
    (void)state;
    static const double ratio[] = {0.5, 1, 2}, moment[] = {0.00731469, 0.01160229, 0.01412536};
    for (size_t i = 0; i < 3; i++) {
        const int a = ratio[i] < 1 ? 256 : 128, b = (int)(a * ratio[i]); /* 128 px at least */
        drawing d = draw_new(a, b);
        draw_box(&d, 0, 0, a, b, FILM);
        fw_film_shape shape = draw_shape(&d, 1.0 / a, 1.0 / a);
        shape.faster = (fw_film_plane){-1.5, 1.0 / a, 0};
        fw_film_solution got = solve(&shape, 1, (double)INFINITY, 1e-12);
        assert_close(12 * (got.moment_x_mm5 - 0.5 * got.integral_mm4) / ratio[i], moment[i], 1e-3);
        assert_true(fabs(got.integral_mm4) < 1e-9);
        fw_film_solution_free(&got);
        shape_free(&shape);
        free(d.pixel);
    }
}

/* Disc R: about a diameter M = pi/8 eta omega R^6 / h^3; hinged at its rim F = 3 pi/2, M
 * = 5.10508806. Turned by 90 degrees, and on pixels twice as long as broad: the same. Derived by
 * hand. */
static void discs(void **state)
{
    (void)state;
    for (int turned = 0; turned < 2; turned++) {
        for (int cell = 1; cell <= 4; cell += 3) {
            drawing d = draw_new(200, 200);
            draw_disc(&d, 100, 100, 100, FILM);
            fw_film_shape shape = draw_shape(&d, 0.01, 0.01);
            shape.faster = (fw_film_plane){-1, turned ? 0 : 0.01, turned ? 0.01 : 0};
            fw_film_solution got = solve(&shape, cell, (double)INFINITY, 1e-12);
            const double moment = turned ? got.moment_y_mm5 : got.moment_x_mm5;
            assert_close(12 * got.integral_mm4, 1.5 * pi, 5e-3);
            assert_close(12 * moment, 5.10508806, 5e-3);
            fw_film_solution_free(&got);
            shape.faster.at = -2;
            got = solve(&shape, cell, (double)INFINITY, 1e-12);
            assert_close(12 * ((turned ? got.moment_y_mm5 : got.moment_x_mm5) - got.integral_mm4),
                         pi / 8, 5e-3);
            fw_film_solution_free(&got);
            shape_free(&shape);
            free(d.pixel);
        }
    }
}

/* Long pixels: lengths count, not pixels. */
static void unequal_pixels(void **state)
{
    (void)state;
    drawing d = draw_new(64, 128), e = draw_new(128, 128);
    draw_box(&d, 0, 0, 64, 128, FILM);
    draw_box(&e, 0, 0, 128, 128, FILM);
    fw_film_shape wide = draw_shape(&d, 0.02, 0.01), square = draw_shape(&e, 0.01, 0.01);
    wide.faster = (fw_film_plane){-1, 0.02, 0.005};
    wide.wider = (fw_film_plane){0, 0.002, 0.003};
    square.faster = (fw_film_plane){-1, 0.01, 0.005};
    square.wider = (fw_film_plane){0, 0.001, 0.003};
    fw_film_solution a = solve(&wide, 1, (double)INFINITY, 1e-12);
    fw_film_solution b = solve(&square, 1, (double)INFINITY, 1e-12);
    assert_close(a.integral_mm4, b.integral_mm4, 1e-3);
    assert_close(a.moment_y_mm5, b.moment_y_mm5, 1e-3);
    fw_film_solution_free(&a);
    fw_film_solution_free(&b);
    shape_free(&wide);
    shape_free(&square);
    free(d.pixel);
    free(e.pixel);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(hinged_strip),          cmocka_unit_test(wedges),
        cmocka_unit_test(wedge_pulled_straight), cmocka_unit_test(hinged_strip_at_its_cap),
        cmocka_unit_test(rocking_rectangles),    cmocka_unit_test(discs),
        cmocka_unit_test(unequal_pixels)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
