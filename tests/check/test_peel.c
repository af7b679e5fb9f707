/* Peel load of a layer against closed forms, bounds and itself. Sources: squeeze film (Stefan 1874,
 * Reynolds 1886), torsion series of rectangles (Timoshenko and Goodier), annular flow (Bird,
 * Stewart and Lightfoot) for a vented ring, the cavitated disc by the variational condition
 * (Almqvist and Wall 2016). All for eta 0.5 Pa s, v 1 mm/s, 100 um, rigid. */
#include "check/peel.h"

#include "check/stage.h"

static const double pi = 3.14159265358979323846;

enum { OPEN_HOLES, SEALED_HOLES };

typedef struct layer {
    stage stage;
    fw_setup setup;
    fw_slice slice;
    uint8_t *posts_only;
    uint32_t *sealed;
    fw_budget budget;
    fw_film_memo *memo;
    fw_peel peel;
} layer;

/* Without a cap worth the name, and with nothing left unsolved. */
static void fluid(stage *s, double pixel_um)
{
    s->job.pixel_um[0] = s->job.pixel_um[1] = pixel_um;
    s->job.resin.viscosity_mPa_s = 500;
    s->job.machine.gap_um = s->job.machine.gap_range_um[0] = s->job.machine.gap_range_um[1] = 100;
    s->job.machine.cap_kPa = 1e9;
    s->job.max_peel_N = 1e-6;
}

/* Cuts layer 0 of the stage and solves it. Holes are each a body of their own, or open. */
static void solve(layer *l, int holes)
{
    l->setup = stage_setup(&l->stage);
    l->slice = stage_slice(&l->stage, 0);
    const fw_regions *voids = &l->slice.void_regions;
    l->posts_only = calloc((size_t)fw_slice_solid_regions(&l->slice)->count + 1, 1);
    l->sealed = calloc((size_t)voids->count + 1, sizeof *l->sealed);
    assert_non_null(l->posts_only);
    assert_non_null(l->sealed);
    for (uint32_t v = 0; v < voids->count; v++)
        l->sealed[v] = holes == SEALED_HOLES && !voids->region[v].on_border ? v : UINT32_MAX;
    l->budget = (fw_budget){.holder = "memo", .limit = 16u << 20};
    fw_fault fault = {0};
    assert_int_equal(fw_film_memo_create(&l->budget, &l->memo, NULL), FW_OK);
    const fw_openings openings = {&l->slice.voids, voids, l->sealed, 0};
    if (fw_peel_solve(&l->setup, &l->slice, l->posts_only, &openings, l->memo, &l->peel, &fault) !=
        FW_OK)
        fail_msg("%s", fault.text);
}

static void layer_free(layer *l)
{
    fw_peel_free(&l->peel);
    fw_film_memo_free(l->memo);
    fw_slice_free(&l->slice);
    free(l->posts_only);
    free(l->sealed);
    stage_free(&l->stage);
}

static double area_of(const layer *l)
{
    return (double)fw_runs_pixels(fw_slice_solid(&l->slice)) * l->setup.px_mm * l->setup.py_mm;
}

static layer disc(double pixel_um, double r_px, double hole_px)
{
    layer l = {.stage = stage_new((int32_t)(2 * r_px) + 10, (int32_t)(2 * r_px) + 10, 1)};
    fluid(&l.stage, pixel_um);
    stage_disc(&l.stage, r_px + 5, r_px + 5, r_px, 0, 1, 255);
    stage_disc(&l.stage, r_px + 5, r_px + 5, hole_px, 0, 1, 0);
    return l;
}

/* F = 3 pi eta v R^4 / (2 h^3) = 23.5619449 N at R = 10 mm; a raster of it has not quite the same
 * area, and F goes with its square. */
