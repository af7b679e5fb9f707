/* Where a folder stands in the file system, by device and inode, so that links, "..", and different
 * spellings cannot hide that two paths are one place.
 */
#ifndef FW_PLACE_H
#define FW_PLACE_H

#include "fault/fault.h"

#include <sys/types.h>

/* A path split into the folder that it stands in and its last part; both owned. */
typedef struct fw_place {
    char *parent; /* "." when the path has one part */
    char *name;
} fw_place;

/* FW_INPUT when the last part is empty, "." or "..", or too long for a staging name beside it. */
fw_status fw_place_split(const char *path, fw_place *place, fw_fault *fault);
void fw_place_free(fw_place *place);

/* The folder that a path names for its last part ("." when it names none), owned by the caller. */
fw_status fw_place_folder_of(const char *path, char **folder, fw_fault *fault);

/* parent + "/" + name, owned by the caller. */
fw_status fw_place_join(const char *parent, const char *name, char **path, fw_fault *fault);

typedef struct fw_identity {
    bool exists;
    bool is_folder;
    dev_t device;
    ino_t inode;
} fw_identity;

/* Of what the path leads to, links followed. A path that leads nowhere: exists = false. */
fw_identity fw_identity_of(const char *path);
bool fw_identity_equal(const fw_identity *a, const fw_identity *b);

/* True when the folder `inner` is `outer` or lies below it. An inner that cannot be opened lies
 * nowhere. */
bool fw_folder_within(const char *inner, const fw_identity *outer);

/* True when something is mounted on the folder. parent is the folder that it stands in. */
bool fw_is_mount_point(const char *path, const char *parent);

#endif
