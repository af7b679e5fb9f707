/* The one way that this project says no: a status and a single line.
 *
 * Every function that can fail returns fw_status and takes a fw_fault to fill. The line has three
 * parts, "what, where, what to do", and is complete: nobody up the call chain adds to it.
 */
#ifndef FW_FAULT_H
#define FW_FAULT_H

#include <stdbool.h>
#include <stddef.h>

/* The values are the command's exit statuses. */
typedef enum fw_status {
    FW_OK = 0,        /* done */
    FW_GATE = 1,      /* done, and the gate refuses what was found */
    FW_INPUT = 2,     /* bad usage, job, card or stack */
    FW_MACHINE = 3,   /* disk full, no permission, out of memory, stdout closed */
    FW_STOPPED = 130, /* the user asked to stop */
} fw_status;

enum { FW_FAULT_TEXT = 1024 };

typedef struct fw_fault {
    fw_status status;
    char text[FW_FAULT_TEXT]; /* one line, no newline, always terminated */
} fw_fault;

/* Fills fault (may be NULL) with the formatted line and returns status. Control characters in the
 * result (a hostile file name) are replaced by '?', so that the line stays one line. */
fw_status fw_fault_set(fw_fault *fault, fw_status status, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/* The same line for every failed allocation. */
fw_status fw_fault_memory(fw_fault *fault, const char *holder);

/* Passes a failure up, as it is. */
#define FW_TRY(call)                                                                               \
    do {                                                                                           \
        fw_status fw_try_ = (call);                                                                \
        if (fw_try_ != FW_OK)                                                                      \
            return fw_try_;                                                                        \
    } while (0)

#endif