static void disc_is_stefans(void **state)
{
    (void)state;
    layer l = disc(100, 100, 0);
    solve(&l, OPEN_HOLES);
    const double raster = area_of(&l) / (pi * 100);
    assert_near(l.peel.force_N, 23.5619449 * raster * raster, 0.005);
    assert_int_equal(l.peel.limited_by, FW_BY_FILM);
    assert_int_equal(l.peel.count, 1);
    layer_free(&l);
}

/* F goes with the fourth power of the pixel: a pure change of unit. */
static void scale(void **state)
{
    (void)state;
    layer a = disc(100, 50, 20), b = disc(200, 50, 20);
    solve(&a, SEALED_HOLES);
    solve(&b, SEALED_HOLES);
    assert_near(b.peel.force_N, 16 * a.peel.force_N, 1e-12);
    layer_free(&a);
    layer_free(&b);
}

/* Square of 20 mm: 33.7384836 N by the series; 64 pixels across: 0.1 % more by the scheme, and at
 * most 1 % by the cells that are cut. Strip 20 x 5 mm of 80 x 20 pixels: 1.05304859 N, 0.553 %. */
static void rectangles(void **state)
{
    (void)state;
    layer square = {.stage = stage_new(70, 70, 1)}, strip = {.stage = stage_new(90, 30, 1)};
    fluid(&square.stage, 20000.0 / 64);
    fluid(&strip.stage, 250);
    stage_box(&square.stage, 3, 3, 0, 67, 67, 1, 255);
    stage_box(&strip.stage, 5, 5, 0, 85, 25, 1, 255);
    solve(&square, OPEN_HOLES);
    solve(&strip, OPEN_HOLES);
    assert_near(square.peel.force_N, 33.7384836 * 1.00094, 0.01);
    assert_near(strip.peel.force_N, 1.05304859 * 1.00553, 0.01);
    layer_free(&square);
    layer_free(&strip);
}

/* R = 10, r = 5 mm. Vented: 2.96842900 N; sealed: 22.0893234 N, the cavity's suction counts. */
static void ring_vented_and_sealed(void **state)
{
    (void)state;
    layer vented = disc(100, 100, 50), sealed = disc(100, 100, 50);
    solve(&vented, OPEN_HOLES);
    solve(&sealed, SEALED_HOLES);
    assert_near(vented.peel.force_N, 2.96842900, 0.01);
    assert_near(sealed.peel.force_N, 22.0893234, 0.005);
    assert_int_equal(sealed.peel.cluster[0].cavity_count, 1);
    assert_int_equal(vented.peel.cluster[0].cavity_count, 0);
    layer_free(&vented);
    layer_free(&sealed);
}

/* The disc at P = 101325 Pa: 19.1908130 N at 100 um, 27.4642473 N at 50 um, 30.7289757 N at 20 um;
 * in place of the raster's area the ratio to P A is compared. */
static void cap_is_an_obstacle(void **state)
{
    (void)state;
    static const double gap_um[3] = {100, 50, 20};
    static const double exact_N[3] = {19.1908130, 27.4642473, 30.7289757};
    for (int i = 0; i < 3; i++) {
        layer l = disc(100, 100, 0);
        l.stage.job.machine.cap_kPa = 101.325;
        l.stage.job.machine.gap_um = gap_um[i];
        solve(&l, OPEN_HOLES);
        const double most = 0.101325 * area_of(&l);
        assert_near(l.peel.force_N / most, exact_N[i] / (0.101325 * pi * 100), 0.005);
        assert_true(l.peel.force_N <= most);
        assert_int_equal(l.peel.limited_by, FW_BY_CAP);
        layer_free(&l);
    }
}

