/* `begin`: a commented job file from what a stack shows, written from the job's own table. */
#ifndef FW_CARDS_BEGIN_H
#define FW_CARDS_BEGIN_H

#include "fault/fault.h"

#include <stdint.h>
#include <stdio.h>

typedef struct fw_begin_facts {
    int32_t layers;
    int32_t width_px, height_px;
    int depth_bits;            /* of one grey sample */
    int32_t first_solid_layer; /* -1 when nothing is solid */
    const char *names;         /* pattern of the file names, "" or NULL when none is needed */
} fw_begin_facts;

/* Writes the job to file (open for writing, stays the caller's, is not flushed to disk). Masks
 * cannot tell the pixel size, the layer thickness and the cards: those lines are marked "set this";
 * the cards stand as comments, so that the file reads as it is. A failing write is FW_MACHINE. */
fw_status fw_begin_write(FILE *file, const fw_begin_facts *facts, fw_fault *fault);

#endif
