/* Which anchor carries what: shapes with a known answer, and random volumes against Bellman-Ford on
 * the same nodes. */
#include "posts/tributary.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

/* The field, and the two newest layers that it borrows. */
typedef struct scene {
    int width, height;
    double px_mm, py_mm;
    fw_tributary *field;
    fw_runs layer[2];
    fw_regions regions[2];
    int count; /* layers so far; the newest is layer[(count - 1) % 2] */
} scene;

static scene scene_new(int width, int height, double px_mm, double py_mm)
{
    scene s = {.width = width, .height = height, .px_mm = px_mm, .py_mm = py_mm};
    assert_int_equal(fw_tributary_new(width, height, px_mm, py_mm, &s.field, NULL), FW_OK);
    return s;
}

static void scene_free(scene *s)
{
    fw_tributary_free(s->field);
    for (int i = 0; i < 2; i++) {
        fw_runs_free(&s->layer[i]);
        fw_regions_free(&s->regions[i]);
    }
}

static void runs_of(const uint8_t *map, uint8_t value, const scene *s, fw_runs *out)
{
    assert_int_equal(fw_runs_begin(out, s->width, s->height, NULL), FW_OK);
    for (int y = 0; y < s->height; y++) {
        for (int x = 0; x < s->width; x++) {
            const uint8_t at = map[y * s->width + x];
            if (value == 0 ? at != 0 : at == value)
                assert_int_equal(fw_runs_push(out, y, x, x + 1, NULL), FW_OK);
        }
    }
    fw_runs_finish(out);
}

enum { SOLID = 1, ANCHOR = 2, ANCHORS = 4 }; /* ANCHOR + k: contact of anchor k */

/* The next layer; its pixels' bytes say what they are. */
static void advance(scene *s, const uint8_t *map, double thickness_mm, bool add)
{
    fw_runs contact[ANCHORS] = {0};
    fw_anchor_contact anchors[ANCHORS];
    const int now = s->count % 2, before = 1 - now;
    for (int k = 0; k < ANCHORS; k++) {
        runs_of(map, (uint8_t)(ANCHOR + k), s, &contact[k]);
        anchors[k] = (fw_anchor_contact){k, &contact[k], 0};
    }
    runs_of(map, 0, s, &s->layer[now]);
    assert_int_equal(fw_regions_label(&s->layer[now], FW_FOUR, &s->regions[now], NULL), FW_OK);
    assert_int_equal(fw_tributary_step(s->field, &s->layer[now], &s->regions[now],
                                       s->count > 0 ? &s->layer[before] : NULL,
                                       s->count > 0 ? &s->regions[before] : NULL, thickness_mm,
                                       anchors, add ? 0 : ANCHORS, NULL),
                     FW_OK);
    for (int k = ANCHORS - 1; add && k >= 0; k--)
        assert_int_equal(fw_tributary_add_anchor(s->field, anchors[k], NULL), FW_OK);
    for (int k = 0; k < ANCHORS; k++)
        fw_runs_free(&contact[k]);
    s->count++;
}

static uint32_t region_at(const scene *s, int x, int y)
{
    const int now = (s->count - 1) % 2;
    const uint32_t run = fw_runs_find(&s->layer[now], x, y);
    return run == UINT32_MAX ? UINT32_MAX : s->regions[now].label[run];
}

static int owner(const scene *s, int x, int y)
{
    return fw_tributary_owner(s->field, region_at(s, x, y), x, y);
}

static void box(uint8_t *map, int width, int x0, int y0, int x1, int y1, uint8_t value)
{
    for (int y = y0; y < y1; y++) {
        for (int x = x0; x < x1; x++)
            map[y * width + x] = value;
    }
}

