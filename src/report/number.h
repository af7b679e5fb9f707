/* Numbers as text, the same in every locale. */
#ifndef FW_REPORT_NUMBER_H
#define FW_REPORT_NUMBER_H

enum { FW_NUMBER_TEXT = 32 };

/* Writes value with exactly three decimals, "-0.000" as "0.000". Finite, |value| < 1e12. */
void fw_number_thousandths(char out[FW_NUMBER_TEXT], double value);

/* Writes a finite value with at most `digits` (1 .. 15) significant digits, as short as they allow.
 */
void fw_number_digits(char out[FW_NUMBER_TEXT], double value, int digits);

#endif
