#include "stack/bytes.h"

#include "fault/memory.h"

#include <stdlib.h>
#include <string.h>

fw_status fw_bytes_append(fw_bytes *bytes, const void *data, size_t size, const char *holder,
                          fw_fault *fault)
{
    if (size == 0)
        return FW_OK;
    if (size > SIZE_MAX - bytes->size)
        return fw_fault_memory(fault, holder);
    FW_TRY(fw_grow((void **)&bytes->data, &bytes->capacity, bytes->size + size, 1, holder, fault));
    memcpy(bytes->data + bytes->size, data, size);
    bytes->size += size;
    return FW_OK;
}

void fw_bytes_free(fw_bytes *bytes)
{
    free(bytes->data);
    *bytes = (fw_bytes){0};
}