/* 0.05 mm pixels: cells of 4 x 4. */
static void two_posts_split_a_beam_in_the_middle(void **state)
{
    (void)state;
    enum { W = 160, H = 16 };
    uint8_t map[W * H];
    scene s = scene_new(W, H, 0.05, 0.05);
    int32_t kx, ky;
    fw_tributary_cell(s.field, &kx, &ky);
    assert_int_equal(kx, 4);
    assert_int_equal(ky, 4);
    memset(map, SOLID, sizeof map);
    box(map, W, 0, 0, 8, H, ANCHOR + 1);
    box(map, W, W - 8, 0, W, H, ANCHOR);
    advance(&s, map, 0.05, false);
    memset(map, SOLID, sizeof map);
    for (int n = 0; n < 5; n++)
        advance(&s, map, 0.05, false);
    for (int x = 0; x < W; x++)
        assert_int_equal(owner(&s, x, 3), x < W / 2 ? 1 : 0);
    assert_int_equal(fw_tributary_sole(s.field, 0), FW_MIXED);
    /* Eight cells of 0.2 mm and five layers of 0.05 mm. */
    assert_true(fabs(fw_tributary_length(s.field, 0, 39, 0) - (8 * 0.2 + 5 * 0.05)) < 1e-9);
    scene_free(&s);
}

/* An odd number of cells: the middle one is as near to either, the smaller anchor takes it. */
static void ties_go_to_the_smaller_anchor(void **state)
{
    (void)state;
    enum { W = 76, H = 8 };
    for (int swap = 0; swap < 2; swap++) {
        uint8_t map[W * H];
        scene s = scene_new(W, H, 0.05, 0.05);
        memset(map, SOLID, sizeof map);
        box(map, W, 0, 0, 8, H, (uint8_t)(ANCHOR + swap));
        box(map, W, W - 8, 0, W, H, (uint8_t)(ANCHOR + 1 - swap));
        advance(&s, map, 0.05, false);
        assert_int_equal(owner(&s, 36, 0), 0);
        assert_int_equal(owner(&s, 28, 0), swap);
        assert_int_equal(owner(&s, 44, 0), 1 - swap);
        scene_free(&s);
    }
}

/* A contact that only touches a cell starts it at the distance from the cell's centre, less half a
 * pixel: 0.05 mm pixels, cell centre at 0.10 mm, contact pixel centre at 0.175 mm. */
static void contact_at_the_rim_of_a_cell(void **state)
{
    (void)state;
    enum { W = 16, H = 4 };
    uint8_t map[W * H];
    scene s = scene_new(W, H, 0.05, 0.05);
    memset(map, SOLID, sizeof map);
    box(map, W, 3, 0, 4, H, ANCHOR);
    advance(&s, map, 0.05, false);
    assert_true(fabs(fw_tributary_length(s.field, 0, 0, 0) - (0.075 - 0.025)) < 1e-9);
    assert_true(fabs(fw_tributary_length(s.field, 0, 5, 0) - (0.2 + 0.05)) < 1e-9);
    assert_int_equal(fw_tributary_sole(s.field, 0), 0);
    scene_free(&s);
}

/* A post counts with its own length: the tip high up is near, the plate is on the shorter way. */
static void an_anchors_own_way_counts(void **state)
{
    (void)state;
    enum { W = 40, H = 4 };
    uint8_t map[W * H];
    scene s = scene_new(W, H, 0.05, 0.05);
    fw_runs plate = {0}, tip = {0};
    memset(map, SOLID, sizeof map);
    box(map, W, 0, 0, 4, H, ANCHOR);
    runs_of(map, ANCHOR, &s, &plate);
    box(map, W, 36, 0, 40, H, ANCHOR + 1);
    runs_of(map, ANCHOR + 1, &s, &tip);
    memset(map, SOLID, sizeof map);
    advance(&s, map, 0.05, false);
    assert_int_equal(fw_tributary_add_anchor(s.field, (fw_anchor_contact){0, &plate, 0}, NULL),
                     FW_OK);
    assert_int_equal(fw_tributary_add_anchor(s.field, (fw_anchor_contact){1, &tip, 1.0}, NULL),
                     FW_OK);
    assert_int_equal(owner(&s, 26, 0),
                     0); /* 1.2 mm from the plate's contact, 0.4 + 1.0 from the tip */
    assert_int_equal(owner(&s, 37, 0), 1);
    fw_runs_free(&plate);
    fw_runs_free(&tip);
    scene_free(&s);
}

