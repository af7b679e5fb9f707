#define _GNU_SOURCE /* openat, fstatat, dirfd, O_CLOEXEC */

#include "stack/folder.h"

#include "fault/memory.h"
#include "stack/files.h"
#include "stack/layer_names.h"
#include "stack/place.h"

#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

enum { LAYERS_LIMIT = 1000000 };

static const char holder[] = "names of a stack";

typedef struct entry {
    char *label;      /* path of the stack, "/", file name; owned */
    const char *name; /* in label */
    fw_layer_name parts;
} entry;

struct fw_stack {
    char *path;
    int folder;   /* descriptor, -1 = none */
    entry *layer; /* [count], by number */
    size_t count, capacity;
};

static fw_status copy_text(const char *text, char **out, fw_fault *fault)
{
    const size_t size = strlen(text) + 1;
    FW_TRY(fw_allocate((void **)out, size, 1, holder, fault));
    memcpy(*out, text, size);
    return FW_OK;
}

static bool is_plain(const char *name)
{
    for (; *name != '\0'; name++) {
        if ((unsigned char)*name < 0x20 || *name == 0x7f || *name == '\\')
            return false;
    }
    return true;
}

static fw_status add_entry(fw_stack *stack, const char *name, const fw_layer_name *parts,
                           fw_fault *fault)
{
    if (!is_plain(name))
        return fw_fault_set(fault, FW_INPUT,
                            "unusable file name, \"%s\" in %s, rename it without control "
                            "characters and backslashes",
                            name, stack->path);
    if (stack->count == LAYERS_LIMIT)
        return fw_fault_set(fault, FW_INPUT, "too many layers, %s, a stack holds at most %d",
                            stack->path, LAYERS_LIMIT);
    FW_TRY(fw_grow((void **)&stack->layer, &stack->capacity, stack->count + 1, sizeof *stack->layer,
                   holder, fault));
    entry *e = &stack->layer[stack->count];
    e->parts = *parts;
    FW_TRY(fw_place_join(stack->path, name, &e->label, fault));
    e->name = e->label + strlen(stack->path) + 1;
    stack->count++;
    return FW_OK;
}

static fw_status list_folder(fw_stack *stack, DIR *folder, const fw_name_pattern *pattern,
                             fw_fault *fault)
{
    for (;;) {
        errno = 0;
        const struct dirent *item = readdir(folder);
        if (item == NULL)
            break;
        fw_layer_name parts;
        if (fw_layer_name_read(pattern, item->d_name, &parts))
            FW_TRY(add_entry(stack, item->d_name, &parts, fault));
    }
    return errno == 0 ? FW_OK : fw_file_fault(errno, "cannot list", stack->path, fault);
}

static fw_status open_folder(fw_stack *stack, const fw_name_pattern *pattern, fw_fault *fault)
{
    DIR *folder = opendir(stack->path);
    if (folder == NULL)
        return fw_file_fault(errno, "cannot open the stack", stack->path, fault);
    fw_status status = FW_OK;
    stack->folder = fcntl(dirfd(folder), F_DUPFD_CLOEXEC, 0);
    if (stack->folder < 0)
        status = fw_file_fault(errno, "cannot open the stack", stack->path, fault);
    if (status == FW_OK)
        status = list_folder(stack, folder, pattern, fault);
    closedir(folder);
    return status;
}

static int by_number(const void *left, const void *right)
{
    const entry *a = left, *b = right;
    if (a->parts.number != b->parts.number)
        return a->parts.number < b->parts.number ? -1 : 1;
    return strcmp(a->name, b->name);
}

static const char *suffix_of(const entry *e)
{
    return e->name + e->parts.prefix_size + e->parts.digits;
}

static bool same_kind(const entry *a, const entry *b)
{
    return a->parts.prefix_size == b->parts.prefix_size &&
           memcmp(a->name, b->name, a->parts.prefix_size) == 0 &&
           strcmp(suffix_of(a), suffix_of(b)) == 0;
}

