/* Jobs and cards: what is read, and one clear line for each thing that is wrong. */
#define _POSIX_C_SOURCE 200809L
#include "cards/scratch.h"

#include "cards/job_read.h"

#include <math.h>
#include <sys/stat.h>

static const char job[] = "stack:\n"
                          "  pixel_um: [50, 47.5]\n"
                          "  layer_um: 40\n"
                          "  names: \"layer_####.png\"\n"
                          "resin: resin.yaml\n"
                          "machine: machine.yaml\n"
                          "posts: {lift_mm: 5, tip_mm: [0.30, 0.80], neck_mm: 1.5,\n"
                          "        shaft_mm: [0.8, 3.0], foot_mm: 3.0, lean_deg: 30,\n"
                          "        clearance_mm: 0.25, bite_mm: 0.10}\n"
                          "gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}\n";

static const char resin[] = "name: Test resin\n"
                            "lot: A7\n"
                            "basis: {viscosity: measured, cure: supplier}\n"
                            "viscosity_mPa_s: 350\n"
                            "cure: {penetration_um: 110, critical_mJ_cm2: 9.0,\n"
                            "       exposure_mJ_cm2: 38}\n"
                            "green: {tensile_MPa: 8.0, modulus_MPa: 250, plate_adhesion_MPa: 0.5}\n"
                            "support: {reach_mm: 1.5, angle_deg: 40}\n";

static const char machine[] = "name: Test machine\n"
                              "separation: {mode: pull, speed_mm_s: 1.0, gap_um: 100,\n"
                              "             gap_range_um: [40, 250]}\n"
                              "frame: {drive_limit_N: 120}\n"
                              "plate: {size_mm: [64, 40]}\n"
                              "mask: {size_px: [1280, 800]}\n";

static int make(void **state)
{
    if (scratch_make(state) != 0)
        return 1;
    scratch_text("resin.yaml", resin);
    scratch_text("machine.yaml", machine);
    return 0;
}

static int clean(void **state)
{
    (void)state;
    scratch_remove(
        (const char *const[]){"resin.yaml", "machine.yaml", "job.yaml", "card.yaml", NULL});
    return 0;
}

static void reads_a_job_with_its_cards(void **state)
{
    (void)state;
    const char *path = scratch_text("job.yaml", job);
    fw_job j;
    fw_job_sources sources;
    fw_fault fault = {0};
    assert_int_equal(fw_job_read(path, &j, &sources, &fault), FW_OK);
    assert_true(j.pixel_um[0] == 50 && j.pixel_um[1] == 47.5 && j.layer_um == 40);
    assert_string_equal(j.names, "layer_####.png");
    assert_true(j.intent_level == 0.5);
    assert_true(j.has_resin && j.has_machine && j.has_rules);
    assert_true(j.rules.lift_mm == 5 && j.rules.tip_mm[0] == 0.3 && j.rules.tip_mm[1] == 0.8);
    assert_true(j.rules.neck_mm == 1.5 && j.rules.shaft_mm[0] == 0.8 && j.rules.shaft_mm[1] == 3);
    assert_true(j.rules.foot_mm == 3 && j.rules.lean_deg == 30 && j.rules.clearance_mm == 0.25);
    assert_true(j.rules.bite_mm == 0.1 && j.rules.margin == 2.5 && j.max_peel_N == 60);
    assert_int_equal(j.heal_layers, 1);
    assert_true(j.refuse_assumed);
    assert_string_equal(sources.path[FW_SOURCE_JOB], path);
    assert_string_equal(sources.path[FW_SOURCE_RESIN], scratch_path("resin.yaml"));
    assert_string_equal(sources.path[FW_SOURCE_MACHINE], scratch_path("machine.yaml"));
    fw_job_sources_free(&sources);
    assert_null(sources.path[FW_SOURCE_JOB]);
}

