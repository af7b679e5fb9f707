/* `begin`: what it writes is a job, and says which of its values are nobody's yet. */
#define _POSIX_C_SOURCE 200809L
#include "cards/scratch.h"

#include "cards/begin.h"
#include "cards/job_read.h"

static const fw_begin_facts facts = {
    .layers = 600, .width_px = 1280, .height_px = 800, .depth_bits = 8, .names = "layer_####.png"};

static int clean(void **state)
{
    (void)state;
    scratch_remove((const char *const[]){"job.yaml", "resin.yaml", NULL});
    return 0;
}

/* Writes the job for some facts and returns its text in a static buffer. */
static const char *begun(const fw_begin_facts *f)
{
    static char text[8192];
    FILE *file = fopen(scratch_path("job.yaml"), "w+");
    assert_non_null(file);
    assert_int_equal(fw_begin_write(file, f, NULL), FW_OK);
    rewind(file);
    size_t length = fread(text, 1, sizeof text - 1, file);
    assert_true(length < sizeof text - 1);
    text[length] = '\0';
    fclose(file);
    return text;
}

static void reads_back_as_written(void **state)
{
    (void)state;
    fw_job j;
    fw_fault fault = {0};
    begun(&facts);
    if (fw_job_read(scratch_path("job.yaml"), &j, NULL, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    assert_string_equal(j.names, "layer_####.png");
    assert_true(j.pixel_um[0] == 50 && j.layer_um == 50 && j.intent_level == 0.5);
    assert_true(j.has_rules && !j.has_resin && !j.has_machine && !j.refuse_assumed);
    assert_true(j.rules.margin == 2 && j.max_peel_N == 0);
    assert_true(j.rules.tip_mm[0] == 0.3 && j.rules.shaft_mm[1] == 3);
    assert_int_equal(j.heal_layers, 1);
}

static void says_what_the_stack_shows_and_what_is_to_set(void **state)
{
    (void)state;
    const char *text = begun(&facts);
    assert_non_null(strstr(text, "600 layers of 1280 x 800 px, 8 bits"));
    assert_non_null(strstr(text, "first solid is in layer 0"));
    static const char *const to_set[] = {"\n  pixel_um: [50, 50]", "\n  layer_um: 50",
                                         "\n# resin: resin.yaml", "\n# machine: machine.yaml"};
    for (size_t i = 0; i < sizeof to_set / sizeof *to_set; i++) {
        const char *at = strstr(text, to_set[i]);
        assert_non_null(at);
        const char *mark = strstr(at + 1, "# set this");
        assert_non_null(mark);
        assert_true(mark < strchr(at + 1, '\n'));
    }
    assert_non_null(strstr(text, "margin: 2.0"));
    assert_non_null(strstr(text, "(this is the default)"));
}

/* What a person does with it: set the values, take the # from the card. */
static void filled_in_it_reads_too(void **state)
{
    (void)state;
    char text[8192];
    snprintf(text, sizeof text, "%s", begun(&facts));
    snprintf(text, sizeof text, "%s",
             scratch_replaced(text, "pixel_um: [50, 50]", "pixel_um: [35, 34]"));
    snprintf(text, sizeof text, "%s",
             scratch_replaced(text, "# resin: resin.yaml", "resin: resin.yaml"));
    snprintf(text, sizeof text, "%s", scratch_replaced(text, "# max_peel_N: 60", "max_peel_N: 75"));
    scratch_text("job.yaml", text);
    scratch_text("resin.yaml",
                 "name: R\nviscosity_mPa_s: 350\n"
                 "cure: {penetration_um: 110, critical_mJ_cm2: 9, exposure_mJ_cm2: 38}\n"
                 "green: {tensile_MPa: 8, modulus_MPa: 250, plate_adhesion_MPa: 0.5}\n"
                 "support: {reach_mm: 1.5, angle_deg: 40}\n");
    fw_job j;
    fw_fault fault = {0};
    if (fw_job_read(scratch_path("job.yaml"), &j, NULL, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    assert_true(j.pixel_um[0] == 35 && j.pixel_um[1] == 34 && j.max_peel_N == 75);
    assert_string_equal(j.resin.name, "R");
}

static void odd_patterns_survive(void **state)
{
    (void)state;
    static const char *const names[] = {"a \"b\" \\ #.png", "{#}: *.png", "'#", "\xc3\xa9 ## .png"};
    for (size_t i = 0; i < sizeof names / sizeof *names; i++) {
        fw_begin_facts f = facts;
        fw_job j;
        f.names = names[i];
        begun(&f);
        assert_int_equal(fw_job_read(scratch_path("job.yaml"), &j, NULL, NULL), FW_OK);
        assert_string_equal(j.names, names[i]);
    }
}

static void no_pattern_and_nothing_solid(void **state)
{
    (void)state;
    fw_begin_facts f = facts;
    fw_job j;
    f.names = NULL;
    f.first_solid_layer = -1;
    assert_non_null(strstr(begun(&f), "nothing in it is solid"));
    assert_int_equal(fw_job_read(scratch_path("job.yaml"), &j, NULL, NULL), FW_OK);
    assert_string_equal(j.names, "");
}

static void refuses_what_it_cannot_write(void **state)
{
    (void)state;
    fw_begin_facts f = facts;
    fw_fault fault = {0};
    FILE *full = fopen("/dev/full", "w");
    assert_non_null(full);
    assert_int_equal(fw_begin_write(full, &f, &fault), FW_MACHINE);
    f.names = "a\n#.png";
    assert_int_equal(fw_begin_write(full, &f, &fault), FW_INPUT);
    assert_null(strchr(fault.text, '\n'));
    fclose(full);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(reads_back_as_written),
        cmocka_unit_test(says_what_the_stack_shows_and_what_is_to_set),
        cmocka_unit_test(filled_in_it_reads_too),
        cmocka_unit_test(odd_patterns_survive),
        cmocka_unit_test(no_pattern_and_nothing_solid),
        cmocka_unit_test(refuses_what_it_cannot_write),
    };
    return cmocka_run_group_tests(tests, scratch_make, clean);
}
