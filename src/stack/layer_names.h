/* Which file names are layers, and what number they carry. */
#ifndef FW_LAYER_NAMES_H
#define FW_LAYER_NAMES_H

#include "fault/fault.h"

#include <stdint.h>

/* A pattern such as "layer_####.png", taken apart. Borrowed from the pattern's text. */
typedef struct fw_name_pattern {
    bool any; /* *.png with a number, the last one counts */
    const char *prefix, *suffix;
    size_t prefix_size, suffix_size;
} fw_name_pattern;

/* A layer's file name = prefix, number, suffix. */
typedef struct fw_layer_name {
    size_t prefix_size; /* bytes before the number */
    size_t digits;      /* of the number, with leading zeros */
    int64_t number;
} fw_layer_name;

/* NULL or "" = any. FW_INPUT without exactly one run of '#'. */
fw_status fw_name_pattern_read(const char *text, fw_name_pattern *pattern, fw_fault *fault);

/* True when name matches, and then *parts is filled; a number of over 18 digits matches nothing. */
bool fw_layer_name_read(const fw_name_pattern *pattern, const char *name, fw_layer_name *parts);

#endif
