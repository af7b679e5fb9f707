/* Contents: refuse and look up; numbers; texts and words; mappings. */
#include "cards/yaml_read.h"

#include "cards/decimal.h"
#include "cards/nearest.h"
#include "cards/text_read.h"
#include "cards/yaml_document.h"
#include "fault/memory.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* One file being read. */
typedef struct reader {
    yaml_document_t document;
    fw_yaml_marks *marks;
    char *out;
    fw_fault *fault;
} reader;

/* --- refuse and look up --- */

static size_t row_index(const fw_table *table, const char *key)
{
    size_t i = 0;
    while (i < table->count && strcmp(table->row[i].path, key) != 0)
        i++;
    return i;
}

int fw_yaml_line(const fw_yaml_marks *marks, const char *key)
{
    size_t i = row_index(marks->table, key);
    if (i < marks->table->count && marks->line[i] > 0)
        return marks->line[i];
    for (size_t s = 0; i < marks->table->count && s < i; s++) {
        if (fw_row_in(&marks->table->row[i], &marks->table->row[s]) && marks->line[s] > 0)
            return marks->line[s];
    }
    return 1;
}

bool fw_yaml_given(const fw_yaml_marks *marks, const char *key)
{
    size_t i = row_index(marks->table, key);
    return i < marks->table->count && marks->line[i] > 0;
}

fw_status fw_yaml_refuse(const fw_yaml_marks *marks, const char *key, fw_fault *fault,
                         const char *format, ...)
{
    char text[FW_FAULT_TEXT];
    va_list values;
    va_start(values, format);
    vsnprintf(text, sizeof text, format, values);
    va_end(values);
    return fw_fault_set(fault, FW_INPUT, "%s:%d: %s: %s", marks->file, fw_yaml_line(marks, key),
                        key, text);
}

static int node_line(const yaml_node_t *node)
{
    return (int)node->start_mark.line + 1;
}

static const char *scalar(const yaml_node_t *node)
{
    return (const char *)node->data.scalar.value;
}

static const char *unit_of(const fw_row *row)
{
    return row->unit == NULL ? "" : row->unit;
}

static void *field(const reader *r, const fw_row *row)
{
    return row->offset == FW_ROW_NOWHERE ? NULL : r->out + row->offset;
}

/* A scalar with neither quotes nor a zero byte in it; anything else is no number. */
static bool bare(const yaml_node_t *node)
{
    return node->type == YAML_SCALAR_NODE && node->data.scalar.style == YAML_PLAIN_SCALAR_STYLE &&
           strlen(scalar(node)) == node->data.scalar.length;
}

/* --- numbers --- */

static fw_status refuse_number(const reader *r, const fw_row *row, const yaml_node_t *node)
{
    const char *written = node->type == YAML_SCALAR_NODE ? scalar(node) : "[...]";
    bool whole = row->type == FW_ROW_WHOLE || row->type == FW_ROW_WHOLES;
    return fw_yaml_refuse(r->marks, row->path, r->fault,
                          "'%.40s' is no plain %s; write digits without unit or quotes%s%s",
                          written, whole ? "whole number" : "decimal number",
                          row->unit == NULL ? "" : ", in ", unit_of(row));
}

static fw_status check_range(const reader *r, const fw_row *row, double value)
{
    bool low = row->open_low ? value > row->low : value >= row->low;
    bool high = row->open_high ? value < row->high : value <= row->high;
    if (low && high)
        return FW_OK;
    return fw_yaml_refuse(r->marks, row->path, r->fault,
                          "%g is out of range; give %s %g and %s %g%s%s", value,
                          row->open_low ? "more than" : "at least", row->low,
                          row->open_high ? "less than" : "at most", row->high,
                          row->unit == NULL ? "" : " ", unit_of(row));
}

static fw_status read_decimal(const reader *r, const fw_row *row, const yaml_node_t *node,
                              double *out)
{
    if (!bare(node) || !fw_decimal(scalar(node), out))
        return refuse_number(r, row, node);
    return check_range(r, row, *out);
}

