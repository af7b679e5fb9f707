/* Carried distance: closed forms, shapes that mislead, and random volumes against the definition.
 */
#include "mask/carried.h"

#include "mask/carried_reference.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

/* A field with the layer that it borrows. */
typedef struct scene {
    int width, height;
    fw_carried *field;
    fw_runs now, source;
    fw_regions regions;
} scene;

static const double side = 0.05; /* mm */

static scene scene_new(int width, int height, double px_mm, double py_mm, double saturation_mm)
{
    scene s = {.width = width, .height = height};
    assert_int_equal(fw_carried_new(width, height, px_mm, py_mm, saturation_mm, &s.field, NULL),
                     FW_OK);
    return s;
}

static void scene_free(scene *s)
{
    fw_carried_free(s->field);
    fw_runs_free(&s->now);
    fw_runs_free(&s->source);
    fw_regions_free(&s->regions);
}

/* The set of pixels whose byte has the given bit. */
static void runs_of(const uint8_t *map, int bit, int width, int height, fw_runs *out)
{
    assert_int_equal(fw_runs_begin(out, width, height, NULL), FW_OK);
    for (int y = 0; y < height; y++) {
        for (int x = 0; x < width; x++) {
            if ((map[y * width + x] & bit) != 0)
                assert_int_equal(fw_runs_push(out, y, x, x + 1, NULL), FW_OK);
        }
    }
    fw_runs_finish(out);
}

enum { MEDIUM = 1, SOURCE = 2 };

static void advance_held(scene *s, const uint8_t *map, const uint8_t *held, double credit_mm)
{
    runs_of(map, MEDIUM, s->width, s->height, &s->now);
    runs_of(map, SOURCE, s->width, s->height, &s->source);
    assert_int_equal(fw_regions_label(&s->now, FW_FOUR, &s->regions, NULL), FW_OK);
    assert_int_equal(
        fw_carried_step(s->field, &s->now, &s->regions, held, &s->source, credit_mm, NULL), FW_OK);
}

static void advance(scene *s, const uint8_t *map, double credit_mm)
{
    advance_held(s, map, NULL, credit_mm);
}

static void box(uint8_t *map, int width, int x0, int y0, int x1, int y1, int bits)
{
    for (int y = y0; y < y1; y++) {
        for (int x = x0; x < x1; x++)
            map[y * width + x] |= (uint8_t)bits;
    }
}

static void assert_near(double got, double expected, double tolerance)
{
    if (!(fabs(got - expected) <= tolerance))
        fail_msg("got %.9g, expected %.9g within %g", got, expected, tolerance);
}

/* Euclid from the centre of a source (pixel or disc of radius_px), everywhere in the open. */
static void check_disc(double px_mm, double py_mm, double radius_mm)
{
    enum { W = 201, H = 161, CX = 93, CY = 80 };
    static uint8_t map[W * H];
    memset(map, MEDIUM, sizeof map);
    for (int y = 0; y < H; y++) {
        for (int x = 0; x < W; x++) {
            if (hypot((x - CX) * px_mm, (y - CY) * py_mm) <= radius_mm)
                map[y * W + x] |= SOURCE;
        }
    }
    const double saturation = 180 * fmin(px_mm, py_mm);
    scene s = scene_new(W, H, px_mm, py_mm, saturation);
    advance(&s, map, 0);
    for (int y = 0; y < H; y += 3) {
        for (int x = 0; x < W; x++) {
            double exact = INFINITY; /* to the nearest source pixel */
            for (int v = 0; v < H; v++) {
                for (int u = CX - 30; u <= CX + 30; u++) {
                    if ((map[v * W + u] & SOURCE) != 0)
                        exact = fmin(exact, hypot((x - u) * px_mm, (y - v) * py_mm));
                }
            }
            exact = fmin(exact, saturation);
            const double got = fw_carried_at(s.field, x, y);
            if (!(got >= exact - 1e-9 && got <= exact * 1.0165 + 1e-9))
                fail_msg("at %d, %d: %.6f mm for %.6f mm", x, y, got, exact);
        }
    }
    scene_free(&s);
}

static void disc_round_a_point(void **state)
{
    (void)state;
    check_disc(side, side, 0);
}

static void disc_round_a_tip(void **state)
{
    (void)state;
    check_disc(side, side, 0.4);
}