/* Two islands add; so do a capped and an uncapped one, and the layer is then at the cap. */
static void islands_add(void **state)
{
    (void)state;
    double alone[2], force[2];
    for (int two = 0; two < 2; two++) {
        for (int capped = 0; capped < 2; capped++) {
            layer l = {.stage = stage_new(160, 80, 1)};
            fluid(&l.stage, 100);
            if (capped)
                l.stage.job.machine.cap_kPa =
                    15; /* 22 at the centre of the square, 3 in the strip */
            stage_box(&l.stage, 5, 5, 0, 75, 75, 1, 255);
            if (two)
                stage_box(&l.stage, 85, 5, 0, 105, 75, 1, 255);
            solve(&l, OPEN_HOLES);
            assert_int_equal(l.peel.count, 1 + two);
            assert_int_equal(l.peel.limited_by, capped ? FW_BY_CAP : FW_BY_FILM);
            (two ? force : alone)[capped] = l.peel.force_N;
            if (two) {
                assert_int_equal(l.peel.cluster[1].limited_by, FW_BY_FILM);
                assert_near(force[capped], alone[capped] + l.peel.cluster[1].force_N, 1e-12);
            }
            layer_free(&l);
        }
    }
    assert_true(alone[1] < alone[0]);
}

/* Under 0.05 mm2 a sealed hole is filled: the same force as without it, and never left to a bound.
 */
static void small_holes_are_filled(void **state)
{
    (void)state;
    double force[2];
    for (int hole = 0; hole < 2; hole++) {
        layer l = disc(100, 20, 0);
        if (hole)
            stage_box(&l.stage, 22, 24, 0, 24, 26, 1, 0); /* 0.04 mm2 */
        solve(&l, SEALED_HOLES);
        assert_int_equal(l.peel.cluster[0].sealed, hole);
        force[hole] = l.peel.force_N;
        layer_free(&l);
    }
    assert_true(force[0] == force[1]);
}

/* Random blotches of discs: F <= P A, F <= the rows' bound, F <= F without a cap. */
static void stays_under_every_bound(void **state)
{
    (void)state;
    uint64_t seed = 20240607;
    for (int run = 0; run < 12; run++) {
        layer l = {.stage = stage_new(120, 90, 1)}, free_film = {.stage = stage_new(120, 90, 1)};
        fluid(&l.stage, 100);
        l.stage.job.machine.cap_kPa = 20;
        for (int i = 0; i < 14; i++) {
            seed = seed * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
            const double x = (double)(seed >> 33 & 127), y = (double)(seed >> 43 & 127);
            stage_disc(&l.stage, x, y, 2 + (double)(seed >> 53 & 15), 0, 1, i % 4 == 3 ? 0 : 255);
        }
        memcpy(free_film.stage.grey, l.stage.grey, 120 * 90);
        free_film.stage.job = l.stage.job;
        free_film.stage.job.machine.cap_kPa = 1e9;
        solve(&l, SEALED_HOLES);
        solve(&free_film, SEALED_HOLES);
        assert_true(l.peel.force_N <= free_film.peel.force_N * (1 + 2e-3)); /* work tolerance */
        for (uint32_t c = 0; c < l.peel.count; c++) {
            const fw_cluster *cluster = &l.peel.cluster[c];
            const fw_cluster *uncapped = &free_film.peel.cluster[c];
            assert_true(cluster->solution != NULL);
            assert_true(cluster->force_N <= l.setup.cap_MPa * cluster->solution->area_mm2);
            if (!cluster->sealed)
                assert_true(uncapped->force_N <= l.setup.q * cluster->bound_mm4 * (1 + 1e-9));
        }
        layer_free(&l);
        layer_free(&free_film);
    }
}

/* Below a hundredth of the smallest limit the bound stands in, on the safe side. */
static void negligible_films_are_bounded(void **state)
{
    (void)state;
    double force[2];
    for (int unsolved = 0; unsolved < 2; unsolved++) {
        layer l = {.stage = stage_new(40, 20, 1)};
        fluid(&l.stage, 100);
        stage_box(&l.stage, 5, 5, 0, 25, 11, 1, 255);
        if (unsolved)
            l.stage.job.max_peel_N = 0;
        solve(&l, OPEN_HOLES);
        assert_int_equal(l.peel.limited_by, unsolved ? FW_BY_BOUND : FW_BY_FILM);
        assert_int_equal(l.peel.cluster[0].solution == NULL, unsolved);
        force[unsolved] = l.peel.force_N;
        if (unsolved)
            assert_true(force[1] < l.setup.unsolved_N);
        layer_free(&l);
    }
    assert_true(force[1] >= force[0]);
}

