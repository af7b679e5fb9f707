/* Whole files by descriptor of their folder, with one fault line for every way that they fail. */
#ifndef FW_FILES_H
#define FW_FILES_H

#include "stack/bytes.h"

/* "WHAT, PATH: reason, what to do". FW_INPUT when the named thing is not there or not of the right
 * sort, FW_MACHINE for all else. error is an errno value. */
fw_status fw_file_fault(int error, const char *what, const char *path, fw_fault *fault);

/* Size of the regular file `name` (links followed) in the folder; FW_INPUT when it is none. label
 * is what the fault line calls the file. */
fw_status fw_file_size(int folder, const char *name, const char *label, size_t *size,
                       fw_fault *fault);

/* Reads it whole into *out (reused); FW_INPUT above `limit` bytes. Thread-safe. */
fw_status fw_file_read(int folder, const char *name, const char *label, size_t limit, fw_bytes *out,
                       fw_fault *fault);

/* Writes all bytes, through interruptions and short writes. path is for the fault line. */
fw_status fw_file_write(int file, const void *bytes, size_t size, const char *path,
                        fw_fault *fault);

#endif
