/* The values of the two cards, as the physics wants them. Read from YAML by src/cards. */
#ifndef FW_PHYSICS_CARDS_H
#define FW_PHYSICS_CARDS_H

#include <stdbool.h>

enum { FW_CARD_TEXT = 128 };

/* Where a group of card values comes from. */
typedef enum fw_basis { FW_ASSUMED, FW_SUPPLIER, FW_MEASURED } fw_basis;

/* A list of pairs in a card. */
enum { FW_CARD_POINTS = 32 };
typedef struct fw_points {
    int count;
    double at[FW_CARD_POINTS][2];
} fw_points;

typedef struct fw_resin {
    char name[FW_CARD_TEXT];
    char lot[FW_CARD_TEXT]; /* empty when not given */
    fw_basis basis_viscosity, basis_cure, basis_green, basis_support;
    double viscosity_mPa_s;
    double penetration_um;        /* Dp, working curve */
    double critical_mJ_cm2;       /* Ec, working curve */
    double exposure_mJ_cm2;       /* E0 at the window, fully lit */
    double joint_ratio;           /* dose through the layer over Ec that makes a joint, >= 1 */
    double tensile_MPa;           /* green, at exposure_mJ_cm2 */
    fw_points tensile_mJ_cm2_MPa; /* as measured at several exposures; empty: at one */
    double modulus_MPa;           /* green */
    double plate_adhesion_MPa;
    double reach_mm;  /* how far fresh solid may extend from what holds it */
    double angle_deg; /* self-supporting angle from the plate */
} fw_resin;

/* How a layer is parted from the window. */
typedef enum fw_mode {
    FW_MODE_PULL,     /* the plate draws straight away */
    FW_MODE_TILT,     /* it turns about a hinge line */
    FW_MODE_FILM,     /* a tensioned film peels off from the rim: a law in area and rim */
    FW_MODE_MEASURED, /* force against area, measured */
    FW_MODE_SLIDE,    /* the window slides away sideways and shears the film */
} fw_mode;

typedef struct fw_machine {
    char name[FW_CARD_TEXT];
    fw_basis basis_separation, basis_frame;
    fw_mode mode;
    double speed_mm_s;  /* separation speed, at the plate's centre */
    double slide_deg;   /* slide: direction of the pull in the plane, from x toward y */
    fw_points hinge_mm; /* tilt: two points of the hinge line, in the stack's x, y */
    double area_kPa, rim_N_mm,
        front_mm;           /* film: per solid area, per open rim, within front_mm of it */
    fw_points table_mm2_N;  /* measured: areas and forces, both ascending */
    double gap_um;          /* liquid film between layer and window */
    double gap_range_um[2]; /* both gap_um when not given */
    double cap_kPa;         /* suction that the liquid can hold, gauge */
    double stiffness_N_mm;  /* of frame, plate and drive as one spring; 0 = rigid */
    double approach_mm_s, approach_to_um; /* the way back to the window; 0 = not given */
    double drive_limit_N;                 /* 0 = not given */
    fw_points grey; /* response: dose share against grey share; empty: linear */
    double plate_mm[2];
    int mask_px[2]; /* 0, 0 = not given */
} fw_machine;

#endif
