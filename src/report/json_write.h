/* A writer of JSON that keeps no tree: every value goes on to the sink as it comes.
 *
 * A key is NULL within an array. The first failure is kept, what follows is dropped, and
 * fw_json_close returns it: callers need not look in between. Values at the top and the items of
 * lists there start a line; what lies deeper stays on its line.
 */
#ifndef FW_REPORT_JSON_WRITE_H
#define FW_REPORT_JSON_WRITE_H

#include "report/sink.h"

#include <stdbool.h>
#include <stdint.h>

enum { FW_JSON_DEPTH = 8, FW_JSON_BUFFER = 4096 };

typedef struct fw_json {
    fw_sink sink;
    fw_fault *fault;
    fw_status status;
    int depth;                   /* open containers */
    char closing[FW_JSON_DEPTH]; /* of each open container */
    bool filled[FW_JSON_DEPTH];  /* it holds a value already */
    size_t used;
    char buffer[FW_JSON_BUFFER];
} fw_json;

/* Begins with the outermost object. */
void fw_json_start(fw_json *json, fw_sink sink, fw_fault *fault);
/* Ends it, with a newline, and hands the rest to the sink. */
fw_status fw_json_close(fw_json *json);

void fw_json_object(fw_json *json, const char *key);
void fw_json_array(fw_json *json, const char *key);
void fw_json_end(fw_json *json);

void fw_json_null(fw_json *json, const char *key);
void fw_json_flag(fw_json *json, const char *key, bool value);
void fw_json_whole(fw_json *json, const char *key, int64_t value);
/* A length in mm, to 1 um. NAN and infinite are null, here and in fw_json_digits. */
void fw_json_length(fw_json *json, const char *key, double mm);
/* A number to 6 significant digits. */
void fw_json_digits(fw_json *json, const char *key, double value);
/* A text; bytes that are no UTF-8 become '?'. */
void fw_json_text(fw_json *json, const char *key, const char *value);
/* A text, or null where it is empty. */
void fw_json_text_or_null(fw_json *json, const char *key, const char *value);

#endif
