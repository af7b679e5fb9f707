/* As few discs as possible that cover a set of places, with distances along paths.
 *
 * The places are the nodes of a rectangular grid, paths as in posts/ways.h. A node that is `need`
 * is covered when its path to some centre is at most radius_mm long. The best plane cover has one
 * disc for each 3 sqrt(3) / 2 radius^2 = 2.598 radius^2 (the hexagon in the disc; Kershner, The
 * number of circles covering a set, Amer. J. Math. 61 (1939) 665).
 *
 * Method: a hexagonal start, Lloyd steps (each centre to the middle of the needed nodes that are
 * nearest to it: first the centroid, then the centre of their smallest enclosing circle, which is
 * what a cover wants), farthest-first for what is left, and rounds that take out the centres with
 * the least cover of their own and repair, of which the smallest result is kept.
 */
#ifndef FW_COVER_H
#define FW_COVER_H

#include "posts/ways.h"

enum { FW_COVER_IN = 1, FW_COVER_NEED = 2 };

/* How well a centre stands at a place. */
typedef enum fw_stand { FW_STAND_NOT, FW_STAND_EDGE, FW_STAND_WHOLE } fw_stand;

/* At (x, y) in mm from node (0, 0); must answer the same for the same place. */
typedef fw_stand (*fw_cover_stand)(void *context, double x_mm, double y_mm);

typedef struct fw_cover_task {
    int32_t nx, ny;       /* nodes */
    double dx_mm, dy_mm;  /* between nodes, neither over twice the other */
    const uint8_t *flags; /* [ny][nx] FW_COVER_IN, FW_COVER_NEED */
    double radius_mm;
    fw_cover_stand stand;
    void *context;
} fw_cover_task;

/* Fills out (emptied first) with centres in mm from node (0, 0). Nodes that no standing place
 * covers are left out. Ties: smaller (y, x). Memory 16 bytes a node and some; cost: nodes times a
 * constant number of rounds. */
fw_status fw_cover(const fw_cover_task *task, fw_tips *out, fw_fault *fault);

/* Makes centres that cover nearly (found on a coarser grid) cover this grid too: a few Lloyd steps,
 * farthest first for what is left, and out with those that nothing needs. */
fw_status fw_cover_refine(const fw_cover_task *task, fw_tips *centres, fw_fault *fault);

/* Moves centres[fixed .. count) to the middle of the needed nodes nearest to each, `rounds` times;
 * none comes closer than pitch_mm to another: such a step is left out. */
fw_status fw_cover_spread(const fw_cover_task *task, fw_tips *centres, size_t fixed,
                          double pitch_mm, int32_t rounds, fw_fault *fault);

/* Appends the standing place nearest to the needed node that is farthest from all centres, at least
 * pitch_mm from every centre. *added tells whether there is one. */
fw_status fw_cover_farthest(const fw_cover_task *task, fw_tips *centres, double pitch_mm,
                            bool *added, fw_fault *fault);

#endif
