/* Reads a YAML file by its table. */
#ifndef FW_CARDS_YAML_READ_H
#define FW_CARDS_YAML_READ_H

#include "cards/table.h"
#include "fault/fault.h"

#include <stdbool.h>

/* Where each key of a file stood, for checks that look at several keys. */
typedef struct fw_yaml_marks {
    const char *file; /* borrowed */
    const fw_table *table;
    int line[FW_TABLE_ROWS]; /* of each row's key, from 1; 0 = not given */
} fw_yaml_marks;

/* Fills *out (zeroed by the caller) from the file at path: every key that is given, the fallbacks
 * of those that are not. On failure the caller still owns the FW_ROW_PATH strings in *out. */
fw_status fw_yaml_read(const char *path, const fw_table *table, void *out, fw_yaml_marks *marks,
                       fw_fault *fault);

bool fw_yaml_given(const fw_yaml_marks *marks, const char *key);

/* The line of a key; of its section, or 1, where the key was not given. */
int fw_yaml_line(const fw_yaml_marks *marks, const char *key);

/* Fails with FW_INPUT and the line `file:line: key: ...`. */
fw_status fw_yaml_refuse(const fw_yaml_marks *marks, const char *key, fw_fault *fault,
                         const char *format, ...) __attribute__((format(printf, 4, 5)));

#endif