static void disc_on_oblong_pixels(void **state)
{
    (void)state;
    check_disc(side, 2 * side, 0);
    check_disc(3 * side, side, 0.3);
}

/* Holds columns [0, 10) on the plate, then lets the layer reach `columns`. */
static void flat_ledge(void **state)
{
    (void)state;
    enum { W = 130, H = 20 };
    static uint8_t map[2][W * H];
    memset(map, 0, sizeof map);
    box(map[0], W, 0, 0, 10, H, MEDIUM | SOURCE);
    box(map[1], W, 0, 0, 120, H, MEDIUM);
    scene s = scene_new(W, H, side, side, 5.0);
    advance(&s, map[0], 0);
    advance(&s, map[1], 0.06);
    for (int x = 0; x < 120; x++) {
        const double exact = x < 10 ? 0 : fmin((x - 9) * side, 5.0);
        assert_near(fw_carried_at(s.field, x, 7), exact, 1e-12);
    }
    assert_true(isinf(fw_carried_at(s.field, 120, 7)));
    assert_true(isinf(fw_carried_at(s.field, -1, 7)) && isinf(fw_carried_at(s.field, 0, H)));
    scene_free(&s);
}

/* A wall that grows `step_px` columns a layer; returns the debt of its last column. */
static double slope_debt(int step_px, double credit_mm, int layers)
{
    enum { W = 400, H = 5 };
    static uint8_t map[W * H];
    scene s = scene_new(W, H, side, side, 30.0);
    double debt = 0;
    for (int n = 0; n < layers; n++) {
        memset(map, 0, sizeof map);
        box(map, W, 0, 0, 5 + n * step_px, H, MEDIUM | (n == 0 ? SOURCE : 0));
        advance(&s, map, credit_mm);
        debt = fw_carried_at(s.field, 5 + n * step_px - 1, 2);
    }
    scene_free(&s);
    return debt;
}

static void steep_wall_gains_no_debt(void **state)
{
    (void)state;
    /* One column a layer, and the credit is a column and a bit: never more than that column. */
    assert_near(slope_debt(1, 0.06, 60), side, side / 4096);
    assert_near(slope_debt(1, 0.05, 60), side, side / 256);
}

/* With k columns a layer and a credit c the debt after n layers is n (k px - c) + c: a slope of
 * angle alpha under theta runs n k px = reach / (1 - tan alpha / tan theta) until it is the reach.
 */
static void gentle_slope_runs_its_length(void **state)
{
    (void)state;
    const double credit = 0.0596; /* 0.05 mm layers at 40 degrees */
    for (int k = 2; k <= 5; k++) {
        for (int n = 5; n <= 60; n += 5)
            assert_near(slope_debt(k, credit, n + 1), n * (k * side - credit) + credit, side / 64);
    }
}

static void vertical_wall_pays_back(void **state)
{
    (void)state;
    enum { W = 60, H = 6 };
    static uint8_t map[W * H];
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 10, H, MEDIUM | SOURCE);
    scene s = scene_new(W, H, side, side, 5.0);
    advance(&s, map, 0);
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 50, H, MEDIUM);
    size_t most = 0;
    for (int n = 0; n < 60; n++) {
        advance(&s, map, 0.06);
        most = fw_carried_bytes(s.field) > most ? fw_carried_bytes(s.field) : most;
        for (int x = 0; x < 50; x++) {
            const double exact = x < 10 ? 0 : fmax(0, (x - 9) * side - n * 0.06);
            assert_near(fw_carried_at(s.field, x, 3), exact, fw_carried_unit(s.field));
        }
    }
    assert_true(fw_carried_bytes(s.field) + 2 * 2048 <= most); /* paid: both tiles are gone */
    scene_free(&s);
}

static void bridge_is_reached_from_both_ends(void **state)
{
    (void)state;
    enum { W = 90, H = 9 };
    static uint8_t map[W * H];
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 10, H, MEDIUM | SOURCE);
    box(map, W, 80, 0, 90, H, MEDIUM | SOURCE);
    scene s = scene_new(W, H, side, side, 5.0);
    advance(&s, map, 0);
    memset(map, MEDIUM, sizeof map);
    advance(&s, map, 0.06);
    for (int x = 0; x < W; x++)
        assert_near(fw_carried_at(s.field, x, 4), fmax(0, fmin(x - 9, 80 - x)) * side, 1e-12);
    scene_free(&s);
}

