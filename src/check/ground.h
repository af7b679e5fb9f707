/* What holds what, layer after layer: bodies, onsets, debt, voids. Geometry only, and the one part
 * of a judgement that must see the layers in order. */
#ifndef FW_CHECK_GROUND_H
#define FW_CHECK_GROUND_H

#include "check/sheet.h"
#include "check/vents.h"
#include "mask/bodies.h"
#include "mask/carried.h"

/* What a placing pass sees of the newest layer, and may change: it adds tips to `field`, sets held
 * for the regions that get one, and notes their contacts in sheet->contacts. */
typedef struct fw_newest {
    fw_sheet *sheet;
    const fw_sheet *before; /* NULL for layer 0 */
    fw_carried *field;
} fw_newest;

typedef struct fw_placer {
    fw_status (*place)(void *context, const fw_newest *newest, fw_fault *fault);
    void *context;
} fw_placer;

/* An onset whose fate is not known yet: it may join a held body within heal_layers. */
typedef struct fw_pending_onset {
    int32_t layer;
    uint32_t body;
    fw_finding finding;
} fw_pending_onset;

typedef struct fw_ground {
    const fw_setup *setup; /* borrowed */
    fw_bodies bodies;      /* of intended pixels, posts included; grounded = path to the plate */
    fw_bodies parts;       /* of part pixels; grounded is not used */
    fw_bodies voids;       /* of what is not solid; grounded = open to the vat */
    fw_vents vents;        /* too narrow ones */
    fw_carried *field;     /* debt; NULL without a resin card */
    uint8_t *touches_post; /* [voids.body] a sealed void that a post helps to seal */
    size_t touches_capacity;
    uint8_t *large; /* [bodies.body] some region of it could hold the smallest tip */
    size_t large_capacity;
    fw_pending_onset *pending; /* [pending_count], in order of layer */
    size_t pending_count, pending_capacity;
    fw_carried_peak *peak; /* scratch, [regions] */
    size_t peak_capacity;
    int32_t last_solid; /* newest layer with any part in it, -1 */
} fw_ground;

fw_status fw_ground_open(const fw_setup *setup, fw_ground *out, fw_fault *fault);

/* Takes the next layer: fills sheet->held and sheet->cavity, the geometry columns of *row, and adds
 * findings. placer may be NULL. before is NULL for layer 0. */
fw_status fw_ground_step(fw_ground *ground, fw_sheet *sheet, const fw_sheet *before,
                         const fw_placer *placer, fw_layer_row *row, fw_findings *findings,
                         fw_fault *fault);

/* After the last layer: what stays in the part, what was closed off, what is still pending. */
fw_status fw_ground_finish(fw_ground *ground, fw_findings *findings, fw_fault *fault);
void fw_ground_close(fw_ground *ground);

/* The onset rule: can the region hold a disc of the smallest tip? True without post rules. */
fw_status fw_ground_holds_tip(const fw_setup *setup, const fw_runs *set, const fw_regions *regions,
                              uint32_t region, bool *holds, fw_fault *fault);

#endif
