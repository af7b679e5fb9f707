#include "mask/pixel_masks.h"

#include "mask/bodies.h"

enum { LAYERS = 6, SMALL = 12, VOXELS = LAYERS * SMALL * SMALL };

/* The layer before, as one who follows a stack keeps it. */
typedef struct follower {
    fw_bodies bodies;
    fw_runs before;
    fw_regions before_regions;
    fw_overlaps overlaps;
    int32_t layer;
} follower;

/* grounded[r] for the regions of the layer, or NULL: then layer 0 is grounded, as on a plate. */
static void follow(follower *f, const pixel_mask *mask, const uint8_t *grounded)
{
    uint8_t plate[AREA];
    fw_runs now = runs_of(mask);
    fw_regions regions = {0};
    assert_int_equal(fw_regions_label(&now, FW_FOUR, &regions, NULL), FW_OK);
    for (uint32_t r = 0; r < regions.count; r++)
        plate[r] = f->layer == 0;
    if (f->layer > 0)
        assert_int_equal(
            fw_overlaps_find(&f->before, &f->before_regions, &now, &regions, &f->overlaps, NULL),
            FW_OK);
    assert_int_equal(fw_bodies_step(&f->bodies, f->layer, &regions,
                                    f->layer > 0 ? &f->overlaps : NULL,
                                    grounded != NULL ? grounded : plate, NULL),
                     FW_OK);
    fw_runs_free(&f->before);
    fw_regions_free(&f->before_regions);
    f->before = now;
    f->before_regions = regions;
    f->layer++;
}

static void unfollow(follower *f)
{
    fw_bodies_free(&f->bodies);
    fw_runs_free(&f->before);
    fw_regions_free(&f->before_regions);
    fw_overlaps_free(&f->overlaps);
}

static uint32_t body_at(const follower *f, int32_t x, int32_t y)
{
    const uint32_t run = fw_runs_find(&f->before, x, y);
    return fw_bodies_of_region(&f->bodies, f->before_regions.label[run]);
}

/* Floods one body of the first `layers` masks (all SMALL x SMALL) through pixel faces. */
static fw_body flood_body(const pixel_mask *stack, int32_t layers, int32_t seed,
                          bool seen[static VOXELS])
{
    static const int32_t step[6][3] = {{1, 0, 0},  {-1, 0, 0}, {0, 1, 0},
                                       {0, -1, 0}, {0, 0, 1},  {0, 0, -1}};
    int32_t todo[VOXELS], depth = 0;
    fw_body body = {.x0 = SMALL, .y0 = SMALL};
    seen[seed] = true;
    todo[depth++] = seed;
    while (depth > 0) {
        const int32_t at = todo[--depth];
        const int32_t x = at % SMALL, y = at / SMALL % SMALL, z = at / (SMALL * SMALL);
        body.pixels++;
        body.grounded = body.grounded || z == 0;
        body.last_layer = z > body.last_layer ? z : body.last_layer;
        body.x0 = x < body.x0 ? x : body.x0;
        body.y0 = y < body.y0 ? y : body.y0;
        body.x1 = x >= body.x1 ? x + 1 : body.x1;
        body.y1 = y >= body.y1 ? y + 1 : body.y1;
        for (int i = 0; i < 6; i++) {
            const int32_t u = x + step[i][0], v = y + step[i][1], w = z + step[i][2];
            if (w < 0 || w >= layers || !lit(&stack[w], u, v) || seen[(w * SMALL + v) * SMALL + u])
                continue;
            seen[(w * SMALL + v) * SMALL + u] = true;
            todo[depth++] = (w * SMALL + v) * SMALL + u;
        }
    }
    return body;
}

static void assert_body(const fw_body *body, const fw_body *expected)
{
    assert_int_equal(body->grounded, expected->grounded);
    assert_int_equal(body->pixels, expected->pixels);
    assert_int_equal(body->first_layer, expected->first_layer);
    assert_int_equal(body->last_layer, expected->last_layer);
    assert_int_equal(body->x0, expected->x0);
    assert_int_equal(body->y0, expected->y0);
    assert_int_equal(body->x1, expected->x1);
    assert_int_equal(body->y1, expected->y1);
    assert_int_equal(body->first_x, expected->first_x);
    assert_int_equal(body->first_y, expected->first_y);
}

/* Voxels in the order (layer, y, x) meet the bodies in the order of their first pixels, which is
 * the order of the roots. */