static void reads_the_cards(void **state)
{
    (void)state;
    fw_resin r;
    fw_machine m;
    assert_int_equal(fw_resin_read(scratch_path("resin.yaml"), &r, NULL), FW_OK);
    assert_string_equal(r.name, "Test resin");
    assert_string_equal(r.lot, "A7");
    assert_int_equal(r.basis_viscosity, FW_MEASURED);
    assert_int_equal(r.basis_cure, FW_SUPPLIER);
    assert_int_equal(r.basis_green, FW_ASSUMED);
    assert_int_equal(r.basis_support, FW_ASSUMED);
    assert_true(r.viscosity_mPa_s == 350 && r.penetration_um == 110 && r.critical_mJ_cm2 == 9);
    assert_true(r.exposure_mJ_cm2 == 38 && r.joint_ratio == 1 && r.tensile_MPa == 8);
    assert_true(r.modulus_MPa == 250 && r.plate_adhesion_MPa == 0.5 && r.reach_mm == 1.5);
    assert_true(r.angle_deg == 40);
    assert_int_equal(fw_machine_read(scratch_path("machine.yaml"), &m, NULL), FW_OK);
    assert_string_equal(m.name, "Test machine");
    assert_true(m.speed_mm_s == 1 && m.gap_um == 100 && m.cap_kPa == 101.325);
    assert_true(m.gap_range_um[0] == 40 && m.gap_range_um[1] == 250 && m.drive_limit_N == 120);
    assert_true(m.plate_mm[0] == 64 && m.plate_mm[1] == 40);
    assert_true(m.mask_px[0] == 1280 && m.mask_px[1] == 800);
}

static void optional_keys_have_their_defaults(void **state)
{
    (void)state;
    fw_job j;
    fw_job_sources sources;
    const char *path = scratch_text("job.yaml", "stack: {pixel_um: [50, 50], layer_um: 50}\n");
    assert_int_equal(fw_job_read(path, &j, &sources, NULL), FW_OK);
    assert_false(j.has_resin || j.has_machine || j.has_rules || j.refuse_assumed);
    assert_true(j.rules.margin == 2 && j.max_peel_N == 0 && j.intent_level == 0.5);
    assert_int_equal(j.heal_layers, 1);
    assert_string_equal(j.names, "");
    assert_null(sources.path[FW_SOURCE_RESIN]);
    fw_job_sources_free(&sources);
    assert_int_equal(fw_job_read(path, &j, NULL, NULL), FW_OK);

    fw_machine m;
    path =
        scratch_text("card.yaml", "name: M\nseparation: {mode: pull, speed_mm_s: 1, gap_um: 80}\n"
                                  "plate: {size_mm: [64, 40]}\n");
    assert_int_equal(fw_machine_read(path, &m, NULL), FW_OK);
    assert_true(m.gap_range_um[0] == 80 && m.gap_range_um[1] == 80 && m.drive_limit_N == 0);
    assert_int_equal(m.mask_px[0], 0);
}

typedef struct bad_case {
    const char *from, *to, *wanted; /* wanted: ":line: key: ..." after the file's path */
} bad_case;

/* One line, beginning with the file, that holds what is wanted. */
static void check_line(const fw_fault *fault, const char *path, const char *wanted)
{
    assert_int_equal(fault->status, FW_INPUT);
    assert_null(strchr(fault->text, '\n'));
    if (strncmp(fault->text, path, strlen(path)) != 0 ||
        strncmp(fault->text + strlen(path), wanted, strlen(wanted)) != 0)
        fail_msg("wanted '%s%s', got '%s'", path, wanted, fault->text);
}

static void check_job(const char *text, const char *wanted)
{
    fw_job j;
    fw_job_sources sources = {{0}};
    fw_fault fault = {0};
    const char *path = scratch_text("job.yaml", text);
    assert_int_equal(fw_job_read(path, &j, &sources, &fault), FW_INPUT);
    check_line(&fault, path, wanted);
    assert_false(j.has_resin || j.has_machine || j.has_rules);
    assert_true(j.layer_um == 0);
    for (int i = 0; i < FW_SOURCE_COUNT; i++)
        assert_null(sources.path[i]);
}