static void wall_with_one_anchor(void **state)
{
    (void)state;
    enum { W = 80, H = 8 };
    uint8_t map[W * H] = {0};
    scene s = scene_new(W, H, 0.05, 0.05);
    box(map, W, 8, 0, 16, H, SOLID);
    advance(&s, map, 0.1, false);
    assert_int_equal(owner(&s, 8, 0), FW_NO_ANCHOR);
    assert_true(isinf(fw_tributary_length(s.field, 0, 8, 0)));
    box(map, W, 8, 0, 16, H, ANCHOR + 3);
    advance(&s, map, 0.1, false);
    for (int n = 1; n <= 40; n++) {
        memset(map, 0, sizeof map);
        box(map, W, 8, 0, 16 + n, H, SOLID);
        advance(&s, map, 0.1, false);
        for (int x = 8; x < 16 + n; x++)
            assert_int_equal(owner(&s, x, 5), 3);
    }
    assert_true(fabs(fw_tributary_length(s.field, 0, 8, 0) - 4.0) < 1e-9);
    assert_int_equal(fw_tributary_owner(s.field, 0, 70, 0), FW_NO_ANCHOR);
    assert_int_equal(fw_tributary_owner(s.field, 5, 8, 0), FW_NO_ANCHOR);
    assert_int_equal(fw_tributary_owner(s.field, 0, -1, 0), FW_NO_ANCHOR);
    scene_free(&s);
}

/* A U: the top of its right arm is nearest to the left anchor across the slot, but by path to its
 * own. The slot is as wide as a cell: see the limit in the header. */
static void round_a_slot_and_not_across_it(void **state)
{
    (void)state;
    enum { W = 40, H = 160 };
    uint8_t map[W * H];
    scene s = scene_new(W, H, 0.05, 0.05);
    memset(map, SOLID, sizeof map);
    box(map, W, 16, 0, 24, 152, 0);            /* slot, joined in the last 8 rows */
    box(map, W, 0, 0, 16, 8, ANCHOR);          /* end of the left arm */
    box(map, W, 32, 120, 40, 128, ANCHOR + 1); /* far down the right arm */
    advance(&s, map, 0.05, false);
    assert_int_equal(owner(&s, 15, 20), 0);
    assert_int_equal(owner(&s, 24, 20), 1);
    assert_int_equal(owner(&s, 24, 2), 1);
    scene_free(&s);
}

/* Two bars 2 pixels apart: both have pixels in the same cells, and neither knows the other's
 * anchor. */
static void neighbouring_regions_do_not_leak(void **state)
{
    (void)state;
    enum { W = 40, H = 160 };
    uint8_t map[W * H];
    scene s = scene_new(W, H, 0.05, 0.05);
    memset(map, SOLID, sizeof map);
    box(map, W, 19, 0, 21, H, 0);
    box(map, W, 0, 0, 19, 8, ANCHOR);
    box(map, W, 32, 152, 40, 160, ANCHOR + 1);
    advance(&s, map, 0.05, false);
    box(map, W, 0, 0, 19, 8, SOLID);
    box(map, W, 32, 152, 40, 160, SOLID);
    advance(&s, map, 0.05, false);
    for (int y = 0; y < H; y++) {
        assert_int_equal(owner(&s, 18, y), 0);
        assert_int_equal(owner(&s, 21, y), 1);
    }
    scene_free(&s);
}

/* Anchor 0 = the plate contact; a post holds the tip of a long arm that grows later. */
static void part_that_stands_on_the_plate(void **state)
{
    (void)state;
    enum { W = 200, H = 40 };
    uint8_t map[W * H] = {0};
    scene s = scene_new(W, H, 0.05, 0.05);
    box(map, W, 0, 0, 40, H, ANCHOR);
    advance(&s, map, 0.05, false);
    box(map, W, 0, 0, 40, H, SOLID);
    for (int n = 0; n < 20; n++)
        advance(&s, map, 0.05, false);
    assert_int_equal(owner(&s, 20, 20), 0);
    box(map, W, 0, 0, W, H, SOLID);
    box(map, W, 184, 16, 192, 24, ANCHOR + 1);
    advance(&s, map, 0.05, false);
    assert_int_equal(owner(&s, 2, 20), 0);
    assert_int_equal(owner(&s, 199, 20), 1);
    /* The plate is 21 layers (1.05 mm) away at x = 40: the middle lies 1.05 / 2 mm to the left. */
    int border = 0;
    while (owner(&s, border, 20) == 0)
        border++;
    assert_in_range(border, 96, 112); /* ((39 + 188) - 1.05 / 0.05) / 2 = 103, in cells of 8 */
    scene_free(&s);
}

