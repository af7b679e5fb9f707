/* The table that describes a YAML file: one row a key. The reader, the commented job that `begin`
 * writes and the man page all follow the same rows.
 */
#ifndef FW_CARDS_TABLE_H
#define FW_CARDS_TABLE_H

#include "check/job.h"

#include <stdbool.h>
#include <stddef.h>

/* What the value of a key looks like and which field it fills. */
typedef enum fw_row_type {
    FW_ROW_SECTION, /* a mapping of further keys; fills a bool: the section was given */
    FW_ROW_NUMBER,  /* double */
    FW_ROW_PAIR,    /* double[2], written [a, b] */
    FW_ROW_POINTS,  /* fw_points, written [[a, b], [c, d]] */
    FW_ROW_WHOLE,   /* int32_t */
    FW_ROW_WHOLES,  /* int[2], written [a, b] */
    FW_ROW_TEXT,    /* char[size], not empty */
    FW_ROW_PATH,    /* char *, allocated, owned by the struct; not empty */
    FW_ROW_CHOICE,  /* an enum: the position of the word in choices */
    FW_ROW_SWITCH,  /* a bool: true for the second of two words in choices */
} fw_row_type;

enum { FW_ROW_NOWHERE = -1 }; /* offset of a row that fills no field */

typedef struct fw_row {
    const char *path; /* "stack.layer_um"; its section is an earlier row */
    fw_row_type type;
    bool optional;
    const char *unit;           /* for people: "um"; NULL without one */
    double low, high;           /* range of each number, both ends included unless open */
    bool open_low, open_high;   /* the end itself is refused */
    double fallback[2];         /* number(s), or the word's position, where the key is not given */
    const char *choices;        /* words apart by '|' */
    const char *choices_reason; /* said after a wrong word, may be NULL */
    const char *example;        /* what `begin` writes; NULL: the fallback */
    bool to_set;                /* masks cannot tell it: `begin` marks it "set this" */
    const char *help;           /* for people, no full stop */
    ptrdiff_t offset;           /* of the field in the struct, or FW_ROW_NOWHERE */
    size_t size;                /* of the field, for FW_ROW_TEXT */
} fw_row;

enum { FW_TABLE_ROWS = 40 }; /* the most that a table may have */

typedef struct fw_table {
    const char *what;  /* "job" */
    const fw_row *row; /* [count] */
    size_t count;
} fw_table;

/* What the job's rows fill: the job and the paths of its cards as written (NULL when not given). */
typedef struct fw_job_file {
    fw_job job;
    char *resin, *machine;
} fw_job_file;

extern const fw_table fw_job_table;     /* fills fw_job_file */
extern const fw_table fw_resin_table;   /* fills fw_resin */
extern const fw_table fw_machine_table; /* fills fw_machine */

/* The key's own name: "layer_um" of "stack.layer_um". */
const char *fw_row_name(const fw_row *row);

/* Whether the row lies directly in section (NULL: at the top of the file). */
bool fw_row_in(const fw_row *row, const fw_row *section);

#endif
