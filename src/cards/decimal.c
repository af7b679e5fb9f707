#include "cards/decimal.h"

#include <limits.h>
#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static bool digit(char c)
{
    return c >= '0' && c <= '9';
}

static const char *skip_digits(const char *text)
{
    while (digit(*text))
        text++;
    return text;
}

static const char *skip_sign(const char *text)
{
    return *text == '-' || *text == '+' ? text + 1 : text;
}

/* The end of the exponent at text, text itself where there is none, NULL where it is broken. */
static const char *skip_exponent(const char *text)
{
    if (*text != 'e' && *text != 'E')
        return text;
    const char *first = skip_sign(text + 1), *end = skip_digits(first);
    return end == first ? NULL : end;
}

/* Whether text is a plain decimal number; *point is where its decimal point stands, or NULL. */
static bool plain(const char *text, const char **point)
{
    const char *first = skip_sign(text), *end = skip_digits(first);
    *point = NULL;
    if (end == first || (*first == '0' && end > first + 1))
        return false;
    if (*end == '.') {
        *point = end;
        const char *fraction = end + 1;
        end = skip_digits(fraction);
        if (end == fraction)
            return false;
    }
    end = skip_exponent(end);
    return end != NULL && *end == '\0';
}

bool fw_decimal(const char *text, double *out)
{
    const char *point;
    if (strlen(text) > FW_DECIMAL_TEXT || !plain(text, &point))
        return false;
    /* strtod wants the host's decimal point: a program that embeds the library may have set one. */
    char local[FW_DECIMAL_TEXT + MB_LEN_MAX + 1];
    const char *sign = localeconv()->decimal_point;
    if (point == NULL)
        snprintf(local, sizeof local, "%s", text);
    else
        snprintf(local, sizeof local, "%.*s%s%s", (int)(point - text), text, sign, point + 1);
    double value = strtod(local, NULL);
    if (!isfinite(value))
        return false;
    *out = value;
    return true;
}

bool fw_whole(const char *text, int32_t *out)
{
    const char *point;
    double value;
    if (*skip_digits(skip_sign(text)) != '\0' || !plain(text, &point) || !fw_decimal(text, &value))
        return false;
    if (value < INT32_MIN || value > INT32_MAX)
        return false;
    *out = (int32_t)value;
    return true;
}
