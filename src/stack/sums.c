#include "stack/sums.h"

#include "fault/memory.h"

#include <stdlib.h>
#include <string.h>

static const char holder[] = "list of digests";

static fw_status add(fw_sums *sums, const char *path, size_t size, const uint8_t sha256[FW_SHA256],
                     fw_fault *fault)
{
    FW_TRY(fw_grow((void **)&sums->sum, &sums->capacity, sums->count + 1, sizeof *sums->sum, holder,
                   fault));
    fw_sum *sum = &sums->sum[sums->count];
    FW_TRY(fw_allocate((void **)&sum->path, size + 1, 1, holder, fault));
    memcpy(sum->path, path, size);
    memcpy(sum->sha256, sha256, FW_SHA256);
    sums->count++;
    return FW_OK;
}

fw_status fw_sums_add(fw_sums *sums, const char *path, const uint8_t sha256[FW_SHA256],
                      fw_fault *fault)
{
    return add(sums, path, strlen(path), sha256, fault);
}

static fw_status rename_one(fw_sum *sum, size_t from_size, const char *to, fw_fault *fault)
{
    const char *rest = sum->path + from_size;
    const size_t to_size = strlen(to), rest_size = strlen(rest) + 1;
    char *path;
    FW_TRY(fw_allocate((void **)&path, to_size + rest_size, 1, holder, fault));
    memcpy(path, to, to_size);
    memcpy(path + to_size, rest, rest_size);
    free(sum->path);
    sum->path = path;
    return FW_OK;
}

fw_status fw_sums_rename(fw_sums *sums, const char *from, const char *to, fw_fault *fault)
{
    const size_t size = strlen(from);
    for (size_t i = 0; i < sums->count; i++) {
        const char *path = sums->sum[i].path;
        if (strncmp(path, from, size) == 0 && path[size] == '/')
            FW_TRY(rename_one(&sums->sum[i], size, to, fault));
    }
    return FW_OK;
}

static int by_path(const void *left, const void *right)
{
    const fw_sum *a = left, *b = right;
    return strcmp(a->path, b->path);
}

static void sort(fw_sums *sums)
{
    if (sums->count > 0)
        qsort(sums->sum, sums->count, sizeof *sums->sum, by_path);
}

fw_status fw_sums_write(fw_sums *sums, fw_bytes *out, fw_fault *fault)
{
    sort(sums);
    for (size_t i = 0; i < sums->count; i++) {
        char hex[FW_SHA256_HEX];
        fw_sha256_hex(sums->sum[i].sha256, hex);
        FW_TRY(fw_bytes_append(out, hex, FW_SHA256_HEX - 1, holder, fault));
        FW_TRY(fw_bytes_append(out, "  ", 2, holder, fault));
        FW_TRY(fw_bytes_append(out, sums->sum[i].path, strlen(sums->sum[i].path), holder, fault));
        FW_TRY(fw_bytes_append(out, "\n", 1, holder, fault));
    }
    return FW_OK;
}

static int hex_value(uint8_t c)
{
    if (c >= '0' && c <= '9')
        return c - '0';
    return c >= 'a' && c <= 'f' ? c - 'a' + 10 : -1;
}

static bool read_hex(const uint8_t *text, uint8_t sha256[FW_SHA256])
{
    for (int i = 0; i < FW_SHA256; i++) {
        const int high = hex_value(text[2 * i]), low = hex_value(text[2 * i + 1]);
        if (high < 0 || low < 0)
            return false;
        sha256[i] = (uint8_t)(high << 4 | low);
    }
    return true;
}

/* One line without its newline: 64 hex digits, two spaces, a path. */
static bool read_line(const uint8_t *line, size_t size, uint8_t sha256[FW_SHA256])
{
    const size_t path = FW_SHA256_HEX + 1;
    return size > path && read_hex(line, sha256) && line[path - 2] == ' ' &&
           line[path - 1] == ' ' && memchr(line, '\0', size) == NULL;
}

fw_status fw_sums_read(const uint8_t *text, size_t size, fw_sums *sums, bool *well_formed,
                       fw_fault *fault)
{
    *well_formed = true;
    while (size > 0 && *well_formed) {
        const uint8_t *newline = memchr(text, '\n', size);
        const size_t line = newline != NULL ? (size_t)(newline - text) : size;
        uint8_t sha256[FW_SHA256];
        *well_formed = newline != NULL && read_line(text, line, sha256);
        if (!*well_formed)
            break;
        const size_t path = FW_SHA256_HEX + 1;
        FW_TRY(add(sums, (const char *)text + path, line - path, sha256, fault));
        text += line + 1;
        size -= line + 1;
    }
    sort(sums);
    return FW_OK;
}

/* Index of the first path that is not less than `path`, of which `size` bytes count. */
static size_t lower_bound(const fw_sums *sums, const char *path, size_t size)
{
    size_t low = 0, high = sums->count;
    while (low < high) {
        const size_t middle = low + (high - low) / 2;
        if (strncmp(sums->sum[middle].path, path, size) < 0)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

bool fw_sums_has(const fw_sums *sums, const char *path)
{
    const size_t at = lower_bound(sums, path, strlen(path) + 1);
    return at < sums->count && strcmp(sums->sum[at].path, path) == 0;
}

bool fw_sums_has_below(const fw_sums *sums, const char *path)
{
    const size_t size = strlen(path);
    for (size_t at = lower_bound(sums, path, size); at < sums->count; at++) {
        if (strncmp(sums->sum[at].path, path, size) != 0)
            return false;
        if (sums->sum[at].path[size] == '/')
            return true;
    }
    return false;
}

void fw_sums_free(fw_sums *sums)
{
    for (size_t i = 0; i < sums->count; i++)
        free(sums->sum[i].path);
    free(sums->sum);
    *sums = (fw_sums){0};
}
