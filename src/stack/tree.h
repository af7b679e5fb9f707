/* Walking and removing folders of ours. */
#ifndef FW_TREE_H
#define FW_TREE_H

#include "stack/sums.h"

/* Finds what stands in the folder `path` and is not in `sums` (sorted): a file not listed, a folder
 * without listed files, or anything else than files and folders. `except` (a file) may be unlisted.
 * *stranger (owned by the caller) is its path relative to the folder, NULL = none. */
fw_status fw_tree_stranger(const char *path, const fw_sums *sums, const char *except,
                           char **stranger, fw_fault *fault);

/* Removes the folder `name` in the folder `parent` with all that is in it, its file `last` at the
 * end; follows no link and stays on its file system. What cannot be removed stays; false then. */
bool fw_tree_remove(int parent, const char *name, const char *last);

#endif
