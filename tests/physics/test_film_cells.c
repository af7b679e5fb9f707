/* The film solve against slow, obvious ones: Gaussian elimination at full resolution on random
 * masks, and the full-resolution solve where cells are coarser; the run bound; memo and curve. */
#include "physics/film_memo.h"
#include "physics/film_shapes.h"

static uint32_t seed;

static uint32_t dice(uint32_t sides)
{
    seed = seed * 1664525u + 1013904223u;
    return (seed >> 8) % sides;
}

/* Boxes of film with boxes cut out, some of the cuts sealed. No cavity may lose all of its film. */
static drawing random_mask(int n)
{
    drawing d = draw_new(n, n);
    for (int i = 0; i < 4; i++) {
        const int x = (int)dice((uint32_t)n - 4), y = (int)dice((uint32_t)n - 4);
        draw_box(&d, x, y, x + 3 + (int)dice((uint32_t)(n - x) - 3),
                 y + 3 + (int)dice((uint32_t)(n - y) - 3), FILM);
    }
    for (int i = 0; i < 6; i++)
        *draw_at(&d, (int)dice((uint32_t)n), (int)dice((uint32_t)n)) = OPEN;
    int cavities = 0;
    for (int i = 0; i < 6 && cavities < 2; i++) {
        const int x = 1 + (int)dice((uint32_t)n - 2), y = 1 + (int)dice((uint32_t)n - 2);
        bool walled = true;
        for (int dy = -1; dy <= 1; dy++)
            for (int dx = -1; dx <= 1; dx++)
                walled = walled && *draw_at(&d, x + dx, y + dy) == FILM;
        if (walled)
            *draw_at(&d, x, y) = (uint8_t)(CAVITY + cavities++);
    }
    return d;
}

static void random_masks_equal_elimination(void **state)
{
    (void)state;
    int with_cavities = 0;
    for (seed = 1; seed < 4000000000u; seed += 100000000u) {
        const uint32_t kept = seed;
        drawing d = random_mask(12);
        fw_film_shape shape = draw_shape(&d, 0.05, 0.07);
        with_cavities += shape.cavity_count > 0;
        if (shape.film.count > 0)
            assert_close(integral(&d, 0.05, 0.07, 1), dense_integral(&d, 0.05, 0.07), 1e-9);
        shape_free(&shape);
        free(d.pixel);
        seed = kept;
    }
    assert_true(with_cavities > 5); /* the test has looked at some */
}

/* ---- cut cells
 * -------------------------------------------------------------------------------------- */

static double at_cell(const fw_film_shape *shape, int cell_px)
{
    fw_film_solution solution = solve(shape, cell_px, (double)INFINITY, 1e-8);
    const double g = solution.integral_mm4;
    fw_film_solution_free(&solution);
    return g;
}

static void check_class(drawing *d, const char *name, double tolerance)
{
    fw_film_shape shape = draw_shape(d, 0.05, 0.05);
    const int cell = fw_film_choose_cell(&shape);
    const double full = at_cell(&shape, 1), cut = at_cell(&shape, 0);
    print_message("%s: cell %d px, cut cells %+.3f %%\n", name, cell, 100 * (cut / full - 1));
    assert_close(cut, full, tolerance);
    shape_free(&shape);
    free(d->pixel);
}

static void cut_cells_by_class(void **state)
{
    (void)state;
    drawing blob = draw_new(700, 700);
    draw_disc(&blob, 300, 340, 260, FILM);
    draw_disc(&blob, 480, 420, 200, FILM);
    draw_disc(&blob, 250, 300, 60, CAVITY);
    draw_disc(&blob, 450, 400, 40, OPEN);
    check_class(&blob, "blob with a cavity and a vent", 0.01);
    drawing slots = draw_new(640, 480);
    draw_box(&slots, 10, 10, 630, 470, FILM);
    for (int i = 0; i < 6; i++)
        draw_box(&slots, 60 + 90 * i, 60, 75 + 90 * i, 420, OPEN);
    check_class(&slots, "plate with slots", 0.01);
    drawing lattice = draw_new(500, 500);
    for (int i = 0; i < 10; i++) {
        draw_box(&lattice, 20 + 48 * i, 10, 30 + 48 * i, 490, FILM);
        draw_box(&lattice, 10, 20 + 48 * i, 490, 30 + 48 * i, FILM);
    }
    check_class(&lattice, "lattice", 0.01);
    drawing square = draw_new(400, 400);
    draw_box(&square, 3, 5, 390, 387, FILM);
    check_class(&square, "square off the cells", 0.01);
}