static void refuses_bad_jobs(void **state)
{
    (void)state;
    static const bad_case bad[] = {
        {"layer_um: 40", "layer_mm: 40",
         ":3: stack.layer_mm: no key of a job; did you mean layer_um?"},
        {"layer_um: 40", "tilt: 40", ":3: stack.tilt: no key of a job; leave it out"},
        {"layer_um: 40", "lift_mm: 4",
         ":3: stack.lift_mm: no key of a job; did you mean posts.lift_mm?"},
        {"  layer_um: 40\n", "", ":2: stack.layer_um: missing; add it"},
        {"layer_um: 40\n", "layer_um: 40\n  layer_um: 41\n",
         ":4: stack.layer_um: given already in line 3"},
        {"layer_um: 40", "layer_um: 50um", ":3: stack.layer_um: '50um' is no plain decimal"},
        {"layer_um: 40", "layer_um: nan", ":3: stack.layer_um: 'nan' is no plain decimal"},
        {"layer_um: 40", "layer_um: .inf", ":3: stack.layer_um: '.inf' is no plain decimal"},
        {"layer_um: 40", "layer_um: 0x10", ":3: stack.layer_um: '0x10' is no plain decimal"},
        {"layer_um: 40", "layer_um: 1e400", ":3: stack.layer_um: '1e400' is no plain decimal"},
        {"layer_um: 40", "layer_um: \"40\"", ":3: stack.layer_um: '40' is no plain decimal"},
        {"layer_um: 40", "layer_um: [40]", ":3: stack.layer_um: '[...]' is no plain decimal"},
        {"layer_um: 40", "layer_um:", ":3: stack.layer_um: '' is no plain decimal"},
        {"layer_um: 40", "layer_um: 0", ":3: stack.layer_um: 0 is out of range; give at least 1"},
        {"layer_um: 40", "layer_um: 40000",
         ":3: stack.layer_um: 40000 is out of range; give at least 1 and at most 1000 um"},
        {"[50, 47.5]", "[0, 50]", ":2: stack.pixel_um: 0 is out of range"},
        {"[50, 47.5]", "50", ":2: stack.pixel_um: expects two numbers in brackets"},
        {"[50, 47.5]", "[50, 50, 50]", ":2: stack.pixel_um: expects two numbers in brackets"},
        {"[50, 47.5]", "[50, x]", ":2: stack.pixel_um: 'x' is no plain decimal"},
        {"layer_####.png", "layer.png", ":4: stack.names: 'layer.png' needs one run of #"},
        {"layer_####.png", "#_#.png", ":4: stack.names: '#_#.png' needs one run of #"},
        {"layer_####.png", "a/#.png", ":4: stack.names: 'a/#.png' needs one run of #"},
        {"layer_####.png", "", ":4: stack.names: is empty"},
        {"layer_####.png", "a\\n#", ":4: stack.names: holds a line end"},
        {"layer_####.png", "a\\0#", ":4: stack.names: holds a line end"},
        {"\"layer_####.png\"", "[a]", ":4: stack.names: expects a text"},
        {"resin: resin.yaml\n", "rezin: resin.yaml\n",
         ":5: rezin: no key of a job; did you mean resin?"},
        {"[0.30, 0.80]", "[0.80, 0.30]", ":7: posts.tip_mm: 0.8 is above 0.3"},
        {"[0.8, 3.0]", "[3.0, 0.8]", ":8: posts.shaft_mm: 3 is above 0.8"},
        {"[0.30, 0.80]", "[0.30, 3.80]", ":7: posts.tip_mm: the largest tip (3.8) is wider"},
        {"foot_mm: 3.0", "foot_mm: 0.5", ":8: posts.foot_mm: the foot (0.5) is narrower"},
        {"lean_deg: 30", "lean_deg: 60",
         ":8: posts.lean_deg: 60 is out of range; give at least 0 and less than 60 deg"},
        {"bite_mm: 0.10", "bite: 1", ":9: posts.bite: no key of a job; did you mean"},
        {"margin: 2.5", "margin: 0.9", ":10: gate.margin: 0.9 is out of range; give at least 1"},
        {"max_peel_N: 60", "max_peel_N: 0",
         ":10: gate.max_peel_N: 0 is out of range; give more than 0"},
        {"assumed: refuse", "assumed: yes", ":10: gate.assumed: 'yes' is none of allow|refuse"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "findings: {heal_layers: 1.5}",
         ":10: findings.heal_layers: '1.5' is no plain whole number"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "gate: 2",
         ":10: gate: expects keys"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "[a, b]: 1",
         ":10: a list or mapping stands where a key is due"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "<<: {margin: 2}",
         ":10: <<: no key of a job"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "findings: &a {heal_layers: 1}",
         ":10: anchors and aliases are not read"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "findings: *a",
         ":10: anchors and aliases are not read"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "findings: !!map {}",
         ":10: tags are not read"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "gate: {margin: 2.5",
         ":11: no valid YAML"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "gate: [[[[[[[[[[1]]]]]]]]]]",
         ":10: nested too deep"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "---\nstack: {}",
         ":10: a second document begins"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "gate:\n\tmargin: 2",
         ":11: a tab"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "# \xff", ":10: no UTF-8 text"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "# \xc0\x80",
         ":10: no UTF-8 text"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "# \xed\xa0\x80",
         ":10: no UTF-8 text"},
        {"gate: {margin: 2.5, max_peel_N: 60, assumed: refuse}", "# \x1b[31m",
         ":10: no UTF-8 text"},
    };
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++)
        check_job(scratch_replaced(job, bad[i].from, bad[i].to), bad[i].wanted);
}

