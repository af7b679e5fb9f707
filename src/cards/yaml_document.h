/* One YAML file as a tree, with everything refused that a card has no use for. */
#ifndef FW_CARDS_YAML_DOCUMENT_H
#define FW_CARDS_YAML_DOCUMENT_H

#include "fault/fault.h"

#include <yaml.h>

enum { FW_YAML_LIMIT = 1 << 20 }; /* bytes */

/* Loads the file's only document; on FW_OK its root is a mapping and the caller ends it with
 * yaml_document_delete. Refused with file and line: more than FW_YAML_LIMIT bytes, tabs, control
 * characters, broken UTF-8, broken YAML, no or several documents, anchors, aliases, tags, nesting
 * deeper than any card's. */
fw_status fw_yaml_load(const char *path, yaml_document_t *document, fw_fault *fault);

#endif
