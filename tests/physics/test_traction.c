/* Laws in area and rim: outlines with known areas and lengths. The laws themselves are empirical;
 * what is held here is their geometry and their sums. */
#include "physics/film_shapes.h"
#include "physics/traction.h"

static const double pi = 3.14159265358979323846;

static fw_film_solution pull(const fw_film_shape *shape, const fw_traction *traction)
{
    fw_film_solution out;
    assert_int_equal(fw_traction_solve(shape, traction, &out, NULL), FW_OK);
    double force = 0, area = 0;
    for (uint32_t i = 0; i < out.cell_count; i++) {
        force += (double)out.cell[i].u_mm2 * (double)out.cell[i].area_mm2;
        area += (double)out.cell[i].area_mm2;
    }
    for (uint32_t i = 0; i < out.cavity_count; i++) {
        force += out.cavity_u_mm2[i] * out.cavity_area_mm2[i];
        area += out.cavity_area_mm2[i];
    }
    assert_close(force, out.integral_mm4, 1e-5); /* cells are single precision */
    assert_close(area, out.area_mm2, 1e-5);
    return out;
}

/* A kN/mm2 of nothing but rim: the force is the length of the outline. */
static void rims_of_discs(void **state)
{
    (void)state;
    const fw_traction rim = {.law = FW_TRACTION_FILM, .rim_N_mm = 1, .front_mm = 1};
    for (int r = 20; r <= 160; r *= 2) {
        drawing d = draw_new(2 * r + 8, 2 * r + 8);
        draw_disc(&d, r + 4.3, r + 3.9, r, FILM);
        fw_film_shape shape = draw_shape(&d, 0.05, 0.05);
        fw_film_solution out = pull(&shape, &rim);
        assert_close(out.integral_mm4, 2 * pi * r * 0.05, 0.02);
        assert_close(out.moment_x_mm5 / out.integral_mm4, (r + 4.3) * 0.05, 5e-3);
        fw_film_solution_free(&out);
        shape_free(&shape);
        free(d.pixel);
    }
}

/* Straight outlines along the pixels are exact but for their corners; unequal pixels count by
 * length. */
static void rims_of_rectangles(void **state)
{
    (void)state;
    const fw_traction rim = {.law = FW_TRACTION_FILM, .rim_N_mm = 0.3, .front_mm = 0.8};
    drawing d = draw_new(400, 300);
    draw_box(&d, 0, 0, 400, 300, FILM);
    fw_film_shape shape = draw_shape(&d, 0.05, 0.1);
    fw_film_solution out = pull(&shape, &rim);
    const double length = 2 * (400 * 0.05 + 300 * 0.1);
    assert_true(out.integral_mm4 <= 0.3 * length);
    assert_true(out.integral_mm4 >= 0.3 * (length - 4 * 0.6 * 8 * 0.1));
    fw_film_solution_free(&out);
    shape_free(&shape);
    free(d.pixel);
}

/* The rim's part stays within the front: beyond it there is the even part alone. */
static void rims_stay_within_the_front(void **state)
{
    (void)state;
    const fw_traction law = {
        .law = FW_TRACTION_FILM, .area_MPa = 0.01, .rim_N_mm = 0.05, .front_mm = 2};
    drawing d = draw_new(400, 400);
    draw_box(&d, 0, 0, 400, 400, FILM);
    fw_film_shape shape = draw_shape(&d, 0.05, 0.05);
    fw_film_solution out = pull(&shape, &law);
    assert_close(out.integral_mm4, 0.01 * 400 + 0.05 * 80, 0.02);
    const double cell = out.cell_px * 0.05;
    int inner = 0, outer = 0;
    for (uint32_t i = 0; i < out.cell_count; i++) {
        const double x = (double)out.cell[i].x_px * 0.05, y = (double)out.cell[i].y_px * 0.05;
        const double from_rim = fmin(fmin(x, 20 - x), fmin(y, 20 - y));
        if (from_rim > 2 + cell) {
            assert_close((double)out.cell[i].u_mm2, 0.01, 1e-6);
            inner++;
        } else if (from_rim < 1) {
            assert_true((double)out.cell[i].u_mm2 > 0.015);
            outer++;
        }
    }
    assert_true(inner > 0 && outer > 0);
    fw_film_solution_free(&out);
    shape_free(&shape);
    free(d.pixel);
}

/* A sealed hole has no open rim and sucks on its own area; an open one has a rim and nothing else.
 */
static void cavities(void **state)
{
    (void)state;
    const fw_traction law = {.law = FW_TRACTION_FILM,
                             .area_MPa = 0.01,
                             .rim_N_mm = 0.02,
                             .front_mm = 1,
                             .cavity_MPa = 0.1};
    for (int sealed = 0; sealed < 2; sealed++) {
        drawing d = draw_new(200, 200);
        draw_box(&d, 0, 0, 200, 200, FILM);
        draw_box(&d, 80, 80, 120, 120, sealed ? CAVITY : OPEN);
        fw_film_shape shape = draw_shape(&d, 0.05, 0.05);
        fw_film_solution out = pull(&shape, &law);
        const double rim = sealed ? 40 : 40 + 8, solid = 96;
        assert_close(out.integral_mm4, 0.01 * solid + 0.02 * rim + (sealed ? 0.1 * 4 : 0), 0.02);
        fw_film_solution_free(&out);
        shape_free(&shape);
        free(d.pixel);
    }
}

static void tables(void **state)
{
    (void)state;
    const fw_points table = {3, {{10, 1}, {20, 1.5}, {40, 3}}};
    static const double at[][2] = {{0, 0}, {5, 0.5}, {10, 1}, {15, 1.25}, {30, 2.25}, {60, 4.5}};
    for (size_t i = 0; i < sizeof at / sizeof *at; i++)
        assert_true(fabs(fw_traction_table_N(&table, at[i][0]) - at[i][1]) < 1e-12);
    drawing d = draw_new(100, 120);
    draw_box(&d, 0, 0, 100, 120, FILM);
    draw_box(&d, 40, 40, 60, 60, CAVITY);
    fw_film_shape shape = draw_shape(&d, 0.05, 0.05);
    const fw_traction law = {.law = FW_TRACTION_TABLE, .table = &table};
    fw_film_solution out = pull(&shape, &law);
    assert_close(out.integral_mm4, 2.25, 1e-9);
    assert_close(out.moment_y_mm5 / out.integral_mm4, 3, 0.02);
    fw_film_solution_free(&out);
    shape_free(&shape);
    free(d.pixel);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(rims_of_discs),
                                       cmocka_unit_test(rims_of_rectangles),
                                       cmocka_unit_test(rims_stay_within_the_front),
                                       cmocka_unit_test(cavities), cmocka_unit_test(tables)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