static fw_status read_whole(const reader *r, const fw_row *row, const yaml_node_t *node,
                            int32_t *out)
{
    if (!bare(node) || !fw_whole(scalar(node), out))
        return refuse_number(r, row, node);
    return check_range(r, row, *out);
}

/* Puts the two items of a list into pair. */
static fw_status read_two(reader *r, const fw_row *row, const yaml_node_t *node,
                          yaml_node_t *pair[2])
{
    const yaml_node_item_t *item =
        node->type == YAML_SEQUENCE_NODE ? node->data.sequence.items.start : NULL;
    if (item == NULL || node->data.sequence.items.top - item != 2)
        return fw_yaml_refuse(r->marks, row->path, r->fault,
                              "expects two numbers in brackets, such as [%g, %g]",
                              row->low > 0 ? row->low : 1.0, row->high);
    pair[0] = yaml_document_get_node(&r->document, item[0]);
    pair[1] = yaml_document_get_node(&r->document, item[1]);
    return FW_OK;
}

static fw_status read_pair(reader *r, const fw_row *row, const yaml_node_t *node)
{
    yaml_node_t *pair[2] = {NULL, NULL};
    FW_TRY(read_two(r, row, node, pair));
    double *out = field(r, row);
    FW_TRY(read_decimal(r, row, pair[0], &out[0]));
    return read_decimal(r, row, pair[1], &out[1]);
}

static fw_status read_points(reader *r, const fw_row *row, const yaml_node_t *node)
{
    fw_points *out = field(r, row);
    if (node->type != YAML_SEQUENCE_NODE)
        return fw_yaml_refuse(r->marks, row->path, r->fault,
                              "expects pairs in brackets, such as [[0, 0], [1, 1]]");
    const yaml_node_item_t *item = node->data.sequence.items.start;
    const ptrdiff_t count = node->data.sequence.items.top - item;
    if (count > FW_CARD_POINTS)
        return fw_yaml_refuse(r->marks, row->path, r->fault, "has %td pairs; give %d at most",
                              count, (int)FW_CARD_POINTS);
    for (out->count = 0; out->count < count; out->count++) {
        yaml_node_t *pair[2] = {NULL, NULL};
        const yaml_node_t *each = yaml_document_get_node(&r->document, item[out->count]);
        FW_TRY(read_two(r, row, each, pair));
        for (int i = 0; i < 2; i++)
            FW_TRY(read_decimal(r, row, pair[i], &out->at[out->count][i]));
    }
    return FW_OK;
}

static fw_status read_wholes(reader *r, const fw_row *row, const yaml_node_t *node)
{
    yaml_node_t *pair[2] = {NULL, NULL};
    FW_TRY(read_two(r, row, node, pair));
    int *out = field(r, row);
    for (int i = 0; i < 2; i++) {
        int32_t value = 0;
        FW_TRY(read_whole(r, row, pair[i], &value));
        out[i] = (int)value;
    }
    return FW_OK;
}

/* --- texts and words --- */

static fw_status check_line(const reader *r, const fw_row *row, const yaml_node_t *node)
{
    if (node->type != YAML_SCALAR_NODE)
        return fw_yaml_refuse(r->marks, row->path, r->fault, "expects a text; put it into quotes");
    if (node->data.scalar.length == 0)
        return fw_yaml_refuse(r->marks, row->path, r->fault,
                              "is empty; give a text or leave the key out");
    if (!fw_text_is_line(scalar(node), node->data.scalar.length))
        return fw_yaml_refuse(r->marks, row->path, r->fault,
                              "holds a line end or control character; write it on one line");
    return FW_OK;
}

static fw_status read_text(const reader *r, const fw_row *row, const yaml_node_t *node)
{
    FW_TRY(check_line(r, row, node));
    if (node->data.scalar.length >= row->size)
        return fw_yaml_refuse(r->marks, row->path, r->fault, "is longer than %zu bytes; shorten it",
                              row->size - 1);
    memcpy(field(r, row), scalar(node), node->data.scalar.length + 1);
    return FW_OK;
}

