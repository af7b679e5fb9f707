/* A folder of numbered pictures as a stack: which files are the layers, in which order. */
#ifndef FW_FOLDER_H
#define FW_FOLDER_H

#include "stack/bytes.h"

typedef struct fw_stack fw_stack;

enum { FW_NAME_SIZE = 256 }; /* longest file name, with the terminator */

/* A larger mask file is refused before it is read. */
enum { FW_FILE_LIMIT = 256 * 1024 * 1024 };

/* Opens the folder and orders its layers by number.
 * names: a pattern where one run of '#' stands for one or more digits and the rest is literal
 * ("layer_####.png"); NULL: every *.png (any case) with a number, the last number in the name
 * counts, and prefix and suffix must agree. Files that do not match are ignored, symbolic links to
 * files are followed. The numbers may start anywhere.
 * FW_INPUT: no folder, nothing matches, a gap, a number twice, two kinds of names, a pattern
 * without exactly one run of '#', a name with control characters or a backslash. The caller closes
 * *out. */
fw_status fw_stack_open(const char *path, const char *names, fw_stack **out, fw_fault *fault);
void fw_stack_close(fw_stack *stack); /* NULL is allowed */

int32_t fw_stack_count(const fw_stack *stack);                   /* layers, 1 or more */
const char *fw_stack_path(const fw_stack *stack);                /* as given; borrowed */
const char *fw_stack_name(const fw_stack *stack, int32_t index); /* file name; borrowed */
const char *fw_stack_label(const fw_stack *stack,
                           int32_t index); /* path/name, for fault lines; borrowed */

/* Size of layer `index`'s file in bytes. */
fw_status fw_stack_size(const fw_stack *stack, int32_t index, size_t *size, fw_fault *fault);

/* Reads the whole file of layer `index` into *out (reused). Regular files up to FW_FILE_LIMIT.
 * Thread-safe for different out. */
fw_status fw_stack_read(const fw_stack *stack, int32_t index, fw_bytes *out, fw_fault *fault);

/* The name of layer `index` of an output stack, 0 .. any: prefix and suffix of this stack, numbers
 * from this stack's first one on, at least as many digits as the first name has. */
fw_status fw_stack_output_name(const fw_stack *stack, int32_t index, char name[FW_NAME_SIZE],
                               fw_fault *fault);

#endif
