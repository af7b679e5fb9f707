/* Vents: which openings relieve a cavity. A square tube of 40 px with walls of 5 px (100 um pixels
 * and layers), the smallest vent 0.5 mm. Widths as the job names them; that narrow holes relieve
 * next to nothing follows from flow through a tube beside flow through the film (Stefan,
 * Poiseuille). */
#include "check/stage.h"

enum { SIDE = 40, WALL = 5, LAYERS = 24 };

/* The tube with a slot of `width` px through one wall, open in layers [from, to). */
static stage tube(int width, int from, int to)
{
    stage s = stage_new(SIDE + 20, SIDE + 20, LAYERS);
    s.job.vent_mm = 0.5;
    s.job.max_peel_N = 1e-6; /* nothing is left to its bound */
    stage_box(&s, 10, 10, 0, 10 + SIDE, 10 + SIDE, LAYERS, 255);
    stage_box(&s, 10 + WALL, 10 + WALL, 0, 10 + SIDE - WALL, 10 + SIDE - WALL, LAYERS, 0);
    stage_box(&s, 10 + SIDE / 2, 10, from, 10 + SIDE / 2 + width, 10 + WALL, to, 0);
    return s;
}

static fw_report judged(int width, int from, int to)
{
    stage s = tube(width, from, to);
    fw_report report = stage_judge(&s);
    stage_free(&s);
    return report;
}

static void narrow_slots_do_not_vent(void **state)
{
    (void)state;
    fw_report sealed = judged(0, 0, LAYERS), wide = judged(10, 0, LAYERS);
    assert_null(finding_of(&sealed, FW_POOR_VENT));
    assert_null(finding_of(&wide, FW_POOR_VENT));
    assert_null(finding_of(&wide, FW_BLIND_CAVITY));
    const double shut_N = sealed.layer[15].peel_N, open_N = wide.layer[15].peel_N;
    assert_true(open_N < 0.3 * shut_N);
    for (int width = 1; width <= 8; width++) {
        fw_report report = judged(width, 0, LAYERS);
        const fw_finding *poor = finding_of(&report, FW_POOR_VENT);
        assert_null(finding_of(&report, FW_BLIND_CAVITY));
        assert_int_equal(poor != NULL, width < 5);
        if (width < 5) { /* the slot itself is open, so a little less than with none */
            assert_int_equal(poor->severity, FW_WARN);
            assert_int_equal(poor->count, LAYERS - 4); /* from the layer in which a vent fits on */
            assert_near(poor->area_mm2 / (double)poor->count, 9, 0.02);
            assert_true(report.layer[15].peel_N > 0.85 * shut_N);
            assert_true(report.layer[15].peel_N < shut_N);
        } else {
            assert_true(report.layer[15].peel_N < 0.35 * shut_N);
        }
        fw_report_free(&report);
    }
    fw_report_free(&sealed);
    fw_report_free(&wide);
}

/* As high as it is wide: a slot of 10 px that is open for a few layers only. */
static void low_slots_do_not_vent(void **state)
{
    (void)state;
    for (int height = 1; height <= 8; height++) {
        fw_report report = judged(10, 6, 6 + height);
        fw_report sealed = judged(0, 0, LAYERS);
        assert_int_equal(report.layer[5].blind_cavity_mm2 > 8, true);
        assert_true(report.layer[20].blind_cavity_mm2 == 0);
        const bool relieved = report.layer[20].peel_N < 0.3 * sealed.layer[20].peel_N;
        assert_int_equal(relieved, height >= 5); /* both rims of the ring are open then */
        const fw_finding *poor = finding_of(&report, FW_POOR_VENT);
        assert_non_null(poor);
        assert_int_equal(poor->last_layer == LAYERS - 1, height < 5);
        fw_report_free(&report);
        fw_report_free(&sealed);
    }
}

/* A pin within a fence of pins: the room between them is cut off by the gaps of the fence alone, so
 * the film of the pin borders on nothing else. It is judged, and the finding stays. */
static void a_pin_within_a_fence(void **state)
{
    (void)state;
    stage s = stage_new(60, 60, 14);
    s.job.vent_mm = 0.5;
    s.job.max_peel_N = 1e-6;
    stage_box(&s, 28, 28, 0, 32, 32, 14, 255);
    for (int k = 0; k < 40; k += 5) {
        stage_box(&s, 10 + k, 10, 0, 13 + k, 13, 14, 255);
        stage_box(&s, 10 + k, 47, 0, 13 + k, 50, 14, 255);
        stage_box(&s, 10, 10 + k, 0, 13, 13 + k, 14, 255);
        stage_box(&s, 47, 10 + k, 0, 50, 13 + k, 14, 255);
    }
    fw_report report = stage_judge(&s);
    assert_non_null(finding_of(&report, FW_POOR_VENT));
    assert_true(report.layer[10].peel_N > 0);
    fw_report_free(&report);
    stage_free(&s);
}

/* Inside the fence stands a tube: the fence's vents open, the tube's own cavity stays sealed and
 * pulls. */
static void a_tube_within_a_fence(void **state)
{
    (void)state;
    double force[2];
    for (int hollow = 0; hollow < 2; hollow++) {
        stage s = stage_new(60, 60, 14);
        s.job.vent_mm = 0.5;
        s.job.max_peel_N = 1e-6;
        for (int k = 0; k < 40; k += 5) {
            stage_box(&s, 10 + k, 10, 0, 13 + k, 13, 14, 255);
            stage_box(&s, 10 + k, 47, 0, 13 + k, 50, 14, 255);
            stage_box(&s, 10, 10 + k, 0, 13, 13 + k, 14, 255);
            stage_box(&s, 47, 10 + k, 0, 50, 13 + k, 14, 255);
        }
        stage_box(&s, 22, 22, 0, 38, 38, 14, 255);
        stage_box(&s, 25, 25, 0, 35, 35, 14, hollow ? 0 : 255);
        fw_report report = stage_judge(&s);
        assert_non_null(finding_of(&report, FW_POOR_VENT));
        assert_int_equal(finding_of(&report, FW_BLIND_CAVITY) != NULL, hollow);
        force[hollow] = report.layer[10].peel_N;
        fw_report_free(&report);
        stage_free(&s);
    }
    assert_true(force[1] >
                0.8 * force[0]); /* vented it would pull a tenth: Stefan's ring, r/R 0.6 */
    assert_true(force[1] < force[0]);
}