static void refuses_files_that_are_no_job(void **state)
{
    (void)state;
    check_job("", ":1: holds no key");
    check_job("# nothing\n", ":1: holds no key");
    check_job("- a\n- b\n", ":1: holds no keys");
    check_job("just text\n", ":1: holds no keys");
    check_job("stack:\n", ":1: stack: expects keys");
    check_job("{}\n", ":1: stack: missing");
}

static void names_the_card_that_is_not_there(void **state)
{
    (void)state;
    fw_job j;
    fw_fault fault = {0};
    const char *path = scratch_text("job.yaml", scratch_replaced(job, "resin.yaml", "none.yaml"));
    assert_int_equal(fw_job_read(path, &j, NULL, &fault), FW_INPUT);
    check_line(&fault, path, ":5: resin: ");
    assert_non_null(strstr(fault.text, scratch_path("none.yaml")));
    assert_non_null(strstr(fault.text, " cannot be opened ("));
    assert_int_equal(fw_job_read(scratch_path("absent.yaml"), &j, NULL, &fault), FW_INPUT);
    check_line(&fault, scratch_path("absent.yaml"), ": cannot be opened (");
    assert_int_equal(fw_job_read(scratch_folder, &j, NULL, &fault), FW_INPUT);
    check_line(&fault, scratch_folder, ": no plain file");
    assert_int_equal(mkfifo(scratch_path("pipe"), 0600), 0);
    assert_int_equal(fw_job_read(scratch_path("pipe"), &j, NULL, &fault), FW_INPUT);
    check_line(&fault, scratch_path("pipe"), ": no plain file");
    unlink(scratch_path("pipe"));
}

static void absolute_card_paths_stay(void **state)
{
    (void)state;
    fw_job j;
    fw_job_sources sources;
    const char *path =
        scratch_text("job.yaml", scratch_replaced(job, "resin.yaml", scratch_path("resin.yaml")));
    assert_int_equal(fw_job_read(path, &j, &sources, NULL), FW_OK);
    assert_string_equal(sources.path[FW_SOURCE_RESIN], scratch_path("resin.yaml"));
    fw_job_sources_free(&sources);
}

