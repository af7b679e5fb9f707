#define _GNU_SOURCE /* statx, O_PATH */

#include "stack/place.h"

#include "fault/memory.h"

#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

/* NAME_MAX less what ".NAME.part-XXXXXX" adds. */
enum { NAME_LIMIT = 255 - 13, DEPTH_LIMIT = 4096 };

static const char holder[] = "a path";

static fw_status copy_part(const char *from, size_t size, char **out, fw_fault *fault)
{
    FW_TRY(fw_allocate((void **)out, size + 1, 1, holder, fault));
    memcpy(*out, from, size);
    return FW_OK;
}

static bool usable(const char *name, size_t size)
{
    if (size == 0 || size > NAME_LIMIT)
        return false;
    if (name[0] == '.' && (size == 1 || (size == 2 && name[1] == '.')))
        return false;
    for (size_t i = 0; i < size; i++) {
        if ((unsigned char)name[i] < 0x20 || name[i] == 0x7f)
            return false;
    }
    return true;
}

/* Cuts path into its folder [0, parent) and its last part [start, end); parent == 0: no folder. */
static void find_last_part(const char *path, size_t *parent, size_t *start, size_t *end)
{
    *end = strlen(path);
    while (*end > 0 && path[*end - 1] == '/')
        --*end;
    *start = *end;
    while (*start > 0 && path[*start - 1] != '/')
        --*start;
    *parent = *start;
    while (*parent > 1 && path[*parent - 1] == '/')
        --*parent;
}

fw_status fw_place_folder_of(const char *path, char **folder, fw_fault *fault)
{
    size_t parent, start, end;
    find_last_part(path, &parent, &start, &end);
    return copy_part(parent == 0 ? "." : path, parent == 0 ? 1 : parent, folder, fault);
}

fw_status fw_place_split(const char *path, fw_place *place, fw_fault *fault)
{
    *place = (fw_place){0};
    size_t parent, start, end;
    find_last_part(path, &parent, &start, &end);
    if (!usable(path + start, end - start))
        return fw_fault_set(fault, FW_INPUT,
                            "unusable output name, \"%s\", name a new folder, at most %d bytes "
                            "long",
                            path, NAME_LIMIT);
    fw_status status = fw_place_folder_of(path, &place->parent, fault);
    if (status == FW_OK)
        status = copy_part(path + start, end - start, &place->name, fault);
    if (status != FW_OK)
        fw_place_free(place);
    return status;
}

void fw_place_free(fw_place *place)
{
    free(place->parent);
    free(place->name);
    *place = (fw_place){0};
}

fw_status fw_place_join(const char *parent, const char *name, char **path, fw_fault *fault)
{
    const size_t size = strlen(parent) + strlen(name) + 2;
    FW_TRY(fw_allocate((void **)path, size, 1, holder, fault));
    (void)snprintf(*path, size, "%s/%s", parent, name);
    return FW_OK;
}

static fw_identity identity_from(const struct stat *info)
{
    return (fw_identity){true, S_ISDIR(info->st_mode), info->st_dev, info->st_ino};
}

fw_identity fw_identity_of(const char *path)
{
    struct stat info;
    return stat(path, &info) == 0 ? identity_from(&info) : (fw_identity){0};
}

bool fw_identity_equal(const fw_identity *a, const fw_identity *b)
{
    return a->exists && b->exists && a->device == b->device && a->inode == b->inode;
}

/* Steps from a folder to the one above it; closes the old descriptor. -1 when that fails. */
static int step_up(int folder)
{
    const int above = openat(folder, "..", O_PATH | O_DIRECTORY | O_CLOEXEC);
    close(folder);
    return above;
}

bool fw_folder_within(const char *inner, const fw_identity *outer)
{
    int folder = open(inner, O_PATH | O_DIRECTORY | O_CLOEXEC);
    fw_identity below = {0};
    bool found = false;
    for (int depth = 0; folder >= 0 && depth < DEPTH_LIMIT; depth++) {
        struct stat info;
        if (fstat(folder, &info) != 0)
            break;
        const fw_identity here = identity_from(&info);
        found = fw_identity_equal(&here, outer);
        if (found || fw_identity_equal(&here, &below)) /* the root is its own parent */
            break;
        below = here;
        folder = step_up(folder);
    }
    if (folder >= 0)
        close(folder);
    return found;
}

bool fw_is_mount_point(const char *path, const char *parent)
{
    struct statx info;
    if (statx(AT_FDCWD, path, 0, STATX_BASIC_STATS, &info) == 0 &&
        (info.stx_attributes_mask & STATX_ATTR_MOUNT_ROOT) != 0)
        return (info.stx_attributes & STATX_ATTR_MOUNT_ROOT) != 0;
    const fw_identity here = fw_identity_of(path), above = fw_identity_of(parent);
    return here.exists && above.exists && here.device != above.device;
}
