/* All that survey, prop and recheck found: the data behind report.json and every other output.
 * Contains no clock, path, host or thread count: equal stacks and jobs give equal reports. */
#ifndef FW_CHECK_REPORT_H
#define FW_CHECK_REPORT_H

#include "check/job.h"
#include "findings/findings.h"

enum { FW_DIGEST_HEX = 65 };

typedef enum fw_verdict { FW_PASS, FW_FAILED, FW_INCOMPLETE } fw_verdict;

/* What set the peel load of a layer: the film, the cap, the run bound used unsolved, a table, or
 * the machine's give. */
typedef enum fw_limit {
    FW_BY_NOTHING,
    FW_BY_FILM,
    FW_BY_CAP,
    FW_BY_BOUND,
    FW_BY_TABLE,
    FW_BY_FRAME
} fw_limit;
const char *fw_limit_name(fw_limit limit); /* "none", "film", "cap", "bound", "table", "frame" */
const char *fw_verdict_name(fw_verdict verdict); /* "pass", "fail", "incomplete" */

typedef struct fw_layer_row {
    int32_t layer;
    int32_t raw_layer; /* -1 for layers that the lift added */
    int64_t solid_px;
    int32_t regions; /* of intended pixels, members included */
    int64_t onset_px, adrift_px, overreach_px;
    double peel_N; /* NAN when there is no machine or resin card */
    double blind_cavity_mm2;
    fw_limit limited_by;
    double worst_margin;   /* over all anchors, of this layer's load; NAN where nothing is loaded */
    double speed_cap_mm_s; /* fastest at which the gate holds for this layer; NAN: see speed.h */
    double peel_q;         /* 12 eta v / h^3 as the layer comes off, MPa/mm2; in no output */
} fw_layer_row;

/* Which check of a post governs. */
typedef enum fw_check {
    FW_CHECK_NONE,
    FW_CHECK_TIP,
    FW_CHECK_NECK,
    FW_CHECK_SHAFT,
    FW_CHECK_FOOT,
    FW_CHECK_BUCKLING
} fw_check;
const char *fw_check_name(fw_check check); /* "none", "tip", "neck", "shaft", "foot", "buckling" */

typedef struct fw_post_result {
    double load_N;      /* largest tributary load on the tip */
    int32_t load_layer; /* where */
    double contact_mm2; /* solid pixels of the contact */
    double margin;      /* smallest of all checks; NAN when unloaded */
    fw_check governs;
} fw_post_result;

/* A part: a body of part pixels at the end of the print. */
typedef struct fw_part_row {
    int32_t id;
    int32_t first_layer, last_layer;
    double box_mm[4]; /* x0, y0, x1, y1 */
    double volume_mm3;
    int32_t posts;
    double worst_margin; /* NAN when nothing is loaded */
} fw_part_row;

typedef struct fw_totals {
    int32_t posts;
    double tip_area_mm2, support_volume_mm3, part_volume_mm3;
    double peak_peel_N; /* NAN when not computed */
    int32_t peak_layer;
    double peak_range_N[2]; /* peak load at the narrow and the wide end of the gap range */
    int32_t capped_layers, bound_layers;
} fw_totals;

typedef struct fw_report {
    int32_t layers, raw_layers, lift_layers;
    int32_t width_px, height_px;
    double pixel_um[2], layer_um;
    char sha256[FW_DIGEST_HEX];     /* of the stack that was looked at */
    char raw_sha256[FW_DIGEST_HEX]; /* of the raw stack, empty when unknown */
    fw_verdict verdict;
    int32_t basis[3]; /* card groups that are assumed, supplier, measured */
    char resin_name[FW_CARD_TEXT], resin_lot[FW_CARD_TEXT], machine_name[FW_CARD_TEXT];
    double gate_margin;
    fw_findings findings;
    fw_layer_row *layer; /* [layers] */
    fw_part_row *part;   /* [part_count] */
    size_t part_count;
    fw_totals totals;
    fw_posts posts;
    fw_post_result *post_result; /* [posts.count] */
    const char
        *not_checked[16]; /* [not_checked_count], static texts: what this run could not judge */
    size_t not_checked_count;
} fw_report;

void fw_report_free(fw_report *report);

#endif