static void refuses_bad_resins(void **state)
{
    (void)state;
    static const bad_case bad[] = {
        {"viscosity_mPa_s: 350", "viscosity: 350",
         ":4: viscosity: no key of a resin card; did you"},
        {"viscosity_mPa_s: 350\n", "", ":1: viscosity_mPa_s: missing; add it (viscosity at"},
        {"viscosity_mPa_s: 350", "viscosity_mPa_s: 0", ":4: viscosity_mPa_s: 0 is out of range"},
        {"cure: supplier", "cure: guessed",
         ":3: basis.cure: 'guessed' is none of assumed|supplier|measured"},
        {"name: Test resin", "name: \"\"", ":1: name: is empty"},
        {"angle_deg: 40", "angle_deg: 90", ":8: support.angle_deg: 90 is out of range"},
        {"exposure_mJ_cm2: 38", "exposure_mJ_cm2: 38, first_layers: {count: 4}",
         ":6: cure.first_layers: no key of a resin card"},
        {"exposure_mJ_cm2: 38", "exposure_mJ_cm2: 38, joint_ratio: 0.5",
         ":6: cure.joint_ratio: 0.5 is out of range; give at least 1"},
    };
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        fw_resin r;
        fw_fault fault = {0};
        const char *path =
            scratch_text("card.yaml", scratch_replaced(resin, bad[i].from, bad[i].to));
        assert_int_equal(fw_resin_read(path, &r, &fault), FW_INPUT);
        check_line(&fault, path, bad[i].wanted);
        assert_true(r.name[0] == '\0' && r.viscosity_mPa_s == 0);
    }
}

static void refuses_names_that_are_too_long(void **state)
{
    (void)state;
    char name[FW_CARD_TEXT + 1];
    memset(name, 'x', FW_CARD_TEXT);
    name[FW_CARD_TEXT] = '\0';
    fw_resin r;
    fw_fault fault = {0};
    const char *path = scratch_text("card.yaml", scratch_replaced(resin, "Test resin", name + 1));
    assert_int_equal(fw_resin_read(path, &r, &fault), FW_OK);
    assert_string_equal(r.name, name + 1);
    scratch_text("card.yaml", scratch_replaced(resin, "Test resin", name));
    assert_int_equal(fw_resin_read(path, &r, &fault), FW_INPUT);
    check_line(&fault, path, ":1: name: is longer than 127 bytes");
}

/* Strength by exposure: linear in the logarithm of the dose between the pairs (Jacobs 1992, from
 * memory).
 */
static void strength_follows_the_exposure(void **state)
{
    (void)state;
    static const bad_case text[] = {
        {"tensile_mJ_cm2_MPa: [[18, 4], [72, 12]]", "8", NULL}, /* half way from 18 to 72 is 36 */
        {"tensile_mJ_cm2_MPa: [[18, 4], [36, 12]]", "12", NULL},
        {"tensile_mJ_cm2_MPa: [[20, 7]]", "7", NULL},
        {"tensile_MPa: 8, tensile_mJ_cm2_MPa: [[20, 7]]", "", ":5: green: give tensile_MPa or"},
        {"tensile_mJ_cm2_MPa: [[20, 7], [30, 6]]", "",
         ":5: green.tensile_mJ_cm2_MPa: pair 2 does not grow"},
        {"tensile_mJ_cm2_MPa: [[8, 7]]", "", ":5: green.tensile_mJ_cm2_MPa: pair 1 does not grow"},
        {"tensile_mJ_cm2_MPa: []", "", ":5: green.tensile_mJ_cm2_MPa: is empty"},
    };
    for (size_t i = 0; i < sizeof text / sizeof *text; i++) {
        char card[768];
        fw_resin r;
        fw_fault fault = {0};
        (void)snprintf(card, sizeof card,
                       "name: R\nviscosity_mPa_s: 350\n"
                       "cure: {penetration_um: 110, critical_mJ_cm2: 9, exposure_mJ_cm2: 36}\n"
                       "support: {reach_mm: 1.5, angle_deg: 40}\n"
                       "green: {%s, modulus_MPa: 250, plate_adhesion_MPa: 0.5}\n",
                       text[i].from);
        const char *path = scratch_text("card.yaml", card);
        const fw_status status = fw_resin_read(path, &r, &fault);
        assert_int_equal(status, text[i].wanted == NULL ? FW_OK : FW_INPUT);
        if (text[i].wanted != NULL)
            check_line(&fault, path, text[i].wanted);
        else
            assert_true(fabs(r.tensile_MPa - atof(text[i].to)) < 1e-9);
    }
}