static fw_status read_path(const reader *r, const fw_row *row, const yaml_node_t *node)
{
    FW_TRY(check_line(r, row, node));
    void *copy;
    FW_TRY(fw_allocate(&copy, node->data.scalar.length + 1, 1, "card", r->fault));
    memcpy(copy, scalar(node), node->data.scalar.length);
    memcpy(field(r, row), &copy, sizeof copy);
    return FW_OK;
}

/* The position of a word in "one|two|three", -1 when it is not there. */
static int position(const char *choices, const char *word)
{
    size_t length = strlen(word);
    for (int i = 0;; i++) {
        size_t here = strcspn(choices, "|");
        if (here == length && strncmp(choices, word, length) == 0)
            return i;
        if (choices[here] == '\0')
            return -1;
        choices += here + 1;
    }
}

_Static_assert(sizeof(fw_basis) == sizeof(unsigned), "an enum row is stored as unsigned");

static void store_choice(const reader *r, const fw_row *row, int chosen)
{
    void *into = field(r, row);
    if (into != NULL && row->type == FW_ROW_SWITCH)
        *(bool *)into = chosen == 1;
    else if (into != NULL)
        memcpy(into, &(unsigned){(unsigned)chosen}, sizeof(unsigned));
}

static fw_status read_choice(const reader *r, const fw_row *row, const yaml_node_t *node)
{
    FW_TRY(check_line(r, row, node));
    int chosen = position(row->choices, scalar(node));
    if (chosen < 0 && row->choices_reason != NULL)
        return fw_yaml_refuse(r->marks, row->path, r->fault, "'%.40s': %s", scalar(node),
                              row->choices_reason);
    if (chosen < 0)
        return fw_yaml_refuse(r->marks, row->path, r->fault, "'%.40s' is none of %s", scalar(node),
                              row->choices);
    store_choice(r, row, chosen);
    return FW_OK;
}

/* --- mappings --- */

static fw_status read_mapping(reader *r, const fw_row *section, const yaml_node_t *node);

static fw_status read_section(reader *r, const fw_row *row, const yaml_node_t *node)
{
    if (node->type != YAML_MAPPING_NODE)
        return fw_yaml_refuse(r->marks, row->path, r->fault,
                              "expects keys, indented in the lines after it");
    bool *given = field(r, row);
    if (given != NULL)
        *given = true;
    return read_mapping(r, row, node);
}

static fw_status read_value(reader *r, const fw_row *row, const yaml_node_t *node)
{
    switch (row->type) {
    case FW_ROW_SECTION:
        return read_section(r, row, node);
    case FW_ROW_NUMBER:
        return read_decimal(r, row, node, field(r, row));
    case FW_ROW_PAIR:
        return read_pair(r, row, node);
    case FW_ROW_POINTS:
        return read_points(r, row, node);
    case FW_ROW_WHOLE:
        return read_whole(r, row, node, field(r, row));
    case FW_ROW_WHOLES:
        return read_wholes(r, row, node);
    case FW_ROW_TEXT:
        return read_text(r, row, node);
    case FW_ROW_PATH:
        return read_path(r, row, node);
    case FW_ROW_CHOICE:
    case FW_ROW_SWITCH:
        break;
    }
    return read_choice(r, row, node);
}

