/* What is wrong with a stack, named by mechanism, grouped so that one cause is one line. */
#ifndef FW_FINDINGS_H
#define FW_FINDINGS_H

#include "fault/fault.h"

#include <stdint.h>

typedef enum fw_kind {
    FW_ONSET,
    FW_ADRIFT,
    FW_OVERREACH,
    FW_GAP_LAYER,
    FW_UNDERCURE,
    FW_BLIND_CAVITY,
    FW_POOR_VENT,
    FW_ENCLOSED_RESIN,
    FW_TIP_OVERLOAD,
    FW_NECK_OVERLOAD,
    FW_SHAFT_OVERLOAD,
    FW_SHAFT_BUCKLING,
    FW_FOOT_OVERLOAD,
    FW_PLATE_OVERLOAD,
    FW_DRIVE_OVERLOAD,
    FW_CLEARANCE,
    FW_UNROUTABLE,
    FW_STUB,
    FW_ALTERED_PART,
    FW_NEW_VOID,
    FW_BORDER_SOLID,
    FW_ASSUMED_VALUE,
    FW_COARSE_FILM,
    FW_UNSETTLED,
    FW_KIND_COUNT
} fw_kind;

typedef enum fw_severity { FW_NOTE, FW_WARN, FW_FAIL } fw_severity;

/* The word used in every output ("blind-cavity"), and back; FW_KIND_COUNT when unknown. */
const char *fw_kind_name(fw_kind kind);
fw_kind fw_kind_from_name(const char *name);
const char *fw_severity_name(fw_severity severity);

/* One sentence for people: what the kind means and what to do about it. */
const char *fw_kind_advice(fw_kind kind);

enum { FW_FINDING_TEXT = 240 };

typedef struct fw_finding {
    fw_kind kind;
    fw_severity severity;
    uint64_t group; /* body, cavity or post that it belongs to; one finding per (kind, group) */
    int32_t layer;  /* first layer, in the stack that was looked at */
    int32_t last_layer;
    int64_t count; /* occurrences (layers, regions or posts, as the message says) */
    int32_t worst_layer;
    double x_mm, y_mm;             /* worst place */
    int64_t pixels;                /* sum over occurrences */
    double area_mm2;               /* sum over occurrences */
    double margin;                 /* smallest; NAN where there is none */
    int64_t post;                  /* id, or -1 */
    double badness;                /* what decides the worst place; larger is worse */
    char message[FW_FINDING_TEXT]; /* of the worst occurrence; one line */
} fw_finding;

/* A zeroed list is valid and empty. */
typedef struct fw_findings {
    fw_finding *item; /* [count] */
    size_t count, capacity;
} fw_findings;

/* Adds one occurrence (count 1, layer == last_layer == worst_layer is filled in from f->layer).
 * Merged into the finding of the same (kind, group) if there is one: counts and areas add, layer
 * ranges join, the worst place and its message win, the higher severity wins. */
fw_status fw_findings_add(fw_findings *list, const fw_finding *occurrence, fw_fault *fault);

/* Renames every group through `rename` (bodies that have merged), joins those that became equal. */
void fw_findings_regroup(fw_findings *list, fw_kind kind, uint64_t (*rename)(void *, uint64_t),
                         void *context);

/* Orders by severity (fail first), kind, layer, y, x: the order of every output. */
void fw_findings_sort(fw_findings *list);
int64_t fw_findings_count(const fw_findings *list, fw_severity severity);
void fw_findings_free(fw_findings *list);

#endif