static void merging_bodies(void **state)
{
    (void)state;
    enum { W = 120, H = 8 };
    uint8_t map[W * H] = {0};
    scene s = scene_new(W, H, 0.05, 0.05);
    box(map, W, 0, 0, 40, H, SOLID);
    box(map, W, 80, 0, 120, H, SOLID);
    box(map, W, 0, 0, 8, H, ANCHOR + 2);
    advance(&s, map, 0.05, false);
    assert_int_equal(owner(&s, 30, 0), 2);
    assert_int_equal(owner(&s, 90, 0), FW_NO_ANCHOR);
    const uint64_t alone = fw_tributary_version(s.field, 0);
    const uint64_t adrift = fw_tributary_version(s.field, 1);
    box(map, W, 0, 0, 8, H, SOLID);
    advance(&s, map, 0.05, false);
    assert_true(fw_tributary_version(s.field, 0) == alone);
    assert_true(fw_tributary_version(s.field, 1) == adrift);
    box(map, W, 40, 0, 80, H, SOLID);
    advance(&s, map, 0.05, false);
    assert_int_equal(owner(&s, 119, 0), 2);
    assert_true(fw_tributary_version(s.field, 0) != alone);
    box(map, W, 40, 0, 80, H, 0);
    advance(&s, map, 0.05, false); /* parted again, the far one now has an owner */
    assert_int_equal(owner(&s, 119, 0), 2);
    assert_true(fw_tributary_version(s.field, 0) == alone); /* the same cells and owners */
    assert_true(fw_tributary_version(s.field, 1) != adrift);
    scene_free(&s);
}

enum { VW = 53, VH = 37, REGIONS = 200 };

/* All nodes of a layer, dense: [region][cell], lengths in whole nm. */
typedef struct dense {
    int64_t length[REGIONS][VW * VH];
    int anchor[REGIONS][VW * VH]; /* -2: no node */
} dense;

static void dense_offer(dense *d, uint32_t r, int cell, int64_t length, int anchor, bool *changed)
{
    if (anchor < 0 || d->anchor[r][cell] == -2)
        return;
    const bool none = d->anchor[r][cell] == -1;
    if (none || length < d->length[r][cell] ||
        (length == d->length[r][cell] && anchor < d->anchor[r][cell])) {
        d->length[r][cell] = length;
        d->anchor[r][cell] = anchor;
        *changed = true;
    }
}

typedef struct dense_cells {
    int kx, ky, columns, rows;
    int64_t right, down, diagonal, thickness;
} dense_cells;

static void dense_relax(dense *d, const dense_cells *k)
{
    for (bool changed = true; changed;) {
        changed = false;
        for (uint32_t r = 0; r < REGIONS; r++) {
            for (int i = 0; i < k->columns * k->rows; i++) {
                for (int j = 0; j < 9 && d->anchor[r][i] >= 0; j++) {
                    const int dx = j % 3 - 1, dy = j / 3 - 1;
                    const int c = i % k->columns + dx, row = i / k->columns + dy;
                    if (c < 0 || row < 0 || c >= k->columns || row >= k->rows)
                        continue;
                    const int64_t step = dy == 0 ? k->right : dx == 0 ? k->down : k->diagonal;
                    dense_offer(d, r, row * k->columns + c, d->length[r][i] + step, d->anchor[r][i],
                                &changed);
                }
            }
        }
    }
}

/* One layer by the definition, from the scene's two newest layers. */
static void dense_step(dense *now, const dense *before, const scene *s, const uint8_t *map,
                       const dense_cells *k)
{
    const int at = (s->count - 1) % 2;
    bool changed;
    for (size_t i = 0; i < (size_t)REGIONS * VW * VH; i++)
        (&now->anchor[0][0])[i] = -2;
    for (int pass = 0; pass < 2; pass++) { /* nodes, then their values */
        for (int i = 0; i < VW * VH; i++) {
            const int x = i % VW, y = i / VW, cell = y / k->ky * k->columns + x / k->kx;
            const uint32_t r = region_at(s, x, y);
            if (r == UINT32_MAX)
                continue;
            assert_true(r < REGIONS);
            if (pass == 0) {
                now->anchor[r][cell] = -1;
                continue;
            }
            if (map[i] >= ANCHOR)
                dense_offer(now, r, cell, 0, map[i] - ANCHOR, &changed);
            const uint32_t run = s->count > 1 ? fw_runs_find(&s->layer[1 - at], x, y) : UINT32_MAX;
            if (run != UINT32_MAX) {
                const uint32_t q = s->regions[1 - at].label[run];
                dense_offer(now, r, cell, before->length[q][cell] + k->thickness,
                            before->anchor[q][cell], &changed);
            }
        }
    }
    dense_relax(now, k);
}

