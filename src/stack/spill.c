#define _GNU_SOURCE /* O_TMPFILE, mkostemp */

#include "stack/spill.h"

#include "fault/memory.h"
#include "stack/files.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

void fw_spill_begin(fw_spill *spill, const char *directory)
{
    *spill = (fw_spill){directory, -1, 0};
}

/* For file systems without O_TMPFILE: made with a name that is taken away at once. */
static fw_status open_named(fw_spill *spill, fw_fault *fault)
{
    static const char tail[] = "/.layers-XXXXXX";
    const size_t size = strlen(spill->directory) + sizeof tail;
    char *path;
    FW_TRY(fw_allocate((void **)&path, size, 1, "layer store", fault));
    (void)snprintf(path, size, "%s%s", spill->directory, tail);
    spill->file = mkostemp(path, O_CLOEXEC);
    const int error = errno;
    if (spill->file >= 0)
        unlink(path);
    free(path);
    if (spill->file >= 0)
        return FW_OK;
    return fw_file_fault(error, "cannot make a temporary file", spill->directory, fault);
}

static fw_status open_file(fw_spill *spill, fw_fault *fault)
{
    if (spill->file >= 0)
        return FW_OK;
    spill->file = open(spill->directory, O_TMPFILE | O_RDWR | O_CLOEXEC, 0600);
    return spill->file >= 0 ? FW_OK : open_named(spill, fault);
}

fw_status fw_spill_put(fw_spill *spill, const void *bytes, size_t size, uint64_t *offset,
                       fw_fault *fault)
{
    FW_TRY(open_file(spill, fault));
    FW_TRY(fw_file_write(spill->file, bytes, size, spill->directory, fault));
    *offset = spill->size;
    spill->size += size;
    return FW_OK;
}

fw_status fw_spill_get(const fw_spill *spill, uint64_t offset, void *bytes, size_t size,
                       fw_fault *fault)
{
    uint8_t *to = bytes;
    while (size > 0) {
        const ssize_t got = pread(spill->file, to, size, (off_t)offset);
        if (got < 0 && errno == EINTR)
            continue;
        if (got <= 0)
            return fw_file_fault(got < 0 ? errno : EIO, "cannot read a temporary file",
                                 spill->directory, fault);
        to += got;
        size -= (size_t)got;
        offset += (uint64_t)got;
    }
    return FW_OK;
}

void fw_spill_end(fw_spill *spill)
{
    if (spill->file >= 0)
        close(spill->file);
    *spill = (fw_spill){NULL, -1, 0};
}
