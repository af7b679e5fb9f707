/* A growing run of bytes that its owner frees: file contents, packed layers, encoded pictures. */
#ifndef FW_BYTES_H
#define FW_BYTES_H

#include "fault/fault.h"

#include <stdint.h>

/* A zeroed struct is a valid empty one. */
typedef struct fw_bytes {
    uint8_t *data; /* [size], owned */
    size_t size, capacity;
} fw_bytes;

/* Appends size bytes. holder names the owner in the fault line. On failure *bytes is untouched. */
fw_status fw_bytes_append(fw_bytes *bytes, const void *data, size_t size, const char *holder,
                          fw_fault *fault);

/* Frees the bytes and leaves a valid empty struct. */
void fw_bytes_free(fw_bytes *bytes);

#endif
