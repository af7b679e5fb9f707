/* Where an output may go: everything here only looks, and runs before any work. */
#define _GNU_SOURCE /* faccessat with AT_EACCESS */

#include "stack/output_rules.h"

#include "fault/memory.h"
#include "stack/files.h"
#include "stack/tree.h"

#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

/* Largest report or list of digests that is looked into before --replace. */
enum { REPORT_LIMIT = 512 * 1024 * 1024 };

static fw_status refuse(const fw_output_rules *rules, const char *what, const char *advice,
                        fw_fault *fault)
{
    return fw_fault_set(fault, FW_INPUT, "%s, %s, %s", what, rules->path, advice);
}

/* The real folder of a file, behind links. NULL when there is no such file; owned by the caller. */
static char *real_folder_of(const char *file)
{
    char *real = realpath(file, NULL);
    if (real == NULL)
        return NULL;
    char *slash = strrchr(real, '/');
    slash[slash == real ? 1 : 0] = '\0';
    return real;
}

/* Both folders count: the one where the path names it, and the one where it really lies. */
static fw_status file_within(const char *file, const fw_identity *outer, bool *within,
                             fw_fault *fault)
{
    fw_place place;
    FW_TRY(fw_place_split(file, &place, fault));
    char *real = real_folder_of(file);
    *within =
        fw_folder_within(place.parent, outer) || (real != NULL && fw_folder_within(real, outer));
    free(real);
    fw_place_free(&place);
    return FW_OK;
}

static fw_status check_stack(const fw_output_rules *rules, const fw_place *place,
                             const fw_identity *out, fw_fault *fault)
{
    if (rules->stack == NULL)
        return FW_OK;
    static const char advice[] = "name a folder elsewhere";
    const fw_identity stack = fw_identity_of(rules->stack);
    if (!stack.exists)
        return fw_file_fault(ENOENT, "cannot open the stack", rules->stack, fault);
    if (fw_identity_equal(out, &stack))
        return refuse(rules, "the output is the stack itself", advice, fault);
    if (fw_folder_within(place->parent, &stack) || fw_folder_within(rules->path, &stack))
        return refuse(rules, "the output lies inside the stack", advice, fault);
    bool within = false;
    if (out->exists && stack.is_folder)
        within = fw_folder_within(rules->stack, out);
    else if (out->exists)
        FW_TRY(file_within(rules->stack, out, &within, fault));
    return within ? refuse(rules, "the output holds the stack", advice, fault) : FW_OK;
}

static fw_status check_protected(const fw_output_rules *rules, const fw_identity *out,
                                 fw_fault *fault)
{
    if (!out->exists)
        return FW_OK;
    if (fw_folder_within(".", out))
        return refuse(rules, "the output is or holds the current folder", "name a folder elsewhere",
                      fault);
    for (size_t i = 0; i < rules->protect_count; i++) {
        bool within;
        FW_TRY(file_within(rules->protect[i], out, &within, fault));
        if (within)
            return fw_fault_set(fault, FW_INPUT,
                                "the output is or holds the folder of %s, %s, name a folder "
                                "elsewhere",
                                rules->protect[i], rules->path);
    }
    return FW_OK;
}

static const uint8_t *skip_blanks(const uint8_t *at, const uint8_t *end)
{
    while (at < end && (*at == ' ' || *at == '\t' || *at == '\n' || *at == '\r'))
        at++;
    return at;
}

static bool begins(const uint8_t *at, const uint8_t *end, const char *text)
{
    const size_t size = strlen(text);
    return (size_t)(end - at) >= size && memcmp(at, text, size) == 0;
}

/* Looks for "format": "falsework-report/1" anywhere in the text: enough to tell our folder from
 * somebody else's. */
static bool carries_mark(const fw_bytes *report)
{
    static const char key[] = "\"format\"";
    const uint8_t *end = report->data + report->size;
    for (const uint8_t *at = report->data; at != NULL && at < end; at++) {
        at = memchr(at, '"', (size_t)(end - at));
        if (at == NULL)
            return false;
        if (!begins(at, end, key))
            continue;
        const uint8_t *value = skip_blanks(at + sizeof key - 1, end);
        if (value < end && *value == ':' &&
            begins(skip_blanks(value + 1, end), end, "\"falsework-report/1\""))
            return true;
    }
    return false;
}

static fw_status refuse_foreign(const char *path, const char *why, fw_fault *fault)
{
    return fw_fault_set(fault, FW_INPUT,
                        "will not replace a folder that is not an earlier output, %s %s, name a "
                        "new folder",
                        path, why);
}

