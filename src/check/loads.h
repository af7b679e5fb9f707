/* One layer's peel load, cut into pieces and handed to what holds each piece. */
#ifndef FW_CHECK_LOADS_H
#define FW_CHECK_LOADS_H

#include "check/sheet.h"
#include "posts/tributary.h"

/* Takes the pieces. */
typedef struct fw_load_taker {
    /* force_N pulls at a place that `anchor` holds (FW_NO_ANCHOR: nothing does yet). */
    fw_status (*anchor)(void *context, int32_t anchor, double force_N, fw_fault *fault);
    /* force_N pulls on the end of a post itself. */
    fw_status (*post)(void *context, int32_t post, double force_N, fw_fault *fault);
    void *context;
} fw_load_taker;

/* Hands out sheet->peel: every film cell goes to the owner of its place, a cavity's suction to the
 * owners of the walls round it, regions of posts alone to those posts. */
fw_status fw_loads_hand_out(const fw_setup *setup, const fw_sheet *sheet,
                            const fw_tributary *tributary, const fw_load_taker *taker,
                            fw_fault *fault);

#endif
