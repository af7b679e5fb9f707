#define _GNU_SOURCE /* renameat2, openat, getrandom */

#include "stack/staging.h"

#include "stack/files.h"
#include "stack/output_rules.h"
#include "stack/tree.h"

#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <sys/file.h>
#include <sys/random.h>
#include <sys/stat.h>
#include <unistd.h>

enum { RANDOM_LETTERS = 6, TRIES = 100 };

static const char part_mark[] = ".part-";

/* ".NAME.part-XXXXXX"; names are only to differ, the exclusive mkdir decides. */
static void make_name(const char *name, char staging[FW_STAGING_NAME])
{
    static const char letter[] = "abcdefghijklmnopqrstuvwxyz012345"; /* 32: no bias */
    uint8_t random[RANDOM_LETTERS] = {0};
    char tail[RANDOM_LETTERS + 1] = "";
    (void)!getrandom(random, sizeof random, 0);
    for (int i = 0; i < RANDOM_LETTERS; i++)
        tail[i] = letter[random[i] % 32];
    (void)snprintf(staging, FW_STAGING_NAME, ".%s%s%s", name, part_mark, tail);
}

static bool is_staging_of(const char *name, const char *entry)
{
    const size_t size = strlen(name), mark = sizeof part_mark - 1;
    return strlen(entry) == 1 + size + mark + RANDOM_LETTERS && entry[0] == '.' &&
           memcmp(entry + 1, name, size) == 0 && memcmp(entry + 1 + size, part_mark, mark) == 0;
}

static int open_folder(int parent, const char *name)
{
    return openat(parent, name, O_RDONLY | O_DIRECTORY | O_NOFOLLOW | O_CLOEXEC);
}

static bool same_file(int descriptor, int parent, const char *name)
{
    struct stat a, b;
    return fstat(descriptor, &a) == 0 && fstatat(parent, name, &b, AT_SYMLINK_NOFOLLOW) == 0 &&
           a.st_dev == b.st_dev && a.st_ino == b.st_ino;
}

/* The file that carries the lock goes last, so that a removal that is cut short can be resumed by
 * the next run. */
static void remove_folder(int parent, const char *name)
{
    (void)fw_tree_remove(parent, name, FW_SUMS_FILE);
}

/* With the lock in hand and the folder still under its staging name, no living process owns it: an
 * owner keeps the lock until after the rename. */
static void remove_if_free(int parent, const char *entry, int folder)
{
    const int sums = openat(folder, FW_SUMS_FILE, O_RDWR | O_NOFOLLOW | O_CLOEXEC | O_NONBLOCK);
    if (sums < 0) {
        unlinkat(parent, entry, AT_REMOVEDIR); /* died before the lock was made: empty */
        return;
    }
    if (flock(sums, LOCK_EX | LOCK_NB) == 0 && same_file(folder, parent, entry))
        remove_folder(parent, entry);
    close(sums);
}

static void remove_stale(int parent, const char *entry)
{
    struct stat info;
    const int folder = open_folder(parent, entry);
    if (folder < 0)
        return;
    if (fstat(folder, &info) == 0 && info.st_uid == geteuid())
        remove_if_free(parent, entry, folder);
    close(folder);
}

