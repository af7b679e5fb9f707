/* Exact values of the five-point cell scheme with u = 0 on pixel faces, worked out by hand
 * elimination on unit pixels (wall coefficient 2): the solver must meet them to 1e-9. */
#include "physics/film_shapes.h"

typedef struct fraction {
    const char *rows; /* '#' film, 'o' sealed, '.' open; '/' ends a row */
    double sum_u;
} fraction;

static drawing draw_rows(const char *rows)
{
    int width = 0, height = 1;
    for (const char *c = rows; *c != '\0'; c++) {
        if (*c == '/')
            height++;
        else if (height == 1)
            width++;
    }
    drawing d = draw_new(width, height);
    int x = 0, y = 0;
    for (const char *c = rows; *c != '\0'; c++) {
        if (*c == '/') {
            x = 0;
            y++;
            continue;
        }
        *draw_at(&d, x++, y) = *c == '#' ? FILM : *c == 'o' ? CAVITY : OPEN;
    }
    return d;
}

static void small_masks(void **state)
{
    (void)state;
    static const fraction table[] = {
        {"#", 1.0 / 8},
        {"##", 1.0 / 3},
        {"##/##", 1},
        {"#####", 249.0 / 232},
        {"###/###/###", 157.0 / 40},
        {"#####/#####", 127.0 / 33},
        {"####/####/####/####", 11},
        {"####/####/####", 758.0 / 119},
        {"#####/#####/#####/#####/#####", 17519.0 / 696},
        {"#./##", 23.0 / 40},
        {".#./###/.#.", 31.0 / 24},
        {"######/######/######/######/######/######", 653.0 / 13},
        {"###/#.#/###", 2},
        {"###/#o#/###", 19.0 / 5},
        {"#####/#####/##.##/#####/#####", 14},
        {"#####/#####/##o##/#####/#####", 25.0459770115},
        {"#######/#######/##...##/##...##/##...##/#######/#######", 21.8336106489},
        {"#######/#######/##ooo##/##ooo##/##ooo##/#######/#######", 86.6315224393},
    };
    for (size_t i = 0; i < sizeof table / sizeof *table; i++) {
        drawing d = draw_rows(table[i].rows);
        assert_close(integral(&d, 1, 1, 1), table[i].sum_u, 1e-9);
        free(d.pixel);
    }
}

static void squares(void **state)
{
    (void)state;
    const struct {
        int n;
        double sum_u;
    } table[] = {{8, 2591.0 / 17}, {16, 2337.6794823788}};
    for (int i = 0; i < 2; i++) {
        drawing d = draw_new(table[i].n, table[i].n);
        draw_box(&d, 0, 0, d.width, d.height, FILM);
        assert_close(integral(&d, 1, 1, 1), table[i].sum_u, 1e-9);
        free(d.pixel);
    }
}

/* The fields of the sealed 3 x 3 ring: corner .325, edge .475, cavity .600. */
static void sealed_ring_field(void **state)
{
    (void)state;
    drawing d = draw_rows("###/#o#/###");
    fw_film_shape shape = draw_shape(&d, 1, 1);
    fw_film_solution solution = solve(&shape, 1, (double)INFINITY, 1e-13);
    assert_close(solution.cavity_u_mm2[0], 0.6, 1e-9);
    assert_int_equal(solution.cell_count, 8);
    static const double expected[8] = {.325, .475, .325, .475, .475, .325, .475, .325};
    for (uint32_t i = 0; i < 8; i++)
        assert_close((double)solution.cell[i].u_mm2, expected[i], 1e-6);
    fw_film_solution_free(&solution);
    shape_free(&shape);
    free(d.pixel);
}

/* A long strip w pixels wide: w^3 / 12 + w / 6 for each pixel of length (in the limit). */
static void strips(void **state)
{
    (void)state;
    for (int w = 1; w <= 9; w += 2) {
        drawing a = draw_new(w, 200), b = draw_new(w, 300);
        draw_box(&a, 0, 0, w, 200, FILM);
        draw_box(&b, 0, 0, w, 300, FILM);
        const double each = (integral(&b, 1, 1, 1) - integral(&a, 1, 1, 1)) / 100;
        assert_close(each, (double)w * w * w / 12 + w / 6.0, 1e-9);
        free(a.pixel);
        free(b.pixel);
    }
}

/* Twice the pixel is sixteen times the integral. */
static void scale(void **state)
{
    (void)state;
    drawing d = draw_rows("####/##.#/#oo#/####");
    assert_close(integral(&d, 0.1, 0.1, 1) * 16, integral(&d, 0.2, 0.2, 1), 1e-12);
    free(d.pixel);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(small_masks), cmocka_unit_test(squares),
                                       cmocka_unit_test(sealed_ring_field),
                                       cmocka_unit_test(strips), cmocka_unit_test(scale)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
