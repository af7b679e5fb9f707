/* Which pixels of a layer are posts, and what follows for the rest. */
#ifndef FW_CHECK_MEMBERS_H
#define FW_CHECK_MEMBERS_H

#include "mask/regions.h"
#include "posts/stamp.h"

/* Leaves an empty set (0 x 0) and keeps the arrays. */
void fw_members_clear(fw_member_runs *members);

/* out = the member pixels that lie in `set`, with their posts, in the order of members (which may
 * be what posts lost, see stamp.h). out may not be members. */
fw_status fw_members_within(const fw_member_runs *members, const fw_runs *set, fw_member_runs *out,
                            fw_fault *fault);

/* out = all member pixels as a set, of the posts for which keep(context, post) is true (NULL: of
 * all). */
fw_status fw_members_set(const fw_member_runs *members, bool (*keep)(void *, int32_t),
                         void *context, fw_runs *out, fw_fault *fault);

/* out = the pixels of one post. */
fw_status fw_members_of(const fw_member_runs *members, int32_t post, fw_runs *out, fw_fault *fault);

/* The post that owns pixel (x, y), or -1. */
int32_t fw_members_at(const fw_member_runs *members, int32_t x, int32_t y);

/* A piece of post in a region of the same set. */
typedef struct fw_member_piece {
    uint32_t region;
    int32_t post;
    int64_t pixels;
} fw_member_piece;

typedef struct fw_member_pieces {
    fw_member_piece *item; /* [count], sorted by (region, post), each pair once */
    size_t count, capacity;
} fw_member_pieces;

/* How the members (already within `set`) share the regions of `set`. Free item with free(). */
fw_status fw_members_pieces(const fw_member_runs *members, const fw_runs *set,
                            const fw_regions *regions, fw_member_pieces *out, fw_fault *fault);

/* Pixels that two posts both claim. */
typedef struct fw_member_pair {
    int32_t a, b; /* a < b */
    int64_t pixels;
} fw_member_pair;

typedef struct fw_member_pairs {
    fw_member_pair *item; /* [count], sorted by (a, b), each pair once */
    size_t count, capacity;
} fw_member_pairs;

/* Who claims pixels together, from the pixels that posts own and those that they lost to one
 * another (fw_stamp_members). Free item with free(). */
fw_status fw_members_pairs(const fw_member_runs *members, const fw_member_runs *lost,
                           fw_member_pairs *out, fw_fault *fault);

#endif
