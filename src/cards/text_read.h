/* Whole text files in memory, and what may stand in them. */
#ifndef FW_CARDS_TEXT_READ_H
#define FW_CARDS_TEXT_READ_H

#include "fault/fault.h"

#include <stdbool.h>
#include <stddef.h>

/* Reads the plain file at path, of at most limit bytes, into *out (caller frees; terminated by a
 * zero byte that *size does not count). What is missing, unreadable, no plain file or too large is
 * FW_INPUT; *out is NULL then. */
fw_status fw_text_read(const char *path, size_t limit, char **out, size_t *size, fw_fault *fault);

/* Where the first byte lies that is not part of printable UTF-8 text on lines (no control character
 * but line ends, no tab, no overlong form, no surrogate); size when there is none. */
size_t fw_text_valid(const char *text, size_t size);

/* Whether a value is one line of printable UTF-8. */
bool fw_text_is_line(const char *text, size_t size);

#endif