/* The laws that know no liquid: what they need, and what they refuse. */
static void reads_measured_laws(void **state)
{
    (void)state;
    static const char rest[] = "plate: {size_mm: [64, 40]}\n";
    static const bad_case text[] = {
        {"{mode: film, area_kPa: 12, rim_N_mm: 0.02}", "", NULL},
        {"{mode: film, area_kPa: 12, rim_N_mm: 0.02, front_mm: 1, cap_kPa: 90}", "", NULL},
        {"{mode: film, area_kPa: 12}", "", ":2: separation.mode: film needs rim_N_mm"},
        {"{mode: measured, table_mm2_N: [[10, 1], [20, 1.5]]}", "", NULL},
        {"{mode: measured}", "", ":2: separation.mode: measured needs table_mm2_N"},
        {"{mode: measured, table_mm2_N: []}", "", ":2: separation.table_mm2_N: is empty"},
        {"{mode: measured, table_mm2_N: [[0, 0], [10, 1]]}", "",
         ":2: separation.table_mm2_N: pair 1 does not grow"},
        {"{mode: measured, table_mm2_N: [[10, 2], [20, 1]]}", "",
         ":2: separation.table_mm2_N: pair 2 does not grow"},
        {"{mode: measured, table_mm2_N: [[10, 2], [10, 3]]}", "",
         ":2: separation.table_mm2_N: pair 2 does not grow"},
        {"{mode: measured, cap_kPa: 90, table_mm2_N: [[10, 2]]}", "",
         ":2: separation.cap_kPa: means nothing in mode: measured"},
    };
    for (size_t i = 0; i < sizeof text / sizeof *text; i++) {
        char card[512];
        fw_machine m;
        fw_fault fault = {0};
        (void)snprintf(card, sizeof card, "name: M\nseparation: %s\n%s", text[i].from, rest);
        const char *path = scratch_text("card.yaml", card);
        const fw_status status = fw_machine_read(path, &m, &fault);
        assert_int_equal(status, text[i].wanted == NULL ? FW_OK : FW_INPUT);
        if (text[i].wanted != NULL)
            check_line(&fault, path, text[i].wanted);
    }
}

