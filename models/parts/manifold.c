/* The demo part: the inlet manifold of a field water sampler, standing on its flange.
 *
 * Water comes in through the grille, three hose barbs lead to the pumps, a blind socket takes the
 * guide pin of the lid, a clip holds the cable. What each row is there for when the part is printed
 * is said beside it. Everything that hangs over free resin sees the plate: the barbs and the clip
 * stand out past the flange, the grille is open to the plate through the flange, and the ceilings
 * inside (channels, chamber) are arches or steeper than 40 degrees. */
#include "models.h"

/* A hose barb along x: pipe, two teeth with a land where each begins in mid-resin, and a nose. */
#define BARB_RIGHT(y, z)                                                                           \
    {PART_ADD, PART_ROD_X, y, z, 2.3, 2.3, 0, 12.0, 21.5, 0},                                      \
        {PART_ADD, PART_ROD_X, y, z, 3.0, 3.0, 0, 15.0, 15.8, 0},                                  \
        {PART_ADD, PART_ROD_X, y, z, 3.0, 2.3, 0, 15.8, 17.6, 0},                                  \
        {PART_ADD, PART_ROD_X, y, z, 3.0, 3.0, 0, 18.6, 19.4, 0},                                  \
    {                                                                                              \
        PART_ADD, PART_ROD_X, y, z, 3.0, 2.3, 0, 19.4, 21.2, 0                                     \
    }
#define BARB_LEFT(y, z)                                                                            \
    {PART_ADD, PART_ROD_X, y, z, 2.3, 2.3, 0, -21.5, -12.0, 0},                                    \
        {PART_ADD, PART_ROD_X, y, z, 3.0, 3.0, 0, -15.8, -15.0, 0},                                \
        {PART_ADD, PART_ROD_X, y, z, 2.3, 3.0, 0, -17.6, -15.8, 0},                                \
        {PART_ADD, PART_ROD_X, y, z, 3.0, 3.0, 0, -19.4, -18.6, 0},                                \
    {                                                                                              \
        PART_ADD, PART_ROD_X, y, z, 2.3, 3.0, 0, -21.2, -19.4, 0                                   \
    }

static const part_solid MANIFOLD[] = {
    /* use      shape        x      y      a     b     c     from   to    grow */
    /* the flange: a flat plate-facing area to cover with tips */
    {PART_ADD, PART_PRISM, 0.0, 0.0, 13.0, 15.0, 4.0, 0.0, 4.0, 0},
    {PART_CUT, PART_PRISM, 9.0, 11.5, 1.7, 1.7, 1.7, 0.0, 4.0, 0},
    {PART_CUT, PART_PRISM, -9.0, 11.5, 1.7, 1.7, 1.7, 0.0, 4.0, 0},
    {PART_CUT, PART_PRISM, 9.0, -11.5, 1.7, 1.7, 1.7, 0.0, 4.0, 0},
    {PART_CUT, PART_PRISM, -9.0, -11.5, 1.7, 1.7, 1.7, 0.0, 4.0, 0},
    /* the body, and on it the outlet and the boss of the socket */
    {PART_ADD, PART_PRISM, 0.0, 0.0, 12.5, 8.0, 3.0, 0.0, 24.0, 0},
    {PART_ADD, PART_PRISM, 0.0, 0.0, 4.5, 5.5, 3.0, 24.0, 30.0, 0},
    {PART_ADD, PART_PRISM, -8.5, 0.0, 3.7, 3.7, 3.7, 24.0, 27.0, 0},
    /* three hose barbs: overhangs with onsets in mid-resin */
    BARB_RIGHT(3.8, 12.0),
    BARB_RIGHT(-3.8, 12.0),
    BARB_LEFT(4.2, 12.0),
    /* the clip: an arm on air and a hook whose flat end is an onset */
    {PART_ADD, PART_PRISM, -16.75, -4.3, 4.75, 2.5, 0.5, 20.0, 21.6, 0},
    {PART_ADD, PART_PRISM, -20.7, -4.3, 0.8, 2.5, 0.5, 17.0, 20.0, 0},
    /* the chamber: open to the plate through the flange, its roof at 55 degrees, then the outlet */
    {PART_CUT, PART_PRISM, 0.0, 0.0, 4.5, 5.5, 3.0, 0.0, 18.0, 0},
    {PART_CUT, PART_PRISM, 0.0, 0.0, 4.5, 5.5, 3.0, 18.0, 21.5, -0.7},
    {PART_CUT, PART_PRISM, 0.0, 0.0, 2.05, 3.05, 0.55, 21.5, 30.0, 0},
    /* the channels of the barbs: arches of 2.4 mm */
    {PART_CUT, PART_ROD_X, 3.8, 12.0, 1.2, 1.2, 0, 4.0, 21.5, 0},
    {PART_CUT, PART_ROD_X, -3.8, 12.0, 1.2, 1.2, 0, 4.0, 21.5, 0},
    {PART_CUT, PART_ROD_X, 4.2, 12.0, 1.2, 1.2, 0, -21.5, -4.0, 0},
    /* the blind socket: closed toward the plate, it sucks until the weep hole at 21.3 mm
     */
    {PART_CUT, PART_PRISM, -8.5, 0.0, 2.2, 2.2, 2.2, 14.0, 27.0, 0},
    {PART_CUT, PART_ROD_X, 0.0, 22.0, 0.7, 0.7, 0, -12.6, -8.5, 0},
    /* the grille: bars across the chamber, bridged from both walls */
    {PART_ADD, PART_PRISM, -3.15, 0.0, 0.5, 5.6, 0, 5.0, 6.6, 0},
    {PART_ADD, PART_PRISM, -1.05, 0.0, 0.5, 5.6, 0, 5.0, 6.6, 0},
    {PART_ADD, PART_PRISM, 1.05, 0.0, 0.5, 5.6, 0, 5.0, 6.6, 0},
    {PART_ADD, PART_PRISM, 3.15, 0.0, 0.5, 5.6, 0, 5.0, 6.6, 0},
};

/* A flat square face of 20 mm, 2 mm thick: the test part for covering and loading tips. */
static const part_solid SLAB[] = {
    {PART_ADD, PART_PRISM, 0.0, 0.0, 10.0, 10.0, 0, 0.0, 2.0, 0},
};

#define COUNT(table) ((int)(sizeof(table) / sizeof *(table)))

const part_model PART_MODELS[] = {
    {"manifold", MANIFOLD, COUNT(MANIFOLD), {32.0, 20.0}, 1280, 800, 0.05, 0.05, 600},
    {"slab", SLAB, COUNT(SLAB), {12.0, 12.0}, 480, 480, 0.05, 0.05, 40},
};
const int PART_MODEL_COUNT = COUNT(PART_MODELS);
