#define _GNU_SOURCE /* openat, unlinkat, fdopendir, O_NOFOLLOW */

#include "stack/tree.h"

#include "fault/memory.h"
#include "stack/files.h"
#include "stack/place.h"

#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

/* Our folders are two deep; deeper ones are not ours. */
enum { DEPTH_LIMIT = 32 };

static const char holder[] = "names in a folder";

/* A folder's entries, without "." and "..": readdir while removing may skip some. */
typedef struct listing {
    char **name;
    size_t count, capacity;
} listing;

static void free_listing(listing *list)
{
    for (size_t i = 0; i < list->count; i++)
        free(list->name[i]);
    free(list->name);
    *list = (listing){0};
}

static fw_status copy_name(const char *name, char **copy, fw_fault *fault)
{
    const size_t size = strlen(name) + 1;
    FW_TRY(fw_allocate((void **)copy, size, 1, holder, fault));
    memcpy(*copy, name, size);
    return FW_OK;
}

static fw_status list_name(listing *list, const char *name, fw_fault *fault)
{
    if (strcmp(name, ".") == 0 || strcmp(name, "..") == 0)
        return FW_OK;
    FW_TRY(fw_grow((void **)&list->name, &list->capacity, list->count + 1, sizeof *list->name,
                   holder, fault));
    FW_TRY(copy_name(name, &list->name[list->count], fault));
    list->count++;
    return FW_OK;
}

static int by_name(const void *left, const void *right)
{
    return strcmp(*(char *const *)left, *(char *const *)right);
}

/* Lists an open folder, sorted. Takes the descriptor over. path is for the fault line. */
static fw_status list_folder(int folder, const char *path, listing *list, fw_fault *fault)
{
    DIR *stream = fdopendir(folder);
    if (stream == NULL) {
        const int error = errno;
        close(folder);
        return fw_file_fault(error, "cannot list", path, fault);
    }
    fw_status status = FW_OK;
    const struct dirent *item;
    while (status == FW_OK && (errno = 0, item = readdir(stream)) != NULL)
        status = list_name(list, item->d_name, fault);
    if (status == FW_OK && errno != 0)
        status = fw_file_fault(errno, "cannot list", path, fault);
    closedir(stream);
    if (list->count > 0)
        qsort(list->name, list->count, sizeof *list->name, by_name);
    return status;
}

static int open_folder(int parent, const char *name)
{
    return openat(parent, name, O_RDONLY | O_DIRECTORY | O_NOFOLLOW | O_CLOEXEC);
}

typedef struct search {
    const fw_sums *sums;
    const char *except;
    char **stranger;
    fw_fault *fault;
} search;

static fw_status search_folder(search *s, int folder, const char *path, int depth);

static fw_status search_entry(search *s, int folder, const char *name, const char *path, int depth)
{
    struct stat info;
    if (fstatat(folder, name, &info, AT_SYMLINK_NOFOLLOW) != 0)
        return fw_file_fault(errno, "cannot look at", path, s->fault);
    bool ours = false;
    if (S_ISREG(info.st_mode))
        ours = fw_sums_has(s->sums, path) || strcmp(path, s->except) == 0;
    else if (S_ISDIR(info.st_mode))
        ours = depth < DEPTH_LIMIT && fw_sums_has_below(s->sums, path);
    if (!ours)
        return copy_name(path, s->stranger, s->fault);
    if (!S_ISDIR(info.st_mode))
        return FW_OK;
    const int inner = open_folder(folder, name);
    if (inner < 0)
        return fw_file_fault(errno, "cannot open", path, s->fault);
    return search_folder(s, inner, path, depth + 1);
}

static fw_status search_listed(search *s, int folder, const listing *list, const char *path,
                               int depth)
{
    for (size_t i = 0; i < list->count && *s->stranger == NULL; i++) {
        char *inner = NULL;
        if (depth == 0)
            FW_TRY(copy_name(list->name[i], &inner, s->fault));
        else
            FW_TRY(fw_place_join(path, list->name[i], &inner, s->fault));
        fw_status status = search_entry(s, folder, list->name[i], inner, depth);
        free(inner);
        FW_TRY(status);
    }
    return FW_OK;
}

/* Takes the descriptor over. */
static fw_status search_folder(search *s, int folder, const char *path, int depth)
{
    listing list = {0};
    const int copy = fcntl(folder, F_DUPFD_CLOEXEC, 0);
    fw_status status = copy < 0 ? fw_file_fault(errno, "cannot list", path, s->fault)
                                : list_folder(copy, path, &list, s->fault);
    if (status == FW_OK)
        status = search_listed(s, folder, &list, path, depth);
    free_listing(&list);
    close(folder);
    return status;
}

fw_status fw_tree_stranger(const char *path, const fw_sums *sums, const char *except,
                           char **stranger, fw_fault *fault)
{
    *stranger = NULL;
    search s = {sums, except, stranger, fault};
    const int folder = open_folder(AT_FDCWD, path);
    if (folder < 0)
        return fw_file_fault(errno, "cannot open", path, fault);
    return search_folder(&s, folder, path, 0);
}

static bool remove_inside(int folder, dev_t device, const char *last, int depth);

/* last: what stays until the end, if it is a folder. */
static bool remove_entry(int parent, const char *name, dev_t device, const char *last, int depth)
{
    if (unlinkat(parent, name, 0) == 0 || errno == ENOENT)
        return true;
    if (errno != EISDIR && errno != EPERM)
        return false;
    const int folder = open_folder(parent, name);
    if (folder < 0)
        return false;
    const bool emptied = depth < DEPTH_LIMIT && remove_inside(folder, device, last, depth);
    close(folder);
    return emptied && unlinkat(parent, name, AT_REMOVEDIR) == 0;
}

static bool remove_listed(int folder, dev_t device, const listing *list, const char *last,
                          int depth)
{
    bool done = true;
    for (size_t i = 0; i < list->count; i++) {
        if (strcmp(list->name[i], last) != 0)
            done = remove_entry(folder, list->name[i], device, "", depth + 1) && done;
    }
    if (done && *last != '\0')
        done = unlinkat(folder, last, 0) == 0 || errno == ENOENT;
    return done;
}

static bool remove_inside(int folder, dev_t device, const char *last, int depth)
{
    struct stat info;
    if (fstat(folder, &info) != 0 || info.st_dev != device)
        return false;
    listing list = {0};
    const int copy = fcntl(folder, F_DUPFD_CLOEXEC, 0);
    const bool listed = copy >= 0 && list_folder(copy, "", &list, NULL) == FW_OK;
    const bool done = listed && remove_listed(folder, device, &list, last, depth);
    free_listing(&list);
    return done;
}

bool fw_tree_remove(int parent, const char *name, const char *last)
{
    struct stat info;
    if (fstatat(parent, name, &info, AT_SYMLINK_NOFOLLOW) != 0)
        return errno == ENOENT;
    return S_ISDIR(info.st_mode) && remove_entry(parent, name, info.st_dev, last, 0);
}
