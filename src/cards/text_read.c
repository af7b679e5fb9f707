#include "cards/text_read.h"

#include "fault/memory.h"

#include <errno.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

static fw_status read_open(FILE *file, const char *path, size_t limit, char **out, size_t *size,
                           fw_fault *fault)
{
    size_t capacity = 0, used = 0;
    for (;;) {
        FW_TRY(fw_grow((void **)out, &capacity, used + 4096, 1, "file", fault));
        size_t got = fread(*out + used, 1, capacity - used - 1, file);
        used += got;
        if (used > limit)
            return fw_fault_set(fault, FW_INPUT, "%s: larger than %zu bytes; is it the right file?",
                                path, limit);
        if (got == 0)
            break;
    }
    if (ferror(file))
        return fw_fault_set(fault, FW_INPUT, "%s: cannot be read (%s)", path, strerror(errno));
    (*out)[used] = '\0';
    *size = used;
    return FW_OK;
}

fw_status fw_text_read(const char *path, size_t limit, char **out, size_t *size, fw_fault *fault)
{
    *out = NULL;
    *size = 0;
    struct stat what;
    if (stat(path, &what) != 0)
        return fw_fault_set(fault, FW_INPUT, "%s: cannot be opened (%s); check the path", path,
                            strerror(errno));
    if (!S_ISREG(what.st_mode)) /* opening a pipe would wait for ever */
        return fw_fault_set(fault, FW_INPUT, "%s: no plain file; name a file", path);
    FILE *file = fopen(path, "rb");
    if (file == NULL)
        return fw_fault_set(fault, FW_INPUT, "%s: cannot be opened (%s); check its permissions",
                            path, strerror(errno));
    fw_status status = read_open(file, path, limit, out, size, fault);
    fclose(file);
    if (status != FW_OK) {
        free(*out);
        *out = NULL;
    }
    return status;
}

/* Length of the UTF-8 sequence that a first byte announces, 0 when it cannot be one. */
static size_t announced(uint8_t first)
{
    if (first < 0x80)
        return 1;
    if (first >= 0xC2 && first < 0xE0)
        return 2;
    if (first >= 0xE0 && first < 0xF0)
        return 3;
    return first >= 0xF0 && first < 0xF5 ? 4 : 0;
}

/* Range of the second byte: it excludes overlong forms, surrogates and what is above U+10FFFF
 * (The Unicode Standard, table 3-7). */
static bool second_fits(uint8_t first, uint8_t second)
{
    uint8_t low = first == 0xE0 ? 0xA0 : first == 0xF0 ? 0x90 : 0x80;
    uint8_t high = first == 0xED ? 0x9F : first == 0xF4 ? 0x8F : 0xBF;
    return second >= low && second <= high;
}

/* Length of the character at bytes, 0 when it is none. */
static size_t character(const uint8_t *bytes, size_t left)
{
    size_t length = announced(bytes[0]);
    if (length == 0 || length > left || (length > 1 && !second_fits(bytes[0], bytes[1])))
        return 0;
    for (size_t i = 2; i < length; i++) {
        if ((bytes[i] & 0xC0) != 0x80)
            return 0;
    }
    bool control = bytes[0] < 0x20 || bytes[0] == 0x7F || (bytes[0] == 0xC2 && bytes[1] < 0xA0);
    return control && bytes[0] != '\n' && bytes[0] != '\r' ? 0 : length;
}

size_t fw_text_valid(const char *text, size_t size)
{
    size_t at = 0;
    while (at < size) {
        size_t length = character((const uint8_t *)text + at, size - at);
        if (length == 0)
            return at;
        at += length;
    }
    return size;
}

bool fw_text_is_line(const char *text, size_t size)
{
    return fw_text_valid(text, size) == size && memchr(text, '\n', size) == NULL &&
           memchr(text, '\r', size) == NULL;
}