static void refuses_bad_machines(void **state)
{
    (void)state;
    static const bad_case bad[] = {
        {"mode: pull", "mode: shove", ":2: separation.mode: 'shove' is none of pull|tilt"},
        {"mode: pull", "mode: slide, cap_kPa: 90", ":2: separation.cap_kPa: means nothing in mode"},
        {"mode: pull", "mode: pull, slide_deg: 90", ":2: separation.slide_deg: means nothing in"},
        {"mode: pull", "mode: tilt", ":2: separation.mode: tilt needs hinge_mm"},
        {"speed_mm_s: 1.0, ", "", ":2: separation.mode: pull needs speed_mm_s"},
        {"gap_um: 100,", "", ":2: separation.mode: pull needs gap_um"},
        {"mode: pull", "mode: film", ":2: separation.speed_mm_s: means nothing in mode: film"},
        {"mode: pull", "mode: pull, area_kPa: 1",
         ":2: separation.area_kPa: means nothing in mode: pull"},
        {"mode: pull", "mode: pull, hinge_mm: [[0, 0], [0, 1]]",
         ":2: separation.hinge_mm: means nothing in mode: pull"},
        {"mode: pull", "mode: tilt, hinge_mm: [[0, 0]]", ":2: separation.hinge_mm: is no line"},
        {"mode: pull", "mode: tilt, hinge_mm: [[1, 2], [1, 2]]",
         ":2: separation.hinge_mm: is no line"},
        {"mode: pull", "mode: tilt, hinge_mm: [0, 1]", ":2: separation.hinge_mm: expects two"},
        {"mode: pull", "mode: tilt, hinge_mm: here", ":2: separation.hinge_mm: expects pairs"},
        {"mode: pull", "mode: tilt, hinge_mm: [[0, 0], [1, x]]",
         ":2: separation.hinge_mm: 'x' is no"},
        {"plate:", "grey: [[0, 0], [0.5, 0.6]]\nplate:", ":5: grey: is no response"},
        {"plate:", "grey: [[0, 0], [0.5, 0.6], [0.5, 0.7], [1, 1]]\nplate:", ":5: grey: is no"},
        {"mode: pull", "mode: [pull]", ":2: separation.mode: expects a text"},
        {"mode: pull, ", "", ":2: separation.mode: missing"},
        {"[40, 250]", "[120, 250]",
         ":3: separation.gap_range_um: [120, 250] does not contain gap_um, 100"},
        {"[40, 250]", "[40, 90]", ":3: separation.gap_range_um: [40, 90] does not contain"},
        {"[40, 250]", "[250, 40]", ":3: separation.gap_range_um: 250 is above 40"},
        {"drive_limit_N: 120", "stiffness_N_mm: 0", ":4: frame.stiffness_N_mm: 0 is out of range"},
        {"drive_limit_N: 120", "stifness_N_mm: 5",
         ":4: frame.stifness_N_mm: no key of a machine card; did you mean stiffness_N_mm?"},
        {"[64, 40]", "[64, -40]", ":5: plate.size_mm: -40 is out of range; give more than 0"},
        {"[1280, 800]", "[1280.5, 800]", ":6: mask.size_px: '1280.5' is no plain whole number"},
        {"[1280, 800]", "[0, 800]", ":6: mask.size_px: 0 is out of range"},
        {"size_px: [1280, 800]", "", ":6: mask.size_px: missing"},
    };
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        fw_machine m;
        fw_fault fault = {0};
        const char *path =
            scratch_text("card.yaml", scratch_replaced(machine, bad[i].from, bad[i].to));
        assert_int_equal(fw_machine_read(path, &m, &fault), FW_INPUT);
        check_line(&fault, path, bad[i].wanted);
    }
}

/* 9 exp(40 / 110) = 12.947 mJ/cm2 is the least that cures through 40 um (Beer-Lambert). */
static void refuses_a_layer_that_cannot_cure(void **state)
{
    (void)state;
    fw_job j;
    fw_fault fault = {0};
    const char *path =
        scratch_text("job.yaml", scratch_replaced(job, "resin: resin.yaml", "resin: card.yaml"));
    const char *card = scratch_text(
        "card.yaml", scratch_replaced(resin, "exposure_mJ_cm2: 38", "exposure_mJ_cm2: 12.94"));
    assert_int_equal(fw_job_read(path, &j, NULL, &fault), FW_INPUT);
    check_line(&fault, card,
               ":6: cure.exposure_mJ_cm2: this resin cannot cure this layer thickness: ");
    scratch_text("card.yaml",
                 scratch_replaced(resin, "exposure_mJ_cm2: 38", "exposure_mJ_cm2: 12.95"));
    assert_int_equal(fw_job_read(path, &j, NULL, &fault), FW_OK);
    assert_int_equal(fw_job_curable(&j, "other.yaml", &fault), FW_OK);
    j.resin.joint_ratio = 1.1;
    assert_int_equal(fw_job_curable(&j, "other.yaml", &fault), FW_INPUT);
    check_line(&fault, "other.yaml", ": cure.exposure_mJ_cm2: this resin cannot cure");
    j.has_resin = false;
    assert_int_equal(fw_job_curable(&j, "other.yaml", &fault), FW_OK);
}

