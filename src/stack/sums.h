/* Lists of digests and paths in the form that `sha256sum -c` reads: "HEX  PATH\n". */
#ifndef FW_SUMS_H
#define FW_SUMS_H

#include "stack/bytes.h"
#include "stack/digest.h"

typedef struct fw_sum {
    char *path; /* relative, owned */
    uint8_t sha256[FW_SHA256];
} fw_sum;

/* A zeroed struct is a valid empty list. */
typedef struct fw_sums {
    fw_sum *sum; /* [count] */
    size_t count, capacity;
} fw_sums;

fw_status fw_sums_add(fw_sums *sums, const char *path, const uint8_t sha256[FW_SHA256],
                      fw_fault *fault);

/* Every path "from/..." becomes "to/...". */
fw_status fw_sums_rename(fw_sums *sums, const char *from, const char *to, fw_fault *fault);

/* Sorts by path (bytewise) and appends the text to *out. */
fw_status fw_sums_write(fw_sums *sums, fw_bytes *out, fw_fault *fault);

/* Reads such a text; *well_formed is false for anything else. The list is sorted. */
fw_status fw_sums_read(const uint8_t *text, size_t size, fw_sums *sums, bool *well_formed,
                       fw_fault *fault);

/* Lookup in a sorted list: the path itself / some path below the folder `path`. */
bool fw_sums_has(const fw_sums *sums, const char *path);
bool fw_sums_has_below(const fw_sums *sums, const char *path);
void fw_sums_free(fw_sums *sums);

#endif
