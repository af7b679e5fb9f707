/* The cards and jobs that ship with the project read as they are (run from the project's folder).
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "cards/job_read.h"

#include <string.h>

static void the_demo_job_reads(void **state)
{
    (void)state;
    fw_job job;
    fw_job_sources sources;
    fw_fault fault = {0};
    if (fw_job_read("models/jobs/manifold.yaml", &job, &sources, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    assert_true(job.has_resin && job.has_machine && job.has_rules);
    assert_true(job.pixel_um[0] == 50 && job.pixel_um[1] == 50 && job.layer_um == 50);
    assert_true(job.rules.margin == 2 && job.max_peel_N == 60 && job.rules.lift_mm == 5);
    assert_true(job.machine.plate_mm[0] * 1000 == job.pixel_um[0] * job.machine.mask_px[0]);
    assert_true(job.machine.plate_mm[1] * 1000 == job.pixel_um[1] * job.machine.mask_px[1]);
    assert_string_equal(sources.path[FW_SOURCE_RESIN], "models/jobs/../resins/rigid.yaml");
    fw_job_sources_free(&sources);
}

/* Nobody may take an invented value for a measured one. */
static void shipped_resins_say_that_they_are_invented(void **state)
{
    (void)state;
    static const char *const path[] = {"models/resins/rigid.yaml", "models/resins/tough.yaml"};
    for (size_t i = 0; i < sizeof path / sizeof *path; i++) {
        fw_resin resin;
        fw_fault fault = {0};
        if (fw_resin_read(path[i], &resin, &fault) != FW_OK)
            fail_msg("%s", fault.text);
        assert_non_null(strstr(resin.name, "invented values"));
        assert_true(resin.basis_viscosity == FW_ASSUMED && resin.basis_cure == FW_ASSUMED &&
                    resin.basis_green == FW_ASSUMED && resin.basis_support == FW_ASSUMED);
        fw_job job = {.layer_um = 50, .has_resin = true, .resin = resin};
        assert_int_equal(fw_job_curable(&job, path[i], NULL), FW_OK);
    }
}

static void the_shipped_machine_says_so_too(void **state)
{
    (void)state;
    fw_machine machine;
    assert_int_equal(fw_machine_read("models/machines/bench-dlp.yaml", &machine, NULL), FW_OK);
    assert_non_null(strstr(machine.name, "invented values"));
    assert_true(machine.basis_separation == FW_ASSUMED && machine.basis_frame == FW_ASSUMED);
    assert_true(machine.gap_range_um[0] == 40 && machine.gap_range_um[1] == 250);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_demo_job_reads),
        cmocka_unit_test(shipped_resins_say_that_they_are_invented),
        cmocka_unit_test(the_shipped_machine_says_so_too),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
