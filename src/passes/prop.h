/* Raw stack in, supported and rechecked stack out. */
#ifndef FW_PASSES_PROP_H
#define FW_PASSES_PROP_H

#include "passes/pass.h"
#include "stack/output.h"

/* Lifts, places, sizes, routes, draws, writes, reads back and judges. The output folder appears
 * whole or not at all; where the gate refuses, the stack lies in refused/ instead of layers/. rules
 * names the output (its stack is `stack`'s path). *out is the report of the written stack; free it
 * with fw_report_free. FW_OK also when the gate refuses: see out->verdict. */
fw_status fw_prop(fw_pass *pass, const fw_stack *stack, const fw_job *job,
                  const fw_output_rules *rules, fw_report *out, fw_fault *fault);

#endif
