/* Numbers in files: plain decimal notation and nothing else. */
#ifndef FW_CARDS_DECIMAL_H
#define FW_CARDS_DECIMAL_H

#include <stdbool.h>
#include <stdint.h>

enum { FW_DECIMAL_TEXT = 40 }; /* the longest number that is read, in bytes */

/* Reads all of text as [-+] digits [. digits] [e [-+] digits]. False, and *out untouched, for
 * anything else: units, nan, inf, hexadecimal, a leading zero before a digit (which some readers of
 * YAML take as octal), blanks, and what is too large for a double. The value is the nearest double
 * whatever the locale. */
bool fw_decimal(const char *text, double *out);

/* Reads all of text as [-+] digits within int32_t. */
bool fw_whole(const char *text, int32_t *out);

#endif