/* At both ends of the gap range: what a direct solve at that gap gives. */
static void range_agrees_with_direct_solves(void **state)
{
    (void)state;
    static const double gap_um[2] = {60, 160};
    layer l = disc(100, 60, 25);
    l.stage.job.machine.cap_kPa = 60;
    l.stage.job.machine.gap_range_um[0] = gap_um[0];
    l.stage.job.machine.gap_range_um[1] = gap_um[1];
    solve(&l, SEALED_HOLES);
    double bound[2];
    fw_peel_range_bound(&l.setup, &l.peel, bound);
    assert_int_equal(fw_peel_range(&l.setup, l.memo, &l.peel, NULL), FW_OK);
    for (int end = 0; end < 2; end++) {
        layer direct = disc(100, 60, 25);
        direct.stage.job.machine.cap_kPa = 60;
        direct.stage.job.machine.gap_um = gap_um[end];
        solve(&direct, SEALED_HOLES);
        assert_near(l.peel.range_N[end], direct.peel.force_N, 0.01); /* the curve's own step */
        assert_true(bound[end] >= direct.peel.force_N * (1 - 1e-3)); /* the work tolerance */
        assert_true(bound[end] >= l.peel.range_N[end] * (1 - 1e-3));
        layer_free(&direct);
    }
    assert_true(l.peel.range_N[0] > l.peel.force_N && l.peel.range_N[1] < l.peel.force_N);
    layer_free(&l);
}

/* At the narrow end no film pulls more than the liquid holds, one that was not solved neither. */
static void range_stays_under_the_cap(void **state)
{
    (void)state;
    layer l = {.stage = stage_new(30, 30, 1)};
    fluid(&l.stage, 100);
    stage_box(&l.stage, 5, 5, 0, 25, 25, 1, 255);
    l.stage.job.max_peel_N = 0;
    l.stage.job.machine.cap_kPa = 101.325;
    l.stage.job.machine.gap_um = 200;
    l.stage.job.machine.gap_range_um[0] = 20;
    solve(&l, OPEN_HOLES);
    assert_int_equal(l.peel.limited_by, FW_BY_BOUND);
    double bound[2];
    fw_peel_range_bound(&l.setup, &l.peel, bound);
    assert_int_equal(fw_peel_range(&l.setup, l.memo, &l.peel, NULL), FW_OK);
    const double most = 0.101325 * area_of(&l) * (1 + 1e-12);
    assert_true(l.peel.range_N[0] <= most);
    assert_true(bound[0] <= most);
    layer_free(&l);
}

/* A slot that held another layer before gives the same as a fresh one. */
static void slots_forget(void **state)
{
    (void)state;
    layer l = disc(100, 40, 15), other = disc(100, 40, 0);
    solve(&other, OPEN_HOLES);
    solve(&l, SEALED_HOLES);
    const double force = l.peel.force_N;
    const uint8_t no_posts[4] = {0};
    const uint32_t open[4] = {UINT32_MAX, UINT32_MAX, UINT32_MAX, UINT32_MAX};
    const fw_openings none = {&other.slice.voids, &other.slice.void_regions, open, 0};
    const fw_openings holes = {&l.slice.voids, &l.slice.void_regions, l.sealed, 0};
    assert_int_equal(
        fw_peel_solve(&other.setup, &other.slice, no_posts, &none, l.memo, &l.peel, NULL), FW_OK);
    assert_true(l.peel.force_N == other.peel.force_N);
    assert_int_equal(fw_peel_solve(&l.setup, &l.slice, l.posts_only, &holes, l.memo, &l.peel, NULL),
                     FW_OK);
    assert_true(l.peel.force_N == force);
    layer_free(&l);
    layer_free(&other);
}

