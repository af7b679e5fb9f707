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

/* What was handed out of a cluster that is likely to come again in the next layer: walls repeat. */
typedef struct fw_load_entry {
    const fw_film_solution *solution;
    double q; /* that scales it */
    int32_t x0, y0;
    uint64_t version;    /* of the region's owners */
    size_t first, count; /* in fw_load_memo.piece */
} fw_load_entry;

typedef struct fw_load_piece {
    int32_t anchor;
    double force_N;
} fw_load_piece;

/* Keeps what was handed out since it was forgotten. A zeroed struct is valid and empty; free entry
 * and piece with free(). */
typedef struct fw_load_memo {
    fw_load_entry *entry;
    fw_load_piece *piece;
    size_t entries, pieces, entry_capacity, piece_capacity;
} fw_load_memo;

/* To be called when the film memo may have freed solutions: between batches. */
void fw_load_memo_forget(fw_load_memo *memo);

/* Hands out sheet->peel: every film cell goes to the owner of its place, a cavity's suction to the
 * owners of the walls round it, regions of posts alone to those posts. */
fw_status fw_loads_hand_out(const fw_setup *setup, const fw_sheet *sheet,
                            const fw_tributary *tributary, fw_load_memo *memo,
                            const fw_load_taker *taker, fw_fault *fault);

#endif
