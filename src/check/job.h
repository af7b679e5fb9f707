/* A job: the stack's geometry, the two cards, the post rules and the gate. Read by src/cards. */
#ifndef FW_JOB_H
#define FW_JOB_H

#include "physics/cards.h"
#include "posts/post.h"

enum { FW_JOB_PATTERN = 128 };

typedef struct fw_job {
    double pixel_um[2]; /* x, y */
    double layer_um;
    char names[FW_JOB_PATTERN]; /* which files are layers, '#' = one or more digits; empty = *.png
                                   with a number */
    double intent_level;        /* share of full grey from which a pixel is intended, (0, 1] */
    bool has_resin, has_machine;
    fw_resin resin;
    fw_machine machine;
    bool has_rules; /* a `posts:` section was given */
    fw_post_rules rules;
    double vent_mm;      /* narrower openings do not vent a cavity; 0: any does */
    int32_t heal_layers; /* an onset that joins a held body this soon is a note */
    double max_peel_N;   /* 0 = no limit in the gate */
    bool refuse_assumed; /* gate: assumed card values fail */
} fw_job;

#endif
