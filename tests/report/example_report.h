/* A small report that holds one of everything, for the tests of this room. */
#ifndef TESTS_REPORT_EXAMPLE_REPORT_H
#define TESTS_REPORT_EXAMPLE_REPORT_H

#include "check/report.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

enum { EXAMPLE_LAYERS = 3, EXAMPLE_LIFT = 1, EXAMPLE_POSTS = 2 };

typedef struct example {
    fw_finding finding[FW_KIND_COUNT];
    fw_layer_row layer[EXAMPLE_LAYERS];
    fw_part_row part;
    fw_post post[EXAMPLE_POSTS];
    fw_post_result result[EXAMPLE_POSTS];
    fw_report report;
} example;

static inline void example_findings(example *e)
{
    for (int kind = 0; kind < FW_KIND_COUNT; kind++) {
        e->finding[kind] = (fw_finding){.kind = (fw_kind)kind,
                                        .severity = (fw_severity)(kind % 3),
                                        .layer = kind % 2,
                                        .last_layer = 2,
                                        .worst_layer = 2,
                                        .count = 1 + kind,
                                        .x_mm = 1.23456,
                                        .y_mm = 0.0004,
                                        .pixels = 10,
                                        .area_mm2 = 0.025,
                                        .margin = kind % 2 == 0 ? NAN : 1.5,
                                        .post = kind % 2 == 0 ? -1 : 1};
        snprintf(e->finding[kind].message, FW_FINDING_TEXT, "message %d", kind);
    }
    strcpy(e->finding[FW_STUB].message, "a \"quote\", a \\, a tab\t, \xc3\xa9, broken \xff.");
}

static inline void example_layers(example *e)
{
    e->layer[0] = (fw_layer_row){.raw_layer = -1, .peel_N = NAN, .worst_margin = NAN};
    e->layer[1] = (fw_layer_row){.layer = 1,
                                 .raw_layer = 0,
                                 .solid_px = 1000,
                                 .regions = 2,
                                 .onset_px = 3,
                                 .adrift_px = 4,
                                 .overreach_px = 5,
                                 .peel_N = 12.3456789,
                                 .blind_cavity_mm2 = 0.0625,
                                 .limited_by = FW_BY_FILM,
                                 .worst_margin = 2.25};
    e->layer[2] = (fw_layer_row){.layer = 2,
                                 .raw_layer = 1,
                                 .solid_px = 9000000000,
                                 .peel_N = 1234567.8,
                                 .limited_by = FW_BY_CAP,
                                 .worst_margin = 0.0000123456789};
    e->part = (fw_part_row){.first_layer = 1,
                            .last_layer = 2,
                            .box_mm = {0.05, 0.1, 12.5, 20},
                            .volume_mm3 = 321.987654,
                            .posts = 2,
                            .worst_margin = NAN};
}

static inline void example_posts(example *e)
{
    e->post[0] = (fw_post){.locked = true,
                           .routed = true,
                           .tip_layer = 2,
                           .bite_layers = 2,
                           .point_count = 2,
                           .path = {{1.0004, 2.0006, 0.1}, {1.5, 2, 0}},
                           .tip_mm = 0.4,
                           .neck_mm = 1.5,
                           .shaft_mm = 0.9,
                           .foot_mm = 2};
    e->post[1] = (fw_post){.id = 1,
                           .tip_layer = 1,
                           .bite_layers = 1,
                           .point_count = 1,
                           .path = {{3, 4, 0.05}},
                           .tip_mm = 0.5,
                           .shaft_mm = 1,
                           .foot_mm = 3};
    e->result[0] = (fw_post_result){.load_N = 1.23456789,
                                    .load_layer = 2,
                                    .contact_mm2 = 0.123456789,
                                    .margin = 2.0000049,
                                    .governs = FW_CHECK_TIP};
    e->result[1] = (fw_post_result){.load_layer = -1, .margin = NAN};
}

/* Fills e; e->report borrows from it and is never freed. */
static inline void example_make(example *e)
{
    memset(e, 0, sizeof *e);
    example_findings(e);
    example_layers(e);
    example_posts(e);
    e->report = (fw_report){.layers = EXAMPLE_LAYERS,
                            .raw_layers = EXAMPLE_LAYERS - EXAMPLE_LIFT,
                            .lift_layers = EXAMPLE_LIFT,
                            .width_px = 1280,
                            .height_px = 800,
                            .pixel_um = {50, 47.25},
                            .layer_um = 50,
                            .verdict = FW_FAILED,
                            .basis = {3, 2, 1},
                            .resin_name = "Test resin",
                            .machine_name = "Test machine",
                            .gate_margin = 2,
                            .findings = {e->finding, FW_KIND_COUNT, FW_KIND_COUNT},
                            .layer = e->layer,
                            .part = &e->part,
                            .part_count = 1,
                            .posts = {e->post, EXAMPLE_POSTS, EXAMPLE_POSTS},
                            .post_result = e->result,
                            .not_checked = {"one thing", "another"},
                            .not_checked_count = 2};
    memset(e->report.sha256, 'a', FW_DIGEST_HEX - 1);
    memset(e->report.raw_sha256, '0', FW_DIGEST_HEX - 1);
    e->report.totals = (fw_totals){.posts = 2,
                                   .tip_area_mm2 = 0.32,
                                   .support_volume_mm3 = 12.5,
                                   .part_volume_mm3 = 321.987654,
                                   .peak_peel_N = 1234567.8,
                                   .peak_layer = 2,
                                   .peak_range_N = {1234567.8, 100},
                                   .capped_layers = 1,
                                   .bound_layers = 0};
}

/* A survey without cards or posts: everything that can be null is. */
static inline void example_make_bare(example *e)
{
    example_make(e);
    fw_report *r = &e->report;
    r->verdict = FW_INCOMPLETE;
    r->lift_layers = 0;
    r->findings.count = r->posts.count = r->part_count = r->not_checked_count = 0;
    r->resin_name[0] = r->machine_name[0] = r->sha256[0] = r->raw_sha256[0] = '\0';
    memset(r->basis, 0, sizeof r->basis);
    r->layer[1].peel_N = r->layer[2].peel_N = NAN;
    r->layer[1].worst_margin = r->layer[2].worst_margin = NAN;
    r->totals.peak_peel_N = r->totals.peak_range_N[0] = r->totals.peak_range_N[1] = NAN;
    r->totals.posts = 0;
}

/* A sink that keeps what it gets, as a text. */
typedef struct example_text {
    char text[65536];
    size_t used, calls, fail_at; /* the call that fails, from 1; 0 = none */
} example_text;

static inline fw_status example_keep(void *context, const char *bytes, size_t count,
                                     fw_fault *fault)
{
    example_text *t = context;
    if (++t->calls == t->fail_at)
        return fw_fault_set(fault, FW_MACHINE, "sink: full");
    if (t->used + count >= sizeof t->text)
        return fw_fault_set(fault, FW_MACHINE, "sink: too small for the test");
    memcpy(t->text + t->used, bytes, count);
    t->used += count;
    t->text[t->used] = '\0';
    return FW_OK;
}

#endif