static fw_status check_mark(int folder, const char *path, fw_fault *fault)
{
    fw_bytes report = {0};
    fw_status status = fw_file_read(folder, "report.json", path, REPORT_LIMIT, &report, NULL);
    const bool ours = status == FW_OK && carries_mark(&report);
    fw_bytes_free(&report);
    return ours ? FW_OK : refuse_foreign(path, "has no report.json of ours", fault);
}

static fw_status check_strangers(const char *path, const fw_sums *sums, fw_fault *fault)
{
    char *stranger;
    FW_TRY(fw_tree_stranger(path, sums, FW_SUMS_FILE, &stranger, fault));
    if (stranger == NULL)
        return FW_OK;
    fw_status status =
        fw_fault_set(fault, FW_INPUT,
                     "will not replace a folder with a stranger in it, %s/%s is not in its "
                     "SHA256SUMS, move it away or name a new folder",
                     path, stranger);
    free(stranger);
    return status;
}

static fw_status read_sums(int folder, const char *path, fw_sums *sums, fw_fault *fault)
{
    fw_bytes text = {0};
    bool well_formed = false;
    fw_status status = fw_file_read(folder, FW_SUMS_FILE, path, REPORT_LIMIT, &text, NULL);
    if (status != FW_OK)
        status = refuse_foreign(path, "has no SHA256SUMS", fault);
    else
        status = fw_sums_read(text.data, text.size, sums, &well_formed, fault);
    if (status == FW_OK && !well_formed)
        status = refuse_foreign(path, "has a SHA256SUMS that is not ours", fault);
    fw_bytes_free(&text);
    return status;
}

static fw_status check_ours(int folder, const char *path, fw_fault *fault)
{
    FW_TRY(check_mark(folder, path, fault));
    fw_sums sums = {0};
    fw_status status = read_sums(folder, path, &sums, fault);
    if (status == FW_OK)
        status = check_strangers(path, &sums, fault);
    fw_sums_free(&sums);
    return status;
}

fw_status fw_output_check_ours(const char *path, fw_fault *fault)
{
    const int folder = open(path, O_RDONLY | O_DIRECTORY | O_NOFOLLOW | O_CLOEXEC);
    if (folder < 0)
        return fw_file_fault(errno, "cannot open the output", path, fault);
    fw_status status = check_ours(folder, path, fault);
    close(folder);
    return status;
}

static fw_status check_existing(const fw_output_rules *rules, const fw_place *place,
                                fw_fault *fault)
{
    char *path; /* without a slash at the end, which would follow a link */
    FW_TRY(fw_place_join(place->parent, place->name, &path, fault));
    struct stat info;
    fw_status status = FW_OK;
    if (lstat(path, &info) != 0)
        status = errno == ENOENT ? FW_OK
                                 : fw_file_fault(errno, "cannot look at the output", path, fault);
    else if (S_ISDIR(info.st_mode) && fw_is_mount_point(path, place->parent))
        status = refuse(rules, "the output is a mount point", "name a folder inside it", fault);
    else if (!rules->replace)
        status = refuse(rules, "the output exists", "name a new folder or add --replace", fault);
    else if (!S_ISDIR(info.st_mode))
        status = refuse(rules, "the output exists and is not a folder", "name a new folder", fault);
    else
        status = fw_output_check_ours(path, fault);
    free(path);
    return status;
}

static fw_status check_parent(const fw_place *place, fw_fault *fault)
{
    const fw_identity parent = fw_identity_of(place->parent);
    if (!parent.exists || !parent.is_folder)
        return fw_file_fault(parent.exists ? ENOTDIR : ENOENT, "cannot make the output in",
                             place->parent, fault);
    if (faccessat(AT_FDCWD, place->parent, W_OK | X_OK, AT_EACCESS) != 0)
        return fw_file_fault(errno, "cannot make the output in", place->parent, fault);
    return FW_OK;
}

fw_status fw_output_check_place(const fw_output_rules *rules, const fw_place *place,
                                fw_fault *fault)
{
    const fw_identity out = fw_identity_of(rules->path);
    FW_TRY(check_stack(rules, place, &out, fault));
    FW_TRY(check_protected(rules, &out, fault));
    FW_TRY(check_existing(rules, place, fault));
    return check_parent(place, fault);
}

fw_status fw_output_check(const fw_output_rules *rules, fw_fault *fault)
{
    fw_place place;
    FW_TRY(fw_place_split(rules->path, &place, fault));
    fw_status status = fw_output_check_place(rules, &place, fault);
    fw_place_free(&place);
    return status;
}