static uint32_t random_next(uint32_t *seed)
{
    *seed = *seed * 1664525U + 1013904223U;
    return *seed >> 16;
}

static void random_layer(uint8_t *map, uint32_t *seed, int n)
{
    for (int i = 0; i < VW * VH; i++)
        map[i] = map[i] != 0 ? SOLID : 0;
    if (n % 4 == 3)
        return; /* a layer that repeats, anchors apart */
    for (int k = 0; k < (n == 0 ? 14 : 4); k++) {
        const int x0 = (int)(random_next(seed) % VW), y0 = (int)(random_next(seed) % VH);
        const int w = 1 + (int)(random_next(seed) % 15), h = 1 + (int)(random_next(seed) % 11);
        const uint8_t value = random_next(seed) % 5 < 3 ? SOLID : 0;
        box(map, VW, x0, y0, x0 + w < VW ? x0 + w : VW, y0 + h < VH ? y0 + h : VH, value);
    }
}

static void random_anchors(uint8_t *map, uint32_t *seed, int n)
{
    for (int k = 0; k < (n == 0 ? 5 : 2); k++) {
        uint8_t *at = &map[random_next(seed) % (VW * VH)];
        if (*at != 0)
            *at = (uint8_t)(ANCHOR + random_next(seed) % ANCHORS);
    }
}

static void compare(const scene *s, const dense *d, const dense_cells *k, uint32_t seed)
{
    for (int i = 0; i < VW * VH; i++) {
        const int x = i % VW, y = i / VW, cell = y / k->ky * k->columns + x / k->kx;
        const uint32_t r = region_at(s, x, y);
        if (r == UINT32_MAX)
            continue;
        const int got = fw_tributary_owner(s->field, r, x, y);
        const double length = fw_tributary_length(s->field, r, x, y);
        if (got != d->anchor[r][cell] || (got >= 0 && llround(length * 1e6) != d->length[r][cell]))
            fail_msg("seed %u layer %d at %d, %d: anchor %d for %d, %f mm for %f", seed,
                     s->count - 1, x, y, got, d->anchor[r][cell], length,
                     (double)d->length[r][cell] * 1e-6);
    }
}

static void random_volume(uint32_t seed, double px_mm, double py_mm, bool add)
{
    static dense layer[2];
    static uint8_t map[VW * VH];
    scene s = scene_new(VW, VH, px_mm, py_mm);
    dense_cells k = {.thickness = 70000};
    fw_tributary_cell(s.field, &k.kx, &k.ky);
    k.columns = (VW + k.kx - 1) / k.kx;
    k.rows = (VH + k.ky - 1) / k.ky;
    k.right = llround(k.kx * px_mm * 1e6);
    k.down = llround(k.ky * py_mm * 1e6);
    k.diagonal = llround(hypot(k.kx * px_mm, k.ky * py_mm) * 1e6);
    memset(map, 0, sizeof map);
    for (int n = 0; n < 8; n++) {
        random_layer(map, &seed, n);
        random_anchors(map, &seed, n);
        advance(&s, map, 0.07, add);
        dense_step(&layer[n % 2], &layer[1 - n % 2], &s, map, &k);
        compare(&s, &layer[n % 2], &k, seed);
    }
    scene_free(&s);
}

static void random_volumes_equal_bellman_ford(void **state)
{
    (void)state;
    for (uint32_t seed = 1; seed <= 10; seed++) {
        random_volume(seed, 0.13, 0.13, false); /* cells of 3 x 3 */
        random_volume(seed, 0.2, 0.1, false);   /* 2 x 4 */
        random_volume(seed, 0.5, 0.5, false);   /* 1 x 1 */
    }
}

static void added_anchors_equal_given_ones(void **state)
{
    (void)state;
    for (uint32_t seed = 21; seed <= 30; seed++)
        random_volume(seed, 0.13, 0.13, true);
}

