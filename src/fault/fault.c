#include "fault/fault.h"

#include <ctype.h>
#include <stdarg.h>
#include <stdio.h>

static void keep_one_line(char *text)
{
    for (; *text != '\0'; text++) {
        if (iscntrl((unsigned char)*text))
            *text = '?';
    }
}

fw_status fw_fault_set(fw_fault *fault, fw_status status, const char *format, ...)
{
    if (fault == NULL)
        return status;
    va_list arguments;
    va_start(arguments, format);
    (void)vsnprintf(fault->text, sizeof fault->text, format, arguments);
    va_end(arguments);
    keep_one_line(fault->text);
    fault->status = status;
    return status;
}

fw_status fw_fault_memory(fw_fault *fault, const char *holder)
{
    return fw_fault_set(fault, FW_MACHINE,
                        "out of memory, %s, close other programs or lower --threads", holder);
}