/* A gap thinner than a cell does not leak: two plates 1 px apart are two plates. */
static void thin_gaps_do_not_leak(void **state)
{
    (void)state;
    drawing apart = draw_new(401, 200), one = draw_new(200, 200);
    draw_box(&apart, 0, 0, 200, 200, FILM);
    draw_box(&apart, 201, 0, 401, 200, FILM);
    draw_box(&one, 0, 0, 200, 200, FILM);
    fw_film_shape two = draw_shape(&apart, 1, 1), single = draw_shape(&one, 1, 1);
    assert_close(at_cell(&two, 8), 2 * at_cell(&single, 8), 0.01);
    shape_free(&two);
    shape_free(&single);
    free(apart.pixel);
    free(one.pixel);
}

static void solves_obey_the_bound(void **state)
{
    (void)state;
    for (seed = 7; seed < 4000000000u; seed += 100000000u) {
        const uint32_t kept = seed;
        drawing d = random_mask(40);
        fw_film_shape shape = draw_shape(&d, 0.05, 0.08);
        const double bound = fw_film_bound(&shape);
        for (int cell = 1; cell <= 4; cell *= 2)
            assert_true(shape.film.count == 0 || at_cell(&shape, cell) <= bound * (1 + 1e-9));
        shape_free(&shape);
        free(d.pixel);
        seed = kept;
    }
}

/* ---- memo and curve
 * --------------------------------------------------------------------------------- */

static fw_film_shape ring_shape(uint8_t hole)
{
    drawing d = draw_new(84, 84);
    draw_disc(&d, 42, 42, 40, FILM);
    draw_disc(&d, 42, 42, 20, hole);
    fw_film_shape shape = draw_shape(&d, 0.05, 0.05);
    free(d.pixel);
    return shape;
}

/* The same outline, vented or sealed, differs 7.4 times at r / R = 0.5: they must not hit each
 * other. */
static void memo_tells_vented_from_sealed(void **state)
{
    (void)state;
    fw_budget on = {.holder = "memo", .limit = 64u << 20}, off = {.holder = "memo", .limit = 0};
    fw_film_memo *memo = NULL, *none = NULL;
    assert_int_equal(fw_film_memo_create(&on, &memo, NULL), FW_OK);
    assert_int_equal(fw_film_memo_create(&off, &none, NULL), FW_OK);
    const fw_film_options options = {.obstacle_mm2 = (double)INFINITY};
    fw_film_shape sealed = ring_shape(CAVITY), vented = ring_shape(OPEN);
    const fw_film_solution *a = NULL, *b = NULL, *again = NULL, *plain = NULL;
    assert_int_equal(fw_film_memo_solve(memo, &sealed, &options, &a, NULL), FW_OK);
    assert_int_equal(fw_film_memo_solve(memo, &vented, &options, &b, NULL), FW_OK);
    assert_int_equal(fw_film_memo_solve(memo, &sealed, &options, &again, NULL), FW_OK);
    assert_int_equal(fw_film_memo_solve(none, &sealed, &options, &plain, NULL), FW_OK);
    assert_close(a->integral_mm4 / b->integral_mm4, 0.9375 / 0.125984, 0.05);
    assert_ptr_equal(a, again);
    assert_true(memcmp(&plain->integral_mm4, &a->integral_mm4, sizeof a->integral_mm4) == 0);
    assert_int_equal(plain->cell_count, a->cell_count);
    assert_memory_equal(plain->cell, a->cell, a->cell_count * sizeof *a->cell);
    fw_film_memo_trim(memo);
    fw_film_memo_trim(none);
    assert_int_equal(fw_film_memo_solve(memo, &sealed, &options, &again, NULL), FW_OK);
    assert_true(again->integral_mm4 > 0);
    shape_free(&sealed);
    shape_free(&vented);
    fw_film_memo_free(memo);
    fw_film_memo_free(none);
}