/* An onset is infinite until a tip holds it, and a body that meets a held one in the plane is
 * reached through the place where they meet. */
static void onset_and_adrift_body_that_merges(void **state)
{
    (void)state;
    enum { W = 100, H = 10 };
    static uint8_t map[W * H];
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 20, H, MEDIUM | SOURCE);
    scene s = scene_new(W, H, side, side, 10.0);
    advance(&s, map, 0);
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 20, H, MEDIUM);
    box(map, W, 40, 0, 70, H, MEDIUM); /* onset */
    const uint8_t held[2] = {1, 0};
    advance_held(&s, map, held, 0.06);
    assert_true(isinf(fw_carried_at(s.field, 50, 5)));
    assert_near(fw_carried_at(s.field, 10, 5), 0, 0);
    advance(&s, map, 0.06); /* held by what is said, but nothing is carried there */
    assert_true(isinf(fw_carried_at(s.field, 50, 5)));
    box(map, W, 20, 4, 40, 5, MEDIUM); /* a bar of one row joins them */
    advance(&s, map, 0.06);
    assert_near(fw_carried_at(s.field, 69, 4), 50 * side, 1e-12);
    advance(&s, map, 0.06);
    assert_near(fw_carried_at(s.field, 69, 4), 50 * side - 0.06, fw_carried_unit(s.field));
    scene_free(&s);
}

/* Round the end of a wall of one column: 60 columns out and 60 back, though 2 apart. */
static void slit_is_not_crossed(void **state)
{
    (void)state;
    enum { W = 70, H = 30 };
    static uint8_t map[W * H];
    memset(map, MEDIUM, sizeof map);
    for (int x = 0; x < 60; x++)
        map[15 * W + x] = 0;
    map[14 * W] |= SOURCE;
    scene s = scene_new(W, H, side, side, 10.0);
    advance(&s, map, 0);
    const double exact = (2 * 59 + 2 * hypot(1, 1)) * side; /* past the corner pixel (60, 15) */
    assert_near(fw_carried_at(s.field, 0, 16), exact, 2e-2 * exact);
    assert_true(fw_carried_at(s.field, 0, 16) > exact - 2 * side);
    scene_free(&s);
}

/* Pixels that share only a corner are two regions, and no step passes between them. */
static void corner_is_no_way(void **state)
{
    (void)state;
    enum { W = 20, H = 20 };
    static uint8_t map[W * H];
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 10, 10, MEDIUM | SOURCE);
    box(map, W, 10, 10, 20, 20, MEDIUM);
    scene s = scene_new(W, H, side, side, 10.0);
    advance(&s, map, 0);
    assert_true(isinf(fw_carried_at(s.field, 10, 10)));
    scene_free(&s);
}

/* A corridor of 3 columns wound into the middle, ratio to the fine reference. */
static void check_spiral(double px_mm, double py_mm, double highest)
{
    enum { W = 49, H = 49 };
    static uint8_t map[W * H];
    memset(map, 0, sizeof map);
    int x = 0, y = 0, length = W - 3;
    for (int leg = 0; length > 3;
         leg++) { /* right, down, left, up, one lane shorter each half turn */
        const int dx = (leg % 4 == 0) - (leg % 4 == 2), dy = (leg % 4 == 1) - (leg % 4 == 3);
        for (int k = 0; k < length; k++, x += dx, y += dy)
            box(map, W, x, y, x + 3, y + 3, MEDIUM);
        length -= leg >= 2 && leg % 2 == 0 ? 4 : 0;
    }
    map[0] |= SOURCE;
    scene s = scene_new(W, H, px_mm, py_mm, 40.0);
    reference r = reference_new(W, H, px_mm, py_mm, 0, 40.0, true);
    uint8_t open[W * H], source[W * H];
    for (int i = 0; i < W * H; i++) {
        open[i] = 1;
        source[i] = (map[i] & SOURCE) != 0;
        map[i] &= MEDIUM | SOURCE;
    }
    advance(&s, map, 0);
    reference_step(&r, map, open, source, 0);
    double longest = 0;
    for (int i = 0; i < W * H; i++) {
        const double got = fw_carried_at(s.field, i % W, i / W);
        assert_int_equal(isinf(got), isinf(r.a[i]));
        if (isinf(got))
            continue;
        longest = fmax(longest, got);
        if (!(got >= r.a[i] * 0.992 && got <= r.a[i] * highest + 1e-9))
            fail_msg("at %d, %d: %.6f mm for %.6f mm", i % W, i / W, got, r.a[i]);
    }
    assert_true(longest > 10 * W * px_mm); /* the corridor is a detour */
    reference_free(&r);
    scene_free(&s);
}

