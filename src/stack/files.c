#define _GNU_SOURCE /* openat, fstatat, O_CLOEXEC */

#include "stack/files.h"

#include "fault/memory.h"

#include <errno.h>
#include <fcntl.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

static const char holder[] = "bytes of a file";

/* strerror is not thread-safe and follows the locale; these are the cases that users can mend. */
static const char *reason_of(int error)
{
    switch (error) {
    case ENOENT:
        return "it does not exist, check the path";
    case ENOTDIR:
        return "it is not a folder, name a folder";
    case EISDIR:
        return "it is a folder, name a file";
    case ELOOP:
        return "it is a link to itself, check the path";
    case ENAMETOOLONG:
        return "the name is too long, shorten it";
    case EACCES:
    case EPERM:
        return "no permission, change the access rights";
    case EROFS:
        return "the file system is read-only, choose another place";
    case ENOSPC:
    case EDQUOT:
    case EFBIG:
        return "the disk is full, free some space";
    case EMFILE:
    case ENFILE:
        return "too many open files, raise the limit";
    default:
        return "the file system failed, check the disk";
    }
}

static bool is_input(int error)
{
    return error == ENOENT || error == ENOTDIR || error == EISDIR || error == ELOOP ||
           error == ENAMETOOLONG;
}

fw_status fw_file_fault(int error, const char *what, const char *path, fw_fault *fault)
{
    if (error == ENOMEM)
        return fw_fault_memory(fault, holder);
    return fw_fault_set(fault, is_input(error) ? FW_INPUT : FW_MACHINE, "%s, %s, %s", what, path,
                        reason_of(error));
}

static fw_status refuse_special(const struct stat *info, const char *label, fw_fault *fault)
{
    if (S_ISREG(info->st_mode))
        return FW_OK;
    return fw_fault_set(fault, FW_INPUT, "not a plain file, %s, remove or rename it", label);
}

fw_status fw_file_size(int folder, const char *name, const char *label, size_t *size,
                       fw_fault *fault)
{
    struct stat info;
    if (fstatat(folder, name, &info, 0) != 0)
        return fw_file_fault(errno, "cannot read", label, fault);
    FW_TRY(refuse_special(&info, label, fault));
    *size = (size_t)info.st_size;
    return FW_OK;
}

static ssize_t read_some(int file, void *to, size_t size)
{
    ssize_t got;
    do
        got = read(file, to, size);
    while (got < 0 && errno == EINTR);
    return got;
}

/* One byte more than the size is asked for, so that a file that grows meanwhile is noticed. */
static fw_status read_all(int file, const char *label, size_t size, fw_bytes *out, fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&out->data, &out->capacity, size + 1, 1, holder, fault));
    while (out->size <= size) {
        const ssize_t got = read_some(file, out->data + out->size, size + 1 - out->size);
        if (got < 0)
            return fw_file_fault(errno, "cannot read", label, fault);
        if (got == 0)
            break;
        out->size += (size_t)got;
    }
    if (out->size != size)
        return fw_fault_set(fault, FW_INPUT, "file changed while it was read, %s, run again",
                            label);
    return FW_OK;
}

static fw_status read_open(int file, const char *label, size_t limit, fw_bytes *out,
                           fw_fault *fault)
{
    struct stat info;
    if (fstat(file, &info) != 0)
        return fw_file_fault(errno, "cannot read", label, fault);
    FW_TRY(refuse_special(&info, label, fault));
    if ((uintmax_t)info.st_size > limit)
        return fw_fault_set(fault, FW_INPUT, "file too large, %s has %lld bytes, at most %zu",
                            label, (long long)info.st_size, limit);
    return read_all(file, label, (size_t)info.st_size, out, fault);
}

/* O_NONBLOCK: a named pipe must not hang us before fstat can refuse it. */
fw_status fw_file_read(int folder, const char *name, const char *label, size_t limit, fw_bytes *out,
                       fw_fault *fault)
{
    out->size = 0;
    const int file = openat(folder, name, O_RDONLY | O_CLOEXEC | O_NONBLOCK | O_NOCTTY);
    if (file < 0)
        return fw_file_fault(errno, "cannot read", label, fault);
    fw_status status = read_open(file, label, limit, out, fault);
    close(file);
    return status;
}

fw_status fw_file_write(int file, const void *bytes, size_t size, const char *path, fw_fault *fault)
{
    const uint8_t *from = bytes;
    while (size > 0) {
        const ssize_t put = write(file, from, size);
        if (put < 0 && errno == EINTR)
            continue;
        if (put < 0)
            return fw_file_fault(errno, "cannot write", path, fault);
        from += put;
        size -= (size_t)put;
    }
    return FW_OK;
}
