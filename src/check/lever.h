/* The part as a rigid body on all its anchors: what each post and plate contact takes of a layer's
 * load, moments and all. It catches what a share by nearness cannot: lever action of a load beside
 * the anchors, bending of posts that lean, anchors that pull against each other.
 *
 * Each layer pulls on the body with the force of its clusters at their centres of pressure, towards
 * the window. Posts are chains of tapered beams from tip to plate (beam.h, the diameters as drawn,
 * Poisson's ratio 0.4: green acrylates, common practice, no source); contacts of the part with the
 * plate are patches as stiff as the first layer under them. A part that bends puts more on the
 * anchors under the load than said here: the tributary share is the other bound, and the larger of
 * the two counts. A post takes part from the first layer on in which part lies over its end. */
#ifndef FW_CHECK_LEVER_H
#define FW_CHECK_LEVER_H

#include "check/sheet.h"
#include "mask/bodies.h"
#include "physics/beam.h"
#include "physics/group.h"
#include "posts/post.h"

enum { FW_LEVER_NODES = FW_POST_POINTS + 4 };

typedef struct fw_lever_anchor {
    int32_t post;   /* index, or -1: a plate contact */
    int32_t plate;  /* index, or -1 */
    uint32_t part;  /* id of the part's body when it was attached */
    uint32_t root;  /* of that body now */
    size_t fellows; /* other anchors of that body */
    fw_anchor_stiffness stiffness;
    double over_ixx, over_iyy; /* plate contact: 1/mm3, distance of the furthest pixel over I */
} fw_lever_anchor;

/* The anchors of one body: anchor[first .. first + count), which are sorted by root. */
typedef struct fw_lever_group {
    uint32_t root;
    size_t first, count;
    fw_group group;
    double load[6]; /* of the layer at hand, at group.at */
    bool loaded;
} fw_lever_group;

typedef struct fw_lever {
    const fw_setup *setup; /* borrowed */
    fw_bodies parts;       /* as ground.c follows them, but no further than the layer at hand */
    fw_lever_anchor *anchor;
    size_t anchor_count, anchor_capacity;
    fw_lever_group *group;
    size_t group_count, group_capacity;
    uint32_t *part_of; /* scratch: [solid regions] part body or UINT32_MAX */
    size_t part_capacity;
    bool stale; /* anchors came since the groups were made */
} fw_lever;

/* Takes the force that a body exerts on an anchor at its own place, N and N mm, z to the window. */
typedef struct fw_lever_taker {
    fw_status (*take)(void *context, const fw_lever_anchor *anchor, const double force[6],
                      fw_fault *fault);
    void *context;
} fw_lever_taker;

/* A zeroed lever with setup set is open and empty. */
void fw_lever_close(fw_lever *lever);

/* The post's nodes from tip to plate, as drawn: at most FW_LEVER_NODES. 0 for a post without a
 * path. */
size_t fw_lever_nodes(const fw_post *post, double layer_mm, fw_beam_node *node);

/* The post holds this part body from now on. A post that is not routed is left out. */
fw_status fw_lever_add_post(fw_lever *lever, const fw_post *post, int32_t index, uint32_t part,
                            fw_fault *fault);

/* So does the part's own contact with the plate. One without two pixels across is left out. */
fw_status fw_lever_add_plate(fw_lever *lever, const fw_runs *contact, int32_t index, uint32_t part,
                             fw_fault *fault);

/* Follows the bodies into the next layer; before adding its anchors. */
fw_status fw_lever_follow(fw_lever *lever, const fw_sheet *sheet, const fw_sheet *before,
                          fw_fault *fault);

/* Hands out the layer's loads. */
fw_status fw_lever_step(fw_lever *lever, const fw_sheet *sheet, const fw_lever_taker *taker,
                        fw_fault *fault);

#endif
