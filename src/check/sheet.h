/* A layer under judgement: everything that follows from its pixels and the list of posts, and from
 * the layer before it, but from nothing else; so the sheets of a batch are made in parallel. */
#ifndef FW_CHECK_SHEET_H
#define FW_CHECK_SHEET_H

#include "check/members.h"
#include "check/peel.h"
#include "check/setup.h"
#include "mask/overlaps.h"
#include "mask/slice.h"

/* What holds the body at a place of this layer, for the tributary share. */
typedef struct fw_contact {
    int32_t anchor; /* post index, or FW_PLATE_ANCHOR + k */
    fw_runs runs;   /* owned */
} fw_contact;

typedef struct fw_contacts {
    fw_contact *item; /* [count] */
    size_t count, capacity;
} fw_contacts;

/* A zeroed sheet is valid and empty. */
typedef struct fw_sheet {
    int32_t layer;
    fw_slice slice;
    fw_member_runs intended_members; /* posts within intended */
    fw_member_runs solid_members;    /* posts within solid */
    fw_member_runs solid_lost;       /* what posts lost to one another, within solid */
    fw_member_pieces pieces;         /* solid_members in the regions of solid */
    fw_member_pairs pairs;           /* who claims solid pixels together */
    fw_runs own_part; /* intended without posts; empty when there are no posts here */
    fw_regions own_part_regions;
    fw_overlaps from_before;      /* of intended regions */
    fw_overlaps part_from_before; /* of part regions */
    fw_overlaps void_from_before; /* of void regions */
    uint8_t *held;                /* [intended regions] path to the plate; set by ground.c */
    uint32_t *cavity;             /* [void regions] sealed body's id, or FW_OPEN; set by ground.c */
    fw_runs wide;                 /* pixels whose disc of the smallest vent meets no part */
    fw_openings openings;         /* what sucks: of the voids, or of shut; set by vents.c */
    fw_runs shut;                 /* sealed, or as good as sealed by a narrow vent */
    fw_regions shut_regions;      /* 8-connected */
    uint32_t *shut_body;          /* [shut regions] */
    uint32_t *part_body;          /* [part regions] id of the part's body; set by ground.c */
    uint8_t *posts_only;          /* [solid regions] no pixel of it belongs to the part */
    size_t held_capacity, cavity_capacity, part_body_capacity, posts_only_capacity, shut_capacity;
    fw_contacts contacts; /* set by share.c, or by the placing hook */
    fw_peel peel;         /* set by peel.c */
} fw_sheet;

#define FW_OPEN UINT32_MAX

/* Posts are written into layer `layer` of sheet from its greys. plan may be NULL: no posts. */
fw_status fw_sheet_build(fw_sheet *sheet, const fw_setup *setup, const fw_stamp_plan *plan,
                         int32_t layer, const fw_greys *greys, fw_fault *fault);

/* Overlaps with the sheet of the layer before. */
fw_status fw_sheet_join(fw_sheet *sheet, const fw_sheet *before, fw_fault *fault);

/* The part alone: intended pixels that are no post. */
const fw_runs *fw_sheet_part(const fw_sheet *sheet);
const fw_regions *fw_sheet_part_regions(const fw_sheet *sheet);

/* Adds a contact whose runs the caller fills; *out is valid until the next call. */
fw_status fw_contacts_add(fw_contacts *contacts, int32_t anchor, fw_runs **out, fw_fault *fault);
void fw_contacts_clear(fw_contacts *contacts);

void fw_sheet_free(fw_sheet *sheet);

#endif