static void curve_follows_direct_solves(void **state)
{
    (void)state;
    fw_film_shape shape = ring_shape(CAVITY);
    const fw_film_options options = {0};
    fw_film_curve curve;
    const double cap = 0.101325;
    assert_int_equal(fw_film_curve_build(&shape, &options, cap, NULL, &curve, NULL), FW_OK);
    double before = 0, slope_before = (double)INFINITY, q_before = 0;
    for (int i = 0; i < 12; i++) {
        const double q = curve.q[0] * pow(2, i - 3);
        const double force = fw_film_curve_force(&curve, q);
        fw_film_solution direct = solve(&shape, 0, cap / q, 1e-6);
        assert_close(force, q * direct.integral_mm4, 0.01);
        const double slope = (force - before) / (q - q_before);
        assert_true(force > before && slope <= slope_before * (1 + 1e-6));
        assert_true(force <= cap * curve.area_mm2 * (1 + 1e-9));
        before = force;
        q_before = q;
        slope_before = slope;
        fw_film_solution_free(&direct);
    }
    shape_free(&shape);
}

/* Struts of 10 px every 20 px: over a million cells at 1 px, so the cells double, the solution says
 * so, and the load is off by no more than film.h says. One strip less, and it stays fine. */
static void too_many_cells_are_joined(void **state)
{
    (void)state;
    for (int width = 1500; width >= 1300; width -= 200) {
        drawing d = draw_new(width, 1000);
        for (int y = 0; y < 1000; y++)
            for (int x = 0; x < width; x++)
                *draw_at(&d, x, y) = x % 20 < 10 || y % 20 < 10 ? FILM : OPEN;
        fw_film_shape shape = draw_shape(&d, 0.05, 0.05);
        fw_film_solution kept = solve(&shape, 0, (double)INFINITY, 0);
        fw_film_solution fine = solve(&shape, 1, (double)INFINITY, 0);
        assert_int_equal(fine.unknowns, fw_runs_pixels(&shape.film));
        assert_false(fine.coarse);
        assert_int_equal(kept.coarse, fine.unknowns > FW_FILM_MOST_CELLS);
        assert_int_equal(kept.cell_px, kept.coarse ? 2 : 1);
        assert_true(kept.unknowns <= FW_FILM_MOST_CELLS);
        assert_true(kept.integral_mm4 >= 0.999 * fine.integral_mm4);
        assert_true(kept.integral_mm4 <= 1.06 * fine.integral_mm4);
        fw_film_solution_free(&kept);
        fw_film_solution_free(&fine);
        shape_free(&shape);
        free(d.pixel);
    }
}

/* Threads that ask for one shape at the same time get one solution; a shape that cannot be solved
 * fails for each of them. */
static void threads_share_a_solve(void **state)
{
    (void)state;
    drawing d = draw_new(120, 120);
    draw_disc(&d, 60, 60, 50, FILM);
    fw_film_shape shape = draw_shape(&d, 0.05, 0.05);
    draw_box(&d, 0, 0, 120, 120, CAVITY); /* sealed up to the edge of its box */
    fw_film_shape wrong = draw_shape(&d, 0.05, 0.05);
    fw_budget budget = {.holder = "memo", .limit = 1 << 20};
    fw_film_memo *memo = NULL;
    assert_int_equal(fw_film_memo_create(&budget, &memo, NULL), FW_OK);
    const fw_film_options options = {.obstacle_mm2 = (double)INFINITY};
    const fw_film_solution *got[32] = {0};
    int failed = 0;
#pragma omp parallel for num_threads(4) schedule(static, 1) reduction(+ : failed)
    for (int i = 0; i < 32; i++) {
        const fw_film_solution *none = NULL;
        (void)fw_film_memo_solve(memo, &shape, &options, &got[i], NULL);
        failed += fw_film_memo_solve(memo, &wrong, &options, &none, NULL) == FW_INPUT;
    }
    for (int i = 0; i < 32; i++)
        assert_ptr_equal(got[i], got[0]);
    assert_non_null(got[0]);
    assert_int_equal(failed, 32);
    fw_film_memo_free(memo);
    shape_free(&shape);
    shape_free(&wrong);
    free(d.pixel);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(random_masks_equal_elimination),
                                       cmocka_unit_test(cut_cells_by_class),
                                       cmocka_unit_test(thin_gaps_do_not_leak),
                                       cmocka_unit_test(too_many_cells_are_joined),
                                       cmocka_unit_test(solves_obey_the_bound),
                                       cmocka_unit_test(memo_tells_vented_from_sealed),
                                       cmocka_unit_test(threads_share_a_solve),
                                       cmocka_unit_test(curve_follows_direct_solves)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
