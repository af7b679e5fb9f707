#include "cli/arguments.h"

#include "cli/say.h"

#include <errno.h>
#include <stdlib.h>
#include <string.h>

typedef struct option_row {
    const char *name;
    unsigned takes; /* commands whose bits hold one of these take it */
    enum { WORD, NUMBER, FLAG } kind;
    size_t offset;    /* into fw_arguments */
    long least, most; /* for a NUMBER */
} option_row;

#define AT(field) offsetof(fw_arguments, field)

static const option_row options[] = {
    {"--job", FW_TAKES_JOB, WORD, AT(job), 0, 0},
    {"--out", FW_TAKES_OUT, WORD, AT(out), 0, 0},
    {"--replace", FW_TAKES_REPLACE, FLAG, AT(replace), 0, 0},
    {"--posts", FW_TAKES_RECHECK, WORD, AT(posts), 0, 0},
    {"--raw", FW_TAKES_RECHECK, WORD, AT(raw), 0, 0},
    {"--resin", FW_TAKES_RECHECK, WORD, AT(resin), 0, 0},
    {"--machine", FW_TAKES_RECHECK, WORD, AT(machine), 0, 0},
    {"--json", FW_TAKES_RUN | FW_TAKES_PROVE, FLAG, AT(json), 0, 0},
    {"--verbose", FW_TAKES_RUN, FLAG, AT(verbose), 0, 0},
    {"--threads", FW_TAKES_RUN | FW_TAKES_PROVE, NUMBER, AT(threads), 1, 1024},
    {"--batch", FW_TAKES_RUN, NUMBER, AT(batch), 1, 1024},
    {"--memo-mib", FW_TAKES_RUN, NUMBER, AT(memo_MiB), 0, 65536},
    {"--store-mib", FW_TAKES_RUN, NUMBER, AT(store_MiB), 0, 65536},
    {"--help", ~0u, FLAG, AT(help), 0, 0},
};

static const option_row *find_option(const fw_command *command, const char *word)
{
    for (size_t i = 0; i < sizeof options / sizeof *options; i++) {
        if (strcmp(options[i].name, word) == 0 && (options[i].takes & command->takes) != 0)
            return &options[i];
        if (strcmp(options[i].name, word) == 0 && options[i].takes == ~0u)
            return &options[i];
    }
    return NULL;
}

static bool parse_number(const option_row *row, const char *word, int *out)
{
    char *end = NULL;
    errno = 0;
    const long value = strtol(word, &end, 10);
    if (end == word || *end != '\0' || errno != 0 || value < row->least || value > row->most) {
        fw_say("%s \"%s\", command line, give a whole number from %ld to %ld", row->name, word,
               row->least, row->most);
        return false;
    }
    *out = (int)value;
    return true;
}

/* Takes the option at words[*at]; moves *at past its value. */
static bool take_option(const option_row *row, int count, char **words, int *at, fw_arguments *out)
{
    void *field = (char *)out + row->offset;
    if (row->kind == FLAG) {
        *(bool *)field = true;
        return true;
    }
    if (*at + 1 >= count) {
        fw_say("%s without a value, command line, give one after it", row->name);
        return false;
    }
    const char *value = words[++*at];
    if (row->kind == NUMBER)
        return parse_number(row, value, field);
    if (*(const char **)field != NULL) {
        fw_say("%s twice, command line, give it once", row->name);
        return false;
    }
    *(const char **)field = value;
    return true;
}

static bool take_word(const fw_command *command, const char *word, fw_arguments *out)
{
    if (word[0] == '-' && word[1] != '\0') {
        fw_say("unknown option %s, command line, see falsework %s --help", word, command->name);
        return false;
    }
    if ((command->takes & FW_TAKES_PROVE) != 0) {
        fw_say("\"%s\" is too much, command line, %s takes no stack", word, command->name);
        return false;
    }
    if (out->stack != NULL) {
        fw_say("more than one stack (\"%s\", \"%s\"), command line, give one folder", out->stack,
               word);
        return false;
    }
    out->stack = word;
    return true;
}

static bool complete(const fw_command *command, const fw_arguments *out)
{
    const char *missing = NULL;
    if (out->stack == NULL && (command->takes & FW_TAKES_PROVE) == 0)
        missing = "the stack (a folder of masks)";
    else if ((command->takes & FW_NEEDS_JOB) != 0 && out->job == NULL)
        missing = "--job JOB.yaml";
    else if ((command->takes & FW_NEEDS_OUT) != 0 && out->out == NULL)
        missing = "--out FOLDER";
    if (missing != NULL)
        fw_say("%s is missing, command line, see falsework %s --help", missing, command->name);
    return missing == NULL;
}

bool fw_arguments_parse(const fw_command *command, int count, char **words, fw_arguments *out)
{
    *out = (fw_arguments){.threads = -1, .batch = -1, .memo_MiB = -1, .store_MiB = -1};
    for (int at = 0; at < count; at++) {
        const option_row *row = find_option(command, words[at]);
        const bool taken = row != NULL ? take_option(row, count, words, &at, out)
                                       : take_word(command, words[at], out);
        if (!taken)
            return false;
    }
    return out->help || complete(command, out);
}
