#define _GNU_SOURCE /* openat, syncfs */

#include "stack/output.h"

#include "fault/memory.h"
#include "stack/files.h"
#include "stack/output_rules.h"
#include "stack/staging.h"
#include "stack/sums.h"

#include <assert.h>
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

/* Pieces of a report are gathered up to this many bytes. */
enum { GATHER = 64 * 1024 };

static const char holder[] = "output folder";

struct fw_output {
    char *path; /* as given */
    fw_place place;
    bool replace;
    fw_staging staging;
    char *staging_path;
    fw_sums sums;
    fw_bytes copied; /* buffer for files that are copied */
    /* the file that is being written in pieces */
    int file; /* -1 = none */
    char *file_path;
    fw_hash *hash;
    fw_bytes gathered;
};

static fw_status copy_text(const char *text, char **copy, fw_fault *fault)
{
    const size_t size = strlen(text) + 1;
    FW_TRY(fw_allocate((void **)copy, size, 1, holder, fault));
    memcpy(*copy, text, size);
    return FW_OK;
}

static fw_status begin(fw_output *output, const fw_output_rules *rules, fw_fault *fault)
{
    FW_TRY(copy_text(rules->path, &output->path, fault));
    FW_TRY(fw_place_split(rules->path, &output->place, fault));
    FW_TRY(fw_output_check_place(rules, &output->place, fault));
    output->replace = rules->replace;
    FW_TRY(fw_staging_begin(&output->staging, output->place.parent, output->place.name, fault));
    return fw_place_join(output->place.parent, output->staging.name, &output->staging_path, fault);
}

fw_status fw_output_begin(const fw_output_rules *rules, fw_output **out, fw_fault *fault)
{
    *out = NULL;
    fw_output *output;
    FW_TRY(fw_allocate((void **)&output, 1, sizeof *output, holder, fault));
    output->file = -1;
    output->staging = (fw_staging){.parent = -1, .folder = -1, .sums = -1};
    fw_status status = begin(output, rules, fault);
    if (status == FW_OK)
        *out = output;
    else
        fw_output_close(output);
    return status;
}

const char *fw_output_staging(const fw_output *output)
{
    return output->staging_path;
}

fw_status fw_output_folder(fw_output *output, const char *name, fw_fault *fault)
{
    if (mkdirat(output->staging.folder, name, 0777) != 0)
        return fw_file_fault(errno, "cannot make a folder of the output", name, fault);
    return FW_OK;
}

fw_status fw_output_rename(fw_output *output, const char *from, const char *to, fw_fault *fault)
{
    const int folder = output->staging.folder;
    if (renameat(folder, from, folder, to) != 0)
        return fw_file_fault(errno, "cannot rename a folder of the output", from, fault);
    return fw_sums_rename(&output->sums, from, to, fault);
}

/* Opens a new file; *file is its descriptor. */
static fw_status create(const fw_output *output, const char *path, int *file, fw_fault *fault)
{
    *file = openat(output->staging.folder, path,
                   O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC | O_NOFOLLOW, 0666);
    return *file >= 0 ? FW_OK : fw_file_fault(errno, "cannot write", path, fault);
}

/* A network file system may tell only now that the disk is full. */
static fw_status close_written(int file, const char *path, fw_status status, fw_fault *fault)
{
    if (close(file) != 0 && status == FW_OK)
        return fw_file_fault(errno, "cannot write", path, fault);
    return status;
}

static fw_status write_known(fw_output *output, const char *path, const void *bytes, size_t size,
                             const uint8_t sha256[FW_SHA256], fw_fault *fault)
{
    int file;
    FW_TRY(create(output, path, &file, fault));
    fw_status status = fw_file_write(file, bytes, size, path, fault);
    FW_TRY(close_written(file, path, status, fault));
    return fw_sums_add(&output->sums, path, sha256, fault);
}

fw_status fw_output_write(fw_output *output, const char *path, const void *bytes, size_t size,
                          uint8_t *sha256, fw_fault *fault)
{
    uint8_t digest[FW_SHA256];
    FW_TRY(fw_sha256(bytes, size, digest, fault));
    if (sha256 != NULL)
        memcpy(sha256, digest, FW_SHA256);
    return write_known(output, path, bytes, size, digest, fault);
}

fw_status fw_output_copy(fw_output *output, const char *path, const fw_stack *stack, int32_t index,
                         const uint8_t sha256[FW_SHA256], fw_fault *fault)
{
    fw_bytes *bytes = &output->copied;
    uint8_t digest[FW_SHA256];
    FW_TRY(fw_stack_read(stack, index, bytes, fault));
    FW_TRY(fw_sha256(bytes->data, bytes->size, digest, fault));
    if (memcmp(digest, sha256, FW_SHA256) != 0)
        return fw_fault_set(fault, FW_INPUT,
                            "the stack changed during the work, %s, leave it alone and run again",
                            fw_stack_label(stack, index));
    return write_known(output, path, bytes->data, bytes->size, digest, fault);
}