/* Reciprocity: the integral of u_tilt is that of u_pull times 1 + faster, and on a disc that is its
 * value in the middle. The hinge 5 mm beside the image, the plate's centre 37 mm from it. */
static void a_plate_that_tilts(void **state)
{
    (void)state;
    for (int turned = 0; turned < 2; turned++) {
        layer pull = disc(100, 40, 0), tilt = disc(100, 40, 0);
        solve(&pull, OPEN_HOLES);
        tilt.stage.job.machine.mode = FW_MODE_TILT;
        tilt.stage.job.machine.hinge_mm = (fw_points){2, {{-5, 3}, {-5, turned ? 9 : -9}}};
        solve(&tilt, OPEN_HOLES);
        const double middle = 0.5 * tilt.stage.width * tilt.setup.px_mm;
        assert_int_equal(tilt.peel.limited_by, FW_BY_FILM);
        assert_near(tilt.peel.force_N, pull.peel.force_N * (5 + middle) / 37, 2e-3);
        for (uint32_t c = 0; c < tilt.peel.count; c++)
            assert_true(tilt.peel.cluster[c].force_N <=
                        tilt.setup.q * tilt.peel.cluster[c].bound_mm4);
        layer_free(&pull);
        layer_free(&tilt);
    }
}

/* At its cap a tilted film has no curve: both ends of the gap range are solved for themselves, and
 * are what a card with that gap gives. */
static void tilt_over_the_gap_range(void **state)
{
    (void)state;
    double at[2];
    for (int end = 0; end < 3; end++) {
        layer l = disc(120, 50, 0);
        l.stage.job.machine.mode = FW_MODE_TILT;
        l.stage.job.machine.hinge_mm = (fw_points){2, {{-5, 0}, {-5, 1}}};
        l.stage.job.machine.cap_kPa = 101.325;
        l.stage.job.machine.gap_range_um[0] = 20;
        l.stage.job.machine.gap_range_um[1] = 60;
        l.stage.job.machine.gap_um = end == 0 ? 20 : end == 1 ? 60 : 40;
        solve(&l, OPEN_HOLES);
        if (end < 2)
            at[end] = l.peel.force_N;
        assert_int_equal(fw_peel_range(&l.setup, l.memo, &l.peel, NULL), FW_OK);
        for (int k = 0; k < 2 && end == 2; k++)
            assert_near(l.peel.range_N[k], at[k], 2e-3);
        if (end == 0)
            assert_int_equal(l.peel.limited_by, FW_BY_CAP);
        layer_free(&l);
    }
    assert_true(at[0] > at[1]);
}

/* Laws in area and rim: of two blocks and of one with a sealed hole, in the judge's units. */
static void measured_laws(void **state)
{
    (void)state;
    for (int mode = FW_MODE_FILM; mode <= FW_MODE_MEASURED; mode++) {
        layer l = {.stage = stage_new(300, 160, 1)};
        fluid(&l.stage, 100);
        stage_box(&l.stage, 10, 10, 0, 110, 110, 1, 255);
        stage_box(&l.stage, 150, 20, 0, 250, 120, 1, 255);
        stage_box(&l.stage, 180, 50, 0, 220, 90, 1, 0);
        fw_machine *machine = &l.stage.job.machine;
        machine->mode = (fw_mode)mode;
        machine->area_kPa = 10;
        machine->rim_N_mm = 0.02;
        machine->front_mm = 2;
        machine->cap_kPa = 100;
        machine->table_mm2_N = (fw_points){2, {{50, 1}, {150, 4}}};
        solve(&l, SEALED_HOLES);
        assert_int_equal(l.peel.count, 2);
        const double film_N = 0.01 * (100 + 84) + 0.02 * 80 + 0.1 * 16, table_N = 2 * 2.5;
        assert_near(l.peel.force_N, mode == FW_MODE_FILM ? film_N : table_N, 0.03);
        assert_int_equal(l.peel.limited_by, mode == FW_MODE_FILM ? FW_BY_FILM : FW_BY_TABLE);
        assert_int_equal(fw_peel_range(&l.setup, l.memo, &l.peel, NULL), FW_OK);
        assert_near(l.peel.range_N[0], l.peel.force_N, 1e-12);
        layer_free(&l);
    }
}