static void spiral_corridor(void **state)
{
    (void)state;
    check_spiral(side, side, 1.03);
    check_spiral(side, 2 * side, 1.03);
}

static uint32_t random_next(uint32_t *seed)
{
    *seed = *seed * 1664525U + 1013904223U;
    return *seed >> 16;
}

/* Blobs that change a little from layer to layer, with a few sources in the first layer and later
 * a rare one, some regions not held. */
enum { VW = 75, VH = 47 };

static void random_layer(uint8_t *map, uint32_t *seed, int n)
{
    for (int i = 0; i < VW * VH; i++)
        map[i] &= MEDIUM;
    for (int k = 0; k < (n == 0 ? 14 : 5); k++) {
        const int x0 = (int)(random_next(seed) % VW), y0 = (int)(random_next(seed) % VH);
        const int w = 1 + (int)(random_next(seed) % 25), h = 1 + (int)(random_next(seed) % 15);
        const bool add = random_next(seed) % 5 < 3;
        for (int y = y0; y < VH && y < y0 + h; y++) {
            for (int x = x0; x < VW && x < x0 + w; x++)
                map[y * VW + x] = add ? MEDIUM : 0;
        }
    }
    for (int k = 0; k < 30; k++) /* single pixels make slits and corners */
        map[random_next(seed) % (VW * VH)] ^= MEDIUM;
    for (int k = 0; k < (n == 0 ? 6 : 1); k++) {
        uint8_t *at = &map[random_next(seed) % (VW * VH)];
        if (*at != 0 && (n == 0 || random_next(seed) % 3 == 0))
            *at |= SOURCE;
    }
}

static void compare_with(const scene *s, const reference *r, uint32_t seed, int n)
{
    for (int i = 0; i < VW * VH; i++) {
        const double got = fw_carried_at(s->field, i % VW, i / VW);
        if (isinf(got) != isinf(r->a[i]) || (!isinf(got) && fabs(got - r->a[i]) > 1e-9))
            fail_msg("seed %u layer %d at %d, %d: %.9f mm for %.9f mm", seed, n, i % VW, i / VW,
                     got, r->a[i]);
    }
}

/* Exact: the reference takes the same steps. The credit is a whole number of units. */
static void random_volume(uint32_t seed, double saturation_mm, int credit_units)
{
    scene s = scene_new(VW, VH, side, side, saturation_mm);
    const double unit = fw_carried_unit(s.field), credit = credit_units * unit;
    reference r = reference_new(VW, VH, side, side, unit, saturation_mm, false);
    static uint8_t map[VW * VH], open[VW * VH], source[VW * VH];
    memset(map, 0, sizeof map);
    uint32_t draw = seed;
    for (int n = 0; n < 12; n++) {
        random_layer(map, &draw, n);
        fw_runs now = {0};
        fw_regions regions = {0};
        runs_of(map, MEDIUM, VW, VH, &now);
        assert_int_equal(fw_regions_label(&now, FW_FOUR, &regions, NULL), FW_OK);
        uint8_t held[VW * VH] = {0};
        for (uint32_t i = 0; i < regions.count; i++)
            held[i] = random_next(&draw) % 5 != 0;
        for (int i = 0; i < VW * VH; i++) {
            source[i] = (map[i] & SOURCE) != 0;
            if (source[i] != 0) /* a source holds its region */
                held[regions.label[fw_runs_find(&now, i % VW, i / VW)]] |= 2;
        }
        for (int i = 0; i < VW * VH; i++)
            open[i] = map[i] != 0 && held[regions.label[fw_runs_find(&now, i % VW, i / VW)]] != 0;
        for (uint32_t i = 0; i < regions.count; i++)
            held[i] &= 1;
        advance_held(&s, map, held, credit);
        /* The reference carries within a region only what was said to be held, sources apart. */
        reference_step(&r, map, open, source, credit);
        fw_runs_free(&now);
        fw_regions_free(&regions);
        compare_with(&s, &r, seed, n);
    }
    reference_free(&r);
    scene_free(&s);
}