/* Lets go of the file in work, finished or not. Returns what close said. */
static fw_status drop_file(fw_output *output, fw_status status, fw_fault *fault)
{
    if (output->file >= 0)
        status = close_written(output->file, output->file_path, status, fault);
    output->file = -1;
    fw_hash_close(output->hash);
    output->hash = NULL;
    free(output->file_path);
    output->file_path = NULL;
    output->gathered.size = 0;
    return status;
}

static fw_status open_file(fw_output *output, const char *path, fw_fault *fault)
{
    FW_TRY(copy_text(path, &output->file_path, fault));
    FW_TRY(fw_hash_open(&output->hash, fault));
    return create(output, path, &output->file, fault);
}

fw_status fw_output_open_file(fw_output *output, const char *path, fw_fault *fault)
{
    assert(output->file < 0);
    fw_status status = open_file(output, path, fault);
    return status == FW_OK ? FW_OK : drop_file(output, status, NULL);
}

static fw_status flush(fw_output *output, fw_fault *fault)
{
    const fw_bytes *bytes = &output->gathered;
    FW_TRY(fw_hash_add(output->hash, bytes->data, bytes->size, fault));
    FW_TRY(fw_file_write(output->file, bytes->data, bytes->size, output->file_path, fault));
    output->gathered.size = 0;
    return FW_OK;
}

fw_status fw_output_append(fw_output *output, const void *bytes, size_t size, fw_fault *fault)
{
    assert(output->file >= 0);
    const uint8_t *from = bytes;
    while (size > 0) {
        const size_t room = GATHER - output->gathered.size, part = size < room ? size : room;
        FW_TRY(fw_bytes_append(&output->gathered, from, part, holder, fault));
        if (output->gathered.size == GATHER)
            FW_TRY(flush(output, fault));
        from += part;
        size -= part;
    }
    return FW_OK;
}

static fw_status finish_file(fw_output *output, fw_fault *fault)
{
    uint8_t sha256[FW_SHA256];
    FW_TRY(flush(output, fault));
    FW_TRY(fw_hash_finish(output->hash, sha256, fault));
    return fw_sums_add(&output->sums, output->file_path, sha256, fault);
}

fw_status fw_output_finish_file(fw_output *output, fw_fault *fault)
{
    assert(output->file >= 0);
    return drop_file(output, finish_file(output, fault), fault);
}

static fw_status write_sums(fw_output *output, const char *path, fw_sums *sums, fw_fault *fault)
{
    fw_bytes text = {0};
    fw_status status = fw_sums_write(sums, &text, fault);
    if (status == FW_OK)
        status = fw_output_write(output, path, text.data, text.size, NULL, fault);
    fw_bytes_free(&text);
    return status;
}

fw_status fw_output_input_sums(fw_output *output, const fw_stack *stack,
                               const uint8_t (*sha256)[FW_SHA256], fw_fault *fault)
{
    fw_sums sums = {0};
    fw_status status = FW_OK;
    for (int32_t i = 0; i < fw_stack_count(stack) && status == FW_OK; i++)
        status = fw_sums_add(&sums, fw_stack_name(stack, i), sha256[i], fault);
    if (status == FW_OK)
        status = write_sums(output, "INPUT-SHA256SUMS", &sums, fault);
    fw_sums_free(&sums);
    return status;
}

/* Into the file that carries the lock and stays open. */
static fw_status write_own_sums(fw_output *output, fw_fault *fault)
{
    fw_bytes text = {0};
    fw_status status = fw_sums_write(&output->sums, &text, fault);
    if (status == FW_OK)
        status = fw_file_write(output->staging.sums, text.data, text.size, FW_SUMS_FILE, fault);
    fw_bytes_free(&text);
    return status;
}

/* What is to be replaced is looked at again: hours may have passed since the first check. */
static fw_status replace_or_publish(fw_output *output, fw_fault *fault)
{
    const char *name = output->place.name;
    struct stat info;
    const bool exists = fstatat(output->staging.parent, name, &info, AT_SYMLINK_NOFOLLOW) == 0;
    if (!output->replace || !exists)
        return fw_staging_publish(&output->staging, name, output->path, fault);
    char *path;
    FW_TRY(fw_place_join(output->place.parent, name, &path, fault));
    fw_status status = fw_output_check_ours(path, fault);
    free(path);
    FW_TRY(status);
    return fw_staging_replace(&output->staging, name, output->path, fault);
}

fw_status fw_output_publish(fw_output *output, fw_fault *fault)
{
    assert(output->file < 0);
    FW_TRY(write_own_sums(output, fault));
    if (syncfs(output->staging.folder) != 0)
        return fw_file_fault(errno, "cannot write the output to disk", output->path, fault);
    return replace_or_publish(output, fault);
}

void fw_output_close(fw_output *output)
{
    if (output == NULL)
        return;
    (void)drop_file(output, FW_OK, NULL);
    fw_staging_end(&output->staging);
    fw_place_free(&output->place);
    fw_sums_free(&output->sums);
    fw_bytes_free(&output->copied);
    fw_bytes_free(&output->gathered);
    free(output->staging_path);
    free(output->path);
    free(output);
}
