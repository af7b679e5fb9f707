/* A rigid body held by any number of anchors (posts, contacts with the plate): which force and
 * moment of a load each of them takes.
 *
 * Every anchor is a symmetric 6x6 stiffness at its own place (six.h). The body moves as one, so
 * each anchor's share follows from its stiffness and place alone: K u = load with K the sum of the
 * anchors' stiffnesses, all seen from one point; anchor i then takes K_i u_i. For upright anchors
 * stiff only along z this is the pile group formula with coupling, P_i = k_i (d + a x_i + b y_i).
 * A part that bends puts more on the anchors under the load than said here.
 *
 * mm, N, N mm. Forces are those of the body on the anchors; their sum is the load. Adding is O(1)
 * and a load is O(1) plus O(1) an anchor asked for; nothing is allocated. A group may be read by
 * many threads at once.
 */
#ifndef FW_GROUP_H
#define FW_GROUP_H

#include "fault/fault.h"
#include "physics/six.h"

#include <stdbool.h>
#include <stddef.h>

typedef struct fw_anchor_stiffness {
    double at[3]; /* mm */
    fw_six k;     /* there, symmetric, positive semidefinite */
} fw_anchor_stiffness;

/* Make with fw_group_begin; a plain value, may be copied. */
typedef struct fw_group {
    double at[3]; /* the point that loads and motions refer to */
    size_t count;
    fw_six k; /* the sum, at that point */
    bool factored;
    fw_six_factors factors;
} fw_group;

/* An empty group. Digits are lost as the square of (distance of the point from the anchors / how
 * far they stand apart), so take a point on the part. */
void fw_group_begin(fw_group *group, const double at[3]);

/* Adds an anchor. The sum depends on the order in its last digits, so add in a fixed order. A
 * factored group has to be factored again. */
void fw_group_add(fw_group *group, const fw_anchor_stiffness *anchor);

/* Prepares for loads. FW_INPUT where the anchors leave the body free in a direction or nearly so
 * (fw_six_factor has the limits): no anchor at all; one that is stiff only along its axis; pins on
 * one line; posts stiff only along z, since they do not stop it from sliding. The line names the
 * first direction that is free once those before it (x, y, z, then turns about x, y, z) are held. A
 * group of real posts or contacts (positive definite each) holds, seen from a point on the part. */
fw_status fw_group_factor(fw_group *group, fw_fault *fault);

/* The body's motion at group->at under a wrench there. The group is factored, else FW_INPUT. */
fw_status fw_group_motion(const fw_group *group, const double load[6], double motion[6],
                          fw_fault *fault);

/* What an anchor takes, at its own place, when the body moves so. It need not be in the group: then
 * it is what the motion would put on it. */
void fw_group_force(const fw_group *group, const fw_anchor_stiffness *anchor,
                    const double motion[6], double force[6]);

/* The shares of one load in all the anchors of the group: motion, forces, and a check that the
 * forces add up to the load again (within 1e-6 of the sum of their sizes). FW_INPUT where that
 * fails: the load is not finite, anchor is not what was added, or a stiffness is not symmetric.
 * After a failure force is all NAN. */
fw_status fw_group_solve(const fw_group *group, const fw_anchor_stiffness *anchor, size_t count,
                         const double load[6], double (*force)[6], fw_fault *fault);

/* Begin, add all, factor, solve. */
fw_status fw_group_share(const fw_anchor_stiffness *anchor, size_t count, const double at[3],
                         const double load[6], double (*force)[6], fw_fault *fault);

/* A flat contact with the plate: area and second moments about its centroid, both axes of the
 * plate. Ixx = integral y^2 (mm4), Iyy = integral x^2, Ixy = integral x y. */
typedef struct fw_patch {
    double at[3]; /* centroid */
    double area_mm2, ixx_mm4, iyy_mm4, ixy_mm4;
} fw_patch;

/* The patch as a bed of independent springs (Winkler 1867), normal_MPa_mm of stress for a mm of
 * lift and shear_MPa_mm for a mm of slide: k_z = n A, k_x = k_y = s A, turns n Ixx, n Iyy, coupled
 * by -n Ixy, and twist s (Ixx + Iyy). For a bonded layer of thickness h at least E/h and G/h
 * (confined, it is stiffer; derived here). FW_INPUT where the second moments are those of no area
 * (Ixx Iyy <= Ixy^2), or a number is not above 0. */
fw_status fw_group_patch(const fw_patch *patch, double normal_MPa_mm, double shear_MPa_mm,
                         fw_anchor_stiffness *anchor, fw_fault *fault);

#endif
