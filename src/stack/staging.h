/* Staging folders: made beside the output, locked while their process lives, published by a rename.
 *
 * The lock is held on the folder's own SHA256SUMS, a file that the finished output needs anyway, so
 * nothing has to be removed between the last write and the rename, and at every instant a staging
 * folder without a living owner can be told from one in use.
 */
#ifndef FW_STAGING_H
#define FW_STAGING_H

#include "fault/fault.h"

enum { FW_STAGING_NAME = 256 };

typedef struct fw_staging {
    int parent;                 /* descriptor of the folder that holds both; -1 = none */
    int folder;                 /* the staging folder; -1 = none */
    int sums;                   /* its SHA256SUMS, empty and locked; -1 = none */
    char name[FW_STAGING_NAME]; /* ".NAME.part-XXXXXX"; "" = none to remove */
} fw_staging;

/* Opens the parent, removes stale staging folders of the same output name, and makes a new one.
 * Call fw_staging_end in any case. */
fw_status fw_staging_begin(fw_staging *staging, const char *parent, const char *name,
                           fw_fault *fault);

/* Gives the staging folder the name `name`: FW_INPUT when that exists (it came up meanwhile). path
 * is what the fault line calls it. */
fw_status fw_staging_publish(fw_staging *staging, const char *name, const char *path,
                             fw_fault *fault);

/* Puts it in the place of the existing folder `name`, which is then removed. Never a moment without
 * one of the two under that name, where the file system can exchange names. */
fw_status fw_staging_replace(fw_staging *staging, const char *name, const char *path,
                             fw_fault *fault);

/* Removes what was not published, and closes. */
void fw_staging_end(fw_staging *staging);

#endif