/* What a hostile file may cost: each of these is refused at once, not after minutes. */
static void refuses_hostile_sizes(void **state)
{
    (void)state;
    enum { LARGE = (1 << 20) + 1 };
    char *text = malloc(LARGE);
    assert_non_null(text);
    fw_job j;
    fw_fault fault = {0};
    memset(text, ' ', LARGE);
    const char *path = scratch_bytes("job.yaml", text, LARGE);
    assert_int_equal(fw_job_read(path, &j, NULL, &fault), FW_INPUT);
    check_line(&fault, path, ": larger than 1048576 bytes");
    memset(text, '[', LARGE);
    scratch_bytes("job.yaml", text, LARGE - 1);
    assert_int_equal(fw_job_read(path, &j, NULL, &fault), FW_INPUT);
    check_line(&fault, path, ":1: nested too deep");
    for (size_t i = 0; i + 4 <= LARGE; i += 4)
        memcpy(text + i, "- a\n", 4);
    scratch_bytes("job.yaml", text, LARGE - 1);
    assert_int_equal(fw_job_read(path, &j, NULL, &fault), FW_INPUT);
    check_line(&fault, path, ":1: holds no keys");
    memset(text, 'k', LARGE);
    text[LARGE - 3] = ':';
    text[LARGE - 2] = '1';
    scratch_bytes("job.yaml", text, LARGE - 1);
    assert_int_equal(fw_job_read(path, &j, NULL, &fault), FW_INPUT);
    free(text);
}

static void a_zero_byte_is_no_text(void **state)
{
    (void)state;
    fw_job j;
    fw_fault fault = {0};
    const char *path = scratch_bytes("job.yaml", "stack: 1\n\0", 10);
    assert_int_equal(fw_job_read(path, &j, NULL, &fault), FW_INPUT);
    check_line(&fault, path, ":2: no UTF-8 text");
}

/* Each prefix of a good job is either read or refused in one line; nothing is lost on the way
 * (the sanitizers look). */
static void every_prefix_is_handled(void **state)
{
    (void)state;
    for (size_t length = 0; length < sizeof job; length++) {
        fw_job j;
        fw_job_sources sources;
        fw_fault fault = {0};
        const char *path = scratch_bytes("job.yaml", job, length);
        fw_status status = fw_job_read(path, &j, &sources, &fault);
        assert_true(status == FW_OK || status == FW_INPUT);
        assert_true(status == FW_OK || strncmp(fault.text, path, strlen(path)) == 0);
        fw_job_sources_free(&sources);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(reads_a_job_with_its_cards),
        cmocka_unit_test(reads_the_cards),
        cmocka_unit_test(optional_keys_have_their_defaults),
        cmocka_unit_test(refuses_bad_jobs),
        cmocka_unit_test(refuses_files_that_are_no_job),
        cmocka_unit_test(names_the_card_that_is_not_there),
        cmocka_unit_test(absolute_card_paths_stay),
        cmocka_unit_test(refuses_bad_resins),
        cmocka_unit_test(refuses_names_that_are_too_long),
        cmocka_unit_test(strength_follows_the_exposure),
        cmocka_unit_test(reads_measured_laws),
        cmocka_unit_test(refuses_bad_machines),
        cmocka_unit_test(refuses_a_layer_that_cannot_cure),
        cmocka_unit_test(refuses_hostile_sizes),
        cmocka_unit_test(a_zero_byte_is_no_text),
        cmocka_unit_test(every_prefix_is_handled),
    };
    return cmocka_run_group_tests(tests, make, clean);
}