static void check_against_flood(const follower *f, const pixel_mask *stack)
{
    bool seen[VOXELS] = {false};
    uint32_t id = 0;
    for (int32_t at = 0; at < f->layer * SMALL * SMALL; at++) {
        const int32_t x = at % SMALL, y = at / SMALL % SMALL, z = at / (SMALL * SMALL);
        if (seen[at] || !lit(&stack[z], x, y))
            continue;
        fw_body expected = flood_body(stack, f->layer, at, seen);
        expected.first_layer = z;
        expected.first_x = x;
        expected.first_y = y;
        while (id < f->bodies.count && fw_bodies_root(&f->bodies, id) != id)
            id++;
        assert_true(id < f->bodies.count);
        assert_body(&f->bodies.body[id++], &expected);
    }
    while (id < f->bodies.count && fw_bodies_root(&f->bodies, id) != id)
        id++;
    assert_int_equal(id, f->bodies.count);
}

/* The newest layer: two pixels have the same body exactly when a flood joins them. */
static void check_frontier(const follower *f, const pixel_mask *stack)
{
    const int32_t base = (f->layer - 1) * SMALL * SMALL;
    for (int32_t at = 0; at < SMALL * SMALL; at++) {
        if (!lit(&stack[f->layer - 1], at % SMALL, at / SMALL))
            continue;
        bool seen[VOXELS] = {false};
        const fw_body body = flood_body(stack, f->layer, base + at, seen);
        const uint32_t root = body_at(f, at % SMALL, at / SMALL);
        assert_int_equal(fw_bodies_grounded(&f->bodies, root), body.grounded);
        for (int32_t other = 0; other < SMALL * SMALL; other++) {
            if (lit(&stack[f->layer - 1], other % SMALL, other / SMALL))
                assert_int_equal(body_at(f, other % SMALL, other / SMALL) == root,
                                 seen[base + other]);
        }
    }
}

static void bodies_agree_with_flood_fill_after_every_layer(void **state)
{
    (void)state;
    uint64_t seed = 31;
    for (int trial = 0; trial < 150; trial++) {
        pixel_mask stack[LAYERS];
        follower f = {0};
        const int32_t percent = 20 + random_below(&seed, 50);
        for (int32_t layer = 0; layer < LAYERS; layer++) {
            stack[layer] = random_mask(&seed, SMALL, SMALL, percent);
            follow(&f, &stack[layer], NULL);
            check_against_flood(&f, stack);
        }
        if (trial % 10 == 0)
            check_frontier(&f, stack);
        unfollow(&f);
    }
}

static void a_body_is_made_for_each_onset_only(void **state)
{
    (void)state;
    const pixel_mask stack[] = {drawn("#....\n"), drawn("##..#\n"), drawn("##.##\n"),
                                drawn("..#..\n")};
    follower f = {0};
    const uint32_t count[] = {1, 2, 2, 3};
    for (int32_t layer = 0; layer < 4; layer++) {
        follow(&f, &stack[layer], NULL);
        assert_int_equal(f.bodies.count, count[layer]);
    }
    unfollow(&f);
}

/* Three pillars, only the last one on the plate: a bridge grounds the others from then on. */
static void a_bridge_grounds_what_it_joins(void **state)
{
    (void)state;
    const pixel_mask plate = drawn("....#\n"), pillars = drawn("#.#.#\n"),
                     bridge = drawn("#####\n");
    follower f = {0};
    follow(&f, &plate, NULL);
    follow(&f, &pillars, NULL);
    assert_false(fw_bodies_grounded(&f.bodies, body_at(&f, 0, 0)));
    assert_false(fw_bodies_grounded(&f.bodies, body_at(&f, 2, 0)));
    assert_true(fw_bodies_grounded(&f.bodies, body_at(&f, 4, 0)));
    follow(&f, &bridge, NULL);
    assert_int_equal(body_at(&f, 0, 0), 0);
    for (uint32_t id = 0; id < f.bodies.count; id++) {
        assert_int_equal(fw_bodies_root(&f.bodies, id), 0);
        assert_true(fw_bodies_grounded(&f.bodies, id));
    }
    assert_int_equal(f.bodies.body[0].first_x, 4);
    assert_int_equal(f.bodies.body[0].first_layer, 0);
    assert_int_equal(f.bodies.body[0].last_layer, 2);
    assert_int_equal(f.bodies.body[0].pixels, 9);
    unfollow(&f);
}

