/* What the command says: one line of trouble to stderr, results to stdout, progress to a terminal.
 */
#ifndef FW_CLI_SAY_H
#define FW_CLI_SAY_H

#include "cli/arguments.h"
#include "falsework/survey.h"

/* "falsework: ..." and a newline on stderr, after clearing a progress line. */
void fw_say(const char *format, ...) __attribute__((format(printf, 1, 2)));

/* Says the fault; returns its exit status (128 + signal when one stopped us). */
int fw_say_fault(const falsework_fault *fault);

/* A falsework_writer to stdout. */
falsework_status fw_say_out(void *unused, const char *bytes, size_t count);

/* Flushes stdout: the exit status, or 3 with a line when stdout is closed or full. */
int fw_say_done(int status);

/* Options of a pass: limits from the command line, progress where stderr is a terminal, signals. */
falsework_options fw_say_options(const fw_arguments *arguments, int64_t *decodes);

/* From now on INT and TERM ask the pass to stop instead of ending the process. */
void fw_say_catch_signals(void);

#endif
