/* What the commands that judge a stack have in common: opening what they were given, handing out
 * the report. */
#ifndef FW_CLI_DESK_H
#define FW_CLI_DESK_H

#include "cli/arguments.h"
#include "falsework/posts.h"
#include "falsework/survey.h"

/* All handles may be NULL. */
typedef struct fw_desk {
    falsework_job *job;
    falsework_stack *stack, *raw;
    falsework_posts *posts;
    falsework_report *report;
    int64_t decodes;
} fw_desk;

/* Opens job (with the cards of --resin and --machine), stack, and what else was given. */
falsework_status fw_desk_open(const fw_arguments *arguments, fw_desk *out, falsework_fault *fault);

/* Prints the report as --json or as a summary, and the counters of --verbose to stderr. */
falsework_status fw_desk_print(const fw_arguments *arguments, const fw_desk *desk,
                               falsework_fault *fault);

/* The report of a pass that writes no stack: into --out if that was given, then printed. */
falsework_status fw_desk_hand_out(const fw_arguments *arguments, const fw_desk *desk,
                                  falsework_fault *fault);
void fw_desk_close(fw_desk *desk);

#endif