static void an_empty_layer_parts_bodies(void **state)
{
    (void)state;
    const pixel_mask column = drawn("#\n"), gap = drawn(".\n");
    follower f = {0};
    follow(&f, &column, NULL);
    follow(&f, &gap, NULL);
    follow(&f, &column, NULL);
    assert_int_equal(f.bodies.count, 2);
    assert_false(fw_bodies_grounded(&f.bodies, body_at(&f, 0, 0)));
    assert_int_equal(f.bodies.body[0].last_layer, 0);
    assert_int_equal(f.bodies.body[1].first_layer, 2);
    unfollow(&f);
}

static void a_tip_grounds_a_body_and_what_joins_it(void **state)
{
    (void)state;
    const pixel_mask plate = drawn("...\n"), islands = drawn("#.#\n"), bridge = drawn("###\n");
    follower f = {0};
    follow(&f, &plate, NULL);
    follow(&f, &islands, NULL);
    fw_bodies_ground(&f.bodies, body_at(&f, 2, 0));
    assert_false(fw_bodies_grounded(&f.bodies, body_at(&f, 0, 0)));
    assert_true(fw_bodies_grounded(&f.bodies, body_at(&f, 2, 0)));
    follow(&f, &bridge, NULL);
    assert_true(fw_bodies_grounded(&f.bodies, 0));
    unfollow(&f);
}

static void a_tip_grounds_the_body_that_an_old_id_went_into(void **state)
{
    (void)state;
    const pixel_mask plate = drawn("...\n"), islands = drawn("#.#\n"), bridge = drawn("###\n");
    follower f = {0};
    follow(&f, &plate, NULL);
    follow(&f, &islands, NULL);
    follow(&f, &bridge, NULL);
    assert_false(fw_bodies_grounded(&f.bodies, 0));
    fw_bodies_ground(&f.bodies, 1);
    assert_true(fw_bodies_grounded(&f.bodies, 0));
    unfollow(&f);
}

/* A region that is grounded of itself grounds the body that it joins: a void that reaches the vat.
 */
static void a_grounded_region_grounds_the_body_before(void **state)
{
    (void)state;
    const pixel_mask hole = drawn("...\n.#.\n...\n"), channel = drawn("...\n.##\n...\n");
    const uint8_t shut[] = {0}, open[] = {1};
    follower f = {0};
    follow(&f, &hole, shut);
    assert_false(fw_bodies_grounded(&f.bodies, 0));
    follow(&f, &channel, open);
    assert_int_equal(f.bodies.count, 1);
    assert_true(fw_bodies_grounded(&f.bodies, 0));
    follow(&f, &hole, shut);
    assert_true(fw_bodies_grounded(&f.bodies, body_at(&f, 1, 1)));
    unfollow(&f);
}

/* Pillars that are joined from the last to the first, one bridge a layer: the longest chain of
 * unions that there is. Every id ends at 0 and the sums miss nothing. */
static void unions_in_falling_order_end_at_the_smallest_id(void **state)
{
    (void)state;
    pixel_mask mask = {.width = SIDE - 1, .height = 1};
    for (int32_t x = 0; x < mask.width; x += 2)
        mask.at[x] = 1;
    follower f = {0};
    follow(&f, &mask, NULL);
    int64_t pixels = SIDE / 2;
    for (int32_t bridge = 1; bridge < SIDE / 2; bridge++) {
        mask.at[mask.width - 2 * bridge] = 1;
        follow(&f, &mask, NULL);
        pixels += SIDE / 2 + bridge;
    }
    assert_int_equal(f.bodies.count, SIDE / 2);
    for (uint32_t id = 0; id < f.bodies.count; id++)
        assert_int_equal(fw_bodies_root(&f.bodies, id), 0);
    assert_int_equal(f.bodies.body[0].pixels, pixels);
    unfollow(&f);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(bodies_agree_with_flood_fill_after_every_layer),
        cmocka_unit_test(a_body_is_made_for_each_onset_only),
        cmocka_unit_test(a_bridge_grounds_what_it_joins),
        cmocka_unit_test(an_empty_layer_parts_bodies),
        cmocka_unit_test(a_tip_grounds_a_body_and_what_joins_it),
        cmocka_unit_test(a_tip_grounds_the_body_that_an_old_id_went_into),
        cmocka_unit_test(a_grounded_region_grounds_the_body_before),
        cmocka_unit_test(unions_in_falling_order_end_at_the_smallest_id),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
