/* A layer drawn off through a spring: the peak force against tables of an independent integration
 * (implicit and explicit library solvers at 1e-11; power series of 30 digits for the digits given
 * beyond that), against both asymptotes, and the properties that any law must show. */
#include "physics/film_curve.h"
#include "physics/film_shapes.h"
#include "physics/laws.h"
#include "physics/pulloff.h"
#include "physics/separation.h"

static const double atmosphere = 0.101325; /* MPa */

static fw_pulloff_peak peak_of(const fw_pulloff *pulloff)
{
    fw_pulloff_peak peak = {0};
    fw_fault fault = {0};
    if (fw_pulloff_solve(pulloff, &peak, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    return peak;
}

/* Units in which h0, v, k h0 and so the table are 1: the rigid force is k h0 / L. */
static fw_pulloff of_l(const double *g, double tolerance)
{
    return (fw_pulloff){{straight, g}, 1, 1, 1, 1000, tolerance};
}

/* The G of an L: 12 G = k h0 / L, k h0 = 1000 N/mm * 0.001 mm. */
static double g_of_l(double l)
{
    return 1 / (12 * l);
}

/* L; v t / h0, x / h0 and F / (k h0) at the peak. */
static const double table[14][5] = {{1e-6, 995.51217, 9.0455225, 986.46665, 9.8646665e-4},
                                    {1e-4, 98.134331, 3.7315681, 94.402762, 9.4402762e-3},
                                    {1e-3, 30.455259, 2.2865823, 28.168677, 0.028168677},
                                    {0.01, 9.2867223, 1.3244546, 7.9622677, 0.079622677},
                                    {0.1, 2.7374996, 0.69919725, 2.0383024, 0.20383024},
                                    {0.3, 1.4973449, 0.49031985, 1.0070251, 0.30210752},
                                    {1, 0.75476626, 0.31530039, 0.43946587, 0.43946587},
                                    {3, 0.39198065, 0.198217, 0.19376365, 0.58129096},
                                    {10, 0.18291638, 0.10974727, 0.073169104, 0.73169104},
                                    {30, 0.086854971, 0.058770009, 0.028084963, 0.84254888},
                                    {100, 0.036200911, 0.026968205, 0.009232706, 0.92327060},
                                    {1e3, 0.005817045, 0.0048314003, 9.8564473e-4, 0.98564473},
                                    {1e4, 8.1107017e-4, 7.1128325e-4, 9.9786918e-5, 0.99786918},
                                    {1e5, 1.0413861e-4, 9.4141436e-5, 9.9971763e-6, 0.99971763}};

static void table_of_stiffness(void **state)
{
    (void)state;
    for (int i = 0; i < 14; i++) {
        const double l = table[i][0], g = g_of_l(l);
        const fw_pulloff pulloff = of_l(&g, 1e-11);
        const fw_pulloff_peak peak = peak_of(&pulloff);
        assert_close(peak.seconds * 1000, table[i][1], 1e-6);
        assert_close(peak.gap_um - 1, table[i][2], 1e-6);
        assert_close(peak.force_N, table[i][3], 1e-6);
        assert_close(peak.force_N * l, table[i][4], 1e-6);
    }
}

/* The same by power series of 30 digits. In the table the last row's time and way are 9e-7 low. */
static void more_digits(void **state)
{
    (void)state;
    const double digits[][4] = {{0.1, 2.73749961856, 0.699197252269, 2.03830236629},
                                {10, 0.182916378262, 0.10974727381, 0.0731691044519},
                                {1e3, 0.00581704504835, 0.00483140031436, 0.000985644733983},
                                {1e5, 0.000104138701602, 9.41415253165e-5, 9.99717628591e-6}};
    for (int i = 0; i < 4; i++) {
        const double g = g_of_l(digits[i][0]);
        const fw_pulloff pulloff = of_l(&g, 1e-12);
        const fw_pulloff_peak peak = peak_of(&pulloff);
        assert_close(peak.seconds * 1000, digits[i][1], 1e-8);
        assert_close(peak.gap_um - 1, digits[i][2], 1e-8);
        assert_close(peak.force_N, digits[i][3], 3e-11);
    }
}

/* The force stays within the tolerance asked for, from far softer to far stiffer than any machine,
 * and costs some hundred looks at the law. */
static void tolerance_is_kept(void **state)
{
    (void)state;
    for (double l = 1e-9; l < 2e9; l *= 10) {
        const double g = g_of_l(l);
        fw_pulloff pulloff = of_l(&g, 1e-11);
        const double exact = peak_of(&pulloff).force_N;
        for (double tolerance = 1e-9; tolerance < 2e-4; tolerance *= 10) {
            pulloff.tolerance = tolerance;
            assert_close(peak_of(&pulloff).force_N, exact, tolerance);
        }
        pulloff.tolerance = 0;
        const fw_pulloff_peak usual = peak_of(&pulloff);
        assert_close(usual.force_N, exact, 1e-4);
        assert_true(usual.evaluations > 5 && usual.evaluations < 600);
        if (l > 9e-7 && l < 2e5)
            assert_true(usual.evaluations < 300);
    }
}

/* F / F_rigid = 1 - (3 / L)(ln(L / 3) - 1) for L -> infinity, the next term of order (ln L / L)^2.
 */
static void stiff_limit(void **state)
{
    (void)state;
    for (double l = 1e4; l < 2e7; l *= 10) {
        const double g = g_of_l(l);
        const fw_pulloff pulloff = of_l(&g, 1e-11);
        const double expected = 1 - 3 / l * (log(l / 3) - 1);
        assert_true(fabs(peak_of(&pulloff).force_N * l - expected) < 10 * pow(log(l) / l, 2));
    }
}

/* F / (k h0) = S - (3 / 2) S^(1/3) + pi / 2 + o(1), S = L^(-1/2), for L -> 0. */
static void soft_limit(void **state)
{
    (void)state;
    double last = 1;
    for (double l = 1e-4; l > 1e-11; l /= 100) {
        const double g = g_of_l(l), s = 1 / sqrt(l);
        const fw_pulloff pulloff = of_l(&g, 1e-11);
        const double off = peak_of(&pulloff).force_N - (s - 1.5 * cbrt(s) + circle / 2);
        assert_true(fabs(off) < 0.7 * last); /* it does go to 0 */
        last = fabs(off);
    }
    const double g = g_of_l(1e-6);
    const fw_pulloff pulloff = of_l(&g, 1e-9);
    assert_close(peak_of(&pulloff).force_N, 0.98646665 * 1000, 1e-6);
}

static fw_pulloff stefan(const double *g, double gap_um, double stiffness_N_mm)
{
    return (fw_pulloff){{straight, g}, 500, 1, gap_um, stiffness_N_mm, 1e-9};
}

/* Stefan's disc, R 10 mm, 0.5 Pa s, 1 mm/s, 100 um: k = 10, 100, 1000, 10000 N/mm and rigid. */
static void disc_on_a_spring(void **state)
{
    (void)state;
    const double g = disc_integral(10);
    const double rows[][2] = {{1e1, 3.43777541},
                              {1e2, 7.98267015},
                              {1e3, 14.7582174},
                              {1e4, 20.5044349},
                              {(double)INFINITY, 23.5619449},
                              {0, 23.5619449}};
    for (int i = 0; i < 6; i++) {
        const fw_pulloff pulloff = stefan(&g, 100, rows[i][0]);
        assert_close(peak_of(&pulloff).force_N, rows[i][1], i < 4 ? 1e-6 : 1e-8);
    }
    const fw_pulloff rigid = stefan(&g, 100, 0);
    assert_true(peak_of(&rigid).seconds == 0 && peak_of(&rigid).gap_um == 100);
}

/* R = 2 .. 40 mm at 1000 N/mm: the exponent in the area falls from 1.95 to 1.22. */
static void area_exponents(void **state)
{
    (void)state;
    const double rows[][2] = {
        {2, 0.037453}, {5, 1.328210}, {10, 14.75822}, {20, 109.2241}, {40, 596.6208}};
    double last_force = 0, last_slope = 2;
    for (int i = 0; i < 5; i++) {
        const double g = disc_integral(rows[i][0]);
        const fw_pulloff pulloff = stefan(&g, 100, 1000);
        const double force = peak_of(&pulloff).force_N;
        assert_close(force, rows[i][1], i == 0 ? 1e-5 : 1e-6); /* printed digits */
        if (i > 0) {
            const double slope = log(force / last_force) / log(rows[i][0] / rows[i - 1][0]) / 2;
            assert_true(slope < last_slope && slope > 0.5);
            last_slope = slope;
            if (i == 1)
                assert_close(slope, 1.95, 0.003);
        }
        last_force = force;
    }
    assert_close(last_slope, 1.22, 0.005);
}

/* R, h0, k; force N, time s, gap um; a disc under one atmosphere (closed form of its law). */
static const double capped_rows[4][6] = {{10, 100, 1e3, 14.7582, 0.0316343, 116.876},
                                         {10, 50, 1e3, 26.388, 0.0342535, 57.8655},
                                         {10, 20, 1e2, 29.398, 0.307868, 33.8919},
                                         {20, 50, 1e3, 114.70, 0.128662, 63.9613}};

static void capped_disc_on_a_spring(void **state)
{
    (void)state;
    for (int i = 0; i < 4; i++) {
        const double *row = capped_rows[i];
        capped_disc_law law = {row[0], atmosphere, 0};
        fw_pulloff pulloff = {{capped_disc, &law}, 500, 1, row[1], row[2], 1e-8};
        const fw_pulloff_peak peak = peak_of(&pulloff);
        assert_close(peak.force_N, row[3], 2e-5);
        assert_close(peak.seconds, row[4], 5e-6);
        assert_close(peak.gap_um, row[5], 5e-6);
        assert_true(peak.force_N < atmosphere * circle * row[0] * row[0]);
        law.calls = 0;
        pulloff.tolerance = 0;
        const fw_pulloff_peak usual = peak_of(&pulloff);
        assert_close(usual.force_N, peak.force_N, 1e-4);
        assert_true(usual.evaluations == law.calls && law.calls < 500);
    }
}

/* The law itself, on a rigid machine: 101325 Pa at 100, 50 and 20 um. */
static void capped_disc_rigid(void **state)
{
    (void)state;
    const double rows[][2] = {{100, 19.1908130}, {50, 27.4642473}, {20, 30.7289757}};
    for (int i = 0; i < 3; i++) {
        capped_disc_law law = {10, atmosphere, 0};
        const fw_pulloff pulloff = {{capped_disc, &law}, 500, 1, rows[i][0], 0, 0};
        assert_close(peak_of(&pulloff).force_N, rows[i][1], 1e-8);
    }
}

/* Uncapped: 54.612 N / 0.0801748 s / 75.5627 um and so on. */
static void uncapped_of_the_same_rows(void **state)
{
    (void)state;
    const double rows[4][6] = {{10, 100, 1e3, 14.7582, 0.0316343, 116.876},
                               {10, 50, 1e3, 54.612, 0.0801748, 75.5627},
                               {10, 20, 1e2, 69.2373, 0.742189, 69.8163},
                               {20, 50, 1e3, 298.31, 0.356426, 108.115}};
    for (int i = 0; i < 4; i++) {
        const double g = disc_integral(rows[i][0]);
        const fw_pulloff pulloff = stefan(&g, rows[i][1], rows[i][2]);
        const fw_pulloff_peak peak = peak_of(&pulloff);
        assert_close(peak.force_N, rows[i][3], 2e-5);
        assert_close(peak.seconds, rows[i][4], 5e-6);
        assert_close(peak.gap_um, rows[i][5], 5e-6);
    }
}

/* Far above the cap, at every stiffness: below P A, below the rigid force, rising with stiffness,
 * at the tolerance asked for. */
static void strongly_capped(void **state)
{
    (void)state;
    const double gaps[] = {100, 20, 5, 1};
    for (int h = 0; h < 4; h++) {
        double last = 0;
        for (double k = 0.1; k < 2e7; k *= 10) {
            capped_disc_law law = {10, atmosphere, 0};
            fw_pulloff pulloff = {{capped_disc, &law}, 500, 1, gaps[h], k, 1e-9};
            const double exact = peak_of(&pulloff).force_N;
            const double rigid = capped_disc(&law, fw_separation_q(500, 1, gaps[h]));
            assert_true(exact > last && exact < rigid);
            last = exact;
            pulloff.tolerance = 1e-4;
            assert_close(peak_of(&pulloff).force_N, exact, 1e-4);
            pulloff.tolerance = 1e-6;
            assert_close(peak_of(&pulloff).force_N, exact, 4e-6);
        }
    }
}

static double curve_force(const void *context, double q)
{
    return fw_film_curve_force(context, q);
}

/* The same rows through the load curve of a disc drawn in pixels: curve and raster are good for 1 %
 * of the force each. */
static void load_curve_on_a_spring(void **state)
{
    (void)state;
    drawing d = draw_new(204, 204);
    draw_disc(&d, 102, 102, 100, FILM);
    for (int i = 0; i < 4; i++) {
        const double *row = capped_rows[i], px_mm = row[0] / 100;
        fw_film_shape shape = draw_shape(&d, px_mm, px_mm);
        fw_film_curve curve;
        const fw_film_options options = {0};
        assert_int_equal(fw_film_curve_build(&shape, &options, atmosphere, NULL, &curve, NULL),
                         FW_OK);
        const fw_pulloff pulloff = {{curve_force, &curve}, 500, 1, row[1], row[2], 0};
        const fw_pulloff_peak peak = peak_of(&pulloff);
        assert_close(peak.force_N, row[3], 0.01);
        assert_close(peak.gap_um, row[5], 0.01);
        assert_true(peak.evaluations < 500);
        shape_free(&shape);
    }
    free(d.pixel);
}

/* Two islands: a law that is the sum of a straight and a capped one, between its two bounds. */
typedef struct islands {
    double g;
    capped_disc_law disc;
} islands;

static double islands_force(const void *context, double q)
{
    const islands *both = context;
    return straight(&both->g, q) + capped_disc(&both->disc, q);
}

static void sum_of_laws(void **state)
{
    (void)state;
    islands both = {disc_integral(10), {10, atmosphere, 0}};
    const double twice = 2 * both.g;
    fw_pulloff pulloff = stefan(&twice, 50, 1000);
    const double uncapped = peak_of(&pulloff).force_N;
    pulloff.law = (fw_pulloff_law){capped_disc, &both.disc};
    const double one = peak_of(&pulloff).force_N;
    pulloff.law = (fw_pulloff_law){islands_force, &both};
    const double sum = peak_of(&pulloff).force_N;
    assert_true(one < sum && sum < uncapped);
    both.disc.cap_MPa = 1e9; /* never reached: two equal straight lines */
    assert_close(peak_of(&pulloff).force_N, uncapped, 1e-8);
}

/* Forces scale with forces, and the pairs (eta, v) and (h0, lengths) as the equation says. */
static void scaling(void **state)
{
    (void)state;
    const double g = disc_integral(10), ten = 10 * g;
    fw_pulloff pulloff = stefan(&g, 100, 1000);
    const fw_pulloff_peak base = peak_of(&pulloff);
    pulloff.law.context = &ten;
    pulloff.stiffness_N_mm *= 10;
    assert_close(peak_of(&pulloff).force_N, 10 * base.force_N, 1e-9);
    pulloff = stefan(&g, 100, 1000);
    pulloff.viscosity_mPa_s /= 7;
    pulloff.speed_mm_s *= 7;
    assert_close(peak_of(&pulloff).force_N, base.force_N, 1e-9);
    assert_close(peak_of(&pulloff).seconds, base.seconds / 7, 1e-7);
}

/* The peak rises with speed, stiffness and viscosity, falls with the gap, stays below the rigid
 * force and below sqrt(k C v) / h0 (x < v t, so 1 / h0^2 - 1 / h^2 < k v t^2 / C). */
static void monotone_and_bounded(void **state)
{
    (void)state;
    const double g = disc_integral(10);
    for (double k = 1; k < 2e5; k *= 7) {
        double last = 0;
        for (double v = 1e-3; v < 100; v *= 2.5) {
            fw_pulloff pulloff = stefan(&g, 60, k);
            pulloff.speed_mm_s = v;
            const double force = peak_of(&pulloff).force_N;
            const double rigid = fw_separation_q(500, v, 60) * g;
            assert_true(force > last && force < rigid);
            assert_true(force < sqrt(k * 0.06 * rigid));
            last = force;
            pulloff.stiffness_N_mm *= 1.1;
            assert_true(peak_of(&pulloff).force_N > force);
            pulloff = stefan(&g, 61, k);
            pulloff.speed_mm_s = v;
            assert_true(peak_of(&pulloff).force_N < force);
        }
    }
}

/* Highest speed: its peak is the limit, a little more is too much. */
static void fastest(void **state)
{
    (void)state;
    const double k[] = {0, 1, 100, 1e4, 1e7};
    for (int i = 0; i < 5; i++) {
        for (double limit = 0.01; limit < 31; limit *= 3) {
            capped_disc_law law = {10, atmosphere, 0};
            fw_pulloff pulloff = {{capped_disc, &law}, 500, 1e6, 40, k[i], 1e-7};
            double speed;
            assert_int_equal(fw_pulloff_fastest(&pulloff, limit, &speed, NULL), FW_OK);
            if (speed == pulloff.speed_mm_s) {
                assert_true(peak_of(&pulloff).force_N <= limit);
                continue;
            }
            pulloff.speed_mm_s = speed;
            const double force = peak_of(&pulloff).force_N;
            assert_true(force <= limit);
            assert_close(force, limit, 4e-7);
            pulloff.speed_mm_s *= 1.01;
            assert_true(peak_of(&pulloff).force_N > limit);
        }
    }
}

/* At a coarse tolerance too the limit is kept, as the same solution sees it. */
static void fastest_keeps_the_limit(void **state)
{
    (void)state;
    const double g = disc_integral(10);
    for (double k = 1; k < 2e6; k *= 3) {
        for (double limit = 0.01; limit < 100; limit *= 1.7) {
            fw_pulloff pulloff = {{straight, &g}, 500, 1e4, 40, k, 1e-3};
            double speed;
            assert_int_equal(fw_pulloff_fastest(&pulloff, limit, &speed, NULL), FW_OK);
            pulloff.speed_mm_s = speed;
            assert_true(peak_of(&pulloff).force_N <= limit);
        }
    }
}

static void fastest_at_the_ends(void **state)
{
    (void)state;
    capped_disc_law law = {10, atmosphere, 0};
    const fw_pulloff pulloff = {{capped_disc, &law}, 500, 3, 40, 1000, 0};
    double speed = -1;
    assert_int_equal(fw_pulloff_fastest(&pulloff, 32, &speed, NULL), FW_OK); /* P A = 31.8 N */
    assert_true(speed == 3);
    assert_int_equal(fw_pulloff_fastest(&pulloff, 0, &speed, NULL), FW_OK);
    assert_true(speed == 0);
    assert_int_equal(fw_pulloff_fastest(&pulloff, (double)NAN, &speed, NULL), FW_OK);
    assert_true(speed == 0);
}

/* Constant force on Stefan's disc: 10 N opens 100 to 200 um in 0.0883573 s, all in 0.1178097 s. */
static void constant_force(void **state)
{
    (void)state;
    const double g = disc_integral(10);
    const fw_pulloff pulloff = stefan(&g, 100, 0);
    assert_close(fw_pulloff_seconds(&pulloff, 10, 100, 200), 0.0883573, 1e-6);
    assert_close(fw_pulloff_seconds(&pulloff, 10, 100, (double)INFINITY), 0.1178097, 1e-6);
    assert_close(fw_pulloff_seconds(&pulloff, 20, 50, 70),
                 fw_pulloff_seconds(&pulloff, 10, 50, 70) / 2, 1e-12);
    assert_true(isinf(fw_pulloff_seconds(&pulloff, 0, 100, 200)));
    const double small = 1e-9 * g; /* a far larger q for the same force */
    fw_pulloff speck = pulloff;
    speck.law.context = &small;
    assert_close(fw_pulloff_seconds(&speck, 10, 100, 200), 0.0883573e-9, 1e-6);
    capped_disc_law law = {10, atmosphere, 0};
    fw_pulloff capped = pulloff;
    capped.law = (fw_pulloff_law){capped_disc, &law};
    assert_close(fw_pulloff_seconds(&capped, 10, 100, 200), 0.0883573, 1e-6); /* below the cap */
    assert_true(fw_pulloff_seconds(&capped, 25, 100, 200) < 0.0883573 / 2.5);
    assert_true(fw_pulloff_seconds(&capped, 32, 100, 200) == 0); /* over P A */
}

static double nothing(const void *context, double q)
{
    (void)context;
    return 0 * q;
}

static double no_number(const void *context, double q)
{
    (void)context;
    return q * (double)NAN;
}

static void empty_and_wrong(void **state)
{
    (void)state;
    fw_pulloff_peak peak;
    const fw_pulloff good = {{nothing, NULL}, 500, 1, 50, 1000, 0};
    assert_int_equal(fw_pulloff_solve(&good, &peak, NULL), FW_OK);
    assert_true(peak.force_N == 0 && peak.seconds == 0 && peak.gap_um == 50);
    fw_pulloff bad[8] = {good, good, good, good, good, good, good, good};
    bad[0].law.force_N = no_number;
    bad[1].viscosity_mPa_s = 0;
    bad[2].speed_mm_s = -1;
    bad[3].gap_um = 0;
    bad[4].stiffness_N_mm = -1;
    bad[5].stiffness_N_mm = (double)NAN;
    bad[6].tolerance = 0.1;
    bad[7].gap_um = (double)NAN;
    for (int i = 0; i < 8; i++) {
        fw_fault fault = {0};
        assert_int_equal(fw_pulloff_solve(&bad[i], &peak, &fault), FW_INPUT);
        assert_true(fault.text[0] != 0);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(table_of_stiffness),
                                       cmocka_unit_test(more_digits),
                                       cmocka_unit_test(tolerance_is_kept),
                                       cmocka_unit_test(stiff_limit),
                                       cmocka_unit_test(soft_limit),
                                       cmocka_unit_test(disc_on_a_spring),
                                       cmocka_unit_test(area_exponents),
                                       cmocka_unit_test(capped_disc_rigid),
                                       cmocka_unit_test(capped_disc_on_a_spring),
                                       cmocka_unit_test(uncapped_of_the_same_rows),
                                       cmocka_unit_test(strongly_capped),
                                       cmocka_unit_test(load_curve_on_a_spring),
                                       cmocka_unit_test(sum_of_laws),
                                       cmocka_unit_test(scaling),
                                       cmocka_unit_test(monotone_and_bounded),
                                       cmocka_unit_test(fastest),
                                       cmocka_unit_test(fastest_keeps_the_limit),
                                       cmocka_unit_test(fastest_at_the_ends),
                                       cmocka_unit_test(constant_force),
                                       cmocka_unit_test(empty_and_wrong)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