/* A disc of 10 mm radius through a frame: the probe tack rows for eta 0.5 Pa s, 1 mm/s, 100 um (the
 * equation of motion integrated by an independent method; Francis and Horn 2001 from memory), and
 * of 50 um under its cap of 101325 Pa. The mask's own torsion stands for the disc's in the first.
 */
static void a_frame_gives(void **state)
{
    (void)state;
    static const double stiffness[] = {10, 100, 1000, 10000},
                        force[] = {3.43777541, 7.98267015, 14.7582174, 20.5044349};
    layer rigid = disc(100, 100, 0);
    solve(&rigid, OPEN_HOLES);
    assert_true(rigid.peel.force_N == rigid.peel.rigid_N);
    for (size_t i = 0; i < 4; i++) {
        layer l = disc(100, 100, 0);
        l.stage.job.machine.stiffness_N_mm = stiffness[i];
        l.stage.job.machine.gap_range_um[0] = 80;
        solve(&l, OPEN_HOLES);
        assert_near(l.peel.force_N, force[i], 3e-3);
        assert_near(l.peel.rigid_N, rigid.peel.force_N, 1e-12);
        assert_near(l.peel.q, l.setup.q * l.peel.force_N / l.peel.rigid_N, 1e-9);
        assert_int_equal(l.peel.limited_by, FW_BY_FRAME);
        assert_int_equal(fw_peel_range(&l.setup, l.memo, &l.peel, NULL), FW_OK);
        assert_near(l.peel.range_N[1], l.peel.force_N, 1e-3); /* the range ends at the card's gap */
        assert_true(l.peel.range_N[0] > l.peel.force_N);
        assert_true(l.peel.range_N[0] < l.peel.force_N * pow(100.0 / 80, 3));
        layer_free(&l);
    }
    layer_free(&rigid);
}

static void a_frame_gives_under_the_cap(void **state)
{
    (void)state;
    layer l = disc(100, 100, 0);
    l.stage.job.machine.stiffness_N_mm = 1000;
    l.stage.job.machine.cap_kPa = 101.325;
    l.stage.job.machine.gap_um = l.stage.job.machine.gap_range_um[0] =
        l.stage.job.machine.gap_range_um[1] = 50;
    solve(&l, OPEN_HOLES);
    assert_near(l.peel.force_N, 26.388, 0.01); /* a load curve is good to 1 % */
    assert_int_equal(l.peel.limited_by, FW_BY_CAP);
    assert_int_equal(fw_peel_range(&l.setup, l.memo, &l.peel, NULL), FW_OK);
    assert_near(l.peel.range_N[0], l.peel.force_N, 0.01);
    layer_free(&l);
}

/* The way back: the same film at the same speed and gap pushes as it pulled (Stefan 1874), cap or
 * no cap. Through a frame of 1000 N/mm the layer lags: 12.883347 N, the equation of motion
 * integrated by another method (SciPy's Radau, from 3 and from 6 mm away). */
static void the_way_back_pushes(void **state)
{
    (void)state;
    static const double stiffness[] = {0, 1000}, cap_kPa[] = {1e9, 40};
    for (int k = 0; k < 4; k++) {
        layer l = disc(100, 100, 0);
        fw_machine *machine = &l.stage.job.machine;
        machine->stiffness_N_mm = stiffness[k % 2];
        machine->cap_kPa = cap_kPa[k / 2];
        machine->approach_mm_s = 1;
        machine->approach_to_um = 100;
        solve(&l, OPEN_HOLES);
        if (k % 2 == 0)
            assert_near(l.peel.push_N, 23.5619449, 5e-3);
        else
            assert_near(l.peel.push_N, 12.883347, 4e-3);
        layer_free(&l);
    }
    layer still = disc(100, 100, 0);
    solve(&still, OPEN_HOLES);
    assert_true(still.peel.push_N == 0);
    layer_free(&still);
}

