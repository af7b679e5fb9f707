/* How deep tips go: on a flat face, on slopes, at thin plates. */
#define _GNU_SOURCE

#include "passes/bites.h"

#include "passes/folders.h"

enum { TIP = 12, LAYERS = 30 };

/* A post of 0.6 mm under x = 3.0, y = 1.5 mm: its disc covers columns 27 .. 32. */
static stage with_tip(void)
{
    stage s = stage_new(60, 30, LAYERS);
    stage_post(&s, 3.0, 1.5, TIP, false);
    s.posts.item[0].bite_layers = -7; /* to be overwritten */
    return s;
}

/* Finds the bite of the first post, the stage lifted by `lift` empty layers. */
static int32_t bite(stage *s, int32_t lift)
{
    static int turn;
    char name[32];
    fw_fault fault = {0};
    fw_raw raw = {0};
    fw_pass pass = {0};
    pass_open(&pass, 4);
    snprintf(name, sizeof name, "raw%d", turn++);
    fw_stack *stack = folder_of(s, name);
    if (fw_raw_read(&pass, stack, s->job.intent_level, scratch, &raw, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    const fw_setup setup = stage_setup(s);
    const fw_screen screen = {.width = s->width,
                              .height = s->height,
                              .px_mm = setup.px_mm,
                              .py_mm = setup.py_mm,
                              .full = 255,
                              .brightest = 255};
    s->posts.item[0].tip_layer += lift;
    if (fw_bites_find(&pass, &raw, lift, &s->job, &screen, &s->posts, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    s->posts.item[0].tip_layer -= lift;
    fw_raw_close(&raw);
    fw_stack_close(stack);
    fw_pass_close(&pass);
    return s->posts.item[0].bite_layers;
}

/* bite_mm in whole layers, rounded up, on a face that covers the disc at once. */
static void on_a_flat_face(void **state)
{
    (void)state;
    static const double bite_mm[5] = {0.05, 0.1, 0.11, 0.3, 0.5};
    static const int32_t layers[5] = {1, 1, 2, 3, 5};
    for (int i = 0; i < 5; i++) {
        stage s = with_tip();
        s.job.rules.bite_mm = bite_mm[i];
        stage_box(&s, 10, 5, TIP, 50, 25, LAYERS, 255);
        assert_int_equal(bite(&s, 0), layers[i]);
        stage_free(&s);
    }
}

/* A face of 45 degrees moves one pixel of 0.1 mm a layer of 0.1 mm: it has passed the middle of the
 * disc in the tip layer and all of it r_tip tan(45) = 0.3 mm later. */
static void sinks_into_a_slope(void **state)
{
    (void)state;
    stage s = with_tip();
    for (int n = 0; n < LAYERS; n++) {
        const int face = 30 - (n - TIP);
        if (face < 50)
            stage_box(&s, face < 0 ? 0 : face, 5, n, 50, 25, n + 1, 255);
    }
    assert_int_equal(bite(&s, 0), 3);
    s.job.rules.bite_mm = 0.5; /* more is asked than the slope needs */
    assert_int_equal(bite(&s, 0), 5);
    stage_free(&s);
}

/* A face of 76 degrees moves a pixel in 4 layers: at most 0.5 mm deep, where most is covered. */
static void not_deeper_than_half_a_millimetre(void **state)
{
    (void)state;
    stage s = with_tip();
    for (int n = TIP - 10; n < LAYERS; n++)
        stage_box(&s, 30 - (n - TIP) / 4, 5, n, 50, 25, n + 1, 255);
    assert_int_equal(bite(&s, 0), 4); /* the face moves in layers 4 and 8 from the tip layer */
    stage_free(&s);
}

/* A tip never comes out of the far side: the part is still there in the layer after the bite. */
static void not_through_a_thin_plate(void **state)
{
    (void)state;
    for (int thick = 1; thick <= 6; thick++) {
        stage s = with_tip();
        s.job.rules.bite_mm = 0.4;
        stage_box(&s, 10, 5, TIP, 50, 25, TIP + thick, 255);
        assert_int_equal(bite(&s, 0), thick - 1 < 4 ? thick - 1 : 4);
        stage_free(&s);
    }
}

/* Where another plate follows after a gap the first one counts. */
static void a_plate_over_the_plate_does_not_count(void **state)
{
    (void)state;
    stage s = with_tip();
    s.job.rules.bite_mm = 0.4;
    stage_box(&s, 10, 5, TIP, 50, 25, TIP + 2, 255);
    stage_box(&s, 10, 5, TIP + 3, 50, 25, TIP + 6, 255);
    assert_int_equal(bite(&s, 0), 1);
    stage_free(&s);
}

/* At an edge the disc is never covered in full: the bite is the asked one. */
static void at_an_edge(void **state)
{
    (void)state;
    stage s = with_tip();
    s.job.rules.bite_mm = 0.2;
    stage_box(&s, 29, 5, TIP, 50, 25, LAYERS, 255);
    assert_int_equal(bite(&s, 0), 2);
    stage_free(&s);
}

static void hand_placed_tips_stay(void **state)
{
    (void)state;
    stage s = with_tip();
    s.posts.item[0].locked = true;
    stage_box(&s, 10, 5, TIP, 50, 25, LAYERS, 255);
    assert_int_equal(bite(&s, 0), -7);
    stage_free(&s);
}

/* Tip layers count from the lifted stack. */
static void lifted(void **state)
{
    (void)state;
    stage s = with_tip();
    s.job.rules.bite_mm = 0.4;
    stage_box(&s, 10, 5, TIP, 50, 25, TIP + 3, 255);
    assert_int_equal(bite(&s, 9), 2);
    stage_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {FOLDER_TEST(on_a_flat_face),
                                       FOLDER_TEST(sinks_into_a_slope),
                                       FOLDER_TEST(not_deeper_than_half_a_millimetre),
                                       FOLDER_TEST(not_through_a_thin_plate),
                                       FOLDER_TEST(a_plate_over_the_plate_does_not_count),
                                       FOLDER_TEST(at_an_edge),
                                       FOLDER_TEST(hand_placed_tips_stay),
                                       FOLDER_TEST(lifted)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