/* Best effort: what cannot be listed or removed stays. */
static void remove_all_stale(int parent, const char *name)
{
    const int folder = openat(parent, ".", O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    DIR *stream = folder >= 0 ? fdopendir(folder) : NULL;
    if (stream == NULL) {
        if (folder >= 0)
            close(folder);
        return;
    }
    const struct dirent *item;
    while ((item = readdir(stream)) != NULL) {
        if (is_staging_of(name, item->d_name))
            remove_stale(parent, item->d_name);
    }
    closedir(stream);
}

/* A file system without locks: nobody can take the folder for a dead one there either. */
static bool no_locks(int error)
{
    return error == ENOLCK || error == ENOTSUP || error == ENOSYS;
}

/* Opens and locks the folder just made. A cleaner may have taken it for a dead one between these
 * steps: EEXIST then, to try another name. Returns an errno value, 0 = ours. */
static int lock_new(fw_staging *staging)
{
    staging->folder = open_folder(staging->parent, staging->name);
    if (staging->folder < 0)
        return errno == ENOENT ? EEXIST : errno;
    staging->sums =
        openat(staging->folder, FW_SUMS_FILE, O_RDWR | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
    if (staging->sums < 0)
        return errno == ENOENT ? EEXIST : errno;
    if (flock(staging->sums, LOCK_EX | LOCK_NB) != 0 && !no_locks(errno))
        return errno == EWOULDBLOCK ? EEXIST : errno;
    return same_file(staging->sums, staging->folder, FW_SUMS_FILE) ? 0 : EEXIST;
}

static void close_new(fw_staging *staging)
{
    if (staging->sums >= 0)
        close(staging->sums);
    if (staging->folder >= 0)
        close(staging->folder);
    staging->sums = staging->folder = -1;
}

static fw_status make_folder(fw_staging *staging, const char *parent, const char *name,
                             fw_fault *fault)
{
    int error = EEXIST;
    for (int i = 0; i < TRIES && error == EEXIST; i++) {
        make_name(name, staging->name);
        error = mkdirat(staging->parent, staging->name, 0777) == 0 ? lock_new(staging) : errno;
        if (error != 0)
            close_new(staging);
        if (error != 0 && error != EEXIST) /* a full disk, say: take back what was made */
            remove_folder(staging->parent, staging->name);
    }
    if (error == 0)
        return FW_OK;
    staging->name[0] = '\0';
    return fw_file_fault(error, "cannot make the output in", parent, fault);
}

fw_status fw_staging_begin(fw_staging *staging, const char *parent, const char *name,
                           fw_fault *fault)
{
    *staging = (fw_staging){.parent = -1, .folder = -1, .sums = -1};
    staging->parent = open(parent, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (staging->parent < 0)
        return fw_file_fault(errno, "cannot make the output in", parent, fault);
    remove_all_stale(staging->parent, name);
    return make_folder(staging, parent, name, fault);
}

static bool flag_unknown(int error)
{
    return error == EINVAL || error == ENOSYS || error == ENOTSUP;
}

/* Renames unless `to` exists. The fallback can only ever overwrite an empty folder that came up
 * between the two calls. Returns an errno value, 0 = done. */
static int rename_new(int folder, const char *from, const char *to)
{
    if (renameat2(folder, from, folder, to, RENAME_NOREPLACE) == 0)
        return 0;
    if (!flag_unknown(errno))
        return errno;
    struct stat info;
    if (fstatat(folder, to, &info, AT_SYMLINK_NOFOLLOW) == 0)
        return EEXIST;
    if (errno != ENOENT)
        return errno;
    return renameat(folder, from, folder, to) == 0 ? 0 : errno;
}

static fw_status publish_fault(int error, const char *path, fw_fault *fault)
{
    if (error == EEXIST || error == ENOTEMPTY)
        return fw_fault_set(fault, FW_INPUT,
                            "the output came into being meanwhile, %s, name a new folder", path);
    return fw_file_fault(error, "cannot publish the output", path, fault);
}

fw_status fw_staging_publish(fw_staging *staging, const char *name, const char *path,
                             fw_fault *fault)
{
    const int error = rename_new(staging->parent, staging->name, name);
    if (error != 0)
        return publish_fault(error, path, fault);
    staging->name[0] = '\0';
    return FW_OK;
}

/* Without exchange: the old folder goes aside, under a staging name, and comes back if the new one
 * cannot take its place. */
static int replace_in_steps(fw_staging *staging, const char *name, char aside[FW_STAGING_NAME])
{
    int error = EEXIST;
    for (int i = 0; i < TRIES && error == EEXIST; i++) {
        make_name(name, aside);
        error = rename_new(staging->parent, name, aside);
    }
    if (error != 0)
        return error;
    error = rename_new(staging->parent, staging->name, name);
    if (error != 0)
        (void)rename_new(staging->parent, aside, name);
    return error;
}

fw_status fw_staging_replace(fw_staging *staging, const char *name, const char *path,
                             fw_fault *fault)
{
    char old[FW_STAGING_NAME];
    memcpy(old, staging->name, sizeof old);
    int error = 0;
    if (renameat2(staging->parent, staging->name, staging->parent, name, RENAME_EXCHANGE) != 0)
        error = errno;
    if (flag_unknown(error))
        error = replace_in_steps(staging, name, old);
    if (error != 0)
        return publish_fault(error, path, fault);
    staging->name[0] = '\0';
    remove_folder(staging->parent, old);
    return FW_OK;
}

void fw_staging_end(fw_staging *staging)
{
    if (staging->name[0] != '\0' && staging->folder >= 0)
        remove_folder(staging->parent, staging->name);
    close_new(staging);
    if (staging->parent >= 0)
        close(staging->parent);
    *staging = (fw_staging){.parent = -1, .folder = -1, .sums = -1};
}
