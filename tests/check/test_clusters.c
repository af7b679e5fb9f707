/* Which regions of a layer are solved together: pictures, the voids' bodies given by hand. */
#include "check/clusters.h"

#include "check/stage.h"

enum { WIDTH = 24, HEIGHT = 11 };

/* A ring with an island in it, a ring with a small hole, a bar. */
static const char *const rings[HEIGHT] = {
    "........................", //
    ".#########..#######.....", //
    ".#.......#..#.....#.....", //
    ".#..###..#..#.....#.##..", //
    ".#..###..#..#.....#.##..", //
    ".#.......#..#######.##..", //
    ".#########..........##..", //
    "............####....##..", //
    "............#..#....##..", //
    "............####....##..", //
    "........................", //
};
/* Regions in raster order: 0 large ring, 1 second ring, 2 island, 3 bar, 4 small ring. Voids: 0 the
 * vat, 1 inside the large ring, 2 inside the second, 3 inside the small one. */

typedef struct scene {
    stage stage;
    fw_setup setup;
    fw_slice slice;
    uint8_t posts_only[8];
    uint32_t sealed[8];
    fw_openings openings;
    fw_peel peel;
} scene;

static void scene_set(scene *c, double pixel_um, uint32_t first, uint32_t second, uint32_t third)
{
    *c = (scene){.stage = stage_new(WIDTH, HEIGHT, 1)};
    c->stage.job.pixel_um[0] = c->stage.job.pixel_um[1] = pixel_um;
    stage_picture(&c->stage, 0, rings, "#");
    c->setup = stage_setup(&c->stage);
    c->slice = stage_slice(&c->stage, 0);
    c->sealed[0] = UINT32_MAX;
    c->sealed[1] = first;
    c->sealed[2] = second;
    c->sealed[3] = third;
    c->openings = (fw_openings){&c->slice.voids, &c->slice.void_regions, c->sealed, 0};
    assert_int_equal(fw_slice_solid_regions(&c->slice)->count, 5);
    assert_int_equal(c->slice.void_regions.count, 4);
}

static void scene_find(scene *c)
{
    assert_int_equal(
        fw_clusters_find(&c->setup, &c->slice, c->posts_only, &c->openings, &c->peel, NULL), FW_OK);
}

static void scene_free(scene *c)
{
    fw_peel_free(&c->peel);
    fw_slice_free(&c->slice);
    stage_free(&c->stage);
}

static void open_voids_part_everything(void **state)
{
    (void)state;
    scene c;
    scene_set(&c, 100, UINT32_MAX, UINT32_MAX, UINT32_MAX);
    scene_find(&c);
    assert_int_equal(c.peel.count, 5);
    for (uint32_t r = 0; r < 5; r++) {
        const fw_cluster *cluster = &c.peel.cluster[r];
        assert_int_equal(c.peel.of_region[r], r);
        assert_int_equal(cluster->first_region, r);
        assert_int_equal(cluster->region_count, 1);
        assert_int_equal(cluster->cavity_count, 0);
        assert_false(cluster->sealed);
    }
    for (int v = 0; v < 4; v++)
        assert_int_equal(c.peel.of_void[v], UINT32_MAX);
    assert_int_equal(c.peel.cluster[3].x0, 20);
    assert_int_equal(c.peel.cluster[3].y0, 3);
    assert_int_equal(c.peel.cluster[3].x1, 22);
    assert_int_equal(c.peel.cluster[3].y1, 10);
    scene_free(&c);
}

/* One pressure rules in the ring, and pulls on the island too. */
static void an_island_in_a_sealed_ring_joins_it(void **state)
{
    (void)state;
    scene c;
    scene_set(&c, 100, 77, UINT32_MAX, UINT32_MAX);
    scene_find(&c);
    assert_int_equal(c.peel.count, 4);
    assert_int_equal(c.peel.of_region[0], 0);
    assert_int_equal(c.peel.of_region[2], 0);
    assert_int_equal(c.peel.of_region[1], 1);
    assert_int_equal(c.peel.cluster[0].region_count, 2);
    assert_int_equal(c.peel.cluster[0].cavity_count, 1);
    assert_true(c.peel.cluster[0].sealed);
    assert_false(c.peel.cluster[1].sealed);
    assert_int_equal(c.peel.of_void[1], 0);
    scene_free(&c);
}

/* Two openings of one void body (they meet on the plate side) make one cluster with one cavity; two
 * bodies make two. */
static void rings_over_one_cavity_are_one_cluster(void **state)
{
    (void)state;
    for (int two = 0; two < 2; two++) {
        scene c;
        scene_set(&c, 120, 5, two ? 6 : 5, UINT32_MAX);
        scene_find(&c);
        assert_int_equal(c.peel.count, two ? 4 : 3);
        assert_int_equal(c.peel.of_region[1], two ? 1 : 0);
        const fw_cluster *first = &c.peel.cluster[0];
        assert_int_equal(first->region_count, two ? 2 : 3);
        assert_int_equal(first->cavity_count, 1);
        assert_int_equal(c.peel.cavity_of[1], 0);
        assert_int_equal(c.peel.cavity_of[2], 0);
        assert_int_equal(first->x0, 1);
        assert_int_equal(first->x1, two ? 10 : 19);
        assert_int_equal(first->y1, 7);
        scene_free(&c);
    }
}