/* A key that the section does not know: name the known key that it may stand for. */
static fw_status refuse_key(const reader *r, const fw_row *section, const yaml_node_t *node)
{
    const fw_table *table = r->marks->table;
    const char *word[FW_TABLE_ROWS], *key = scalar(node);
    const fw_row *row[FW_TABLE_ROWS];
    size_t count = 0;
    for (int own = 1; own >= 0; own--) { /* the section's own keys first: they win a tie */
        for (size_t i = 0; i < table->count; i++) {
            if (fw_row_in(&table->row[i], section) != (own == 1))
                continue;
            row[count] = &table->row[i];
            word[count++] = fw_row_name(&table->row[i]);
        }
    }
    char hint[FW_FAULT_TEXT] = "; leave it out or correct it";
    size_t best = fw_nearest(key, word, count);
    if (best < count)
        snprintf(hint, sizeof hint, "; did you mean %s?",
                 fw_row_in(row[best], section) ? word[best] : row[best]->path);
    return fw_fault_set(r->fault, FW_INPUT, "%s:%d: %s%s%.60s: no key of a %s%s", r->marks->file,
                        node_line(node), section == NULL ? "" : section->path,
                        section == NULL ? "" : ".", key, table->what, hint);
}

static fw_status read_key(reader *r, const fw_row *section, const yaml_node_pair_t *pair)
{
    const yaml_node_t *key = yaml_document_get_node(&r->document, pair->key);
    const fw_table *table = r->marks->table;
    if (key->type != YAML_SCALAR_NODE)
        return fw_fault_set(r->fault, FW_INPUT,
                            "%s:%d: a list or mapping stands where a key is due", r->marks->file,
                            node_line(key));
    size_t i = 0;
    while (i < table->count && (!fw_row_in(&table->row[i], section) ||
                                strcmp(fw_row_name(&table->row[i]), scalar(key)) != 0))
        i++;
    if (i == table->count)
        return refuse_key(r, section, key);
    if (r->marks->line[i] > 0)
        return fw_fault_set(r->fault, FW_INPUT, "%s:%d: %s: given already in line %d; keep one",
                            r->marks->file, node_line(key), table->row[i].path, r->marks->line[i]);
    r->marks->line[i] = node_line(key);
    return read_value(r, &table->row[i], yaml_document_get_node(&r->document, pair->value));
}

static fw_status require(const reader *r, const fw_row *section, const yaml_node_t *node)
{
    for (size_t i = 0; i < r->marks->table->count; i++) {
        const fw_row *row = &r->marks->table->row[i];
        if (row->optional || r->marks->line[i] > 0 || !fw_row_in(row, section))
            continue;
        return fw_fault_set(r->fault, FW_INPUT, "%s:%d: %s: missing; add it (%s%s%s)",
                            r->marks->file, node_line(node), row->path, row->help,
                            row->unit == NULL ? "" : ", in ", unit_of(row));
    }
    return FW_OK;
}

static fw_status read_mapping(reader *r, const fw_row *section, const yaml_node_t *node)
{
    const yaml_node_pair_t *pair = node->data.mapping.pairs.start;
    for (; pair < node->data.mapping.pairs.top; pair++)
        FW_TRY(read_key(r, section, pair));
    return require(r, section, node);
}

static void fill_fallback(const reader *r, const fw_row *row)
{
    void *into = field(r, row);
    if (row->type == FW_ROW_NUMBER)
        *(double *)into = row->fallback[0];
    else if (row->type == FW_ROW_PAIR)
        memcpy(into, row->fallback, sizeof row->fallback);
    else if (row->type == FW_ROW_WHOLE)
        *(int32_t *)into = (int32_t)row->fallback[0];
    else if (row->type == FW_ROW_CHOICE || row->type == FW_ROW_SWITCH)
        store_choice(r, row, (int)row->fallback[0]);
}

fw_status fw_yaml_read(const char *path, const fw_table *table, void *out, fw_yaml_marks *marks,
                       fw_fault *fault)
{
    *marks = (fw_yaml_marks){.file = path, .table = table};
    reader r = {.marks = marks, .out = out, .fault = fault};
    FW_TRY(fw_yaml_load(path, &r.document, fault));
    for (size_t i = 0; i < table->count; i++) {
        if (table->row[i].optional)
            fill_fallback(&r, &table->row[i]);
    }
    fw_status status = read_mapping(&r, NULL, yaml_document_get_root_node(&r.document));
    yaml_document_delete(&r.document);
    return status;
}