static void random_volumes_equal_the_definition(void **state)
{
    (void)state;
    for (uint32_t seed = 1; seed <= 12; seed++) {
        random_volume(seed, 8.0, 200);
        random_volume(seed, 0.4, 3000); /* 8 px: most of it saturates */
        random_volume(seed, 1.0, 0);
    }
}

/* A credit that is no whole number of units is rounded down once in all: one unit high at most. */
static void fractional_credits_do_not_add_up(void **state)
{
    (void)state;
    enum { W = 100, H = 4 };
    static uint8_t map[W * H];
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 1, H, MEDIUM | SOURCE);
    scene s = scene_new(W, H, side, side, 6.0);
    advance(&s, map, 0);
    memset(map, MEDIUM, sizeof map);
    advance(&s, map, 0);
    const double credit = 0.0123456;
    for (int n = 1; n <= 390; n++) {
        advance(&s, map, credit);
        const double exact = 99 * side - n * credit, got = fw_carried_at(s.field, 99, 1);
        assert_true(got >= exact - 1e-9 && got <= exact + fw_carried_unit(s.field));
    }
    scene_free(&s);
}

/* Saturated is "at least": credits alone do not lower it, the known front does, and the value is
 * then what it would have been without saturation. */
static void saturated_does_not_decay(void **state)
{
    (void)state;
    enum { W = 200, H = 40 };
    static uint8_t map[W * H];
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 1, H, MEDIUM | SOURCE);
    scene s = scene_new(W, H, side, side, 2.0);
    advance(&s, map, 0);
    memset(map, MEDIUM, sizeof map);
    advance(&s, map, 0);
    for (int n = 1; n <= 40; n++) {
        /* At layer 20 all but the far end is cut off: what it knew there stays at 2 mm. */
        if (n == 20) {
            for (int y = 0; y < H; y++)
                memset(&map[y * W + 150], 0, 2);
        }
        advance(&s, map, 0.06);
        for (int x = 0; x < 150; x++)
            assert_near(fw_carried_at(s.field, x, 9), fmin(2.0, fmax(0, x * side - n * 0.06)),
                        fw_carried_unit(s.field) + 1e-12);
        assert_near(fw_carried_at(s.field, 180, 9), 2.0, 0);
    }
    scene_free(&s);
}

/* Sources given with the step, or added to it one by one, make the same field. */
static void added_sources_equal_given_ones(void **state)
{
    (void)state;
    static uint8_t map[VW * VH], bare[VW * VH], tip[VW * VH];
    for (uint32_t seed = 101; seed <= 112; seed++) {
        uint32_t draw = seed;
        scene given = scene_new(VW, VH, side, side, 1.5), added = given;
        added.field = NULL;
        assert_int_equal(fw_carried_new(VW, VH, side, side, 1.5, &added.field, NULL), FW_OK);
        memset(map, 0, sizeof map);
        for (int n = 0; n < 6; n++) {
            random_layer(map, &draw, n);
            box(map, VW, (int)(draw % 70), (int)(draw % 40), (int)(draw % 70) + 3,
                (int)(draw % 40) + 3, MEDIUM | SOURCE);
            uint8_t held[VW * VH];
            for (int i = 0; i < VW * VH; i++) {
                held[i] = random_next(&draw) % 3 != 0;
                bare[i] = map[i] & MEDIUM;
            }
            advance_held(&given, map, held, 0.03);
            advance_held(&added, bare, held, 0.03);
            for (int part = 0; part < 3; part++) {
                memset(tip, 0, sizeof tip);
                for (int i = 0; i < VW * VH; i++)
                    tip[i] = (map[i] & SOURCE) != 0 && i % 3 == part ? SOURCE : 0;
                runs_of(tip, SOURCE, VW, VH, &added.source);
                assert_int_equal(fw_carried_add_sources(added.field, &added.source, NULL), FW_OK);
            }
            for (int i = 0; i < VW * VH; i++) {
                const double a = fw_carried_at(given.field, i % VW, i / VW);
                const double b = fw_carried_at(added.field, i % VW, i / VW);
                if (isinf(a) != isinf(b) || (!isinf(a) && a != b))
                    fail_msg("seed %u layer %d at %d, %d: %g, %g", seed, n, i % VW, i / VW, a, b);
            }
        }
        scene_free(&given);
        scene_free(&added);
    }
}