/* The version follows the owners, no more and no less: it differs exactly when they do. */
static void version_follows_the_owners(void **state)
{
    (void)state;
    static uint8_t map[VW * VH];
    static int last[VW * VH], owners[VW * VH];
    int same = 0, different = 0;
    for (uint32_t seed = 41; seed <= 46; seed++) {
        uint32_t draw = seed;
        uint64_t last_version = 0;
        scene s = scene_new(VW, VH, 0.2, 0.2);
        memset(map, SOLID, sizeof map); /* one region: a change is a change of owners or cells */
        for (int n = 0; n < 12; n++) {
            for (int i = 0; i < VW * VH; i++)
                map[i] = SOLID;
            if (draw % 2 == 0)
                random_anchors(map, &draw, 1);
            random_next(&draw);
            advance(&s, map, 0.07, n % 3 == 0);
            for (int i = 0; i < VW * VH; i++)
                owners[i] = owner(&s, i % VW, i / VW);
            const bool equal = memcmp(owners, last, sizeof last) == 0;
            const uint64_t version = fw_tributary_version(s.field, 0);
            if (n > 0) {
                assert_true((version == last_version) == equal);
                same += equal;
                different += !equal;
            }
            memcpy(last, owners, sizeof last);
            last_version = version;
        }
        scene_free(&s);
    }
    assert_true(same > 5 && different > 5);
}

static void bad_input_is_refused(void **state)
{
    (void)state;
    fw_tributary *field = NULL;
    fw_fault fault = {0};
    assert_int_equal(fw_tributary_new(0, 5, 0.1, 0.1, &field, &fault), FW_INPUT);
    assert_int_equal(fw_tributary_new(5, 5, -0.1, 0.1, &field, &fault), FW_INPUT);
    assert_int_equal(fw_tributary_new(5, 5, 0.1, NAN, &field, &fault), FW_INPUT);
    assert_int_equal(fw_tributary_new(65536, 65536, 0.1, 0.1, &field, &fault), FW_INPUT);
    assert_null(field);
    fw_tributary_free(NULL);

    enum { W = 6, H = 4 };
    uint8_t map[W * H] = {ANCHOR, SOLID};
    scene s = scene_new(W, H, 0.5, 0.5);
    advance(&s, map, 0.05, false);
    fw_runs other = {0};
    assert_int_equal(fw_runs_begin(&other, W, H + 1, NULL), FW_OK);
    fw_runs_finish(&other);
    const fw_runs *now = &s.layer[0];
    const fw_regions *regions = &s.regions[0], none = {0};
    const fw_anchor_contact negative = {-1, now, 0}, large = {1, &other, 0};
    assert_int_equal(fw_tributary_step(s.field, &other, regions, NULL, NULL, 1, NULL, 0, &fault),
                     FW_INPUT);
    assert_int_equal(fw_tributary_step(s.field, now, regions, NULL, NULL, 0, NULL, 0, &fault),
                     FW_INPUT);
    assert_int_equal(fw_tributary_step(s.field, now, regions, now, &none, 1, NULL, 0, &fault),
                     FW_INPUT);
    assert_int_equal(
        fw_tributary_step(s.field, now, regions, now, regions, 1, &negative, 1, &fault), FW_INPUT);
    assert_int_equal(fw_tributary_add_anchor(s.field, large, &fault), FW_INPUT);
    assert_int_equal(owner(&s, 1, 0), 0);
    assert_true(fabs(fw_tributary_length(s.field, 0, 1, 0) - 0.5) < 1e-9);
    fw_runs_free(&other);
    scene_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(two_posts_split_a_beam_in_the_middle),
        cmocka_unit_test(ties_go_to_the_smaller_anchor),
        cmocka_unit_test(contact_at_the_rim_of_a_cell),
        cmocka_unit_test(an_anchors_own_way_counts),
        cmocka_unit_test(wall_with_one_anchor),
        cmocka_unit_test(round_a_slot_and_not_across_it),
        cmocka_unit_test(neighbouring_regions_do_not_leak),
        cmocka_unit_test(part_that_stands_on_the_plate),
        cmocka_unit_test(merging_bodies),
        cmocka_unit_test(random_volumes_equal_bellman_ford),
        cmocka_unit_test(added_anchors_equal_given_ones),
        cmocka_unit_test(version_follows_the_owners),
        cmocka_unit_test(bad_input_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
