#include "cards/yaml_document.h"

#include "cards/text_read.h"

#include <stdbool.h>
#include <stdlib.h>

enum { DEEPEST = 6 };

/* What the first pass has seen so far. */
typedef struct guard {
    const char *path;
    int documents, depth;
} guard;

static fw_status refuse(const char *path, yaml_mark_t mark, fw_fault *fault, const char *why)
{
    return fw_fault_set(fault, FW_INPUT, "%s:%zu: %s", path, mark.line + 1, why);
}

static fw_status refuse_parser(const char *path, const yaml_parser_t *parser, fw_fault *fault)
{
    if (parser->error == YAML_MEMORY_ERROR)
        return fw_fault_memory(fault, "card");
    return fw_fault_set(
        fault, FW_INPUT, "%s:%zu: no valid YAML (%s); check indentation, colons and brackets", path,
        parser->problem_mark.line + 1, parser->problem == NULL ? "unreadable" : parser->problem);
}

static bool has_anchor(const yaml_event_t *event)
{
    switch (event->type) {
    case YAML_ALIAS_EVENT:
        return true;
    case YAML_SCALAR_EVENT:
        return event->data.scalar.anchor != NULL;
    case YAML_SEQUENCE_START_EVENT:
        return event->data.sequence_start.anchor != NULL;
    case YAML_MAPPING_START_EVENT:
        return event->data.mapping_start.anchor != NULL;
    default:
        return false;
    }
}

static bool has_tag(const yaml_event_t *event)
{
    switch (event->type) {
    case YAML_SCALAR_EVENT:
        return event->data.scalar.tag != NULL;
    case YAML_SEQUENCE_START_EVENT:
        return event->data.sequence_start.tag != NULL;
    case YAML_MAPPING_START_EVENT:
        return event->data.mapping_start.tag != NULL;
    default:
        return false;
    }
}

static int deeper_by(const yaml_event_t *event)
{
    switch (event->type) {
    case YAML_SEQUENCE_START_EVENT:
    case YAML_MAPPING_START_EVENT:
        return 1;
    case YAML_SEQUENCE_END_EVENT:
    case YAML_MAPPING_END_EVENT:
        return -1;
    default:
        return 0;
    }
}

static fw_status guard_event(guard *g, const yaml_event_t *event, fw_fault *fault)
{
    if (has_anchor(event))
        return refuse(g->path, event->start_mark, fault,
                      "anchors and aliases are not read; write the value itself");
    if (has_tag(event))
        return refuse(g->path, event->start_mark, fault, "tags are not read; leave the ! out");
    g->documents += event->type == YAML_DOCUMENT_START_EVENT;
    if (g->documents > 1)
        return refuse(g->path, event->start_mark, fault,
                      "a second document begins; put each into a file of its own");
    g->depth += deeper_by(event);
    if (g->depth > DEEPEST)
        return refuse(g->path, event->start_mark, fault,
                      "nested too deep; no key lies that deep, check the brackets");
    return FW_OK;
}

/* The first pass looks at the events only: it takes time in proportion to the file, where the
 * loader of documents would compare each anchor with all others. */
static fw_status guard_events(guard *g, yaml_parser_t *parser, fw_fault *fault)
{
    for (bool more = true; more;) {
        yaml_event_t event;
        if (!yaml_parser_parse(parser, &event))
            return refuse_parser(g->path, parser, fault);
        more = event.type != YAML_STREAM_END_EVENT;
        fw_status status = guard_event(g, &event, fault);
        yaml_event_delete(&event);
        FW_TRY(status);
    }
    if (g->documents == 0)
        return fw_fault_set(fault, FW_INPUT, "%s:1: holds no key; is it the right file?", g->path);
    return FW_OK;
}

static fw_status load_document(const char *path, yaml_parser_t *parser, yaml_document_t *document,
                               fw_fault *fault)
{
    if (!yaml_parser_load(parser, document))
        return refuse_parser(path, parser, fault);
    const yaml_node_t *root = yaml_document_get_root_node(document);
    if (root != NULL && root->type == YAML_MAPPING_NODE)
        return FW_OK;
    yaml_document_delete(document);
    return fw_fault_set(fault, FW_INPUT, "%s:1: holds no keys; write lines such as 'key: value'",
                        path);
}

/* Runs one pass over the text: the guard where document is NULL, else the loader. */
static fw_status pass(const char *path, const char *text, size_t size, yaml_document_t *document,
                      fw_fault *fault)
{
    yaml_parser_t parser;
    if (!yaml_parser_initialize(&parser))
        return fw_fault_memory(fault, "card");
    yaml_parser_set_encoding(&parser, YAML_UTF8_ENCODING);
    yaml_parser_set_input_string(&parser, (const unsigned char *)text, size);
    guard g = {.path = path};
    fw_status status = document == NULL ? guard_events(&g, &parser, fault)
                                        : load_document(path, &parser, document, fault);
    yaml_parser_delete(&parser);
    return status;
}

static fw_status check_text(const char *path, const char *text, size_t size, fw_fault *fault)
{
    size_t at = fw_text_valid(text, size), line = 1;
    if (at == size)
        return FW_OK;
    for (size_t i = 0; i < at; i++)
        line += text[i] == '\n';
    return fw_fault_set(fault, FW_INPUT, "%s:%zu: %s", path, line,
                        text[at] == '\t' ? "a tab; indent with spaces"
                                         : "no UTF-8 text; save the file as UTF-8");
}

fw_status fw_yaml_load(const char *path, yaml_document_t *document, fw_fault *fault)
{
    char *text;
    size_t size;
    FW_TRY(fw_text_read(path, FW_YAML_LIMIT, &text, &size, fault));
    fw_status status = check_text(path, text, size, fault);
    if (status == FW_OK)
        status = pass(path, text, size, NULL, fault);
    if (status == FW_OK)
        status = pass(path, text, size, document, fault);
    free(text);
    return status;
}