typedef struct visited {
    int width;
    double *value; /* [height * width], 0 where not visited */
    int64_t last;  /* raster index after the last run */
    int calls;
} visited;

static fw_status note_run(void *context, int32_t y, int32_t x0, int32_t x1, const double *value_mm,
                          fw_fault *fault)
{
    (void)fault;
    visited *v = context;
    assert_true((int64_t)y * v->width + x0 >= v->last);
    assert_true(x0 < x1);
    v->last = (int64_t)y * v->width + x1;
    for (int32_t x = x0; x < x1; x++)
        v->value[y * v->width + x] = value_mm[x - x0];
    v->calls++;
    return FW_OK;
}

static fw_status refuse(void *context, int32_t y, int32_t x0, int32_t x1, const double *value_mm,
                        fw_fault *fault)
{
    (void)y, (void)x0, (void)x1, (void)value_mm;
    ++*(int *)context;
    return fw_fault_set(fault, FW_STOPPED, "stopped");
}

/* Peaks and visits against fw_carried_at, pixel by pixel. */
static void over_and_visit_agree_with_at(void **state)
{
    (void)state;
    static uint8_t map[VW * VH];
    static double value[VW * VH];
    for (uint32_t seed = 31; seed <= 40; seed++) {
        uint32_t draw = seed;
        scene s = scene_new(VW, VH, side, side, 1.0);
        memset(map, 0, sizeof map);
        for (int n = 0; n < 4; n++) {
            random_layer(map, &draw, n);
            advance(&s, map, 0.04);
        }
        const double limit = 7 * side; /* hit exactly by rows and columns */
        fw_carried_peak *peak = calloc(s.regions.count, sizeof *peak);
        fw_carried_peak *expected = calloc(s.regions.count, sizeof *peak);
        visited v = {VW, value, 0, 0};
        memset(value, 0, sizeof value);
        assert_int_equal(fw_carried_over(s.field, limit, peak, NULL), FW_OK);
        assert_int_equal(fw_carried_visit(s.field, limit, note_run, &v, NULL), FW_OK);
        int stretches = 0;
        for (int i = 0; i < VW * VH; i++) {
            const double a = fw_carried_at(s.field, i % VW, i / VW);
            const bool over = !isinf(a) && a > limit + 1e-9;
            assert_true(value[i] == (over ? a : 0));
            stretches += over && (i % VW == 0 || value[i - 1] == 0);
            if (!over)
                continue;
            fw_carried_peak *e = &expected[s.regions.label[fw_runs_find(&s.now, i % VW, i / VW)]];
            e->over_pixels++;
            if (a > e->worst_mm)
                *e = (fw_carried_peak){e->over_pixels, a, i % VW, i / VW};
        }
        assert_int_equal(v.calls, stretches);
        for (uint32_t r = 0; r < s.regions.count; r++) {
            assert_int_equal(peak[r].over_pixels, expected[r].over_pixels);
            assert_true(peak[r].worst_mm == expected[r].worst_mm);
            assert_int_equal(peak[r].x, expected[r].x);
            assert_int_equal(peak[r].y, expected[r].y);
        }
        free(peak);
        free(expected);
        if (v.calls > 1) {
            int calls = 0;
            assert_int_equal(fw_carried_visit(s.field, limit, refuse, &calls, NULL), FW_STOPPED);
            assert_int_equal(calls, 1);
        }
        scene_free(&s);
    }
}

