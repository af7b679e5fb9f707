#include "stack/layer_names.h"

#include <string.h>

enum { DIGITS_LIMIT = 18 }; /* 10^18 - 1 fits in int64_t */

static bool is_digit(char c)
{
    return c >= '0' && c <= '9';
}

fw_status fw_name_pattern_read(const char *text, fw_name_pattern *pattern, fw_fault *fault)
{
    *pattern = (fw_name_pattern){.any = text == NULL || *text == '\0'};
    if (pattern->any)
        return FW_OK;
    const size_t prefix = strcspn(text, "#"), marks = strspn(text + prefix, "#");
    const char *suffix = text + prefix + marks;
    if (marks == 0 || strchr(suffix, '#') != NULL || strchr(text, '/') != NULL)
        return fw_fault_set(fault, FW_INPUT,
                            "bad pattern for layer names, stack.names: \"%s\", give a file name "
                            "with one run of # for the number, such as layer_####.png",
                            text);
    pattern->prefix = text;
    pattern->prefix_size = prefix;
    pattern->suffix = suffix;
    pattern->suffix_size = strlen(suffix);
    return FW_OK;
}

static bool ends_in_png(const char *name, size_t size)
{
    static const char extension[] = ".png";
    if (size < 4)
        return false;
    for (size_t i = 0; i < 4; i++) {
        const char c = name[size - 4 + i];
        const char lower = c >= 'A' && c <= 'Z' ? (char)(c - 'A' + 'a') : c;
        if (lower != extension[i])
            return false;
    }
    return true;
}

/* Finds where the number stands. */
static bool find_last_number(const char *name, fw_layer_name *parts)
{
    const size_t size = strlen(name);
    if (name[0] == '.' || !ends_in_png(name, size))
        return false;
    size_t end = size - 4;
    while (end > 0 && !is_digit(name[end - 1]))
        end--;
    size_t start = end;
    while (start > 0 && is_digit(name[start - 1]))
        start--;
    parts->prefix_size = start;
    parts->digits = end - start;
    return parts->digits > 0;
}

static bool find_between(const fw_name_pattern *pattern, const char *name, fw_layer_name *parts)
{
    const size_t size = strlen(name), fixed = pattern->prefix_size + pattern->suffix_size;
    if (size <= fixed || memcmp(name, pattern->prefix, pattern->prefix_size) != 0 ||
        memcmp(name + size - pattern->suffix_size, pattern->suffix, pattern->suffix_size) != 0)
        return false;
    parts->prefix_size = pattern->prefix_size;
    parts->digits = size - fixed;
    return true;
}

bool fw_layer_name_read(const fw_name_pattern *pattern, const char *name, fw_layer_name *parts)
{
    const bool found =
        pattern->any ? find_last_number(name, parts) : find_between(pattern, name, parts);
    if (!found || parts->digits > DIGITS_LIMIT)
        return false;
    parts->number = 0;
    for (size_t i = 0; i < parts->digits; i++) {
        const char c = name[parts->prefix_size + i];
        if (!is_digit(c))
            return false;
        parts->number = 10 * parts->number + (c - '0');
    }
    return true;
}
