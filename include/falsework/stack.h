/* A stack: a folder of grey PNG masks in number order, layer 0 on the plate. */
#ifndef FALSEWORK_STACK_H
#define FALSEWORK_STACK_H

#include "falsework/job.h"

#include <stdint.h>
#include <stdio.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct falsework_stack falsework_stack;

/* Lists the folder; pixels are read by the passes. job (may be NULL) says which names count. The
 * caller closes *stack. */
FALSEWORK_API falsework_status falsework_stack_open(const char *path, const falsework_job *job,
                                                    falsework_stack **stack,
                                                    falsework_fault *fault);
FALSEWORK_API void falsework_stack_close(falsework_stack *stack); /* NULL is allowed */
FALSEWORK_API int32_t falsework_stack_layers(const falsework_stack *stack);

/* Reads the stack and writes a commented job file for it to `file` (stays the caller's). What masks
 * cannot tell (pixel size, layer thickness, cards) is marked "set this". */
FALSEWORK_API falsework_status falsework_stack_begin(const falsework_stack *stack, FILE *file,
                                                     falsework_fault *fault);

#ifdef __cplusplus
}
#endif
#endif
