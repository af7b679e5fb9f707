#include "report/number.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

void fw_number_thousandths(char out[FW_NUMBER_TEXT], double value)
{
    long long thousandths = llround(fabs(value) * 1000);
    const char *sign = value < 0 && thousandths > 0 ? "-" : "";
    snprintf(out, FW_NUMBER_TEXT, "%s%lld.%03lld", sign, thousandths / 1000, thousandths % 1000);
}

void fw_number_digits(char out[FW_NUMBER_TEXT], double value, int digits)
{
    char local[FW_NUMBER_TEXT];
    snprintf(local, sizeof local, "%.*g", digits, value == 0 ? 0.0 : value);
    /* What stands between the digits, if anything, is the host's decimal point. */
    size_t whole = strspn(local, "+-0123456789e"), length = whole;
    memcpy(out, local, whole);
    if (local[whole] != '\0') {
        out[length++] = '.';
        whole += strcspn(local + whole, "0123456789");
    }
    snprintf(out + length, FW_NUMBER_TEXT - length, "%s", local + whole);
}