/* Couette: R = 10 mm, 0.5 Pa s, 10 mm/s, 50 um: 0.0314159265 N, by its area alone; with 1 / gap
 * over the range. */
static void a_window_that_slides(void **state)
{
    (void)state;
    layer l = disc(100, 100, 0);
    fw_machine *machine = &l.stage.job.machine;
    machine->mode = FW_MODE_SLIDE;
    machine->speed_mm_s = 10;
    machine->gap_um = 50;
    machine->gap_range_um[0] = 25;
    machine->gap_range_um[1] = 200;
    solve(&l, OPEN_HOLES);
    assert_near(l.peel.force_N, 0.0314159265 * area_of(&l) / (pi * 100), 1e-8);
    assert_near(l.peel.force_N, 0.0314159265, 2e-3);
    assert_int_equal(fw_peel_range(&l.setup, l.memo, &l.peel, NULL), FW_OK);
    assert_near(l.peel.range_N[0], 2 * l.peel.force_N, 1e-9);
    assert_near(l.peel.range_N[1], l.peel.force_N / 4, 1e-9);
    layer_free(&l);
}

/* A spring for all: two discs pull less than twice as much as one. */
static void one_spring_for_the_layer(void **state)
{
    (void)state;
    double force[2];
    for (int discs = 1; discs <= 2; discs++) {
        layer l = {.stage = stage_new(440, 220, 1)};
        fluid(&l.stage, 100);
        l.stage.job.machine.stiffness_N_mm = 100;
        for (int i = 0; i < discs; i++)
            stage_disc(&l.stage, 110 + 220 * i, 110, 100, 0, 1, 255);
        solve(&l, OPEN_HOLES);
        force[discs - 1] = l.peel.force_N;
        for (uint32_t c = 0; c < l.peel.count; c++)
            assert_near(l.peel.cluster[c].force_N, l.peel.force_N / discs, 1e-9);
        layer_free(&l);
    }
    assert_true(force[1] < 1.6 * force[0]);
    assert_true(force[1] > force[0]);
}

static void nothing_pulls_nothing(void **state)
{
    (void)state;
    layer l = {.stage = stage_new(20, 20, 1)};
    fluid(&l.stage, 100);
    solve(&l, OPEN_HOLES);
    assert_int_equal(l.peel.count, 0);
    assert_true(l.peel.force_N == 0);
    assert_int_equal(l.peel.limited_by, FW_BY_NOTHING);
    layer_free(&l);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(disc_is_stefans),
                                       cmocka_unit_test(scale),
                                       cmocka_unit_test(rectangles),
                                       cmocka_unit_test(ring_vented_and_sealed),
                                       cmocka_unit_test(cap_is_an_obstacle),
                                       cmocka_unit_test(islands_add),
                                       cmocka_unit_test(small_holes_are_filled),
                                       cmocka_unit_test(stays_under_every_bound),
                                       cmocka_unit_test(negligible_films_are_bounded),
                                       cmocka_unit_test(range_agrees_with_direct_solves),
                                       cmocka_unit_test(range_stays_under_the_cap),
                                       cmocka_unit_test(slots_forget),
                                       cmocka_unit_test(a_frame_gives),
                                       cmocka_unit_test(a_frame_gives_under_the_cap),
                                       cmocka_unit_test(one_spring_for_the_layer),
                                       cmocka_unit_test(a_window_that_slides),
                                       cmocka_unit_test(the_way_back_pushes),
                                       cmocka_unit_test(measured_laws),
                                       cmocka_unit_test(a_plate_that_tilts),
                                       cmocka_unit_test(tilt_over_the_gap_range),
                                       cmocka_unit_test(nothing_pulls_nothing)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
