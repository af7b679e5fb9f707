/* clock_gettime is POSIX, not C17. */
#define _POSIX_C_SOURCE 200809L

#include "fault/times.h"

#include <stddef.h>
#include <time.h>

const char *fw_work_name(fw_work work)
{
    static const char *const names[FW_WORK_COUNT] = {"reading", "packing", "stamping", "sheets",
                                                     "joining", "ground",  "peel",     "share",
                                                     "lattice", "routing", "encoding", "writing"};
    return names[work];
}

double fw_times_now(void)
{
    struct timespec now;
    (void)clock_gettime(CLOCK_MONOTONIC, &now);
    return (double)now.tv_sec + (double)now.tv_nsec * 1e-9;
}

void fw_times_add(fw_times *times, fw_work work, double began)
{
    if (times != NULL)
        times->seconds[work] += fw_times_now() - began;
}
