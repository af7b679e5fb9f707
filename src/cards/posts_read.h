/* Reads posts.json ("falsework-posts/1"). */
#ifndef FW_CARDS_POSTS_READ_H
#define FW_CARDS_POSTS_READ_H

#include "check/report.h"
#include "fault/fault.h"
#include "posts/post.h"

#include <stdint.h>

/* Reads the posts at path. out is filled anew (free out->item with free()), in the file's order;
 * each post's id is its position there. raw_sha256 is the digest of the raw stack, empty where the
 * file gives "". Lengths in mm, layers counted in the supported stack.
 *
 * Every key of the format must be there and no other. Refused (FW_INPUT, one line
 * `file: posts[i].key: ...`, or `file:line:` where it is no JSON at all): wrong types, numbers out
 * of range, ids out of order, a tip not on the plate side of its layer's numbers (raw_tip_layer +
 * lift_layers != tip_layer), paths of fewer than 2 (1 when not routed) or more than FW_POST_POINTS
 * points or that do not descend. load_N, load_layer, contact_mm2, governs and margin are checked
 * and then dropped: a reader judges anew. After a failure *out is empty. */
fw_status fw_posts_read(const char *path, fw_posts *out, char raw_sha256[FW_DIGEST_HEX],
                        int32_t *lift_layers, fw_fault *fault);

#endif