/* A ledge of exactly the limit is not over it, one column more is. */
static void ledge_of_the_limit_is_not_over(void **state)
{
    (void)state;
    enum { W = 60, H = 3 };
    static uint8_t map[W * H];
    memset(map, 0, sizeof map);
    box(map, W, 0, 0, 10, H, MEDIUM | SOURCE);
    scene s = scene_new(W, H, side, side, 2.4);
    advance(&s, map, 0);
    for (int extra = 0; extra <= 1; extra++) {
        memset(map, 0, sizeof map);
        box(map, W, 0, 0, 10 + 12 + extra, H, MEDIUM);
        fw_carried_peak peak;
        advance(&s, map, 0);
        assert_int_equal(fw_carried_over(s.field, 0.6, &peak, NULL), FW_OK);
        assert_int_equal(peak.over_pixels, extra * H);
        assert_near(peak.worst_mm, extra * 13 * side, 1e-12);
        assert_int_equal(peak.x, extra * 22);
    }
    memset(map, MEDIUM, sizeof map);
    advance(&s, map, 0);
    fw_carried_peak peak; /* columns 57 .. 59 are saturated: over any limit */
    assert_int_equal(fw_carried_over(s.field, 99, &peak, NULL), FW_OK);
    assert_int_equal(peak.over_pixels, 3 * H);
    assert_near(peak.worst_mm, 2.4, 0);
    scene_free(&s);
}

static void bad_input_is_refused(void **state)
{
    (void)state;
    fw_carried *field = NULL;
    fw_fault fault = {0};
    assert_int_equal(fw_carried_new(0, 5, side, side, 1, &field, &fault), FW_INPUT);
    assert_int_equal(fw_carried_new(65536, 65536, side, side, 1, &field, &fault), FW_INPUT);
    assert_int_equal(fw_carried_new(5, 5, 0, side, 1, &field, &fault), FW_INPUT);
    assert_int_equal(fw_carried_new(5, 5, side, NAN, 1, &field, &fault), FW_INPUT);
    assert_int_equal(fw_carried_new(5, 5, side, 9 * side, 1, &field, &fault), FW_INPUT);
    assert_int_equal(fw_carried_new(5, 5, side, side, INFINITY, &field, &fault), FW_INPUT);
    assert_int_equal(fw_carried_new(5, 5, side, side, 3001 * side, &field, &fault), FW_INPUT);
    assert_null(field);
    assert_non_null(strstr(fault.text, "3000"));
    fw_carried_free(NULL);

    scene s = scene_new(5, 5, side, 8 * side, 3000 * side);
    uint8_t map[25] = {MEDIUM | SOURCE, MEDIUM};
    advance(&s, map, 0);
    const double before = fw_carried_at(s.field, 1, 0);
    fw_runs small = {0};
    assert_int_equal(fw_runs_begin(&small, 4, 5, NULL), FW_OK);
    fw_runs_finish(&small);
    assert_int_equal(fw_carried_step(s.field, &small, &s.regions, NULL, NULL, 0, &fault), FW_INPUT);
    assert_int_equal(fw_carried_step(s.field, &s.now, &s.regions, NULL, NULL, -1, &fault),
                     FW_INPUT);
    assert_int_equal(fw_carried_step(s.field, &s.now, &s.regions, NULL, NULL, NAN, &fault),
                     FW_INPUT);
    assert_int_equal(fw_carried_add_sources(s.field, &small, &fault), FW_INPUT);
    fw_carried_peak peak;
    assert_int_equal(fw_carried_over(s.field, -1, &peak, &fault), FW_INPUT);
    assert_near(fw_carried_at(s.field, 1, 0), before, 0);
    fw_runs_free(&small);
    scene_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(disc_round_a_point),
        cmocka_unit_test(disc_round_a_tip),
        cmocka_unit_test(disc_on_oblong_pixels),
        cmocka_unit_test(flat_ledge),
        cmocka_unit_test(steep_wall_gains_no_debt),
        cmocka_unit_test(gentle_slope_runs_its_length),
        cmocka_unit_test(vertical_wall_pays_back),
        cmocka_unit_test(bridge_is_reached_from_both_ends),
        cmocka_unit_test(onset_and_adrift_body_that_merges),
        cmocka_unit_test(slit_is_not_crossed),
        cmocka_unit_test(corner_is_no_way),
        cmocka_unit_test(spiral_corridor),
        cmocka_unit_test(random_volumes_equal_the_definition),
        cmocka_unit_test(fractional_credits_do_not_add_up),
        cmocka_unit_test(saturated_does_not_decay),
        cmocka_unit_test(added_sources_equal_given_ones),
        cmocka_unit_test(over_and_visit_agree_with_at),
        cmocka_unit_test(ledge_of_the_limit_is_not_over),
        cmocka_unit_test(bad_input_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