/* Without a smallest vent any opening is one. */
static void zero_means_any(void **state)
{
    (void)state;
    stage s = tube(1, 0, LAYERS);
    s.job.vent_mm = 0;
    fw_report report = stage_judge(&s);
    assert_null(finding_of(&report, FW_POOR_VENT));
    fw_report_free(&report);
    stage_free(&s);
}

/* Slow check on random stacks: a cylinder moved pixel by pixel, layer by layer. */
enum { N = 22, H = 12, ACROSS = 3, HIGH = 3 };

static bool fits(const stage *s, int x, int y, int n)
{
    if (n < HIGH - 1)
        return false;
    for (int k = n - HIGH + 1; k <= n; k++)
        for (int dy = -ACROSS; dy <= ACROSS; dy++)
            for (int dx = -ACROSS; dx <= ACROSS; dx++) {
                const int u = x + dx, v = y + dy;
                const bool inside = u >= 0 && v >= 0 && u < N && v < N;
                if (4 * (dx * dx + dy * dy) < ACROSS * ACROSS && inside && stage_at(s, u, v, k))
                    return false;
            }
    return true;
}

static int root(int *parent, int i)
{
    while (parent[i] != i)
        i = parent[i] = parent[parent[i]];
    return i;
}

/* Open pixels of centres up to layer n: out[layer][y][x]. */
static void slow_open(const stage *s, int top, bool *centre, bool *open)
{
    static int parent[H * N * N + 1];
    const int vat = H * N * N;
    for (int i = 0; i <= vat; i++)
        parent[i] = i;
    for (int n = 0; n <= top; n++)
        for (int y = 0; y < N; y++)
            for (int x = 0; x < N; x++) {
                const int i = (n * N + y) * N + x;
                centre[i] = fits(s, x, y, n);
                if (!centre[i])
                    continue;
                if (x == 0 || y == 0 || x == N - 1 || y == N - 1)
                    parent[root(parent, i)] = root(parent, vat);
                const int back[5][3] = {
                    {-1, 0, 0}, {0, -1, -1}, {0, -1, 0}, {0, -1, 1}, {0, 0, -1}};
                for (int k = 0; k < 5; k++) {
                    const int m = n + back[k][0], v = y + back[k][1], u = x + back[k][2];
                    const int j = (m * N + v) * N + u;
                    if (m >= 0 && v >= 0 && u >= 0 && u < N && centre[j])
                        parent[root(parent, i)] = root(parent, j);
                }
            }
    for (int i = 0; i < (top + 1) * N * N; i++)
        open[i] = centre[i] && root(parent, i) == root(parent, vat);
}

static void random_stacks_against_a_slow_cylinder(void **state)
{
    (void)state;
    static bool centre[H * N * N], open[H * N * N];
    int poor_layers = 0;
    for (uint64_t seed = 1; seed <= 40; seed++) {
        stage s = stage_new(N, N, H);
        s.job.vent_mm = ACROSS * 0.1;
        stage_box(&s, 2, 2, 0, N - 2, N - 2, H, 255);
        uint64_t dice = seed * UINT64_C(0x9e3779b97f4a7c15);
        for (int k = 0; k < 9; k++) {
            dice = dice * UINT64_C(6364136223846793005) + 1442695040888963407;
            const int x = (int)(dice >> 33) % (N - 8) + 1, y = (int)(dice >> 43) % (N - 8) + 1;
            const int w = (int)(dice >> 53) % 7 + 1, n = (int)(dice >> 58) % (H - 4);
            stage_box(&s, x, y, n, x + w, y + 8 - w, n + 4, 0);
        }
        fw_report report = stage_judge(&s);
        for (int top = 0; top < H; top++) {
            /* A centre that cannot get out while its void does not count as sealed. */
            slow_open(&s, top, centre, open);
            int64_t cut_off = 0;
            for (int i = top * N * N; i < (top + 1) * N * N; i++)
                cut_off += centre[i] && !open[i];
            bool expected = cut_off > 0 && report.layer[top].blind_cavity_mm2 == 0;
            bool found = false;
            for (size_t f = 0; f < report.findings.count; f++) {
                const fw_finding *one = &report.findings.item[f];
                found = found ||
                        (one->kind == FW_POOR_VENT && one->layer <= top && one->last_layer >= top);
            }
            if (expected) {
                assert_true(found);
                poor_layers++;
            }
            if (cut_off == 0 && top == report.layers - 1) {
                for (size_t f = 0; f < report.findings.count; f++)
                    assert_false(report.findings.item[f].kind == FW_POOR_VENT &&
                                 report.findings.item[f].last_layer == top);
            }
        }
        fw_report_free(&report);
        stage_free(&s);
    }
    assert_true(poor_layers > 20);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(narrow_slots_do_not_vent),
                                       cmocka_unit_test(low_slots_do_not_vent),
                                       cmocka_unit_test(a_pin_within_a_fence),
                                       cmocka_unit_test(a_tube_within_a_fence),
                                       cmocka_unit_test(zero_means_any),
                                       cmocka_unit_test(random_stacks_against_a_slow_cylinder)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
