#include "report/json_write.h"

#include "fault/memory.h"
#include "report/number.h"

#include <inttypes.h>
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void flush(fw_json *json)
{
    if (json->status == FW_OK && json->used > 0)
        json->status = json->sink.write(json->sink.context, json->buffer, json->used, json->fault);
    json->used = 0;
}

static void put(fw_json *json, const char *text)
{
    for (size_t left = strlen(text); left > 0;) {
        if (json->used == FW_JSON_BUFFER)
            flush(json);
        size_t room = FW_JSON_BUFFER - json->used, part = left < room ? left : room;
        memcpy(json->buffer + json->used, text, part);
        json->used += part;
        text += part;
        left -= part;
    }
}

/* Whether the values of the innermost container stand on lines of their own. */
static bool own_lines(const fw_json *json)
{
    return json->depth == 1 || (json->depth == 2 && json->closing[1] == ']');
}

static void new_line(fw_json *json, int indent)
{
    put(json, "\n");
    for (int i = 0; i < indent; i++)
        put(json, "  ");
}

/* Everything that comes before a value: comma, line, key. Keys are our own words: no escapes. */
static void lead(fw_json *json, const char *key)
{
    bool filled = json->filled[json->depth - 1];
    if (filled)
        put(json, ",");
    if (own_lines(json))
        new_line(json, json->depth);
    else if (filled)
        put(json, " ");
    json->filled[json->depth - 1] = true;
    if (key != NULL) {
        put(json, "\"");
        put(json, key);
        put(json, "\": ");
    }
}

static void open(fw_json *json, const char *opening, char closing)
{
    put(json, opening);
    json->closing[json->depth] = closing;
    json->filled[json->depth] = false;
    json->depth++;
}

void fw_json_start(fw_json *json, fw_sink sink, fw_fault *fault)
{
    json->sink = sink;
    json->fault = fault;
    json->status = FW_OK;
    json->depth = 0;
    json->used = 0;
    open(json, "{", '}');
}

void fw_json_object(fw_json *json, const char *key)
{
    lead(json, key);
    open(json, "{", '}');
}

void fw_json_array(fw_json *json, const char *key)
{
    lead(json, key);
    open(json, "[", ']');
}

void fw_json_end(fw_json *json)
{
    bool line = own_lines(json) && json->filled[json->depth - 1];
    json->depth--;
    if (line)
        new_line(json, json->depth);
    put(json, (char[]){json->closing[json->depth], '\0'});
}

fw_status fw_json_close(fw_json *json)
{
    fw_json_end(json);
    put(json, "\n");
    flush(json);
    return json->status;
}

void fw_json_null(fw_json *json, const char *key)
{
    lead(json, key);
    put(json, "null");
}

void fw_json_flag(fw_json *json, const char *key, bool value)
{
    lead(json, key);
    put(json, value ? "true" : "false");
}

void fw_json_whole(fw_json *json, const char *key, int64_t value)
{
    char text[FW_NUMBER_TEXT];
    snprintf(text, sizeof text, "%" PRId64, value);
    lead(json, key);
    put(json, text);
}

void fw_json_length(fw_json *json, const char *key, double mm)
{
    char text[FW_NUMBER_TEXT] = "null";
    if (fabs(mm) < 1e12) /* false for NAN */
        fw_number_thousandths(text, mm);
    lead(json, key);
    put(json, text);
}

void fw_json_digits(fw_json *json, const char *key, double value)
{
    char text[FW_NUMBER_TEXT] = "null";
    if (isfinite(value))
        fw_number_digits(text, value, 6);
    lead(json, key);
    put(json, text);
}

/* jansson's escapes, of a text that it takes for UTF-8 or, at the second attempt, of its ASCII. */
static char *quoted(const char *value)
{
    json_t *string = json_string(value);
    char *copy = string == NULL ? malloc(strlen(value) + 1) : NULL;
    if (copy != NULL) {
        strcpy(copy, value);
        for (char *c = copy; *c != '\0'; c++)
            *c = (unsigned char)*c < 0x80 ? *c : '?';
        string = json_string(copy);
    }
    char *text = json_dumps(string, JSON_ENCODE_ANY); /* NULL for NULL */
    json_decref(string);
    free(copy);
    return text;
}

void fw_json_text(fw_json *json, const char *key, const char *value)
{
    lead(json, key);
    char *text = quoted(value);
    if (text != NULL)
        put(json, text);
    else if (json->status == FW_OK)
        json->status = fw_fault_memory(json->fault, "report");
    free(text);
}

void fw_json_text_or_null(fw_json *json, const char *key, const char *value)
{
    if (value[0] == '\0')
        fw_json_null(json, key);
    else
        fw_json_text(json, key, value);
}
