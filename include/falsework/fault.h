/* How falsework says no: a status and one line.
 *
 * Every call that can fail returns a status and fills the fault that it was given (NULL is
 * allowed). The line reads "what, where, what to do". On failure output arguments are left empty
 * unless said otherwise. Calls on different objects may run in different threads; one object
 * belongs to one thread at a time.
 */
#ifndef FALSEWORK_FAULT_H
#define FALSEWORK_FAULT_H

#ifdef __cplusplus
extern "C" {
#endif

#define FALSEWORK_API __attribute__((visibility("default")))

/* The values are the command's exit statuses. */
typedef enum falsework_status {
    FALSEWORK_OK = 0,        /* done */
    FALSEWORK_GATE = 1,      /* done, and the gate refuses what was found */
    FALSEWORK_INPUT = 2,     /* bad usage, job, card or stack */
    FALSEWORK_MACHINE = 3,   /* disk full, no permission, out of memory */
    FALSEWORK_STOPPED = 130, /* asked to stop */
} falsework_status;

enum { FALSEWORK_FAULT_TEXT = 1024 };

typedef struct falsework_fault {
    falsework_status status;
    char text[FALSEWORK_FAULT_TEXT]; /* one line without newline, always terminated */
} falsework_fault;

/* "1.2.3"; a constant. */
FALSEWORK_API const char *falsework_version(void);

#ifdef __cplusplus
}
#endif
#endif