static fw_status check_pair(const fw_stack *stack, const entry *a, const entry *b, fw_fault *fault)
{
    if (!same_kind(a, b))
        return fw_fault_set(fault, FW_INPUT,
                            "two kinds of names, %s and %s in %s, say which are the layers with "
                            "stack.names: \"%.*s####%s\"",
                            a->name, b->name, stack->path, (int)a->parts.prefix_size, a->name,
                            suffix_of(a));
    if (a->parts.number == b->parts.number)
        return fw_fault_set(fault, FW_INPUT,
                            "layer number %lld twice, %s and %s in %s, remove one of them",
                            (long long)a->parts.number, a->name, b->name, stack->path);
    if (b->parts.number != a->parts.number + 1)
        return fw_fault_set(fault, FW_INPUT,
                            "missing layer number %lld, between %s and %s in %s, export the "
                            "stack again",
                            (long long)a->parts.number + 1, a->name, b->name, stack->path);
    return FW_OK;
}

static fw_status check_order(const fw_stack *stack, const char *names, fw_fault *fault)
{
    if (stack->count == 0)
        return fw_fault_set(fault, FW_INPUT,
                            "no layers, %s holds no file that matches %s, name a folder of "
                            "numbered PNG masks",
                            stack->path, names != NULL && *names != '\0' ? names : "*.png");
    for (size_t i = 1; i < stack->count; i++)
        FW_TRY(check_pair(stack, &stack->layer[i - 1], &stack->layer[i], fault));
    return FW_OK;
}

fw_status fw_stack_open(const char *path, const char *names, fw_stack **out, fw_fault *fault)
{
    *out = NULL;
    fw_name_pattern pattern;
    FW_TRY(fw_name_pattern_read(names, &pattern, fault));
    fw_stack *stack;
    FW_TRY(fw_allocate((void **)&stack, 1, sizeof *stack, holder, fault));
    stack->folder = -1;
    fw_status status = copy_text(path, &stack->path, fault);
    if (status == FW_OK)
        status = open_folder(stack, &pattern, fault);
    if (status == FW_OK) {
        if (stack->count > 0)
            qsort(stack->layer, stack->count, sizeof *stack->layer, by_number);
        status = check_order(stack, names, fault);
    }
    if (status == FW_OK)
        *out = stack;
    else
        fw_stack_close(stack);
    return status;
}

void fw_stack_close(fw_stack *stack)
{
    if (stack == NULL)
        return;
    for (size_t i = 0; i < stack->count; i++)
        free(stack->layer[i].label);
    free(stack->layer);
    free(stack->path);
    if (stack->folder >= 0)
        close(stack->folder);
    free(stack);
}

int32_t fw_stack_count(const fw_stack *stack)
{
    return (int32_t)stack->count;
}

const char *fw_stack_path(const fw_stack *stack)
{
    return stack->path;
}

const char *fw_stack_name(const fw_stack *stack, int32_t index)
{
    return stack->layer[index].name;
}

const char *fw_stack_label(const fw_stack *stack, int32_t index)
{
    return stack->layer[index].label;
}

fw_status fw_stack_size(const fw_stack *stack, int32_t index, size_t *size, fw_fault *fault)
{
    const entry *e = &stack->layer[index];
    return fw_file_size(stack->folder, e->name, e->label, size, fault);
}

fw_status fw_stack_read(const fw_stack *stack, int32_t index, fw_bytes *out, fw_fault *fault)
{
    const entry *e = &stack->layer[index];
    return fw_file_read(stack->folder, e->name, e->label, FW_FILE_LIMIT, out, fault);
}

fw_status fw_stack_output_name(const fw_stack *stack, int32_t index, char name[FW_NAME_SIZE],
                               fw_fault *fault)
{
    const entry *first = &stack->layer[0];
    const int size = snprintf(name, FW_NAME_SIZE, "%.*s%0*lld%s", (int)first->parts.prefix_size,
                              first->name, (int)first->parts.digits,
                              (long long)first->parts.number + index, suffix_of(first));
    if (size < 0 || size >= FW_NAME_SIZE)
        return fw_fault_set(fault, FW_INPUT,
                            "file name too long for the new layers, %s in %s, shorten it",
                            first->name, stack->path);
    return FW_OK;
}
