#include "check/together.h"

#include "fault/memory.h"

#include <math.h>
#include <string.h>

static int order(const fw_together_row *row, int32_t bearer, int32_t other)
{
    if (row->bearer != bearer)
        return row->bearer < bearer ? -1 : 1;
    return (row->other > other) - (row->other < other);
}

/* The first row that is not before (bearer, other). */
static size_t find(const fw_together *together, int32_t bearer, int32_t other)
{
    size_t low = 0, high = together->count;
    while (low < high) {
        const size_t middle = low + (high - low) / 2;
        if (order(&together->row[middle], bearer, other) < 0)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

size_t fw_together_first(const fw_together *together, int32_t bearer)
{
    return find(together, bearer, INT32_MIN);
}

fw_status fw_together_note(fw_together *together, int32_t bearer, int32_t other, bool neck,
                           double part, fw_fault *fault)
{
    const size_t at = find(together, bearer, other);
    const bool known = at < together->count && order(&together->row[at], bearer, other) == 0;
    if (!known) {
        FW_TRY(fw_grow((void **)&together->row, &together->capacity, together->count + 1,
                       sizeof *together->row, "posts that run into one another", fault));
        memmove(&together->row[at + 1], &together->row[at],
                (together->count - at) * sizeof *together->row);
        together->row[at] = (fw_together_row){.bearer = bearer, .other = other};
        together->count++;
    }
    double *most = neck ? &together->row[at].neck : &together->row[at].shaft;
    *most = fmax(*most, part);
    return FW_OK;
}
