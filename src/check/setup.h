/* The constants of one judgement, worked out once from the job and the stack's size. */
#ifndef FW_CHECK_SETUP_H
#define FW_CHECK_SETUP_H

#include "check/job.h"
#include "physics/film.h"
#include "physics/traction.h"

#include <stdint.h>

/* Sealed cavities smaller than this (mm2 in the layer) are filled for the peel solve and listed as
 * one finding: under a quarter of a millimetre across they carry no load worth an unknown. */
#define FW_SMALL_CAVITY_MM2 0.05

typedef struct fw_setup {
    const fw_job *job;     /* borrowed */
    int32_t width, height; /* px */
    int32_t layers;        /* of the stack under judgement, lift included */
    int32_t lift;          /* layers prepended to the raw stack */
    int32_t full;          /* grey of a fully lit pixel */
    double px_mm, py_mm, t_mm;
    int32_t intended_least, solid_least; /* greys; solid == intended without a resin card */
    double credit_mm;  /* what one layer of vertical wall pays back of the debt: t / tan(theta) */
    double reach_mm;   /* INFINITY without a resin card */
    double vent_mm;    /* narrower openings do not vent; 0: any does */
    double vent_px[2]; /* radius of that opening along x and y, a hair less */
    double smallest_tip_mm; /* 0 without post rules */
    bool loads;             /* both cards are there: peel loads and margins can be computed */
    fw_traction traction;   /* a measured law; then q is 1 MPa/mm2 and nothing is capped */
    double slide[2];        /* direction of the pull in the plane; 0, 0: along z */
    double q;               /* 12 eta v / h^3, MPa/mm2, at the card's gap */
    fw_film_plane faster; /* how the speed differs over the image, from its first pixel's corner */
    double q_range[2];    /* at the narrow and at the wide end of the gap range */
    double cap_MPa;       /* suction that the liquid holds */
    double unsolved_N;    /* a cluster whose upper bound is below this is not solved */
} fw_setup;

/* full: 2^depth - 1 of the stack's files. */
fw_setup fw_setup_make(const fw_job *job, int32_t width, int32_t height, int32_t layers,
                       int32_t lift, int32_t full);

/* What the job and the stack's size cannot be together: FW_INPUT. */
fw_status fw_setup_check(const fw_setup *setup, fw_fault *fault);

/* Centre of pixel (x, y) in mm. */
double fw_setup_x(const fw_setup *setup, double x);
double fw_setup_y(const fw_setup *setup, double y);

#endif
