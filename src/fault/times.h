/* Where the time goes: seconds of wall time by kind of work, for --verbose and the benchmark. Never
 * written into any result. One thread adds at a time. */
#ifndef FW_TIMES_H
#define FW_TIMES_H

typedef enum fw_work {
    FW_WORK_READING,  /* files read and decoded */
    FW_WORK_PACKING,  /* into the layer store */
    FW_WORK_STAMPING, /* layers unpacked and posts drawn in */
    FW_WORK_SHEETS,   /* spans and regions of each layer */
    FW_WORK_JOINING,  /* overlaps of neighbouring layers */
    FW_WORK_GROUND,   /* bodies, debt, voids, placing */
    FW_WORK_PEEL,     /* film solves */
    FW_WORK_SHARE,    /* loads to anchors, sections, clearance */
    FW_WORK_LATTICE,  /* free space for routes */
    FW_WORK_ROUTING,
    FW_WORK_ENCODING,
    FW_WORK_WRITING,
    FW_WORK_COUNT
} fw_work;

typedef struct fw_times {
    double seconds[FW_WORK_COUNT];
} fw_times;

const char *fw_work_name(fw_work work); /* "reading", ... */

/* Seconds on a clock that never goes back. */
double fw_times_now(void);

/* Adds what has passed since `began`. times may be NULL. */
void fw_times_add(fw_times *times, fw_work work, double began);

#endif
