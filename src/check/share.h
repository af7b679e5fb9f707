/* Who carries the load: the peel load of each layer, handed to the nearest anchor along the body,
 * and what every post and every plate contact had to carry at worst. */
#ifndef FW_CHECK_SHARE_H
#define FW_CHECK_SHARE_H

#include "check/lever.h"
#include "check/loads.h"
#include "check/sheet.h"
#include "check/together.h"
#include "posts/buckling.h"
#include "posts/margins.h"
#include "posts/tributary.h"

/* Anchors are posts by index, and the part's own contacts with the plate beyond them. */
enum { FW_PLATE_ANCHOR = 0x40000000 };

/* Feet that have grown together on the plate hold as one. */
typedef struct fw_foot_group {
    double area_mm2; /* solid post pixels of the region in layer 0 */
    double layer_N;  /* of the layer at hand */
} fw_foot_group;

/* What a post carried and what it is made of, so far. */
typedef struct fw_post_account {
    fw_post_demand demand;          /* largest so far, per check */
    fw_post_section section;        /* smallest solid areas so far; INFINITY = not seen yet */
    double lever_N[FW_POST_CHECKS]; /* largest by rigid share so far, as equal pulls */
    fw_post_push push;              /* largest so far */
    bool braced;                    /* its part has three anchors or more: the tip cannot sway */
    int32_t load_layer;             /* of the largest tip load; -1 */
    int32_t seen_layers;            /* layers below the tip in which it has any solid pixel */
    bool contact_known;             /* its end in the part was measured */
    fw_runs end;                    /* solid pixels of its last section, until then; owned */
    double tip_N, own_N;            /* of the layer at hand */
    int32_t touched_layer;          /* layer for which the two were last cleared */
    int32_t part;                   /* part body over its tip, -1 */
    int32_t group;                  /* of its foot; -1: it has none */
    double group_N;                 /* largest load on its group so far, its own and its fellows' */
} fw_post_account;

typedef struct fw_plate_account {
    uint32_t part;   /* part body */
    double area_mm2; /* solid contact with the plate */
    double x_mm, y_mm;
    double load_N; /* largest so far */
    int32_t load_layer;
    double layer_N; /* of the layer at hand */
} fw_plate_account;

/* A layer's load on a post whose contact is not measured yet. */
typedef struct fw_waiting {
    int32_t post, layer;
    double load_N;
} fw_waiting;

typedef struct fw_share {
    const fw_setup *setup;     /* borrowed */
    const fw_posts *posts;     /* borrowed; may grow between layers (placing) */
    const fw_stamp_plan *plan; /* borrowed; NULL: posts have no pixels (placing) */
    fw_tributary *tributary;   /* NULL when loads are not computed */
    fw_post_account *post;     /* [post_count] */
    size_t post_count, post_capacity;
    fw_plate_account *plate; /* [plate_count] */
    size_t plate_count, plate_capacity;
    fw_foot_group *group; /* [group_count] */
    size_t group_count, group_capacity;
    fw_together together; /* posts that run into one another */
    fw_lever lever;       /* rigid shares */
    int32_t *touched;     /* posts that the layer at hand loads */
    size_t touched_count, touched_capacity;
    fw_load_memo loads; /* of the batch at hand */
    fw_waiting *waiting;
    size_t waiting_count, waiting_capacity;
} fw_share;

/* posts and plan are borrowed; plan == NULL: tips come from the placing hook, posts have no pixels.
 */
fw_status fw_share_open(const fw_setup *setup, const fw_posts *posts, const fw_stamp_plan *plan,
                        fw_share *out, fw_fault *fault);

/* A new batch begins: solutions of earlier ones may be gone. */
void fw_share_new_batch(fw_share *share);

/* Takes the next layer, after its peel loads are known. rows [layers] gets worst_margin, also of
 * earlier layers whose posts' contacts become known only now. */
fw_status fw_share_step(fw_share *share, fw_sheet *sheet, const fw_sheet *before,
                        fw_layer_row *rows, fw_fault *fault);

/* The contact of a post is known now: gives rows the margins of the layers that waited for it. */
void fw_share_settle(fw_share *share, int32_t post, fw_layer_row *rows);

/* After the last layer: posts whose contact was never seen count as holding nothing. */
void fw_share_finish(fw_share *share, fw_layer_row *rows);
void fw_share_close(fw_share *share);

/* A push on the post in the layer at hand. */
void fw_share_push(fw_post_account *account, double push_N);

/* What a post has to carry by the layers so far: the larger of its tributary share, with what it
 * carries for posts that run into it, and of its rigid share. */
void fw_share_demand(const fw_share *share, size_t post, fw_post_demand *demand);

/* Demand and section of a post as the gate judges them: its foot together with those that it has
 * grown together with. */
void fw_share_judged(const fw_share *share, size_t post, fw_post_demand *demand,
                     fw_post_section *section);

#endif
