#include "cards/begin.h"

#include "cards/table.h"
#include "cards/text_read.h"

#include <errno.h>
#include <stdbool.h>
#include <string.h>

enum { NOTE_COLUMN = 34 }; /* where the comment of a key begins */

static void write_head(FILE *file, const fw_begin_facts *facts)
{
    fprintf(file,
            "# A job: what a pixel of the stack is, the cards, the rules for posts, the gate.\n"
            "# The stack shows %d layers of %d x %d px, %d bits of grey; ",
            facts->layers, facts->width_px, facts->height_px, facts->depth_bits);
    if (facts->first_solid_layer < 0)
        fprintf(file, "nothing in it is solid.\n");
    else
        fprintf(file, "the first solid is in layer %d.\n", facts->first_solid_layer);
    fprintf(file,
            "# Masks cannot tell the lines that say \"set this\": correct those first. Without\n"
            "# the cards only geometry can be judged. A line that begins with # is not read.\n");
}

/* The word at a position of "one|two|three". */
static void print_choice(char *out, size_t size, const fw_row *row)
{
    const char *word = row->choices;
    for (int i = 0; i < (int)row->fallback[0]; i++)
        word += strcspn(word, "|") + 1;
    snprintf(out, size, "%.*s", (int)strcspn(word, "|"), word);
}

/* The value that begin proposes: the example, or else what holds where the key is left out. */
static void print_value(char *out, size_t size, const fw_row *row)
{
    if (row->example != NULL)
        snprintf(out, size, "%s", row->example);
    else if (row->type == FW_ROW_CHOICE || row->type == FW_ROW_SWITCH)
        print_choice(out, size, row);
    else if (row->type == FW_ROW_WHOLE)
        snprintf(out, size, "%d", (int)row->fallback[0]);
    else /* in tenths: no row's fallback needs more, and no locale is asked */
        snprintf(out, size, "%d.%d", (int)row->fallback[0], (int)(row->fallback[0] * 10) % 10);
}

static void write_note(FILE *file, const fw_row *row)
{
    const char *unit = row->unit == NULL ? "" : row->unit;
    bool both = row->to_set && row->unit != NULL, any = row->to_set || row->unit != NULL;
    fprintf(file, "# %s%s%s%s%s", row->to_set ? "set this" : "", both ? ", " : "", unit,
            any ? ": " : "", row->help);
    if (row->optional && row->example == NULL)
        fprintf(file, " (this is the default)");
    fputc('\n', file);
}

/* One key. Optional keys without a default stand as comments: their example is nobody's choice. */
static void write_key(FILE *file, const fw_row *row, const char *value, bool active)
{
    const char *name = fw_row_name(row);
    int used =
        fprintf(file, "%s%s%s: %s", name == row->path ? "" : "  ", active ? "" : "# ", name, value);
    fprintf(file, "%*s", used < NOTE_COLUMN ? NOTE_COLUMN - used : 1, "");
    write_note(file, row);
}

static void write_section(FILE *file, const fw_row *row)
{
    int used = fprintf(file, "\n%s:", row->path) - 1;
    fprintf(file, "%*s# %s\n", NOTE_COLUMN - used, "", row->help);
}

/* Puts the pattern into the double quotes of YAML. */
static void quote(char *out, const char *text)
{
    *out++ = '"';
    for (; *text != '\0'; text++) {
        if (*text == '"' || *text == '\\')
            *out++ = '\\';
        *out++ = *text;
    }
    *out++ = '"';
    *out = '\0';
}

static void write_row(FILE *file, const fw_row *row, const char *names)
{
    char value[2 * FW_JOB_PATTERN + 3];
    bool known = strcmp(row->path, "stack.names") == 0 && names[0] != '\0';
    if (row->type == FW_ROW_SECTION) {
        write_section(file, row);
        return;
    }
    if (known)
        quote(value, names);
    else
        print_value(value, sizeof value, row);
    write_key(file, row, value, known || !row->optional || row->example == NULL);
}

fw_status fw_begin_write(FILE *file, const fw_begin_facts *facts, fw_fault *fault)
{
    const char *names = facts->names == NULL ? "" : facts->names;
    if (strlen(names) >= FW_JOB_PATTERN || !fw_text_is_line(names, strlen(names)))
        return fw_fault_set(fault, FW_INPUT,
                            "%s: file names that a job cannot hold; rename the layers", names);
    write_head(file, facts);
    for (size_t i = 0; i < fw_job_table.count; i++)
        write_row(file, &fw_job_table.row[i], names);
    if (fflush(file) != 0 || ferror(file))
        return fw_fault_set(fault, FW_MACHINE, "job: cannot be written (%s)", strerror(errno));
    return FW_OK;
}