/* 2 px of the small ring: just under 0.05 mm2 is filled, just over it is a cavity. */
static void small_cavities_are_filled(void **state)
{
    (void)state;
    for (int large = 0; large < 2; large++) {
        scene c;
        scene_set(&c, large ? 158.2 : 158.1, UINT32_MAX, UINT32_MAX,
                  3); /* 2 x 0.1581^2 = 0.04999 */
        scene_find(&c);
        const fw_cluster *small = &c.peel.cluster[c.peel.of_region[4]];
        assert_true(small->sealed);
        assert_int_equal(small->cavity_count, large);
        assert_int_equal(c.peel.cavity_of[3], large ? 0 : UINT32_MAX);
        const uint8_t wanted[5] = {0, 0, 0, 0, 1};
        assert_int_equal(fw_clusters_shape(&c.setup, &c.slice, &c.openings, wanted, &c.peel, NULL),
                         FW_OK);
        assert_int_equal(fw_runs_pixels(&small->shape.film), large ? 10 : 12);
        assert_int_equal(fw_runs_pixels(&small->shape.sealed), large ? 2 : 0);
        assert_int_equal(c.peel.cluster[0].shape.film.count, 0); /* was not wanted */
        scene_free(&c);
    }
}

/* The shape is the picture, moved to the corner of the cluster's box. */
static void shape_is_the_picture(void **state)
{
    (void)state;
    scene c;
    scene_set(&c, 120, 5, 5, UINT32_MAX);
    c.setup.py_mm = 0.06;
    scene_find(&c);
    const uint8_t wanted[3] = {1, 1, 1};
    assert_int_equal(fw_clusters_shape(&c.setup, &c.slice, &c.openings, wanted, &c.peel, NULL),
                     FW_OK);
    const fw_film_shape *shape = &c.peel.cluster[0].shape;
    assert_int_equal(shape->film.width, 18);
    assert_int_equal(shape->film.height, 6);
    assert_true(shape->px_mm == 0.12 && shape->py_mm == 0.06);
    assert_int_equal(shape->cavity_count, 1);
    for (int32_t y = 0; y < 6; y++) {
        for (int32_t x = 0; x < 18; x++) {
            const bool film = rings[y + 1][x + 1] == '#';
            const bool in_first = x > 0 && x < 8 && y > 0 && y < 5;
            const bool in_second = x > 11 && x < 17 && y > 0 && y < 4;
            assert_int_equal(fw_runs_find(&shape->film, x, y) != UINT32_MAX, film);
            assert_int_equal(fw_runs_find(&shape->sealed, x, y) != UINT32_MAX,
                             !film && (in_first || in_second));
        }
    }
    for (uint32_t i = 0; i < shape->sealed.count; i++)
        assert_int_equal(shape->cavity[i], 0);
    scene_free(&c);
}

/* Rows: sum of l^3 / 12 + l / 6 (exact for the pixel scheme of a strip), times the pixel's
 * px^3 py. */
static void bound_is_the_sum_of_its_rows(void **state)
{
    (void)state;
    scene c;
    scene_set(&c, 100, UINT32_MAX, UINT32_MAX, UINT32_MAX);
    c.setup.px_mm = 0.2;
    scene_find(&c);
    const double unit = 0.2 * 0.2 * 0.2 * 0.1;
    assert_near(c.peel.cluster[3].bound_mm4, unit * 7 * (8 / 12.0 + 2 / 6.0), 1e-12);
    assert_near(c.peel.cluster[2].bound_mm4, unit * 2 * (27 / 12.0 + 3 / 6.0), 1e-12);
    assert_near(c.peel.cluster[4].bound_mm4,
                unit * (2 * (64 / 12.0 + 4 / 6.0) + 2 * (1 / 12.0 + 1 / 6.0)), 1e-12);
    scene_free(&c);
}

/* A cluster counts as posts alone only if every region of it does. */
static void posts_alone(void **state)
{
    (void)state;
    for (int island = 0; island < 2; island++) {
        scene c;
        scene_set(&c, 100, 8, UINT32_MAX, UINT32_MAX);
        c.posts_only[0] = c.posts_only[3] = 1;
        c.posts_only[2] = (uint8_t)island;
        scene_find(&c);
        assert_int_equal(c.peel.cluster[c.peel.of_region[0]].posts_only, island);
        assert_true(c.peel.cluster[c.peel.of_region[3]].posts_only);
        assert_false(c.peel.cluster[c.peel.of_region[1]].posts_only);
        scene_free(&c);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(open_voids_part_everything),
                                       cmocka_unit_test(an_island_in_a_sealed_ring_joins_it),
                                       cmocka_unit_test(rings_over_one_cavity_are_one_cluster),
                                       cmocka_unit_test(small_cavities_are_filled),
                                       cmocka_unit_test(shape_is_the_picture),
                                       cmocka_unit_test(bound_is_the_sum_of_its_rows),
                                       cmocka_unit_test(posts_alone)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
