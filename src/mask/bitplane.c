#include "mask/bitplane.h"

#include "fault/memory.h"

#include <stdlib.h>

fw_status fw_bitplane_new(fw_bitplane *plane, int32_t width, int32_t height, const char *holder,
                          fw_fault *fault)
{
    const int32_t columns = width / 32 + (width % 32 != 0);
    const size_t stride = (size_t)columns + 2;
    if ((size_t)height > SIZE_MAX / stride)
        return fw_fault_memory(fault, holder);
    void *word = NULL;
    FW_TRY(fw_allocate(&word, (size_t)height * stride, sizeof *plane->word, holder, fault));
    *plane = (fw_bitplane){width, height, columns, stride, word};
    return FW_OK;
}

void fw_bitplane_free(fw_bitplane *plane)
{
    free(plane->word);
    *plane = (fw_bitplane){0};
}

bool fw_bitplane_full(const fw_bitplane *plane, int32_t y, int32_t x0, int32_t x1)
{
    /* Shifted by one word, so that pixels left of the image divide like all others. */
    const int32_t last = (x1 - 1 + 32) / 32 - 1;
    for (int32_t column = (x0 + 32) / 32 - 1; column <= last; column++) {
        const uint32_t mask = fw_bitplane_mask(column, x0, x1);
        if ((*fw_bitplane_word(plane, y, column) & mask) != mask)
            return false;
    }
    return true;
}
