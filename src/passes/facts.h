/* What the files of a stack show at a first look, for `begin`. */
#ifndef FW_PASSES_FACTS_H
#define FW_PASSES_FACTS_H

#include "cards/begin.h"
#include "stack/folder.h"

/* Decodes layers from the plate on until one shows something. */
fw_status fw_facts_find(const fw_stack *stack, fw_begin_facts *out, fw_fault *fault);

#endif
