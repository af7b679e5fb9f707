#include "fault/memory.h"

#include <stdlib.h>

fw_status fw_allocate(void **out, size_t count, size_t size, const char *holder, fw_fault *fault)
{
    const bool overflows = size > 0 && count > SIZE_MAX / size;
    *out = overflows ? NULL : calloc(count > 0 ? count : 1, size);
    return *out != NULL ? FW_OK : fw_fault_memory(fault, holder);
}

fw_status fw_grow(void **array, size_t *capacity, size_t need, size_t size, const char *holder,
                  fw_fault *fault)
{
    if (need <= *capacity)
        return FW_OK;
    size_t target = *capacity + *capacity / 2;
    if (target < need)
        target = need;
    if (target < 16)
        target = 16;
    if (target > SIZE_MAX / size)
        return fw_fault_memory(fault, holder);
    void *grown = realloc(*array, target * size);
    if (grown == NULL)
        return fw_fault_memory(fault, holder);
    *array = grown;
    *capacity = target;
    return FW_OK;
}

bool fw_budget_fits(const fw_budget *budget, size_t bytes)
{
    return bytes <= budget->limit && budget->used <= budget->limit - bytes;
}

void fw_budget_charge(fw_budget *budget, size_t bytes)
{
    budget->used += bytes;
    if (budget->used > budget->peak)
        budget->peak = budget->used;
}

void fw_budget_release(fw_budget *budget, size_t bytes)
{
    budget->used -= bytes;
}
