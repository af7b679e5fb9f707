/* Margin = capacity / demand of a post, per check, from areas measured on the pixels. */
#ifndef FW_MARGINS_H
#define FW_MARGINS_H

#include "physics/cards.h"

/* Smaller values are nearer to the part; the first of equal margins governs. */
typedef enum fw_post_check {
    FW_POST_TIP,   /* tension of the contact */
    FW_POST_NECK,  /* tension of its smallest section */
    FW_POST_SHAFT, /* tension of its smallest section */
    FW_POST_FOOT,  /* adhesion to the plate */
    FW_POST_CHECKS
} fw_post_check;

typedef struct fw_post_demand {
    double load_N[FW_POST_CHECKS]; /* pull; from the neck on with the members' own peel added */
} fw_post_demand;

typedef struct fw_post_section {
    double area_mm2[FW_POST_CHECKS]; /* smallest solid area; INFINITY = the post has no such zone */
} fw_post_section;

typedef struct fw_post_margins {
    double margin[FW_POST_CHECKS]; /* NAN = nothing is demanded of it */
    double least;                  /* NAN = nothing is demanded at all */
    fw_post_check governs;         /* FW_POST_CHECKS when nothing is demanded */
} fw_post_margins;

/* Margin of one check with an area in mm2 under a load in N; NAN when load_N is not positive. */
double fw_margin_of(const fw_resin *resin, fw_post_check check, double area_mm2, double load_N);

fw_post_margins fw_margins_of(const fw_resin *resin, const fw_post_demand *demand,
                              const fw_post_section *section);

#endif
