/* Moving wrenches, motions and matrices; factoring; roots of polynomials. */
#include "physics/six.h"

#include "physics/near.h"
#include "physics/polynomial.h"
#include "posts/dice.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

static void random_numbers(dice *d, double *out, int count)
{
    for (int i = 0; i < count; i++)
        out[i] = dice_between(d, -2.0, 2.0);
}

/* A force along y at x = 3 turns about z; a turn about z moves what lies along x toward y. */
static void test_signs(void **state)
{
    (void)state;
    const double from[3] = {3, 0, 0}, to[3] = {0, 0, 0};
    double w[6] = {0, 2, 0, 0, 0, 1}, u[6] = {0, 0, 0, 0, 0, 0.5};
    fw_six_move_wrench(from, to, w, w);
    assert_true(w[1] == 2.0 && w[5] == 7.0 && w[3] == 0.0 && w[4] == 0.0);
    fw_six_move_motion(to, from, u, u);
    assert_true(u[1] == 1.5 && u[0] == 0.0 && u[2] == 0.0 && u[5] == 0.5);
}

/* Random A = B B^T + I / 2. */
static void random_matrix(dice *d, fw_six *a)
{
    double b[6][6];
    random_numbers(d, &b[0][0], 36);
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < 6; j++) {
            a->m[i][j] = i == j ? 0.5 : 0.0;
            for (int k = 0; k < 6; k++)
                a->m[i][j] += b[i][k] * b[j][k];
        }
}

/* Work is the same from wherever it is seen, there and back changes nothing, and a moved matrix
 * acts on moved vectors as it did on those before. */
static void test_moving(void **state)
{
    (void)state;
    dice d = {.seed = 3};
    for (int round = 0; round < 200; round++) {
        double a[3], b[3], w[6], u[6], w_b[6], u_b[6], got[6], work = 0.0, work_b = 0.0;
        random_numbers(&d, a, 3);
        random_numbers(&d, b, 3);
        random_numbers(&d, u, 6);
        fw_six k, f, k_b, f_b;
        random_matrix(&d, &k);
        assert_true(fw_six_invert(&k, &f));
        fw_six_apply(&k, u, w);
        fw_six_move_wrench(a, b, w, w_b);
        fw_six_move_motion(a, b, u, u_b);
        fw_six_move_stiffness(a, b, &k, &k_b);
        fw_six_move_flexibility(a, b, &f, &f_b);
        for (int i = 0; i < 6; i++) {
            work += w[i] * u[i];
            work_b += w_b[i] * u_b[i];
        }
        assert_near(work_b, work, 1e-11);
        fw_six_apply(&k_b, u_b, got);
        for (int i = 0; i < 6; i++)
            assert_within(got[i], w_b[i], 1000.0, 1e-13);
        fw_six_apply(&f_b, w_b, got);
        for (int i = 0; i < 6; i++)
            assert_within(got[i], u_b[i], 1000.0, 1e-11);
        fw_six_move_wrench(b, a, w_b, got);
        for (int i = 0; i < 6; i++)
            assert_within(got[i], w[i], 1000.0, 1e-14);
    }
}

/* Choose x, form A x, solve; also with rows in units a million times apart. */
static void test_solving(void **state)
{
    (void)state;
    dice d = {.seed = 4};
    for (int round = 0; round < 200; round++) {
        fw_six a;
        fw_six_factors factors;
        double x[6], b[6];
        int row = -1;
        random_matrix(&d, &a);
        random_numbers(&d, x, 6);
        double unit = round % 2 ? 1e6 : 1.0;
        for (int i = 0; i < 6; i++)
            for (int j = 0; j < 6; j++)
                a.m[i][j] *= (i < 3 ? 1.0 : unit) * (j < 3 ? 1.0 : unit);
        for (int j = 3; j < 6; j++)
            x[j] /= unit;
        fw_six_apply(&a, x, b);
        assert_true(fw_six_factor(&a, &factors, &row));
        fw_six_solve(&factors, b, b);
        for (int i = 0; i < 6; i++)
            assert_within(b[i], x[i], i < 3 ? 1.0 : 1.0 / unit, 1e-11);
    }
}

/* Row 4 a multiple of row 3, exactly and nearly; an indefinite matrix; one tiny row of a kind. */
static void test_not_held(void **state)
{
    (void)state;
    fw_six a = {{{0}}};
    fw_six_factors factors;
    int row = -1;
    for (int i = 0; i < 6; i++)
        a.m[i][i] = 4.0;
    a.m[3][4] = a.m[4][3] = 4.0;
    assert_false(fw_six_factor(&a, &factors, &row));
    assert_int_equal(row, 4);
    a.m[4][4] = 4.0 * (1.0 + 1e-11);
    assert_false(fw_six_factor(&a, &factors, &row));
    a.m[4][4] = 4.0 * (1.0 + 1e-9);
    assert_true(fw_six_factor(&a, &factors, &row));
    a.m[4][4] = 3.0;
    assert_false(fw_six_factor(&a, &factors, &row));
    a.m[3][4] = a.m[4][3] = 0.0;
    a.m[1][1] = 1e-13;
    assert_false(fw_six_factor(&a, &factors, &row));
    assert_int_equal(row, 1);
    a.m[1][1] = 1e-10;
    assert_true(fw_six_factor(&a, &factors, &row));
    a.m[5][0] = (double)INFINITY;
    assert_false(fw_six_factor(&a, &factors, &row));
    assert_int_equal(row, 5);
}

static void assert_found(const double *w, int degree, double low, double high, double root)
{
    double point[FW_POLYNOMIAL_POINTS], nearest = (double)INFINITY;
    int count = fw_polynomial_points(w, degree, low, high, point);
    for (int i = 0; i < count; i++)
        nearest = fmin(nearest, fabs(point[i] - root));
    if (!(nearest < 1e-7))
        fail_msg("no root at %g", root);
}

/* (x - a)(x - b)(x - c)(x - e), some of them alike, and with leading zeros. */
static void test_roots(void **state)
{
    (void)state;
    const double roots[][4] = {{0.1, 0.2, 0.7, 0.9}, {0.3, 0.3, 0.6, 0.6}, {0.5, 0.5, 0.5, 0.5},
                               {-3, 0.4, 0.4, 9},    {-1, -1, 0.25, 2},    {0.001, 0.0011, 0.5, 1}};
    for (int r = 0; r < 6; r++) {
        double w[5] = {1.0, 0, 0, 0, 0};
        for (int i = 0; i < 4; i++) {
            for (int k = i + 1; k > 0; k--)
                w[k] = w[k - 1] - roots[r][i] * w[k];
            w[0] *= -roots[r][i];
            if (i == 1 && roots[r][1] >= 0.0)
                assert_found(w, 4, 0.0, 1.0, roots[r][1]); /* w[3] = w[4] = 0 */
        }
        for (int i = 0; i < 4; i++)
            if (roots[r][i] > 0.0 && roots[r][i] < 1.0)
                assert_found(w, 4, 0.0, 1.0, roots[r][i]);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_signs),   cmocka_unit_test(test_moving),
        cmocka_unit_test(test_solving), cmocka_unit_test(test_not_held),
        cmocka_unit_test(test_roots),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
