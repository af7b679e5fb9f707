#include "cards/table.h"

#include <string.h>

const char *fw_row_name(const fw_row *row)
{
    const char *dot = strrchr(row->path, '.');
    return dot == NULL ? row->path : dot + 1;
}

bool fw_row_in(const fw_row *row, const fw_row *section)
{
    size_t length = (size_t)(fw_row_name(row) - row->path);
    if (section == NULL)
        return length == 0;
    size_t outer = strlen(section->path);
    return length == outer + 1 && strncmp(row->path, section->path, outer) == 0;
}
